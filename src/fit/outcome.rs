//! What the fit of one window found, in the unit of the fit.

use super::model::{Component, Shape, Slot, WindowModel};
use super::solver::{Minimum, covariance};
use super::window::WindowInput;
use crate::ground::Result;
use nalgebra::DMatrix;

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

pub(super) fn assemble(
    input: &WindowInput<'_>,
    model: &WindowModel,
    minimum: &Minimum,
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
