//! Where the comet was: numbers, orbit, state vector or ephemeris.

use super::Checker;
use crate::frame::orbit::{Axes, Elements, Instant, Orbit, Scale, Site, Sky, StateVector, observe};
use crate::frame::{Ephemeris, Geometry};
use crate::ground::{Caveat, Error, Result};
use crate::plan::schema::{CometPlan, DatePlan, OrbitPlan, SitePlan, StatePlan};
use std::path::Path;

/// Two-body motion is doubted beyond this many days from the epoch of the elements.
const FAR_FROM_EPOCH_D: f64 = 100.0;

/// The text of a date.
pub(super) fn date_text(date: &DatePlan) -> String {
    match date {
        DatePlan::Julian(jd) => format!("JD {jd}"),
        DatePlan::Text(text) => text.clone(),
    }
}

/// A moment from a date of the plan.
///
/// # Errors
/// Text that is not a date.
pub fn instant(date: &DatePlan, scale: Scale) -> Result<Instant> {
    match date {
        DatePlan::Julian(jd) => Instant::from_jd(*jd, 0.0, scale),
        DatePlan::Text(text) => Instant::parse(text, scale),
    }
}

/// The orbit of a plan's elements.
///
/// # Errors
/// Elements out of range.
pub fn orbit_of(plan: &OrbitPlan) -> Result<Orbit> {
    let jd = |date: &DatePlan| instant(date, Scale::Tdb).map(|i| i.jd(Scale::Tdb));
    Elements {
        perihelion_au: plan.perihelion_au,
        eccentricity: plan.eccentricity,
        inclination_deg: plan.inclination_deg,
        node_deg: plan.node_deg,
        argument_deg: plan.argument_deg,
        perihelion_time_jd_tdb: jd(&plan.perihelion_time)?,
        epoch_jd_tdb: plan.epoch.as_ref().map(jd).transpose()?,
    }
    .orbit()
}

fn orbit_of_state(plan: &StatePlan) -> Result<Orbit> {
    let axes = match plan.axes.as_str() {
        "ecliptic" => Axes::EclipticJ2000,
        "equatorial" => Axes::EquatorialIcrs,
        other => {
            return Err(Error::plan(format!(
                "axes = {other:?} is neither \"ecliptic\" nor \"equatorial\""
            )));
        }
    };
    StateVector {
        position_au: plan.position_au,
        velocity_au_d: plan.velocity_au_d,
        axes,
        epoch_jd_tdb: instant(&plan.epoch, Scale::Tdb)?.jd(Scale::Tdb),
    }
    .orbit()
}

/// The orbit of a plan, if it has one.
///
/// # Errors
/// Elements or vectors out of range, or both given.
pub fn orbit(comet: &CometPlan) -> Result<Option<Orbit>> {
    match (&comet.orbit, &comet.state) {
        (Some(_), Some(_)) => {
            Err(Error::plan("both orbit and state are given").remedy("keep one of them"))
        }
        (Some(elements), None) => orbit_of(elements).map(Some),
        (None, Some(state)) => orbit_of_state(state).map(Some),
        (None, None) => Ok(None),
    }
}

/// The observatory of a plan.
///
/// # Errors
/// Coordinates out of range.
pub fn site(plan: Option<&SitePlan>) -> Result<Option<Site>> {
    plan.map(|s| Site::new(s.longitude_deg, s.latitude_deg, s.height_m.unwrap_or(0.0)))
        .transpose()
}

impl Checker<'_> {
    /// Geometry and, with an orbit, the whole view.
    pub(super) fn geometry(&mut self) -> Result<(Geometry, Option<Sky>)> {
        let c = &self.plan.comet;
        let at = |key: &str| {
            if c.state.is_some() && key == "orbit" {
                "state".to_owned()
            } else {
                key.to_owned()
            }
        };
        let orbit = orbit(c).map_err(|e| self.file.point(e, &["comet", &at("orbit")]))?;
        if orbit.is_some() && c.ephemeris.is_some() {
            return Err(self.file.point(
                Error::plan("both an orbit and an ephemeris are given").remedy("keep one of them"),
                &["comet", "ephemeris"],
            ));
        }
        let (computed, sky) = match (&orbit, &c.ephemeris) {
            (Some(orbit), _) => {
                let site =
                    site(c.site.as_ref()).map_err(|e| self.file.point(e, &["comet", "site"]))?;
                let sky = observe(orbit, &self.moment()?, site.as_ref())
                    .map_err(|e| self.file.point(e, &["comet", "date"]))?;
                (Some(sky.geometry()), Some(sky))
            }
            (None, Some(table)) => {
                let path = Path::new(table);
                let text = std::fs::read_to_string(path)
                    .map_err(|e| Error::io("cannot read", path, &e))?;
                let geometry = Ephemeris::from_csv(&text, path)?
                    .at(&self.moment()?)
                    .map_err(|e| self.file.point(e, &["comet", "date"]))?;
                (Some(geometry), None)
            }
            (None, None) => (None, None),
        };
        let geometry = self.given_or(computed)?;
        if let Some(days) = sky.and_then(|s| s.days_from_epoch).map(f64::abs)
            && days > FAR_FROM_EPOCH_D
        {
            self.caveats.push(Caveat::Other {
                code: "far-from-epoch",
                text: format!(
                    "the observation is {days:.0} days from the epoch of the elements; two-body motion may be off by more than the errors"
                ),
            });
        }
        Ok((geometry, sky))
    }

    fn moment(&self) -> Result<Instant> {
        let date = self.plan.comet.date.as_ref().ok_or_else(|| {
            self.file.point(
                Error::plan("the key date is missing, and the geometry is to be computed")
                    .remedy("add date = \"2031-04-17T05:12\" (UTC, middle of the exposure)"),
                &["comet"],
            )
        })?;
        instant(date, Scale::Utc).map_err(|e| self.file.point(e, &["comet", "date"]))
    }

    /// Numbers given in the plan, else computed ones; both differing by more than 1 % is a caveat.
    fn given_or(&mut self, computed: Option<Geometry>) -> Result<Geometry> {
        let c = &self.plan.comet;
        let rows = [
            (
                "heliocentric_au",
                c.heliocentric_au,
                computed.map(|g| g.heliocentric_au),
            ),
            (
                "heliocentric_km_s",
                c.heliocentric_km_s,
                computed.map(|g| g.heliocentric_km_s),
            ),
            (
                "observer_au",
                c.observer_au,
                computed.map(|g| g.observer_au),
            ),
            (
                "observer_km_s",
                c.observer_km_s,
                computed.map(|g| g.observer_km_s),
            ),
        ];
        let absent: Vec<&str> = rows
            .iter()
            .filter(|(_, given, computed)| given.is_none() && computed.is_none())
            .map(|(name, ..)| *name)
            .collect();
        if !absent.is_empty() {
            return Err(self.file.point(
                Error::plan(format!("the geometry lacks {}", absent.join(", ")))
                    .remedy("give them, or a date with [comet.orbit], [comet.state] or ephemeris"),
                &["comet"],
            ));
        }
        let mut values = [0.0; 4];
        for (value, (name, given, computed)) in values.iter_mut().zip(rows) {
            *value = given
                .or(computed)
                .expect("invariant: absent ones were refused");
            if let (Some(given), Some(computed)) = (given, computed)
                && (given - computed).abs() > (0.01 * computed.abs()).max(1e-9)
            {
                self.caveats.push(Caveat::Other {
                    code: "geometry-differs",
                    text: format!(
                        "{name} = {given} is given, {computed:.5} follows from the orbit; the given number is used"
                    ),
                });
            }
        }
        Geometry::new(values[0], values[1], values[2], values[3])
            .map_err(|e| self.point_at_value(e, &["comet"]))
    }
}
