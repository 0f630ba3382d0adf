//! The keys of a plan that describe bands and lines.

use crate::fit::Freedom;
use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

/// A custom band, or changes to a band of the line lists with the same id.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct BandPlan {
    /// Identifier.
    pub id: String,
    /// Species; without one only the flux is measured.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub species: Option<String>,
    /// Unit of centre, fwhm and window (default: that of the first spectrum).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub unit: Option<String>,
    /// Medium of centre and window (default: that of the first spectrum).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub medium: Option<String>,
    /// Rest wavelength.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub centre: Option<f64>,
    /// Intrinsic full width at half maximum, without the instrument's; 0 for a line.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub fwhm: Option<f64>,
    /// Range fitted around the band.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub window: Option<[f64; 2]>,
    /// Fluorescence efficiency at 1 au, photons per second and molecule.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub g_photons_s: Option<f64>,
    /// Or in erg per second and molecule.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub g_erg_s: Option<f64>,
    /// Relative error of g (default: that of the line lists, or 0 for a g given here).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub g_sigma: Option<f64>,
    /// Where the g given here comes from.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub g_source: Option<String>,
    /// "gaussian" (default); "envelope": the rotational lines of the band at `temperature_k`, each with
    /// the instrument's width; "window": the flux between two wavelengths above the continuum, other
    /// bands subtracted; "template": a profile of your own.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub shape: Option<String>,
    /// Limits of a band with shape "window".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub between: Option<[f64; 2]>,
    /// Two-column text file of a band with shape "template": wavelength and relative intensity at the
    /// instrument's resolution.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub template: Option<String>,
    /// Lines of a multiplet with fixed flux ratios: pairs of wavelength and relative flux, instead of
    /// centre and fwhm.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub multiplet: Vec<[f64; 2]>,
    /// Rotational temperature of an envelope, K (default 70 K over the heliocentric distance in au).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub temperature_k: Option<f64>,
    /// "held" (default), "auto" or "free": whether the temperature of an envelope is fitted.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub temperature_is: Option<Freedom>,
    /// Fit the wings of a Gaussian too, by Gauss–Hermite terms of third and fourth order: "held"
    /// (default: none), "auto" or "free".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub wings_are: Option<Freedom>,
    /// Limits of the fitted centre.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub centre_range: Option<[f64; 2]>,
    /// Limits of the fitted full width at half maximum, instrument included.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub fwhm_range: Option<[f64; 2]>,
    /// Limits of the flux, erg s⁻¹ cm⁻²; they bias weak bands.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub flux_range: Option<[f64; 2]>,
    /// Limits of the fitted temperature, K.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub temperature_range: Option<[f64; 2]>,
    /// "auto" (default), "free" or "held".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub centre_is: Option<Freedom>,
    /// "auto" (default), "free" or "held".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub width_is: Option<Freedom>,
    /// Bands with the same word here share velocity and width. Lines nearer than 1.5 instrumental widths
    /// to each other do so without being told, unless centre_is or width_is is given.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub tie: Option<String>,
    /// Number of the spectrum to measure it in (default: the first that covers it).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub spectrum: Option<usize>,
}

impl BandPlan {
    /// A centre where only limits, a multiplet or a template tell of one.
    pub(super) fn rough_centre(&self) -> Option<f64> {
        let middle = |r: [f64; 2]| 0.5 * (r[0] + r[1]);
        let lines = self.multiplet.iter().map(|l| l[0]);
        let (low, high) = lines.fold((f64::INFINITY, 0.0_f64), |(a, b), w| (a.min(w), b.max(w)));
        if low < high || self.multiplet.len() == 1 {
            return Some(0.5 * (low + high));
        }
        let templated = self.template.as_ref().and(self.window).map(middle);
        self.between.map(middle).or(templated)
    }
}

/// All lines of an atom in some windows: one column per window, relative fluxes from the statistical
/// equilibrium.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct LinesPlan {
    /// The atom or ion, for example "Ni I"; or "CN" for the lines of its violet bands.
    pub species: String,
    /// Ranges to fit; the lines of one range share velocity and column.
    pub windows: Vec<[f64; 2]>,
    /// Lines below this fraction of the strongest one's power are left out (default 0.01).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub threshold: Option<f64>,
    /// Lines to leave out, by wavelength within 0.05 Å.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub without: Vec<f64>,
    /// The species' column is the robust mean of its lines, in which lines that disagree lose their
    /// weight (default false: the weighted mean of the windows).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub robust: Option<bool>,
    /// Unit of the wavelengths here (default: that of the first spectrum).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub unit: Option<String>,
    /// Their medium (default: that of the first spectrum).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub medium: Option<String>,
}
