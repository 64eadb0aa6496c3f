//! A trade-off in the form somebody asked for.
//!
//! The terminal form is a grid of delays, schemes down, limits on gate inputs
//! across, the sweet spot between `>` and `<`; it fits 80 columns with the limits
//! there are. YAML and JSON hold the whole record.

use super::Page;
use super::table::wrapped;
use super::yaml;
use crate::audit::tradeoff::{PointRecord, TradeoffRecord};
use std::fmt::Write as _;
use std::io::{self, Write};

/// The forms of a trade-off.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum TradeoffForm {
    /// For a terminal.
    Table,
    /// One YAML document.
    Yaml,
    /// One line of JSON.
    Json,
}

/// Writes a trade-off.
///
/// # Errors
/// When `out` cannot be written; the error keeps its kind.
pub fn write_tradeoff(
    record: &TradeoffRecord,
    form: TradeoffForm,
    page: Page,
    out: &mut dyn Write,
) -> io::Result<()> {
    match form {
        TradeoffForm::Table => out.write_all(table(record, page).as_bytes()),
        TradeoffForm::Yaml => yaml::write(record, out),
        TradeoffForm::Json => {
            serde_json::to_writer(&mut *out, record).map_err(io::Error::from)?;
            out.write_all(b"\n")
        }
    }
}

fn table(record: &TradeoffRecord, page: Page) -> String {
    let width = usize::from(page.width.max(40));
    let mut text = String::new();
    paragraph(&mut text, &opening(record), width);
    text.push('\n');
    let asked = format!(
        "{} to the last result, by the most inputs a gate may have:",
        capital(&record.unit)
    );
    paragraph(&mut text, &asked, width);
    text.push('\n');
    grid(&mut text, record);
    text.push('\n');
    paragraph(&mut text, &record.sentence, width);
    text.push('\n');
    paragraph(&mut text, &record.two_gates.sentence, width);
    if let Some(left_out) = &record.left_out {
        text.push('\n');
        paragraph(&mut text, &format!("{}.", capital(left_out)), width);
    }
    text
}

fn opening(record: &TradeoffRecord) -> String {
    let TradeoffRecord {
        bits,
        carry_in,
        arrivals: [earliest, latest],
        delay_model,
        new_gates,
        measured,
        ..
    } = record;
    let carry_in = if *carry_in {
        "with carry-in"
    } else {
        "without carry-in"
    };
    let arrivals = if earliest == latest {
        format!("all inputs ready at {earliest}")
    } else {
        format!("inputs ready from {earliest} to {latest}")
    };
    format!(
        "Addition of {bits} bits {carry_in}, {arrivals}; delay model {delay_model}, {new_gates} \
         gates; {measured} variations built and measured."
    )
}

fn grid(text: &mut String, record: &TradeoffRecord) {
    let names = record.schemes.iter().map(|row| row.scheme.len());
    let name = names.max().unwrap_or(0);
    let figures = record.schemes.iter().flat_map(|row| &row.points).flatten();
    let figure = figures.map(|point| point.delay.to_string().len()).max();
    // A blank and the two marks.
    let column = figure.unwrap_or(1).max(2) + 3;
    let _ = write!(text, "  {:name$}", "");
    for limit in &record.gate_inputs {
        let _ = write!(text, "{limit:>0$} ", column - 1);
    }
    text.truncate(text.trim_end().len());
    text.push('\n');
    let mut marked = false;
    for row in &record.schemes {
        let _ = write!(text, "  {:name$}", row.scheme);
        for point in &row.points {
            let cell = match point {
                None => "- ".to_owned(),
                Some(point) if !marked && is_spot(record, point) => {
                    marked = true;
                    format!(">{}<", point.delay)
                }
                Some(point) => format!("{} ", point.delay),
            };
            let _ = write!(text, "{cell:>column$}");
        }
        text.truncate(text.trim_end().len());
        text.push('\n');
    }
}

fn is_spot(record: &TradeoffRecord, point: &PointRecord) -> bool {
    record.sweet_spot.as_ref() == Some(point)
}

fn capital(text: &str) -> String {
    let mut characters = text.chars();
    let first = characters.next().map(|c| c.to_uppercase().to_string());
    first.unwrap_or_default() + characters.as_str()
}

fn paragraph(text: &mut String, sentence: &str, width: usize) {
    for line in wrapped(sentence, width) {
        text.push_str(&line);
        text.push('\n');
    }
}
