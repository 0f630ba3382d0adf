//! Starting values for the shapes: a grid with the linear parameters solved exactly at every
//! point, and a simplex search where the grid's best point does not lead anywhere.

use super::model::WindowModel;
use super::solver::dot;
use crate::ground::{Error, Result};
use argmin::core::{CostFunction, Executor, State};
use argmin::solver::neldermead::NelderMead;
use nalgebra::{DMatrix, DVector};

/// Linear parameters at fixed shapes and the χ² they reach.
#[derive(Clone, Debug)]
pub(super) struct LinearSolution {
    pub parameters: Vec<f64>,
    pub chi2: f64,
}

/// Solves the linear parameters exactly at fixed shapes (variable projection, Golub & Pereyra
/// 1973), by Cholesky on columns of unit length.
///
/// # Errors
/// Linearly dependent columns: two bands at one place, or a band without samples.
pub(super) fn solve_linear(model: &WindowModel, shapes: &[f64]) -> Result<LinearSolution> {
    let mut columns = Vec::new();
    model.linear_columns(shapes, &mut columns);
    let k = model.linear();
    let data = model.weighted_data();
    let n = data.len();
    if n < k {
        return Err(
            Error::compute(format!("{n} samples cannot carry {k} parameters"))
                .remedy("widen the window or lower the continuum order"),
        );
    }
    let column = |c: usize| &columns[c * n..(c + 1) * n];
    let lengths: Vec<f64> = (0..k).map(|c| dot(column(c), column(c)).sqrt()).collect();
    let singular = || {
        Error::compute("two bands cannot be told apart, or a band has no sample under it")
            .remedy("leave one out, or check centre, width and resolution")
    };
    if lengths.iter().any(|l| *l <= 0.0) {
        return Err(singular());
    }
    let normal = DMatrix::from_fn(k, k, |a, b| {
        dot(column(a), column(b)) / (lengths[a] * lengths[b])
    });
    let rhs = DVector::from_fn(k, |a, _| dot(column(a), data) / lengths[a]);
    let solved = normal.cholesky().ok_or_else(singular)?.solve(&rhs);
    let parameters: Vec<f64> = (0..k).map(|c| solved[c] / lengths[c]).collect();
    let mut residuals = data.to_vec();
    for (c, value) in parameters.iter().enumerate() {
        for (r, v) in residuals.iter_mut().zip(column(c)) {
            *r -= value * v;
        }
    }
    let chi2 = dot(&residuals, &residuals);
    Ok(LinearSolution { parameters, chi2 })
}

/// The shape values and the grid each may take.
pub(super) struct ShapeGrid {
    /// Candidate values, one list per slot.
    pub candidates: Vec<Vec<f64>>,
    /// Slots scanned together (a band's shift with its stretch).
    pub pairs: Vec<Vec<usize>>,
}

/// Scans each pair of slots over its grid with the others at their best so far, twice, so that a
/// blend's members settle against each other. Returns the best shapes and their χ².
pub(super) fn scan(model: &WindowModel, start: &[f64], grid: &ShapeGrid) -> (Vec<f64>, f64) {
    let mut best = start.to_vec();
    let mut best_chi2 = solve_linear(model, &best).map_or(f64::INFINITY, |s| s.chi2);
    for _sweep in 0..2 {
        for slots in &grid.pairs {
            let mut index = vec![0; slots.len()];
            loop {
                let mut trial = best.clone();
                for (slot, i) in slots.iter().zip(&index) {
                    trial[*slot] = grid.candidates[*slot][*i];
                }
                if let Ok(solution) = solve_linear(model, &trial)
                    && solution.chi2 < best_chi2
                {
                    best_chi2 = solution.chi2;
                    best = trial;
                }
                if !advance(&mut index, slots, &grid.candidates) {
                    break;
                }
            }
        }
        if grid.pairs.len() < 2 {
            break;
        }
    }
    (best, best_chi2)
}

fn advance(index: &mut [usize], slots: &[usize], candidates: &[Vec<f64>]) -> bool {
    for (i, slot) in index.iter_mut().zip(slots) {
        *i += 1;
        if *i < candidates[*slot].len() {
            return true;
        }
        *i = 0;
    }
    false
}

struct Projected<'a> {
    model: &'a WindowModel,
    bounds: &'a [(f64, f64)],
}

impl CostFunction for Projected<'_> {
    type Param = Vec<f64>;
    type Output = f64;

    fn cost(&self, shapes: &Vec<f64>) -> std::result::Result<f64, argmin::core::Error> {
        let inside = shapes
            .iter()
            .zip(self.bounds)
            .all(|(v, (low, high))| (*low..=*high).contains(v));
        if !inside {
            return Ok(f64::MAX);
        }
        Ok(solve_linear(self.model, shapes).map_or(f64::MAX, |s| s.chi2))
    }
}

/// Simplex search (Nelder & Mead 1965) over the shapes with the linear parameters solved inside:
/// slow, but it needs no derivative and walks out of places where Gauss–Newton steps fail.
pub(super) fn simplex(
    model: &WindowModel,
    start: &[f64],
    bounds: &[(f64, f64)],
    sizes: &[f64],
) -> Vec<f64> {
    let mut corners = vec![start.to_vec()];
    for (i, size) in sizes.iter().enumerate() {
        let mut corner = start.to_vec();
        let up = corner[i] + size;
        corner[i] = if up < bounds[i].1 {
            up
        } else {
            corner[i] - size
        };
        corners.push(corner);
    }
    let search = NelderMead::new(corners).with_sd_tolerance(1e-6);
    let found = search.map(|solver| {
        Executor::new(Projected { model, bounds }, solver)
            .configure(|state| state.max_iters(60 * start.len() as u64))
            .run()
    });
    match found {
        Ok(Ok(result)) => result
            .state()
            .get_best_param()
            .cloned()
            .unwrap_or_else(|| start.to_vec()),
        _ => start.to_vec(),
    }
}
