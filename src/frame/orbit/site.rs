//! A place on the Earth, and how the Earth's turning carries it.

use super::kepler::KM_S_PER_AU_D;
use super::time::{Instant, Scale};
use crate::ground::constants::AU_KM;
use crate::ground::{Error, Result};
use nalgebra::{Matrix3, Vector3};
use serde::Serialize;
use sofars::{coords, pnp};

/// Rate of the Earth's rotation angle, rad s⁻¹ (IERS Conventions 2010, eq. 5.15).
const EARTH_TURN_RAD_S: f64 = 1.002_737_811_911_35 * std::f64::consts::TAU / 86_400.0;
/// sofars' name for the WGS84 ellipsoid.
const WGS84: i32 = 1;

/// An observatory, geodetic WGS84.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Site {
    /// Longitude, degrees, positive to the east.
    pub longitude_deg: f64,
    /// Geodetic latitude, degrees, positive to the north.
    pub latitude_deg: f64,
    /// Height above the ellipsoid, m.
    pub height_m: f64,
}

impl Site {
    /// Checks the coordinates.
    ///
    /// # Errors
    /// Longitude outside −180 to 360°, latitude outside ±90°, height outside −1 to 100 km.
    pub fn new(longitude_deg: f64, latitude_deg: f64, height_m: f64) -> Result<Self> {
        for (name, value, low, high, unit) in [
            ("longitude_deg", longitude_deg, -180.0, 360.0, "degrees"),
            ("latitude_deg", latitude_deg, -90.0, 90.0, "degrees"),
            ("height_m", height_m, -1000.0, 100_000.0, "m"),
        ] {
            if !(low..=high).contains(&value) {
                return Err(Error::plan(format!(
                    "observatory {name} = {value} is outside {low} to {high} {unit}"
                ))
                .remedy("longitudes count positive to the east, heights in metres"));
            }
        }
        Ok(Self {
            longitude_deg,
            latitude_deg,
            height_m,
        })
    }

    /// Geocentric position (au) and velocity (au d⁻¹) on ICRS axes.
    ///
    /// The Earth is oriented by IAU 2006 precession, IAU 2000A nutation and the Earth rotation angle.
    /// UT1 is taken as UTC and polar motion as zero: together under 0.5 km and 0.1 m s⁻¹.
    ///
    /// # Errors
    /// Fields set past the range [`Site::new`] allows.
    pub fn geocentric(&self, when: &Instant) -> Result<(Vector3<f64>, Vector3<f64>)> {
        let site = Self::new(self.longitude_deg, self.latitude_deg, self.height_m)?;
        let on_earth_m = coords::gd2gc(
            WGS84,
            site.longitude_deg.to_radians(),
            site.latitude_deg.to_radians(),
            site.height_m,
        )
        .expect("invariant: the coordinates were checked");
        let (tt, ut) = (when.two_part(Scale::Tt), when.two_part(Scale::Utc));
        let rows = pnp::c2t06a(tt.0, tt.1, ut.0, ut.1, 0.0, 0.0);
        let to_sky = Matrix3::from_fn(|i, j| rows[j][i]);
        let place_km = Vector3::from(on_earth_m) / 1000.0;
        let swing_km_s = Vector3::new(-place_km.y, place_km.x, 0.0) * EARTH_TURN_RAD_S;
        Ok((
            to_sky * place_km / AU_KM,
            to_sky * swing_km_s / KM_S_PER_AU_D,
        ))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_equator_moves_at_465_m_s_and_the_pole_stands() {
        let when = Instant::parse("2031-03-14T05:00", Scale::Utc).unwrap();
        let speed = |latitude| {
            let (place, swing) = Site::new(-70.0, latitude, 0.0)
                .unwrap()
                .geocentric(&when)
                .unwrap();
            assert!(place.dot(&swing).abs() < 1e-18);
            swing.norm() * KM_S_PER_AU_D
        };
        assert!((speed(0.0) - 0.4651).abs() < 1e-4);
        assert!(speed(90.0) < 1e-9);
    }

    #[test]
    fn the_zenith_of_the_equator_has_the_local_sidereal_time() {
        let when = Instant::parse("2031-03-14T05:00", Scale::Utc).unwrap();
        let (place, swing) = Site::new(25.0, 0.0, 0.0)
            .unwrap()
            .geocentric(&when)
            .unwrap();
        let (tt, ut) = (when.two_part(Scale::Tt), when.two_part(Scale::Utc));
        // To the equator and equinox of date, where sidereal time counts.
        let rows = pnp::pnm06a(tt.0, tt.1);
        let to_date = Matrix3::from_fn(|i, j| rows[i][j]);
        let zenith = to_date * place;
        let sidereal = sofars::erst::gst06a(ut.0, ut.1, tt.0, tt.1) + 25_f64.to_radians();
        let miss = (zenith.y.atan2(zenith.x) - sidereal).sin();
        assert!(
            miss.abs() < 1e-9 && zenith.x * sidereal.cos() > 0.0,
            "{miss}"
        );
        // The swing is the change of place in a second.
        let next = when.later_s(1.0).unwrap();
        let (later, _) = Site::new(25.0, 0.0, 0.0)
            .unwrap()
            .geocentric(&next)
            .unwrap();
        let change = (later - place) * 86_400.0;
        assert!((change - swing).norm() < 1e-4 * swing.norm());
    }

    #[test]
    fn refuses_places_off_the_earth() {
        assert!(Site::new(400.0, 0.0, 0.0).is_err());
        assert!(Site::new(0.0, -91.0, 0.0).is_err());
        assert!(Site::new(0.0, 0.0, f64::NAN).is_err());
    }
}
