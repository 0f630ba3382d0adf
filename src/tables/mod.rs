//! Floor 1: every number taken from literature – bands, fluorescence efficiencies, scale lengths,
//! photo rates, band strengths, the solar spectrum, the comparison set of comets and the source of
//! each of them.
//!
//! Imports `ground` only. Never holds a number that is not written in a CSV file with its source:
//! the files of `line-lists/` and `comparison-set/` are embedded in the binary and can be replaced
//! by folders that hold the same files.

mod bands;
mod coma_lengths;
mod comparison;
mod efficiencies;
mod files;
mod photo;
mod populations;
mod provenance;
mod set;
mod sheet;
mod solar;
mod strengths;

pub use bands::Band;
pub use coma_lengths::{ScaleLengths, SpeedLaw};
pub use comparison::{Basis, ComparisonRow, DynamicalClass, Kind};
pub use efficiencies::Efficiency;
pub use photo::{BranchKind, PhotoBranch, PhotoRate};
pub use populations::{AbundanceScale, PopulationRow, SolarAbundance, Statistic};
pub use provenance::{Confidence, How, Provenance, Source};
pub use set::Tables;
pub use solar::SolarIrradiance;
pub use strengths::Strength;

#[cfg(test)]
mod value_tests;
