//! The comet as seen from the Earth.

use super::kepler::KM_S_PER_AU_D;
use super::site::Site;
use super::state::{Orbit, State};
use super::time::{Instant, Scale};
use crate::frame::Geometry;
use crate::ground::constants::{ARCSEC_RAD, LIGHT_KM_S};
use crate::ground::{Error, Result};
use nalgebra::Vector3;
use serde::Serialize;

/// Speed of light, au d⁻¹.
const LIGHT_AU_D: f64 = LIGHT_KM_S / KM_S_PER_AU_D;

/// Where the comet was, how it moved, and how it lay on the sky.
///
/// Position angles count from north through east, 0–360°.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Sky {
    /// Heliocentric distance r_h, au.
    pub heliocentric_au: f64,
    /// Its rate, km s⁻¹, positive when receding from the Sun.
    pub heliocentric_km_s: f64,
    /// Distance to the observer Δ, au.
    pub observer_au: f64,
    /// Projection of the relative velocity on the line of sight, km s⁻¹, positive when receding.
    pub observer_km_s: f64,
    /// Angle Sun–comet–observer, degrees.
    pub phase_deg: f64,
    /// Angle Sun–observer–comet, degrees.
    pub elongation_deg: f64,
    /// Light time Δ/c, s.
    pub light_time_s: f64,
    /// Astrometric right ascension, ICRS, degrees.
    pub ra_deg: f64,
    /// Astrometric declination, ICRS, degrees.
    pub dec_deg: f64,
    /// Position angle of the Sun's direction at the comet, degrees. Meaningless at phase 0° and 180°.
    pub sun_position_angle_deg: f64,
    /// Position angle away from the Sun (where an ion tail points), degrees.
    pub antisolar_position_angle_deg: f64,
    /// Position angle of the negative heliocentric velocity (where the orbit's trail lies), degrees.
    pub velocity_position_angle_deg: f64,
    /// Apparent motion on the sky, arcsec h⁻¹.
    pub motion_arcsec_per_h: f64,
    /// Position angle of the apparent motion, degrees.
    pub motion_position_angle_deg: f64,
    /// Component of the comet's velocity along the line of sight relative to the Earth's centre, km s⁻¹.
    pub sight_geocentric_km_s: f64,
    /// The same relative to the Sun, km s⁻¹.
    pub sight_heliocentric_km_s: f64,
    /// The same relative to the barycentre of the solar system, km s⁻¹.
    pub sight_barycentric_km_s: f64,
    /// Days from the epoch of the elements to the observation, if they have an epoch.
    pub days_from_epoch: Option<f64>,
}

impl Sky {
    /// The four numbers the spectrum needs.
    pub fn geometry(&self) -> Geometry {
        Geometry::new(
            self.heliocentric_au,
            self.heliocentric_km_s,
            self.observer_au,
            self.observer_km_s,
        )
        .expect("invariant: checked when the sky was made")
    }
}

/// Heliocentric position and velocity of the Earth's centre, ICRS.
///
/// The series `epv00` of the IAU's SOFA, within 11 km and 5 mm s⁻¹ of DE405 over 1900–2100.
///
/// # Errors
/// Dates outside 1900–2100, where the series does not hold, are refused.
pub fn earth_heliocentric(when: &Instant) -> Result<State> {
    Ok(earth_and_sun(when)?.0)
}

/// The Earth from the Sun, and the Sun's velocity from the barycentre, au d⁻¹.
fn earth_and_sun(when: &Instant) -> Result<(State, Vector3<f64>)> {
    let (day, part) = when.two_part(Scale::Tdb);
    let Some((helio, bary)) = sofars::eph::epv00(day, part) else {
        return Err(Error::plan(format!(
            "JD {} is outside 1900 to 2100, where the Earth's position is known",
            day + part
        ))
        .remedy("give the distances and rates themselves instead of an orbit"));
    };
    let earth = State {
        position_au: helio[0],
        velocity_au_d: helio[1],
    };
    Ok((earth, Vector3::from(bary[1]) - Vector3::from(helio[1])))
}

/// The comet seen at `when` from the Earth's centre or from a site.
///
/// The comet is taken at t − τ and the observer at t, both heliocentric, with τ iterated until
/// Δ = cτ. The line-of-sight rate is (v_comet(t − τ) − v_observer(t))·u, which is the Doppler shift
/// to first order in v/c; the terms left out (dΔ/dt's own factor 1 − v/c, the Sun's motion about
/// the barycentre during τ, gravitation) stay below 0.02 km s⁻¹ at 60 km s⁻¹. No stellar aberration,
/// light bending or refraction: right ascension and declination are astrometric.
///
/// # Errors
/// Dates outside 1900–2100; a comet nearer to the Sun or the observer or farther than [`Geometry`]
/// allows.
pub fn observe(orbit: &Orbit, when: &Instant, site: Option<&Site>) -> Result<Sky> {
    look(orbit, when, site, true)
}

/// As [`observe`], but with the comet at the same instant as the observer: what tables without light
/// time give. `light_time_s` then is the light time that was neglected.
///
/// # Errors
/// As [`observe`].
pub fn observe_same_instant(orbit: &Orbit, when: &Instant, site: Option<&Site>) -> Result<Sky> {
    look(orbit, when, site, false)
}

/// Comet and observer, au and au d⁻¹.
struct Scene {
    comet: Vector3<f64>,
    comet_motion: Vector3<f64>,
    observer: Vector3<f64>,
    observer_motion: Vector3<f64>,
    earth_motion: Vector3<f64>,
    /// Of the Sun from the barycentre.
    sun_motion: Vector3<f64>,
}

fn look(orbit: &Orbit, when: &Instant, site: Option<&Site>, light_time: bool) -> Result<Sky> {
    let (earth, sun_motion) = earth_and_sun(when)?;
    let mut observer = Vector3::from(earth.position_au);
    let mut observer_motion = Vector3::from(earth.velocity_au_d);
    if let Some(site) = site {
        let (place, swing) = site.geocentric(when)?;
        observer += place;
        observer_motion += swing;
    }
    let days = orbit.days_from_perihelion(when);
    let mut comet = orbit.state_after_perihelion(days);
    if light_time {
        let mut delay_d = 0.0;
        // Each round gains a factor c/v, above 400.
        for _ in 0..20 {
            let next = (Vector3::from(comet.position_au) - observer).norm() / LIGHT_AU_D;
            comet = orbit.state_after_perihelion(days - next);
            if (next - delay_d).abs() < 1e-13 {
                break;
            }
            delay_d = next;
        }
    }
    let scene = Scene {
        comet: comet.position_au.into(),
        comet_motion: comet.velocity_au_d.into(),
        observer,
        observer_motion,
        earth_motion: earth.velocity_au_d.into(),
        sun_motion,
    };
    scene.sky(light_time, orbit.days_from_epoch(when))
}

impl Scene {
    fn sky(&self, light_time: bool, days_from_epoch: Option<f64>) -> Result<Sky> {
        let sight = self.comet - self.observer;
        let (heliocentric_au, observer_au) = (self.comet.norm(), sight.norm());
        let relative = self.comet_motion - self.observer_motion;
        let geometry = Geometry::new(
            heliocentric_au,
            self.comet.dot(&self.comet_motion) / heliocentric_au * KM_S_PER_AU_D,
            observer_au,
            sight.dot(&relative) / observer_au * KM_S_PER_AU_D,
        )?;
        let plane = SkyPlane::at(&sight);
        let (motion_arcsec_per_h, motion_position_angle_deg) =
            self.apparent_motion(&plane, light_time);
        let along = |motion: Vector3<f64>| sight.dot(&motion) / observer_au * KM_S_PER_AU_D;
        Ok(Sky {
            sight_geocentric_km_s: along(self.comet_motion - self.earth_motion),
            sight_heliocentric_km_s: along(self.comet_motion),
            sight_barycentric_km_s: along(self.comet_motion + self.sun_motion),
            heliocentric_au: geometry.heliocentric_au,
            heliocentric_km_s: geometry.heliocentric_km_s,
            observer_au: geometry.observer_au,
            observer_km_s: geometry.observer_km_s,
            phase_deg: angle_deg(&self.comet, &sight),
            elongation_deg: angle_deg(&-self.observer, &sight),
            light_time_s: observer_au / LIGHT_AU_D * 86_400.0,
            ra_deg: plane.ra_rad.to_degrees().rem_euclid(360.0),
            dec_deg: plane.dec_rad.to_degrees(),
            sun_position_angle_deg: plane.position_angle_deg(&-self.comet),
            antisolar_position_angle_deg: plane.position_angle_deg(&self.comet),
            velocity_position_angle_deg: plane.position_angle_deg(&-self.comet_motion),
            motion_arcsec_per_h,
            motion_position_angle_deg,
            days_from_epoch,
        })
    }

    /// Rate (arcsec/h) and position angle of the change of the line of sight. The comet's clock as
    /// seen here runs by 1 − dτ/dt, with dτ/dt = u·(v_c − v_o)/(c + u·v_c).
    fn apparent_motion(&self, plane: &SkyPlane, light_time: bool) -> (f64, f64) {
        let relative = self.comet_motion - self.observer_motion;
        let lag = if light_time {
            plane.sight.dot(&relative) / (LIGHT_AU_D + plane.sight.dot(&self.comet_motion))
        } else {
            0.0
        };
        let change = self.comet_motion * (1.0 - lag) - self.observer_motion;
        let across = change - plane.sight * plane.sight.dot(&change);
        let rate_rad_d = across.norm() / (self.comet - self.observer).norm();
        (
            rate_rad_d / ARCSEC_RAD / 24.0,
            plane.position_angle_deg(&change),
        )
    }
}

/// Angle between two vectors, degrees, without loss of digits near 0° and 180°.
fn angle_deg(a: &Vector3<f64>, b: &Vector3<f64>) -> f64 {
    a.cross(b).norm().atan2(a.dot(b)).to_degrees()
}

/// The plane of the sky at the comet.
struct SkyPlane {
    ra_rad: f64,
    dec_rad: f64,
    sight: Vector3<f64>,
    east: Vector3<f64>,
    north: Vector3<f64>,
}

impl SkyPlane {
    fn at(sight: &Vector3<f64>) -> Self {
        let ra_rad = sight.y.atan2(sight.x);
        let dec_rad = sight.z.atan2(sight.x.hypot(sight.y));
        let ((sin_ra, cos_ra), (sin_dec, cos_dec)) = (ra_rad.sin_cos(), dec_rad.sin_cos());
        Self {
            ra_rad,
            dec_rad,
            sight: sight.normalize(),
            east: Vector3::new(-sin_ra, cos_ra, 0.0),
            north: Vector3::new(-sin_dec * cos_ra, -sin_dec * sin_ra, cos_dec),
        }
    }

    fn position_angle_deg(&self, direction: &Vector3<f64>) -> f64 {
        let angle = direction.dot(&self.east).atan2(direction.dot(&self.north));
        // A tiny negative angle would round up to 360 itself.
        angle.to_degrees().rem_euclid(360.0) % 360.0
    }
}

#[cfg(test)]
#[path = "observe_tests.rs"]
mod tests;
