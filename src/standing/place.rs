//! Percentile of a ratio among the comets, with its own error and the sample's size.

use super::distribution::Distribution;
use crate::ratio::Interval;
use rand::SeedableRng;
use rand_distr::{Beta, Distribution as _};
use rand_xoshiro::Xoshiro256PlusPlus;

/// Where a ratio stands.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Standing {
    /// Comets compared with, values and limits.
    pub comets: usize,
    /// Per cent of comets below.
    pub percentile: f64,
    /// Lower end of its 68.3 % interval.
    pub percentile_low: f64,
    /// Upper end.
    pub percentile_high: f64,
}

/// Percentile of a ratio known by draws. The interval joins two doubts: each draw of the ratio has
/// its own fraction p of comets below, and a fraction seen in n comets is itself uncertain, taken
/// as a Beta(np + ½, n(1 − p) + ½) distribution (Jeffreys' prior; common practice for fractions).
pub fn place(distribution: &Distribution, median: f64, draws: &[f64], seed: u64) -> Standing {
    let n = distribution.entries() as f64;
    let fraction = |v: f64| 0.5 * (distribution.below(v) + distribution.at_or_below(v));
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed ^ 0x57a2d);
    let spread = Interval::of(draws.iter().map(|v| {
        let p = fraction(*v).clamp(0.0, 1.0);
        Beta::new(n * p + 0.5, n * (1.0 - p) + 0.5)
            .expect("invariant: both shapes are at least one half")
            .sample(&mut rng)
    }));
    let percentile = 100.0 * fraction(median);
    let (low, high) = spread.map_or((percentile, percentile), |i| {
        (100.0 * i.low68, 100.0 * i.high68)
    });
    Standing {
        comets: distribution.entries(),
        percentile,
        percentile_low: low.min(percentile),
        percentile_high: high.max(percentile),
    }
}

#[cfg(test)]
mod tests {
    use super::super::distribution::{Censored, Known};
    use super::*;

    #[test]
    fn a_value_in_the_middle_is_in_the_middle() {
        let sample: Vec<Censored> = (1..=9)
            .map(|v| Censored {
                value: f64::from(v),
                known: Known::Value,
            })
            .collect();
        let d = Distribution::estimate(&sample).expect("values");
        let s = place(&d, 5.0, &vec![5.0; 2000], 1);
        assert!((s.percentile - 50.0).abs() < 1e-9);
        assert!(s.percentile_low > 25.0 && s.percentile_low < 45.0);
        let wide: Vec<f64> = (0..2000).map(|i| f64::from(i) / 200.0).collect();
        let w = place(&d, 5.0, &wide, 1);
        assert!(w.percentile_high - w.percentile_low > s.percentile_high - s.percentile_low);
    }
}
