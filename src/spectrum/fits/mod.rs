//! FITS files: images with a spectral axis and binary tables, plain or gzipped.
//!
//! Imports floor 0 and the checked spectrum. Never takes a unit, a medium or the meaning of an error
//! from anything but the words of the file or of the plan, and never allocates by a claim that the
//! size of the file does not bear out.

mod axis;
mod choose;
mod columns;
mod companions;
mod convert;
mod image;
mod numbers;
mod parts;
mod source;
mod table;
mod understood;
mod units;
mod words;

pub use source::looks_like_fits;
pub use understood::{PartFacts, Understood};

use super::{Column, Spectrum};
use crate::ground::{FluxUnit, Medium, Result, WavelengthUnit};
use std::path::Path;

/// A part of a FITS file (a header with its data).
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Part {
    /// By the name in its EXTNAME; case does not matter.
    Name(String),
    /// By its place, counted from 0, the primary part.
    Number(usize),
}

/// What the numbers of an error column or image are.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ErrorKind {
    /// Standard deviations.
    Sigma,
    /// Variances, σ².
    Variance,
    /// Inverse variances, 1/σ²; 0 marks a sample without data.
    InverseVariance,
}

/// What to read from a FITS file. Everything left out is taken from the words of the file; what
/// neither says is an error that names the key to add.
#[derive(Clone, Debug, Default)]
pub struct FitsLayout {
    /// The part with the spectrum. `None`: the only one that reads as a spectrum.
    pub part: Option<Part>,
    /// One-based row: of a table with one spectrum per row, or of a two-dimensional image.
    pub row: Option<usize>,
    /// Wavelength column of a table.
    pub wavelength: Option<Column>,
    /// Flux column of a table.
    pub flux: Option<Column>,
    /// Error column of a table; for an image, the part with the errors (by name, or by number
    /// counted from 0 as in [`Part::Number`]).
    pub error: Option<Column>,
    /// Mask column of a table; for an image, the part with the mask, as for the errors.
    pub mask: Option<Column>,
    /// Mask values that mean good. Empty: 0 alone is good, except that of a space-telescope table's
    /// DQ only bit 1 (do not use) is bad.
    pub mask_good: Vec<String>,
    /// Unit of the spectral axis.
    pub wavelength_unit: Option<WavelengthUnit>,
    /// Medium of the wavelengths.
    pub medium: Option<Medium>,
    /// Medium to go on with when nothing says it, for a first look; `None` refuses.
    pub medium_if_unsaid: Option<Medium>,
    /// Unit of the flux.
    pub flux_unit: Option<FluxUnit>,
    /// What the errors are.
    pub error_is: Option<ErrorKind>,
}

/// A spectrum read from a FITS file, with what was understood on the way.
#[derive(Clone, Debug)]
pub struct FitsSpectrum {
    /// The checked spectrum.
    pub spectrum: Spectrum,
    /// The plain facts found, for people.
    pub understood: Understood,
}

/// Reads a spectrum from a FITS file, plain or gzipped.
///
/// Axes of images follow Greisen et al. 2006, A&A 446, 747 (WCS Paper III): linear, -LOG and -TAB
/// axes of WAVE, AWAV, FREQ and WAVN, and the older linear and DC-FLAG = 1 (log₁₀) axes. Tables hold
/// one sample per row or a vector per cell, with columns known by name, TUTYP or TUCD.
///
/// # Errors
/// Names file, part, keyword or column and the plan key to add: a file that is missing, damaged or
/// shorter than its headers say; no spectrum or several in it; a unit, medium or meaning of errors
/// that is not said; and everything [`Spectrum::from_columns`] refuses.
pub fn read_fits(path: &Path, layout: &FitsLayout) -> Result<FitsSpectrum> {
    read(path, layout).map_err(|e| e.in_file(path))
}

fn read(path: &Path, layout: &FitsLayout) -> Result<FitsSpectrum> {
    let mut file = source::open(path)?;
    let parts = parts::list(&mut file)?;
    let chosen = choose::part(&parts, layout)?;
    let part = &parts[chosen];
    let read = if part.is_table() {
        table::read(&mut file, &parts, part, layout)?
    } else {
        image::read(&mut file, &parts, part, layout)?
    };
    let mut understood = Understood::of(&parts, chosen);
    let label = path.file_name().map_or_else(
        || path.display().to_string(),
        |n| n.to_string_lossy().into_owned(),
    );
    let spectrum = convert::finish(&label, read, &mut understood)?;
    Ok(FitsSpectrum {
        spectrum,
        understood,
    })
}
