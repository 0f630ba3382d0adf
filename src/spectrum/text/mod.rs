//! Text tables: which columns to read, and the way from a file to a checked spectrum.
//!
//! Imports floor 0 and the checked spectrum. Never holds the text of a file: it is read line by line
//! and only the numbers are kept (8 bytes each).

mod cells;
mod columns;
mod lines;
mod preamble;
mod table;

use super::Spectrum;
use crate::ground::{Error, FluxUnit, Medium, Result, WavelengthUnit};
use std::fs::File;
use std::io::{BufRead, BufReader};
use std::path::Path;

/// A column of a table, by the name in its header or by its place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Column {
    /// Name as in the header; case and punctuation do not matter when the match is unique.
    Name(String),
    /// One-based number.
    Number(usize),
}

/// What the columns of a text table are. Units and medium are never guessed; columns left out are
/// found by plain header names, else by place.
#[derive(Clone, Debug)]
pub struct TextLayout {
    /// Wavelength column. `None`: a header name such as `wavelength`, `wave`, `lambda`, `wl`, else 1.
    pub wavelength: Option<Column>,
    /// Flux column. `None`: a header name such as `flux`, `flux density`, else 2.
    pub flux: Option<Column>,
    /// Error column (one standard deviation, unit of the flux). `None` means no error column when
    /// wavelength and flux are both given; else a header name such as `error`, `sigma`, `err`,
    /// `err_flux`, `uncertainty`, or column 3 of a file without names.
    pub error: Option<Column>,
    /// Mask column. `None` means no mask when wavelength and flux are both given; else a header name
    /// such as `mask`, `flag`, `quality`, `pixel_mask`.
    pub mask: Option<Column>,
    /// Mask values that mean good; numbers are compared as numbers, anything else as text.
    pub mask_good: Vec<String>,
    /// Unit of the wavelength column.
    pub wavelength_unit: WavelengthUnit,
    /// Medium of the wavelengths.
    pub medium: Medium,
    /// Unit of the flux and error columns.
    pub flux_unit: FluxUnit,
}

impl TextLayout {
    /// A layout with every column found by name or place and 0 as the good mask value.
    pub fn new(wavelength_unit: WavelengthUnit, medium: Medium, flux_unit: FluxUnit) -> Self {
        Self {
            wavelength: None,
            flux: None,
            error: None,
            mask: None,
            mask_good: vec!["0".to_owned()],
            wavelength_unit,
            medium,
            flux_unit,
        }
    }
}

/// Reads a text table.
///
/// Commas, semicolons, tabs or blanks are told apart by the first line of numbers. Lines that begin
/// with `#`, `!`, `%` or `//` are comments; header names are the first other line, or a comment line
/// before the numbers with as many words as there are columns. `nan`, `--`, `null` and empty cells
/// are missing values, allowed as flux and error only. `1.5D-16` is read as `1.5e-16`.
///
/// # Errors
/// Names file, line, cell and remedy: a file that is missing, empty, a directory or not text; a
/// missing column (with those found); a cell that is not a number; decimal commas; a row of another
/// length; and everything [`Spectrum::from_columns`] refuses.
pub fn read_text(path: &Path, layout: &TextLayout) -> Result<Spectrum> {
    let meta = std::fs::metadata(path).map_err(|e| unreadable(path, &e))?;
    if meta.is_dir() {
        return Err(Error::input("this is a folder, not a spectrum")
            .in_file(path)
            .remedy("name a file in it"));
    }
    let file = File::open(path).map_err(|e| unreadable(path, &e))?;
    let label = path.file_name().map_or_else(
        || path.display().to_string(),
        |n| n.to_string_lossy().into_owned(),
    );
    read(
        path,
        &label,
        BufReader::with_capacity(1 << 16, file),
        layout,
    )
}

/// Reads a text table from memory; `name` stands for the file in messages. See [`read_text`].
///
/// # Errors
/// As [`read_text`].
pub fn parse_text(name: &str, bytes: &[u8], layout: &TextLayout) -> Result<Spectrum> {
    read(Path::new(name), name, bytes, layout)
}

fn read(path: &Path, label: &str, input: impl BufRead, layout: &TextLayout) -> Result<Spectrum> {
    table::read(path, input, layout)
        .and_then(|columns| Spectrum::from_columns(label, columns, layout.flux_unit.per_area()))
        .map_err(|e| e.in_file(path))
}

fn unreadable(path: &Path, cause: &std::io::Error) -> Error {
    Error::io("cannot read", path, cause).remedy(match cause.kind() {
        std::io::ErrorKind::NotFound => {
            "check the name; names in a plan are taken from the folder of the plan"
        }
        std::io::ErrorKind::PermissionDenied => "check the permissions of the file",
        _ => "check that the file can be opened with another program",
    })
}

#[cfg(test)]
mod tests;
