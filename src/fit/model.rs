//! One window's model: Chebyshev continuum plus bands, in the form the solver wants.
//!
//! Parameters, in this order: continuum coefficients, one flux per band, then the shape slots. A
//! shape slot is either a shift β (centre = λ₀(1 + β)) or a stretch s (σ = s σ₀); bands that share
//! velocity or width share the slot, and a band whose shape is held has none.

use super::basis::to_unit_interval;
use super::profile::{ProfileValue, REACH_SIGMA, Sampling, gaussian, gaussian_over_pixel};
use super::solver::Residuals;
use super::structure::Structure;
use crate::ground::Result;
use std::ops::Range;

/// One band inside a window.
#[derive(Clone, Debug)]
pub(super) struct Component {
    /// Expected centre, Å.
    pub centre_aa: f64,
    /// Expected standard deviation σ₀ of each line, Å.
    pub sigma_aa: f64,
    /// The lines.
    pub structure: Structure,
    /// Slot of the shift, or the value at which it is held.
    pub shift: Slot,
    /// Slot of the stretch, or the value at which it is held.
    pub stretch: Slot,
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
    fn value(self, shapes: &[f64]) -> f64 {
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
    /// Builds the model over used samples: wavelengths, pixel edges, data and errors in the unit
    /// of the fit; `order` is the Chebyshev order over `window_aa`.
    pub(super) fn new(
        x_aa: &[f64],
        edges_aa: &[(f64, f64)],
        data: &[f64],
        sigma: &[f64],
        window_aa: (f64, f64),
        order: usize,
        sampling: Sampling,
    ) -> Self {
        let n = x_aa.len();
        let weights: Vec<f64> = sigma.iter().map(|s| 1.0 / s).collect();
        let mut basis = vec![0.0; n * (order + 1)];
        basis[..n].copy_from_slice(&weights);
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
        let window = (x_aa[0], x_aa[n - 1]);
        let mut model = Self::new(x_aa, &edges, data, sigma, window, order, Sampling::Centre);
        let slot = |b: usize| if tied { 0 } else { 2 * b };
        let components = lines_aa
            .iter()
            .enumerate()
            .map(|(b, (centre_aa, sigma_aa))| Component {
                centre_aa: *centre_aa,
                sigma_aa: *sigma_aa,
                structure: Structure::single(),
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
            let (centre, sigma) = self.shape_of(band, shapes);
            let at = self.flux_index(band) * n;
            for (ratio, share) in self.components[band].structure.lines() {
                let line = centre * ratio;
                for i in self.reach(line, sigma) {
                    columns[at + i] += share * self.profile(i, line, sigma).value * self.weights[i];
                }
            }
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
        if !component.structure.is_single() {
            self.add_lines(band, flux, (centre, sigma), residuals, columns);
            return;
        }
        let reach = self.reach(centre, sigma);
        let (linear, shape) = columns.split_at_mut(first_shape * n);
        let flux_column = &mut linear[self.flux_index(band) * n..][reach.clone()];
        if self.sampling == Sampling::Pixel {
            for (out, i) in flux_column.iter_mut().zip(reach) {
                let v = self.profile(i, centre, sigma);
                let w = self.weights[i];
                *out = v.value * w;
                residuals[i] -= flux * v.value * w;
                if let Slot::Fitted(s) = component.shift {
                    shape[s * n + i] += flux * v.by_centre * component.centre_aa * w;
                }
                if let Slot::Fitted(s) = component.stretch {
                    shape[s * n + i] += flux * v.by_sigma * component.sigma_aa * w;
                }
            }
            return;
        }
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

impl WindowModel {
    /// As `add_band`, line by line.
    fn add_lines(
        &self,
        band: usize,
        flux: f64,
        (centre, sigma): (f64, f64),
        residuals: &mut [f64],
        columns: &mut [f64],
    ) {
        let n = self.x_aa.len();
        let component = &self.components[band];
        let (linear, shape) = columns.split_at_mut(self.linear() * n);
        let flux_column = &mut linear[self.flux_index(band) * n..][..n];
        for (ratio, share) in component.structure.lines() {
            let line = centre * ratio;
            for i in self.reach(line, sigma) {
                let v = self.profile(i, line, sigma);
                let w = share * self.weights[i];
                flux_column[i] += v.value * w;
                residuals[i] -= flux * v.value * w;
                if let Slot::Fitted(s) = component.shift {
                    shape[s * n + i] += flux * v.by_centre * component.centre_aa * ratio * w;
                }
                if let Slot::Fitted(s) = component.stretch {
                    shape[s * n + i] += flux * v.by_sigma * component.sigma_aa * w;
                }
            }
        }
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

/// Profile of a band at any wavelengths, for reporting (Å⁻¹).
pub(super) fn profile_at(
    sampling: Sampling,
    x_aa: f64,
    edges_aa: (f64, f64),
    centre_aa: f64,
    sigma_aa: f64,
) -> f64 {
    if (x_aa - centre_aa).abs() > REACH_SIGMA * sigma_aa + (edges_aa.1 - edges_aa.0) {
        return 0.0;
    }
    match sampling {
        Sampling::Centre => gaussian(x_aa, centre_aa, sigma_aa).value,
        Sampling::Pixel => gaussian_over_pixel(edges_aa.0, edges_aa.1, centre_aa, sigma_aa).value,
    }
}
