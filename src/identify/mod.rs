//! Floor 6: what lines are in a spectrum.
//!
//! Imports floors 0–5. Peaks above a running continuum, then lines of the catalogues within their
//! wavelength error. Never says that a line is there because it ought to be: every peak comes with all
//! its candidates and with how easily one of them falls there by chance.

mod catalogue;
mod centroid;
mod continuum;
mod filter;
mod matching;
mod peaks;

pub use catalogue::{Catalogue, CatalogueLine, Origin};
pub use matching::{Candidate, Identification, MATCH_SIGMA, identify};
pub use peaks::{Found, Peak, PeakSettings, find_peaks};
