//! Wavelengths in standard air and in vacuum.
//!
//! Refractive index of standard dry air (15 °C, 101 325 Pa, 450 ppm CO₂): Ciddor 1996, Applied
//! Optics 35, 1566, with σ = 1/λ_vac in µm⁻¹:
//! (n − 1)·10⁸ = 5 792 105/(238.0185 − σ²) + 167 917/(57.362 − σ²).
//! Fitted by its author from 2300 Å to 1.69 µm; used here for every wavelength above 2000 Å, as is
//! common practice. Below 2000 Å wavelengths are vacuum by convention and are left alone.

const AIR_BEGINS_AA: f64 = 2000.0;

/// Refractive index of standard air at a vacuum wavelength in Å.
pub fn refractive_index(vacuum_aa: f64) -> f64 {
    let s2 = (1.0e4 / vacuum_aa).powi(2);
    1.0 + 0.057_921_05 / (238.0185 - s2) + 0.001_679_17 / (57.362 - s2)
}

/// Air wavelength (Å) of a vacuum wavelength (Å).
pub fn air_from_vacuum_aa(vacuum_aa: f64) -> f64 {
    if vacuum_aa < AIR_BEGINS_AA {
        return vacuum_aa;
    }
    vacuum_aa / refractive_index(vacuum_aa)
}

/// Vacuum wavelength (Å) of an air wavelength (Å): the exact root of vac/n(vac) = air, by fixed-point
/// iteration, which gains four digits a step.
pub fn vacuum_from_air_aa(air_aa: f64) -> f64 {
    if air_from_vacuum_aa(AIR_BEGINS_AA) > air_aa {
        return air_aa;
    }
    let mut vacuum_aa = air_aa;
    for _ in 0..6 {
        vacuum_aa = air_aa * refractive_index(vacuum_aa);
    }
    vacuum_aa
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn round_trip() {
        for vac in [2000.5, 3883.0, 6564.632, 26_700.0] {
            let back = vacuum_from_air_aa(air_from_vacuum_aa(vac));
            assert!((back / vac - 1.0).abs() < 1e-14, "{vac} {back}");
        }
        assert_eq!(air_from_vacuum_aa(1500.0), 1500.0);
    }
}
