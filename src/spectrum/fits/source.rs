//! The bytes of a FITS file, plain from disk or inflated into memory.

use crate::ground::{Error, Result};
use fits_well::FitsReader;
use fits_well::io::StreamReader;
use flate2::read::MultiGzDecoder;
use std::fs::File;
use std::io::{self, BufReader, Cursor, Read, Seek, SeekFrom};
use std::path::Path;
use std::sync::Arc;

/// The most a gzipped file may inflate to: an ordinary spectrum is a thousand times smaller, and the
/// inflated bytes are held in memory.
const INFLATED_MAX_BYTES: u64 = 1 << 30;
const GZIP_MAGIC: [u8; 2] = [0x1f, 0x8b];
const FITS_MAGIC: &[u8] = b"SIMPLE  =";

/// A file opened twice: once for the FITS reader, once for the table columns read straight from it.
pub(super) struct Opened {
    pub(super) reader: StreamReader<Bytes>,
    pub(super) raw: Bytes,
    pub(super) len: u64,
}

/// Readable and seekable bytes.
#[derive(Debug)]
pub(super) enum Bytes {
    Disk(File),
    Memory(Cursor<Shared>),
}

/// Inflated bytes shared by the two handles.
#[derive(Clone, Debug)]
pub(super) struct Shared(Arc<Vec<u8>>);

impl AsRef<[u8]> for Shared {
    fn as_ref(&self) -> &[u8] {
        &self.0
    }
}

impl Read for Bytes {
    fn read(&mut self, out: &mut [u8]) -> io::Result<usize> {
        match self {
            Self::Disk(file) => file.read(out),
            Self::Memory(bytes) => bytes.read(out),
        }
    }
}

impl Seek for Bytes {
    fn seek(&mut self, to: SeekFrom) -> io::Result<u64> {
        match self {
            Self::Disk(file) => file.seek(to),
            Self::Memory(bytes) => bytes.seek(to),
        }
    }
}

impl Opened {
    /// Fills `out` with the bytes at `offset`.
    pub(super) fn read_at(&mut self, offset: u64, out: &mut [u8]) -> Result<()> {
        self.raw
            .seek(SeekFrom::Start(offset))
            .and_then(|_| self.raw.read_exact(out))
            .map_err(|e| {
                Error::input(format!("cannot read {} bytes at {offset}: {e}", out.len()))
                    .remedy(DAMAGED)
            })
    }
}

/// What to do about a file that does not hold what its headers say.
pub(super) const DAMAGED: &str = "fetch or write the file anew; it is cut short or damaged";

/// An error of the FITS reader, with what was being done.
pub(super) fn refused(doing: &str, cause: &fits_well::FitsError) -> Error {
    Error::input(format!("{doing}: {cause}"))
        .remedy("the header or the data break the FITS standard; fetch or write the file anew")
}

/// True for a file that begins like FITS, also inside gzip; false for anything else, or a file that
/// cannot be read.
pub fn looks_like_fits(path: &Path) -> bool {
    let Ok(file) = File::open(path) else {
        return false;
    };
    let Some(start) = beginning(file) else {
        return false;
    };
    if !start.starts_with(&GZIP_MAGIC) {
        return start == FITS_MAGIC;
    }
    let inflated = File::open(path).map(|f| MultiGzDecoder::new(BufReader::new(f)));
    inflated.is_ok_and(|f| beginning(f).is_some_and(|b| b == FITS_MAGIC))
}

/// The first bytes, as many as the mark of a FITS file has.
fn beginning(input: impl Read) -> Option<Vec<u8>> {
    let mut start = Vec::new();
    input
        .take(FITS_MAGIC.len() as u64)
        .read_to_end(&mut start)
        .ok()?;
    Some(start)
}

/// Opens a file and lets the FITS reader find its parts; no data are read yet.
pub(super) fn open(path: &Path) -> Result<Opened> {
    let meta = std::fs::metadata(path).map_err(|e| unreadable(path, &e))?;
    if meta.is_dir() {
        return Err(Error::input("this is a folder, not a spectrum").remedy("name a file in it"));
    }
    let start = beginning(open_disk(path)?).unwrap_or_default();
    let (first, raw, len) = if start.starts_with(&GZIP_MAGIC) {
        let shared = Shared(Arc::new(inflate(open_disk(path)?)?));
        let len = shared.0.len() as u64;
        let handle = || Bytes::Memory(Cursor::new(shared.clone()));
        (handle(), handle(), len)
    } else {
        let handle = || open_disk(path).map(Bytes::Disk);
        (handle()?, handle()?, meta.len())
    };
    let reader = FitsReader::open(first).map_err(|e| {
        if start.starts_with(&GZIP_MAGIC) || start == FITS_MAGIC {
            refused("the primary header cannot be read", &e)
        } else {
            Error::input("this is not a FITS file: it does not begin with SIMPLE")
                .remedy("name a FITS file, or give the file as a text table")
        }
    })?;
    Ok(Opened { reader, raw, len })
}

fn open_disk(path: &Path) -> Result<File> {
    File::open(path).map_err(|e| unreadable(path, &e))
}

fn unreadable(path: &Path, cause: &io::Error) -> Error {
    Error::io("cannot read", path, cause)
        .remedy("check the name, taken from the current folder, and the permissions")
}

fn inflate(file: File) -> Result<Vec<u8>> {
    let mut out = Vec::new();
    MultiGzDecoder::new(BufReader::new(file))
        .take(INFLATED_MAX_BYTES + 1)
        .read_to_end(&mut out)
        .map_err(|e| Error::input(format!("cannot inflate: {e}")).remedy(DAMAGED))?;
    if out.len() as u64 > INFLATED_MAX_BYTES {
        return Err(Error::input(format!(
            "this gzipped file inflates to more than {INFLATED_MAX_BYTES} bytes"
        ))
        .remedy("inflate it on disk first, then name the plain file"));
    }
    Ok(out)
}
