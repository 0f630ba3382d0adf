//! How many comets exceed a value, and what that says about the population.

use super::distribution::{Censored, Known};
use statrs::distribution::{Beta, ContinuousCDF};

/// Half of the probability outside ±1σ of a normal distribution.
const TAIL_68: f64 = 0.158_655_253_931_457_05;

/// Counts above a value with the fraction they stand for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tail {
    /// Entries certainly above: values above and lower limits at or above.
    pub above: usize,
    /// Entries certainly not above.
    pub not_above: usize,
    /// Limits that allow both.
    pub undecided: usize,
    /// Lower Jeffreys bound of the fraction above (68.3 %), all undecided entries counted below.
    pub low: f64,
    /// Upper Jeffreys bound, all undecided entries counted above.
    pub high: f64,
}

/// Counts the entries above `value`. The bounds are the 15.87 % and 84.13 % points of
/// Beta(k + ½, n − k + ½) (Jeffreys' prior; Brown, Cai & DasGupta 2001, Stat. Sci. 16, 101), with
/// the lower bound 0 for k = 0 and the upper 1 for k = n, as there.
pub fn tail(sample: &[Censored], value: f64) -> Tail {
    let count = |wanted: &dyn Fn(&Censored) -> bool| sample.iter().filter(|e| wanted(e)).count();
    let above = count(&|e| match e.known {
        Known::Value => e.value > value,
        Known::Lower => e.value >= value,
        Known::Upper => false,
    });
    let undecided = count(&|e| match e.known {
        Known::Value => false,
        Known::Lower => e.value < value,
        Known::Upper => e.value > value,
    });
    let n = sample.len();
    Tail {
        above,
        not_above: n - above - undecided,
        undecided,
        low: jeffreys(above, n).0,
        high: jeffreys(above + undecided, n).1,
    }
}

/// 68.3 % Jeffreys interval of a fraction seen as `k` of `n`; (0, 1) for n = 0.
pub fn jeffreys(k: usize, n: usize) -> (f64, f64) {
    if n == 0 {
        return (0.0, 1.0);
    }
    let (k_f, n_f) = (k as f64, n as f64);
    let law = Beta::new(k_f + 0.5, n_f - k_f + 0.5)
        .expect("invariant: both shapes are at least one half");
    let low = if k == 0 {
        0.0
    } else {
        law.inverse_cdf(TAIL_68)
    };
    let high = if k == n {
        1.0
    } else {
        law.inverse_cdf(1.0 - TAIL_68)
    };
    (low, high)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn limits_are_counted_only_where_they_decide() {
        let e = |value, known| Censored { value, known };
        let sample = [
            e(1.0, Known::Value),
            e(3.0, Known::Value),
            e(2.5, Known::Upper),
            e(1.5, Known::Upper),
            e(1.0, Known::Lower),
            e(4.0, Known::Lower),
        ];
        let t = tail(&sample, 2.0);
        assert_eq!((t.above, t.not_above, t.undecided), (2, 2, 2));
        assert!(t.low < 2.0 / 6.0 && t.high > 4.0 / 6.0);
    }
}
