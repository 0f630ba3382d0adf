//! Which shape parameters of a window are fitted, within which bounds, from which starting values.

use super::form::{Form, Rotor};
use super::model::{Component, Shape, Slot};
use super::profile::sigma_from_fwhm;
use super::settings::{BandModel, Freedom, Thermal};
use super::start::ShapeGrid;
use super::window::WindowInput;
use std::collections::BTreeMap;

/// Largest wing term: beyond it the profile turns negative.
const MOST_WING: f64 = 0.6;
/// Temperatures a thermal continuum may take, K.
const THERMAL_RANGE_K: (f64, f64) = (30.0, 3000.0);

#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Wish {
    pub centre: bool,
    pub width: bool,
    /// Temperature or wings.
    pub extra: bool,
}

pub(super) struct Layout {
    pub components: Vec<Component>,
    pub start: Vec<f64>,
    pub bounds: Vec<(f64, f64)>,
    pub grid: ShapeGrid,
}

/// Slots, bounds and grids for the wished shapes.
pub(super) fn lay_out(input: &WindowInput<'_>, wishes: &[Wish]) -> Layout {
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
