//! Floor 4: continuum and emission bands of a window fitted together by bounded weighted least
//! squares, with the full covariance between bands.
//!
//! Imports floors 0–3. Never drops, clips or smooths a sample on its own, and never adds a component.

mod basis;
mod by_line;
mod detect;
mod model;
mod noise;
mod profile;
mod settings;
pub mod solver;
mod spectrum_fit;
mod start;
mod structure;
mod window;

pub use by_line::{Feature, Features, features};
pub use detect::upper_limit;
pub use model::WindowModel;
pub use profile::Sampling;
pub use settings::{BandModel, FitSettings, Freedom, Resolution};
pub use spectrum_fit::{BandFit, SampleFit, SpectrumFit, WindowFit, fit_spectrum};
pub use structure::Structure;
