//! Upper limits of what was not detected.

use crate::ground::Measured;
use statrs::distribution::{ContinuousCDF, Normal};

/// Confidence of the one-sided limits that this program quotes.
pub const LIMIT_CONFIDENCE: f64 = 0.997;

/// One-sided upper limit of a quantity that cannot be negative: the measurement's normal
/// distribution cut at zero and renormalised, and its 99.7 % point L, so that
/// 1 − Φ((L − F)/σ) = 0.003 Φ(F/σ). Always positive, however negative the measured F is.
pub fn upper_limit(measured: Measured) -> f64 {
    let normal = Normal::standard();
    let z = measured.value / measured.sigma;
    let tail = (1.0 - LIMIT_CONFIDENCE) * normal.cdf(z);
    if tail < 1e-290 {
        // Far below zero the cut normal is an exponential of scale σ/|z|.
        return measured.sigma / z.abs() * -(1.0 - LIMIT_CONFIDENCE).ln();
    }
    measured.sigma * (z - normal.inverse_cdf(tail))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn solves_its_equation() {
        let normal = Normal::standard();
        for z in [-6.0, -2.0, 0.0, 1.0, 2.9] {
            let limit = upper_limit(Measured::new(z, 1.0));
            let inside = normal.cdf(limit - z) - normal.cdf(-z);
            assert!(limit > 0.0);
            assert!(
                (inside / normal.cdf(z) - LIMIT_CONFIDENCE).abs() < 1e-6,
                "{z} {limit}"
            );
        }
    }

    #[test]
    fn stays_finite_far_below_zero() {
        let near = upper_limit(Measured::new(-30.0, 1.0));
        let far = upper_limit(Measured::new(-50.0, 1.0));
        assert!(far > 0.0 && far < near);
    }
}
