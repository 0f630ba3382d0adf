//! The one error type: what failed, where, and what to do about it.

use std::fmt;
use std::path::{Path, PathBuf};

/// Result of anything that can be refused.
pub type Result<T> = std::result::Result<T, Error>;

/// Who has to act on an [`Error`].
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ErrorKind {
    /// The plan file or the command line asks for something impossible (exit code 2).
    Plan,
    /// A spectrum or other observation file cannot be used (exit code 1).
    Input,
    /// A line list or comparison table cannot be used (exit code 1).
    Table,
    /// The computation cannot give an answer for this input (exit code 1).
    Compute,
    /// The operating system refused to read or write (exit code 1).
    Io,
}

/// An error that names what failed, the value, the place and the remedy.
#[derive(Debug)]
pub struct Error(Box<Inner>);

#[derive(Debug)]
struct Inner {
    kind: ErrorKind,
    message: String,
    file: Option<PathBuf>,
    line: Option<usize>,
    excerpt: Option<String>,
    remedy: Option<String>,
}

impl Error {
    fn new(kind: ErrorKind, message: impl Into<String>) -> Self {
        Self(Box::new(Inner {
            kind,
            message: message.into(),
            file: None,
            line: None,
            excerpt: None,
            remedy: None,
        }))
    }

    /// A mistake in the plan or on the command line.
    pub fn plan(message: impl Into<String>) -> Self {
        Self::new(ErrorKind::Plan, message)
    }

    /// A spectrum or observation file that cannot be used.
    pub fn input(message: impl Into<String>) -> Self {
        Self::new(ErrorKind::Input, message)
    }

    /// A line list or comparison table that cannot be used.
    pub fn table(message: impl Into<String>) -> Self {
        Self::new(ErrorKind::Table, message)
    }

    /// A computation without an answer.
    pub fn compute(message: impl Into<String>) -> Self {
        Self::new(ErrorKind::Compute, message)
    }

    /// A refusal by the operating system; `doing` reads like "cannot read".
    pub fn io(doing: &str, path: &Path, cause: &std::io::Error) -> Self {
        Self::new(
            ErrorKind::Io,
            format!("{doing} {}: {cause}", path.display()),
        )
    }

    /// Adds the file.
    #[must_use]
    pub fn in_file(mut self, path: &Path) -> Self {
        self.0.file.get_or_insert_with(|| path.to_owned());
        self
    }

    /// Adds the one-based line number.
    #[must_use]
    pub fn at_line(mut self, line: usize) -> Self {
        self.0.line.get_or_insert(line);
        self
    }

    /// Adds the offending text, already underlined where that helps.
    #[must_use]
    pub fn showing(mut self, excerpt: impl Into<String>) -> Self {
        self.0.excerpt.get_or_insert_with(|| excerpt.into());
        self
    }

    /// Adds what the user can do.
    #[must_use]
    pub fn remedy(mut self, remedy: impl Into<String>) -> Self {
        self.0.remedy.get_or_insert_with(|| remedy.into());
        self
    }

    /// Who has to act.
    pub fn kind(&self) -> ErrorKind {
        self.0.kind
    }

    /// The message without place and remedy.
    pub fn message(&self) -> &str {
        &self.0.message
    }

    /// The one-based line, if the error has one.
    pub fn line(&self) -> Option<usize> {
        self.0.line
    }

    /// Process exit code: 2 for plan and usage, 1 otherwise.
    pub fn exit_code(&self) -> u8 {
        if self.0.kind == ErrorKind::Plan { 2 } else { 1 }
    }
}

impl fmt::Display for Error {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let e = &self.0;
        f.write_str(&e.message)?;
        match (&e.file, e.line) {
            (Some(file), Some(line)) => write!(f, "\n  at {}:{line}", file.display())?,
            (Some(file), None) => write!(f, "\n  in {}", file.display())?,
            (None, Some(line)) => write!(f, "\n  at line {line}")?,
            (None, None) => {}
        }
        if let Some(excerpt) = &e.excerpt {
            let blank = excerpt.lines().next().is_none_or(|l| l.trim().is_empty());
            for line in excerpt.lines().take(if blank { 0 } else { usize::MAX }) {
                write!(f, "\n    {line}")?;
            }
        }
        if let Some(remedy) = &e.remedy {
            write!(f, "\n  remedy: {remedy}")?;
        }
        Ok(())
    }
}

impl std::error::Error for Error {}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shows_message_place_and_remedy() {
        let e = Error::input("wavelength 0 is not positive")
            .in_file(Path::new("a.csv"))
            .at_line(7)
            .remedy("remove the sample");
        assert_eq!(
            e.to_string(),
            "wavelength 0 is not positive\n  at a.csv:7\n  remedy: remove the sample"
        );
        assert_eq!(e.exit_code(), 1);
        assert_eq!(Error::plan("x").exit_code(), 2);
    }

    #[test]
    fn the_innermost_place_wins() {
        let e = Error::table("x").at_line(3).at_line(9);
        assert_eq!(e.line(), Some(3));
    }
}
