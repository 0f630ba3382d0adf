//! A share of trials with its binomial bounds.

/// Half-width of the bounds in standard deviations: 95.4 % confidence.
const BOUND_SIGMA: f64 = 2.0;

/// How many of some trials had a property.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Share {
    /// Trials with the property.
    pub count: usize,
    /// All trials in question.
    pub of: usize,
}

impl Share {
    /// Counts the trials with a property.
    pub fn count(all: impl IntoIterator<Item = bool>) -> Self {
        all.into_iter()
            .fold(Self { count: 0, of: 0 }, |s, yes| Self {
                count: s.count + usize::from(yes),
                of: s.of + 1,
            })
    }

    /// The share, 0 to 1; `None` without trials.
    pub fn value(&self) -> Option<f64> {
        (self.of > 0).then(|| self.count as f64 / self.of as f64)
    }

    /// Score bounds of the true share p at 95.4 %: the two solutions of (p̂ − p)² = 4 p(1 − p)/n
    /// (Wilson 1927, J. Am. Stat. Assoc. 22, 209); 0 to 1 without trials.
    pub fn bounds(&self) -> (f64, f64) {
        let Some(p) = self.value() else {
            return (0.0, 1.0);
        };
        let n = self.of as f64;
        let z2 = BOUND_SIGMA * BOUND_SIGMA;
        let middle = (p + 0.5 * z2 / n) / (1.0 + z2 / n);
        let half = (z2 * (p * (1.0 - p) / n + 0.25 * z2 / (n * n))).sqrt() / (1.0 + z2 / n);
        ((middle - half).max(0.0), (middle + half).min(1.0))
    }

    /// Whether a nominal share lies within the bounds.
    pub fn agrees_with(&self, nominal: f64) -> bool {
        let (low, high) = self.bounds();
        (low..=high).contains(&nominal)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bounds_solve_their_equation() {
        for (count, of) in [(683, 1000), (1, 40), (954, 1000), (3, 7)] {
            let share = Share { count, of };
            let p = share.value().expect("trials");
            let (low, high) = share.bounds();
            assert!(low < p && p < high);
            for bound in [low, high] {
                let distance = (p - bound).powi(2);
                let variance = bound * (1.0 - bound) / of as f64;
                assert!((distance / variance - 4.0).abs() < 1e-9, "{count}/{of}");
            }
        }
    }

    #[test]
    fn ends_stay_within_zero_and_one() {
        let none = Share { count: 0, of: 50 };
        let all = Share { count: 50, of: 50 };
        assert_eq!(none.bounds().0, 0.0);
        assert!((all.bounds().1 - 1.0).abs() < 1e-12);
        assert!(none.bounds().1 > 0.0 && all.bounds().0 < 1.0);
        assert_eq!(Share { count: 0, of: 0 }.bounds(), (0.0, 1.0));
    }
}
