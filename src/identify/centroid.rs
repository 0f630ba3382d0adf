//! Centre, width and height of a peak by a local Gaussian fit.

use super::filter::FWHM_PER_SIGMA;
use crate::fit::solver::{Residuals, Solver, Stop, covariance};

/// Parameters: height over its first guess, centre in widths from its first guess, ln of the width
/// over the instrument's.
pub(super) struct Gaussian<'a> {
    /// Positions from the first guess in units of the instrument's standard deviation.
    pub x: &'a [f64],
    /// Flux over the guessed height.
    pub y: &'a [f64],
    /// Its errors.
    pub sigma: &'a [f64],
    /// Whether the width is fitted.
    pub free_width: bool,
}

impl Residuals for Gaussian<'_> {
    fn parameters(&self) -> usize {
        if self.free_width { 3 } else { 2 }
    }

    fn count(&self) -> usize {
        self.x.len()
    }

    fn evaluate(&self, parameters: &[f64], residuals: &mut [f64], columns: &mut [f64]) {
        let (height, centre) = (parameters[0], parameters[1]);
        let width = parameters.get(2).map_or(1.0, |ln| ln.exp());
        let n = self.x.len();
        for i in 0..n {
            let t = (self.x[i] - centre) / width;
            let shape = (-0.5 * t * t).exp() / self.sigma[i];
            residuals[i] = self.y[i] / self.sigma[i] - height * shape;
            columns[i] = shape;
            columns[n + i] = height * shape * t / width;
            if self.free_width {
                columns[2 * n + i] = height * shape * t * t;
            }
        }
    }
}

/// What the fit found, in the units of [`Gaussian`].
pub(super) struct Fitted {
    pub height: f64,
    pub centre: f64,
    pub width: f64,
    pub centre_sigma: f64,
}

/// Farthest that the centre may go from the first guess, and the widths allowed, in units of the
/// instrument's standard deviation.
const FARTHEST: f64 = 0.6 * FWHM_PER_SIGMA;
const WIDTHS: (f64, f64) = (0.5, 3.0);
/// Fewest samples with which a width is fitted.
pub(super) const FEWEST_FOR_WIDTH: usize = 5;

impl Gaussian<'_> {
    /// Fits; the error of the centre grows with √(χ²/ν) where that is above one. `None` when the
    /// samples do not carry the fit.
    pub fn fit(&self, solver: &mut Solver) -> Option<Fitted> {
        let start = [1.0, 0.0, 0.0];
        let bounds = [
            (0.0, 100.0),
            (-FARTHEST, FARTHEST),
            (WIDTHS.0.ln(), WIDTHS.1.ln()),
        ];
        let k = self.parameters();
        let stop = Stop {
            iterations: 60,
            gain: 1e-6,
            ..Stop::default()
        };
        let found = solver
            .minimise(self, &start[..k], &bounds[..k], stop)
            .ok()?;
        let free: Vec<usize> = (0..k).filter(|i| !found.on_bound[*i]).collect();
        let place = free.iter().position(|i| *i == 1)?;
        let errors = covariance(solver.columns(), self.count(), &free).ok()?;
        let dof = self.count().saturating_sub(free.len()).max(1) as f64;
        let excess = (found.chi2 / dof).max(1.0);
        let centre_sigma = (errors[(place, place)] * excess).sqrt();
        let width = found.parameters.get(2).map_or(1.0, |ln| ln.exp());
        (centre_sigma.is_finite() && found.parameters[0] > 0.0).then_some(Fitted {
            height: found.parameters[0],
            centre: found.parameters[1],
            width,
            centre_sigma,
        })
    }
}
