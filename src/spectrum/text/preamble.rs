//! What stands before the numbers: comments, header names, a row of units.

use super::TextLayout;
use super::cells::{Delimiter, Value, value};
use super::lines::{Lines, comment};
use crate::ground::{Error, Result, WavelengthUnit};
use std::collections::VecDeque;
use std::io::BufRead;
use std::ops::Range;

const COMMENTS_KEPT: usize = 64;

/// The start of a table, up to and including its first line of numbers (left in the line buffer).
pub(super) struct Preamble {
    pub(super) delimiter: Delimiter,
    /// Names in the first line that is not a comment.
    pub(super) header: Option<Vec<String>>,
    /// Comment lines as cells, the last one first.
    pub(super) comments: Vec<Vec<String>>,
    /// Row below the header without any number in it.
    pub(super) units: Option<(usize, Vec<String>)>,
    /// Line of the first numbers.
    pub(super) first: usize,
}

/// Reads up to the first line that holds a number.
pub(super) fn read<R: BufRead>(lines: &mut Lines<R>, line: &mut Vec<u8>) -> Result<Preamble> {
    let mut comments = VecDeque::new();
    let mut words: Vec<(usize, Vec<u8>)> = Vec::new();
    while let Some(number) = lines.next(line)? {
        if let Some(body) = comment(line) {
            if comments.len() == COMMENTS_KEPT {
                comments.pop_front();
            }
            comments.push_back(body.to_vec());
            continue;
        }
        let delimiter = Delimiter::of(line).map_err(|e| e.at_line(number))?;
        if holds_number(line, delimiter) {
            let mut words = words.into_iter();
            return Ok(Preamble {
                delimiter,
                header: words.next().map(|(_, l)| to_cells(l, delimiter)),
                comments: comments
                    .into_iter()
                    .rev()
                    .map(|c| comment_cells(c, delimiter))
                    .collect(),
                units: words.next().map(|(n, l)| (n, to_cells(l, delimiter))),
                first: number,
            });
        }
        words.push((number, line.clone()));
        if words.len() > 2 {
            return Err(not_a_table(&words[2]));
        }
    }
    Err(nothing(lines.count(), words.first()))
}

fn holds_number(line: &[u8], delimiter: Delimiter) -> bool {
    let (mut copy, mut cells) = (line.to_vec(), Vec::new());
    delimiter.split(&mut copy, &mut cells);
    cells
        .into_iter()
        .any(|c: Range<usize>| matches!(value(&copy[c]), Value::Number(_) | Value::DecimalComma))
}

fn to_cells(mut line: Vec<u8>, delimiter: Delimiter) -> Vec<String> {
    let mut ranges = Vec::new();
    delimiter.split(&mut line, &mut ranges);
    ranges
        .into_iter()
        .map(|r| String::from_utf8_lossy(&line[r]).into_owned())
        .collect()
}

/// Names in a comment may carry units in brackets, which would be cells of their own.
fn comment_cells(body: Vec<u8>, delimiter: Delimiter) -> Vec<String> {
    if delimiter != Delimiter::Blanks {
        return to_cells(body, delimiter);
    }
    let mut plain = Vec::with_capacity(body.len());
    let mut depth = 0_usize;
    for b in body {
        match b {
            b'[' | b'(' => depth += 1,
            b']' | b')' => depth = depth.saturating_sub(1),
            _ if depth == 0 => plain.push(b),
            _ => {}
        }
    }
    to_cells(plain, delimiter)
}

fn not_a_table((number, line): &(usize, Vec<u8>)) -> Error {
    let text: String = String::from_utf8_lossy(line).chars().take(80).collect();
    Error::input("no number in this line, and it is neither header nor comment")
        .at_line(*number)
        .showing(text)
        .remedy("begin comment lines with # and give one sample per line")
}

fn nothing(lines: usize, header: Option<&(usize, Vec<u8>)>) -> Error {
    let what = match (lines, header) {
        (0, _) => "the file is empty",
        (_, None) => "the file holds no numbers, only comments or blank lines",
        (_, Some(_)) => "the file holds a header but no numbers",
    };
    Error::input(what).remedy("give one sample per line: wavelength, flux and, if known, its error")
}

/// Refuses a row of units that contradicts the layout; units it cannot read are left to the user.
pub(super) fn check_units(
    preamble: &Preamble,
    wavelength: usize,
    flux: usize,
    layout: &TextLayout,
) -> Result<()> {
    let Some((line, cells)) = &preamble.units else {
        return Ok(());
    };
    let wave = cells
        .get(wavelength)
        .and_then(|t| WavelengthUnit::parse(t).ok());
    let density = cells
        .get(flux)
        .and_then(|t| crate::ground::FluxUnit::parse(t).ok());
    let clash = if wave.is_some_and(|u| !u.agrees_with(&layout.wavelength_unit)) {
        Some(wavelength)
    } else if density.is_some_and(|u| !u.agrees_with(&layout.flux_unit)) {
        Some(flux)
    } else {
        None
    };
    match clash {
        Some(column) => Err(Error::input(format!(
            "the row of units says {:?} for column {}, the plan says otherwise",
            cells[column],
            column + 1
        ))
        .at_line(*line)
        .remedy("correct the unit in the plan, or the row in the file")),
        None => Ok(()),
    }
}
