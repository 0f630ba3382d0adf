//! Cells of a line: the delimiter, splitting, and reading one number.

use crate::ground::{Error, Result};
use std::ops::Range;

/// What stands between two cells.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Delimiter {
    Comma,
    Semicolon,
    Tab,
    Blanks,
}

/// A cell read as a number.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Value {
    Number(f64),
    Missing,
    DecimalComma,
    Text,
}

impl Delimiter {
    /// Tells the delimiter of a line by the signs in it.
    pub(super) fn of(line: &[u8]) -> Result<Self> {
        let line = line.trim_ascii();
        if line.contains(&b'\t') {
            let one_word = |c: &[u8]| !c.trim_ascii().iter().any(u8::is_ascii_whitespace);
            let quoted = line.contains(&b'"');
            return Ok(if quoted || line.split(|b| *b == b'\t').all(one_word) {
                Self::Tab
            } else {
                Self::Blanks
            });
        }
        if line.contains(&b';') {
            return Ok(Self::Semicolon);
        }
        if !line.contains(&b',') {
            return Ok(Self::Blanks);
        }
        let words = || {
            line.split(u8::is_ascii_whitespace)
                .filter(|w| !w.is_empty())
        };
        let commas = words().filter(|w| value(w) == Value::DecimalComma).count();
        let numbers = words()
            .filter(|w| matches!(value(w), Value::Number(_)))
            .count();
        if commas > 0 && commas + numbers == words().count() && commas + numbers > 1 {
            return Err(decimal_comma(&String::from_utf8_lossy(line)));
        }
        Ok(Self::Comma)
    }

    fn byte(self) -> u8 {
        match self {
            Self::Comma => b',',
            Self::Semicolon => b';',
            Self::Tab => b'\t',
            Self::Blanks => b' ',
        }
    }

    /// Finds the cells of a line, trimmed. A line with quotes is replaced by its unquoted text.
    pub(super) fn split(self, line: &mut Vec<u8>, cells: &mut Vec<Range<usize>>) {
        cells.clear();
        if line.contains(&b'"') {
            self.split_quoted(line, cells);
        } else if self == Self::Blanks {
            split_blanks(line, cells);
        } else {
            let mut start = 0;
            for end in memchr(self.byte(), line).chain([line.len()]) {
                cells.push(trimmed(line, start..end));
                start = end + 1;
            }
        }
    }

    fn split_quoted(self, line: &mut Vec<u8>, cells: &mut Vec<Range<usize>>) {
        if self == Self::Blanks {
            line.iter_mut()
                .filter(|b| **b == b'\t')
                .for_each(|b| *b = b' ');
        }
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .delimiter(self.byte())
            .buffer_capacity(line.len() + 1)
            .from_reader(line.as_slice());
        let mut record = csv::ByteRecord::new();
        // Reading from memory with a flexible single record has no way to fail; if it ever did, the
        // line would have no cells and be refused for that.
        let _ = reader.read_byte_record(&mut record);
        let text = record.as_slice().to_vec();
        for i in 0..record.len() {
            let cell = record.range(i).map_or(0..0, |r| trimmed(&text, r));
            if self != Self::Blanks || !cell.is_empty() {
                cells.push(cell);
            }
        }
        *line = text;
    }
}

fn memchr(byte: u8, line: &[u8]) -> impl Iterator<Item = usize> {
    line.iter()
        .enumerate()
        .filter(move |(_, b)| **b == byte)
        .map(|(i, _)| i)
}

fn split_blanks(line: &[u8], cells: &mut Vec<Range<usize>>) {
    let mut start = None;
    for (i, b) in line.iter().enumerate() {
        match (b.is_ascii_whitespace(), start) {
            (true, Some(s)) => {
                cells.push(s..i);
                start = None;
            }
            (false, None) if matches!(b, b'#' | b'!') && !cells.is_empty() => return,
            (false, None) => start = Some(i),
            _ => {}
        }
    }
    if let Some(s) = start {
        cells.push(s..line.len());
    }
}

fn trimmed(line: &[u8], range: Range<usize>) -> Range<usize> {
    let cell = &line[range.clone()];
    let start = range.start + (cell.len() - cell.trim_ascii_start().len());
    start..start + cell.trim_ascii().len()
}

/// Reads a cell: a number (Fortran D exponents too), a missing value, or something else.
pub(super) fn value(cell: &[u8]) -> Value {
    let Ok(text) = std::str::from_utf8(cell) else {
        return Value::Text;
    };
    if let Ok(number) = text.parse::<f64>() {
        return if number.is_nan() {
            Value::Missing
        } else {
            Value::Number(number)
        };
    }
    if matches!(text, "" | "--" | "null" | "NULL") {
        return Value::Missing;
    }
    if text.starts_with(|c: char| c.is_ascii_digit() || "+-.".contains(c)) {
        if let Ok(number) = text.replace(['D', 'd'], "e").parse::<f64>() {
            return Value::Number(number);
        }
        let dotted = text.replace(',', ".").replace(['D', 'd'], "e");
        if text.contains(',') && dotted.parse::<f64>().is_ok() {
            return Value::DecimalComma;
        }
    }
    Value::Text
}

/// The refusal of numbers such as `3883,5`.
pub(super) fn decimal_comma(found: &str) -> Error {
    Error::input(format!("decimal comma in {found:?}"))
        .remedy("write numbers with a point (3883.5), for example by replacing every comma")
}

#[cfg(test)]
mod tests {
    use super::*;

    fn cells(line: &str) -> Vec<String> {
        let mut bytes = line.as_bytes().to_vec();
        let mut ranges = Vec::new();
        let delimiter = Delimiter::of(&bytes).unwrap();
        delimiter.split(&mut bytes, &mut ranges);
        let text = |r: Range<usize>| String::from_utf8_lossy(&bytes[r]).into_owned();
        ranges.into_iter().map(text).collect()
    }

    #[test]
    fn splitting() {
        assert_eq!(cells("1,2 , 3"), ["1", "2", "3"]);
        assert_eq!(cells("1;;3"), ["1", "", "3"]);
        assert_eq!(cells("1\t2\t"), ["1", "2", ""]);
        assert_eq!(cells(" 1  2\t3 # note"), ["1", "2", "3"]);
        assert_eq!(cells("\"1\",\"2, two\",3"), ["1", "2, two", "3"]);
        assert_eq!(cells("\"flux density\" wave"), ["flux density", "wave"]);
        assert_eq!(cells("\"1,2"), ["1,2"]);
    }

    #[test]
    fn values() {
        assert_eq!(value(b"1.5D-16"), Value::Number(1.5e-16));
        assert_eq!(value(b"+.5"), Value::Number(0.5));
        assert_eq!(value(b"NaN"), Value::Missing);
        assert_eq!(value(b"--"), Value::Missing);
        assert_eq!(value(b"3883,5"), Value::DecimalComma);
        assert_eq!(value(b"12x"), Value::Text);
        assert_eq!(value(b"\xff"), Value::Text);
        assert_eq!(value(b"d"), Value::Text);
    }

    #[test]
    fn decimal_commas_between_blanks() {
        assert!(Delimiter::of(b"3883,5 1,2e-16").is_err());
        assert_eq!(Delimiter::of(b"3883,5").unwrap(), Delimiter::Comma);
    }
}
