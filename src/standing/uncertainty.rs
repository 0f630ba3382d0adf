//! How well a censored distribution is known.
//!
//! With limits on one side Greenwood's (1926) variance of the product limit, on the reversed axis
//! for upper limits, Var F(v) = F² Σ_{v_j > v} d_j / (n_j (n_j − d_j)). With lower limits among
//! upper ones, where no such sum exists, the delete-one jackknife, Var = (n−1)/n Σ (F₋ᵢ − F̄)².
//! The band is pointwise, on the log(−log) scale (Kalbfleisch & Prentice 1980), so that it stays
//! between 0 and 1.

use super::distribution::{Censored, Distribution, Known};

/// A distribution with the sample behind it.
#[derive(Clone, Debug)]
pub struct Estimated {
    distribution: Distribution,
    sample: Vec<Censored>,
    /// Delete-one estimates, where Greenwood's sum does not exist.
    without_one: Vec<Distribution>,
    two_sided: bool,
}

/// One step of a distribution with its 68.3 % band.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BandStep {
    /// Value.
    pub value: f64,
    /// P(X ≤ value).
    pub at_or_below: f64,
    /// Lower edge of the band.
    pub low: f64,
    /// Upper edge.
    pub high: f64,
}

impl Estimated {
    /// Estimates distribution and errors; `None` when no entry is a value.
    pub fn of(sample: &[Censored]) -> Option<Self> {
        let distribution = Distribution::estimate(sample)?;
        let has = |k| sample.iter().any(|e| e.known == k);
        let two_sided = has(Known::Lower);
        let mut without_one = Vec::new();
        if two_sided {
            for i in 0..sample.len() {
                let mut rest = sample.to_vec();
                rest.remove(i);
                without_one.extend(Distribution::estimate(&rest));
            }
        }
        Some(Self {
            distribution,
            sample: sample.to_vec(),
            without_one,
            two_sided,
        })
    }

    /// The distribution.
    pub fn distribution(&self) -> &Distribution {
        &self.distribution
    }

    /// Standard error of P(X ≤ v).
    pub fn sigma(&self, v: f64) -> f64 {
        if self.two_sided {
            self.jackknife(v)
        } else {
            self.greenwood(v)
        }
    }

    fn greenwood(&self, v: f64) -> f64 {
        let mut sum = 0.0;
        let mut steps: Vec<f64> = self.distribution.steps().map(|s| s.0).collect();
        steps.retain(|s| *s > v);
        for s in steps {
            let here = |e: &&Censored| e.known == Known::Value && e.value == s;
            let d = self.sample.iter().filter(here).count() as f64;
            let n = self.sample.iter().filter(|e| e.value <= s).count() as f64;
            if n > d {
                sum += d / (n * (n - d));
            }
        }
        self.distribution.at_or_below(v) * f64::sqrt(sum)
    }

    fn jackknife(&self, v: f64) -> f64 {
        let n = self.without_one.len() as f64;
        let each = || self.without_one.iter().map(|d| d.at_or_below(v));
        let mean = each().sum::<f64>() / n;
        ((n - 1.0) / n * each().map(|f| (f - mean).powi(2)).sum::<f64>()).sqrt()
    }

    /// Number of comets without limits that would fix P(X ≤ v) as well, p (1 − p) / σ²; never more
    /// than there are entries. Where p is 0 or 1 nothing is known of σ: the values alone count.
    pub fn effective_entries(&self, v: f64) -> f64 {
        let entries = self.sample.len() as f64;
        let p = self.distribution.at_or_below(v);
        let sigma = self.sigma(v);
        let values = self.sample.iter().filter(|e| e.known == Known::Value);
        if sigma > 0.0 && p > 0.0 && p < 1.0 {
            (p * (1.0 - p) / (sigma * sigma)).clamp(1.0, entries)
        } else {
            values.count() as f64
        }
    }

    /// The steps with their pointwise 68.3 % band.
    pub fn band(&self) -> Vec<BandStep> {
        let step = |(value, f): (f64, f64)| {
            let sigma = self.sigma(value);
            let (low, high) = if f > 0.0 && f < 1.0 && sigma > 0.0 {
                let spread = sigma / (f * f.ln().abs());
                (f.powf(spread.exp()), f.powf((-spread).exp()))
            } else {
                (f, f)
            };
            BandStep {
                value,
                at_or_below: f,
                low,
                high,
            }
        };
        self.distribution.steps().map(step).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn e(value: f64, known: Known) -> Censored {
        Censored { value, known }
    }

    #[test]
    fn without_limits_the_error_is_binomial() {
        let sample: Vec<_> = (1..=10).map(|v| e(f64::from(v), Known::Value)).collect();
        let d = Estimated::of(&sample).expect("values");
        let sigma = (0.3_f64 * 0.7 / 10.0).sqrt();
        assert!((d.sigma(3.0) - sigma).abs() < 1e-12);
        assert!((d.effective_entries(3.0) - 10.0).abs() < 1e-9);
        assert!(
            d.band()
                .iter()
                .all(|s| s.low <= s.at_or_below && s.at_or_below <= s.high)
        );
    }

    #[test]
    fn limits_cost_information_on_either_side() {
        let mut sample: Vec<_> = (1..=10).map(|v| e(f64::from(v), Known::Value)).collect();
        sample.extend([
            e(6.5, Known::Upper),
            e(7.5, Known::Upper),
            e(8.5, Known::Upper),
        ]);
        let one = Estimated::of(&sample).expect("values");
        assert!(one.effective_entries(3.0) < 13.0);
        sample.push(e(2.5, Known::Lower));
        let two = Estimated::of(&sample).expect("values");
        assert!(two.sigma(3.0) > 0.0 && two.effective_entries(3.0) <= 14.0);
    }
}
