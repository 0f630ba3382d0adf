//! The command line's numbers, judged.

use super::Efficiency;
use crate::coma::equilibrium::Conditions;
use crate::efficiency::Detail;
use crate::ground::{Error, Result};

/// Distances for which efficiencies are given, au.
const RH_AU: (f64, f64) = (0.1, 30.0);
/// Largest speed, km/s.
const RDOT_KM_S: f64 = 200.0;
/// Fewest and most places in a range.
const POINTS: (usize, usize) = (2, 2001);
/// Most draws.
const MOST_DRAWS: usize = 10_000;

/// Where to compute.
pub(super) enum Places {
    /// One place and velocity.
    One(Conditions),
    /// Two or more.
    Range(Range),
}

/// Places in a row.
pub(super) struct Range {
    pub places: Vec<Conditions>,
    /// True when the distance changes, false when the velocity does.
    pub of_distance: bool,
    /// The velocity or distance asked for beside the range, to be marked.
    pub marked: Option<f64>,
}

impl Places {
    pub fn all(&self) -> Vec<Conditions> {
        match self {
            Self::One(at) => vec![*at],
            Self::Range(range) => range.places.clone(),
        }
    }

    pub fn first(&self) -> Conditions {
        match self {
            Self::One(at) => *at,
            Self::Range(range) => range.places[0],
        }
    }
}

/// A checked command line.
pub(super) struct Request {
    pub places: Places,
    pub detail: Detail,
    pub most: usize,
}

/// All lines with the errors of their own data.
pub(super) fn first_estimate() -> Detail {
    Detail {
        threshold: 0.01,
        bands: false,
        draws: 0,
        seed: 1,
    }
}

impl Request {
    pub fn check(given: &Efficiency) -> Result<Self> {
        within(
            "--threshold",
            given.threshold,
            0.0,
            1.0,
            "give a fraction such as 0.01",
        )?;
        let rh = given.rh.map(|v| distance("--rh", v)).transpose()?;
        let rdot = given.rdot.map(|v| velocity("--rdot", v)).transpose()?;
        if !(POINTS.0..=POINTS.1).contains(&given.points) {
            return Err(count("--points", given.points, POINTS.0, POINTS.1));
        }
        if !(1..=36).contains(&given.most) {
            return Err(count("--most", given.most, 1, 36));
        }
        if given.draws != 0 && !(16..=MOST_DRAWS).contains(&given.draws) {
            return Err(count("--draws", given.draws, 16, MOST_DRAWS)
                .remedy("32 is usual; 0 switches the draws off"));
        }
        Ok(Self {
            places: places(given, rh, rdot)?,
            detail: Detail {
                threshold: given.threshold,
                bands: given.bands,
                draws: given.draws,
                seed: given.seed,
            },
            most: given.most,
        })
    }
}

fn places(given: &Efficiency, rh: Option<f64>, rdot: Option<f64>) -> Result<Places> {
    let at = |heliocentric_au: f64, heliocentric_km_s: f64| Conditions {
        heliocentric_au,
        heliocentric_km_s,
        width_km_s: 0.0,
    };
    // The parser asks for --rh unless there is --rh-range, and likewise for --rdot.
    let (rh, rdot) = (rh, rdot);
    let missing = || {
        Error::plan("--rh and --rdot are needed")
            .remedy("give both, or one with a range of the other")
    };
    if let Some(text) = &given.range {
        let (low, high) = range("--range", text)?;
        velocity("--range", low)?;
        velocity("--range", high)?;
        let rh = rh.ok_or_else(missing)?;
        let places = steps(low, high, given.points).map(|v| at(rh, v)).collect();
        return Ok(Places::Range(Range {
            places,
            of_distance: false,
            marked: rdot,
        }));
    }
    if let Some(text) = &given.rh_range {
        let (low, high) = range("--rh-range", text)?;
        distance("--rh-range", low)?;
        distance("--rh-range", high)?;
        let rdot = rdot.ok_or_else(missing)?;
        let places = steps(low.ln(), high.ln(), given.points)
            .map(|v| at(v.exp().clamp(low, high), rdot))
            .collect();
        return Ok(Places::Range(Range {
            places,
            of_distance: true,
            marked: rh,
        }));
    }
    Ok(Places::One(at(
        rh.ok_or_else(missing)?,
        rdot.ok_or_else(missing)?,
    )))
}

/// Equal steps from `low` to `high`, both included.
fn steps(low: f64, high: f64, points: usize) -> impl Iterator<Item = f64> {
    #[expect(clippy::cast_precision_loss, reason = "a few thousand points at most")]
    (0..points).map(move |i| low + (high - low) * i as f64 / (points - 1) as f64)
}

fn range(flag: &str, text: &str) -> Result<(f64, f64)> {
    let parsed = text
        .split_once("..")
        .and_then(|(low, high)| Some((low.trim().parse().ok()?, high.trim().parse().ok()?)));
    match parsed {
        Some((low, high)) if low < high => Ok((low, high)),
        _ => Err(
            Error::plan(format!("{flag} {text:?} is not two increasing numbers"))
                .remedy("write the range as LOW..HIGH, for example -60..60"),
        ),
    }
}

fn distance(flag: &str, au: f64) -> Result<f64> {
    within(
        flag,
        au,
        RH_AU.0,
        RH_AU.1,
        "distances from the Sun are in au",
    )
}

fn velocity(flag: &str, km_s: f64) -> Result<f64> {
    within(
        flag,
        km_s,
        -RDOT_KM_S,
        RDOT_KM_S,
        "velocities from the Sun are in km/s, positive when receding",
    )
}

fn within(flag: &str, value: f64, low: f64, high: f64, remedy: &str) -> Result<f64> {
    if (low..=high).contains(&value) {
        return Ok(value);
    }
    Err(Error::plan(format!("{flag} {value} is outside {low} to {high}")).remedy(remedy))
}

fn count(flag: &str, value: usize, low: usize, high: usize) -> Error {
    Error::plan(format!("{flag} {value} is outside {low} to {high}"))
}
