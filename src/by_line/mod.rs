//! Floor 6: species whose lines are fitted together, looked at line by line: the column each line would
//! give alone, which lines do not belong, and what their scatter says about the error.
//!
//! Imports floors 0–5. Never leaves a line out by itself: it names those that disagree, and takes their
//! weight away only where the user asks for the robust mean.

mod combine;
mod doubts;
mod measure;

pub use measure::{ByLine, Group, LineResult, LineSet, Share, measure};
