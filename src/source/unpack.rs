//! Packed input, gzip (RFC 1952) or zstd (RFC 8878), told by its first bytes and
//! unpacked while it is read.
//!
//! A few bytes can unpack to terabytes, so what comes out is bounded by what went
//! in: [`ALWAYS`] bytes, and beyond that [`TIMES`] bytes for each packed byte read
//! so far, and never more than [`Limits::most_bytes`]. Text of netlists packs to
//! between a quarter and a fiftieth. Nothing beyond the bound is ever held.
//!
//! Invariant: the source that comes out is the plain text; lines and bytes in
//! messages count there. Only faults of the packing itself count packed bytes.

use super::{Diagnostic, Place, Source};
use std::io::{self, BufRead, BufReader, Read};

/// Unpacked bytes that are allowed however small the packed input is.
pub const ALWAYS: u64 = 64 << 20;
/// Unpacked bytes allowed for each packed byte.
pub const TIMES: u64 = 200;

/// How much of an input is read at most.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Limits {
    /// Most bytes a packed input may come to.
    pub most_bytes: u64,
}

impl Limits {
    /// What a netlist of `gates` gates can reasonably take as text: 256 bytes a
    /// gate, and always as much as [`ALWAYS`].
    pub fn for_gates(gates: u64) -> Self {
        Self {
            most_bytes: gates.saturating_mul(256).max(ALWAYS),
        }
    }
}

/// Why an input could not be read.
#[derive(Debug, thiserror::Error)]
pub enum ReadError {
    /// The file, pipe or terminal failed.
    #[error(transparent)]
    Io(#[from] io::Error),
    /// What it holds cannot be unpacked.
    #[error(transparent)]
    Packed(Box<Diagnostic>),
}

/// Counts what is taken out of a reader.
struct Counted<R> {
    inner: R,
    taken: u64,
}

impl<R: BufRead> Read for Counted<R> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        let read = self.inner.read(buffer)?;
        self.taken += read as u64;
        Ok(read)
    }
}

impl<R: BufRead> BufRead for Counted<R> {
    fn fill_buf(&mut self) -> io::Result<&[u8]> {
        self.inner.fill_buf()
    }

    fn consume(&mut self, amount: usize) {
        self.taken += amount as u64;
        self.inner.consume(amount);
    }
}

/// The two packings, each over the counted reader.
enum Unpacker<R: BufRead> {
    Gzip(Box<flate2::bufread::MultiGzDecoder<Counted<R>>>),
    Zstd(zstd::Decoder<'static, Counted<R>>),
}

impl<R: BufRead> Unpacker<R> {
    fn taken(&self) -> u64 {
        match self {
            Self::Gzip(decoder) => decoder.get_ref().taken,
            Self::Zstd(decoder) => decoder.get_ref().taken,
        }
    }

    fn word(&self) -> &'static str {
        match self {
            Self::Gzip(_) => "gzip",
            Self::Zstd(_) => "zstd",
        }
    }

    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        match self {
            Self::Gzip(decoder) => decoder.read(buffer),
            Self::Zstd(decoder) => decoder.read(buffer),
        }
    }
}

/// Reads all of `reader` under the name `name`; gzip and zstd are unpacked.
///
/// # Errors
/// Whatever the reader fails with; a packed input that is damaged, cut short, or
/// unpacks to more than is allowed.
pub fn read_unpacked(
    name: impl Into<String>,
    reader: impl Read,
    limits: Limits,
) -> Result<Source, ReadError> {
    let name = name.into();
    let mut plain = BufReader::with_capacity(1 << 16, reader);
    let mut magic = Vec::new();
    plain.by_ref().take(4).read_to_end(&mut magic)?;
    let is_gzip = magic.starts_with(b"\x1f\x8b");
    let is_zstd = magic == b"\x28\xb5\x2f\xfd";
    let joined = Counted {
        inner: io::Cursor::new(magic).chain(plain),
        taken: 0,
    };
    let unpacker = if is_gzip {
        let decoder = flate2::bufread::MultiGzDecoder::new(joined);
        Unpacker::Gzip(Box::new(decoder))
    } else if is_zstd {
        Unpacker::Zstd(zstd::Decoder::with_buffer(joined)?)
    } else {
        return Ok(super::read(name, joined)?);
    };
    let bytes = unpack(&name, unpacker, limits)?;
    Ok(Source { name, bytes })
}

fn unpack<R: BufRead>(
    name: &str,
    mut unpacker: Unpacker<R>,
    limits: Limits,
) -> Result<Vec<u8>, ReadError> {
    let mut bytes = Vec::new();
    let mut chunk = vec![0; 1 << 16];
    loop {
        let count = match unpacker.read(&mut chunk) {
            Ok(0) => return Ok(bytes),
            Ok(count) => count,
            Err(error) if error.kind() == io::ErrorKind::Interrupted => continue,
            Err(error) => return Err(damaged(name, &unpacker, &error)),
        };
        let total = (bytes.len() + count) as u64;
        let earned = ALWAYS.max(unpacker.taken().saturating_mul(TIMES));
        if total > earned.min(limits.most_bytes) {
            return Err(too_much(name, &unpacker, total, limits));
        }
        bytes.extend_from_slice(&chunk[..count]);
    }
}

#[cold]
fn damaged<R: BufRead>(name: &str, unpacker: &Unpacker<R>, error: &io::Error) -> ReadError {
    use io::ErrorKind::{InvalidData, InvalidInput, Other, UnexpectedEof};
    let packing = unpacker.word();
    let (found, help) = match error.kind() {
        UnexpectedEof => (
            "the end of the file inside it".to_owned(),
            "the file is cut short: fetch or pack it again",
        ),
        InvalidData | InvalidInput | Other => (
            format!("damaged data ({error})"),
            "fetch or pack the file again",
        ),
        // The file itself failed.
        _ => return ReadError::Io(io::Error::new(error.kind(), error.to_string())),
    };
    ReadError::Packed(Box::new(Diagnostic::error(
        name,
        Place::Byte(unpacker.taken()),
        format!("expected whole {packing} data, found {found}"),
        help,
    )))
}

#[cold]
fn too_much<R: BufRead>(
    name: &str,
    unpacker: &Unpacker<R>,
    total: u64,
    limits: Limits,
) -> ReadError {
    let packing = unpacker.word();
    let taken = unpacker.taken();
    let (message, help) = if total > limits.most_bytes {
        (
            format!(
                "expected {packing} data of at most {} bytes once unpacked, found more",
                limits.most_bytes
            ),
            "raise the limit on gates if a netlist of this size is meant",
        )
    } else {
        (
            format!(
                "expected {packing} data that unpacks to at most {TIMES} times its size, found \
                 {total} bytes from the first {taken}"
            ),
            "no netlist packs that well; unpack it first if it is meant all the same",
        )
    };
    ReadError::Packed(Box::new(Diagnostic::error(
        name,
        Place::Byte(taken),
        message,
        help,
    )))
}
