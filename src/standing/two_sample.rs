//! Tests whether two censored samples come from one distribution.
//!
//! Weighted log-rank family for samples with limits on one side: at each distinct value, O − E of
//! the first group among those still "at risk" and the hypergeometric variance,
//! U = Σ w (d₁ − d n₁/n), V = Σ w² d (n₁/n)(n₂/n)(n − d)/(n − 1), χ² = U²/V with one degree of
//! freedom. Upper limits are handled on the reversed axis, as in the product limit.
//! Weights: log-rank (Mantel 1966) 1; Peto & Peto (1972) in the form of Fleming & Harrington, the
//! pooled product limit just before the value; Peto & Prentice (Prentice 1978), Π (1 − d/(n + 1))
//! up to and with the value.
//!
//! With limits on both sides no at-risk set exists; the scores of Peto & Peto from the pooled
//! self-consistent distribution, c = F(v) + F(v−) − 1 for a value, F(v−) − 1 for an upper and F(v)
//! for a lower limit, are compared with their permutation variance instead.

use super::distribution::{Censored, Distribution, Known};
use statrs::distribution::{ChiSquared, ContinuousCDF};

/// Which differences count most.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Weighting {
    /// All alike.
    LogRank,
    /// By the pooled product limit just before each value.
    PetoPeto,
    /// By Prentice's modified product limit; the choice for samples with unlike limits.
    PetoPrentice,
}

/// Outcome of a two-sample test.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TwoSample {
    /// Test statistic, χ² with one degree of freedom.
    pub chi2: f64,
    /// Probability of at least this statistic when both samples have one distribution.
    pub p: f64,
    /// Whether the first sample lies higher.
    pub first_higher: bool,
    /// Whether permutation scores were used because limits lie on both sides.
    pub by_scores: bool,
}

/// Compares two samples; `None` when one is empty or nothing distinguishes the entries.
pub fn two_sample(a: &[Censored], b: &[Censored], weighting: Weighting) -> Option<TwoSample> {
    if a.is_empty() || b.is_empty() {
        return None;
    }
    let has = |k: Known| a.iter().chain(b).any(|e| e.known == k);
    match (has(Known::Upper), has(Known::Lower)) {
        (true, true) => by_scores(a, b),
        // Reversed axis: a high value is an early event.
        (true, false) => ranked(&flipped(a), &flipped(b), weighting, -1.0),
        _ => ranked(&timed(a), &timed(b), weighting, 1.0),
    }
}

/// (position, seen) with the later positions to the right.
fn timed(sample: &[Censored]) -> Vec<(f64, bool)> {
    sample
        .iter()
        .map(|e| (e.value, e.known == Known::Value))
        .collect()
}

fn flipped(sample: &[Censored]) -> Vec<(f64, bool)> {
    sample
        .iter()
        .map(|e| (-e.value, e.known == Known::Value))
        .collect()
}

fn ranked(
    a: &[(f64, bool)],
    b: &[(f64, bool)],
    weighting: Weighting,
    way: f64,
) -> Option<TwoSample> {
    let mut times: Vec<f64> = a.iter().chain(b).filter(|e| e.1).map(|e| e.0).collect();
    times.sort_by(f64::total_cmp);
    times.dedup();
    let (mut u, mut v) = (0.0, 0.0);
    let (mut before, mut modified) = (1.0, 1.0);
    for t in times {
        let risk = |s: &[(f64, bool)]| s.iter().filter(|e| e.0 >= t).count() as f64;
        let seen = |s: &[(f64, bool)]| s.iter().filter(|e| e.1 && e.0 == t).count() as f64;
        let (n1, n2, d1) = (risk(a), risk(b), seen(a));
        let (n, d) = (n1 + n2, d1 + seen(b));
        modified *= 1.0 - d / (n + 1.0);
        let w = match weighting {
            Weighting::LogRank => 1.0,
            Weighting::PetoPeto => before,
            Weighting::PetoPrentice => modified,
        };
        before *= 1.0 - d / n;
        u += w * (d1 - d * n1 / n);
        if n > 1.0 {
            v += w * w * d * (n1 / n) * (n2 / n) * (n - d) / (n - 1.0);
        }
    }
    // More early events than expected: the sample lies early, that is low on the axis used.
    outcome(u, v, way * u < 0.0, false)
}

fn by_scores(a: &[Censored], b: &[Censored]) -> Option<TwoSample> {
    let pooled: Vec<Censored> = a.iter().chain(b).copied().collect();
    let f = Distribution::estimate(&pooled)?;
    let score = |e: &Censored| match e.known {
        Known::Value => f.at_or_below(e.value) + f.below(e.value) - 1.0,
        Known::Upper => f.below(e.value) - 1.0,
        Known::Lower => f.at_or_below(e.value),
    };
    let scores: Vec<f64> = pooled.iter().map(score).collect();
    let (n, n1) = (pooled.len() as f64, a.len() as f64);
    let mean = scores.iter().sum::<f64>() / n;
    let u: f64 = scores[..a.len()].iter().map(|c| c - mean).sum();
    let scatter: f64 = scores.iter().map(|c| (c - mean).powi(2)).sum();
    let v = n1 * (n - n1) / (n * (n - 1.0)) * scatter;
    outcome(u, v, u > 0.0, true)
}

fn outcome(u: f64, v: f64, first_higher: bool, by_scores: bool) -> Option<TwoSample> {
    if v <= 0.0 {
        return None;
    }
    let chi2 = u * u / v;
    let law = ChiSquared::new(1.0).expect("invariant: one degree of freedom");
    Some(TwoSample {
        chi2,
        p: law.sf(chi2),
        first_higher,
        by_scores,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn of(values: &[(f64, Known)]) -> Vec<Censored> {
        let entry = |&(value, known): &(f64, Known)| Censored { value, known };
        values.iter().map(entry).collect()
    }

    #[test]
    fn the_higher_sample_is_named_whatever_the_limits() {
        for limit in [Known::Value, Known::Upper, Known::Lower] {
            let high: Vec<_> = (0..12)
                .map(|i| (10.0 + f64::from(i), Known::Value))
                .collect();
            let mut low: Vec<_> = (0..11)
                .map(|i| (1.0 + f64::from(i), Known::Value))
                .collect();
            low.push((2.5, limit));
            for w in [
                Weighting::LogRank,
                Weighting::PetoPeto,
                Weighting::PetoPrentice,
            ] {
                let t = two_sample(&of(&high), &of(&low), w).expect("a test");
                assert!(t.first_higher && t.p < 0.01, "{limit:?} {w:?} {t:?}");
            }
        }
    }

    #[test]
    fn both_sides_use_scores_and_empty_samples_none() {
        let a = of(&[
            (1.0, Known::Value),
            (2.0, Known::Upper),
            (3.0, Known::Value),
        ]);
        let b = of(&[
            (7.0, Known::Value),
            (6.0, Known::Lower),
            (9.0, Known::Value),
        ]);
        let t = two_sample(&a, &b, Weighting::LogRank).expect("a test");
        assert!(t.by_scores && !t.first_higher && t.chi2 > 2.0);
        assert!(two_sample(&a, &[], Weighting::LogRank).is_none());
    }
}
