//! Physical constants, CODATA 2022 and IAU resolutions.
//!
//! Checked in `tests/outside_ground.rs` against `tests/external/physics/constants.csv`.

/// Speed of light in vacuum, km s⁻¹ (exact, SI).
pub const LIGHT_KM_S: f64 = 299_792.458;
/// Speed of light in vacuum, cm s⁻¹ (exact, SI).
pub const LIGHT_CM_S: f64 = 2.997_924_58e10;
/// Speed of light in vacuum, Å s⁻¹ (exact, SI).
pub const LIGHT_AA_S: f64 = 2.997_924_58e18;
/// Planck constant, erg s (exact, SI).
pub const PLANCK_ERG_S: f64 = 6.626_070_15e-27;
/// Boltzmann constant, erg K⁻¹ (exact, SI).
pub const BOLTZMANN_ERG_K: f64 = 1.380_649e-16;
/// Planck constant times speed of light, erg Å.
pub const HC_ERG_AA: f64 = PLANCK_ERG_S * LIGHT_AA_S;
/// Second radiation constant hc/k, cm K.
pub const HC_OVER_K_CM_K: f64 = PLANCK_ERG_S * LIGHT_CM_S / BOLTZMANN_ERG_K;
/// Astronomical unit, km (IAU 2012 resolution B2, exact).
pub const AU_KM: f64 = 149_597_870.700;
/// Nominal solar mass parameter, km³ s⁻² (IAU 2015 resolution B3).
pub const GM_SUN_KM3_S2: f64 = 1.327_124_4e11;
/// Atomic mass constant, g (CODATA 2022).
pub const ATOMIC_MASS_G: f64 = 1.660_539_068_92e-24;
/// Radians in one arcsecond.
pub const ARCSEC_RAD: f64 = std::f64::consts::PI / 648_000.0;
/// Square arcseconds in one steradian.
pub const ARCSEC2_PER_SR: f64 = 1.0 / (ARCSEC_RAD * ARCSEC_RAD);
/// Full width at half maximum of a Gaussian of unit standard deviation, 2√(2 ln 2).
pub const FWHM_PER_SIGMA: f64 = 2.354_820_045_030_949_3;
