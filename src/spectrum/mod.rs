//! Floor 2: from a file to a checked [`Spectrum`] in vacuum Å and cgs.
//!
//! Imports floor 0 only. Never guesses a unit and never repairs a sample silently.

mod checked;
mod divide;
mod fits;
mod text;

pub use checked::{Columns, LineNumbers, Sample, Spectrum};
pub use fits::{
    ErrorKind, FitsLayout, FitsSpectrum, Part, PartFacts, Understood, looks_like_fits, read_fits,
};
pub use text::{Column, TextLayout, parse_text, read_text};

use crate::ground::Result;
use std::path::Path;

/// How to read a spectrum.
#[derive(Clone, Debug)]
pub enum Layout {
    /// A text table.
    Text(TextLayout),
    /// A FITS file.
    Fits(FitsLayout),
}

/// Reads a spectrum of either kind; FITS files also tell how they were understood.
///
/// # Errors
/// As [`read_text`] and [`read_fits`].
pub fn read_spectrum(path: &Path, layout: &Layout) -> Result<(Spectrum, Option<Understood>)> {
    match layout {
        Layout::Text(layout) => Ok((read_text(path, layout).map_err(|e| e.in_file(path))?, None)),
        Layout::Fits(layout) => {
            let read = read_fits(path, layout).map_err(|e| e.in_file(path))?;
            Ok((read.spectrum, Some(read.understood)))
        }
    }
}
