//! Distances and velocities at the time of observation.

use crate::ground::{Error, Result};
use serde::Serialize;

/// Heliocentric and observer-centred distance and velocity of the comet.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Geometry {
    /// Heliocentric distance r_h, au.
    pub heliocentric_au: f64,
    /// Its rate, km s⁻¹, positive when receding from the Sun.
    pub heliocentric_km_s: f64,
    /// Distance to the observer Δ, au.
    pub observer_au: f64,
    /// Its rate, km s⁻¹, positive when receding from the observer.
    pub observer_km_s: f64,
}

impl Geometry {
    /// Checks the four numbers.
    ///
    /// # Errors
    /// A distance outside 0.005–100 au (0.0005–100 au to the observer) or a speed above
    /// 700 km s⁻¹ is refused.
    pub fn new(
        heliocentric_au: f64,
        heliocentric_km_s: f64,
        observer_au: f64,
        observer_km_s: f64,
    ) -> Result<Self> {
        for (name, value, low, high, unit) in [
            ("heliocentric_au", heliocentric_au, 0.005, 100.0, "au"),
            ("observer_au", observer_au, 0.0005, 100.0, "au"),
            (
                "heliocentric_km_s",
                heliocentric_km_s,
                -700.0,
                700.0,
                "km/s",
            ),
            ("observer_km_s", observer_km_s, -700.0, 700.0, "km/s"),
        ] {
            if !(low..=high).contains(&value) {
                return Err(Error::plan(format!(
                    "{name} = {value} is outside {low} to {high} {unit}"
                ))
                .remedy("distances are in au and rates in km/s, positive when receding"));
            }
        }
        Ok(Self {
            heliocentric_au,
            heliocentric_km_s,
            observer_au,
            observer_km_s,
        })
    }
}
