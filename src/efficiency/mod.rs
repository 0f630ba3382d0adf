//! Floor 6: fluorescence efficiencies of a species as rows and curves, ready to be shown.
//!
//! Imports floors 0, 1 and 5. Never writes a file and never hides a caveat of what it computed.

mod along;
mod subject;
mod table;

pub use along::{Along, Series, along};
pub use subject::{Subject, known_species};
pub use table::{Detail, EfficiencyRow, EfficiencyTable, efficiencies};
