//! From the samples of a window to the input of its fit; errors that are estimated, scaled or raised.

use super::form::Form;
use super::noise::scatter;
use super::outcome::WindowOutcome;
use super::pick::{Group, Picked};
use super::robust::{correlated_covariance, correlations, residuals};
use super::settings::{BandModel, FitSettings, Freedom};
use super::solver::Solver;
use super::window::{WindowInput, fit_window};
use crate::frame::RestSpectrum;
use crate::ground::{Error, Result};

/// Below this reduced χ² the data hold no noise to speak of, as in simulations without noise.
const NO_NOISE: f64 = 0.01;

fn order_of(settings: &FitSettings, window_aa: (f64, f64)) -> usize {
    let relative = (window_aa.1 - window_aa.0) / (0.5 * (window_aa.1 + window_aa.0));
    let default = if relative > 0.15 { 3 } else { 2 };
    let on_carrier = usize::from(settings.continuum.carrier.is_some());
    let order = settings.continuum.order.unwrap_or(default - on_carrier);
    let shift = isize::try_from(settings.continuum.order_shift).unwrap_or(0);
    order.saturating_add_signed(shift)
}

/// Carrier over its mean at every sample inside the window, and the mean.
pub(super) fn carrier_inside(
    spectrum: &RestSpectrum,
    settings: &FitSettings,
    picked: &Picked,
    group: &Group,
) -> Result<(Option<Vec<f64>>, f64)> {
    let Some(carrier) = &settings.continuum.carrier else {
        return Ok((None, 1.0));
    };
    let (low, high) = carrier.range_aa();
    let x = spectrum.wavelength_aa();
    let (Some(first), Some(last)) = (picked.inside.first(), picked.inside.last()) else {
        return Ok((None, 1.0));
    };
    if x[*first] < low || x[*last] > high {
        return Err(Error::input(format!(
            "the continuum of {} covers {low:.1} to {high:.1} Å, the window {:.1} to {:.1} Å",
            carrier.label(),
            group.window_aa.0,
            group.window_aa.1
        ))
        .remedy("give one that covers the window, or narrow the window"));
    }
    let values: Vec<f64> = picked
        .inside
        .iter()
        .zip(&picked.edges_aa)
        .map(|(i, edges)| match settings.sampling {
            super::Sampling::Centre => carrier.at(x[*i]),
            super::Sampling::Pixel => carrier.over_pixel(*edges),
        })
        .collect();
    let mean = values.iter().sum::<f64>() / values.len() as f64;
    if mean.is_nan() || mean <= 0.0 {
        return Err(Error::input(format!(
            "the continuum of {} is not positive between {:.1} and {:.1} Å",
            carrier.label(),
            group.window_aa.0,
            group.window_aa.1
        )));
    }
    Ok((Some(values.iter().map(|v| v / mean).collect()), mean))
}

pub(super) fn window_input<'a>(
    spectrum: &RestSpectrum,
    settings: &'a FitSettings,
    group: &Group,
    picked: &Picked,
    carrier_inside: Option<Vec<f64>>,
) -> Result<WindowInput<'a>> {
    let at: Vec<usize> = picked.fitted().collect();
    if at.len() < 3 {
        return Err(Error::input(format!(
            "window {:.1} to {:.1} Å holds only {} usable samples",
            group.window_aa.0,
            group.window_aa.1,
            at.len()
        ))
        .remedy("widen the window or check masks and excluded ranges"));
    }
    let x = spectrum.wavelength_aa();
    let flux = spectrum.flux_erg_s_cm2_aa();
    let bands: Vec<&BandModel> = group.bands.iter().map(|b| &settings.bands[*b]).collect();
    let inside_aa: Vec<f64> = picked.inside.iter().map(|i| x[*i]).collect();
    let scale = picked.scale;
    let open = |limits: (f64, f64)| (limits.0 / scale, limits.1 / scale);
    Ok(WindowInput {
        x_aa: at.iter().map(|p| inside_aa[*p]).collect(),
        edges_aa: at.iter().map(|p| picked.edges_aa[*p]).collect(),
        data: at.iter().map(|p| flux[picked.inside[*p]] / scale).collect(),
        sigma: spectrum.sigma_erg_s_cm2_aa().map_or_else(
            || vec![1.0; at.len()],
            |s| at.iter().map(|p| s[picked.inside[*p]] / scale).collect(),
        ),
        window_aa: group.window_aa,
        order: order_of(settings, group.window_aa),
        carrier: carrier_inside
            .as_ref()
            .map(|c| at.iter().map(|p| c[*p]).collect()),
        carrier_inside,
        inside_aa,
        thermal: settings.continuum.thermal,
        sampling: settings.sampling,
        instrument_fwhm_aa: bands
            .iter()
            .map(|b| settings.resolution.as_ref().map(|r| r.fwhm_aa(b.centre_aa)))
            .collect(),
        expected_fwhm_aa: bands.iter().map(|b| settings.expected_fwhm_aa(b)).collect(),
        flux_limits: bands
            .iter()
            .map(|b| b.limits.flux_erg_s_cm2.map(open))
            .collect(),
        ties: ties(settings, &bands),
        bands,
        free_shape_sigma: settings.free_shape_sigma,
    })
}

/// Two lines nearer than this many full widths are a blend.
const BLEND_FWHM: f64 = 1.5;
/// A band narrower than this part of the instrument's profile is a line.
const LINE_PART: f64 = 0.5;

/// The user's ties; and lines of a blend, whose shapes come from one instrument and one comet, share
/// velocity and width too, unless the user frees them: their separate shapes would eat each other's flux.
fn ties(settings: &FitSettings, bands: &[&BandModel]) -> Vec<Option<String>> {
    let line = |b: &BandModel| {
        let instrument = settings.resolution.as_ref()?.fwhm_aa(b.centre_aa);
        let plain = matches!(b.form, Form::Lines) && b.structure.is_single() && !b.wings;
        let auto = b.centre == Freedom::Auto && b.width == Freedom::Auto && b.tie.is_none();
        let narrow = b.fwhm_aa.is_some_and(|w| w < LINE_PART * instrument);
        (plain && auto && narrow).then_some(instrument)
    };
    let mut order: Vec<usize> = (0..bands.len()).collect();
    order.sort_by(|a, b| bands[*a].centre_aa.total_cmp(&bands[*b].centre_aa));
    let mut out: Vec<Option<String>> = bands.iter().map(|b| b.tie.clone()).collect();
    let lines: Vec<(usize, f64)> = order
        .into_iter()
        .filter_map(|i| Some((i, line(bands[i])?)))
        .collect();
    for (n, pair) in lines.windows(2).enumerate() {
        let ((a, fwhm), (b, _)) = (pair[0], pair[1]);
        if bands[b].centre_aa - bands[a].centre_aa < BLEND_FWHM * fwhm {
            let word = out[a].clone().unwrap_or_else(|| format!("(blend {n})"));
            out[a] = Some(word.clone());
            out[b] = Some(word);
        }
    }
    out
}

/// Without given errors: fit, take the scatter in the continuum as the error of every sample of the
/// window, and fit again with it; the error settles after two rounds.
pub(super) fn fit_with_estimated_errors(
    input: &mut WindowInput<'_>,
    picked: &Picked,
    solver: &mut Solver,
) -> Result<WindowOutcome> {
    let continuum_only: Vec<bool> = picked.fitted().map(|p| !picked.in_core[p]).collect();
    let mut outcome = fit_window(input, solver)?;
    for _ in 0..2 {
        let (over_sigma, _) = residuals(input, &outcome);
        let r: Vec<f64> = over_sigma
            .iter()
            .zip(&input.sigma)
            .map(|(r, s)| r * s)
            .collect();
        let parameters = input.data.len() - outcome.dof;
        let sigma =
            scatter(&r, &continuum_only, parameters).ok_or_else(|| {
                Error::input("errors are missing and cannot be estimated: the samples have no scatter about the fit")
                    .remedy("give an error column")
            })?;
        input.sigma = vec![sigma; input.data.len()];
        outcome = fit_window(input, solver)?;
    }
    Ok(outcome)
}

/// Scales the covariance to a reduced χ² of one, where the user asks for it and errors were given.
pub(super) fn scale_errors(
    settings: &FitSettings,
    picked: &Picked,
    outcome: &mut WindowOutcome,
) -> Option<f64> {
    if !settings.scale_errors || !picked.has_sigma {
        return None;
    }
    let reduced = outcome.chi2 / outcome.dof as f64;
    outcome.covariance *= reduced;
    outcome.read_errors();
    Some(reduced.sqrt())
}

/// Raises errors where neighbouring residuals are correlated; returns the largest factor among the
/// fluxes.
pub(super) fn raise_for_correlation(
    input: &WindowInput<'_>,
    outcome: &mut WindowOutcome,
) -> Option<f64> {
    let (r, columns) = residuals(input, outcome);
    let rho = correlations(&r);
    if rho.is_empty() || outcome.chi2 < NO_NOISE * outcome.dof as f64 {
        return None;
    }
    let before = outcome.flux_covariance.clone();
    outcome.covariance = correlated_covariance(outcome, &columns, &rho);
    outcome.read_errors();
    let factor = (0..before.nrows())
        .map(|b| (outcome.flux_covariance[(b, b)] / before[(b, b)]).sqrt())
        .fold(1.0, f64::max);
    Some(factor)
}
