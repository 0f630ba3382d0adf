//! Chebyshev polynomials, the continuum's basis: T₀ = 1, T₁ = t, T_{k+1} = 2t T_k − T_{k−1}, with
//! t running from −1 to 1 over the window.

/// Values T₀…T_order at t.
pub fn chebyshev(t: f64, order: usize) -> Vec<f64> {
    let mut out = Vec::with_capacity(order + 1);
    for k in 0..=order {
        let value = match k {
            0 => 1.0,
            1 => t,
            _ => 2.0 * t * out[k - 1] - out[k - 2],
        };
        out.push(value);
    }
    out
}

/// Maps a wavelength to t in −1…1 over a window.
pub fn to_unit_interval(x_aa: f64, window_aa: (f64, f64)) -> f64 {
    (2.0 * x_aa - window_aa.0 - window_aa.1) / (window_aa.1 - window_aa.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn is_the_cosine_of_multiple_angles() {
        let theta: f64 = 0.7;
        for (k, value) in chebyshev(theta.cos(), 6).iter().enumerate() {
            assert!((value - (k as f64 * theta).cos()).abs() < 1e-14);
        }
    }
}
