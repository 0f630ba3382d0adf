//! The fit of one window: which shapes to fit, from where to start, and how sure the result is.

use super::model::{Component, Slot, WindowModel};
use super::profile::{Sampling, sigma_from_fwhm};
use super::settings::{BandModel, Freedom};
use super::solver::{Solver, Stop, covariance};
use super::start::{ShapeGrid, scan, simplex, solve_linear};
use crate::ground::{Error, Result};
use nalgebra::DMatrix;
use std::collections::BTreeMap;

/// A freed automatic shape is held again below this signal-to-noise.
const KEEP_FREE_SIGMA: f64 = 5.0;
/// Fall of χ² for two more shape parameters that frees a weak band's shape all the same: the
/// chance of a larger fall by noise alone is exp(−9), even after scanning the grid below 1 %.
const FREE_BY_CHI2: f64 = 18.0;
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
    pub sampling: Sampling,
    pub bands: Vec<&'a BandModel>,
    pub expected_fwhm_aa: Vec<Option<f64>>,
    pub instrument_fwhm_aa: Vec<Option<f64>>,
    pub free_shape_sigma: f64,
}

/// What became of a band's shape.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct ShapeState {
    pub centre_fitted: bool,
    pub width_fitted: bool,
    pub note: Option<String>,
}

/// The fitted window, still in the unit of the fit.
pub(super) struct WindowOutcome {
    pub continuum: Vec<f64>,
    pub flux: Vec<f64>,
    pub centre_aa: Vec<f64>,
    pub centre_sigma_aa: Vec<Option<f64>>,
    pub sigma_aa: Vec<f64>,
    pub sigma_sigma_aa: Vec<Option<f64>>,
    pub shape: Vec<ShapeState>,
    pub chi2: f64,
    pub dof: usize,
    /// Covariance of the fluxes.
    pub flux_covariance: DMatrix<f64>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
struct Wish {
    centre: bool,
    width: bool,
}

struct Layout {
    components: Vec<Component>,
    start: Vec<f64>,
    bounds: Vec<(f64, f64)>,
    grid: ShapeGrid,
}

/// Fits one window.
///
/// # Errors
/// Too few samples, or bands that cannot be told apart.
pub(super) fn fit_window(input: &WindowInput<'_>, solver: &mut Solver) -> Result<WindowOutcome> {
    let mut model = WindowModel::new(
        &input.x_aa,
        &input.edges_aa,
        &input.data,
        &input.sigma,
        input.window_aa,
        input.order,
        input.sampling,
    );
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
    }
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
            width: band.width != Freedom::Held,
        };
        if wish == held[b] {
            continue;
        }
        let snr = base.flux[b] / base.flux_covariance[(b, b)].sqrt();
        let unknown = input.expected_fwhm_aa[b].is_none();
        if snr >= input.free_shape_sigma || unknown {
            wishes[b] = wish;
        } else if snr >= NEVER_FREE_SIGMA {
            let mut alone = held.to_vec();
            alone[b] = wish;
            if let Ok(free) = attempt(input, model, &alone, solver)
                && base.chi2 - free.chi2 > FREE_BY_CHI2
            {
                wishes[b] = wish;
            }
        }
    }
    wishes
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
            notes[b] = Some(format!(
                "{note}; centre and width were held at the expected values"
            ));
        } else if snr < KEEP_FREE_SIGMA && input.expected_fwhm_aa[b].is_some() {
            next[b] = held[b];
        }
    }
    (next != wishes).then_some(next)
}

fn tied_to_stronger(input: &WindowInput<'_>, outcome: &WindowOutcome, b: usize) -> bool {
    let Some(tie) = &input.bands[b].tie else {
        return false;
    };
    let snr = |i: usize| outcome.flux[i] / outcome.flux_covariance[(i, i)].sqrt();
    (0..input.bands.len())
        .any(|i| i != b && input.bands[i].tie.as_ref() == Some(tie) && snr(i) > snr(b))
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
    assemble(input, model, &minimum, solver.columns())
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

/// Slots, bounds and grids for the wished shapes.
fn lay_out(input: &WindowInput<'_>, wishes: &[Wish]) -> Layout {
    let mut layout = Layout {
        components: Vec::new(),
        start: Vec::new(),
        bounds: Vec::new(),
        grid: ShapeGrid {
            candidates: Vec::new(),
            pairs: Vec::new(),
        },
    };
    let mut shared: BTreeMap<(&str, bool), usize> = BTreeMap::new();
    let tie_wish = |b: usize| {
        input
            .bands
            .iter()
            .zip(wishes)
            .fold(wishes[b], |w, (other, wish)| {
                if other.tie.is_some() && other.tie == input.bands[b].tie {
                    Wish {
                        centre: w.centre || wish.centre,
                        width: w.width || wish.width,
                    }
                } else {
                    w
                }
            })
    };
    for (b, band) in input.bands.iter().enumerate() {
        let wish = tie_wish(b);
        let fwhm = input.expected_fwhm_aa[b].unwrap_or_else(|| guess_fwhm_aa(input));
        let mut pair = Vec::new();
        let mut slot = |is_width: bool, wanted: bool, held: f64| {
            if !wanted {
                return Slot::Held(held);
            }
            if let Some(tie) = &band.tie
                && let Some(&i) = shared.get(&(tie.as_str(), is_width))
            {
                return Slot::Fitted(i);
            }
            let i = layout.start.len();
            let (bounds, candidates) = if is_width {
                stretch_range(input, b, fwhm)
            } else {
                shift_range(input, b, fwhm)
            };
            layout.start.push(held);
            layout.bounds.push(bounds);
            layout.grid.candidates.push(candidates);
            pair.push(i);
            if let Some(tie) = &band.tie {
                shared.insert((tie.as_str(), is_width), i);
            }
            Slot::Fitted(i)
        };
        let shift = slot(false, wish.centre, 0.0);
        let stretch = slot(true, wish.width, 1.0);
        layout.components.push(Component {
            centre_aa: band.centre_aa,
            sigma_aa: sigma_from_fwhm(fwhm),
            structure: band.structure.clone(),
            shift,
            stretch,
        });
        if !pair.is_empty() {
            layout.grid.pairs.push(pair);
        }
    }
    layout
}

fn pixel_aa(input: &WindowInput<'_>) -> f64 {
    let n = input.x_aa.len();
    (input.x_aa[n - 1] - input.x_aa[0]) / (n - 1).max(1) as f64
}

fn guess_fwhm_aa(input: &WindowInput<'_>) -> f64 {
    let width = input.window_aa.1 - input.window_aa.0;
    (3.0 * pixel_aa(input)).min(0.2 * width)
}

/// Bounds and candidates of the shift β. Automatic: one expected width either way. Free: towards
/// the window's edges, but at most 0.6 of the way to the nearest other band, so that two free
/// bands do not change places.
fn shift_range(input: &WindowInput<'_>, b: usize, fwhm: f64) -> ((f64, f64), Vec<f64>) {
    let band = input.bands[b];
    let centre = band.centre_aa;
    let known = input.expected_fwhm_aa[b].is_some();
    let reach_aa = if band.centre == Freedom::Auto && known {
        fwhm.max(3.0 * pixel_aa(input))
    } else {
        let gap = input
            .bands
            .iter()
            .enumerate()
            .filter(|(i, o)| *i != b && (o.tie.is_none() || o.tie != band.tie))
            .map(|(_, o)| (o.centre_aa - centre).abs())
            .fold(f64::INFINITY, f64::min);
        let edge = (centre - input.window_aa.0).max(input.window_aa.1 - centre);
        edge.min((0.6 * gap).max(fwhm))
    };
    let steps = if band.centre == Freedom::Auto && known {
        2
    } else {
        ((reach_aa / (0.5 * fwhm)).ceil() as i32).clamp(2, 20)
    };
    let reach = reach_aa / centre;
    let candidates = (-steps..=steps)
        .map(|i| 0.9 * reach * f64::from(i) / f64::from(steps))
        .collect();
    ((-reach, reach), candidates)
}

/// Bounds and candidates of the stretch s.
fn stretch_range(input: &WindowInput<'_>, b: usize, fwhm: f64) -> ((f64, f64), Vec<f64>) {
    let window = input.window_aa.1 - input.window_aa.0;
    let widest = (0.5 * window / fwhm).max(1.2);
    // An intrinsic width is an opinion, an instrument's width nearly a fact: but neither may force
    // the flux, so lines much narrower than expected stay within reach.
    let narrowest = input.instrument_fwhm_aa[b].map_or(pixel_aa(input), |i| 0.3 * i);
    let low = (narrowest / fwhm).clamp(0.02, 0.9);
    let high = if input.expected_fwhm_aa[b].is_some() {
        widest.min(6.0)
    } else {
        widest
    };
    let candidates = (-12..=16)
        .map(|i| 1.35_f64.powi(i))
        .filter(|s| *s > 1.02 * low && *s < 0.98 * high)
        .collect();
    ((low, high), candidates)
}

fn assemble(
    input: &WindowInput<'_>,
    model: &WindowModel,
    minimum: &super::solver::Minimum,
    columns: &[f64],
) -> Result<WindowOutcome> {
    let n = input.x_aa.len();
    let p = &minimum.parameters;
    let free: Vec<usize> = (0..p.len()).filter(|i| !minimum.on_bound[*i]).collect();
    let cov = covariance(columns, n, &free)?;
    let position = |parameter: usize| free.iter().position(|f| *f == parameter);
    let bands = input.bands.len();
    let first_shape = model.linear();
    let shapes = &p[first_shape..];
    let flux_position: Vec<usize> = (0..bands)
        .map(|b| position(model.flux_index(b)).expect("invariant: fluxes have no bounds"))
        .collect();
    let slot_sigma = |slot: Slot, scale: f64| match slot {
        Slot::Held(_) => None,
        Slot::Fitted(i) => {
            position(first_shape + i).map(|at| scale * cov[(at, at)].max(0.0).sqrt())
        }
    };
    let mut out = WindowOutcome {
        continuum: p[..model.linear() - bands].to_vec(),
        flux: (0..bands).map(|b| p[model.flux_index(b)]).collect(),
        centre_aa: Vec::new(),
        centre_sigma_aa: Vec::new(),
        sigma_aa: Vec::new(),
        sigma_sigma_aa: Vec::new(),
        shape: Vec::new(),
        chi2: minimum.chi2,
        dof: n - free.len(),
        flux_covariance: DMatrix::from_fn(bands, bands, |a, b| {
            cov[(flux_position[a], flux_position[b])]
        }),
    };
    for (b, component) in model.components.iter().enumerate() {
        let (centre, sigma) = model.shape_of(b, shapes);
        out.centre_aa.push(centre);
        out.sigma_aa.push(sigma);
        out.centre_sigma_aa
            .push(slot_sigma(component.shift, component.centre_aa));
        out.sigma_sigma_aa
            .push(slot_sigma(component.stretch, component.sigma_aa));
        out.shape
            .push(shape_state(component, &minimum.on_bound[first_shape..]));
    }
    Ok(out)
}

fn shape_state(component: &Component, on_bound: &[bool]) -> ShapeState {
    let stuck = |slot: Slot| matches!(slot, Slot::Fitted(i) if on_bound[i]);
    let note = match (stuck(component.shift), stuck(component.stretch)) {
        (false, false) => None,
        (true, false) => Some("the fitted centre ran to the end of its range".to_owned()),
        (false, true) => Some("the fitted width ran to the end of its range".to_owned()),
        (true, true) => {
            Some("the fitted centre and width ran to the end of their range".to_owned())
        }
    };
    ShapeState {
        centre_fitted: matches!(component.shift, Slot::Fitted(_)),
        width_fitted: matches!(component.stretch, Slot::Fitted(_)),
        note,
    }
}
