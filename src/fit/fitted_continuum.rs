//! A window's fitted continuum: its value anywhere, the colour of the dust and its reflectance.

use super::basis::{chebyshev, to_unit_interval};
use super::carrier::Carrier;
use super::thermal::planck_over_reference;
use crate::ground::Measured;
use nalgebra::{DMatrix, DVector};
use std::sync::Arc;

/// Continuum of one window: carrier × Chebyshev polynomial + thermal emission.
#[derive(Clone, Debug)]
pub struct FittedContinuum {
    /// Range of the polynomial, rest vacuum Å.
    pub window_aa: (f64, f64),
    /// Chebyshev coefficients, erg s⁻¹ cm⁻² Å⁻¹.
    pub coefficients: Vec<f64>,
    /// Their covariance.
    pub covariance: DMatrix<f64>,
    /// What the polynomial multiplies, and the value by which that is divided first.
    pub carrier: Option<(Arc<Carrier>, f64)>,
    /// Thermal emission.
    pub thermal: Option<FittedThermal>,
}

/// Thermal emission of the dust.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FittedThermal {
    /// Wavelength of the flux density, Å.
    pub reference_aa: f64,
    /// Flux density there, erg s⁻¹ cm⁻² Å⁻¹.
    pub flux_erg_s_cm2_aa: Measured,
    /// Temperature, K.
    pub temperature_k: f64,
    /// Its error; `None` when it was held.
    pub temperature_sigma_k: Option<f64>,
}

impl FittedContinuum {
    /// Everything under the bands at a rest vacuum wavelength in Å, erg s⁻¹ cm⁻² Å⁻¹.
    pub fn at(&self, x_aa: f64) -> f64 {
        self.scattered_at(x_aa) + self.thermal_at(x_aa)
    }

    /// The part that is returned sunlight, or the polynomial.
    pub fn scattered_at(&self, x_aa: f64) -> f64 {
        let polynomial: f64 = self
            .polynomial(x_aa)
            .iter()
            .zip(&self.coefficients)
            .map(|(t, c)| t * c)
            .sum();
        let carrier = self.carrier.as_ref();
        polynomial * carrier.map_or(1.0, |(c, mean)| c.at(x_aa) / mean)
    }

    /// The thermal part.
    pub fn thermal_at(&self, x_aa: f64) -> f64 {
        self.thermal.map_or(0.0, |t| {
            let shape = planck_over_reference(x_aa, t.reference_aa, t.temperature_k).0;
            t.flux_erg_s_cm2_aa.value * shape
        })
    }

    fn polynomial(&self, x_aa: f64) -> Vec<f64> {
        let t = to_unit_interval(x_aa, self.window_aa);
        chebyshev(t, self.coefficients.len() - 1)
    }

    /// Returned light over sunlight at 1 au at a wavelength, with its error; `None` unless the
    /// carrier is the Sun.
    pub fn reflectance_at(&self, x_aa: f64) -> Option<Measured> {
        let (carrier, mean) = self.carrier.as_ref()?;
        let t = DVector::from_vec(self.polynomial(x_aa));
        carrier
            .is_absolute()
            .then(|| self.linear(&t).scaled(1.0 / mean))
    }

    fn linear(&self, t: &DVector<f64>) -> Measured {
        let value = t.iter().zip(&self.coefficients).map(|(a, b)| a * b).sum();
        Measured::new(
            value,
            (t.transpose() * &self.covariance * t)[0].max(0.0).sqrt(),
        )
    }

    /// Reddening S′ between two wavelengths, % per 1000 Å: the slope of the reflectance over its mean
    /// there, 2 (R₂ − R₁)/(R₂ + R₁)/(λ₂ − λ₁) (A'Hearn et al. 1984; common practice). `None` without a
    /// carrier or where the reflectance is not positive.
    pub fn reddening_percent(&self, low_aa: f64, high_aa: f64) -> Option<Measured> {
        self.carrier.as_ref()?;
        let (t1, t2) = (
            DVector::from_vec(self.polynomial(low_aa)),
            DVector::from_vec(self.polynomial(high_aa)),
        );
        let (r1, r2) = (self.linear(&t1).value, self.linear(&t2).value);
        let sum = r1 + r2;
        if r1 <= 0.0 || r2 <= 0.0 {
            return None;
        }
        let unit = 2.0 * 100.0 * 1000.0 / (high_aa - low_aa);
        let gradient = (&t2 * (2.0 * r1) - &t1 * (2.0 * r2)) / (sum * sum);
        let variance = (gradient.transpose() * &self.covariance * &gradient)[0];
        Some(Measured::new(
            unit * (r2 - r1) / sum,
            unit * variance.max(0.0).sqrt(),
        ))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reddening_of_a_straight_reflectance() {
        let x: Vec<f64> = (0..50).map(|i| 4000.0 + 50.0 * f64::from(i)).collect();
        let star = Carrier::from_samples("star", &x, &vec![3.0; 50], 0.0).unwrap();
        let fitted = FittedContinuum {
            window_aa: (4000.0, 6000.0),
            coefficients: vec![2.0, 0.2],
            covariance: DMatrix::from_diagonal(&DVector::from_vec(vec![0.0, 0.01 * 0.01])),
            carrier: Some((Arc::new(star), 3.0)),
            thermal: None,
        };
        let s = fitted.reddening_percent(4000.0, 6000.0).unwrap();
        // R runs from 1.8 to 2.2: 20 % over 2000 Å; its error is a twentieth of it, like the slope's.
        assert!((s.value - 10.0).abs() < 1e-12 && (s.sigma - 0.5).abs() < 1e-12);
        assert!(
            fitted.reflectance_at(5000.0).is_none(),
            "a star is not the Sun at 1 au"
        );
        assert!((fitted.at(5000.0) - 2.0).abs() < 1e-12);
    }
}
