//! A value with its one-sigma error.

use serde::Serialize;

/// A value with its standard deviation, in one unit that the field's name tells.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Measured {
    /// The best value.
    pub value: f64,
    /// One standard deviation, same unit; never negative.
    pub sigma: f64,
}

impl Measured {
    /// Pairs a value with its standard deviation.
    pub fn new(value: f64, sigma: f64) -> Self {
        Self { value, sigma }
    }

    /// Both times a factor that is not negative.
    #[must_use]
    pub fn scaled(&self, factor: f64) -> Self {
        Self::new(self.value * factor, self.sigma * factor)
    }

    /// Value over sigma.
    pub fn signal_to_noise(&self) -> f64 {
        self.value / self.sigma
    }
}
