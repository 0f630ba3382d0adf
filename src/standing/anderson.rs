//! Anderson–Darling test that k samples without limits come from one distribution.
//!
//! Scholz & Stephens 1987 (J. Am. Stat. Assoc. 82, 918), equation 7 (mid-ranks, so that ties
//! count): A² = (N−1)/N Σᵢ 1/nᵢ Σⱼ lⱼ/N (N Mᵢⱼ − nᵢ Bⱼ)² / (Bⱼ (N − Bⱼ) − N lⱼ/4) over the
//! distinct pooled values. The probability is found by permuting the labels, which needs no table
//! and holds for small samples.

use rand::SeedableRng;
use rand::seq::SliceRandom;
use rand_xoshiro::Xoshiro256PlusPlus;

/// Permutations drawn for the probability.
const PERMUTATIONS: usize = 9_999;

/// Outcome of the test.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AndersonDarling {
    /// A² with mid-ranks, not standardised.
    pub statistic: f64,
    /// Share of label permutations with at least this A², this one included.
    pub p: f64,
}

/// Compares samples; `None` for fewer than two, an empty one, or values that are all equal.
pub fn anderson_darling(samples: &[&[f64]], seed: u64) -> Option<AndersonDarling> {
    if samples.len() < 2 || samples.iter().any(|s| s.is_empty()) {
        return None;
    }
    let mut labelled: Vec<(f64, usize)> = samples
        .iter()
        .enumerate()
        .flat_map(|(i, s)| s.iter().map(move |v| (*v, i)))
        .collect();
    labelled.sort_by(|a, b| a.0.total_cmp(&b.0));
    let values: Vec<f64> = labelled.iter().map(|l| l.0).collect();
    let mut labels: Vec<usize> = labelled.iter().map(|l| l.1).collect();
    if values.first() == values.last() {
        return None;
    }
    let sizes: Vec<f64> = samples.iter().map(|s| s.len() as f64).collect();
    let statistic = a_squared(&values, &labels, &sizes);
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed ^ 0xad87);
    let mut as_large = 1;
    for _ in 0..PERMUTATIONS {
        labels.shuffle(&mut rng);
        // Equal arrangements may differ in the last bit.
        if a_squared(&values, &labels, &sizes) >= statistic * (1.0 - 1e-12) {
            as_large += 1;
        }
    }
    Some(AndersonDarling {
        statistic,
        p: as_large as f64 / (PERMUTATIONS + 1) as f64,
    })
}

fn a_squared(values: &[f64], labels: &[usize], sizes: &[f64]) -> f64 {
    let n = values.len() as f64;
    let mut below = vec![0.0; sizes.len()];
    let mut sums = vec![0.0; sizes.len()];
    let (mut from, mut all_below) = (0, 0.0);
    while from < values.len() {
        let to = from + values[from..].partition_point(|v| *v <= values[from]);
        let ties = (to - from) as f64;
        let mut here = vec![0.0; sizes.len()];
        for label in &labels[from..to] {
            here[*label] += 1.0;
        }
        let b = all_below + 0.5 * ties;
        let weight = ties / n / (b * (n - b) - 0.25 * n * ties);
        for i in 0..sizes.len() {
            let m = below[i] + 0.5 * here[i];
            sums[i] += weight * (n * m - sizes[i] * b).powi(2);
            below[i] += here[i];
        }
        all_below += ties;
        from = to;
    }
    let total: f64 = sums.iter().zip(sizes).map(|(s, n_i)| s / n_i).sum();
    total * (n - 1.0) / n
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn alike_and_unlike_samples() {
        let a = [1.0, 2.0, 3.0, 4.0, 5.0, 6.0];
        let b = [1.5, 2.5, 3.5, 4.5, 5.5, 2.0];
        let c = [11.0, 12.0, 13.0, 14.0, 15.0, 15.0];
        assert!(anderson_darling(&[&a, &b], 1).expect("a test").p > 0.3);
        assert!(anderson_darling(&[&a, &c], 1).expect("a test").p < 0.01);
        assert!(anderson_darling(&[&a, &[]], 1).is_none());
        assert!(anderson_darling(&[&[1.0], &[1.0]], 1).is_none());
    }
}
