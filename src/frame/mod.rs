//! Floor 3: where the comet was, what the aperture saw, and the spectrum in the comet's rest frame.
//!
//! Imports floors 0 and 2. Never touches a file.

mod aperture;
mod ephemeris;
mod geometry;
pub mod orbit;
mod rest;

pub use aperture::{Aperture, km_per_arcsec};
pub use ephemeris::Ephemeris;
pub use geometry::Geometry;
pub use rest::{Frame, RestSpectrum, to_rest, to_rest_within};
