//! Which further files a netlist may have read: those below the folder of the file
//! that names them, and below the folders given with `--search-dir`.
//!
//! A netlist comes from somebody else, so a name in it is not trusted: the path is
//! made absolute with every link followed before it is compared, and only ordinary
//! files are opened. Standard input lies in no folder.

use crate::format::files::{FileAccess, Refusal};
use crate::source::{self, Limits, Source};
use std::fs::File;
use std::io;
use std::path::{Path, PathBuf};
use std::sync::{Arc, Mutex, PoisonError};

/// The folders a netlist may have files read from.
#[derive(Debug)]
pub struct SearchFolders {
    main: PathBuf,
    /// The main file's folder as the user wrote it, and in full.
    folder: Option<(PathBuf, PathBuf)>,
    allowed: Vec<PathBuf>,
    limits: Limits,
    opened: Mutex<Vec<Arc<Source>>>,
}

impl SearchFolders {
    /// For the netlist in `file`, which may be `-`.
    ///
    /// # Errors
    /// When a folder of `allowed` is not there.
    pub fn new(file: &Path, allowed: &[PathBuf], limits: Limits) -> Result<Self, String> {
        let mut full = Vec::new();
        for folder in allowed {
            match folder.canonicalize() {
                Ok(path) if path.is_dir() => full.push(path),
                Ok(_) => return Err(format!("--search-dir {}: not a folder", folder.display())),
                Err(error) => return Err(format!("--search-dir {}: {error}", folder.display())),
            }
        }
        let main = file.canonicalize().unwrap_or_else(|_| file.to_owned());
        let written = file.parent().map(Path::to_owned).unwrap_or_default();
        let folder = main.parent().filter(|_| file != Path::new("-"));
        Ok(Self {
            folder: folder.map(|folder| (written, folder.to_owned())),
            main,
            allowed: full,
            limits,
            opened: Mutex::new(Vec::new()),
        })
    }

    /// The text of a file that was opened, by the name messages give it.
    pub fn opened(&self, name: &str) -> Option<Arc<Source>> {
        let opened = self.opened.lock().unwrap_or_else(PoisonError::into_inner);
        opened.iter().find(|source| source.name == name).cloned()
    }

    /// A path as the user would write it.
    fn shown(&self, path: &Path) -> String {
        let below = self.folder.as_ref().and_then(|(written, full)| {
            let rest = path.strip_prefix(full).ok()?;
            Some(written.join(rest))
        });
        let shown = below.as_deref().unwrap_or(path);
        shown.to_string_lossy().into_owned()
    }
}

#[cfg(unix)]
fn path_of(wanted: &[u8]) -> Option<PathBuf> {
    use std::os::unix::ffi::OsStrExt;
    Some(PathBuf::from(std::ffi::OsStr::from_bytes(wanted)))
}

#[cfg(not(unix))]
fn path_of(wanted: &[u8]) -> Option<PathBuf> {
    std::str::from_utf8(wanted).ok().map(PathBuf::from)
}

const HELP: &str = "allow its folder with `--search-dir`, or copy its models into the file";

impl FileAccess for SearchFolders {
    fn main(&self) -> PathBuf {
        self.main.clone()
    }

    fn locate(&self, from: &Path, wanted: &[u8]) -> Result<PathBuf, Refusal> {
        let refusal = |found: String| Refusal {
            found,
            help: HELP.to_owned(),
        };
        let Some(wanted) = path_of(wanted) else {
            return Err(refusal("a name that is no text".to_owned()));
        };
        // Standard input lies in no folder; files found from there on do.
        let nowhere = from == self.main && self.folder.is_none();
        let own = from.parent().filter(|_| !nowhere);
        let folders = own
            .into_iter()
            .chain(self.allowed.iter().map(PathBuf::as_path));
        let folders: Vec<&Path> = folders.collect();
        let mut found = "no such file".to_owned();
        for folder in &folders {
            let Ok(path) = folder.join(&wanted).canonicalize() else {
                continue;
            };
            if !folders.iter().any(|allowed| path.starts_with(allowed)) {
                found = "a file outside the folders that may be read".to_owned();
            } else if !path.is_file() {
                found = "something that is no ordinary file".to_owned();
            } else {
                return Ok(path);
            }
        }
        if folders.is_empty() {
            found = "no folder to look in, since the netlist is on standard input".to_owned();
        }
        Err(refusal(found))
    }

    fn open(&self, path: &Path) -> Result<Arc<Source>, Refusal> {
        let read = File::open(path)
            .map_err(source::ReadError::Io)
            .and_then(|file| source::read_unpacked(self.shown(path), file, self.limits));
        match read {
            Ok(source) => {
                let source = Arc::new(source);
                let mut opened = self.opened.lock().unwrap_or_else(PoisonError::into_inner);
                opened.push(Arc::clone(&source));
                Ok(source)
            }
            Err(source::ReadError::Io(error)) => Err(Refusal {
                found: format!("a file that cannot be read ({})", plain(&error)),
                help: "check that it may be read".to_owned(),
            }),
            Err(source::ReadError::Packed(fault)) => Err(Refusal {
                found: format!("a file that cannot be unpacked: {}", fault.message),
                help: fault.help.clone(),
            }),
        }
    }
}

/// What the system says, without its number.
fn plain(error: &io::Error) -> String {
    let text = error.to_string();
    match text.split_once(" (os error") {
        Some((words, _)) => words.to_lowercase(),
        None => text,
    }
}
