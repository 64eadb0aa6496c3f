//! State tables within their model: begun, ended, and what they come to.
//!
//! A table beside logic says the same as the logic and is passed over. Without logic
//! the model is a black box between its ports. The lines themselves are checked by
//! `kiss`; clauses B80 and following of `grammar-notes/blif.md`.

use super::grammar::{self, Called, Statement};
use super::kiss::{self, Table};
use super::lines::Lines;
use super::model::Binding;
use super::parse::{Reader, Section};
use super::tally::Oddity;
use crate::netlist::Initial;
use crate::source::{Diagnostic, Place, quote};

impl Reader {
    pub(super) fn state_table_line(&mut self, lines: &Lines<'_>) {
        let text = lines.text();
        if kiss::ends(text) {
            if let Err(fault) = grammar::statement(text) {
                self.fault(lines, fault);
            }
            return self.close_table();
        }
        if let Ok(Statement::Model(name)) = grammar::statement(text)
            && grammar::is_statement(text)
        {
            return self.begin_model(lines, name);
        }
        if let Err(fault) = self.table.line(text, lines.line()) {
            self.fault(lines, fault);
        }
    }

    pub(super) fn open_table(&mut self, line: u32) {
        let model = self.model(line);
        if let Some(first) = model.table {
            let error = Diagnostic::error(
                self.file_name(),
                Place::line(line),
                "expected one state table in a model, found a second",
                "give each state machine a model of its own",
            );
            let error = error.and(first.line, "the first begins here");
            self.errors.push(error);
        }
        self.table = Table {
            line,
            ..Table::default()
        };
        self.section = Section::StateTable;
    }

    fn close_table(&mut self) {
        let table = self.table;
        self.section = Section::Logic;
        if let Some((rows, line)) = table.products
            && rows != table.rows
        {
            let place = || Place::line(line);
            self.tally.count(Oddity::TableRows, b"", 1, place);
        }
        self.model(table.line).table = Some(table);
    }

    /// What belongs to a state table where there is none.
    #[cold]
    pub(super) fn without_table(&mut self, lines: &Lines<'_>, found: &str) {
        let error = Diagnostic::error(
            self.file_name(),
            Place::line(lines.line()),
            format!("expected a state table (`.start_kiss`) before this line, found {found}"),
            "put it after the table in the same model, or take it out",
        );
        self.errors.push(error);
    }

    /// A state table at the end of its model: logic beside it says the same, and
    /// without logic the model is a black box between its ports.
    pub(super) fn settle_table(&mut self) {
        let Some(model) = self.models.last() else {
            return;
        };
        let Some(table) = model.table else { return };
        let name = model.name;
        if model.has_logic() {
            let place = || Place::line(table.line);
            return self.tally.count(Oddity::StateTable, b"", 1, place);
        }
        let clocks = &model.clocks;
        let inputs = model
            .inputs
            .iter()
            .filter(|port| !clocks.contains(&port.net));
        let sides = [
            (".i", "inputs", table.inputs, inputs.count()),
            (".o", "outputs", table.outputs, model.outputs.len()),
        ];
        // A faulty table has been told already.
        let sides = sides.iter().filter(|_| self.errors.is_empty());
        for &(word, side, stated, listed) in sides {
            if stated.map(u64::from) != Some(listed as u64) {
                let found = stated.map_or("none".to_owned(), |n| n.to_string());
                let error = Diagnostic::error(
                    self.file_name(),
                    Place::line(table.line),
                    format!(
                        "expected `{word} {listed}` in this state table, as many as model {} has \
                         {side}, found {found}",
                        quote(self.builder.names().bytes(name))
                    ),
                    "a state table without logic reads every listed input and drives every output",
                );
                self.errors.push(error);
                return;
            }
        }
        let ports = model.inputs.iter().chain(&model.outputs);
        let mut bindings: Vec<Binding> = Vec::new();
        for port in ports {
            bindings.push(Binding {
                formal: model.nets[port.net as usize],
                actual: port.net,
            });
        }
        let subject = self.builder.names().bytes(name);
        let place = || Place::line(table.line);
        self.tally.count(Oddity::StateTableAlone, subject, 1, place);
        self.model(table.line).bindings = bindings;
        self.add_instance(table.line, Called::StateTable, name, Initial::Unknown);
    }
}
