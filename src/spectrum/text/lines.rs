//! One line at a time, with its number, and the refusal of what is not text.

use crate::ground::{Error, Result};
use std::io::{BufRead, Read};
use std::path::Path;

const LONGEST_LINE: u64 = 1 << 16;
const COMMENT_SIGNS: [&[u8]; 4] = [b"#", b"!", b"%", b"//"];

/// Reads lines without their ends; blank lines are passed over.
pub(super) struct Lines<'a, R> {
    path: &'a Path,
    input: R,
    number: usize,
}

impl<'a, R: BufRead> Lines<'a, R> {
    pub(super) fn new(path: &'a Path, input: R) -> Self {
        Self {
            path,
            input,
            number: 0,
        }
    }

    /// Puts the next line that is not blank into `line` and returns its one-based number; `None` at
    /// the end.
    pub(super) fn next(&mut self, line: &mut Vec<u8>) -> Result<Option<usize>> {
        loop {
            line.clear();
            let read = (&mut self.input)
                .take(LONGEST_LINE)
                .read_until(b'\n', line)
                .map_err(|e| Error::io("cannot read", self.path, &e))?;
            if read == 0 {
                return Ok(None);
            }
            self.number += 1;
            if self.number == 1 {
                self.check_start(line)?;
            }
            self.check_text(line)?;
            line.truncate(line.trim_ascii_end().len());
            if !line.is_empty() {
                return Ok(Some(self.number));
            }
        }
    }

    /// Number of lines read so far, blank ones included.
    pub(super) fn count(&self) -> usize {
        self.number
    }

    fn check_start(&self, line: &mut Vec<u8>) -> Result<()> {
        let refuse = |what: &str, remedy: &str| Err(Error::input(what).remedy(remedy));
        if line.starts_with(b"\xEF\xBB\xBF") {
            line.drain(..3);
        }
        if line.starts_with(b"SIMPLE  =") {
            return refuse("this is a FITS file, not a text table", "read it as FITS");
        }
        if line.starts_with(b"\x1f\x8b") {
            return refuse("this is a gzip file, not a text table", "unpack it first");
        }
        if line.starts_with(b"\xFF\xFE") || line.starts_with(b"\xFE\xFF") {
            return refuse("this text is UTF-16", "save it as UTF-8 or plain ASCII");
        }
        Ok(())
    }

    fn check_text(&self, line: &[u8]) -> Result<()> {
        let refuse =
            |what: &str, remedy: &str| Err(Error::input(what).at_line(self.number).remedy(remedy));
        if line.contains(&0) {
            return refuse(
                "this is not a text file: it holds zero bytes",
                "give a text table or a FITS file",
            );
        }
        let body = line.trim_ascii_end();
        if body.contains(&b'\r') {
            return refuse(
                "lines end in carriage returns only",
                "save the file with Unix or Windows line ends",
            );
        }
        if line.len() as u64 == LONGEST_LINE {
            return refuse(
                "the line is longer than 65536 characters",
                "give one sample per line",
            );
        }
        Ok(())
    }
}

/// The text behind the comment sign, if the line is a comment.
pub(super) fn comment(line: &[u8]) -> Option<&[u8]> {
    let line = line.trim_ascii_start();
    let sign = COMMENT_SIGNS.iter().find(|s| line.starts_with(s))?;
    let body = &line[sign.len()..];
    let repeated = body.iter().take_while(|b| **b == sign[0]).count();
    Some(body[repeated..].trim_ascii())
}
