//! One trial: noise drawn, everything analysed again.

use super::truth::{Scene, TrueSpectrum};
use super::{Noise, Rehearsal};
use crate::analysis::analyse;
use crate::ground::{Measured, Result};
use crate::ratio::{Interval, RatioKind};
use crate::spectrum::{Columns, LineNumbers, Spectrum};
use rand::{RngExt, SeedableRng};
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

/// A band flux of one trial.
pub(super) struct BandTrial {
    pub flux: Measured,
    pub detected: bool,
    pub limit: Option<f64>,
}

/// A ratio of one trial.
pub(super) struct RatioTrial {
    pub kind: RatioKind,
    pub interval: Option<Interval>,
    pub limit: Option<f64>,
}

/// What one trial gave.
pub(super) struct Trial {
    pub bands: Vec<BandTrial>,
    pub ratios: Vec<RatioTrial>,
}

/// Odd multiplier that keeps the seeds of neighbouring trials apart. It must not be the increment by
/// which the generator spreads its seed, or trials would share parts of their state.
const SEED_STRIDE: u64 = 0xd134_2543_de82_ef95;

impl Scene {
    /// Draws and analyses trial `k`.
    pub(super) fn trial(&self, how: Rehearsal, k: u64) -> Result<Trial> {
        let seed = how.seed ^ (k + 1).wrapping_mul(SEED_STRIDE);
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed);
        let spectra = self
            .spectra
            .iter()
            .map(|s| s.drawn(how.noise, &mut rng))
            .collect::<Result<Vec<_>>>()?;
        let mut settings = self.settings.clone();
        // Shared draws would make the Monte Carlo error of the intervals common to all trials.
        settings.draws.seed = rng.random();
        let found = analyse(&spectra, &settings)?;
        let bands = found.bands.iter().map(|b| BandTrial {
            flux: b.fit.flux_erg_s_cm2,
            detected: b.fit.detected,
            limit: b.fit.flux_limit_erg_s_cm2,
        });
        let ratios = found.ratios.iter().map(|r| RatioTrial {
            kind: r.ratio.kind,
            interval: r.ratio.interval,
            limit: r.ratio.limit,
        });
        Ok(Trial {
            bands: bands.collect(),
            ratios: ratios.collect(),
        })
    }
}

impl TrueSpectrum {
    fn drawn(&self, noise: Noise, rng: &mut Xoshiro256PlusPlus) -> Result<Spectrum> {
        let flux = (0..self.wavelength_aa.len())
            .map(|i| {
                let (normal, uniform) = match noise {
                    Noise::Gaussian => (StandardNormal.sample(rng), 0.0),
                    Noise::Residuals => (0.0, rng.random::<f64>()),
                };
                let deviate = self.noise(i, noise, normal, uniform);
                if deviate == 0.0 {
                    return self.clean_erg_s_cm2_aa[i];
                }
                self.clean_erg_s_cm2_aa[i] + self.sigma_erg_s_cm2_aa[i] * deviate
            })
            .collect();
        self.with_flux(flux)
    }

    /// The spectrum before noise.
    pub(super) fn clean(&self) -> Result<Spectrum> {
        self.with_flux(self.clean_erg_s_cm2_aa.clone())
    }

    fn with_flux(&self, flux_erg_s_cm2_aa: Vec<f64>) -> Result<Spectrum> {
        let columns = Columns {
            wavelength_aa: self.wavelength_aa.clone(),
            flux_erg_s_cm2_aa,
            sigma_erg_s_cm2_aa: self.errors_given.then(|| self.sigma_erg_s_cm2_aa.clone()),
            flagged: self.flagged.clone(),
            lines: LineNumbers::default(),
        };
        Spectrum::from_columns(&self.label, columns, false)
    }
}
