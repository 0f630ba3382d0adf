//! Checked settings of an analysis.

use crate::by_line::LineSet;
use crate::coma::Lengths;
use crate::fit::{BandModel, FitSettings};
use crate::frame::orbit::Sky;
use crate::frame::{Aperture, Frame, Geometry};
use crate::ground::{Caveat, Species};
use crate::ratio::{Basis, DrawSettings};
use crate::standing::Entry;

/// Everything the analysis needs besides the spectra, already checked.
#[derive(Clone, Debug)]
pub struct Settings {
    /// The comet's name for tables and figures.
    pub label: String,
    /// Date of observation, free text.
    pub date: Option<String>,
    /// Distances and velocities.
    pub geometry: Geometry,
    /// The view from the observer, when the geometry came from an orbit.
    pub sky: Option<Sky>,
    /// Extraction aperture.
    pub aperture: Aperture,
    /// One per spectrum, in the order of the spectra.
    pub spectra: Vec<SpectrumSettings>,
    /// The bands in the order asked for.
    pub bands: Vec<BandSettings>,
    /// The species of those bands, in order of first appearance.
    pub species: Vec<SpeciesSettings>,
    /// The ratios asked for.
    pub ratios: Vec<RatioSettings>,
    /// Relative error of the expansion speed, common to all species.
    pub speed_sigma: f64,
    /// Number and seed of the draws.
    pub draws: DrawSettings,
    /// Signal-to-noise of a detection.
    pub detection_sigma: f64,
    /// Wavelengths at which A(θ)fρ is wanted, rest vacuum Å; none means the middle of each window.
    pub afrho_at_aa: Vec<f64>,
    /// Doubts found while checking.
    pub caveats: Vec<Caveat>,
    /// References of the numbers in use: (key, text).
    pub sources: Vec<(String, String)>,
}

/// How to treat one spectrum.
#[derive(Clone, Debug)]
pub struct SpectrumSettings {
    /// Frame of its wavelengths.
    pub frame: Frame,
    /// Fit settings without bands.
    pub fit: FitSettings,
    /// Relative error of its flux calibration.
    pub calibration_sigma: f64,
}

/// One band: what the fit needs and what its flux means.
#[derive(Clone, Debug)]
pub struct BandSettings {
    /// For the fit.
    pub model: BandModel,
    /// Its species, if it has one.
    pub species: Option<Species>,
    /// Fluorescence efficiency at the comet.
    pub efficiency: Option<EfficiencyAtComet>,
    /// The spectrum to use, when the user says so.
    pub spectrum: Option<usize>,
    /// Line-centre opacity per column density of the strongest line, cm², where known.
    pub opacity_cm2: Option<f64>,
    /// A structured band that one Gaussian follows only at low resolution: its intrinsic width, Å.
    pub structured_fwhm_aa: Option<f64>,
    /// The lines of a `[[lines]]` table that the band stands for.
    pub lines: Option<LineSet>,
}

/// A g-factor scaled to the comet's heliocentric distance.
#[derive(Clone, Debug, PartialEq)]
pub struct EfficiencyAtComet {
    /// Photons s⁻¹ molecule⁻¹.
    pub g_photons_s: f64,
    /// Relative error.
    pub relative_sigma: f64,
    /// Where it comes from.
    pub source: String,
}

/// Coma model of one species.
#[derive(Clone, Debug)]
pub struct SpeciesSettings {
    /// The species.
    pub species: Species,
    /// Scale lengths and speed, where known.
    pub coma: Option<ComaSettings>,
}

/// Scale lengths at the comet and the speed that goes with them.
#[derive(Clone, Debug)]
pub struct ComaSettings {
    /// Scale lengths at the comet.
    pub lengths: Lengths,
    /// Relative error of each length.
    pub length_sigma: f64,
    /// Speed, km s⁻¹.
    pub speed_km_s: f64,
    /// True when the parent length is speed × lifetime.
    pub lengths_follow_speed: bool,
    /// Where they come from.
    pub source: String,
}

/// One ratio asked for, with its comparison comets.
#[derive(Clone, Debug)]
pub struct RatioSettings {
    /// Numerator.
    pub of: Species,
    /// Denominator.
    pub to: Species,
    /// Production rates or columns.
    pub basis: Basis,
    /// Published measurements of the same ratio.
    pub known: Vec<Entry>,
    /// Published values of the same ratio to read it beside.
    pub beside: Vec<Beside>,
}

/// A published value beside a ratio: a mean of comets, the Sun.
#[derive(Clone, Debug, PartialEq, serde::Serialize)]
pub struct Beside {
    /// What it is.
    pub what: String,
    /// log10 of the ratio.
    pub log10: f64,
    /// Its error or scatter, dex.
    pub log10_sigma: Option<f64>,
    /// Source.
    pub source: String,
    /// True when it was recalled, not read.
    pub from_memory: bool,
}
