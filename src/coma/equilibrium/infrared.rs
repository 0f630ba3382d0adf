//! Efficiencies of infrared fundamentals.

use super::field::{Conditions, SolarField};
use super::result::BandG;
use crate::atomic::InfraredBand;
use crate::ground::Result;
use crate::ground::constants::{LIGHT_CM_S, PLANCK_ERG_S};
use std::f64::consts::PI;

/// g of a fundamental pumped out of the ground state: g = S · Φ(ν̃) · branching (Crovisier &
/// Encrenaz 1983, A&A 126, 170), S the band strength (cm per molecule) and Φ the solar photons per
/// s, cm² and cm⁻¹ at the comet, here Φ = 8π c ν̃² n̄ at the band origin. The sunlight is that of
/// ASTM E490 in the infrared, which resolves no solar lines: the error for that is in the table.
///
/// # Errors
/// Impossible conditions.
pub fn infrared_g(band: &InfraredBand, field: &SolarField, at: &Conditions) -> Result<BandG> {
    at.check()?;
    let occupation = field.occupation(1.0e8 / band.nu_cm1, at);
    let photons_s_cm2_cm1 = 8.0 * PI * LIGHT_CM_S * band.nu_cm1 * band.nu_cm1 * occupation;
    let g_photons_s = band.strength_cm * photons_s_cm2_cm1 * band.branching;
    Ok(BandG {
        g_photons_s,
        g_erg_s: g_photons_s * PLANCK_ERG_S * LIGHT_CM_S * band.nu_cm1,
        relative_sigma: band.strength_sigma.hypot(band.solar_sigma),
    })
}
