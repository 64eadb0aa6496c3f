//! Runs `explain`: prints a rule's entry in the registry, or the list of rules.

use super::Status;
use super::terminal::complain;
use crate::audit::findings::{self, RULES, Rule};
use crate::source::escape;
use std::fmt::Write as _;
use std::io::{ErrorKind, Write};

/// Columns of the text.
const WIDTH: usize = 80;

/// Runs the command.
pub fn run(rule: Option<&str>) -> Status {
    let text = match rule {
        None => list(),
        Some(slug) => match findings::find(slug) {
            Some(rule) => entry(rule),
            None => {
                let hint = match findings::nearest(slug) {
                    Some(near) => format!("did you mean {}?", near.slug),
                    None => "carrywise explain lists them all".to_owned(),
                };
                let slug: String = slug.chars().take(64).collect();
                complain(&format!(
                    "there is no rule {}; {hint}",
                    escape(slug.as_bytes())
                ));
                return Status::Unusable;
            }
        },
    };
    let mut stdout = std::io::stdout().lock();
    match stdout
        .write_all(text.as_bytes())
        .and_then(|()| stdout.flush())
    {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => {
            complain(&format!("cannot write to standard output: {error}"));
            Status::Unusable
        }
        _ => Status::Done,
    }
}

fn list() -> String {
    let mut text = String::new();
    for rule in RULES {
        let _ = writeln!(text, "{} ({})", rule.slug, rule.severity.word());
        folded(&mut text, "  ", rule.what);
    }
    text
}

fn entry(rule: &Rule) -> String {
    let Rule {
        slug,
        severity,
        what,
        why,
        advice,
        leaves_alone,
        example,
    } = rule;
    let mut text = format!("{slug} ({})\n\n", severity.word());
    for (title, said) in [
        ("", what),
        ("Why it costs", why),
        ("What to do", advice),
        ("What it leaves alone", leaves_alone),
    ] {
        if !title.is_empty() {
            let _ = writeln!(text, "\n{title}");
        }
        folded(&mut text, if title.is_empty() { "" } else { "  " }, said);
    }
    text.push_str("\nExample\n");
    for line in example.lines() {
        let _ = writeln!(text, "  {line}");
    }
    text
}

fn folded(text: &mut String, indent: &str, said: &str) {
    let mut line = indent.to_owned();
    for word in said.split_whitespace() {
        if line.len() > indent.len() {
            if line.len() + 1 + word.len() > WIDTH {
                let _ = writeln!(text, "{line}");
                indent.clone_into(&mut line);
            } else {
                line.push(' ');
            }
        }
        line.push_str(word);
    }
    let _ = writeln!(text, "{line}");
}
