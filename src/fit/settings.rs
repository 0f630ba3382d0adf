//! What to fit and how: the small settings struct of this floor.

use super::Sampling;
use super::carrier::Carrier;
use super::form::Form;
use super::structure::Structure;
use crate::ground::{Error, Result};
use schemars::JsonSchema;
use serde::{Deserialize, Serialize};
use std::sync::Arc;

/// Whether a shape parameter (centre or width) is fitted.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "lowercase")]
pub enum Freedom {
    /// Fitted if the band is strong enough to carry it, held at the expected value otherwise.
    Auto,
    /// Always fitted.
    Free,
    /// Held at the expected value.
    Held,
}

/// Spectral resolution of the instrument.
#[derive(Clone, Debug, PartialEq)]
pub enum Resolution {
    /// λ/FWHM.
    ResolvingPower(f64),
    /// A constant full width at half maximum, Å.
    FwhmAa(f64),
    /// (wavelength, full width at half maximum), Å, rising; straight between, constant outside.
    Table(Arc<[(f64, f64)]>),
}

impl Resolution {
    /// Instrumental full width at half maximum at a wavelength, Å.
    pub fn fwhm_aa(&self, wavelength_aa: f64) -> f64 {
        match self {
            Self::ResolvingPower(r) => wavelength_aa / r,
            Self::FwhmAa(fwhm) => *fwhm,
            Self::Table(points) => {
                let after = points.partition_point(|p| p.0 <= wavelength_aa);
                let last = points.len() - 1;
                if after == 0 || after > last {
                    return points[after.min(last)].1;
                }
                let ((a, fa), (b, fb)) = (points[after - 1], points[after]);
                fa + (fb - fa) * (wavelength_aa - a) / (b - a)
            }
        }
    }
}

/// One emission band as the fit sees it.
#[derive(Clone, Debug)]
pub struct BandModel {
    /// Identifier for results and messages.
    pub id: String,
    /// Expected rest centre, vacuum Å.
    pub centre_aa: f64,
    /// Intrinsic full width at half maximum, Å (0 for a line); the instrument's is added in square.
    pub fwhm_aa: Option<f64>,
    /// Range fitted around the band, vacuum Å. Overlapping windows are fitted as one.
    pub window_aa: (f64, f64),
    /// Freedom of the centre.
    pub centre: Freedom,
    /// Freedom of the width.
    pub width: Freedom,
    /// Lines the band consists of; a single line stands for a Gaussian.
    pub structure: Structure,
    /// Bands with the same tie share one velocity and one width factor.
    pub tie: Option<String>,
    /// What it looks like.
    pub form: Form,
    /// Whether its line has wings (Gauss–Hermite terms of third and fourth order).
    pub wings: bool,
    /// Freedom of the temperature or the wings.
    pub extra: Freedom,
    /// Limits of the user's for its parameters.
    pub limits: Limits,
}

impl BandModel {
    /// A Gaussian with everything else at its default.
    pub fn gaussian(id: &str, centre_aa: f64, fwhm_aa: Option<f64>, window_aa: (f64, f64)) -> Self {
        Self {
            id: id.to_owned(),
            centre_aa,
            fwhm_aa,
            window_aa,
            centre: Freedom::Auto,
            width: Freedom::Auto,
            structure: Structure::single(),
            tie: None,
            form: Form::Lines,
            wings: false,
            extra: Freedom::Auto,
            limits: Limits::default(),
        }
    }
}

/// Limits of a band's parameters, each open when `None`.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Limits {
    /// Of the centre, vacuum Å.
    pub centre_aa: Option<(f64, f64)>,
    /// Of the full width at half maximum, instrument included, Å.
    pub fwhm_aa: Option<(f64, f64)>,
    /// Of the flux, erg s⁻¹ cm⁻².
    pub flux_erg_s_cm2: Option<(f64, f64)>,
    /// Of the rotational temperature, K.
    pub temperature_k: Option<(f64, f64)>,
}

/// What lies under the bands.
#[derive(Clone, Debug, Default)]
pub struct ContinuumModel {
    /// Chebyshev order; `None` chooses 2, or 3 where the window is wider than 15 % of its wavelength,
    /// one less on a carrier.
    pub order: Option<usize>,
    /// Added to the order of every window, given or chosen; never below order 0.
    pub order_shift: i32,
    /// What the polynomial multiplies; nothing means 1.
    pub carrier: Option<Arc<Carrier>>,
    /// Thermal emission of dust.
    pub thermal: Option<Thermal>,
    /// One continuum for the whole spectrum instead of one per window.
    pub whole: bool,
}

/// A Planck function of free scale.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Thermal {
    /// Temperature, or where its search begins, K.
    pub temperature_k: f64,
    /// Whether the temperature is fitted.
    pub free: bool,
}

/// What the errors of the fluxes are taken from.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Uncertainty {
    /// The curvature of χ² at the minimum.
    #[default]
    Covariance,
    /// Where χ² has risen by 1 above its minimum, each side by itself.
    Profile,
    /// Refits of the model with resampled residuals.
    ResidualBootstrap,
    /// Refits with resampled samples.
    PairBootstrap,
    /// An ensemble of walkers (Goodman & Weare 2010).
    Walkers,
}

/// Settings of one spectrum's fit.
#[derive(Clone, Debug)]
pub struct FitSettings {
    /// The bands to measure.
    pub bands: Vec<BandModel>,
    /// Instrumental resolution, if known.
    pub resolution: Option<Resolution>,
    /// The continuum.
    pub continuum: ContinuumModel,
    /// Samples farther than this many errors from the fit, at most three in a row, are dropped.
    pub clip_sigma: Option<f64>,
    /// Whether given errors are scaled to a reduced χ² of one.
    pub scale_errors: bool,
    /// Where the errors of the fluxes come from.
    pub uncertainty: Uncertainty,
    /// Seed of resampling and walkers.
    pub seed: u64,
    /// If not empty, samples away from every band core are used only inside these ranges, Å.
    pub continuum_ranges_aa: Vec<(f64, f64)>,
    /// Ranges left out, Å.
    pub excluded_aa: Vec<(f64, f64)>,
    /// How a profile is compared with a sample.
    pub sampling: Sampling,
    /// Signal-to-noise from which a band counts as detected.
    pub detection_sigma: f64,
    /// Signal-to-noise of the held fit from which an automatic band's shape is fitted.
    pub free_shape_sigma: f64,
}

impl FitSettings {
    /// Settings with everything at its default.
    pub fn new(bands: Vec<BandModel>) -> Self {
        Self {
            bands,
            resolution: None,
            continuum: ContinuumModel::default(),
            clip_sigma: None,
            scale_errors: false,
            uncertainty: Uncertainty::default(),
            seed: 1,
            continuum_ranges_aa: Vec::new(),
            excluded_aa: Vec::new(),
            sampling: Sampling::Centre,
            detection_sigma: 3.0,
            free_shape_sigma: 17.0,
        }
    }

    /// Refuses settings that no spectrum could satisfy.
    ///
    /// # Errors
    /// Names the first impossible value with its allowed range.
    pub fn check(&self) -> Result<()> {
        if self.bands.is_empty() {
            return Err(Error::plan("no bands to measure").remedy("name at least one band"));
        }
        if self.continuum.order.is_some_and(|o| o > 12) {
            return Err(Error::plan(format!(
                "continuum order {} is outside 0 to 12",
                self.continuum.order.unwrap_or_default()
            )));
        }
        for band in &self.bands {
            check_band(band)?;
        }
        Ok(())
    }

    /// Expected full width at half maximum of a band: intrinsic and instrument in square, Å.
    /// `None` when neither is known.
    pub fn expected_fwhm_aa(&self, band: &BandModel) -> Option<f64> {
        let instrument = self.resolution.as_ref().map(|r| r.fwhm_aa(band.centre_aa));
        if !band.structure.is_single() || matches!(band.form, Form::Warm(_)) {
            // The width of each line; the band's own is in its structure.
            return instrument.or(band.fwhm_aa.filter(|w| *w > 0.0));
        }
        match (band.fwhm_aa, instrument) {
            (Some(b), Some(i)) => Some(b.hypot(i)),
            (Some(b), None) if b > 0.0 => Some(b),
            (_, i) => i,
        }
    }
}

fn check_band(band: &BandModel) -> Result<()> {
    let (low, high) = band.window_aa;
    if !(low < band.centre_aa && band.centre_aa < high) {
        return Err(Error::plan(format!(
            "band {}: centre {} Å is not inside its window {low} to {high} Å",
            band.id, band.centre_aa
        )));
    }
    if let Some(fwhm) = band.fwhm_aa
        && !(0.0..high - low).contains(&fwhm)
    {
        return Err(Error::plan(format!(
            "band {}: width {fwhm} Å is outside 0 to its window of {} Å",
            band.id,
            high - low
        )));
    }
    Ok(())
}
