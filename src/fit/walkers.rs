//! An ensemble of walkers over the parameters of one window, with stretch moves: affine invariant
//! (Goodman & Weare 2010, Communications in Applied Mathematics and Computational Science 5, 65).

use super::model::WindowModel;
use super::outcome::WindowOutcome;
use super::solver::Residuals;
use nalgebra::DMatrix;
use rand::RngExt;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

/// Largest stretch of a move.
const STRETCH: f64 = 2.0;
/// Rounds before counting, and counted.
const BURN: usize = 400;
const ROUNDS: usize = 1600;
/// Every so many rounds are kept as draws.
const THIN: usize = 16;
/// Rounds per autocorrelation time below which a chain is too short.
const ENOUGH: f64 = 40.0;

/// How the walkers fared.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Chain {
    /// Part of the moves that were taken.
    pub accepted: f64,
    /// Longest autocorrelation time among the fluxes, rounds.
    pub autocorrelation: f64,
}

impl Chain {
    /// Whether the chain is long against its memory and moves at all.
    pub(super) fn is_good(&self) -> bool {
        self.accepted > 0.1 && self.autocorrelation * ENOUGH < ROUNDS as f64
    }
}

struct Walker {
    place: Vec<f64>,
    log_probability: f64,
}

struct Posterior<'a> {
    model: &'a WindowModel,
    bounds: &'a [(f64, f64)],
    residuals: Vec<f64>,
    columns: Vec<f64>,
}

impl Posterior<'_> {
    /// −χ²/2 inside the bounds (flat priors).
    fn at(&mut self, p: &[f64]) -> f64 {
        let inside = p
            .iter()
            .zip(self.bounds)
            .all(|(v, (low, high))| v >= low && v <= high);
        if !inside {
            return f64::NEG_INFINITY;
        }
        self.model
            .evaluate(p, &mut self.residuals, &mut self.columns);
        -0.5 * self.residuals.iter().map(|r| r * r).sum::<f64>()
    }
}

/// Walks from the minimum; returns drawn fluxes (draws × bands) and how it went.
pub(super) fn walk(
    model: &WindowModel,
    outcome: &WindowOutcome,
    rng: &mut Xoshiro256PlusPlus,
) -> (DMatrix<f64>, Chain) {
    let k = outcome.parameters.len();
    let mut posterior = Posterior {
        model,
        bounds: &outcome.bounds,
        residuals: vec![0.0; model.count()],
        columns: vec![0.0; model.count() * k],
    };
    let count = 2 * (2 * k).max(12);
    let mut walkers = set_out(outcome, count, &mut posterior, rng);
    let bands = outcome.flux.len();
    let flux = |w: &Walker, b: usize| w.place[outcome.flux_index(b)];
    let mut means = vec![Vec::with_capacity(ROUNDS); bands];
    let mut kept: Vec<f64> = Vec::new();
    let (mut taken, mut tried) = (0_usize, 0_usize);
    for round in 0..BURN + ROUNDS {
        for half in 0..2 {
            let moved = move_half(&mut walkers, half, &mut posterior, rng);
            if round >= BURN {
                taken += moved;
                tried += count / 2;
            }
        }
        if round < BURN {
            continue;
        }
        for (b, mean) in means.iter_mut().enumerate() {
            mean.push(walkers.iter().map(|w| flux(w, b)).sum::<f64>() / count as f64);
        }
        if round % THIN == 0 {
            for w in &walkers {
                kept.extend((0..bands).map(|b| flux(w, b)));
            }
        }
    }
    let chain = Chain {
        accepted: taken as f64 / tried as f64,
        autocorrelation: means.iter().map(|m| memory(m)).fold(0.0, f64::max),
    };
    (
        DMatrix::from_row_slice(kept.len() / bands, bands, &kept),
        chain,
    )
}

/// Walkers about the minimum, spread like its covariance, inside the bounds.
fn set_out(
    outcome: &WindowOutcome,
    count: usize,
    posterior: &mut Posterior<'_>,
    rng: &mut Xoshiro256PlusPlus,
) -> Vec<Walker> {
    let m = outcome.free.len();
    let root = outcome.covariance.clone().cholesky().map_or_else(
        || DMatrix::from_diagonal(&outcome.covariance.diagonal().map(f64::sqrt)),
        |c| c.l(),
    );
    let mut out = Vec::with_capacity(count);
    while out.len() < count {
        let z = nalgebra::DVector::from_fn(m, |_, _| StandardNormal.sample(rng));
        let step = &root * z;
        let mut place = outcome.parameters.clone();
        for (position, parameter) in outcome.free.iter().enumerate() {
            place[*parameter] += step[position];
        }
        for (p, (low, high)) in place.iter_mut().zip(posterior.bounds) {
            if low.is_finite() && high.is_finite() {
                // Parameters that ended on a bound start a little inside, each elsewhere.
                let edge = 0.05 * (high - low) * rng.random::<f64>();
                *p = p.clamp(low + edge, high - edge);
            }
        }
        let log_probability = posterior.at(&place);
        if log_probability.is_finite() {
            out.push(Walker {
                place,
                log_probability,
            });
        }
    }
    out
}

/// Moves one half of the walkers along lines through walkers of the other half; returns how many went.
fn move_half(
    walkers: &mut [Walker],
    half: usize,
    posterior: &mut Posterior<'_>,
    rng: &mut Xoshiro256PlusPlus,
) -> usize {
    let middle = walkers.len() / 2;
    let (first, second) = walkers.split_at_mut(middle);
    let (moving, others) = if half == 0 {
        (first, &*second)
    } else {
        (second, &*first)
    };
    let mut taken = 0;
    for walker in moving {
        let other = &others[rng.random_range(0..others.len())];
        let u: f64 = rng.random();
        let z = ((STRETCH - 1.0) * u + 1.0).powi(2) / STRETCH;
        let place: Vec<f64> = walker
            .place
            .iter()
            .zip(&other.place)
            .map(|(here, there)| there + z * (here - there))
            .collect();
        let log_probability = posterior.at(&place);
        let gain = (place.len() as f64 - 1.0) * z.ln() + log_probability - walker.log_probability;
        if rng.random::<f64>().ln() < gain {
            *walker = Walker {
                place,
                log_probability,
            };
            taken += 1;
        }
    }
    taken
}

/// Integrated autocorrelation time of a series, summed up to five times itself (Sokal's window).
fn memory(series: &[f64]) -> f64 {
    let n = series.len();
    let mean = series.iter().sum::<f64>() / n as f64;
    let centred: Vec<f64> = series.iter().map(|v| v - mean).collect();
    let power: f64 = centred.iter().map(|v| v * v).sum();
    if power <= 0.0 {
        return f64::INFINITY;
    }
    let mut time = 1.0;
    for lag in 1..n / 2 {
        let pairs = centred.iter().zip(&centred[lag..]);
        time += 2.0 * pairs.map(|(a, b)| a * b).sum::<f64>() / power;
        if lag as f64 > 5.0 * time {
            break;
        }
    }
    time
}

#[cfg(test)]
mod tests {
    use super::*;
    use rand::SeedableRng;

    #[test]
    fn memory_of_an_autoregression() {
        // x ← ρ x + noise has the time (1 + ρ)/(1 − ρ).
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(3);
        let mut x = 0.0;
        let series: Vec<f64> = (0..40_000)
            .map(|_| {
                let z: f64 = StandardNormal.sample(&mut rng);
                x = 0.8 * x + z;
                x
            })
            .collect();
        assert!(
            (memory(&series) / 9.0 - 1.0).abs() < 0.15,
            "{}",
            memory(&series)
        );
    }
}
