//! The keys of a plan that are about light which is not the gas's own.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

/// The continuum.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct ContinuumPlan {
    /// "polynomial" (default); "sunlight": the solar spectrum shifted by the comet's heliocentric velocity
    /// and brought to the instrument's resolution, times a polynomial (the reflectance); "star": the same
    /// with a spectrum of your own.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub kind: Option<String>,
    /// "windows" (default): one continuum per window; "spectrum": one for the whole spectrum.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub over: Option<String>,
    /// Spectrum of the Sun or of a star like it, for kind "star".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub star: Option<StarPlan>,
    /// Thermal emission of the dust, beyond about 3 µm.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub thermal: Option<ThermalPlan>,
    /// Wavelengths at which A(θ)fρ is wanted, with kind "sunlight" (default: the middle of each window).
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub afrho_at: Vec<f64>,
    /// Chebyshev order in every window (default 2; 3 in windows wider than 15 %; one less on sunlight or a
    /// star).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub order: Option<usize>,
    /// Unit of the ranges (default: that of the first spectrum).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub unit: Option<String>,
    /// Medium of the ranges (default: that of the first spectrum).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub medium: Option<String>,
    /// If given, samples away from the bands are used only inside these rest-frame ranges.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub ranges: Vec<[f64; 2]>,
    /// Rest-frame ranges that are never used.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub exclude: Vec<[f64; 2]>,
}

/// A spectrum of one's own to stand for the Sun: wavelengths at rest, at the instrument's resolution.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct StarPlan {
    /// Two-column text file of wavelength and flux per unit wavelength, on any scale, or a FITS file.
    pub file: String,
    /// Unit of its wavelengths (default: that of the first spectrum).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub wavelength_unit: Option<String>,
    /// Their medium (default: that of the first spectrum).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub medium: Option<String>,
    /// Velocity of the star in the frame of these wavelengths, km/s, positive when receding (default 0).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub velocity_km_s: Option<f64>,
}

/// Thermal emission: a Planck function of free scale.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct ThermalPlan {
    /// Temperature, K.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub temperature_k: Option<f64>,
    /// Or this factor times 278 K over the root of the heliocentric distance in au (default 1).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub factor: Option<f64>,
    /// Whether the temperature is fitted, beginning there (default false).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub fitted: Option<bool>,
}

/// A transmission curve.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct TransmissionPlan {
    /// Two-column text file of wavelength, in unit, medium and frame of the spectrum, and transmission
    /// between 0 and 1.
    pub file: String,
    /// Samples below this transmission are left out instead of divided (default 0.1).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub floor: Option<f64>,
}
