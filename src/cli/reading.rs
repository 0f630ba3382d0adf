//! Flags that say how to read a spectrum, for commands that work without a plan.

use super::output;
use crate::ground::{Error, FluxUnit, Medium, Result, WavelengthUnit};
use crate::spectrum::{
    Column, ErrorKind, FitsLayout, Layout, Part, Spectrum, TextLayout, Understood, looks_like_fits,
    read_spectrum,
};
use clap::{Args, ValueEnum};
use std::path::Path;

/// How to read a spectrum; the same words as in a plan.
#[derive(Args, Clone, Debug, Default)]
pub(super) struct Reading {
    /// Part of a FITS file: extension name or number (0 is the primary part).
    #[arg(long, value_name = "NAME|N")]
    pub part: Option<String>,
    /// Row of a FITS table with one spectrum per row, or of a two-dimensional image, from 1.
    #[arg(long, value_name = "N")]
    pub row: Option<usize>,
    /// Unit of the spectral axis (Angstrom, nm, um, cm-1, Hz …).
    #[arg(long, value_name = "UNIT")]
    pub wavelength_unit: Option<String>,
    /// Medium of the wavelengths.
    #[arg(long, value_name = "vacuum|air")]
    pub medium: Option<String>,
    /// Unit of the flux density.
    #[arg(long, value_name = "UNIT")]
    pub flux_unit: Option<String>,
    /// Wavelength column, by name or number.
    #[arg(long, value_name = "COLUMN")]
    pub wavelength_column: Option<String>,
    /// Flux column.
    #[arg(long, value_name = "COLUMN")]
    pub flux_column: Option<String>,
    /// Error column; for a FITS image the part with the errors.
    #[arg(long, value_name = "COLUMN")]
    pub error_column: Option<String>,
    /// Mask column; for a FITS image the part with the mask.
    #[arg(long, value_name = "COLUMN")]
    pub mask_column: Option<String>,
    /// What the errors of a FITS file are.
    #[arg(long, value_enum)]
    pub error_is: Option<ErrorWord>,
}

/// Words for [`ErrorKind`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub(super) enum ErrorWord {
    /// Standard deviations.
    Sigma,
    /// Variances.
    Variance,
    /// Inverse variances.
    InverseVariance,
}

impl ErrorWord {
    /// The word in a plan.
    pub(super) fn in_plan(self) -> &'static str {
        match self {
            Self::Sigma => "sigma",
            Self::Variance => "variance",
            Self::InverseVariance => "inverse variance",
        }
    }
}

fn column(text: &Option<String>) -> Option<Column> {
    text.as_ref().map(|t| {
        t.parse()
            .map_or_else(|_| Column::Name(t.clone()), Column::Number)
    })
}

impl Reading {
    /// Reads a file as the flags say. A FITS file silent about the medium is taken as in vacuum,
    /// with a word about it.
    pub(super) fn read(&self, path: &Path) -> Result<(Spectrum, Option<Understood>)> {
        let read = read_spectrum(path, &self.layout(path)?)?;
        if read.1.as_ref().is_some_and(Understood::medium_is_open) {
            output::complain(&format!(
                "caveat: {} does not say whether its wavelengths are in air or vacuum; shown as vacuum",
                path.display()
            ));
        }
        Ok(read)
    }

    fn layout(&self, path: &Path) -> Result<Layout> {
        let wavelength_unit = self
            .wavelength_unit
            .as_deref()
            .map(WavelengthUnit::parse)
            .transpose()?;
        let medium = self.medium.as_deref().map(Medium::parse).transpose()?;
        let flux_unit = self.flux_unit.as_deref().map(FluxUnit::parse).transpose()?;
        if looks_like_fits(path) {
            return Ok(Layout::Fits(FitsLayout {
                part: self.part.as_ref().map(|p| {
                    p.parse()
                        .map_or_else(|_| Part::Name(p.clone()), Part::Number)
                }),
                row: self.row,
                wavelength: column(&self.wavelength_column),
                flux: column(&self.flux_column),
                error: column(&self.error_column),
                mask: column(&self.mask_column),
                mask_good: Vec::new(),
                wavelength_unit,
                medium,
                medium_if_unsaid: Some(Medium::Vacuum),
                flux_unit,
                error_is: self.error_is.map(|e| match e {
                    ErrorWord::Sigma => ErrorKind::Sigma,
                    ErrorWord::Variance => ErrorKind::Variance,
                    ErrorWord::InverseVariance => ErrorKind::InverseVariance,
                }),
            }));
        }
        if let Err(cause) = std::fs::File::open(path) {
            return Err(Error::io("cannot read", path, &cause).remedy("check the name"));
        }
        let missing = |flag: &str, example: &str| {
            Error::input(format!("a text file does not say its {flag}"))
                .in_file(path)
                .remedy(format!("add --{flag} {example}"))
        };
        let unit =
            wavelength_unit.ok_or_else(|| missing("wavelength-unit", "Angstrom (or nm, um …)"))?;
        let medium = match unit {
            WavelengthUnit::Length { .. } => {
                medium.ok_or_else(|| missing("medium", "vacuum (or air)"))?
            }
            _ => Medium::Vacuum,
        };
        let flux = flux_unit
            .ok_or_else(|| missing("flux-unit", "\"erg/s/cm2/Angstrom\" (or W/m2/um, Jy …)"))?;
        let mut layout = TextLayout::new(unit, medium, flux);
        layout.wavelength = column(&self.wavelength_column);
        layout.flux = column(&self.flux_column);
        layout.error = column(&self.error_column);
        layout.mask = column(&self.mask_column);
        Ok(Layout::Text(layout))
    }
}
