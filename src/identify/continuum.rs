//! A smooth continuum under emission lines, and the scatter about it.

use crate::frame::RestSpectrum;

/// From a median absolute deviation to a normal standard deviation, 1/Φ⁻¹(3/4).
const MAD_TO_SIGMA: f64 = 1.482_602_218_505_602;
/// Values above the level by more than so many deviations are lines.
const CLIP: f64 = 2.5;
/// Quantile at which the search for the level starts: below the median, since lines crowd.
const START: f64 = 0.3;
const ROUNDS: usize = 12;
/// Fewest samples of a window that give a level.
const FEWEST: usize = 7;

/// Continuum and standard deviation at every sample.
pub(super) struct Baseline {
    pub level: Vec<f64>,
    pub scatter: Vec<f64>,
}

/// The level of the samples that are not emission, in windows of `window` samples, joined by straight
/// lines: the median of what is left after values more than 2.5 deviations above it are left out
/// again and again. The deviation is that of the values below the level, so that lines do not count as
/// noise. Where lines cover more than two thirds of a window the level is too high.
pub(super) fn baseline(spectrum: &RestSpectrum, window: usize) -> Option<Baseline> {
    let (flux, good) = (spectrum.flux_erg_s_cm2_aa(), spectrum.good());
    let n = flux.len();
    let window = window.clamp(FEWEST.min(n), n);
    let step = (window / 4).max(1);
    let mut knots: Vec<(usize, f64, f64)> = Vec::new();
    let mut values = Vec::with_capacity(window);
    for middle in (0..n).step_by(step).chain([n - 1]) {
        let from = middle.saturating_sub(window / 2).min(n - window);
        values.clear();
        let samples = from..from + window;
        values.extend(samples.filter(|i| good[*i]).map(|i| flux[i]));
        if values.len() >= FEWEST && knots.last().is_none_or(|k| k.0 < middle) {
            let (level, scatter) = quiet(&mut values);
            knots.push((middle, level, scatter));
        }
    }
    let typical = middle_of(knots.iter().map(|k| k.2).filter(|s| *s > 0.0).collect())?;
    for knot in &mut knots {
        // A window of equal numbers tells nothing about the noise.
        if knot.2 <= 0.0 {
            knot.2 = typical;
        }
    }
    Some(joined(&knots, n))
}

/// Level and deviation of values of which some are too high.
fn quiet(values: &mut [f64]) -> (f64, f64) {
    values.sort_by(f64::total_cmp);
    let mut kept = values.len();
    let mut level = values[(START * (kept - 1) as f64) as usize];
    let mut scatter = 0.0;
    for round in 0..ROUNDS {
        if round > 0 {
            level = values[(kept - 1) / 2];
        }
        let below = values.partition_point(|v| *v < level).max(1);
        // Sorted values below the level: their median distance from it is at the middle one.
        scatter = MAD_TO_SIGMA * (level - values[below / 2]);
        let next = values.partition_point(|v| *v <= level + CLIP * scatter);
        if round > 0 && next == kept {
            break;
        }
        kept = next.max(FEWEST.min(values.len()));
    }
    (level, scatter)
}

pub(super) fn middle_of(mut values: Vec<f64>) -> Option<f64> {
    values.sort_by(f64::total_cmp);
    values.get(values.len() / 2).copied()
}

fn joined(knots: &[(usize, f64, f64)], n: usize) -> Baseline {
    let mut baseline = Baseline {
        level: Vec::with_capacity(n),
        scatter: Vec::with_capacity(n),
    };
    let mut next = 0;
    for i in 0..n {
        while next < knots.len() && knots[next].0 < i {
            next += 1;
        }
        let (a, b) = (
            knots[next.saturating_sub(1)],
            knots[next.min(knots.len() - 1)],
        );
        let span = (b.0 - a.0).max(1) as f64;
        let t = (i.saturating_sub(a.0) as f64 / span).min(1.0);
        baseline.level.push(a.1 + t * (b.1 - a.1));
        baseline.scatter.push(a.2 + t * (b.2 - a.2));
    }
    baseline
}

#[cfg(test)]
mod tests {
    use super::*;
    use rand::SeedableRng;
    use rand_distr::{Distribution, StandardNormal};

    #[test]
    fn noise_gives_its_level_and_deviation_with_and_without_lines() {
        let mut random = rand_xoshiro::Xoshiro256PlusPlus::seed_from_u64(5);
        for lines in [0, 60] {
            let mut values: Vec<f64> = (0..300)
                .map(|i| {
                    let noise: f64 = StandardNormal.sample(&mut random);
                    10.0 + noise + if i < lines { 20.0 } else { 0.0 }
                })
                .collect();
            let (level, scatter) = quiet(&mut values);
            assert!((level - 10.0).abs() < 0.3, "{lines}: {level}");
            assert!((scatter - 1.0).abs() < 0.25, "{lines}: {scatter}");
        }
    }

    #[test]
    fn knots_are_joined_by_straight_lines() {
        let b = joined(&[(0, 1.0, 0.1), (4, 3.0, 0.1), (6, 3.0, 0.3)], 8);
        assert_eq!(b.level, [1.0, 1.5, 2.0, 2.5, 3.0, 3.0, 3.0, 3.0]);
        assert!((b.scatter[5] - 0.2).abs() < 1e-12);
    }
}
