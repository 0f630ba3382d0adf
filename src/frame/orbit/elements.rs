//! Orbital elements as they are published.

use super::kepler::Conic;
use super::state::{Orbit, ecliptic_to_icrs};
use crate::ground::{Error, Result};
use nalgebra::Vector3;
use serde::Serialize;

/// Obliquity of the J2000 ecliptic, arcsec (IAU 1976 system: 23° 26′ 21.448″). Published orbits of
/// comets refer to it; the newer 84381.406″ would move a comet by 2·10⁻⁷ of its distance.
pub const OBLIQUITY_J2000_ARCSEC: f64 = 84_381.448;

/// Heliocentric osculating elements on the ecliptic and equinox J2000.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Elements {
    /// Perihelion distance q, au.
    pub perihelion_au: f64,
    /// Eccentricity e.
    pub eccentricity: f64,
    /// Inclination i, degrees, 0–180.
    pub inclination_deg: f64,
    /// Longitude of the ascending node Ω, degrees.
    pub node_deg: f64,
    /// Argument of perihelion ω, degrees.
    pub argument_deg: f64,
    /// Time of perihelion T, Julian date in TDB (or TT, which differs by under 2 ms).
    pub perihelion_time_jd_tdb: f64,
    /// Epoch at which the elements osculate, Julian date in TDB, if known.
    pub epoch_jd_tdb: Option<f64>,
}

/// A Julian date between the years −1975 and 6239: anything else is in another unit.
pub(super) fn check_julian_date(name: &str, jd: f64) -> Result<()> {
    if (1.0e6..=4.0e6).contains(&jd) {
        return Ok(());
    }
    Err(Error::plan(format!(
        "{name} = {jd} is not a Julian date (1000000 to 4000000)"
    ))
    .remedy("a modified Julian date needs 2400000.5 added"))
}

impl Elements {
    /// Checks the elements and makes the orbit.
    ///
    /// # Errors
    /// q outside 0–1000 au (zero excluded), e negative or above 10⁶, i outside 0–180°, Ω or ω
    /// outside ±360°, or a time that is no Julian date.
    pub fn orbit(&self) -> Result<Orbit> {
        let conic = Conic::new(self.perihelion_au, self.eccentricity)?;
        for (name, value, low) in [
            ("inclination_deg", self.inclination_deg, 0.0),
            ("node_deg", self.node_deg, -360.0),
            ("argument_deg", self.argument_deg, -360.0),
        ] {
            let high = if low < 0.0 { 360.0 } else { 180.0 };
            if !(low..=high).contains(&value) {
                return Err(Error::plan(format!(
                    "{name} = {value} is outside {low} to {high} degrees"
                )));
            }
        }
        check_julian_date("perihelion_time_jd_tdb", self.perihelion_time_jd_tdb)?;
        if let Some(epoch) = self.epoch_jd_tdb {
            check_julian_date("epoch_jd_tdb", epoch)?;
        }
        let toward = |argument_deg: f64| ecliptic_to_icrs(self.direction(argument_deg));
        Ok(Orbit::new(
            conic,
            (self.perihelion_time_jd_tdb, 0.0),
            toward(self.argument_deg),
            toward(self.argument_deg + 90.0),
            self.epoch_jd_tdb,
        ))
    }

    /// Direction in the orbit at an angle from the ascending node, on ecliptic axes.
    fn direction(&self, angle_deg: f64) -> Vector3<f64> {
        let (sin_i, cos_i) = self.inclination_deg.to_radians().sin_cos();
        let (sin_node, cos_node) = self.node_deg.to_radians().sin_cos();
        let (sin_u, cos_u) = angle_deg.to_radians().sin_cos();
        Vector3::new(
            cos_node * cos_u - sin_node * sin_u * cos_i,
            sin_node * cos_u + cos_node * sin_u * cos_i,
            sin_u * sin_i,
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn good() -> Elements {
        Elements {
            perihelion_au: 1.2,
            eccentricity: 0.9,
            inclination_deg: 30.0,
            node_deg: 40.0,
            argument_deg: 50.0,
            perihelion_time_jd_tdb: 2_463_000.5,
            epoch_jd_tdb: None,
        }
    }

    #[test]
    fn refuses_what_cannot_be() {
        type Spoil = fn(&mut Elements);
        let cases: [(&str, Spoil); 9] = [
            ("perihelion distance 0", |e| e.perihelion_au = 0.0),
            ("perihelion distance -1", |e| e.perihelion_au = -1.0),
            ("eccentricity -0.1", |e| e.eccentricity = -0.1),
            ("inclination_deg = -1", |e| e.inclination_deg = -1.0),
            ("inclination_deg = 181", |e| e.inclination_deg = 181.0),
            ("node_deg = NaN", |e| e.node_deg = f64::NAN),
            ("argument_deg = 1000", |e| e.argument_deg = 1000.0),
            ("perihelion_time_jd_tdb = 62000", |e| {
                e.perihelion_time_jd_tdb = 62_000.0;
            }),
            ("epoch_jd_tdb = inf", |e| {
                e.epoch_jd_tdb = Some(f64::INFINITY)
            }),
        ];
        assert!(good().orbit().is_ok());
        for (message, spoil) in cases {
            let mut elements = good();
            spoil(&mut elements);
            let error = elements.orbit().unwrap_err();
            assert!(error.message().starts_with(message), "{error}");
        }
    }
}
