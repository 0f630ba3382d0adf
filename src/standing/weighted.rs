//! Mean of values with errors and an intrinsic scatter of their own.
//!
//! Model: yᵢ = μ + N(0, τ²) + N(0, σᵢ²); mean Σ w y / Σ w with w = 1/(σ² + τ²), error (Σ w)^(−½).
//! τ² by DerSimonian & Laird 1986 (Controlled Clinical Trials 7, 177), the moment estimate from
//! Cochran's Q cut at zero, or by Paule & Mandel 1982 (J. Res. NBS 87, 377), where Q with these
//! weights equals k − 1.

/// Estimator of the intrinsic scatter.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ScatterRule {
    /// Moments, closed form.
    DerSimonianLaird,
    /// Q = k − 1, by iteration.
    PauleMandel,
}

/// A mean over objects that differ by more than their errors.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WeightedMean {
    /// Number of values.
    pub count: usize,
    /// Mean μ.
    pub mean: f64,
    /// Its standard error.
    pub sigma: f64,
    /// Intrinsic standard deviation τ.
    pub scatter: f64,
}

/// Weighted mean of (value, error); `None` without values or with an error that is not positive.
pub fn weighted_mean(data: &[(f64, f64)], rule: ScatterRule) -> Option<WeightedMean> {
    let usable = |&(y, s): &(f64, f64)| y.is_finite() && s.is_finite() && s > 0.0;
    if data.is_empty() || !data.iter().all(usable) {
        return None;
    }
    let tau2 = match rule {
        ScatterRule::DerSimonianLaird => moments(data),
        ScatterRule::PauleMandel => balanced(data),
    };
    let (mean, sum, _) = at(data, tau2);
    Some(WeightedMean {
        count: data.len(),
        mean,
        sigma: sum.sqrt().recip(),
        scatter: tau2.sqrt(),
    })
}

/// Mean, sum of weights and Q at this τ².
fn at(data: &[(f64, f64)], tau2: f64) -> (f64, f64, f64) {
    let weight = |s: f64| 1.0 / (s * s + tau2);
    let sum: f64 = data.iter().map(|d| weight(d.1)).sum();
    let mean = data.iter().map(|d| weight(d.1) * d.0).sum::<f64>() / sum;
    let q = data
        .iter()
        .map(|d| weight(d.1) * (d.0 - mean).powi(2))
        .sum();
    (mean, sum, q)
}

fn moments(data: &[(f64, f64)]) -> f64 {
    let (_, sum, q) = at(data, 0.0);
    let squares: f64 = data.iter().map(|d| d.1.powi(-4)).sum();
    let slope = sum - squares / sum;
    if slope > 0.0 {
        ((q - (data.len() as f64 - 1.0)) / slope).max(0.0)
    } else {
        0.0
    }
}

/// Q falls monotonically with τ², so bisection finds the root.
fn balanced(data: &[(f64, f64)]) -> f64 {
    let excess = |tau2: f64| at(data, tau2).2 - (data.len() as f64 - 1.0);
    if excess(0.0) <= 0.0 {
        return 0.0;
    }
    let mut high = data.iter().map(|d| d.1 * d.1).fold(0.0, f64::max);
    while excess(high) > 0.0 {
        high *= 2.0;
    }
    let mut low = 0.0;
    for _ in 0..200 {
        let middle = 0.5 * (low + high);
        if excess(middle) > 0.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
    0.5 * (low + high)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn without_excess_scatter_it_is_the_plain_weighted_mean() {
        let data = [(1.0, 1.0), (2.0, 1.0), (1.5, 0.5)];
        for rule in [ScatterRule::DerSimonianLaird, ScatterRule::PauleMandel] {
            let m = weighted_mean(&data, rule).expect("values");
            assert!((m.mean - 1.5).abs() < 1e-12 && m.scatter == 0.0);
            assert!((m.sigma - 6f64.sqrt().recip()).abs() < 1e-12);
        }
        assert!(weighted_mean(&[], ScatterRule::PauleMandel).is_none());
        assert!(weighted_mean(&[(1.0, 0.0)], ScatterRule::PauleMandel).is_none());
    }
}
