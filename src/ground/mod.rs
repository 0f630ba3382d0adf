//! Floor 0: what every other floor stands on – constants, unit conversions, the refractive index
//! of air, values with errors, species names, errors that stop and caveats that do not.
//!
//! Imports nothing of this crate. Never reads a file and never prints.

mod air;
mod caveat;
pub mod constants;
mod error;
mod measured;
mod species;
mod units;

pub use air::{air_from_vacuum_aa, refractive_index, vacuum_from_air_aa};
pub use caveat::Caveat;
pub use error::{Error, ErrorKind, Result};
pub use measured::Measured;
pub use species::Species;
pub use units::{FluxUnit, Medium, WavelengthUnit, did_you_mean};
