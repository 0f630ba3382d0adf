//! Floor 1: energy levels, transitions and sunlight, for fluorescence efficiencies.
//!
//! Imports floor 0 only. Reads the tables under `line-lists/` (bundled in the binary; a file of the
//! same name in a folder given by the user takes its place) and checks them. Never computes a
//! population or a g-factor.

mod atlas;
mod atoms;
mod bands;
mod bundle;
mod cn;
mod cn_ground;
mod cn_red;
mod quality;
mod rotational;
mod sun;
mod system;

pub use atlas::{AtlasLine, line_atlas};
pub use atoms::{atom, bundled_atoms};
pub use bands::{InfraredBand, infrared_bands};
pub use cn::cn_violet;
pub use rotational::{RotationalBand, ShapeLine, rotational_lines};
pub use sun::{SolarSpectrum, sun};
pub use system::{Level, LevelSystem, Line, LineKind};
