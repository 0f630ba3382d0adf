//! Writing to the terminal without panicking on a closed pipe.

use crate::ground::{Error, Result};
use std::io::{BufWriter, ErrorKind, Write};
use std::path::Path;

/// Writes to stdout; a reader that has gone away is a normal end.
pub(super) fn print(text: &str) -> Result<()> {
    let mut out = std::io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(cause) if cause.kind() != ErrorKind::BrokenPipe => Err(Error::io(
            "cannot write to",
            Path::new("standard output"),
            &cause,
        )),
        _ => Ok(()),
    }
}

/// Writes to stdout piece by piece, for output too long to hold; a reader that has gone away is a
/// normal end.
pub(super) fn stream(write: impl FnOnce(&mut dyn Write) -> std::io::Result<()>) -> Result<()> {
    let mut out = BufWriter::with_capacity(1 << 16, std::io::stdout().lock());
    match write(&mut out).and_then(|()| out.flush()) {
        Err(cause) if cause.kind() != ErrorKind::BrokenPipe => Err(Error::io(
            "cannot write to",
            Path::new("standard output"),
            &cause,
        )),
        _ => Ok(()),
    }
}

/// Writes a message to stderr; if even that fails there is nobody to tell.
pub(super) fn complain(text: &str) {
    let _ = writeln!(std::io::stderr().lock(), "{text}");
}
