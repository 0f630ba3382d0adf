//! Membership of one of two classes with normal distributions of log10 ratio.
//!
//! f(y) = (1 − w) N(y; μ₁, s₁² + σ²) + w N(y; μ₂, s₂² + σ²), σ the error of a value; limits enter
//! by their cumulative probability. Expectation–maximisation (Dempster, Laird & Rubin 1977, J. R.
//! Stat. Soc. B 39, 1) with the truncated normal's moments for limits; errors smaller than the
//! classes' widths are taken as part of the width, as class widths are published.

use super::distribution::Known;
use statrs::distribution::{Continuous, ContinuousCDF, Normal};

/// One class: mean and standard deviation of log10 ratio, and its share of the population.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ClassShape {
    /// Mean, dex.
    pub mean_dex: f64,
    /// Standard deviation, dex.
    pub sigma_dex: f64,
    /// Share of the comets.
    pub share: f64,
}

/// Two classes, the higher first.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mixture {
    /// Class with the higher mean ("typical").
    pub high: ClassShape,
    /// Class with the lower mean ("depleted").
    pub low: ClassShape,
    /// Natural logarithm of the likelihood.
    pub log_likelihood: f64,
    /// Comets used.
    pub comets: usize,
}

/// A class narrower than this is a few like comets, not a class, dex.
const NARROWEST_DEX: f64 = 0.05;
/// Fewest values for a fit.
const FEWEST: usize = 10;
const ROUNDS: usize = 5_000;

impl Mixture {
    /// Fits the mixture to log10 ratios and limits, starting from two classes as published. `None`
    /// for fewer than ten values, too few to show two classes.
    pub fn fit(sample: &[(f64, Known)], start: [ClassShape; 2]) -> Option<Self> {
        if sample.iter().filter(|e| e.1 == Known::Value).count() < FEWEST {
            return None;
        }
        let mut classes = start;
        let mut likelihood = log_likelihood(sample, &classes);
        for _ in 0..ROUNDS {
            classes = improved(sample, &classes);
            let next = log_likelihood(sample, &classes);
            let gain = next - likelihood;
            likelihood = next;
            if gain.abs() < 1e-10 {
                break;
            }
        }
        let [a, b] = classes;
        let (high, low) = if a.mean_dex >= b.mean_dex {
            (a, b)
        } else {
            (b, a)
        };
        Some(Self {
            high,
            low,
            log_likelihood: likelihood,
            comets: sample.len(),
        })
    }

    /// Probability that a comet with this log10 ratio belongs to the lower class.
    pub fn low_membership(&self, log10_ratio: f64) -> f64 {
        let y = (log10_ratio, Known::Value);
        let (high, low) = (part(&self.high, y), part(&self.low, y));
        let sum = high + low;
        // Far outside both classes the nearer one in its own widths decides.
        if sum > 0.0 {
            low / sum
        } else {
            let far = |c: &ClassShape| ((log10_ratio - c.mean_dex) / c.sigma_dex).abs();
            f64::from(u8::from(far(&self.low) < far(&self.high)))
        }
    }
}

/// Mean of the memberships over the draws of a ratio: its error is propagated.
pub fn mean_membership(mixture: &Mixture, log10_draws: &[f64]) -> Option<f64> {
    let usable: Vec<f64> = log10_draws
        .iter()
        .copied()
        .filter(|v| v.is_finite())
        .collect();
    let sum: f64 = usable.iter().map(|y| mixture.low_membership(*y)).sum();
    (!usable.is_empty()).then(|| sum / usable.len() as f64)
}

fn law(class: &ClassShape) -> Normal {
    Normal::new(class.mean_dex, class.sigma_dex).expect("invariant: a positive width")
}

/// Share times probability (density) of an entry in a class.
fn part(class: &ClassShape, (y, known): (f64, Known)) -> f64 {
    class.share
        * match known {
            Known::Value => law(class).pdf(y),
            Known::Upper => law(class).cdf(y),
            Known::Lower => law(class).sf(y),
        }
}

fn log_likelihood(sample: &[(f64, Known)], classes: &[ClassShape; 2]) -> f64 {
    let one = |e: &(f64, Known)| {
        (part(&classes[0], *e) + part(&classes[1], *e))
            .max(1e-300)
            .ln()
    };
    sample.iter().map(one).sum()
}

/// Expected value and square of an entry that belongs to this class.
fn moments(class: &ClassShape, (y, known): (f64, Known)) -> (f64, f64) {
    let (m, s) = (class.mean_dex, class.sigma_dex);
    let side = match known {
        Known::Value => return (y, y * y),
        Known::Upper => 1.0,
        Known::Lower => -1.0,
    };
    let a = side * (y - m) / s;
    let unit = Normal::standard();
    // Mills' ratio; its asymptote far in the tail.
    let ratio = if a < -30.0 {
        -a
    } else {
        unit.pdf(a) / unit.cdf(a)
    };
    let mean = m - side * s * ratio;
    let variance = s * s * (1.0 - a * ratio - ratio * ratio).max(0.0);
    (mean, mean * mean + variance)
}

fn improved(sample: &[(f64, Known)], classes: &[ClassShape; 2]) -> [ClassShape; 2] {
    let n = sample.len() as f64;
    classes.map(|class| {
        let (mut weight, mut first, mut second) = (0.0, 0.0, 0.0);
        for e in sample {
            let all = part(&classes[0], *e) + part(&classes[1], *e);
            let r = if all > 0.0 {
                part(&class, *e) / all
            } else {
                0.5
            };
            let (m1, m2) = moments(&class, *e);
            weight += r;
            first += r * m1;
            second += r * m2;
        }
        if weight < 1e-9 {
            return ClassShape {
                share: 0.0,
                ..class
            };
        }
        let mean_dex = first / weight;
        let variance = (second / weight - mean_dex * mean_dex).max(0.0);
        ClassShape {
            mean_dex,
            sigma_dex: variance.sqrt().max(NARROWEST_DEX),
            share: weight / n,
        }
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn two_groups_are_found_and_a_limit_joins_the_lower_one() {
        let class = |mean_dex, sigma_dex, share| ClassShape {
            mean_dex,
            sigma_dex,
            share,
        };
        let mut sample = Vec::new();
        for i in -5..=5 {
            sample.push((0.1 + 0.03 * f64::from(i), Known::Value));
            sample.push((-0.9 + 0.03 * f64::from(i), Known::Value));
        }
        sample.push((-0.7, Known::Upper));
        let start = [class(0.0, 0.2, 0.5), class(-0.5, 0.3, 0.5)];
        let m = Mixture::fit(&sample, start).expect("values");
        assert!((m.high.mean_dex - 0.1).abs() < 1e-6, "{m:?}");
        assert!((m.low.share - 12.0 / 23.0).abs() < 1e-6);
        assert!(m.low_membership(-0.9) > 0.999 && m.low_membership(0.1) < 0.001);
        assert!(m.low_membership(-1.5) > 0.5);
        let half = mean_membership(&m, &[0.1, -0.9, f64::NAN]).expect("draws");
        assert!((half - 0.5).abs() < 1e-3);
        assert!(Mixture::fit(&sample[..3], start).is_none());
    }
}
