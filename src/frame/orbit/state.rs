//! An orbit in space, from elements or from a position and velocity.

use super::elements::{Elements, OBLIQUITY_J2000_ARCSEC, check_julian_date};
use super::kepler::{Conic, GAUSS_K, KM_S_PER_AU_D};
use super::stumpff::arctangent_ratio;
use super::time::Instant;
use crate::ground::constants::ARCSEC_RAD;
use crate::ground::{Error, Result};
use nalgebra::Vector3;

/// The axes of a state vector.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Axes {
    /// Ecliptic and equinox J2000, obliquity [`OBLIQUITY_J2000_ARCSEC`].
    EclipticJ2000,
    /// Equatorial, ICRS. The J2000 equator differs by 0.02″, which is neglected.
    EquatorialIcrs,
}

/// Heliocentric position and velocity at an epoch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StateVector {
    /// Position, au.
    pub position_au: [f64; 3],
    /// Velocity, au d⁻¹.
    pub velocity_au_d: [f64; 3],
    /// The axes of both.
    pub axes: Axes,
    /// Epoch, Julian date in TDB.
    pub epoch_jd_tdb: f64,
}

/// Heliocentric position and velocity on ICRS axes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct State {
    /// Position, au.
    pub position_au: [f64; 3],
    /// Velocity, au d⁻¹.
    pub velocity_au_d: [f64; 3],
}

/// A two-body orbit about the Sun, placed in space and time.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Orbit {
    conic: Conic,
    /// Time of perihelion, Julian date in TDB, in two parts.
    perihelion_jd_tdb: (f64, f64),
    /// Unit vectors, ICRS: to the perihelion, and along the motion there.
    toward: Vector3<f64>,
    along: Vector3<f64>,
    epoch_jd_tdb: Option<f64>,
}

/// From ecliptic J2000 to ICRS axes: a turn by the obliquity.
pub(super) fn ecliptic_to_icrs(v: Vector3<f64>) -> Vector3<f64> {
    turn(v, OBLIQUITY_J2000_ARCSEC * ARCSEC_RAD)
}

fn turn(v: Vector3<f64>, angle_rad: f64) -> Vector3<f64> {
    let (sin, cos) = angle_rad.sin_cos();
    Vector3::new(v.x, cos * v.y - sin * v.z, sin * v.y + cos * v.z)
}

impl StateVector {
    /// With the velocity in km s⁻¹.
    pub fn with_km_s(
        position_au: [f64; 3],
        velocity_km_s: [f64; 3],
        axes: Axes,
        epoch_jd_tdb: f64,
    ) -> Self {
        Self {
            position_au,
            velocity_au_d: velocity_km_s.map(|v| v / KM_S_PER_AU_D),
            axes,
            epoch_jd_tdb,
        }
    }

    /// The orbit through this state, with GM = k².
    ///
    /// # Errors
    /// A distance outside 0.001–1000 au, a speed above 1000 km/s, motion straight at or away from the
    /// Sun, or an epoch that is no Julian date.
    pub fn orbit(&self) -> Result<Orbit> {
        check_julian_date("epoch_jd_tdb", self.epoch_jd_tdb)?;
        let (mut position, mut velocity) = (
            Vector3::from(self.position_au),
            Vector3::from(self.velocity_au_d),
        );
        let distance_au = position.norm();
        if !(0.001..=1000.0).contains(&distance_au) {
            return Err(Error::plan(format!(
                "the position is {distance_au} au from the Sun, outside 0.001 to 1000 au"
            )));
        }
        let speed_km_s = velocity.norm() * KM_S_PER_AU_D;
        if !(0.0..=1000.0).contains(&speed_km_s) {
            return Err(
                Error::plan(format!("the speed is {speed_km_s} km/s, above 1000 km/s"))
                    .remedy("check whether the velocity is in au/d or km/s"),
            );
        }
        if self.axes == Axes::EclipticJ2000 {
            (position, velocity) = (ecliptic_to_icrs(position), ecliptic_to_icrs(velocity));
        }
        through(position, velocity, self.epoch_jd_tdb)
    }
}

/// The orbit through a position and velocity (ICRS, au, au/d).
fn through(position: Vector3<f64>, velocity: Vector3<f64>, epoch: f64) -> Result<Orbit> {
    let gm = GAUSS_K * GAUSS_K;
    let distance = position.norm();
    let momentum = position.cross(&velocity);
    if momentum.norm() <= 1e-12 * distance * velocity.norm() {
        return Err(Error::plan(
            "the velocity points straight at or away from the Sun: no orbit can be made of it",
        ));
    }
    let normal = momentum.normalize();
    let mut apse = velocity.cross(&momentum) / gm - position / distance;
    apse -= normal * normal.dot(&apse);
    let e = apse.norm();
    // On a circle every point will do as the perihelion.
    let toward = if e > 1e-15 {
        apse / e
    } else {
        position / distance
    };
    let along = normal.cross(&toward);
    let conic = Conic::from_parts(
        momentum.norm_squared() / gm / (1.0 + e),
        e,
        2.0 / distance - velocity.norm_squared() / gm,
    )?;
    let nu = position.dot(&along).atan2(position.dot(&toward));
    let chi = universal_anomaly(&conic, nu, position.dot(&velocity));
    Ok(Orbit::new(
        conic,
        (epoch, -conic.days_at(chi)),
        toward,
        along,
        Some(epoch),
    ))
}

/// χ of a true anomaly: (2/√α)·arctan(√(αq/(1+e))·tan(ν/2)), by whichever form keeps the digits.
fn universal_anomaly(conic: &Conic, nu_rad: f64, radial_au2_d: f64) -> f64 {
    let (q, e) = (conic.perihelion_au(), conic.eccentricity());
    let alpha = conic.inverse_axis_per_au();
    let (sin, cos) = (0.5 * nu_rad).sin_cos();
    let root = (q / (1.0 + e)).sqrt();
    let z = alpha * (root * sin / cos).powi(2);
    if z > 0.01 {
        let a = alpha.sqrt();
        2.0 * (a * root * sin).atan2(cos) / a
    } else if z < -0.01 {
        let a = (-alpha).sqrt();
        // e·sinh H = r·v·√|α|/k: does not break down near the asymptote.
        (radial_au2_d * a / (GAUSS_K * e)).asinh() / a
    } else {
        2.0 * root * (sin / cos) * arctangent_ratio(z)
    }
}

impl Orbit {
    pub(super) fn new(
        conic: Conic,
        perihelion_jd_tdb: (f64, f64),
        toward: Vector3<f64>,
        along: Vector3<f64>,
        epoch_jd_tdb: Option<f64>,
    ) -> Self {
        Self {
            conic,
            perihelion_jd_tdb,
            toward,
            along,
            epoch_jd_tdb,
        }
    }

    /// Shape and size.
    pub fn conic(&self) -> &Conic {
        &self.conic
    }

    /// Speed at infinite distance, km s⁻¹; none for an ellipse.
    pub fn v_infinity_km_s(&self) -> Option<f64> {
        self.conic.v_infinity_km_s()
    }

    /// Days from the epoch of the elements to a moment, if they have one. Planets pull a comet off its
    /// two-body path by an amount that grows with this.
    pub fn days_from_epoch(&self, when: &Instant) -> Option<f64> {
        self.epoch_jd_tdb
            .map(|epoch| when.days_since_tdb(epoch, 0.0))
    }

    /// Days from perihelion to a moment.
    pub fn days_from_perihelion(&self, when: &Instant) -> f64 {
        when.days_since_tdb(self.perihelion_jd_tdb.0, self.perihelion_jd_tdb.1)
    }

    /// Position and velocity at a moment.
    pub fn state(&self, when: &Instant) -> State {
        self.state_after_perihelion(self.days_from_perihelion(when))
    }

    /// Position and velocity a number of days after perihelion.
    pub fn state_after_perihelion(&self, days: f64) -> State {
        let p = self.conic.at(days);
        State {
            position_au: (self.toward * p.x_au + self.along * p.y_au).into(),
            velocity_au_d: (self.toward * p.vx_au_d + self.along * p.vy_au_d).into(),
        }
    }

    /// The orbit as published elements. An orbit in the ecliptic gets the node 0°.
    pub fn elements(&self) -> Elements {
        let obliquity = OBLIQUITY_J2000_ARCSEC * ARCSEC_RAD;
        let (toward, along) = (turn(self.toward, -obliquity), turn(self.along, -obliquity));
        let normal = toward.cross(&along);
        let tilt = normal.x.hypot(normal.y);
        let node = if tilt < 1e-15 {
            0.0
        } else {
            normal.x.atan2(-normal.y)
        };
        let ascending = Vector3::new(node.cos(), node.sin(), 0.0);
        let argument = toward
            .dot(&normal.cross(&ascending))
            .atan2(toward.dot(&ascending));
        let turn_deg = |angle: f64| angle.to_degrees().rem_euclid(360.0);
        Elements {
            perihelion_au: self.conic.perihelion_au(),
            eccentricity: self.conic.eccentricity(),
            inclination_deg: tilt.atan2(normal.z).to_degrees(),
            node_deg: turn_deg(node),
            argument_deg: turn_deg(argument),
            perihelion_time_jd_tdb: self.perihelion_jd_tdb.0 + self.perihelion_jd_tdb.1,
            epoch_jd_tdb: self.epoch_jd_tdb,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn vector(position_au: [f64; 3], velocity_au_d: [f64; 3]) -> StateVector {
        StateVector {
            position_au,
            velocity_au_d,
            axes: Axes::EclipticJ2000,
            epoch_jd_tdb: 2_463_000.5,
        }
    }

    #[test]
    fn refuses_impossible_states() {
        for (position, velocity, message) in [
            ([0.0; 3], [0.01, 0.0, 0.0], "the position is 0 au"),
            ([1.5e8, 0.0, 0.0], [0.0, 0.01, 0.0], "the position is"),
            ([1.0, 0.0, 0.0], [0.0, 29.8, 0.0], "the speed is"),
            (
                [f64::NAN, 0.0, 0.0],
                [0.0, 0.01, 0.0],
                "the position is NaN",
            ),
            ([1.0, 0.0, 0.0], [0.0, f64::NAN, 0.0], "the speed is NaN"),
            ([1.0, 0.0, 0.0], [-0.01, 0.0, 0.0], "the velocity points"),
            ([1.0, 0.0, 0.0], [0.0; 3], "the velocity points"),
        ] {
            let error = vector(position, velocity).orbit().unwrap_err();
            assert!(error.message().starts_with(message), "{error}");
        }
    }

    #[test]
    fn units_and_axes_agree() {
        let (r, v) = ([0.4, -1.1, 0.3], [0.01, 0.012, -0.004]);
        let plain = vector(r, v).orbit().unwrap();
        let other = StateVector::with_km_s(
            ecliptic_to_icrs(r.into()).into(),
            ecliptic_to_icrs(Vector3::from(v) * KM_S_PER_AU_D).into(),
            Axes::EquatorialIcrs,
            2_463_000.5,
        );
        let (a, b) = (plain.elements(), other.orbit().unwrap().elements());
        for (x, y) in [
            (a.perihelion_au, b.perihelion_au),
            (a.eccentricity, b.eccentricity),
            (a.inclination_deg, b.inclination_deg),
            (a.node_deg, b.node_deg),
            (a.argument_deg, b.argument_deg),
        ] {
            assert!((x / y - 1.0).abs() < 1e-12, "{x} {y}");
        }
    }

    #[test]
    fn a_circle_in_the_ecliptic_returns_its_state() {
        let v = GAUSS_K;
        let orbit = vector([0.0, 1.0, 0.0], [-v, 0.0, 0.0]).orbit().unwrap();
        let epoch = Instant::from_jd(2_463_000.5, 0.0, super::super::Scale::Tdb).unwrap();
        let state = orbit.state(&epoch);
        let expected = ecliptic_to_icrs(Vector3::new(0.0, 1.0, 0.0));
        assert!((Vector3::from(state.position_au) - expected).norm() < 1e-13);
        assert_eq!(orbit.elements().node_deg, 0.0);
    }
}
