//! Doubts about a fitted window and its bands.

use super::outcome::WindowOutcome;
use super::pick::SampleUse;
use super::results::{BandFit, WindowFit};
use super::settings::FitSettings;
use crate::ground::Caveat;
use crate::ground::constants::FWHM_PER_SIGMA;

/// Reduced χ² above which a fit is called poor when the errors were given.
const POOR_REDUCED_CHI2: f64 = 2.0;
/// Residual over error from which a lonely sample is called a spike.
const SPIKE_SIGMA: f64 = 6.0;
/// Spikes are named one by one up to this number.
const NAMED_SPIKES: usize = 6;

/// Doubts about one band.
pub(super) fn note_band(
    fit: &BandFit,
    outcome: &WindowOutcome,
    position: usize,
    x_aa: &[f64],
    settings: &FitSettings,
    caveats: &mut Vec<Caveat>,
) {
    if let Some(why) = &outcome.shape[position].note {
        caveats.push(Caveat::ShapeHeld {
            band: fit.id.clone(),
            why: why.clone(),
        });
    }
    if fit.template.is_some() {
        return;
    }
    let nearest = x_aa
        .partition_point(|x| *x < fit.centre_aa)
        .clamp(1, x_aa.len() - 1);
    let pixel = x_aa[nearest] - x_aa[nearest - 1];
    let pixels = fit.line_sigma_aa * FWHM_PER_SIGMA / pixel;
    if pixels < 2.0 && settings.sampling == super::Sampling::Centre {
        caveats.push(Caveat::Undersampled {
            band: fit.id.clone(),
            fwhm_pixels: pixels,
        });
    }
    if let (Some(resolution), Some(error)) = (&settings.resolution, fit.fwhm_sigma_aa)
        && fit.structure.is_single()
    {
        let instrument = resolution.fwhm_aa(fit.centre_aa);
        if fit.fwhm_aa + 3.0 * error < 0.9 * instrument {
            caveats.push(Caveat::Other {
                code: "narrower-than-instrument",
                text: format!(
                    "{}: fitted width {:.2} Å is below the instrument's {instrument:.2} Å; the resolution in the plan is too low",
                    fit.id, fit.fwhm_aa
                ),
            });
        }
    }
    let limited = &settings.bands.iter().find(|b| b.id == fit.id);
    if let Some((low, high)) = limited.and_then(|b| b.limits.flux_erg_s_cm2)
        && (fit.flux_erg_s_cm2.value <= low || fit.flux_erg_s_cm2.value >= high)
    {
        caveats.push(Caveat::Other {
            code: "flux-on-limit",
            text: format!(
                "{}: its flux ended on a limit of the plan; value and error are biased",
                fit.id
            ),
        });
    }
}

/// Doubts about one window.
pub(super) fn note_window(window: &WindowFit, label: &str, caveats: &mut Vec<Caveat>) {
    let place = format!(
        "{label}, {:.0}–{:.0} Å",
        window.window_aa.0, window.window_aa.1
    );
    let mut say = |code: &'static str, text: String| caveats.push(Caveat::Other { code, text });
    let clipped = wavelengths(window, |s| s.sample_use == SampleUse::Clipped);
    if !clipped.is_empty() {
        say(
            "samples-clipped",
            format!(
                "{place}: {} dropped as outliers: {}",
                count(clipped.len()),
                named(&clipped)
            ),
        );
    }
    let spikes = lonely_spikes(window);
    if !spikes.is_empty() {
        say(
            "spikes",
            format!(
                "{place}: {} more than {SPIKE_SIGMA} errors from the fit, like cosmic-ray hits: {}; clip_sigma = 5 in [measure] would drop such",
                count(spikes.len()),
                named(&spikes)
            ),
        );
    }
    if let Some(factor) = window.inflation {
        say(
            "correlated-noise",
            format!(
                "{place}: neighbouring residuals are correlated (or the model lacks structure); errors were raised for it, by up to a factor {factor:.2}"
            ),
        );
    }
    if let Some(factor) = window.errors_scaled {
        say(
            "errors-scaled",
            format!("{place}: given errors were scaled by {factor:.2}, as asked"),
        );
    }
    note_goodness(window, place, caveats);
}

fn note_goodness(window: &WindowFit, place: String, caveats: &mut Vec<Caveat>) {
    if window.errors_estimated {
        let sigma = window
            .samples
            .iter()
            .find(|s| s.used)
            .map_or(f64::NAN, |s| s.sigma_erg_s_cm2_aa);
        caveats.push(Caveat::ErrorsEstimated {
            spectrum: place,
            sigma_erg_s_cm2_aa: sigma,
        });
        return;
    }
    let reduced = window.chi2 / window.dof as f64;
    if reduced > POOR_REDUCED_CHI2 {
        caveats.push(Caveat::PoorFit {
            window_aa: window.window_aa,
            reduced_chi2: reduced,
        });
    }
}

fn count(n: usize) -> String {
    match n {
        1 => "1 sample".to_owned(),
        n => format!("{n} samples"),
    }
}

fn named(wavelengths: &[f64]) -> String {
    let mut out: Vec<String> = wavelengths
        .iter()
        .take(NAMED_SPIKES)
        .map(|w| format!("{w:.2}"))
        .collect();
    if wavelengths.len() > NAMED_SPIKES {
        out.push("…".to_owned());
    }
    format!("{} Å", out.join(", "))
}

fn wavelengths(window: &WindowFit, chosen: impl Fn(&super::SampleFit) -> bool) -> Vec<f64> {
    let samples = window.samples.iter();
    samples
        .filter(|s| chosen(s))
        .map(|s| s.wavelength_aa)
        .collect()
}

/// Fitted samples far from the fit, at most two in a row.
fn lonely_spikes(window: &WindowFit) -> Vec<f64> {
    let far: Vec<bool> = window
        .samples
        .iter()
        .map(|s| {
            let off = s.flux_erg_s_cm2_aa - s.total_erg_s_cm2_aa;
            s.sample_use == SampleUse::Fitted && off.abs() > SPIKE_SIGMA * s.sigma_erg_s_cm2_aa
        })
        .collect();
    let mut out = Vec::new();
    let mut at = 0;
    while at < far.len() {
        let run = far[at..].iter().take_while(|f| **f).count();
        if (1..=2).contains(&run) {
            out.extend(window.samples[at..at + run].iter().map(|s| s.wavelength_aa));
        }
        at += run.max(1);
    }
    out
}
