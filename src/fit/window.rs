//! The fit of one window: which shapes to fit, from where to start, and how sure the result is.

use super::form::Form;
use super::layout::{Layout, Wish, lay_out};
use super::model::{Basis, Samples, WindowModel};
use super::outcome::{WindowOutcome, assemble};
use super::profile::Sampling;
use super::settings::{BandModel, Freedom, Thermal};
use super::solver::{Solver, Stop};
use super::start::{scan, simplex, solve_linear};
use crate::ground::{Error, Result};

/// A freed automatic shape is held again below this signal-to-noise.
const KEEP_FREE_SIGMA: f64 = 5.0;
/// Fall of χ² for two more shape parameters that frees a weak band's shape all the same: the
/// chance of a larger fall by noise alone is exp(−9), even after scanning the grid below 1 %.
const FREE_BY_CHI2: f64 = 18.0;
/// The same for a band of middling strength, whose shape is better known: by chance in 0.3 %.
const FREE_MIDDLING_BY_CHI2: f64 = 11.8;
const MIDDLING_SIGMA: f64 = 8.0;
/// Below this signal-to-noise of the held fit an automatic shape is never fitted.
const NEVER_FREE_SIGMA: f64 = 3.5;

/// The samples and bands of one window, in the unit of the fit.
pub(super) struct WindowInput<'a> {
    pub x_aa: Vec<f64>,
    pub edges_aa: Vec<(f64, f64)>,
    pub data: Vec<f64>,
    pub sigma: Vec<f64>,
    pub window_aa: (f64, f64),
    pub order: usize,
    /// What the continuum's polynomial multiplies, sample by sample.
    pub carrier: Option<Vec<f64>>,
    /// Wavelengths and carrier of all samples inside the window.
    pub inside_aa: Vec<f64>,
    pub carrier_inside: Option<Vec<f64>>,
    pub thermal: Option<Thermal>,
    pub sampling: Sampling,
    pub bands: Vec<&'a BandModel>,
    /// Bands with the same word share velocity and width: the user's ties, and blends of lines.
    pub ties: Vec<Option<String>>,
    pub expected_fwhm_aa: Vec<Option<f64>>,
    pub instrument_fwhm_aa: Vec<Option<f64>>,
    pub free_shape_sigma: f64,
    /// Limits of the fluxes in the unit of the fit.
    pub flux_limits: Vec<Option<(f64, f64)>>,
}

impl WindowInput<'_> {
    /// The model without components over the samples of the fit.
    pub(super) fn model(&self) -> WindowModel {
        let samples = Samples {
            x_aa: &self.x_aa,
            edges_aa: &self.edges_aa,
            data: &self.data,
            sigma: &self.sigma,
        };
        let continuum = Basis {
            window_aa: self.window_aa,
            order: self.order,
            carrier: self.carrier.as_deref(),
        };
        WindowModel::new(samples, continuum, self.sampling)
    }
}

/// Fits one window.
///
/// # Errors
/// Too few samples, or bands that cannot be told apart.
pub(super) fn fit_window(input: &WindowInput<'_>, solver: &mut Solver) -> Result<WindowOutcome> {
    let mut model = input.model();
    let held: Vec<Wish> = input.bands.iter().map(|b| must_be_free(b)).collect();
    let mut notes = vec![None; input.bands.len()];
    let base = attempt(input, &mut model, &held, solver)?;
    let mut wishes = choose_free(input, &mut model, &held, &base, solver);
    let mut outcome = if wishes == held {
        base
    } else {
        attempt(input, &mut model, &wishes, solver)?
    };
    for _ in 0..input.bands.len() {
        let Some(again) = hold_the_doubtful(input, &held, &wishes, &outcome, &mut notes) else {
            break;
        };
        wishes = again;
        outcome = attempt(input, &mut model, &wishes, solver)?;
    }
    for (state, note) in outcome.shape.iter_mut().zip(notes) {
        state.note = note.or_else(|| state.note.take());
    }
    Ok(outcome)
}

/// Shapes that are free from the start: those the user frees, and those nothing is known of.
fn must_be_free(band: &BandModel) -> Wish {
    Wish {
        centre: band.centre == Freedom::Free,
        width: band.width == Freedom::Free,
        extra: band.extra == Freedom::Free && has_extra(band),
    }
}

fn has_extra(band: &BandModel) -> bool {
    band.wings || matches!(band.form, Form::Warm(_))
}

fn choose_free(
    input: &WindowInput<'_>,
    model: &mut WindowModel,
    held: &[Wish],
    base: &WindowOutcome,
    solver: &mut Solver,
) -> Vec<Wish> {
    let mut wishes = held.to_vec();
    for (b, band) in input.bands.iter().enumerate() {
        let wish = Wish {
            centre: band.centre != Freedom::Held,
            width: band.width != Freedom::Held && !matches!(band.form, Form::Template(_)),
            extra: band.extra != Freedom::Held && has_extra(band),
        };
        if wish == held[b] {
            continue;
        }
        let snr = group_snr(input, base, b);
        let unknown = input.expected_fwhm_aa[b].is_none();
        if snr >= input.free_shape_sigma || unknown {
            wishes[b] = wish;
        } else if snr >= NEVER_FREE_SIGMA {
            let mut alone = held.to_vec();
            alone[b] = wish;
            let least = if snr >= MIDDLING_SIGMA {
                FREE_MIDDLING_BY_CHI2
            } else {
                FREE_BY_CHI2
            };
            if let Ok(free) = attempt(input, model, &alone, solver)
                && base.chi2 - free.chi2 > least
            {
                wishes[b] = wish;
            }
        }
    }
    wishes
}

/// Signal-to-noise of a band, or of the sum of those that share its shape: the noise of the sum has
/// little to do with the noise of their ratio, so that choosing by it does not bias the ratio.
fn group_snr(input: &WindowInput<'_>, outcome: &WindowOutcome, b: usize) -> f64 {
    let members: Vec<usize> = (0..input.bands.len())
        .filter(|i| *i == b || (input.ties[b].is_some() && input.ties[*i] == input.ties[b]))
        .collect();
    let flux: f64 = members.iter().map(|i| outcome.flux[*i]).sum();
    let pairs = members
        .iter()
        .flat_map(|i| members.iter().map(move |j| (*i, *j)));
    let variance: f64 = pairs.map(|p| outcome.flux_covariance[p]).sum();
    flux / variance.sqrt()
}

/// Automatic shapes that ended on a bound or lost their signal go back to the expected shape.
fn hold_the_doubtful(
    input: &WindowInput<'_>,
    held: &[Wish],
    wishes: &[Wish],
    outcome: &WindowOutcome,
    notes: &mut [Option<String>],
) -> Option<Vec<Wish>> {
    let mut next = wishes.to_vec();
    for b in 0..wishes.len() {
        if wishes[b] == held[b] || tied_to_stronger(input, outcome, b) {
            continue;
        }
        let snr = outcome.flux[b] / outcome.flux_covariance[(b, b)].sqrt();
        if let Some(note) = &outcome.shape[b].note {
            next[b] = held[b];
            notes[b] = Some(format!("{note}; its shape was held at the expected values"));
        } else if snr < KEEP_FREE_SIGMA && input.expected_fwhm_aa[b].is_some() {
            next[b] = held[b];
        }
    }
    (next != wishes).then_some(next)
}

fn tied_to_stronger(input: &WindowInput<'_>, outcome: &WindowOutcome, b: usize) -> bool {
    let Some(tie) = &input.ties[b] else {
        return false;
    };
    let snr = |i: usize| outcome.flux[i] / outcome.flux_covariance[(i, i)].sqrt();
    (0..input.bands.len()).any(|i| i != b && input.ties[i].as_ref() == Some(tie) && snr(i) > snr(b))
}

fn attempt(
    input: &WindowInput<'_>,
    model: &mut WindowModel,
    wishes: &[Wish],
    solver: &mut Solver,
) -> Result<WindowOutcome> {
    let layout = lay_out(input, wishes);
    model.set_components(layout.components.clone(), layout.start.len());
    let n = input.x_aa.len();
    let k = model.linear() + layout.start.len();
    if n <= k {
        return Err(Error::input(format!(
            "window {:.1} to {:.1} Å: {n} usable samples cannot carry {k} parameters and leave one to judge the fit",
            input.window_aa.0, input.window_aa.1
        ))
        .remedy("widen the window, lower the continuum order, or hold centre and width"));
    }
    let (shapes, _) = scan(model, &layout.start, &layout.grid);
    let linear = solve_linear(model, &shapes)?;
    let mut bounds = vec![(f64::NEG_INFINITY, f64::INFINITY); model.linear()];
    for (b, limits) in input.flux_limits.iter().enumerate() {
        if let Some(limits) = limits {
            bounds[model.flux_index(b)] = *limits;
        }
    }
    bounds.extend_from_slice(&layout.bounds);
    let start: Vec<f64> = linear.parameters.into_iter().chain(shapes).collect();
    let mut minimum = solver.minimise(model, &start, &bounds, Stop::default())?;
    if !layout.start.is_empty() && (!minimum.converged || minimum.on_bound.contains(&true)) {
        let rescued = rescue(model, &minimum.parameters, &layout, &bounds, solver);
        match rescued {
            Some(better) if better.chi2 < minimum.chi2 - 1e-6 => minimum = better,
            // The derivatives in the solver must be those of the minimum that is kept.
            Some(_) => {
                minimum = solver.minimise(model, &minimum.parameters, &bounds, Stop::default())?;
            }
            None => {}
        }
    }
    assemble(input, model, &minimum, solver.columns(), bounds)
}

fn rescue(
    model: &WindowModel,
    parameters: &[f64],
    layout: &Layout,
    bounds: &[(f64, f64)],
    solver: &mut Solver,
) -> Option<super::solver::Minimum> {
    let sizes: Vec<f64> = layout
        .bounds
        .iter()
        .map(|(low, high)| 0.2 * (high - low))
        .collect();
    let inside: Vec<f64> = parameters[model.linear()..]
        .iter()
        .zip(&layout.bounds)
        .map(|(v, (low, high))| v.clamp(low + 0.02 * (high - low), high - 0.02 * (high - low)))
        .collect();
    let shapes = simplex(model, &inside, &layout.bounds, &sizes);
    let linear = solve_linear(model, &shapes).ok()?;
    let start: Vec<f64> = linear.parameters.into_iter().chain(shapes).collect();
    solver.minimise(model, &start, bounds, Stop::default()).ok()
}
