//! The fit of one window: which shapes to fit, from where to start, and how sure the result is.

use super::form::{Form, Rotor};
use super::model::{Basis, Component, Samples, Shape, Slot, WindowModel};
use super::profile::{Sampling, sigma_from_fwhm};
use super::settings::{BandModel, Freedom, Thermal};
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
/// The same for a band of middling strength, whose shape is better known: by chance in 0.3 %.
const FREE_MIDDLING_BY_CHI2: f64 = 11.8;
const MIDDLING_SIGMA: f64 = 8.0;
/// Largest wing term: beyond it the profile turns negative.
const MOST_WING: f64 = 0.6;
/// Temperatures a thermal continuum may take, K.
const THERMAL_RANGE_K: (f64, f64) = (30.0, 3000.0);
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
    /// Thermal flux density in the middle of the window, and the temperature, each with its error.
    pub thermal: Option<ThermalOutcome>,
    pub flux: Vec<f64>,
    pub centre_aa: Vec<f64>,
    pub centre_sigma_aa: Vec<Option<f64>>,
    pub sigma_aa: Vec<f64>,
    pub sigma_sigma_aa: Vec<Option<f64>>,
    pub shape: Vec<ShapeState>,
    /// What else a band's shape has: temperature in K, or the two wing terms, with errors.
    pub extra: Vec<Vec<(f64, Option<f64>)>>,
    pub chi2: f64,
    pub dof: usize,
    /// Covariance of the fluxes.
    pub flux_covariance: DMatrix<f64>,
    /// All parameters as the solver has them, their bounds, and which of them have an error.
    pub parameters: Vec<f64>,
    pub bounds: Vec<(f64, f64)>,
    pub free: Vec<usize>,
    /// Covariance of the parameters in `free`.
    pub covariance: DMatrix<f64>,
    pub components: Vec<Component>,
    pub shapes: usize,
}

/// The thermal part of a window's continuum.
#[derive(Clone, Copy, Debug)]
pub(super) struct ThermalOutcome {
    pub reference_aa: f64,
    pub flux_density: (f64, f64),
    pub temperature_k: (f64, Option<f64>),
}

#[derive(Clone, Copy, Debug, PartialEq)]
struct Wish {
    centre: bool,
    width: bool,
    /// Temperature or wings.
    extra: bool,
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
            .ties
            .iter()
            .zip(wishes)
            .fold(wishes[b], |w, (other, wish)| {
                if other.is_some() && *other == input.ties[b] {
                    Wish {
                        centre: w.centre || wish.centre,
                        width: w.width || wish.width,
                        extra: w.extra,
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
            if let Some(tie) = &input.ties[b]
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
            if let Some(tie) = &input.ties[b] {
                shared.insert((tie.as_str(), is_width), i);
            }
            Slot::Fitted(i)
        };
        let shift = slot(false, wish.centre, 0.0);
        let stretch = slot(true, wish.width, 1.0);
        let shape = shape_of(band, wish.extra, &mut layout, &mut pair);
        layout.components.push(Component {
            centre_aa: band.centre_aa,
            sigma_aa: sigma_from_fwhm(fwhm),
            shape,
            shift,
            stretch,
        });
        if !pair.is_empty() {
            layout.grid.pairs.push(pair);
        }
    }
    if let Some(thermal) = input.thermal {
        add_thermal(input, thermal, &mut layout);
    }
    layout
}

/// The band's shape, with slots of its own for temperature or wings.
fn shape_of(band: &BandModel, wanted: bool, layout: &mut Layout, pair: &mut Vec<usize>) -> Shape {
    let mut slot = |start: f64, bounds: (f64, f64), candidates: Vec<f64>, scanned: bool| {
        if !wanted {
            return Slot::Held(start);
        }
        layout.start.push(start);
        layout.bounds.push(bounds);
        layout.grid.candidates.push(candidates);
        if scanned {
            pair.push(layout.start.len() - 1);
        }
        Slot::Fitted(layout.start.len() - 1)
    };
    match &band.form {
        Form::Warm(rotor) => {
            let bounds = band.limits.temperature_k.unwrap_or(Rotor::RANGE_K);
            let grid = log_grid(bounds, 7);
            Shape::Warm(rotor.clone(), slot(rotor.start_k, bounds, grid, true))
        }
        Form::Template(template) => Shape::Template(template.clone()),
        _ if band.wings => {
            let mut term = || slot(0.0, (-MOST_WING, MOST_WING), vec![0.0], false);
            Shape::Winged([term(), term()])
        }
        _ => Shape::Lines(band.structure.clone()),
    }
}

fn log_grid((low, high): (f64, f64), count: i32) -> Vec<f64> {
    (0..count)
        .map(|i| low * (high / low).powf((f64::from(i) + 0.5) / f64::from(count)))
        .collect()
}

/// The thermal continuum as the last component.
fn add_thermal(input: &WindowInput<'_>, thermal: Thermal, layout: &mut Layout) {
    let slot = if thermal.free {
        layout.start.push(thermal.temperature_k);
        layout.bounds.push(THERMAL_RANGE_K);
        let around = [0.5, 0.7, 0.85, 1.0, 1.2, 1.5, 2.0];
        layout
            .grid
            .candidates
            .push(around.iter().map(|f| f * thermal.temperature_k).collect());
        layout.grid.pairs.push(vec![layout.start.len() - 1]);
        Slot::Fitted(layout.start.len() - 1)
    } else {
        Slot::Held(thermal.temperature_k)
    };
    layout.components.push(Component {
        centre_aa: 0.5 * (input.window_aa.0 + input.window_aa.1),
        sigma_aa: 1.0,
        shape: Shape::Planck(slot),
        shift: Slot::Held(0.0),
        stretch: Slot::Held(1.0),
    });
}

fn inner_grid((low, high): (f64, f64), count: i32) -> Vec<f64> {
    (0..count)
        .map(|i| low + (high - low) * (f64::from(i) + 0.5) / f64::from(count))
        .collect()
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
    if let Some((low, high)) = band.limits.centre_aa {
        let (low, high) = (low / centre - 1.0, high / centre - 1.0);
        return ((low, high), inner_grid((low, high), 7));
    }
    let known = input.expected_fwhm_aa[b].is_some();
    let reach_aa = if band.centre == Freedom::Auto && known {
        fwhm.max(3.0 * pixel_aa(input))
    } else {
        let gap = input
            .bands
            .iter()
            .enumerate()
            .filter(|(i, _)| {
                *i != b && (input.ties[*i].is_none() || input.ties[*i] != input.ties[b])
            })
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
    if let Some((low, high)) = input.bands[b].limits.fwhm_aa {
        let bounds = (low / fwhm, high / fwhm);
        return (bounds, inner_grid(bounds, 5));
    }
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
    bounds: Vec<(f64, f64)>,
) -> Result<WindowOutcome> {
    let n = input.x_aa.len();
    let p = &minimum.parameters;
    let first_shape = model.linear();
    // A flux on a limit of the user's keeps the error it would have without.
    let free: Vec<usize> = (0..p.len())
        .filter(|i| !minimum.on_bound[*i] || *i < first_shape)
        .collect();
    let bands = input.bands.len();
    let shapes = &p[first_shape..];
    let (centre_aa, sigma_aa) = (0..bands).map(|b| model.shape_of(b, shapes)).unzip();
    let mut out = WindowOutcome {
        continuum: p[..model.flux_index(0)].to_vec(),
        thermal: None,
        flux: (0..bands).map(|b| p[model.flux_index(b)]).collect(),
        centre_aa,
        centre_sigma_aa: vec![None; bands],
        sigma_aa,
        sigma_sigma_aa: vec![None; bands],
        shape: model.components[..bands]
            .iter()
            .map(|c| shape_state(c, &minimum.on_bound[first_shape..]))
            .collect(),
        extra: vec![Vec::new(); bands],
        chi2: minimum.chi2,
        dof: n - free.len(),
        flux_covariance: DMatrix::zeros(bands, bands),
        covariance: covariance(columns, n, &free)?,
        parameters: p.clone(),
        bounds,
        free,
        components: model.components.clone(),
        shapes: shapes.len(),
    };
    out.read_errors();
    Ok(out)
}

impl WindowOutcome {
    /// Position of a parameter among the free ones.
    pub(super) fn position(&self, parameter: usize) -> Option<usize> {
        self.free.iter().position(|f| *f == parameter)
    }

    /// Index of a component's flux among the parameters.
    pub(super) fn flux_index(&self, component: usize) -> usize {
        self.continuum.len() + component
    }

    fn sigma_of(&self, parameter: usize) -> Option<f64> {
        let at = self.position(parameter)?;
        Some(self.covariance[(at, at)].max(0.0).sqrt())
    }

    /// Errors of fluxes and shapes from the covariance.
    pub(super) fn read_errors(&mut self) {
        let bands = self.flux.len();
        let first_shape = self.parameters.len() - self.shapes;
        let shapes = self.parameters[first_shape..].to_vec();
        let at: Vec<usize> = (0..bands)
            .map(|b| {
                self.position(self.flux_index(b))
                    .expect("invariant: fluxes are always free")
            })
            .collect();
        self.flux_covariance =
            DMatrix::from_fn(bands, bands, |a, b| self.covariance[(at[a], at[b])]);
        let slot_sigma = |slot: Slot, scale: f64| match slot {
            Slot::Held(_) => None,
            Slot::Fitted(i) => self.sigma_of(first_shape + i).map(|s| scale * s),
        };
        let components = &self.components[..bands];
        let centre = components
            .iter()
            .map(|c| slot_sigma(c.shift, c.centre_aa))
            .collect();
        let width = components
            .iter()
            .map(|c| slot_sigma(c.stretch, c.sigma_aa))
            .collect();
        let extra = components
            .iter()
            .map(|c| {
                let slots: &[Slot] = match &c.shape {
                    Shape::Winged(slots) => slots,
                    Shape::Warm(_, slot) => std::slice::from_ref(slot),
                    _ => &[],
                };
                let read = |s: &Slot| (s.value(&shapes), slot_sigma(*s, 1.0));
                slots.iter().map(read).collect()
            })
            .collect();
        let thermal = self.components.get(bands).and_then(|c| {
            let Shape::Planck(slot) = c.shape else {
                return None;
            };
            let index = self.flux_index(bands);
            let sigma = self.sigma_of(index).unwrap_or(f64::NAN);
            Some(ThermalOutcome {
                reference_aa: c.centre_aa,
                flux_density: (self.parameters[index], sigma),
                temperature_k: (slot.value(&shapes), slot_sigma(slot, 1.0)),
            })
        });
        self.centre_sigma_aa = centre;
        self.sigma_sigma_aa = width;
        self.extra = extra;
        self.thermal = thermal;
    }
}

fn shape_state(component: &Component, on_bound: &[bool]) -> ShapeState {
    let stuck = |slot: Slot| matches!(slot, Slot::Fitted(i) if on_bound[i]);
    let slots = component.slots();
    let extra = match component.shape {
        Shape::Warm(..) => "temperature",
        _ => "wings",
    };
    let names = ["centre", "width", extra, extra];
    let mut stuck: Vec<&str> = slots
        .iter()
        .zip(names)
        .filter(|(s, _)| stuck(**s))
        .map(|(_, name)| name)
        .collect();
    stuck.dedup();
    let note = (!stuck.is_empty()).then(|| {
        let plural = if stuck.len() > 1 {
            "their ranges"
        } else {
            "its range"
        };
        format!(
            "the fitted {} ran to the end of {plural}",
            stuck.join(" and ")
        )
    });
    ShapeState {
        centre_fitted: matches!(component.shift, Slot::Fitted(_)),
        width_fitted: matches!(component.stretch, Slot::Fitted(_)),
        note,
    }
}
