//! Floor 5: from band flux to production rate.

pub mod equilibrium;
