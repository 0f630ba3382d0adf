//! The radiation field that the gas sees.

use crate::atomic::SolarSpectrum;
use crate::ground::constants::{HC_OVER_K_CM_K, LIGHT_CM_S, LIGHT_KM_S, PLANCK_ERG_S};
use crate::ground::{Error, Result};
use std::f64::consts::PI;

/// Where the gas is and how it moves.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Conditions {
    /// Distance from the Sun, au.
    pub heliocentric_au: f64,
    /// Its rate of change, km s⁻¹; positive when receding from the Sun.
    pub heliocentric_km_s: f64,
    /// Full width at half maximum of the gas's own velocities along the Sun line, km s⁻¹, over which
    /// the sunlight is averaged (Gaussian). 0 switches this off; that is a fair choice because the
    /// solar spectrum's own resolution (about 5 km s⁻¹ at 3500 Å) is wider than a coma's 1–2 km s⁻¹.
    pub width_km_s: f64,
}

const MOST_AU: f64 = 1000.0;
const LEAST_AU: f64 = 0.01;
const MOST_KM_S: f64 = 700.0;
const MOST_WIDTH_KM_S: f64 = 100.0;

impl Conditions {
    /// At rest at 1 au, no averaging.
    pub const UNIT: Self = Self {
        heliocentric_au: 1.0,
        heliocentric_km_s: 0.0,
        width_km_s: 0.0,
    };

    /// Refuses what is not a number or beyond any comet.
    ///
    /// # Errors
    /// Names the quantity and its allowed range.
    pub fn check(&self) -> Result<()> {
        for (name, value, least, most) in [
            (
                "heliocentric distance, au,",
                self.heliocentric_au,
                LEAST_AU,
                MOST_AU,
            ),
            (
                "heliocentric velocity, km/s,",
                self.heliocentric_km_s,
                -MOST_KM_S,
                MOST_KM_S,
            ),
            (
                "velocity width, km/s,",
                self.width_km_s,
                0.0,
                MOST_WIDTH_KM_S,
            ),
        ] {
            if !(least..=most).contains(&value) {
                return Err(
                    Error::plan(format!("{name} {value} is not from {least} to {most}"))
                        .remedy("check the geometry of the observation"),
                );
            }
        }
        Ok(())
    }
}

/// A radiation field as photon occupation number n̄ of one mode, averaged over direction.
///
/// For the Sun n̄(λ) = F_λ(λ′) λ⁵ / (8π h c²) / r_h², with F_λ the irradiance at 1 au (mean intensity
/// J = F/4π). An atom receding at ṙ_h sees light redshifted, so at its line it meets sunlight that
/// left at the shorter λ′ = λ/(1 + ṙ_h/c) (Swings 1941). Terms of order ṙ_h/c in the flux itself
/// (2e-4 at 60 km s⁻¹) are left out, and so is thermal radiation of the coma and the sky.
#[derive(Clone, Debug)]
pub struct SolarField(Kind);

#[derive(Clone, Debug)]
enum Kind {
    Sun(SolarSpectrum),
    Planck { temperature_k: f64 },
}

impl SolarField {
    /// Diluted, Doppler-shifted sunlight.
    pub fn sun(spectrum: SolarSpectrum) -> Self {
        Self(Kind::Sun(spectrum))
    }

    /// An undiluted blackbody that fills the sky, whatever the [`Conditions`]: populations must then
    /// be those of Boltzmann.
    ///
    /// # Errors
    /// A temperature that is not positive.
    pub fn planck(temperature_k: f64) -> Result<Self> {
        if !(temperature_k > 0.0 && temperature_k.is_finite()) {
            return Err(Error::plan(format!(
                "temperature {temperature_k} K is not positive"
            )));
        }
        Ok(Self(Kind::Planck { temperature_k }))
    }

    /// Photon occupation number met by a line at rest vacuum wavelength, Å.
    pub fn occupation(&self, rest_aa: f64, at: &Conditions) -> f64 {
        match &self.0 {
            Kind::Sun(sun) => {
                let irradiance = sun.averaged_erg_s_cm2_aa(
                    seen_aa(rest_aa, at),
                    rest_aa * at.width_km_s / LIGHT_KM_S,
                );
                let wavelength_cm = rest_aa * 1e-8;
                irradiance * 1e8 * wavelength_cm.powi(5)
                    / (8.0 * PI * PLANCK_ERG_S * LIGHT_CM_S * LIGHT_CM_S)
                    / (at.heliocentric_au * at.heliocentric_au)
            }
            Kind::Planck { temperature_k } => {
                1.0 / (HC_OVER_K_CM_K * 1e8 / (rest_aa * temperature_k)).exp_m1()
            }
        }
    }

    /// Relative standard deviation of that number.
    pub fn relative_sigma(&self, rest_aa: f64, at: &Conditions) -> f64 {
        match &self.0 {
            Kind::Sun(sun) => sun.relative_sigma(seen_aa(rest_aa, at)),
            Kind::Planck { .. } => 0.0,
        }
    }
}

/// Wavelength, Å, at which the sunlight absorbed at `rest_aa` left the Sun.
fn seen_aa(rest_aa: f64, at: &Conditions) -> f64 {
    rest_aa / (1.0 + at.heliocentric_km_s / LIGHT_KM_S)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::atomic::sun;

    #[test]
    fn a_receding_atom_sees_shorter_wavelengths() {
        let at = Conditions {
            heliocentric_km_s: 30.0,
            ..Conditions::UNIT
        };
        assert!((seen_aa(5000.0, &at) - 4999.5).abs() < 1e-3);
    }

    #[test]
    fn sunlight_is_diluted_and_as_hot_as_the_photosphere() {
        let field = SolarField::sun(sun(None).unwrap());
        let near = field.occupation(5500.0, &Conditions::UNIT);
        let far = Conditions {
            heliocentric_au: 2.0,
            ..Conditions::UNIT
        };
        assert!((near / field.occupation(5500.0, &far) - 4.0).abs() < 1e-12);
        // n̄ of a blackbody of 5700–6200 K times the dilution of the solar disc, (R/2 au)².
        let dilution = (695_700.0_f64 / 149_597_870.7).powi(2) / 4.0;
        let planck = |temperature_k| {
            let field = SolarField::planck(temperature_k).unwrap();
            field.occupation(5500.0, &Conditions::UNIT) * dilution
        };
        assert!((planck(5700.0)..planck(6200.0)).contains(&near), "{near}");
    }

    #[test]
    fn impossible_conditions_are_refused() {
        for at in [
            Conditions {
                heliocentric_au: 0.0,
                ..Conditions::UNIT
            },
            Conditions {
                heliocentric_au: f64::NAN,
                ..Conditions::UNIT
            },
            Conditions {
                heliocentric_km_s: 1e4,
                ..Conditions::UNIT
            },
            Conditions {
                width_km_s: -1.0,
                ..Conditions::UNIT
            },
        ] {
            assert!(at.check().is_err(), "{at:?}");
        }
        assert!(SolarField::planck(0.0).is_err());
    }
}
