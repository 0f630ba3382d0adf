//! Floor 6: the place of a ratio among known comets, with limits treated as the censored data they
//! are; and the statistics of populations that this needs.
//!
//! Imports floors 0–5. Never counts a comet twice.

mod anderson;
mod distribution;
mod mixture;
mod nearest;
mod place;
mod tail;
mod trend;
mod two_sample;
mod uncertainty;
mod vote;
mod weighted;

pub use anderson::{AndersonDarling, anderson_darling};
pub use distribution::{Censored, Distribution, Known};
pub use mixture::{ClassShape, Mixture, mean_membership};
pub use nearest::{LogRatio, Neighbour, Profile, nearest, scatters};
pub use place::{Standing, place};
pub use tail::{Tail, jeffreys, tail};
pub use trend::{FEWEST_FOR_TREND, Trend, TrendPoint, fit_trend};
pub use two_sample::{TwoSample, Weighting, two_sample};
pub use uncertainty::{BandStep, Estimated};
pub use vote::{Entry, VoteRule, one_vote_each};
pub use weighted::{ScatterRule, WeightedMean, weighted_mean};
