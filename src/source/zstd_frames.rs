//! A zstd stream (RFC 8878) as one reader: frames one after another, skippable
//! ones skipped, each content checksum compared.
//!
//! Decoding goes block by block, so memory is bounded by the frame's window,
//! which the decoder itself caps.

use ruzstd::decoding::errors::{FrameDecoderError, ReadFrameHeaderError};
use ruzstd::decoding::{BlockDecodingStrategy, FrameDecoder};
use std::io::{self, BufRead, Read};

/// The decoded content of all frames of `R`.
pub(super) struct ZstdFrames<R> {
    reader: R,
    decoder: Box<FrameDecoder>,
    in_frame: bool,
}

impl<R: BufRead> ZstdFrames<R> {
    pub(super) fn new(reader: R) -> Self {
        let decoder = Box::new(FrameDecoder::new());
        Self {
            reader,
            decoder,
            in_frame: false,
        }
    }

    pub(super) fn get_ref(&self) -> &R {
        &self.reader
    }

    /// Damaged data, or an end where none should be.
    fn fault(&mut self, error: impl std::fmt::Display) -> io::Error {
        match self.reader.fill_buf() {
            Ok([]) => io::ErrorKind::UnexpectedEof.into(),
            Ok(_) => io::Error::new(io::ErrorKind::InvalidData, error.to_string()),
            Err(error) => error,
        }
    }

    fn open_frame(&mut self) -> io::Result<()> {
        match self.decoder.reset(&mut self.reader) {
            Ok(()) => {
                self.in_frame = true;
                Ok(())
            }
            Err(FrameDecoderError::ReadFrameHeaderError(ReadFrameHeaderError::SkipFrame {
                length,
                ..
            })) => {
                let length = u64::from(length);
                let mut skipped = self.reader.by_ref().take(length);
                if io::copy(&mut skipped, &mut io::sink())? < length {
                    return Err(io::ErrorKind::UnexpectedEof.into());
                }
                Ok(())
            }
            Err(error) => Err(self.fault(error)),
        }
    }

    fn close_frame(&mut self) -> io::Result<()> {
        self.in_frame = false;
        let stated = self.decoder.get_checksum_from_data();
        if stated.is_some() && stated != self.decoder.get_calculated_checksum() {
            let text = "the content does not match its checksum";
            return Err(io::Error::new(io::ErrorKind::InvalidData, text));
        }
        Ok(())
    }
}

impl<R: BufRead> Read for ZstdFrames<R> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        loop {
            if !self.in_frame {
                if self.reader.fill_buf()?.is_empty() {
                    return Ok(0);
                }
                self.open_frame()?;
                continue;
            }
            let count = self.decoder.read(buffer)?;
            if count > 0 {
                return Ok(count);
            }
            if self.decoder.is_finished() {
                self.close_frame()?;
                continue;
            }
            let one = BlockDecodingStrategy::UptoBlocks(1);
            if let Err(error) = self.decoder.decode_blocks(&mut self.reader, one) {
                return Err(self.fault(error));
            }
        }
    }
}
