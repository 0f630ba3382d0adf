//! Dust: the quantity A(θ)fρ of A'Hearn et al. (1984, AJ 89, 579).

use crate::ground::constants::AU_KM;

/// A(θ)fρ in cm: (2 Δ r_h)²/ρ · F/F☉ with Δ in cm, r_h in au and F☉ at 1 au.
///
/// `continuum` and `sun` are flux densities in the same unit, `radius_km` the radius ρ of a
/// circular aperture at the comet.
pub fn afrho_cm(
    continuum: f64,
    sun: f64,
    radius_km: f64,
    heliocentric_au: f64,
    observer_au: f64,
) -> f64 {
    let distance_cm = observer_au * AU_KM * 1.0e5;
    let twice = 2.0 * distance_cm * heliocentric_au;
    twice * twice / (radius_km * 1.0e5) * continuum / sun
}
