//! Floor 2: from a file to a checked [`Spectrum`] in vacuum Å and cgs.
//!
//! Imports floor 0 only. Never guesses a unit and never repairs a sample silently.

use crate::ground::{Error, Result};

/// A one-dimensional spectrum, checked on construction: strictly increasing positive vacuum
/// wavelengths, finite fluxes and positive finite errors at every good sample.
#[derive(Clone, Debug)]
pub struct Spectrum {
    label: String,
    wavelength_aa: Vec<f64>,
    flux_erg_s_cm2_aa: Vec<f64>,
    sigma_erg_s_cm2_aa: Option<Vec<f64>>,
    good: Vec<bool>,
    per_arcsec2: bool,
}

/// One sample as a reader found it; `line` is where, for messages (line or row, one-based).
#[derive(Clone, Copy, Debug)]
pub struct Sample {
    /// Vacuum wavelength, Å.
    pub wavelength_aa: f64,
    /// Flux density, erg s⁻¹ cm⁻² Å⁻¹ (per arcsec² for surface brightness); may be NaN.
    pub flux_erg_s_cm2_aa: f64,
    /// Its standard deviation, same unit; `None` when the file has none; NaN marks a bad sample.
    pub sigma_erg_s_cm2_aa: Option<f64>,
    /// True when a mask or quality column marks the sample as bad.
    pub flagged: bool,
    /// One-based line or row in the file.
    pub line: usize,
}

impl Spectrum {
    /// Checks the samples and builds the spectrum. Descending axes are reversed; anything else out
    /// of order, doubled, not positive, or an error that is zero or negative at an unflagged sample
    /// is refused with its line. A sample whose flux or error is NaN is kept and marked bad.
    ///
    /// # Errors
    /// Names the first offending line and value.
    pub fn new(label: &str, mut samples: Vec<Sample>, per_arcsec2: bool) -> Result<Self> {
        if samples.is_empty() {
            return Err(Error::input("no samples found")
                .remedy("check the column names or numbers and the comment sign"));
        }
        if samples.len() > 1 && samples[0].wavelength_aa > samples[samples.len() - 1].wavelength_aa
        {
            samples.reverse();
        }
        check_axis(&samples)?;
        check_errors(&samples)?;
        let has_sigma = samples.iter().any(|s| s.sigma_erg_s_cm2_aa.is_some());
        let good: Vec<bool> = samples
            .iter()
            .map(|s| {
                !s.flagged
                    && s.flux_erg_s_cm2_aa.is_finite()
                    && s.sigma_erg_s_cm2_aa.is_none_or(f64::is_finite)
            })
            .collect();
        if !good.iter().any(|g| *g) {
            return Err(Error::input(format!(
                "none of the {} samples is usable: every flux is not a number or flagged",
                samples.len()
            ))
            .remedy("check the flux column and the mask column"));
        }
        Ok(Self {
            label: label.to_owned(),
            wavelength_aa: samples.iter().map(|s| s.wavelength_aa).collect(),
            flux_erg_s_cm2_aa: samples.iter().map(|s| s.flux_erg_s_cm2_aa).collect(),
            sigma_erg_s_cm2_aa: has_sigma.then(|| {
                samples
                    .iter()
                    .map(|s| s.sigma_erg_s_cm2_aa.unwrap_or(f64::NAN))
                    .collect()
            }),
            good,
            per_arcsec2,
        })
    }

    /// Name for messages, usually the file name.
    pub fn label(&self) -> &str {
        &self.label
    }

    /// Number of samples, good or not.
    pub fn len(&self) -> usize {
        self.wavelength_aa.len()
    }

    /// Always false: construction refuses empty spectra.
    pub fn is_empty(&self) -> bool {
        self.wavelength_aa.is_empty()
    }

    /// Vacuum wavelengths, Å, strictly increasing.
    pub fn wavelength_aa(&self) -> &[f64] {
        &self.wavelength_aa
    }

    /// Flux densities, erg s⁻¹ cm⁻² Å⁻¹, per arcsec² if [`Spectrum::per_arcsec2`].
    pub fn flux_erg_s_cm2_aa(&self) -> &[f64] {
        &self.flux_erg_s_cm2_aa
    }

    /// Standard deviations in the flux unit, if the file had them.
    pub fn sigma_erg_s_cm2_aa(&self) -> Option<&[f64]> {
        self.sigma_erg_s_cm2_aa.as_deref()
    }

    /// Which samples may be used.
    pub fn good(&self) -> &[bool] {
        &self.good
    }

    /// True for a surface brightness.
    pub fn per_arcsec2(&self) -> bool {
        self.per_arcsec2
    }

    /// Counts of samples left out: (not a number, flagged but a number).
    pub fn left_out(&self) -> (usize, usize) {
        let nan = self
            .flux_erg_s_cm2_aa
            .iter()
            .enumerate()
            .filter(|(i, f)| {
                !f.is_finite()
                    || self
                        .sigma_erg_s_cm2_aa
                        .as_ref()
                        .is_some_and(|s| !s[*i].is_finite())
            })
            .count();
        let bad = self.good.iter().filter(|g| !**g).count();
        (nan, bad - nan)
    }
}

fn check_axis(samples: &[Sample]) -> Result<()> {
    for s in samples {
        if !(s.wavelength_aa.is_finite() && s.wavelength_aa > 0.0) {
            return Err(Error::input(format!(
                "wavelength {} Å is not a positive number",
                s.wavelength_aa
            ))
            .at_line(s.line)
            .remedy("remove the sample or correct the wavelength column and its unit"));
        }
    }
    for pair in samples.windows(2) {
        let (a, b) = (pair[0], pair[1]);
        if a.wavelength_aa == b.wavelength_aa {
            return Err(
                Error::input(format!("wavelength {} Å appears twice", b.wavelength_aa))
                    .at_line(a.line.max(b.line))
                    .remedy(
                        "remove the doubled sample, or give each echelle order as its own file",
                    ),
            );
        }
        if a.wavelength_aa > b.wavelength_aa {
            return Err(Error::input(format!(
                "wavelengths are not in order: {} Å next to {} Å",
                a.wavelength_aa, b.wavelength_aa
            ))
            .at_line(a.line.max(b.line))
            .remedy("sort the file by wavelength"));
        }
    }
    Ok(())
}

fn check_errors(samples: &[Sample]) -> Result<()> {
    for s in samples {
        if let Some(sigma) = s.sigma_erg_s_cm2_aa
            && !s.flagged
            && sigma <= 0.0
        {
            return Err(Error::input(format!(
                "the error {sigma} of a used sample is not positive"
            ))
            .at_line(s.line)
            .remedy("give a positive error, or mark the sample in a mask column"));
        }
    }
    Ok(())
}
