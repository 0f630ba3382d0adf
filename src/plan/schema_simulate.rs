//! The keys of a plan that describe a spectrum to be simulated.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;

/// A spectrum to be simulated through the first `[[spectrum]]`, in whose units all values are.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct SimulatePlan {
    /// First and last wavelength.
    pub range: [f64; 2],
    /// Samples per resolution element (default 2.5).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub samples_per_fwhm: Option<f64>,
    /// Production rates by species, molecules per second.
    pub production: BTreeMap<String, f64>,
    /// The continuum.
    pub continuum: SimulateContinuumPlan,
    /// The noise.
    pub noise: SimulateNoisePlan,
}

/// The continuum of the simulated spectrum: flux_density · (1 + slope_per_1000_aa · (λ − at)/1000 Å),
/// times sunlight over its value at `at` where `[continuum]` says so, plus thermal emission.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct SimulateContinuumPlan {
    /// Flux density in the spectrum's flux unit.
    pub flux_density: f64,
    /// Wavelength it belongs to.
    pub at: f64,
    /// Relative change per 1000 Å (default 0).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub slope_per_1000_aa: Option<f64>,
    /// Thermal flux density at the same wavelength, in the same unit; its temperature is that of
    /// `[continuum.thermal]` (default 0).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub thermal_flux_density: Option<f64>,
}

/// Noise per sample: the two parts in square, times √(exposure_s / exposure).
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct SimulateNoisePlan {
    /// Part that is proportional to the flux (default 0).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub relative: Option<f64>,
    /// Constant part, in the spectrum's flux unit at the continuum's wavelength.
    pub floor: f64,
    /// The exposure in s to which both belong.
    pub exposure_s: f64,
}
