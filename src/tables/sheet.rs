//! One CSV file: rows whose cells know their file and line.
//!
//! Lines that start with `#` and blank lines are comments. A cell may be quoted but may not hold a
//! line break. Columns are found by name; their order is free.

use crate::ground::{Error, Result, did_you_mean};
use std::collections::HashMap;
use std::ops::RangeInclusive;
use std::path::{Path, PathBuf};

/// A parsed table.
pub(super) struct Sheet {
    path: PathBuf,
    columns: Vec<&'static str>,
    rows: Vec<(usize, Vec<String>)>,
}

/// One row of a [`Sheet`].
#[derive(Clone, Copy)]
pub(super) struct Row<'s> {
    sheet: &'s Sheet,
    line: usize,
    cells: &'s [String],
}

impl Sheet {
    /// Parses a text; its header must hold exactly `columns`, in any order.
    pub(super) fn parse(path: &Path, text: &str, columns: &[&'static str]) -> Result<Self> {
        let mut kept = String::with_capacity(text.len());
        let mut line_of_kept = Vec::new();
        for (i, line) in text.trim_start_matches('\u{feff}').lines().enumerate() {
            if !line.starts_with('#') && !line.trim().is_empty() {
                kept.push_str(line);
                kept.push('\n');
                line_of_kept.push(i + 1);
            }
        }
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .flexible(true)
            .trim(csv::Trim::All)
            .from_reader(kept.as_bytes());
        let mut order: Option<Vec<usize>> = None;
        let mut rows = Vec::new();
        for record in reader.records() {
            let record = record.map_err(|cause| {
                Error::table(format!("the table is not CSV text: {cause}")).in_file(path)
            })?;
            let line = record
                .position()
                .and_then(|p| line_of_kept.get(p.line() as usize - 1).copied())
                .unwrap_or(0);
            let cells: Vec<String> = record.iter().map(str::to_owned).collect();
            let placed = match &order {
                None => header_order(&cells, columns)
                    .map(|found| order = Some(found))
                    .map(|()| None),
                Some(order) => arrange(&cells, order).map(Some),
            }
            .map_err(|e| e.in_file(path).at_line(line))?;
            rows.extend(placed.map(|cells| (line, cells)));
        }
        if order.is_none() {
            return Err(Error::table("the table is empty")
                .in_file(path)
                .remedy(format!("begin it with the header {}", columns.join(","))));
        }
        Ok(Self {
            path: path.to_owned(),
            columns: columns.to_vec(),
            rows,
        })
    }

    /// All rows.
    pub(super) fn rows(&self) -> impl Iterator<Item = Row<'_>> {
        self.rows.iter().map(|(line, cells)| Row {
            sheet: self,
            line: *line,
            cells,
        })
    }

    /// Reads every row and refuses two rows with the same key.
    pub(super) fn read<T>(
        &self,
        what: &str,
        key: impl Fn(&T) -> String,
        read: impl Fn(&Row) -> Result<T>,
    ) -> Result<Vec<T>> {
        let mut first_line: HashMap<String, usize> = HashMap::new();
        let mut out = Vec::with_capacity(self.rows.len());
        for row in self.rows() {
            let item = read(&row)?;
            let key = key(&item);
            if let Some(line) = first_line.get(&key) {
                return Err(row.fail(
                    format!("{what} {key:?} is given twice, first at line {line}"),
                    "remove one of the two rows",
                ));
            }
            first_line.insert(key, row.line);
            out.push(item);
        }
        Ok(out)
    }

    /// An error about the file as a whole.
    pub(super) fn fail(&self, message: String) -> Error {
        Error::table(message).in_file(&self.path)
    }
}

fn header_order(cells: &[String], columns: &[&'static str]) -> Result<Vec<usize>> {
    for (i, cell) in cells.iter().enumerate() {
        if !columns.contains(&cell.as_str()) {
            let hint = did_you_mean(cell, columns.iter().copied())
                .map(|near| format!(" (did you mean {near:?}?)"))
                .unwrap_or_default();
            return Err(Error::table(format!("unknown column {cell:?}{hint}"))
                .remedy(format!("the columns are {}", columns.join(", "))));
        }
        if cells[..i].contains(cell) {
            return Err(Error::table(format!("column {cell:?} is given twice")));
        }
    }
    columns
        .iter()
        .map(|column| {
            cells.iter().position(|c| c == column).ok_or_else(|| {
                Error::table(format!("column {column:?} is missing"))
                    .remedy(format!("the columns are {}", columns.join(", ")))
            })
        })
        .collect()
}

fn arrange(cells: &[String], order: &[usize]) -> Result<Vec<String>> {
    if cells.len() != order.len() {
        return Err(Error::table(format!(
            "the row has {} cells, the header {}",
            cells.len(),
            order.len()
        ))
        .showing(cells.join(","))
        .remedy("quote cells that contain commas"));
    }
    Ok(order.iter().map(|&i| cells[i].clone()).collect())
}

impl<'s> Row<'s> {
    /// The cell of a column; empty text where nothing is written.
    pub(super) fn text(&self, column: &str) -> &'s str {
        let i = self
            .sheet
            .columns
            .iter()
            .position(|c| *c == column)
            .expect("invariant: only declared columns are asked for");
        &self.cells[i]
    }

    /// The cell of a column that must not be empty.
    pub(super) fn required(&self, column: &str) -> Result<&'s str> {
        match self.text(column) {
            "" => Err(self.fail(format!("column {column:?} is empty"), "fill it in")),
            text => Ok(text),
        }
    }

    /// A finite number within a range.
    pub(super) fn number(&self, column: &str, range: RangeInclusive<f64>) -> Result<f64> {
        let text = self.required(column)?;
        let value: f64 = text.parse().map_err(|_| {
            self.fail(
                format!("column {column:?}: {text:?} is not a number"),
                "write a plain number such as 4.26 or 2.7e-3",
            )
        })?;
        if range.contains(&value) {
            return Ok(value);
        }
        Err(self.fail(
            format!("column {column:?}: {text} lies outside the allowed range"),
            &format!("allowed are {:e} to {:e}", range.start(), range.end()),
        ))
    }

    /// A number, or nothing when the cell is empty.
    pub(super) fn optional(&self, column: &str, range: RangeInclusive<f64>) -> Result<Option<f64>> {
        match self.text(column) {
            "" => Ok(None),
            _ => self.number(column, range).map(Some),
        }
    }

    /// `true` or `false`.
    pub(super) fn flag(&self, column: &str) -> Result<bool> {
        self.word(column, &[("true", true), ("false", false)])
    }

    /// One of a list of words.
    pub(super) fn word<T: Copy>(&self, column: &str, words: &[(&str, T)]) -> Result<T> {
        let text = self.required(column)?;
        if let Some((_, value)) = words.iter().find(|(word, _)| *word == text) {
            return Ok(*value);
        }
        let known: Vec<&str> = words.iter().map(|(word, _)| *word).collect();
        let hint = did_you_mean(text, known.iter().copied())
            .map(|near| format!(" (did you mean {near:?}?)"))
            .unwrap_or_default();
        Err(self.fail(
            format!("column {column:?}: {text:?} is not an allowed word{hint}"),
            &format!("allowed are {}", known.join(", ")),
        ))
    }

    /// An error at this row.
    pub(super) fn fail(&self, message: String, remedy: &str) -> Error {
        Error::table(message)
            .in_file(&self.sheet.path)
            .at_line(self.line)
            .showing(self.cells.join(","))
            .remedy(remedy)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const COLUMNS: &[&str] = &["name", "size"];

    fn sheet(text: &str) -> Result<Sheet> {
        Sheet::parse(Path::new("t.csv"), text, COLUMNS)
    }

    fn sizes(text: &str) -> Result<Vec<(String, f64)>> {
        sheet(text)?.read(
            "name",
            |r: &(String, f64)| r.0.clone(),
            |row| {
                Ok((
                    row.required("name")?.to_owned(),
                    row.number("size", 0.0..=9.0)?,
                ))
            },
        )
    }

    #[test]
    fn comments_order_and_quotes() {
        let got = sizes("# a\n\nsize,name\n# b\n1.5,\"x, y\"\n 2 , z \n").unwrap();
        assert_eq!(got, [("x, y".to_owned(), 1.5), ("z".to_owned(), 2.0)]);
    }

    #[test]
    fn every_refusal_names_its_line() {
        for (text, line, words) in [
            ("# c\nname,sise\n", 2, "did you mean \"size\""),
            ("name\n", 1, "\"size\" is missing"),
            ("name,size,name\n", 1, "given twice"),
            ("name,size\n#\na,1,2\n", 3, "3 cells, the header 2"),
            ("name,size\na,1\n\n#\nb,one\n", 5, "\"one\" is not a number"),
            ("name,size\na,10\n", 2, "outside the allowed range"),
            ("name,size\na,nan\n", 2, "outside the allowed range"),
            ("name,size\n,1\n", 2, "\"name\" is empty"),
            ("name,size\na,1\na,2\n", 3, "first at line 2"),
        ] {
            let e = sizes(text).unwrap_err();
            assert_eq!(e.line(), Some(line), "{text:?}: {e}");
            assert!(e.to_string().contains(words), "{text:?}: {e}");
            assert!(e.to_string().contains("t.csv"), "{e}");
        }
        assert!(
            sheet("# only\n")
                .err()
                .unwrap()
                .to_string()
                .contains("empty")
        );
    }
}
