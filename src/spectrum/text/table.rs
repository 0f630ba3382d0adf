//! The rows of numbers, one after the other, into columns.

use super::cells::{Delimiter, Value, decimal_comma, value};
use super::columns::{Picks, pick};
use super::lines::{Lines, comment};
use super::{TextLayout, preamble};
use crate::ground::{Error, Result};
use crate::spectrum::Columns;
use std::io::BufRead;
use std::ops::Range;
use std::path::Path;

/// Reads a whole table into columns in vacuum Å and cgs.
pub(super) fn read(path: &Path, input: impl BufRead, layout: &TextLayout) -> Result<Columns> {
    let mut lines = Lines::new(path, input);
    let mut line = Vec::new();
    let start = preamble::read(&mut lines, &mut line)?;
    let mut cells = Vec::new();
    start.delimiter.split(&mut line, &mut cells);
    let bare = start.header.is_none() && cells.last().is_some_and(Range::is_empty);
    let width = cells.len() - usize::from(bare && cells.len() > 2);
    let picks = pick(layout, &start, width)?;
    preamble::check_units(&start, picks.wavelength, picks.flux, layout)?;
    let mut rows = Rows::new(layout, start.delimiter, picks);
    rows.add(&line, &cells, start.first)?;
    while let Some(number) = lines.next(&mut line)? {
        if comment(&line).is_none() {
            rows.delimiter.split(&mut line, &mut cells);
            rows.add(&line, &cells, number)?;
        }
    }
    Ok(rows.columns)
}

struct Rows<'a> {
    layout: &'a TextLayout,
    delimiter: Delimiter,
    picks: Picks,
    good: Vec<(&'a str, Option<f64>)>,
    columns: Columns,
}

impl<'a> Rows<'a> {
    fn new(layout: &'a TextLayout, delimiter: Delimiter, picks: Picks) -> Self {
        Self {
            layout,
            delimiter,
            picks,
            good: layout
                .mask_good
                .iter()
                .map(|g| (g.trim(), number(g.trim().as_bytes())))
                .collect(),
            columns: Columns {
                sigma_erg_s_cm2_aa: picks.error.map(|_| Vec::new()),
                ..Columns::default()
            },
        }
    }

    fn add(&mut self, line: &[u8], cells: &[Range<usize>], at: usize) -> Result<()> {
        let row = Row { line, cells, at };
        row.check_count(self.picks.count)?;
        let layout = self.layout;
        let wavelength = row.wavelength(self.picks.wavelength)?;
        let wavelength_aa = layout.wavelength_unit.vacuum_aa(wavelength, layout.medium);
        let flux = row.density(self.picks.flux, "flux")?;
        let cgs = |v: f64| layout.flux_unit.to_erg_s_cm2_aa(v, wavelength_aa);
        let sigma = self
            .picks
            .error
            .map(|c| row.density(c, "error"))
            .transpose()?;
        let flagged = self.picks.mask.map(|c| self.flagged(&row, c)).transpose()?;
        self.columns.wavelength_aa.push(wavelength_aa);
        self.columns.flux_erg_s_cm2_aa.push(cgs(flux));
        if let (Some(column), Some(sigma)) = (&mut self.columns.sigma_erg_s_cm2_aa, sigma) {
            column.push(cgs(sigma));
        }
        if let Some(flagged) = flagged {
            self.columns.flagged.push(flagged);
        }
        self.columns.lines.push(at);
        Ok(())
    }

    fn flagged(&self, row: &Row, column: usize) -> Result<bool> {
        let cell = row.cell(column);
        let as_number = number(cell);
        let is = |(text, value): &(&str, Option<f64>)| {
            text.as_bytes() == cell || (value.is_some() && *value == as_number)
        };
        if self.good.iter().any(is) {
            return Ok(false);
        }
        let words_expected = self.good.iter().any(|(_, value)| value.is_none());
        if cell.is_empty() || (as_number.is_none() && !words_expected) {
            return Err(row.bad(column, "mask", "is not a number").remedy(format!(
                "give mask values as numbers, or say which words mean good (now: {})",
                self.layout.mask_good.join(", ")
            )));
        }
        Ok(true)
    }
}

fn number(cell: &[u8]) -> Option<f64> {
    match value(cell) {
        Value::Number(v) => Some(v),
        _ => None,
    }
}

struct Row<'a> {
    line: &'a [u8],
    cells: &'a [Range<usize>],
    at: usize,
}

impl Row<'_> {
    fn cell(&self, column: usize) -> &[u8] {
        self.cells
            .get(column)
            .map_or(b"", |r| &self.line[r.clone()])
    }

    fn check_count(&self, count: usize) -> Result<()> {
        let n = self.cells.len();
        let trailing = n == count + 1 && self.cells[count].is_empty();
        if n == count || trailing {
            return Ok(());
        }
        Err(Error::input(format!(
            "this row has {n} cells where the table has {count} columns"
        ))
        .at_line(self.at)
        .showing(self.text())
        .remedy("give every row the same cells; write nan for a missing value"))
    }

    fn wavelength(&self, column: usize) -> Result<f64> {
        match value(self.cell(column)) {
            Value::Number(v) => Ok(v),
            Value::Missing => Err(self
                .bad(column, "wavelength", "is missing")
                .remedy("remove the row or give its wavelength")),
            other => Err(self.not_a_number(column, "wavelength", other)),
        }
    }

    fn density(&self, column: usize, what: &str) -> Result<f64> {
        match value(self.cell(column)) {
            Value::Number(v) => Ok(v),
            Value::Missing => Ok(f64::NAN),
            other => Err(self.not_a_number(column, what, other)),
        }
    }

    fn not_a_number(&self, column: usize, what: &str, found: Value) -> Error {
        if found == Value::DecimalComma {
            return decimal_comma(&self.cell_text(column))
                .at_line(self.at)
                .showing(self.underlined(column));
        }
        self.bad(column, what, "is not a number")
            .remedy("write a number, or nan for a missing flux or error; begin comments with #")
    }

    fn bad(&self, column: usize, what: &str, why: &str) -> Error {
        Error::input(format!(
            "{what} {:?} (column {}) {why}",
            self.cell_text(column),
            column + 1
        ))
        .at_line(self.at)
        .showing(self.underlined(column))
    }

    fn cell_text(&self, column: usize) -> String {
        let text = String::from_utf8_lossy(self.cell(column));
        text.chars().take(40).collect()
    }

    fn text(&self) -> String {
        String::from_utf8_lossy(self.line)
            .chars()
            .take(100)
            .collect()
    }

    fn underlined(&self, column: usize) -> String {
        let range = self.cells.get(column).cloned().unwrap_or(0..0);
        if range.end > 100 {
            return self.text();
        }
        let width = |bytes: &[u8]| String::from_utf8_lossy(bytes).chars().count();
        let before = width(&self.line[..range.start]);
        let under = width(&self.line[range]).max(1);
        format!(
            "{}\n{}{}",
            self.text(),
            " ".repeat(before),
            "^".repeat(under)
        )
    }
}
