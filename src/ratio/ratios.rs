//! A ratio of two species with its interval, or the limit that the data allow.

use super::draws::Draws;
use super::interval::{Interval, quantile};
use crate::ground::Species;
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;
use serde::{Deserialize, Serialize};
use statrs::distribution::{ContinuousCDF, Normal};

/// One-sided confidence of ratio limits.
const LIMIT_CONFIDENCE: f64 = 0.997;

/// What a ratio is a ratio of.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Basis {
    /// Production rates.
    Production,
    /// Molecules in the aperture, hence mean column densities.
    Column,
}

/// What the data allow to say.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum RatioKind {
    /// Both species detected: a value with intervals.
    Value,
    /// Numerator not detected: an upper limit.
    Upper,
    /// Denominator not detected: a lower limit.
    Lower,
    /// Neither detected.
    Unconstrained,
}

/// A ratio.
#[derive(Clone, Debug)]
pub struct Ratio {
    /// Numerator.
    pub of: Species,
    /// Denominator.
    pub to: Species,
    /// Production rates or columns.
    pub basis: Basis,
    /// What the data allow to say.
    pub kind: RatioKind,
    /// Intervals, for values only.
    pub interval: Option<Interval>,
    /// One-sided 99.7 % limit, for upper and lower limits only.
    pub limit: Option<f64>,
    /// The draws behind the interval (empty unless a value), for the standing.
    pub draws: Vec<f64>,
}

impl Ratio {
    /// log10 of the intervals; `None` where an end is not positive.
    pub fn log10(&self) -> Option<Interval> {
        let i = self.interval?;
        let log = |v: f64| if v > 0.0 { v.log10() } else { f64::NAN };
        Some(Interval {
            median: log(i.median),
            low68: log(i.low68),
            high68: log(i.high68),
            low95: log(i.low95),
            high95: log(i.high95),
        })
    }
}

/// The ratio of two columns of the draws. A species counts as detected when its molecules exceed
/// `detection_sigma` times their error from the fit.
///
/// For a limit the undetected species' normal distribution is cut at zero and renormalised, as for
/// band limits, and multiplied by the same calibration, g and lifetime draws as everything else.
pub fn ratio(draws: &Draws, of: usize, to: usize, basis: Basis, detection_sigma: f64) -> Ratio {
    let detected = |c: usize| draws.molecules[c].signal_to_noise() >= detection_sigma;
    let kind = match (detected(of), detected(to)) {
        (true, true) => RatioKind::Value,
        (false, true) => RatioKind::Upper,
        (true, false) => RatioKind::Lower,
        (false, false) => RatioKind::Unconstrained,
    };
    let mut out = Ratio {
        of: draws.species[of].clone(),
        to: draws.species[to].clone(),
        basis,
        kind,
        interval: None,
        limit: None,
        draws: Vec::new(),
    };
    match kind {
        RatioKind::Value => {
            let top: Vec<f64> = draws.molecule_draws.column(of).to_vec();
            let bottom: Vec<f64> = draws.molecule_draws.column(to).to_vec();
            out.draws = quotient(draws, of, to, basis, &top, &bottom);
            out.interval = Interval::of(out.draws.iter().copied());
        }
        RatioKind::Upper => {
            let top = positive_draws(draws, of);
            let bottom: Vec<f64> = draws.molecule_draws.column(to).to_vec();
            out.limit = limit(
                quotient(draws, of, to, basis, &top, &bottom),
                LIMIT_CONFIDENCE,
            );
        }
        RatioKind::Lower => {
            let top: Vec<f64> = draws.molecule_draws.column(of).to_vec();
            let bottom = positive_draws(draws, to);
            out.limit = limit(
                quotient(draws, of, to, basis, &top, &bottom),
                1.0 - LIMIT_CONFIDENCE,
            );
        }
        RatioKind::Unconstrained => {}
    }
    out
}

fn quotient(
    draws: &Draws,
    of: usize,
    to: usize,
    basis: Basis,
    top: &[f64],
    bottom: &[f64],
) -> Vec<f64> {
    let (t_of, t_to) = (
        draws.residence_draws_s.column(of),
        draws.residence_draws_s.column(to),
    );
    (0..top.len())
        .map(|i| {
            let residence = match basis {
                Basis::Production => t_to[i] / t_of[i],
                Basis::Column => 1.0,
            };
            top[i] / bottom[i] * residence
        })
        .filter(|r| r.is_finite())
        .collect()
}

/// Draws of an undetected species under the condition that it is not negative.
fn positive_draws(draws: &Draws, column: usize) -> Vec<f64> {
    let standard = Normal::standard();
    let best = draws.molecules[column];
    let z = best.signal_to_noise().max(-30.0);
    let inside = standard.cdf(z);
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(draws.seed ^ (0x5eed << 16) ^ column as u64);
    draws
        .factor_draws
        .column(column)
        .iter()
        .map(|factor| {
            // Upper tail probability, uniform on (0, Φ(z)), keeps all digits far below zero.
            let tail = inside * (1.0 - rng.random::<f64>());
            let value = best.sigma * (z - standard.inverse_cdf(tail));
            value.max(0.0) * factor
        })
        .collect()
}

fn limit(mut draws: Vec<f64>, p: f64) -> Option<f64> {
    draws.retain(|d| d.is_finite());
    if draws.is_empty() {
        return None;
    }
    draws.sort_by(f64::total_cmp);
    Some(quantile(&draws, p))
}
