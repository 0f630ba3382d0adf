//! Errors of the fluxes that do not rest on the curvature of χ² alone: profiles, resampling, walkers.

use super::model::{Basis, Samples, WindowModel};
use super::outcome::WindowOutcome;
use super::robust::residuals;
use super::settings::Uncertainty;
use super::solver::{Residuals, Solver, Stop};
use super::walkers::{Chain, walk};
use super::window::WindowInput;
use crate::ground::{Error, Result};
use argmin::core::{CostFunction, Executor, State};
use argmin::solver::brent::BrentRoot;
use nalgebra::DMatrix;
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

/// Refits of a bootstrap.
const REFITS: usize = 1000;
/// Refits that may fail before a bootstrap is given up.
const MOST_FAILURES: usize = 100;
/// A profile is followed at most this many standard deviations from the minimum.
const FARTHEST_SIGMA: f64 = 12.0;

/// Errors of a window's fluxes, in the unit of the fit.
pub(super) enum FluxErrors {
    /// Distance to the point where χ² has risen by one, below and above, for each band.
    Sided(Vec<(f64, f64)>),
    /// Drawn fluxes, draws × bands, and how well the walkers mixed, where there were any.
    Drawn(DMatrix<f64>, Option<Chain>),
}

/// Errors of the fluxes in the wanted way; `None` for the covariance.
///
/// # Errors
/// Refits that fail again and again, a profile that does not rise.
pub(super) fn flux_errors(
    kind: Uncertainty,
    input: &WindowInput<'_>,
    outcome: &WindowOutcome,
    seed: u64,
) -> Result<Option<FluxErrors>> {
    if outcome.flux.is_empty() {
        return Ok(None);
    }
    // Windows must not share their random numbers.
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed ^ input.window_aa.0.to_bits());
    Ok(Some(match kind {
        Uncertainty::Covariance => return Ok(None),
        Uncertainty::Profile => {
            let bands = 0..outcome.flux.len();
            FluxErrors::Sided(
                bands
                    .map(|b| profile(input, outcome, b))
                    .collect::<Result<Vec<_>>>()?,
            )
        }
        Uncertainty::ResidualBootstrap => {
            FluxErrors::Drawn(bootstrap(input, outcome, &mut rng, residual_sample)?, None)
        }
        Uncertainty::PairBootstrap => {
            FluxErrors::Drawn(bootstrap(input, outcome, &mut rng, pair_sample)?, None)
        }
        Uncertainty::Walkers => {
            let (draws, chain) = walk(&model_of(input, outcome), outcome, &mut rng);
            FluxErrors::Drawn(draws, Some(chain))
        }
    }))
}

fn model_of(input: &WindowInput<'_>, outcome: &WindowOutcome) -> WindowModel {
    let mut model = input.model();
    model.set_components(outcome.components.clone(), outcome.shapes);
    model
}

/// Rise of the smallest χ² when one flux is held, less one.
struct Rise<'a> {
    model: &'a WindowModel,
    outcome: &'a WindowOutcome,
    index: usize,
}

impl Rise<'_> {
    fn at(&self, flux: f64) -> Result<f64> {
        let o = self.outcome;
        let mut bounds = o.bounds.clone();
        bounds[self.index] = (flux, flux);
        let at = o.position(self.index).expect("invariant: fluxes are free");
        let moved = (flux - o.parameters[self.index]) / o.covariance[(at, at)];
        let mut start = o.parameters.clone();
        for (position, parameter) in o.free.iter().enumerate() {
            start[*parameter] += o.covariance[(position, at)] * moved;
        }
        let found = Solver::default().minimise(self.model, &start, &bounds, Stop::default())?;
        Ok(found.chi2 - o.chi2 - 1.0)
    }
}

impl CostFunction for Rise<'_> {
    type Param = f64;
    type Output = f64;

    fn cost(&self, flux: &f64) -> std::result::Result<f64, argmin::core::Error> {
        self.at(*flux)
            .map_err(|e| argmin::core::Error::msg(e.to_string()))
    }
}

/// Distances below and above the best flux at which the profile has risen by one, by Brent's root.
fn profile(input: &WindowInput<'_>, outcome: &WindowOutcome, band: usize) -> Result<(f64, f64)> {
    let model = model_of(input, outcome);
    let index = outcome.flux_index(band);
    let (best, sigma) = (
        outcome.flux[band],
        outcome.flux_covariance[(band, band)].sqrt(),
    );
    let side = |sign: f64| -> Result<f64> {
        let rise = Rise {
            model: &model,
            outcome,
            index,
        };
        let mut far = 1.5;
        while rise.at(best + sign * far * sigma)? < 0.0 {
            far *= 1.5;
            if far > FARTHEST_SIGMA {
                return Err(Error::compute(format!(
                    "the profile of {} does not rise: its flux is not constrained on one side",
                    input.bands[band].id
                ))
                .remedy("hold its shape, or take errors_from = \"covariance\""));
            }
        }
        let edges = [best, best + sign * far * sigma];
        let solver = BrentRoot::new(edges[0].min(edges[1]), edges[0].max(edges[1]), 1e-4 * sigma);
        let found = Executor::new(rise, solver)
            .configure(|state| state.param(best + sign * sigma).max_iters(60))
            .run()
            .map_err(|e| Error::compute(format!("a profile failed: {e}")))?;
        let at = found
            .state()
            .get_best_param()
            .copied()
            .unwrap_or(best + sign * sigma);
        Ok((at - best).abs())
    };
    Ok((side(-1.0)?, side(1.0)?))
}

/// One resampled set of samples: positions, data and errors.
struct Resample {
    at: Vec<usize>,
    data: Vec<f64>,
    sigma: Vec<f64>,
}

type Draw = fn(&WindowInput<'_>, &[f64], usize, &mut Xoshiro256PlusPlus) -> Resample;

/// Model plus residuals (over their errors, spread to the degrees of freedom) drawn with replacement.
fn residual_sample(
    input: &WindowInput<'_>,
    residuals: &[f64],
    dof: usize,
    rng: &mut Xoshiro256PlusPlus,
) -> Resample {
    let n = residuals.len();
    let mean = residuals.iter().sum::<f64>() / n as f64;
    let grown = (n as f64 / dof.max(1) as f64).sqrt();
    let data = (0..n)
        .map(|i| {
            let model = input.data[i] - residuals[i] * input.sigma[i];
            let drawn = residuals[rng.random_range(0..n)] - mean;
            model + grown * drawn * input.sigma[i]
        })
        .collect();
    Resample {
        at: (0..n).collect(),
        data,
        sigma: input.sigma.clone(),
    }
}

/// Samples drawn with replacement: one that is drawn m times counts m-fold.
fn pair_sample(
    input: &WindowInput<'_>,
    residuals: &[f64],
    _dof: usize,
    rng: &mut Xoshiro256PlusPlus,
) -> Resample {
    let n = residuals.len();
    let mut times = vec![0_u32; n];
    for _ in 0..n {
        times[rng.random_range(0..n)] += 1;
    }
    let at: Vec<usize> = (0..n).filter(|i| times[*i] > 0).collect();
    Resample {
        data: at.iter().map(|i| input.data[*i]).collect(),
        sigma: at
            .iter()
            .map(|i| input.sigma[*i] / f64::from(times[*i]).sqrt())
            .collect(),
        at,
    }
}

fn bootstrap(
    input: &WindowInput<'_>,
    outcome: &WindowOutcome,
    rng: &mut Xoshiro256PlusPlus,
    draw: Draw,
) -> Result<DMatrix<f64>> {
    let (r, _) = residuals(input, outcome);
    let bands = outcome.flux.len();
    let mut out = DMatrix::zeros(REFITS, bands);
    let mut solver = Solver::default();
    let (mut done, mut failures) = (0, 0);
    while done < REFITS {
        let sample = draw(input, &r, outcome.dof, rng);
        match refit(input, outcome, &sample, &mut solver) {
            Ok(parameters) => {
                for b in 0..bands {
                    out[(done, b)] = parameters[outcome.flux_index(b)];
                }
                done += 1;
            }
            Err(error) => {
                failures += 1;
                if failures > MOST_FAILURES {
                    return Err(error);
                }
            }
        }
    }
    Ok(out)
}

fn refit(
    input: &WindowInput<'_>,
    outcome: &WindowOutcome,
    sample: &Resample,
    solver: &mut Solver,
) -> Result<Vec<f64>> {
    let choose = |all: &[f64]| sample.at.iter().map(|i| all[*i]).collect::<Vec<f64>>();
    let carrier = input.carrier.as_deref().map(choose);
    let edges: Vec<(f64, f64)> = sample.at.iter().map(|i| input.edges_aa[*i]).collect();
    let samples = Samples {
        x_aa: &choose(&input.x_aa),
        edges_aa: &edges,
        data: &sample.data,
        sigma: &sample.sigma,
    };
    let continuum = Basis {
        window_aa: input.window_aa,
        order: input.order,
        carrier: carrier.as_deref(),
    };
    let mut model = WindowModel::new(samples, continuum, input.sampling);
    model.set_components(outcome.components.clone(), outcome.shapes);
    if sample.at.len() <= model.parameters() {
        return Err(Error::compute(
            "too few different samples were drawn for a refit",
        ));
    }
    let found = solver.minimise(
        &model,
        &outcome.parameters,
        &outcome.bounds,
        Stop::default(),
    )?;
    Ok(found.parameters)
}
