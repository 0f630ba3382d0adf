//! Outliers and correlated noise: samples dropped on request, errors raised where neighbouring
//! residuals are alike.

use super::outcome::WindowOutcome;
use super::pick::{Picked, SampleUse};
use super::solver::Residuals;
use super::window::WindowInput;
use nalgebra::DMatrix;

/// Rounds of clipping at most.
pub(super) const CLIP_ROUNDS: usize = 6;
/// Longest run of samples that passes for an outlier; longer ones are structure the model lacks.
const LONGEST_RUN: usize = 3;
/// Part of the samples that may be dropped.
const MOST_CLIPPED: f64 = 0.1;
/// Correlations are looked for from this many samples on.
const FEWEST_SAMPLES: usize = 40;
/// The first correlation counts from this many of its errors 1/√n on: by chance once in 30 000 windows.
const SIGNIFICANT: f64 = 4.0;
/// The sum over lags ends before the first correlation below this many errors.
const LAST_LAG: f64 = 2.0;
const MAD_TO_SIGMA: f64 = 1.482_602_218_505_602;

/// Residuals over errors at the fitted samples, and the weighted derivatives.
pub(super) fn residuals(input: &WindowInput<'_>, outcome: &WindowOutcome) -> (Vec<f64>, Vec<f64>) {
    let mut model = input.model();
    model.set_components(outcome.components.clone(), outcome.shapes);
    let n = input.x_aa.len();
    let (mut r, mut columns) = (vec![0.0; n], vec![0.0; n * model.parameters()]);
    model.evaluate(&outcome.parameters, &mut r, &mut columns);
    (r, columns)
}

/// Drops fitted samples farther than `clip_sigma` from the fit, in units of their error or of the
/// scatter (median absolute deviation), whichever is larger; runs of more than three are left, being
/// structure rather than hits. Returns how many were dropped.
pub(super) fn clip(picked: &mut Picked, residuals: &[f64], clip_sigma: f64) -> usize {
    let at: Vec<usize> = picked.fitted().collect();
    let mut sizes: Vec<f64> = residuals.iter().map(|r| r.abs()).collect();
    sizes.sort_by(f64::total_cmp);
    let unit = (MAD_TO_SIGMA * sizes[sizes.len() / 2]).max(1.0);
    let far: Vec<bool> = residuals
        .iter()
        .map(|r| r.abs() > clip_sigma * unit)
        .collect();
    let already = picked.uses.iter().filter(|u| **u == SampleUse::Clipped);
    let mut room = (MOST_CLIPPED * at.len() as f64) as usize;
    room = room.saturating_sub(already.count());
    let (mut dropped, mut i) = (0, 0);
    while i < far.len() {
        let run = far[i..].iter().take_while(|f| **f).count();
        if (1..=LONGEST_RUN.min(room)).contains(&run) {
            for p in &at[i..i + run] {
                picked.uses[*p] = SampleUse::Clipped;
            }
            dropped += run;
            room -= run;
        }
        i += run.max(1);
    }
    dropped
}

/// Autocorrelation of residuals at lags 1, 2, … as far as it is significant; empty when it is not.
pub(super) fn correlations(residuals: &[f64]) -> Vec<f64> {
    let n = residuals.len();
    if n < FEWEST_SAMPLES {
        return Vec::new();
    }
    let error = 1.0 / (n as f64).sqrt();
    let mean = residuals.iter().sum::<f64>() / n as f64;
    let centred: Vec<f64> = residuals.iter().map(|r| r - mean).collect();
    let power: f64 = centred.iter().map(|r| r * r).sum();
    let at = |lag: usize| {
        let pairs = centred.iter().zip(&centred[lag..]);
        pairs.map(|(a, b)| a * b).sum::<f64>() / power
    };
    if power <= 0.0 || at(1) < SIGNIFICANT * error {
        return Vec::new();
    }
    (1..n / 4)
        .map(at)
        .take_while(|rho| *rho > LAST_LAG * error)
        .collect()
}

/// Covariance under correlated noise, C Jᵀ R J C with C = (JᵀJ)⁻¹ and R the correlation matrix of
/// the residuals (the sandwich form); `columns` holds J for all parameters.
pub(super) fn correlated_covariance(
    outcome: &WindowOutcome,
    columns: &[f64],
    rho: &[f64],
) -> DMatrix<f64> {
    let k = outcome.free.len();
    let n = columns.len() / outcome.parameters.len();
    let column = |a: usize| &columns[outcome.free[a] * n..(outcome.free[a] + 1) * n];
    let lagged = |a: usize, b: usize, lag: usize| -> f64 {
        let (ca, cb) = (column(a), column(b));
        ca[..n - lag]
            .iter()
            .zip(&cb[lag..])
            .map(|(x, y)| x * y)
            .sum()
    };
    let middle = DMatrix::from_fn(k, k, |a, b| {
        let own = lagged(a, b, 0);
        let more = rho
            .iter()
            .enumerate()
            .map(|(l, r)| r * (lagged(a, b, l + 1) + lagged(b, a, l + 1)));
        own + more.sum::<f64>()
    });
    let mut out = &outcome.covariance * middle * &outcome.covariance;
    // Correlations are measured with errors of their own: no variance may fall by them.
    for a in 0..k {
        let (old, new) = (outcome.covariance[(a, a)], out[(a, a)]);
        if new < old {
            let grow = if new > 0.0 { (old / new).sqrt() } else { 0.0 };
            for b in 0..k {
                out[(a, b)] *= grow;
                out[(b, a)] *= grow;
            }
            out[(a, a)] = old;
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A reproducible sequence without correlation.
    fn noise(n: usize) -> Vec<f64> {
        let mut state = 7_u64;
        (0..n)
            .map(|_| {
                state = state
                    .wrapping_mul(6_364_136_223_846_793_005)
                    .wrapping_add(1_442_695_040_888_963_407);
                (state >> 33) as f64 / f64::from(1_u32 << 31) - 0.5
            })
            .collect()
    }

    #[test]
    fn white_noise_has_none_and_smoothed_noise_has_the_kernel_s() {
        let white = noise(4000);
        assert!(correlations(&white).is_empty());
        let smooth: Vec<f64> = white.windows(3).map(|w| w.iter().sum::<f64>()).collect();
        let rho = correlations(&smooth);
        // Three equal weights: correlations 2/3 and 1/3, none beyond.
        assert_eq!(rho.len(), 2, "{rho:?}");
        assert!((rho[0] - 2.0 / 3.0).abs() < 0.05 && (rho[1] - 1.0 / 3.0).abs() < 0.05);
    }
}
