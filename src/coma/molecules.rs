//! From band flux to molecules.

use crate::ground::constants::{AU_KM, HC_ERG_AA};
use std::f64::consts::PI;

/// Molecules in the aperture per unit of band flux: 4πΔ²/(g hc/λ), in molecules per erg s⁻¹ cm⁻².
///
/// `g_photons_s` is the fluorescence efficiency at the comet in photons s⁻¹ molecule⁻¹,
/// `wavelength_aa` the band's mean wavelength in vacuum, `observer_au` the distance Δ.
pub fn molecules_per_flux(g_photons_s: f64, wavelength_aa: f64, observer_au: f64) -> f64 {
    let distance_cm = observer_au * AU_KM * 1.0e5;
    4.0 * PI * distance_cm * distance_cm * wavelength_aa / (g_photons_s * HC_ERG_AA)
}
