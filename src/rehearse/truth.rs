//! The fitted model as the truth of the trials.

use super::{Noise, Rehearsal};
use crate::analysis::{Analysis, Settings, analyse};
use crate::fit::{SampleFit, SpectrumFit};
use crate::frame::{Frame, RestSpectrum, to_rest};
use crate::ground::{Result, Species};
use crate::ratio::{Basis, DrawSettings};
use crate::spectrum::Spectrum;

#[derive(Clone)]
/// One spectrum of a trial before noise, in the comet's frame.
pub(super) struct TrueSpectrum {
    pub label: String,
    pub wavelength_aa: Vec<f64>,
    /// Model inside the fitted windows, data outside, erg s⁻¹ cm⁻² Å⁻¹.
    pub clean_erg_s_cm2_aa: Vec<f64>,
    /// Error of the noise, same unit.
    pub sigma_erg_s_cm2_aa: Vec<f64>,
    /// Whether the errors are handed to the analysis, as in the user's spectrum.
    pub errors_given: bool,
    pub flagged: Vec<bool>,
    /// For each sample of a fitted window, the pool of residuals it draws from.
    pub pool: Vec<Option<usize>>,
    /// Residuals over errors, window by window.
    pub pools: Vec<Vec<f64>>,
    /// Model of each band: identifier, and sample with flux density.
    pub bands: Vec<(String, Vec<(usize, f64)>)>,
}

/// Everything that the trials share.
#[derive(Clone)]
pub(super) struct Scene {
    pub spectra: Vec<TrueSpectrum>,
    pub settings: Settings,
    pub base: Analysis,
    /// True ratios in the order of the plan; NaN where a rate is missing.
    pub ratios: Vec<f64>,
}

impl Scene {
    pub(super) fn new(spectra: &[Spectrum], settings: &Settings, how: Rehearsal) -> Result<Self> {
        let mut settings = for_trials(settings, how);
        let base = analyse(spectra, &settings)?;
        // The trials are in the comet's frame, where each band is measured in the same spectrum.
        for (band, found) in settings.bands.iter_mut().zip(&base.bands) {
            band.spectrum = Some(found.spectrum);
        }
        let mut truths = Vec::new();
        for (i, (spectrum, how)) in spectra.iter().zip(&mut settings.spectra).enumerate() {
            let rest = to_rest(spectrum, how.frame, &settings.geometry, &settings.aperture);
            how.frame = Frame::Comet;
            let fit = base.fits.iter().find(|(of, _)| *of == i).map(|(_, f)| f);
            truths.push(TrueSpectrum::new(&rest, fit));
        }
        let before_noise = robust_truth(&truths, &settings)?;
        let truth = before_noise.as_ref().unwrap_or(&base);
        let ratios = settings
            .ratios
            .iter()
            .map(|r| true_ratio(truth, &r.of, &r.to, r.basis))
            .collect();
        Ok(Self {
            spectra: truths,
            settings,
            base,
            ratios,
        })
    }
}

impl Scene {
    /// Whether the band has a model of its own that can be made brighter.
    pub(super) fn can_inject(&self, b: usize) -> bool {
        let fit = &self.base.bands[b].fit;
        fit.integral_aa.is_none() && fit.flux_erg_s_cm2.value != 0.0
    }

    /// The same scene with another true flux of one band.
    pub(super) fn with_flux(&self, b: usize, flux_erg_s_cm2: f64) -> Self {
        let mut out = self.clone();
        let band = &self.base.bands[b];
        let change = flux_erg_s_cm2 / band.fit.flux_erg_s_cm2.value - 1.0;
        let spectrum = &mut out.spectra[band.spectrum];
        let own = spectrum.bands.iter().find(|(id, _)| *id == band.fit.id);
        for (i, value) in own.map_or(&[][..], |(_, model)| model) {
            spectrum.clean_erg_s_cm2_aa[*i] += change * value;
        }
        out
    }
}

/// Settings without what costs time and cannot change a flux or a ratio, and, unless all errors are
/// wanted, without those that the trials do not vary.
fn for_trials(settings: &Settings, how: Rehearsal) -> Settings {
    let mut out = settings.clone();
    out.caveats.clear();
    out.sources.clear();
    out.ratios.iter_mut().for_each(|r| r.known.clear());
    out.draws = DrawSettings {
        count: how.draws,
        seed: how.seed,
    };
    if how.full {
        return out;
    }
    out.speed_sigma = 0.0;
    for spectrum in &mut out.spectra {
        spectrum.calibration_sigma = 0.0;
    }
    for g in out.bands.iter_mut().filter_map(|b| b.efficiency.as_mut()) {
        g.relative_sigma = 0.0;
    }
    for set in out.bands.iter_mut().filter_map(|b| b.lines.as_mut()) {
        set.g_is_exact = true;
    }
    for coma in out.species.iter_mut().filter_map(|s| s.coma.as_mut()) {
        coma.length_sigma = 0.0;
    }
    out
}

/// The robust column of lines is not that of the bands in the model; where a species uses it, the truth
/// is what the model before noise gives. Without given errors that spectrum has none to be judged by.
fn robust_truth(spectra: &[TrueSpectrum], settings: &Settings) -> Result<Option<Analysis>> {
    let mut sets = settings.bands.iter().filter_map(|b| b.lines.as_ref());
    if !sets.any(|l| l.robust) || spectra.iter().any(|s| !s.errors_given) {
        return Ok(None);
    }
    let clean = spectra
        .iter()
        .map(TrueSpectrum::clean)
        .collect::<Result<Vec<_>>>()?;
    analyse(&clean, settings).map(Some)
}

fn true_ratio(base: &Analysis, of: &Species, to: &Species, basis: Basis) -> f64 {
    let amount = |species: &Species| {
        let found = base.species.iter().find(|s| s.species == *species)?;
        match basis {
            Basis::Production => found.production_per_s.map(|q| q.value),
            Basis::Column => Some(found.molecules.value),
        }
    };
    match (amount(of), amount(to)) {
        (Some(top), Some(bottom)) if bottom > 0.0 => top / bottom,
        _ => f64::NAN,
    }
}

impl TrueSpectrum {
    fn new(rest: &RestSpectrum, fit: Option<&SpectrumFit>) -> Self {
        let n = rest.len();
        let mut out = Self {
            label: rest.label().to_owned(),
            wavelength_aa: rest.wavelength_aa().to_vec(),
            clean_erg_s_cm2_aa: rest.flux_erg_s_cm2_aa().to_vec(),
            sigma_erg_s_cm2_aa: rest
                .sigma_erg_s_cm2_aa()
                .map_or_else(|| vec![0.0; n], <[f64]>::to_vec),
            errors_given: rest.sigma_erg_s_cm2_aa().is_some(),
            flagged: rest.good().iter().map(|g| !g).collect(),
            pool: vec![None; n],
            pools: Vec::new(),
            bands: Vec::new(),
        };
        for window in fit.iter().flat_map(|f| &f.windows) {
            let used = window.samples.iter().filter(|s| s.used);
            let count = used.clone().count() as f64;
            let grown = (count / window.dof.max(1) as f64).sqrt();
            out.pools.push(used.map(|s| grown * pull(s)).collect());
            let first = window.samples.first().map_or(n, |s| {
                out.wavelength_aa.partition_point(|x| *x < s.wavelength_aa)
            });
            for (i, sample) in (first..n).zip(&window.samples) {
                out.clean_erg_s_cm2_aa[i] = sample.total_erg_s_cm2_aa;
                out.sigma_erg_s_cm2_aa[i] = sample.sigma_erg_s_cm2_aa;
                out.pool[i] = Some(out.pools.len() - 1);
            }
            for (b, id) in window.bands.iter().enumerate() {
                let model = (first..n).zip(&window.samples);
                let model = model.map(|(i, s)| (i, s.bands_erg_s_cm2_aa[b]));
                out.bands.push((id.clone(), model.collect()));
            }
        }
        out
    }

    /// The noise of one sample over its error, from a normal deviate or a uniform number.
    pub(super) fn noise(&self, i: usize, noise: Noise, normal: f64, uniform: f64) -> f64 {
        match (noise, self.pool[i]) {
            (_, None) => 0.0,
            (Noise::Gaussian, _) => normal,
            (Noise::Residuals, Some(pool)) => {
                let pool = &self.pools[pool];
                pool[((uniform * pool.len() as f64) as usize).min(pool.len() - 1)]
            }
        }
    }
}

fn pull(s: &SampleFit) -> f64 {
    (s.flux_erg_s_cm2_aa - s.total_erg_s_cm2_aa) / s.sigma_erg_s_cm2_aa
}
