//! The Bessel functions of the Haser model.

use spec_math::Bessel;

/// Modified Bessel function K₀(x), x > 0.
pub fn bessel_k0(x: f64) -> f64 {
    x.bessel_k0()
}

/// Modified Bessel function K₁(x), x > 0.
pub fn bessel_k1(x: f64) -> f64 {
    x.bessel_k1()
}

/// Ki₁(x) = ∫ₓ^∞ K₀(y) dy for x ≥ 0, 2e-15 relative over 1e-6…200.
///
/// Ki₁(x) = ∫₀^∞ exp(−x cosh t)/cosh t dt (Abramowitz & Stegun 1964, 11.2.10); the trapezoid rule
/// converges faster than any power because the integrand and all its derivatives vanish at both
/// ends of the doubled range.
pub fn bessel_k0_tail(x: f64) -> f64 {
    if x == 0.0 {
        return std::f64::consts::FRAC_PI_2;
    }
    let step = (0.5 / x.sqrt()).min(1.0 / 16.0);
    let mut sum = 0.5;
    for k in 1.. {
        let t = step * f64::from(k);
        let half = (0.5 * t).sinh();
        let cosh = 1.0 + 2.0 * half * half;
        let term = (-2.0 * x * half * half).exp() / cosh;
        sum += term;
        if term < 1e-17 * sum {
            break;
        }
    }
    sum * step * (-x).exp()
}

/// 1 − x K₁(x) for x ≥ 0, without cancellation at small x.
///
/// Below 0.02 by the series of K₁ (Abramowitz & Stegun 1964, 9.6.11).
pub fn one_minus_x_k1(x: f64) -> f64 {
    const EULER: f64 = 0.577_215_664_901_532_9;
    if x == 0.0 {
        return 0.0;
    }
    if x >= 0.02 {
        return if x > 700.0 {
            1.0
        } else {
            1.0 - x * bessel_k1(x)
        };
    }
    let q = 0.25 * x * x;
    let log = 2.0 * ((0.5 * x).ln() + EULER);
    // x K₁ = 1 + q Σ qᵏ/(k!(k+1)!) [2 ln(x/2) − ψ(k+1) − ψ(k+2)], ψ(1) = −γ.
    let mut sum = 0.0;
    let mut power = 1.0;
    let mut psi = 1.0;
    for k in 0..4 {
        let k = f64::from(k);
        sum += power * (log - psi);
        psi += 1.0 / (k + 1.0) + 1.0 / (k + 2.0);
        power *= q / ((k + 1.0) * (k + 2.0));
    }
    -q * sum
}
