//! Which of two models the same data prefer: F-test, corrected Akaike and Bayesian criterion.

use statrs::distribution::{ContinuousCDF, FisherSnedecor};

/// A fit as the criteria see it. Values of several windows add up, because their samples are
/// independent.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Quality {
    /// Weighted sum of squared residuals, with the errors that the fit used.
    pub chi2: f64,
    /// Degrees of freedom.
    pub dof: usize,
    /// −2 ln(likelihood) without the terms that all models of the same data share.
    pub minus_2_ln_likelihood: f64,
    /// Number of samples.
    pub samples: usize,
    /// Number of fitted parameters, an estimated variance included.
    pub parameters: usize,
}

impl Quality {
    /// Samples with given errors. The normal likelihood gives −2 ln L = χ² + constant.
    pub fn known_errors(chi2: f64, samples: usize, dof: usize) -> Self {
        Self {
            chi2,
            dof,
            minus_2_ln_likelihood: chi2,
            samples,
            parameters: samples.saturating_sub(dof),
        }
    }

    /// Samples with one unknown error. At its most likely value, rss/n, the normal likelihood gives
    /// −2 ln L = n ln(rss/n) + constant; the error counts as one more parameter. `sigma` is the
    /// error in use, which only sets the scale of [`chi2`](Self::chi2).
    pub fn unknown_error(rss: f64, samples: usize, dof: usize, sigma: f64) -> Self {
        let n = samples as f64;
        Self {
            chi2: rss / (sigma * sigma),
            dof,
            minus_2_ln_likelihood: n * (rss / n).ln(),
            samples,
            parameters: samples.saturating_sub(dof) + 1,
        }
    }

    /// Both sets of samples together.
    #[must_use]
    pub fn and(self, other: Self) -> Self {
        Self {
            chi2: self.chi2 + other.chi2,
            dof: self.dof + other.dof,
            minus_2_ln_likelihood: self.minus_2_ln_likelihood + other.minus_2_ln_likelihood,
            samples: self.samples + other.samples,
            parameters: self.parameters + other.parameters,
        }
    }

    /// Akaike's criterion corrected for few samples, −2 ln L + 2k + 2k(k+1)/(n − k − 1); `None` when
    /// n ≤ k + 1. Lower is better; only differences between models of the same data mean anything.
    ///
    /// Source: Hurvich & Tsai (1989, Biometrika 76, 297); Akaike (1974, IEEE Trans. Autom. Control
    /// 19, 716).
    pub fn aicc(&self) -> Option<f64> {
        let (n, k) = (self.samples as f64, self.parameters as f64);
        let left = n - k - 1.0;
        let value = self.minus_2_ln_likelihood + 2.0 * k + 2.0 * k * (k + 1.0) / left;
        (left > 0.0 && value.is_finite()).then_some(value)
    }

    /// The Bayesian criterion −2 ln L + k ln n. Lower is better; only differences between models of
    /// the same data mean anything.
    ///
    /// Source: Schwarz (1978, Annals of Statistics 6, 461).
    pub fn bic(&self) -> Option<f64> {
        let (n, k) = (self.samples as f64, self.parameters as f64);
        let value = self.minus_2_ln_likelihood + k * n.ln();
        (self.samples > 0 && value.is_finite()).then_some(value)
    }
}

/// Outcome of an F-test between nested models.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FTest {
    /// F = ((χ²₁ − χ²₂)/Δk) / (χ²₂/dof₂), 1 the smaller model and 2 the larger.
    pub f: f64,
    /// Δk, parameters that the larger model has more.
    pub more: usize,
    /// Degrees of freedom of the larger model.
    pub dof: usize,
    /// Chance of such an F, or a larger one, if the smaller model is true.
    pub p: f64,
}

impl FTest {
    /// Compares a smaller model with a larger one that contains it, on the same data. Errors that
    /// are all wrong by one factor cancel. `None` when the larger has no more parameters, no degree
    /// of freedom, or no residuals left.
    ///
    /// The distribution is exact for linear models. It is nominal where the larger model has a
    /// component whose place or width is fitted, because these mean nothing without the component
    /// (Protassov et al. 2002, ApJ 571, 545): small p-values are then too small.
    pub fn between(smaller: &Quality, larger: &Quality) -> Option<Self> {
        let more = smaller.dof.checked_sub(larger.dof).filter(|k| *k > 0)?;
        if smaller.samples != larger.samples || larger.dof == 0 {
            return None;
        }
        let f = (smaller.chi2 - larger.chi2) / more as f64 / (larger.chi2 / larger.dof as f64);
        let distribution = FisherSnedecor::new(more as f64, larger.dof as f64).ok()?;
        f.is_finite().then(|| Self {
            f,
            more,
            dof: larger.dof,
            p: if f > 0.0 { distribution.sf(f) } else { 1.0 },
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nothing_is_said_where_nothing_can_be() {
        let small = Quality::known_errors(20.0, 12, 10);
        assert_eq!(FTest::between(&small, &small), None);
        let other_data = Quality::known_errors(15.0, 13, 9);
        assert_eq!(FTest::between(&small, &other_data), None);
        let exhausted = Quality::known_errors(0.0, 12, 0);
        assert_eq!(FTest::between(&small, &exhausted), None);
        assert_eq!(exhausted.aicc(), None);
        let exact = Quality::unknown_error(0.0, 12, 8, 1.0);
        assert_eq!((exact.aicc(), exact.bic()), (None, None));
        assert_eq!(FTest::between(&small, &exact), None);
    }

    #[test]
    fn a_fall_of_two_degrees_has_a_closed_form() {
        // For Δk = 2 the survival function is (1 + 2F/dof)^(−dof/2) = (χ²₂/χ²₁)^(dof/2).
        let (one, two) = (
            Quality::known_errors(30.0, 20, 14),
            Quality::known_errors(18.0, 20, 12),
        );
        let test = FTest::between(&one, &two).expect("nested");
        assert!(
            (test.p - (18.0f64 / 30.0).powi(6)).abs() < 1e-12,
            "{test:?}"
        );
        assert!((test.f - 4.0).abs() < 1e-12 && (test.more, test.dof) == (2, 12));
        let risen = FTest::between(&Quality::known_errors(17.0, 20, 14), &two).expect("nested");
        assert_eq!(risen.p, 1.0);
    }

    #[test]
    fn windows_add_up() {
        let (a, b) = (
            Quality::known_errors(30.0, 20, 14),
            Quality::unknown_error(8.0, 10, 8, 2.0),
        );
        let both = a.and(b);
        assert_eq!((both.chi2, both.dof, both.samples), (32.0, 22, 30));
        assert_eq!(both.parameters, 6 + 2 + 1);
        let wanted = 30.0 + 10.0 * 0.8f64.ln() + 9.0 * 30.0f64.ln();
        assert!((both.bic().expect("a number") - wanted).abs() < 1e-12);
    }
}
