//! Thermal emission of dust: a Planck function of free scale.

use crate::ground::constants::{HC_OVER_K_CM_K, LIGHT_CM_S, PLANCK_ERG_S};

/// Second radiation constant hc/k, Å K.
const SECOND_RADIATION_AA_K: f64 = HC_OVER_K_CM_K * 1e8;

/// Planck radiance B_λ(T) = 2hc²/λ⁵ / (e^{hc/λkT} − 1), erg s⁻¹ cm⁻² sr⁻¹ Å⁻¹, at a wavelength in Å.
pub fn planck_erg_s_cm2_sr_aa(x_aa: f64, temperature_k: f64) -> f64 {
    let cm = x_aa * 1e-8;
    let y = SECOND_RADIATION_AA_K / (x_aa * temperature_k);
    2.0 * PLANCK_ERG_S * LIGHT_CM_S * LIGHT_CM_S / cm.powi(5) / y.exp_m1() * 1e-8
}

/// B_λ(x, T)/B_λ(reference, T) and its derivative by T, K⁻¹.
pub(super) fn planck_over_reference(
    x_aa: f64,
    reference_aa: f64,
    temperature_k: f64,
) -> (f64, f64) {
    let c2 = SECOND_RADIATION_AA_K;
    let (y, r) = (
        c2 / (x_aa * temperature_k),
        c2 / (reference_aa * temperature_k),
    );
    // (e^r − 1)/(e^y − 1) in a form that neither overflows.
    let value = (reference_aa / x_aa).powi(5) * (r - y).exp() * (-r).exp_m1() / (-y).exp_m1();
    let log_slope = |y: f64| y / temperature_k / -(-y).exp_m1();
    (value, value * (log_slope(y) - log_slope(r)))
}

/// Temperature of a black, fast-turning body in sunlight, 278 K r_h^−1/2 (common practice), which
/// coma grains exceed by some per cent to tens of per cent.
pub fn grey_temperature_k(heliocentric_au: f64) -> f64 {
    278.0 / heliocentric_au.sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ratio_and_slope_follow_the_radiance() {
        let (x, r) = (45_000.0, 37_000.0);
        for t in [120.0, 278.0, 900.0] {
            let ratio = |t: f64| planck_erg_s_cm2_sr_aa(x, t) / planck_erg_s_cm2_sr_aa(r, t);
            let (value, by_k) = planck_over_reference(x, r, t);
            assert!((value / ratio(t) - 1.0).abs() < 1e-12);
            let numeric = (ratio(t + 0.01) - ratio(t - 0.01)) / 0.02;
            assert!((by_k / numeric - 1.0).abs() < 1e-6, "{t}");
        }
        assert!(planck_over_reference(3000.0, 50_000.0, 10.0).0.is_finite());
        assert!((grey_temperature_k(4.0) - 139.0).abs() < 1e-12);
    }
}
