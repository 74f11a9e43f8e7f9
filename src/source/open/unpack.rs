//! Packed files: gzip, xz and zstd, told apart by suffix and by their first bytes.
//!
//! Input: packed bytes. Output: the text as a stream; damage comes out as an [`io::Error`] that carries a
//! [`Damage`]. Several packed parts in a row are one text, as their formats say.

use std::io::{self, BufRead, BufReader, Read};

use flate2::bufread::MultiGzDecoder;
use liblzma::bufread::XzDecoder;
use liblzma::stream::{CONCATENATED, Stream};
use ruzstd::decoding::errors::{FrameDecoderError, ReadFrameHeaderError};
use ruzstd::decoding::{BlockDecodingStrategy, FrameDecoder};
use thiserror::Error;

/// Bytes of text that a packed file may unpack to: a small file can unpack to almost anything.
const MAX_UNPACKED_BYTES: u64 = 16 << 30;
/// Memory that unpacking xz may take; its strongest setting needs 65 MB.
const XZ_MEMORY: u64 = 256 << 20;
/// Bytes that tell every packing.
pub(super) const MAGIC_LENGTH: usize = 6;

/// A packing.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Packing {
    Gzip,
    Xz,
    Zstd,
}

impl Packing {
    const ALL: [Packing; 3] = [Packing::Gzip, Packing::Xz, Packing::Zstd];

    /// The name of the format.
    pub(super) fn name(self) -> &'static str {
        match self {
            Packing::Gzip => "gzip",
            Packing::Xz => "xz",
            Packing::Zstd => "zstd",
        }
    }

    /// The suffix of its files.
    pub(super) fn suffix(self) -> &'static str {
        match self {
            Packing::Gzip => ".gz",
            Packing::Xz => ".xz",
            Packing::Zstd => ".zst",
        }
    }

    /// The first bytes of its files.
    fn magic(self) -> &'static [u8] {
        match self {
            Packing::Gzip => b"\x1f\x8b",
            Packing::Xz => b"\xfd7zXZ\0",
            Packing::Zstd => b"\x28\xb5\x2f\xfd",
        }
    }

    /// The packing that a file name tells, and the name without its suffix.
    pub(super) fn of_name(name: &str) -> (Option<Self>, &str) {
        let found = Self::ALL.into_iter().find_map(|packing| Some((packing, strip_suffix(name, packing.suffix())?)));
        found.map_or((None, name), |(packing, rest)| (Some(packing), rest))
    }

    /// The packing that the first bytes tell.
    pub(super) fn of_bytes(head: &[u8]) -> Option<Self> {
        Self::ALL.into_iter().find(|packing| head.starts_with(packing.magic()))
    }
}

/// The name without this suffix, whose letters may be of either case.
pub(super) fn strip_suffix<'a>(name: &'a str, suffix: &str) -> Option<&'a str> {
    let (rest, end) = name.split_at_checked(name.len().checked_sub(suffix.len())?)?;
    end.eq_ignore_ascii_case(suffix).then_some(rest)
}

/// What is wrong with packed bytes.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub(super) enum Damage {
    #[error("the {} data is cut short", packing.name())]
    Cut { packing: Packing },
    #[error("the {} data is damaged: {what}", packing.name())]
    Broken { packing: Packing, what: String },
    #[error("the file unpacks to more than {limit} bytes")]
    TooLong { limit: u64 },
}

impl From<Damage> for io::Error {
    fn from(damage: Damage) -> Self {
        io::Error::other(damage)
    }
}

/// The text of these bytes.
pub(super) fn unpack<'a>(input: impl Read + 'a, packing: Option<Packing>) -> io::Result<Box<dyn Read + 'a>> {
    let Some(packing) = packing else { return Ok(Box::new(input)) };
    let input = BufReader::with_capacity(64 << 10, Source { input, failed: false });
    let unpacked: Box<dyn Read + 'a> = match packing {
        Packing::Gzip => Box::new(MultiGzDecoder::new(input)),
        Packing::Xz => {
            let stream = Stream::new_stream_decoder(XZ_MEMORY, CONCATENATED).map_err(io::Error::other)?;
            Box::new(XzDecoder::new_stream(input, stream))
        }
        Packing::Zstd => Box::new(Frames::new(input)),
    };
    Ok(Box::new(Watched { unpacked, packing, left: MAX_UNPACKED_BYTES }))
}

/// The packed bytes. Marks errors of the file itself, so that they are not taken for damage.
struct Source<R> {
    input: R,
    failed: bool,
}

/// An error of the file behind a packed stream.
#[derive(Debug, Error)]
#[error("{0}")]
struct Behind(io::Error);

impl<R: Read> Read for Source<R> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        let result = self.input.read(buffer);
        self.failed |= result.is_err();
        result.map_err(|fault| match fault.kind() {
            io::ErrorKind::Interrupted => fault,
            _ => io::Error::other(Behind(fault)),
        })
    }
}

/// A decoder whose errors become [`Damage`], and whose output is bounded.
struct Watched<'a> {
    unpacked: Box<dyn Read + 'a>,
    packing: Packing,
    left: u64,
}

impl Read for Watched<'_> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        let packing = self.packing;
        let read = self.unpacked.read(buffer).map_err(|fault| match fault.kind() {
            io::ErrorKind::Interrupted => fault,
            io::ErrorKind::UnexpectedEof => Damage::Cut { packing }.into(),
            _ if fault.get_ref().is_some_and(|inner| inner.is::<Behind>() || inner.is::<Damage>()) => fault,
            _ => Damage::Broken { packing, what: fault.to_string() }.into(),
        })?;
        self.left = self.left.checked_sub(read as u64).ok_or(Damage::TooLong { limit: MAX_UNPACKED_BYTES })?;
        Ok(read)
    }
}

/// The frames of a zstd file one after the other; the decoder reads one frame only, and leaves checksums to the caller.
struct Frames<R> {
    input: R,
    decoder: FrameDecoder,
    open: bool,
}

impl<R: BufRead> Frames<R> {
    fn new(input: R) -> Self {
        Self { input, decoder: FrameDecoder::new(), open: false }
    }

    /// Opens the next frame with text; false at the end of the file.
    fn next_frame(&mut self) -> io::Result<bool> {
        loop {
            if self.input.fill_buf()?.is_empty() {
                return Ok(false);
            }
            match self.decoder.reset(&mut self.input) {
                Ok(()) => return Ok(true),
                Err(FrameDecoderError::ReadFrameHeaderError(ReadFrameHeaderError::SkipFrame { length, .. })) => {
                    let skipped = io::copy(&mut self.input.by_ref().take(length.into()), &mut io::sink())?;
                    if skipped < length.into() {
                        return Err(io::ErrorKind::UnexpectedEof.into());
                    }
                }
                Err(fault) => return Err(frame_fault(fault)),
            }
        }
    }

    /// Compares the checksum of a frame that ended, where it has one.
    fn check(&self) -> io::Result<()> {
        match (self.decoder.get_checksum_from_data(), self.decoder.get_calculated_checksum()) {
            (Some(stored), Some(computed)) if stored != computed => Err(io::Error::other("a checksum does not fit")),
            _ => Ok(()),
        }
    }
}

/// The error of a frame; one at the end of the file means that it was cut short.
fn frame_fault(fault: FrameDecoderError) -> io::Error {
    let mut cause: Option<&(dyn std::error::Error + 'static)> = Some(&fault);
    while let Some(error) = cause {
        let kind = error.downcast_ref::<io::Error>().map(io::Error::kind);
        if kind == Some(io::ErrorKind::UnexpectedEof) {
            return io::ErrorKind::UnexpectedEof.into();
        }
        cause = error.source();
    }
    io::Error::other(fault.to_string())
}

impl<R: BufRead> Read for Frames<R> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        loop {
            if !self.open {
                self.open = self.next_frame()?;
                if !self.open {
                    return Ok(0);
                }
            }
            while self.decoder.can_collect() == 0 && !self.decoder.is_finished() {
                let step = BlockDecodingStrategy::UptoBlocks(1);
                self.decoder.decode_blocks(&mut self.input, step).map_err(frame_fault)?;
            }
            let read = self.decoder.read(buffer)?;
            if read > 0 || buffer.is_empty() {
                return Ok(read);
            }
            self.check()?;
            self.open = false;
        }
    }
}
