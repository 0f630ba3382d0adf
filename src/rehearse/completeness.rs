//! How often a band of given true flux is detected.

use super::share::Share;
use super::truth::Scene;
use super::{Rehearsal, check};
use crate::analysis::Settings;
use crate::ground::Result;
use crate::spectrum::Spectrum;
use rayon::prelude::*;

/// True fluxes of the steps in units of the error that the fit gives when the band is absent.
pub const FLUX_STEPS: [f64; 9] = [0.0, 1.0, 2.0, 2.5, 3.0, 3.5, 4.0, 5.0, 6.0];

/// Detections of one band against its true flux, everything else as fitted.
#[derive(Clone, Debug)]
pub struct Completeness {
    /// Band.
    pub id: String,
    /// Error of its flux when it is absent, erg s⁻¹ cm⁻².
    pub sigma_erg_s_cm2: f64,
    /// One per step of [`FLUX_STEPS`].
    pub steps: Vec<CompletenessStep>,
}

/// Detections at one true flux.
#[derive(Clone, Copy, Debug)]
pub struct CompletenessStep {
    /// True flux, erg s⁻¹ cm⁻².
    pub flux_erg_s_cm2: f64,
    /// Trials that detect the band.
    pub detected: Share,
    /// Trials that quote an upper limit below the true flux.
    pub limit_wrong: Share,
}

/// Injects each band at the fluxes of [`FLUX_STEPS`] in turn, with `how.trials` trials per step. Bands
/// that are integrated have no model to inject and are passed over.
///
/// # Errors
/// As [`super::rehearse`].
pub fn completeness(
    spectra: &[Spectrum],
    settings: &Settings,
    how: Rehearsal,
    tick: &(dyn Fn() + Sync),
) -> Result<Vec<Completeness>> {
    check(how)?;
    let scene = Scene::new(spectra, settings, how)?;
    let bands = (0..scene.base.bands.len()).filter(|b| scene.can_inject(*b));
    Ok(bands.map(|b| one_band(&scene, how, b, tick)).collect())
}

/// Number of bands that can be injected, for a bar of progress.
pub fn injectable(settings: &Settings) -> usize {
    let whole = |b: &&crate::analysis::BandSettings| {
        !matches!(b.model.form, crate::fit::Form::Integral { .. })
    };
    settings.bands.iter().filter(whole).count()
}

fn one_band(scene: &Scene, how: Rehearsal, b: usize, tick: &(dyn Fn() + Sync)) -> Completeness {
    let fit = &scene.base.bands[b].fit;
    // The error of an absent band, whose shape is held: that of a strong band is larger.
    let absent = scene.with_flux(b, 0.0).trial(how, 0);
    let sigma = absent.map_or(fit.flux_erg_s_cm2.sigma, |t| t.bands[b].flux.sigma);
    let steps = FLUX_STEPS.iter().enumerate().map(|(step, over_sigma)| {
        let truth = over_sigma * sigma;
        let changed = scene.with_flux(b, truth);
        let seeds = 0..how.trials;
        let trials: Vec<(bool, bool)> = seeds
            .into_par_iter()
            .filter_map(|k| {
                let number = (step * how.trials + k) as u64;
                let trial = changed.trial(how, number).ok();
                tick();
                let band = &trial?.bands[b];
                Some((band.detected, band.limit.is_some_and(|l| l < truth)))
            })
            .collect();
        CompletenessStep {
            flux_erg_s_cm2: truth,
            detected: Share::count(trials.iter().map(|t| t.0)),
            limit_wrong: Share::count(trials.iter().map(|t| t.1)),
        }
    });
    Completeness {
        id: fit.id.clone(),
        sigma_erg_s_cm2: sigma,
        steps: steps.collect(),
    }
}
