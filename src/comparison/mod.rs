//! Floor 7: a ratio, or a series of ratios of one comet, among published ones – percentile, tail,
//! classes, trend with distance, nearest comets.
//!
//! Imports floors 0–6. Never reads or words anything: plain values come in, plain values go out.

mod check_set;
mod classes;
mod entries;
mod neighbours;
mod run;
mod subject;

pub use check_set::{Rederived, rederive};
pub use classes::{ClassTest, Membership, carbon_membership, class_test};
pub use entries::{Selection, entries, rows_of};
pub use neighbours::{Likeness, like};
pub use run::{DistanceTrend, RatioComparison, compare};
pub use subject::{Subject, SubjectValue, series};
