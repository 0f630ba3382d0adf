//! How far the coma lets its own fluorescent light through.

use crate::ground::constants::{HC_OVER_K_CM_K, LIGHT_KM_S};
use std::f64::consts::PI;

/// Line-centre opacity per column density, cm²: τ = N S/(√π b) with b in wavenumbers.
///
/// `line_strength_cm` is the strength of one line, cm per molecule, `wavenumber_cm1` its position.
pub fn line_centre_opacity_cm2(line_strength_cm: f64, wavenumber_cm1: f64, b_km_s: f64) -> f64 {
    line_strength_cm / (PI.sqrt() * wavenumber_cm1 * b_km_s / LIGHT_KM_S)
}

/// Share of a parallel band's strength in its strongest line, for a linear molecule with rotational
/// constant B at temperature T.
///
/// The strength of R(J) goes as (J+1) exp(−hcBJ(J+1)/kT), of P(J) as J exp(…). `only_even` leaves
/// out odd J (carbon dioxide: the oxygen nuclei have no spin).
pub fn strongest_line_fraction(b_cm1: f64, temperature_k: f64, only_even: bool) -> f64 {
    let x = HC_OVER_K_CM_K * b_cm1 / temperature_k;
    let step = if only_even { 2 } else { 1 };
    let (mut sum, mut strongest) = (0.0, 0.0_f64);
    for j in (0..2000).step_by(step) {
        let j = f64::from(j);
        let boltzmann = (-x * j * (j + 1.0)).exp();
        sum += (2.0 * j + 1.0) * boltzmann;
        strongest = strongest.max((j + 1.0) * boltzmann);
        if boltzmann < 1e-16 {
            break;
        }
    }
    strongest / sum
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shares_add_up_and_cold_gas_has_one_line() {
        assert!((strongest_line_fraction(2.0, 0.1, false) - 1.0).abs() < 1e-12);
        let warm = strongest_line_fraction(0.39, 50.0, false);
        let even = strongest_line_fraction(0.39, 50.0, true);
        assert!((even / warm - 2.0).abs() < 0.05, "{even} {warm}");
    }
}
