//! The further files that `.search` lines name.
//!
//! Depth first on an explicit stack: a file is read whole, then the files it names,
//! one after the other. A file is read once however often it is named; one that
//! leads back to itself is refused, since nobody can have meant it.
//!
//! Invariant: nothing is opened here. Whether a file may be read at all is decided
//! by the [`FileAccess`] that the caller handed in.

use super::parse::{Reader, Search};
use crate::format::files::{FileAccess, Refusal};
use crate::format::{Format, detect};
use crate::source::{Diagnostic, escape, quote};
use rustc_hash::FxHashMap;
use std::path::{Path, PathBuf};

/// Most files of one netlist.
const MOST_FILES: usize = 1000;

/// A file whose searches are being followed.
struct Open {
    path: PathBuf,
    file: usize,
    searches: std::vec::IntoIter<Search>,
}

/// Reads what the main file, which has been read, asks for.
pub(super) fn read_all(reader: &mut Reader, access: &dyn FileAccess) {
    if reader.searches.is_empty() {
        return;
    }
    let main = access.main();
    // By path: whether its searches are still being followed.
    let mut known = FxHashMap::from_iter([(main.clone(), true)]);
    let mut stack = vec![Open {
        path: main,
        file: 0,
        searches: std::mem::take(&mut reader.searches).into_iter(),
    }];
    while let Some(open) = stack.last_mut() {
        if reader.has_enough_errors() {
            return;
        }
        let Some(search) = open.searches.next() else {
            known.insert(open.path.clone(), false);
            stack.pop();
            continue;
        };
        let from = open.file;
        let path = match access.locate(&open.path, &search.wanted) {
            Ok(path) => path,
            Err(refusal) => {
                refuse(reader, from, &search, refusal);
                continue;
            }
        };
        match known.get(&path) {
            Some(true) => {
                let refusal = in_a_circle(reader, &stack, &path);
                refuse(reader, from, &search, refusal);
                continue;
            }
            Some(false) => continue,
            None => {}
        }
        if known.len() >= MOST_FILES {
            let refusal = Refusal {
                found: format!("more than {MOST_FILES} files"),
                help: "put the models into fewer files".to_owned(),
            };
            return refuse(reader, from, &search, refusal);
        }
        match access.open(&path) {
            Ok(source) => match detect(&source) {
                Ok(Format::Blif) => {
                    reader.file(&source);
                    known.insert(path.clone(), true);
                    stack.push(Open {
                        path,
                        file: reader.files.len() - 1,
                        searches: std::mem::take(&mut reader.searches).into_iter(),
                    });
                }
                Ok(_) => refuse(reader, from, &search, not_blif()),
                Err(error) => reader.errors.push(error),
            },
            Err(refusal) => refuse(reader, from, &search, refusal),
        }
    }
}

fn not_blif() -> Refusal {
    Refusal {
        found: "an AIGER file".to_owned(),
        help: "only BLIF files hold models to take in".to_owned(),
    }
}

#[cold]
fn in_a_circle(reader: &Reader, stack: &[Open], path: &Path) -> Refusal {
    let start = stack.iter().position(|open| open.path == path);
    let mut told: Vec<String> = stack[start.unwrap_or(0)..]
        .iter()
        .map(|open| escape(reader.files[open.file].as_bytes()))
        .collect();
    told.extend(told.first().cloned());
    Refusal {
        found: format!("files in a circle: {}", told.join(" -> ")),
        help: "take one of the `.search` lines out; models of a file that is read already need \
               none"
            .to_owned(),
    }
}

#[cold]
fn refuse(reader: &mut Reader, from: usize, search: &Search, refusal: Refusal) {
    let error = Diagnostic::error(
        &reader.files[from],
        search.place,
        format!(
            "expected a BLIF file that may be read as {}, found {}",
            quote(&search.wanted),
            refusal.found
        ),
        refusal.help,
    );
    reader.errors.push(error);
}
