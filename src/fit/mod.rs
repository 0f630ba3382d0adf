//! Floor 4: continuum and emission bands of a window fitted together by bounded weighted least
//! squares, with the full covariance between bands.
//!
//! Imports floors 0–3. Never drops, clips or smooths a sample unasked, and never adds a component.

mod basis;
mod by_line;
mod carrier;
mod detect;
mod fitted_continuum;
mod form;
mod group;
mod integral;
mod layout;
mod model;
mod noise;
mod notes;
mod outcome;
mod pick;
mod prepare;
mod profile;
mod results;
mod robust;
mod settings;
pub mod solver;
mod spectrum_fit;
mod start;
mod structure;
mod thermal;
mod uncertain;
mod walkers;
mod window;

pub use by_line::{Feature, Features, features};
pub use carrier::Carrier;
pub use detect::upper_limit;
pub use fitted_continuum::{FittedContinuum, FittedThermal};
pub use form::{Form, Rotor, Template};
pub use model::WindowModel;
pub use pick::SampleUse;
pub use profile::{ProfileValue, Sampling, gaussian, gaussian_over_pixel};
pub use results::{BandFit, SampleFit, SpectrumFit, WindowFit};
pub use settings::{
    BandModel, ContinuumModel, FitSettings, Freedom, Limits, Resolution, Thermal, Uncertainty,
};
pub use spectrum_fit::fit_spectrum;
pub use structure::Structure;
pub use thermal::{grey_temperature_k, planck_erg_s_cm2_sr_aa};
