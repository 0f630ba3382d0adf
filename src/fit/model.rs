//! One window's model: Chebyshev continuum plus bands, in the form the solver wants.
//!
//! Parameters, in this order: continuum coefficients, one flux per component, then the shape slots.
//! A shape slot is a shift β (centre = λ₀(1 + β)), a stretch s (σ = s σ₀), a temperature in K or a
//! wing term; bands that share velocity or width share the slot, and a held parameter has none. A
//! thermal continuum is a component too, the last one; its "flux" is the flux density in the middle
//! of the window.

use super::basis::to_unit_interval;
use super::form::{Rotor, Template};
use super::profile::{ProfileValue, REACH_SIGMA, Sampling, gaussian, gaussian_over_pixel, winged};
use super::solver::Residuals;
use super::structure::Structure;
use super::thermal::planck_over_reference;
use crate::ground::Result;
use std::ops::Range;
use std::sync::Arc;

/// One band, or the thermal continuum, inside a window.
#[derive(Clone, Debug)]
pub(super) struct Component {
    /// Expected centre, Å.
    pub centre_aa: f64,
    /// Expected standard deviation σ₀ of each line, Å.
    pub sigma_aa: f64,
    /// What it looks like.
    pub shape: Shape,
    /// Slot of the shift, or the value at which it is held.
    pub shift: Slot,
    /// Slot of the stretch, or the value at which it is held.
    pub stretch: Slot,
}

/// What a component looks like.
#[derive(Clone, Debug)]
pub(super) enum Shape {
    /// Fixed lines.
    Lines(Structure),
    /// One line with wing terms of third and fourth order.
    Winged([Slot; 2]),
    /// Lines at a temperature in K.
    Warm(Arc<Rotor>, Slot),
    /// A tabulated profile.
    Template(Arc<Template>),
    /// A Planck function over its value at the component's centre, at a temperature in K.
    Planck(Slot),
}

/// The samples of a window in the unit of the fit.
#[derive(Clone, Copy)]
pub(super) struct Samples<'a> {
    pub x_aa: &'a [f64],
    pub edges_aa: &'a [(f64, f64)],
    pub data: &'a [f64],
    pub sigma: &'a [f64],
}

/// The linear part of a window's continuum.
#[derive(Clone, Copy)]
pub(super) struct Basis<'a> {
    pub window_aa: (f64, f64),
    pub order: usize,
    /// What the polynomial multiplies, sample by sample; nothing means 1.
    pub carrier: Option<&'a [f64]>,
}

/// A shape parameter: fitted in a slot or held at a value.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Slot {
    /// Index among the shape parameters.
    Fitted(usize),
    /// Held here.
    Held(f64),
}

impl Slot {
    pub(super) fn value(self, shapes: &[f64]) -> f64 {
        match self {
            Self::Fitted(i) => shapes[i],
            Self::Held(v) => v,
        }
    }
}

/// Continuum plus bands over the used samples of one window.
pub struct WindowModel {
    x_aa: Vec<f64>,
    edges_aa: Vec<(f64, f64)>,
    weights: Vec<f64>,
    weighted_data: Vec<f64>,
    /// Weighted continuum columns, one after another.
    basis: Vec<f64>,
    continuum: usize,
    pub(super) components: Vec<Component>,
    shapes: usize,
    sampling: Sampling,
}

impl WindowModel {
    /// Builds the model over used samples.
    pub(super) fn new(samples: Samples<'_>, continuum: Basis<'_>, sampling: Sampling) -> Self {
        let Samples {
            x_aa,
            edges_aa,
            data,
            sigma,
        } = samples;
        let Basis {
            window_aa,
            order,
            carrier,
        } = continuum;
        let n = x_aa.len();
        let weights: Vec<f64> = sigma.iter().map(|s| 1.0 / s).collect();
        let mut basis = vec![0.0; n * (order + 1)];
        match carrier {
            None => basis[..n].copy_from_slice(&weights),
            Some(carrier) => {
                for ((b, w), c) in basis.iter_mut().zip(&weights).zip(carrier) {
                    *b = w * c;
                }
            }
        }
        for (i, x) in x_aa.iter().enumerate() {
            // Chebyshev recurrence, on weighted values because it is linear.
            let t = to_unit_interval(*x, window_aa);
            for c in 1..=order {
                let one = basis[(c - 1) * n + i];
                basis[c * n + i] = match c {
                    1 => t * one,
                    _ => 2.0 * t * one - basis[(c - 2) * n + i],
                };
            }
        }
        Self {
            x_aa: x_aa.to_vec(),
            edges_aa: edges_aa.to_vec(),
            weighted_data: data.iter().zip(&weights).map(|(d, w)| d * w).collect(),
            weights,
            basis,
            continuum: order + 1,
            components: Vec::new(),
            shapes: 0,
            sampling,
        }
    }

    /// A continuum of the given order and Gaussians whose centre and width are all fitted, from
    /// rough `(centre, standard deviation)` pairs in Å; `tied` gives them one velocity and one width
    /// factor. For fits that start near, without a search.
    pub fn gaussians(
        x_aa: &[f64],
        data: &[f64],
        sigma: &[f64],
        order: usize,
        lines_aa: &[(f64, f64)],
        tied: bool,
    ) -> Self {
        let n = x_aa.len();
        let half = 0.5 * (x_aa[n - 1] - x_aa[0]) / (n - 1) as f64;
        let edges: Vec<(f64, f64)> = x_aa.iter().map(|x| (x - half, x + half)).collect();
        let samples = Samples {
            x_aa,
            edges_aa: &edges,
            data,
            sigma,
        };
        let continuum = Basis {
            window_aa: (x_aa[0], x_aa[n - 1]),
            order,
            carrier: None,
        };
        let mut model = Self::new(samples, continuum, Sampling::Centre);
        let slot = |b: usize| if tied { 0 } else { 2 * b };
        let components = lines_aa
            .iter()
            .enumerate()
            .map(|(b, (centre_aa, sigma_aa))| Component {
                centre_aa: *centre_aa,
                sigma_aa: *sigma_aa,
                shape: Shape::Lines(Structure::single()),
                shift: Slot::Fitted(slot(b)),
                stretch: Slot::Fitted(slot(b) + 1),
            })
            .collect();
        let shapes = if tied { 2 } else { 2 * lines_aa.len() };
        model.set_components(components, shapes);
        model
    }

    /// Starting parameters: the linear ones solved at the expected shapes.
    ///
    /// # Errors
    /// Bands that cannot be told apart.
    pub fn start(&self) -> Result<Vec<f64>> {
        let shapes: Vec<f64> = (0..self.shapes).map(|s| (s % 2) as f64).collect();
        let linear = super::start::solve_linear(self, &shapes)?;
        Ok(linear.parameters.into_iter().chain(shapes).collect())
    }

    /// Sets the bands; `shapes` is the number of shape slots they use.
    pub(super) fn set_components(&mut self, components: Vec<Component>, shapes: usize) {
        self.components = components;
        self.shapes = shapes;
    }

    /// Number of linear parameters: continuum coefficients and fluxes.
    pub(super) fn linear(&self) -> usize {
        self.continuum + self.components.len()
    }

    /// Index of a band's flux among the parameters.
    pub(super) fn flux_index(&self, band: usize) -> usize {
        self.continuum + band
    }

    /// Centre and standard deviation of a band, Å, for given shape values.
    pub(super) fn shape_of(&self, band: usize, shapes: &[f64]) -> (f64, f64) {
        let c = &self.components[band];
        (
            c.centre_aa * (1.0 + c.shift.value(shapes)),
            c.sigma_aa * c.stretch.value(shapes),
        )
    }

    fn reach(&self, centre_aa: f64, sigma_aa: f64) -> Range<usize> {
        let margin = REACH_SIGMA * sigma_aa;
        let low = self.x_aa.partition_point(|x| *x < centre_aa - margin);
        let high = self.x_aa.partition_point(|x| *x <= centre_aa + margin);
        low..high
    }

    #[inline]
    fn profile(&self, i: usize, centre_aa: f64, sigma_aa: f64) -> ProfileValue {
        match self.sampling {
            Sampling::Centre => gaussian(self.x_aa[i], centre_aa, sigma_aa),
            Sampling::Pixel => {
                let (low, high) = self.edges_aa[i];
                gaussian_over_pixel(low, high, centre_aa, sigma_aa)
            }
        }
    }

    /// Weighted columns of the linear parameters at fixed shapes, one after another (n × linear).
    pub(super) fn linear_columns(&self, shapes: &[f64], columns: &mut Vec<f64>) {
        let n = self.x_aa.len();
        columns.clear();
        columns.extend_from_slice(&self.basis);
        columns.resize(n * self.linear(), 0.0);
        for band in 0..self.components.len() {
            let column = &mut columns[self.flux_index(band) * n..][..n];
            self.visit(band, shapes, |i, value, _| {
                column[i] += value * self.weights[i];
            });
        }
    }

    /// Data over error.
    pub(super) fn weighted_data(&self) -> &[f64] {
        &self.weighted_data
    }

    fn add_band(&self, band: usize, p: &[f64], residuals: &mut [f64], columns: &mut [f64]) {
        let n = self.x_aa.len();
        let first_shape = self.linear();
        let component = &self.components[band];
        let (centre, sigma) = self.shape_of(band, &p[first_shape..]);
        let flux = p[self.flux_index(band)];
        let plain = matches!(&component.shape, Shape::Lines(s) if s.is_single());
        if !plain || self.sampling == Sampling::Pixel {
            self.add_general(band, p, residuals, columns);
            return;
        }
        let reach = self.reach(centre, sigma);
        let (linear, shape) = columns.split_at_mut(first_shape * n);
        let flux_column = &mut linear[self.flux_index(band) * n..][reach.clone()];
        // Plain slices and one thing per loop, so that all but the exponential is vectorised.
        let x = &self.x_aa[reach.clone()];
        for ((out, x), w) in flux_column
            .iter_mut()
            .zip(x)
            .zip(&self.weights[reach.clone()])
        {
            *out = gaussian(*x, centre, sigma).value * w;
        }
        for (r, v) in residuals[reach.clone()].iter_mut().zip(&*flux_column) {
            *r -= flux * v;
        }
        let inv = 1.0 / sigma;
        if let Slot::Fitted(s) = component.shift {
            let scale = flux * component.centre_aa * inv;
            let target = &mut shape[s * n..][reach.clone()];
            for ((out, v), x) in target.iter_mut().zip(&*flux_column).zip(x) {
                *out += scale * v * ((x - centre) * inv);
            }
        }
        if let Slot::Fitted(s) = component.stretch {
            let scale = flux * component.sigma_aa * inv;
            let target = &mut shape[s * n..][reach];
            for ((out, v), x) in target.iter_mut().zip(&*flux_column).zip(x) {
                let u = (x - centre) * inv;
                *out += scale * v * (u * u - 1.0);
            }
        }
    }
}

impl Component {
    /// Slots of shift, stretch and what else the shape has.
    pub(super) fn slots(&self) -> [Slot; 4] {
        let none = Slot::Held(0.0);
        let more = match &self.shape {
            Shape::Winged(slots) => *slots,
            Shape::Warm(_, slot) | Shape::Planck(slot) => [*slot, none],
            Shape::Lines(_) | Shape::Template(_) => [none, none],
        };
        [self.shift, self.stretch, more[0], more[1]]
    }
}

impl WindowModel {
    /// Calls `f(sample, value, derivatives by the four slots)` wherever a component of unit flux does
    /// not vanish; a sample may come several times, and counts each time.
    fn visit(&self, band: usize, shapes: &[f64], mut f: impl FnMut(usize, f64, [f64; 4])) {
        let component = &self.components[band];
        let (centre, sigma) = self.shape_of(band, shapes);
        let (by_shift, by_stretch) = (component.centre_aa, component.sigma_aa);
        match &component.shape {
            Shape::Lines(structure) => {
                for (ratio, share) in structure.lines() {
                    let line = centre * ratio;
                    for i in self.reach(line, sigma) {
                        let v = self.profile(i, line, sigma);
                        let shift = share * v.by_centre * by_shift * ratio;
                        let stretch = share * v.by_sigma * by_stretch;
                        f(i, share * v.value, [shift, stretch, 0.0, 0.0]);
                    }
                }
            }
            Shape::Winged(slots) => {
                let wings = [slots[0].value(shapes), slots[1].value(shapes)];
                for i in self.reach(centre, sigma) {
                    let pixel = (self.sampling == Sampling::Pixel).then(|| self.edges_aa[i]);
                    let (v, by_wings) = winged(self.x_aa[i], pixel, centre, sigma, wings);
                    let (shift, stretch) = (v.by_centre * by_shift, v.by_sigma * by_stretch);
                    f(i, v.value, [shift, stretch, by_wings[0], by_wings[1]]);
                }
            }
            Shape::Warm(rotor, slot) => {
                for (ratio, share, by_k) in rotor.lines(slot.value(shapes)) {
                    let line = centre * ratio;
                    for i in self.reach(line, sigma) {
                        let v = self.profile(i, line, sigma);
                        let shift = share * v.by_centre * by_shift * ratio;
                        let stretch = share * v.by_sigma * by_stretch;
                        f(i, share * v.value, [shift, stretch, by_k * v.value, 0.0]);
                    }
                }
            }
            Shape::Template(template) => {
                for (i, x) in self.x_aa.iter().enumerate() {
                    let ratio = x / centre;
                    let (value, slope) = template.at(ratio);
                    let by_centre = -(slope * ratio + value) / (centre * centre);
                    f(i, value / centre, [by_centre * by_shift, 0.0, 0.0, 0.0]);
                }
            }
            Shape::Planck(slot) => {
                let temperature_k = slot.value(shapes);
                for (i, x) in self.x_aa.iter().enumerate() {
                    let (value, by_k) = planck_over_reference(*x, centre, temperature_k);
                    f(i, value, [0.0, 0.0, by_k, 0.0]);
                }
            }
        }
    }

    /// As `add_band`, for any shape.
    fn add_general(&self, band: usize, p: &[f64], residuals: &mut [f64], columns: &mut [f64]) {
        let n = self.x_aa.len();
        let flux = p[self.flux_index(band)];
        let slots = self.components[band].slots();
        let (linear, shape) = columns.split_at_mut(self.linear() * n);
        let flux_column = &mut linear[self.flux_index(band) * n..][..n];
        self.visit(band, &p[self.linear()..], |i, value, by| {
            let w = self.weights[i];
            flux_column[i] += value * w;
            residuals[i] -= flux * value * w;
            for (slot, by) in slots.iter().zip(by) {
                if let Slot::Fitted(s) = slot {
                    shape[s * n + i] += flux * by * w;
                }
            }
        });
    }
}

impl Residuals for WindowModel {
    fn parameters(&self) -> usize {
        self.linear() + self.shapes
    }

    fn count(&self) -> usize {
        self.x_aa.len()
    }

    fn evaluate(&self, p: &[f64], residuals: &mut [f64], columns: &mut [f64]) {
        let n = self.x_aa.len();
        let fixed = self.continuum * n;
        columns[..fixed].copy_from_slice(&self.basis);
        columns[fixed..].fill(0.0);
        residuals.copy_from_slice(&self.weighted_data);
        for (c, coefficient) in p[..self.continuum].iter().enumerate() {
            let column = &self.basis[c * n..(c + 1) * n];
            for (r, b) in residuals.iter_mut().zip(column) {
                *r -= coefficient * b;
            }
        }
        for band in 0..self.components.len() {
            self.add_band(band, p, residuals, columns);
        }
    }
}
