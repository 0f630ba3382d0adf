//! Floor 6: ratios of species with honest errors, from one set of random draws for everything.
//!
//! Imports floors 0–5. Never adds an error twice: a factor common to numerator and denominator is
//! drawn once and cancels by itself.

mod agreement;
mod draws;
mod interval;
mod ratios;

pub use agreement::{Disagreement, disagreement};
pub use draws::{BandShare, DrawSettings, Draws, FluxBlock, Lifetimes, SpeciesPlan, draw};
pub use interval::{Interval, quantile};
pub use ratios::{Basis, Ratio, RatioKind, ratio};
