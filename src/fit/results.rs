//! What the fit of a spectrum yields.

use super::fitted_continuum::FittedContinuum;
use super::form::Template;
use super::pick::SampleUse;
use super::profile::{gaussian, winged};
use super::structure::Structure;
use crate::ground::{Caveat, Measured};
use nalgebra::DMatrix;
use std::sync::Arc;

/// A band's measured flux and shape.
#[derive(Clone, Debug)]
pub struct BandFit {
    /// Identifier.
    pub id: String,
    /// Index of the window it was fitted in.
    pub window: usize,
    /// Rest centre, vacuum Å.
    pub centre_aa: f64,
    /// Its error; `None` when the centre was held.
    pub centre_sigma_aa: Option<f64>,
    /// Full width at half maximum, instrument included, Å.
    pub fwhm_aa: f64,
    /// Its error; `None` when the width was held.
    pub fwhm_sigma_aa: Option<f64>,
    /// Standard deviation of each line, Å; that of the band for a single Gaussian.
    pub line_sigma_aa: f64,
    /// The lines the band consists of.
    pub structure: Structure,
    /// Its tabulated profile, if it has one instead of lines.
    pub template: Option<Arc<Template>>,
    /// Limits in Å between which it was integrated, if it was.
    pub integral_aa: Option<(f64, f64)>,
    /// Rotational temperature, K, and its error when it was fitted.
    pub temperature_k: Option<(f64, Option<f64>)>,
    /// Wing terms h₃ and h₄ with their errors when they were fitted.
    pub wings: Option<[(f64, Option<f64>); 2]>,
    /// Band flux, erg s⁻¹ cm⁻²; may be negative.
    pub flux_erg_s_cm2: Measured,
    /// 68.3 % interval of the flux where it was not taken from the covariance, same unit.
    pub flux_interval_erg_s_cm2: Option<(f64, f64)>,
    /// True at or above the detection threshold.
    pub detected: bool,
    /// One-sided 99.7 % upper limit, erg s⁻¹ cm⁻², for a band that is not detected.
    pub flux_limit_erg_s_cm2: Option<f64>,
}

/// One sample of a fitted window.
#[derive(Clone, Debug)]
pub struct SampleFit {
    /// Rest vacuum wavelength, Å.
    pub wavelength_aa: f64,
    /// Data, erg s⁻¹ cm⁻² Å⁻¹; may be NaN.
    pub flux_erg_s_cm2_aa: f64,
    /// Error used in the fit, same unit.
    pub sigma_erg_s_cm2_aa: f64,
    /// Whether it counts: it was fitted or integrated.
    pub used: bool,
    /// What became of it.
    pub sample_use: SampleUse,
    /// Continuum, same unit.
    pub continuum_erg_s_cm2_aa: f64,
    /// Each band of the window, same unit, in the order of [`WindowFit::bands`].
    pub bands_erg_s_cm2_aa: Vec<f64>,
    /// Continuum and bands.
    pub total_erg_s_cm2_aa: f64,
}

/// One fitted window.
#[derive(Clone, Debug)]
pub struct WindowFit {
    /// Range, rest vacuum Å.
    pub window_aa: (f64, f64),
    /// Weighted sum of squared residuals.
    pub chi2: f64,
    /// Degrees of freedom.
    pub dof: usize,
    /// Chebyshev order of the continuum.
    pub continuum_order: usize,
    /// The continuum.
    pub continuum: FittedContinuum,
    /// True when the errors were estimated from the scatter.
    pub errors_estimated: bool,
    /// Factor by which given errors were scaled, when that was asked for.
    pub errors_scaled: Option<f64>,
    /// Largest factor by which the errors of its bands grew because neighbouring residuals are
    /// correlated.
    pub inflation: Option<f64>,
    /// Identifiers of its bands.
    pub bands: Vec<String>,
    /// Every sample inside the window, used or not.
    pub samples: Vec<SampleFit>,
}

impl WindowFit {
    /// The continuum at a rest vacuum wavelength in Å, erg s⁻¹ cm⁻² Å⁻¹.
    pub fn continuum_at(&self, x_aa: f64) -> f64 {
        self.continuum.at(x_aa)
    }
}

impl BandFit {
    /// The band's flux density at a rest vacuum wavelength in Å, erg s⁻¹ cm⁻² Å⁻¹, not averaged
    /// over a pixel; zero for a band that was integrated.
    pub fn at(&self, x_aa: f64) -> f64 {
        if self.integral_aa.is_some() {
            return 0.0;
        }
        self.flux_erg_s_cm2.value * self.unit_at(x_aa)
    }

    /// The same for unit flux, Å⁻¹.
    pub(super) fn unit_at(&self, x_aa: f64) -> f64 {
        let (centre, sigma) = (self.centre_aa, self.line_sigma_aa);
        match (&self.template, self.wings) {
            (Some(template), _) => template.at(x_aa / centre).0 / centre,
            (None, Some([h3, h4])) => winged(x_aa, None, centre, sigma, [h3.0, h4.0]).0.value,
            (None, None) => self
                .structure
                .lines()
                .iter()
                .map(|(ratio, share)| share * gaussian(x_aa, centre * ratio, sigma).value)
                .sum(),
        }
    }
}

/// Everything the fit of one spectrum yields.
#[derive(Clone, Debug)]
pub struct SpectrumFit {
    /// Label of the spectrum.
    pub label: String,
    /// Windows in order of wavelength.
    pub windows: Vec<WindowFit>,
    /// Bands in the order asked for.
    pub bands: Vec<BandFit>,
    /// Covariance of the band fluxes, (erg s⁻¹ cm⁻²)², same order.
    pub flux_covariance: DMatrix<f64>,
    /// Distances below and above the best flux for bands whose errors come from profiles, erg s⁻¹ cm⁻².
    pub sided: Vec<Option<(f64, f64)>>,
    /// Drawn fluxes of each window whose errors are not taken from the covariance: the bands, and
    /// one row per draw, erg s⁻¹ cm⁻².
    pub sampled: Vec<(Vec<usize>, DMatrix<f64>)>,
    /// Doubts.
    pub caveats: Vec<Caveat>,
}
