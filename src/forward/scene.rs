//! A scene: what a comet of given composition would look like through the instrument.

use super::{band_flux_erg_s_cm2, grid_aa};
use crate::analysis::Settings;
use crate::coma::ApertureKm;
use crate::fit::{
    Carrier, Resolution, Sampling, Structure, gaussian, gaussian_over_pixel, planck_erg_s_cm2_sr_aa,
};
use crate::frame::Frame;
use crate::ground::constants::{FWHM_PER_SIGMA, LIGHT_KM_S};
use crate::ground::{Error, Result, Species, did_you_mean};
use crate::spectrum::{Columns, LineNumbers, Spectrum};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::sync::Arc;

/// A continuum F(λ) = F₀ [1 + s (λ − λ₀)/1000 Å] · C(λ)/C(λ₀) + thermal emission, in the frame of the
/// observer.
#[derive(Clone, Debug)]
pub struct SceneContinuum {
    /// F₀, erg s⁻¹ cm⁻² Å⁻¹ in the aperture.
    pub flux_erg_s_cm2_aa: f64,
    /// λ₀, vacuum Å.
    pub at_aa: f64,
    /// s, per 1000 Å.
    pub slope_per_1000_aa: f64,
    /// C, in the frame of the comet; 1 without one.
    pub carrier: Option<Arc<Carrier>>,
    /// Thermal flux density at λ₀, erg s⁻¹ cm⁻² Å⁻¹, and its temperature, K.
    pub thermal: Option<(f64, f64)>,
}

impl SceneContinuum {
    /// Flux density at an observed wavelength, Å; `doppler` is observed over rest wavelength, `pixel`
    /// the edges to average the carrier over, if it is to be.
    fn at(&self, x_aa: f64, doppler: f64, pixel_aa: Option<(f64, f64)>) -> f64 {
        let slope = 1.0 + self.slope_per_1000_aa * (x_aa - self.at_aa) / 1000.0;
        let shape = self.carrier.as_ref().map_or(1.0, |c| {
            let here = match pixel_aa {
                Some((low, high)) => c.over_pixel((low / doppler, high / doppler)),
                None => c.at(x_aa / doppler),
            };
            here / c.at(self.at_aa / doppler)
        });
        let thermal = self.thermal.map_or(0.0, |(flux, k)| {
            flux * planck_erg_s_cm2_sr_aa(x_aa, k) / planck_erg_s_cm2_sr_aa(self.at_aa, k)
        });
        self.flux_erg_s_cm2_aa * slope * shape + thermal
    }
}

/// Noise of one sample, σ = √((r F)² + σ₀²) · √(t₀/t).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Noise {
    /// r, the part that grows with the flux.
    pub relative: f64,
    /// σ₀, erg s⁻¹ cm⁻² Å⁻¹.
    pub floor_erg_s_cm2_aa: f64,
    /// t₀, the exposure to which both belong, s.
    pub exposure_s: f64,
}

/// What to simulate, besides the checked settings of the plan.
#[derive(Clone, Debug)]
pub struct SceneSettings {
    /// Production rates, s⁻¹. A measured species that is not named emits nothing.
    pub production_per_s: Vec<(Species, f64)>,
    /// The continuum.
    pub continuum: SceneContinuum,
    /// The noise.
    pub noise: Noise,
    /// Range, vacuum Å in the observer's frame.
    pub range_aa: (f64, f64),
    /// Samples per resolution element.
    pub samples_per_fwhm: f64,
    /// Instrument.
    pub resolution: Resolution,
}

/// A band of the scene.
#[derive(Clone, Debug, PartialEq)]
pub struct SceneBand {
    /// Identifier.
    pub id: String,
    /// Its species.
    pub species: Option<Species>,
    /// Rest centre, vacuum Å.
    pub centre_aa: f64,
    /// Full width of each line with the instrument's, Å.
    pub fwhm_aa: f64,
    /// Its lines.
    pub structure: Structure,
    /// Flux, erg s⁻¹ cm⁻².
    pub flux_erg_s_cm2: f64,
}

/// One sample of a simulated spectrum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SimulatedSample {
    /// Vacuum wavelength in the observer's frame, Å.
    pub wavelength_aa: f64,
    /// Flux density, erg s⁻¹ cm⁻² Å⁻¹.
    pub flux_erg_s_cm2_aa: f64,
    /// Its error, same unit.
    pub sigma_erg_s_cm2_aa: f64,
}

impl SceneSettings {
    /// Fluxes of the plan's bands inside the range; a band without g or coma model emits nothing
    /// unless its species has a production rate.
    ///
    /// # Errors
    /// A production rate of a species that no band in the range shows, or whose g or coma model is
    /// not known.
    pub fn bands(&self, settings: &Settings) -> Result<Vec<SceneBand>> {
        let km = ApertureKm::at(&settings.aperture, settings.geometry.observer_au);
        let mut out = Vec::new();
        for band in &settings.bands {
            let centre_aa = band.model.centre_aa;
            let seen = centre_aa * self.doppler(settings);
            if !(self.range_aa.0 < seen && seen < self.range_aa.1) {
                continue;
            }
            let fwhm = band.model.fwhm_aa.unwrap_or(0.0);
            let rate = band.species.as_ref().map_or(0.0, |s| self.rate(s));
            let mut flux_erg_s_cm2 = 0.0;
            if rate != 0.0 {
                let coma = settings
                    .species
                    .iter()
                    .find(|s| Some(&s.species) == band.species.as_ref());
                let (Some(g), Some(coma)) = (&band.efficiency, coma.and_then(|s| s.coma.as_ref()))
                else {
                    return Err(Error::plan(format!(
                        "band {}: a production rate is given, but g or the scale lengths are not known",
                        band.model.id
                    ))
                    .remedy("give g_photons_s in a [[band]] table and lengths in a [[lifetime]] table"));
                };
                flux_erg_s_cm2 = band_flux_erg_s_cm2(
                    rate,
                    (&coma.lengths, coma.speed_km_s),
                    &km,
                    g.g_photons_s,
                    centre_aa,
                    settings.geometry.observer_au,
                );
            }
            out.push(SceneBand {
                id: band.model.id.clone(),
                species: band.species.clone(),
                centre_aa,
                fwhm_aa: fwhm.hypot(self.resolution.fwhm_aa(centre_aa)),
                structure: band.model.structure.clone(),
                flux_erg_s_cm2,
            });
        }
        self.check_species(&out)?;
        Ok(out)
    }

    fn check_species(&self, bands: &[SceneBand]) -> Result<()> {
        let shown = || bands.iter().filter_map(|b| b.species.as_ref());
        for (species, _) in &self.production_per_s {
            if shown().any(|s| s == species) {
                continue;
            }
            let known: Vec<&str> = shown().map(Species::as_str).collect();
            let mut remedy = format!("species with a band in the range: {}", known.join(", "));
            if let Some(near) = did_you_mean(species.as_str(), known.iter().copied()) {
                remedy = format!("did you mean {near}? {remedy}");
            }
            return Err(Error::plan(format!(
                "a production rate of {species} is given, but no measured band in the range is of it"
            ))
            .remedy(remedy));
        }
        Ok(())
    }

    /// The production rate of a species, 0 when none is given.
    pub fn rate(&self, species: &Species) -> f64 {
        let mut rates = self.production_per_s.iter();
        rates.find(|(s, _)| s == species).map_or(0.0, |(_, q)| *q)
    }

    /// The same scene with another rate of one species.
    #[must_use]
    pub fn with_rate(&self, species: &Species, production_per_s: f64) -> Self {
        let mut out = self.clone();
        out.production_per_s.retain(|(s, _)| s != species);
        out.production_per_s
            .push((species.clone(), production_per_s));
        out
    }

    /// λ_observed/λ_rest of the first spectrum's frame.
    fn doppler(&self, settings: &Settings) -> f64 {
        let velocity = match settings.spectra[0].frame {
            Frame::Observer => settings.geometry.observer_km_s,
            Frame::Comet => 0.0,
            Frame::Shifted { velocity_km_s } => velocity_km_s,
        };
        let beta = velocity / LIGHT_KM_S;
        ((1.0 + beta) / (1.0 - beta)).sqrt()
    }

    fn wavelengths_aa(&self) -> Vec<f64> {
        let (low, high) = self.range_aa;
        match &self.resolution {
            Resolution::ResolvingPower(r) => grid_aa(low, high, *r, self.samples_per_fwhm),
            Resolution::FwhmAa(fwhm) => {
                let step = fwhm / self.samples_per_fwhm;
                let count = ((high - low) / step) as usize;
                (0..count).map(|i| low + step * i as f64).collect()
            }
            Resolution::Table(_) => {
                let mut out = vec![low];
                let mut x = low;
                while x < high {
                    x += self.resolution.fwhm_aa(x) / self.samples_per_fwhm;
                    out.push(x);
                }
                out
            }
        }
    }

    /// The spectrum after an exposure in s, with noise from a seed, or without noise but with its
    /// errors.
    ///
    /// # Errors
    /// As [`SceneSettings::bands`].
    pub fn samples(
        &self,
        settings: &Settings,
        exposure_s: f64,
        seed: Option<u64>,
    ) -> Result<Vec<SimulatedSample>> {
        let bands = self.bands(settings)?;
        let doppler = self.doppler(settings);
        let mut rng = seed.map(Xoshiro256PlusPlus::seed_from_u64);
        let shorter = (self.noise.exposure_s / exposure_s).sqrt();
        let grid = self.wavelengths_aa();
        let per_pixel = settings.spectra[0].fit.sampling == Sampling::Pixel;
        let sample = |i: usize| {
            let x = grid[i];
            let pixel = per_pixel.then(|| pixel_aa(&grid, i));
            // A band keeps its flux from frame to frame, so its density falls as it is stretched.
            let emission: f64 = bands.iter().map(|b| b.at(x, doppler, pixel)).sum();
            let clean = self.continuum.at(x, doppler, pixel) + emission / doppler;
            let sigma =
                (self.noise.relative * clean).hypot(self.noise.floor_erg_s_cm2_aa) * shorter;
            let noise = rng.as_mut().map_or(0.0, |r| StandardNormal.sample(r));
            SimulatedSample {
                wavelength_aa: x,
                flux_erg_s_cm2_aa: clean + sigma * noise,
                sigma_erg_s_cm2_aa: sigma,
            }
        };
        Ok((0..grid.len()).map(sample).collect())
    }

    /// The spectrum without noise but with its errors after an exposure in s, as a reader gives it.
    ///
    /// # Errors
    /// As [`SceneSettings::bands`]; a scene without samples, or with an error of zero.
    pub fn clean_spectrum(&self, settings: &Settings, exposure_s: f64) -> Result<Spectrum> {
        let samples = self.samples(settings, exposure_s, None)?;
        let columns = Columns {
            wavelength_aa: samples.iter().map(|s| s.wavelength_aa).collect(),
            flux_erg_s_cm2_aa: samples.iter().map(|s| s.flux_erg_s_cm2_aa).collect(),
            sigma_erg_s_cm2_aa: Some(samples.iter().map(|s| s.sigma_erg_s_cm2_aa).collect()),
            flagged: Vec::new(),
            lines: LineNumbers::default(),
        };
        Spectrum::from_columns("the simulated spectrum", columns, false)
    }
}

impl SceneBand {
    /// Flux density in the comet's frame at an observed wavelength, averaged over a pixel (observed Å)
    /// where one is given.
    fn at(&self, x_aa: f64, doppler: f64, pixel_aa: Option<(f64, f64)>) -> f64 {
        let lines = self.structure.lines().iter();
        let rest = pixel_aa.map(|(low, high)| (low / doppler, high / doppler));
        let shape: f64 = lines
            .map(|(ratio, share)| {
                let centre = self.centre_aa * ratio;
                let sigma = self.fwhm_aa / FWHM_PER_SIGMA;
                let value = match rest {
                    Some((low, high)) => gaussian_over_pixel(low, high, centre, sigma),
                    None => gaussian(x_aa / doppler, centre, sigma),
                };
                share * value.value
            })
            .sum();
        self.flux_erg_s_cm2 * shape
    }
}

/// Edges of a sample half-way to its neighbours.
fn pixel_aa(grid: &[f64], i: usize) -> (f64, f64) {
    let last = grid.len() - 1;
    let before = if i > 0 {
        grid[i] - grid[i - 1]
    } else {
        grid[1] - grid[0]
    };
    let after = if i < last {
        grid[i + 1] - grid[i]
    } else {
        before
    };
    (grid[i] - 0.5 * before, grid[i] + 0.5 * after)
}
