//! The keys of a plan file.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

pub use super::schema_bands::{BandPlan, LinesPlan};
pub use super::schema_light::{ContinuumPlan, StarPlan, ThermalPlan, TransmissionPlan};
pub use super::schema_simulate::{SimulateContinuumPlan, SimulateNoisePlan, SimulatePlan};

/// A plan: which spectra, of which comet, what to measure and how.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct Plan {
    /// The comet and the geometry of the observation.
    pub comet: CometPlan,
    /// The extraction aperture.
    pub aperture: AperturePlan,
    /// One table per spectrum.
    pub spectrum: Vec<SpectrumPlan>,
    /// What to measure.
    pub measure: MeasurePlan,
    /// Custom bands, or changes to bands of the line lists.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub band: Vec<BandPlan>,
    /// All lines of an atom in given windows, with efficiencies computed for this comet.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub lines: Vec<LinesPlan>,
    /// The continuum.
    #[serde(default)]
    pub continuum: ContinuumPlan,
    /// The coma model.
    #[serde(default)]
    pub coma: ComaPlan,
    /// Scale lengths of one's own.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub lifetime: Vec<LifetimePlan>,
    /// The random draws.
    #[serde(default)]
    pub draws: DrawsPlan,
    /// What `simulate` makes; other commands do not use it.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub simulate: Option<SimulatePlan>,
    /// Tables that replace the built-in ones.
    #[serde(default, skip_serializing_if = "TablesPlan::is_default")]
    pub tables: TablesPlan,
}

/// The comet and the geometry of the observation: the four numbers, or an orbit, a state vector or
/// an ephemeris with a date.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct CometPlan {
    /// Name for tables and figures.
    pub label: String,
    /// Middle of the observation, UTC unless it says TT or TDB: "2031-04-17", "2031-04-17T05:12:30"
    /// or a Julian date. Needed with an orbit, a state or an ephemeris.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub date: Option<DatePlan>,
    /// Heliocentric distance, au.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub heliocentric_au: Option<f64>,
    /// Heliocentric velocity, km/s, positive when receding.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub heliocentric_km_s: Option<f64>,
    /// Distance to the observer, au.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub observer_au: Option<f64>,
    /// Velocity to the observer, km/s, positive when receding.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub observer_km_s: Option<f64>,
    /// CSV file, relative to the plan, with columns time, heliocentric_au, observer_au and, where
    /// known, heliocentric_km_s and observer_km_s; interpolated to the date.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub ephemeris: Option<String>,
    /// Orbital elements, ecliptic J2000.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub orbit: Option<OrbitPlan>,
    /// Heliocentric position and velocity instead of elements.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub state: Option<StatePlan>,
    /// The observatory; without it the Earth's centre.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub site: Option<SitePlan>,
}

/// A date as text or a Julian date.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(untagged)]
pub enum DatePlan {
    /// Julian date.
    Julian(f64),
    /// Calendar date, with or without a time.
    Text(String),
}

/// Orbital elements, ecliptic and equinox J2000; any eccentricity.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct OrbitPlan {
    /// Perihelion distance q, au.
    pub perihelion_au: f64,
    /// Eccentricity e.
    pub eccentricity: f64,
    /// Inclination i, degrees.
    pub inclination_deg: f64,
    /// Longitude of the ascending node Ω, degrees.
    pub node_deg: f64,
    /// Argument of perihelion ω, degrees.
    pub argument_deg: f64,
    /// Time of perihelion T (TDB).
    pub perihelion_time: DatePlan,
    /// Epoch of the elements (TDB).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub epoch: Option<DatePlan>,
}

/// A heliocentric state vector.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct StatePlan {
    /// Position, au.
    pub position_au: [f64; 3],
    /// Velocity, au per day.
    pub velocity_au_d: [f64; 3],
    /// "ecliptic" (J2000) or "equatorial" (ICRS).
    pub axes: String,
    /// Epoch (TDB).
    pub epoch: DatePlan,
}

/// An observatory on the Earth.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct SitePlan {
    /// Longitude, degrees, positive to the east.
    pub longitude_deg: f64,
    /// Geodetic latitude, degrees.
    pub latitude_deg: f64,
    /// Height, m (default 0).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub height_m: Option<f64>,
}

/// A circle (radius or diameter) or a slit (width and length), arcsec.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct AperturePlan {
    /// Radius of a circle.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub radius_arcsec: Option<f64>,
    /// Diameter of a circle.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub diameter_arcsec: Option<f64>,
    /// Full width of a slit.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub width_arcsec: Option<f64>,
    /// Full length of a slit.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub length_arcsec: Option<f64>,
    /// Offset of a slit's centre from the nucleus: across and along it.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub offset_arcsec: Option<[f64; 2]>,
}

/// One spectrum.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct SpectrumPlan {
    /// The file, relative to the plan.
    pub file: String,
    /// Part of a FITS file, by extension name or number (0 is the primary part).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub part: Option<ColumnPlan>,
    /// Row of a FITS table with one spectrum per row, or of a two-dimensional image, from 1.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub row: Option<usize>,
    /// Unit of the spectral axis: Angstrom, nm, um, cm-1, Hz … Needed for text files; FITS files
    /// usually say it themselves.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub wavelength_unit: Option<String>,
    /// Medium of the wavelengths: vacuum or air.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub medium: Option<String>,
    /// Unit of the flux density, for example "erg/s/cm2/Angstrom", "W/m2/um", "Jy", "mJy/arcsec2".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub flux_unit: Option<String>,
    /// What the errors of a FITS file are: "sigma", "variance" or "inverse variance" (default: what
    /// the file says).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub error_is: Option<String>,
    /// Columns by name or one-based number.
    #[serde(default, skip_serializing_if = "ColumnsPlan::is_default")]
    pub columns: ColumnsPlan,
    /// λ/FWHM of the instrument.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub resolving_power: Option<f64>,
    /// Or its full width at half maximum in the wavelength unit.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub instrument_fwhm: Option<f64>,
    /// Or a two-column text file of wavelength and full width at half maximum, both in the wavelength
    /// unit.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub instrument_fwhm_file: Option<String>,
    /// Transmission of the air, or of anything else in the way, to divide by.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub transmission: Option<TransmissionPlan>,
    /// Frame of the wavelengths: "observer", "comet", "geocentric", "heliocentric" or "barycentric"
    /// (default: what a FITS file says, else "observer").
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub frame: Option<String>,
    /// Velocity of the comet in that frame along the line of sight, km/s, positive when receding;
    /// needed for the last three frames when there is no orbit to compute it from.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub frame_velocity_km_s: Option<f64>,
    /// Relative error of the flux calibration, common to the whole spectrum.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub calibration_sigma: Option<f64>,
    /// "centre" (default) compares the profile with the sample's centre, "pixel" averages it over
    /// the pixel.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub sampling: Option<String>,
}

/// Columns of a text spectrum.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct ColumnsPlan {
    /// Spectral axis.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub wavelength: Option<ColumnPlan>,
    /// Flux density.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub flux: Option<ColumnPlan>,
    /// Standard deviation.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub error: Option<ColumnPlan>,
    /// Mask or quality.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub mask: Option<ColumnPlan>,
    /// Mask values that mean a good sample (default "0").
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub mask_good: Option<Vec<String>>,
}

impl ColumnsPlan {
    fn is_default(&self) -> bool {
        *self == Self::default()
    }
}

/// A column by name or one-based number.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(untagged)]
pub enum ColumnPlan {
    /// One-based number.
    Number(usize),
    /// Header name.
    Name(String),
}

/// What to measure.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct MeasurePlan {
    /// Band identifiers, of the line lists or of `[[band]]` tables.
    pub bands: Vec<String>,
    /// Ratios such as "CO2/H2O".
    #[serde(default)]
    pub ratios: Vec<String>,
    /// "production" (default) or "column".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub basis: Option<String>,
    /// Signal-to-noise from which a band counts as detected (default 3).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub detection_sigma: Option<f64>,
    /// Signal-to-noise from which centre and width of an "auto" band are fitted (default 17).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub free_shape_sigma: Option<f64>,
    /// Drop samples farther than this many errors from the fit, at most three in a row (default: none
    /// is dropped; 5 is usual against cosmic-ray hits).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub clip_sigma: Option<f64>,
    /// Scale the given errors to a reduced chi-square of one (default false).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub scale_errors: Option<bool>,
    /// Where the errors of the fluxes come from: "covariance" (default), "profile", "residual bootstrap",
    /// "pair bootstrap" or "walkers".
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub errors_from: Option<String>,
}

/// The coma model.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct ComaPlan {
    /// Named set of Haser scale lengths for radicals (default "ahearn1995").
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub length_set: Option<String>,
    /// Named law of the parents' expansion speed.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub speed_law: Option<String>,
    /// Or the parents' expansion speed itself, km/s.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub speed_km_s: Option<f64>,
    /// Relative error of the expansion speed, common to all species (default 0.1).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub speed_sigma: Option<f64>,
    /// Relative error of every scale length, instead of the line lists' own.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub length_sigma: Option<f64>,
    /// "quiet" (default) or "active" Sun, for the photo rates.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub sun: Option<String>,
}

/// Scale lengths of a species, at 1 au unless the powers say otherwise.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct LifetimePlan {
    /// Species.
    pub species: String,
    /// Parent scale length at 1 au, km.
    pub parent_km: f64,
    /// Daughter scale length at 1 au, km; without one the species is itself the parent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub daughter_km: Option<f64>,
    /// Power of r_h (default 2).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub rh_power: Option<f64>,
    /// Speed that belongs to these lengths, km/s (default: the parents' expansion speed).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub speed_km_s: Option<f64>,
    /// Relative error of the lengths (default 0).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub sigma: Option<f64>,
}

/// The random draws.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct DrawsPlan {
    /// Number of draws (default 10000).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub count: Option<usize>,
    /// Seed (default 1).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub seed: Option<u64>,
}

/// Folders of tables that replace the built-in ones.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub struct TablesPlan {
    /// Folder of line lists.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub line_lists: Option<String>,
    /// Folder of the comparison set.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub comparison: Option<String>,
}

impl TablesPlan {
    fn is_default(&self) -> bool {
        *self == Self::default()
    }
}
