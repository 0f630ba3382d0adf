//! Floor 7: composition in, spectrum out; the way of the data walked backwards, for proposals, demos
//! and trials.
//!
//! Imports floors 0–6 and the analysis' settings. Reads no file, and never invents a number: what the
//! scene does not give is refused.

mod faintest;
mod scene;

pub use faintest::{Expected, ExpectedBand, FaintestRatio, expect};
pub use scene::{Noise, SceneBand, SceneContinuum, SceneSettings, SimulatedSample};

use crate::coma::{ApertureKm, Lengths, molecules_km, molecules_per_flux};
use crate::ground::constants::FWHM_PER_SIGMA;

/// Flux of a band, erg s⁻¹ cm⁻², from a production rate: F = M g (hc/λ)/(4πΔ²) with the molecules in
/// the aperture M = Q · (M v/Q)/v of the Haser model.
///
/// `production_per_s` is Q, `speed_km_s` the speed that goes with the lengths, `g_photons_s` the
/// fluorescence efficiency at the comet, `centre_aa` the band's rest wavelength in vacuum,
/// `observer_au` the distance Δ.
pub fn band_flux_erg_s_cm2(
    production_per_s: f64,
    (lengths, speed_km_s): (&Lengths, f64),
    aperture: &ApertureKm,
    g_photons_s: f64,
    centre_aa: f64,
    observer_au: f64,
) -> f64 {
    let molecules = production_per_s * molecules_km(lengths, aperture) / speed_km_s;
    molecules / molecules_per_flux(g_photons_s, centre_aa, observer_au)
}

/// A Gaussian band's flux density per unit of its flux, Å⁻¹, at a wavelength; all lengths in Å.
pub fn gaussian_per_aa(x_aa: f64, centre_aa: f64, fwhm_aa: f64) -> f64 {
    let sigma = fwhm_aa / FWHM_PER_SIGMA;
    let u = (x_aa - centre_aa) / sigma;
    (-0.5 * u * u).exp() / (sigma * (2.0 * std::f64::consts::PI).sqrt())
}

/// Wavelengths from `low` to `high`, Å, a fixed number of them per resolution element of a constant
/// resolving power: equal steps in ln λ of 1/(R n).
pub fn grid_aa(low_aa: f64, high_aa: f64, resolving_power: f64, samples_per_fwhm: f64) -> Vec<f64> {
    let step = 1.0 / (resolving_power * samples_per_fwhm);
    let count = ((high_aa / low_aa).ln() / step) as usize;
    (0..count)
        .map(|i| low_aa * (step * i as f64).exp())
        .collect()
}
