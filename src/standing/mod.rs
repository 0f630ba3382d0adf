//! Floor 6: the place of a ratio among known comets, with limits treated as the censored data they
//! are.
//!
//! Imports floors 0–5. Never counts a comet twice.

mod distribution;
mod place;
mod vote;

pub use distribution::{Censored, Distribution, Known};
pub use place::{Standing, place};
pub use vote::{Entry, VoteRule, one_vote_each};
