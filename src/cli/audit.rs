//! Runs `audit`: every file read, audited and reported, one after another. A
//! file that fails does not stop the others.

use super::Status;
use super::options::{AuditArguments, Delay, SharedArguments};
use super::search::SearchFolders;
use super::targets::{self, Target};
use super::terminal::{colour_on_stderr, complain, page, say};
use crate::audit::record::Audit;
use crate::audit::{self, Asserting, AuditError, Origin};
use crate::format::assumptions::{self, AssumptionsFile};
use crate::format::files::FileAccess;
use crate::format::{self, Parsed};
use crate::netlist::Netlist;
use crate::netlist::cell::{Cells, Unbound};
use crate::report::{self, Form, MOST_CHARACTERS, Page};
use crate::source::{self, Diagnostic, Limits, Place, ReadError, Source};
use crate::timing::DelayModel;
use std::fs::File;
use std::io::{self, BufWriter, ErrorKind, Write};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Warnings told of a cell library.
const LIBRARY_WARNINGS: usize = 20;
/// Fewest characters for one netlist when several share a Markdown document.
const FEWEST_CHARACTERS: usize = 4_000;

/// Runs the command.
pub fn run(arguments: &AuditArguments) -> Status {
    let stdin = arguments.files.iter().filter(|file| is_stdin(file));
    if stdin.count() > 1 {
        complain("`-` is given twice; standard input can be read once only");
        return Status::Unusable;
    }
    let named: Vec<PathBuf> = arguments
        .files
        .iter()
        .filter(|f| !is_stdin(f))
        .cloned()
        .collect();
    let delays = match &arguments.shared.delay {
        Delay::File(path) => Some(path),
        Delay::Model(_) => None,
    };
    let besides = arguments
        .shared
        .assume
        .iter()
        .chain(&arguments.shared.cells)
        .chain(delays);
    let read_besides = named.iter().chain(besides).cloned();
    let read_besides: Vec<PathBuf> = read_besides.collect();
    let mut targets = match targets::open(&arguments.report, &read_besides) {
        Ok(targets) => targets,
        Err(error) => {
            complain(&format!("{error:#}"));
            return Status::Unusable;
        }
    };
    let inputs = match Inputs::of(&arguments.shared) {
        Ok(inputs) => inputs,
        Err(worse) => return worse,
    };
    let share = (MOST_CHARACTERS / arguments.files.len()).max(FEWEST_CHARACTERS);
    let page = Page {
        characters: share.min(MOST_CHARACTERS),
        ..page()
    };
    let mut stdout = Stdout::new(arguments.shared.form.form());
    let mut status = Status::Done;
    for file in &arguments.files {
        // A fault of ours in one netlist is told as such, and the others go on.
        let audited = catch_unwind(AssertUnwindSafe(|| {
            with_netlist(
                file,
                &arguments.shared,
                &inputs,
                |netlist, origin, asserting| {
                    audit::audit_under(
                        netlist,
                        origin,
                        &arguments.auditing(inputs.model),
                        asserting,
                    )
                },
            )
        }));
        let audited = audited.unwrap_or_else(|_| {
            complain(&format!(
                "{}: a fault of carrywise itself, told above; the netlist is not to blame",
                shown(file)
            ));
            Err(Status::Fault)
        });
        let written = audited.and_then(|audit| {
            write(&audit, page, &mut stdout, &mut targets)?;
            let fails = arguments.fail_on.least();
            let held = fails.is_none_or(|least| {
                let mut findings = audit.findings.iter();
                !findings.any(|finding| !finding.accepted && finding.severity >= least)
            });
            if held { Ok(()) } else { Err(Status::NotHeld) }
        });
        if let Err(worse) = written {
            status = status.max(worse);
        }
    }
    if let Err(worse) = stdout.finish() {
        status = status.max(worse);
    }
    for target in targets {
        if let Err(error) = target.finish() {
            complain(&format!("{error:#}"));
            status = status.max(Status::Unusable);
        }
    }
    status
}

/// What is read beside the netlists, once for all of them.
pub(super) struct Inputs {
    pub(super) model: DelayModel,
    cells: Option<Cells>,
    asserted: Option<AssumptionsFile>,
}

impl Inputs {
    pub(super) fn of(arguments: &SharedArguments) -> Result<Self, Status> {
        let (model, gives_cells) = delay_model(&arguments.delay)?;
        let delays = match &arguments.delay {
            Delay::File(path) => Some(path),
            Delay::Model(_) => None,
        };
        // A library of delays also says what its cells do.
        let from = arguments.cells.as_ref().or(delays.filter(|_| gives_cells));
        let library = |file: &PathBuf| cells(file, arguments.quiet);
        let mut cells = from.map(library).transpose()?;
        let asserted = arguments.assume.as_deref().map(assume).transpose()?;
        if let Some(file) = &asserted {
            declare_carry(file, cells.as_mut(), arguments)?;
        }
        Ok(Self {
            model,
            cells,
            asserted,
        })
    }
}

fn is_stdin(file: &Path) -> bool {
    file == Path::new("-")
}

/// A file name as it may be shown.
fn shown(file: &Path) -> String {
    source::escape(file.to_string_lossy().as_bytes())
}

/// Reads a cell library. What is odd in it is told like the warnings of a netlist,
/// the first few and a count.
fn cells(file: &Path, quiet: bool) -> Result<Cells, Status> {
    let name = file.to_string_lossy();
    let source = load_or_say(file, &name, Limits::for_gates(0))?;
    match format::cells::read(&source) {
        Ok(library) => {
            let warnings = library.warnings.iter().filter(|_| !quiet);
            for warning in warnings.clone().take(LIBRARY_WARNINGS) {
                say(&warning.render(&source, colour_on_stderr()));
            }
            if let Some(more @ 1..) = warnings.count().checked_sub(LIBRARY_WARNINGS) {
                complain(&format!("{}: {more} more warnings like these", shown(file)));
            }
            Ok(library.cells)
        }
        Err(errors) => {
            for error in &errors {
                say(&error.render(&source, colour_on_stderr()));
            }
            Err(Status::Unusable)
        }
    }
}

/// Puts the carry cells that the assumptions declare into the library.
fn declare_carry(
    file: &AssumptionsFile,
    cells: Option<&mut Cells>,
    arguments: &SharedArguments,
) -> Result<(), Status> {
    let declared = &file.assumptions.carry_cells;
    if declared.is_empty() {
        return Ok(());
    }
    let (Some(cells), Some(library)) = (cells, &arguments.cells) else {
        complain("`carry_cells` is given without a library; name one with --cells");
        return Err(Status::Unusable);
    };
    cells.declare_carry(declared).map_err(|misfit| {
        let told = file.misfit(&misfit, &library.to_string_lossy());
        say(&told.render(file.source(), colour_on_stderr()));
        Status::Unusable
    })
}

/// The delay model asked for, and whether its file also gives functions of cells.
pub(super) fn delay_model(delay: &Delay) -> Result<(DelayModel, bool), Status> {
    let file = match delay {
        Delay::Model(model) => return Ok((*model, false)),
        Delay::File(file) => file,
    };
    let name = file.to_string_lossy();
    let source = load_or_say(file, &name, Limits::for_gates(0))?;
    match format::delays::read(&source) {
        Ok(table) => {
            let gives_cells = format::delays::is_library(&source);
            Ok((DelayModel::table(table), gives_cells))
        }
        Err(error) => {
            say(&error.render(&source, colour_on_stderr()));
            Err(Status::Unusable)
        }
    }
}

/// Reads a file of assumptions.
fn assume(file: &Path) -> Result<AssumptionsFile, Status> {
    let name = file.to_string_lossy();
    let source = load_or_say(file, &name, Limits::for_gates(0))?;
    assumptions::read(source.clone()).map_err(|error| {
        say(&error.render(&source, colour_on_stderr()));
        Status::Unusable
    })
}

/// Reads one netlist and gives it to `make` with where it came from and what is
/// assumed of it. What goes wrong is told.
pub(super) fn with_netlist<T>(
    file: &Path,
    arguments: &SharedArguments,
    inputs: &Inputs,
    make: impl FnOnce(&Netlist, &Origin, Option<&Asserting<'_>>) -> Result<T, AuditError>,
) -> Result<T, Status> {
    let (cells, asserted) = (inputs.cells.as_ref(), inputs.asserted.as_ref());
    let colour = colour_on_stderr();
    let name = file.to_string_lossy().into_owned();
    let limits = Limits::for_gates(arguments.max_gates);
    let source = load_or_say(file, &name, limits)?;
    let folders = SearchFolders::new(file, &arguments.search_dir, limits).map_err(|error| {
        complain(&error);
        Status::Unusable
    })?;
    let folders = Arc::new(folders);
    // A message may be about a file that the netlist names.
    let tell = |message: &Diagnostic| {
        let other = folders
            .opened(&message.file)
            .filter(|_| message.file != name);
        say(&message.render(other.as_deref().unwrap_or(&source), colour));
    };
    let reading = arguments.reading(Arc::clone(&folders) as Arc<dyn FileAccess>);
    let parsed = format::read(&source, &reading).map_err(|errors| {
        errors.iter().for_each(tell);
        Status::Unusable
    })?;
    let Parsed {
        netlist,
        format,
        warnings,
        constraints,
    } = parsed;
    let times = constraints.times(&netlist);
    let netlist = netlist.with_times(times);
    if !arguments.quiet {
        warnings.iter().for_each(tell);
    }
    let netlist = match cells {
        None => netlist,
        Some(cells) => {
            cells
                .bind(netlist, arguments.max_gates)
                .map_err(|fault| {
                    let (place, help) = match &fault {
                        Unbound::NoPin { line, .. } => {
                            (Place::line(*line), "compare with the library")
                        }
                        Unbound::Twice { line, .. } => {
                            (Place::line(*line), "leave one of the connections out")
                        }
                        Unbound::TooLarge { .. } => {
                            (Place::File, "raise --max-gates if this is meant")
                        }
                    };
                    tell(&Diagnostic::error(&name, place, fault.to_string(), help));
                    Status::Unusable
                })?
                .netlist
        }
    };
    let origin = Origin {
        file: name,
        format,
        sha256: audit::digest(&source.bytes),
    };
    // The text is not needed any more, and can be as large as the netlist.
    drop(source);
    let asserting = asserted.map(|file| Asserting {
        assumptions: &file.assumptions,
        sha256: audit::digest(&file.source().bytes),
    });
    make(&netlist, &origin, asserting.as_ref()).map_err(|error| {
        match (&error, asserted) {
            (AuditError::Misfit(misfit), Some(file)) => {
                let told = file.misfit(misfit, &origin.file);
                say(&told.render(file.source(), colour));
            }
            _ => complain(&format!("{}: {error}", shown(file))),
        }
        Status::Unusable
    })
}

pub(super) fn load_or_say(file: &Path, name: &str, limits: Limits) -> Result<Source, Status> {
    load(file, name, limits).map_err(|error| {
        let nothing = Source {
            name: name.to_owned(),
            bytes: Vec::new(),
        };
        let fault = match error {
            ReadError::Packed(fault) => *fault,
            ReadError::Io(error) => {
                let text = format!("cannot read the file: {error}");
                let help = "check its name and that it may be read";
                Diagnostic::error(name, Place::File, text, help)
            }
        };
        say(&fault.render(&nothing, colour_on_stderr()));
        Status::Unusable
    })
}

fn load(file: &Path, name: &str, limits: Limits) -> Result<Source, ReadError> {
    if is_stdin(file) {
        source::read_unpacked(name, io::stdin().lock(), limits)
    } else {
        source::read_unpacked(name, File::open(file)?, limits)
    }
}

fn write(
    audit: &Audit,
    page: Page,
    stdout: &mut Stdout,
    targets: &mut Vec<Target>,
) -> Result<(), Status> {
    let mut written = stdout.add(audit, page);
    // A target that cannot be written is dropped, and the old file stays.
    targets.retain_mut(|target| match target.add(audit, page) {
        Ok(()) => true,
        Err(error) => {
            complain(&format!("{error:#}"));
            written = Err(Status::Unusable);
            false
        }
    });
    written
}

/// Standard output. When its reader has gone, nothing more is written and
/// nothing is said about it.
struct Stdout {
    form: Form,
    out: BufWriter<io::Stdout>,
    documents: usize,
    closed: bool,
}

impl Stdout {
    fn new(form: Form) -> Self {
        Self {
            form,
            out: BufWriter::new(io::stdout()),
            documents: 0,
            closed: false,
        }
    }

    fn add(&mut self, audit: &Audit, page: Page) -> Result<(), Status> {
        if self.closed {
            return Ok(());
        }
        let separator: &[u8] = match self.form {
            Form::Table | Form::Markdown if self.documents > 0 => b"\n",
            _ => b"",
        };
        self.documents += 1;
        let written = self
            .out
            .write_all(separator)
            .and_then(|()| report::write(audit, self.form, page, &mut self.out))
            .and_then(|()| self.out.flush());
        self.settle(written)
    }

    fn finish(mut self) -> Result<(), Status> {
        if self.closed {
            return Ok(());
        }
        let flushed = self.out.flush();
        self.settle(flushed)
    }

    fn settle(&mut self, written: io::Result<()>) -> Result<(), Status> {
        match written {
            Ok(()) => Ok(()),
            Err(error) => {
                self.closed = true;
                if error.kind() == ErrorKind::BrokenPipe {
                    return Ok(());
                }
                complain(&format!("cannot write to standard output: {error}"));
                Err(Status::Unusable)
            }
        }
    }
}
