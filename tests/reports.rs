//! Reports.
mod samples;
use carrywise::report::{Form, Page, write};
fn show(form: Form, audit: &carrywise::audit::record::Audit) -> String {
    let mut out = Vec::new();
    write(audit, form, Page::default(), &mut out).unwrap();
    String::from_utf8(out).unwrap()
}
#[test]
fn look() {
    println!("{}", show(Form::Table, &samples::tide_logger()));
    println!("{}", show(Form::Markdown, &samples::tide_logger()));
    println!("{}", show(Form::Table, &samples::hostile()));
    println!("{}", show(Form::Markdown, &samples::hostile()));
}
