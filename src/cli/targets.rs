//! Report files: opened before the long work, never half-written.
//!
//! A target is written beside its final name and renamed into place once it is
//! complete, so that whoever reads the old report meanwhile sees the old report,
//! and an interrupted run leaves it as it was. What is not an ordinary file (a
//! pipe, a device) cannot be replaced and is written directly.

use crate::audit::record::Audit;
use crate::report::{self, Form, Page};
use anyhow::{Context, Result, bail};
use std::fs::{File, OpenOptions};
use std::io::{BufWriter, Write};
use std::path::{Path, PathBuf};

/// One report file.
pub struct Target {
    form: Form,
    path: PathBuf,
    out: BufWriter<File>,
    /// The name it is written under until it is complete.
    part: Option<Part>,
    documents: usize,
}

/// A file that vanishes unless it is renamed.
struct Part(PathBuf);

impl Drop for Part {
    fn drop(&mut self) {
        let _ = std::fs::remove_file(&self.0);
    }
}

/// The form a report file's extension asks for.
fn form_of(path: &Path) -> Result<Form> {
    let extension = path.extension().and_then(|e| e.to_str()).unwrap_or("");
    match extension.to_ascii_lowercase().as_str() {
        "md" => Ok(Form::Markdown),
        "yaml" => Ok(Form::Yaml),
        "json" => Ok(Form::Json),
        _ => bail!(
            "--report {}: the extension must be .md, .yaml or .json, which says the form",
            path.display()
        ),
    }
}

/// Opens every report file, or none. `inputs` may not be among them.
///
/// # Errors
/// When a path has no form, stands twice, is an input, or cannot be written.
pub fn open(paths: &[PathBuf], inputs: &[PathBuf]) -> Result<Vec<Target>> {
    let mut targets: Vec<Target> = Vec::new();
    for given in paths {
        let form = form_of(given)?;
        // Through a link to the file itself, which is what gets replaced.
        let path = given.canonicalize().unwrap_or_else(|_| given.clone());
        if inputs
            .iter()
            .any(|input| input.canonicalize().is_ok_and(|i| i == path))
        {
            bail!("--report {} would overwrite an input", given.display());
        }
        if targets.iter().any(|target| target.path == path) {
            bail!("--report {} is given twice", given.display());
        }
        let target = Target::open(form, path);
        targets.push(target.with_context(|| format!("cannot write {}", given.display()))?);
    }
    Ok(targets)
}

impl Target {
    fn open(form: Form, path: PathBuf) -> Result<Self> {
        let known = std::fs::metadata(&path).ok();
        if known.as_ref().is_some_and(|known| known.is_dir()) {
            bail!("it is a folder");
        }
        let (out, part) = if known.as_ref().is_some_and(|known| !known.is_file()) {
            (OpenOptions::new().write(true).open(&path)?, None)
        } else {
            let name = path.file_name().context("it has no file name")?;
            let part = path.with_file_name(format!(
                ".{}.{}.part",
                name.to_string_lossy(),
                std::process::id()
            ));
            let out = OpenOptions::new()
                .write(true)
                .create_new(true)
                .open(&part)?;
            let part = Part(part);
            if let Some(known) = known {
                if known.permissions().readonly() {
                    bail!("it is read-only");
                }
                out.set_permissions(known.permissions())?;
            }
            (out, Some(part))
        };
        Ok(Self {
            form,
            path,
            out: BufWriter::new(out),
            part,
            documents: 0,
        })
    }

    /// Adds the report of one netlist.
    ///
    /// # Errors
    /// When the file cannot be written.
    pub fn add(&mut self, audit: &Audit, page: Page) -> Result<()> {
        let path = self.path.clone();
        let add = || -> std::io::Result<()> {
            if self.form == Form::Markdown && self.documents > 0 {
                self.out.write_all(b"\n")?;
            }
            report::write(audit, self.form, page, &mut self.out)?;
            self.documents += 1;
            Ok(())
        };
        let mut add = add;
        add().with_context(|| format!("cannot write {}", path.display()))
    }

    /// Puts the file in place; without any report in it, leaves what was there.
    ///
    /// # Errors
    /// When the file cannot be written or renamed.
    pub fn finish(mut self) -> Result<()> {
        if self.documents == 0 {
            return Ok(());
        }
        let path = self.path.clone();
        let mut put = || -> std::io::Result<()> {
            self.out.flush()?;
            if let Some(part) = &self.part {
                self.out.get_ref().sync_all()?;
                std::fs::rename(&part.0, &self.path)?;
            }
            Ok(())
        };
        put().with_context(|| format!("cannot write {}", path.display()))
    }
}
