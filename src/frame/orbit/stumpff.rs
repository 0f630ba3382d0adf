//! The functions that let one formula serve ellipse, parabola and hyperbola.

/// Below this size the power series are used; above it the closed forms have lost under a digit.
const SERIES_BELOW: f64 = 1.0;

/// Stumpff functions c₀…c₃ of ψ: c_k(ψ) = Σ (−ψ)^j/(2j + k)!.
///
/// For ψ = s² > 0 they are cos s, sin s/s, (1 − cos s)/s², (s − sin s)/s³, for ψ < 0 the same with
/// hyperbolic functions. Standard: Danby 1988, Fundamentals of Celestial Mechanics, §6.9 (from memory).
pub(super) fn stumpff(psi: f64) -> [f64; 4] {
    if psi.abs() < SERIES_BELOW {
        let c3 = series(psi, 3);
        let c2 = series(psi, 2);
        return [1.0 - psi * c2, 1.0 - psi * c3, c2, c3];
    }
    let s = psi.abs().sqrt();
    let (c0, sine, half) = if psi > 0.0 {
        (s.cos(), s.sin(), (0.5 * s).sin())
    } else {
        (s.cosh(), s.sinh(), (0.5 * s).sinh())
    };
    // 1 − cos s = 2 sin²(s/2): no cancellation near whole turns.
    let c2 = 2.0 * half * half / psi.abs();
    let c3 = (s - sine) / (s * psi);
    [c0, sine / s, c2, c3]
}

fn series(psi: f64, order: u32) -> f64 {
    let mut term = if order == 2 { 0.5 } else { 1.0 / 6.0 };
    let mut sum = term;
    let mut n = f64::from(order);
    // With |ψ| < 1 ten terms reach 1e-20.
    for _ in 0..10 {
        term *= -psi / ((n + 1.0) * (n + 2.0));
        sum += term;
        n += 2.0;
    }
    sum
}

/// arctan(√z)/√z, and artanh(√−z)/√−z for −1 < z < 0: the inverse that goes with [`stumpff`].
pub(super) fn arctangent_ratio(z: f64) -> f64 {
    if z.abs() < 0.01 {
        // Σ (−z)^j/(2j + 1): nine terms reach 1e-19.
        return (0..9)
            .rev()
            .fold(0.0, |sum, j| 1.0 / f64::from(2 * j + 1) - z * sum);
    }
    let root = z.abs().sqrt();
    if z > 0.0 {
        root.atan() / root
    } else {
        root.atanh() / root
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn series_and_closed_forms_meet() {
        for edge in [1.0_f64, -1.0] {
            let inside = stumpff(edge * (1.0 - 1e-15));
            let outside = stumpff(edge * (1.0 + 1e-15));
            for k in 0..4 {
                assert!((inside[k] / outside[k] - 1.0).abs() < 1e-14, "c{k} {edge}");
            }
        }
        for edge in [0.01_f64, -0.01] {
            let ratio =
                arctangent_ratio(edge * (1.0 - 1e-14)) / arctangent_ratio(edge * (1.0 + 1e-14));
            assert!((ratio - 1.0).abs() < 1e-14, "{edge} {ratio}");
        }
    }
}
