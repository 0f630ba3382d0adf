//! Bounded nonlinear least squares.
//!
//! Levenberg (1944) – Marquardt (1963) steps on the normal equations with the scaling of the
//! columns as in Moré 1978 (Lecture Notes in Mathematics 630, 105). Box bounds by projection: a
//! parameter on a bound whose gradient points outwards is left out of the step. Departs from Moré
//! in that the damping is multiplied (×0.1 on a good step, ×4 and growing on a refused one) instead
//! of being solved for on a trust region, and in that the result is polished by Gauss–Newton steps
//! from a QR factorisation, which keeps twice the digits of the normal equations.

use crate::ground::{Error, Result};
use nalgebra::{Cholesky, DMatrix, DVector, Dyn};

/// A problem min Σ r², r = (data − model)/σ.
pub trait Residuals {
    /// Number of parameters k.
    fn parameters(&self) -> usize;
    /// Number of residuals n.
    fn count(&self) -> usize;
    /// Fills the n residuals and, column after column, the n × k derivatives of model/σ.
    fn evaluate(&self, parameters: &[f64], residuals: &mut [f64], columns: &mut [f64]);
}

/// When to stop.
#[derive(Clone, Copy, Debug)]
pub struct Stop {
    /// Most accepted or refused steps.
    pub iterations: usize,
    /// Stop when a step promises less than this fraction of χ² per degree of freedom.
    pub gain: f64,
    /// Most Gauss–Newton steps by QR at the end.
    pub polish: usize,
    /// First damping: small where the start is near, large where it may be far.
    pub damping: f64,
}

impl Default for Stop {
    fn default() -> Self {
        Self {
            iterations: 200,
            gain: 1e-9,
            polish: 0,
            damping: 1e-3,
        }
    }
}

impl Stop {
    /// For reference problems: as many digits as double precision holds.
    pub fn tight() -> Self {
        Self {
            iterations: 20_000,
            gain: 1e-22,
            polish: 4,
            damping: 100.0,
        }
    }
}

/// Where the search ended.
#[derive(Clone, Debug)]
pub struct Minimum {
    /// Parameters at the minimum.
    pub parameters: Vec<f64>,
    /// Sum of squared residuals.
    pub chi2: f64,
    /// Steps taken.
    pub iterations: usize,
    /// False when the iterations ran out.
    pub converged: bool,
    /// Which parameters ended on a bound.
    pub on_bound: Vec<bool>,
}

/// Work space, reused from fit to fit.
#[derive(Default)]
pub struct Solver {
    residuals: Vec<f64>,
    columns: Vec<f64>,
    trial_residuals: Vec<f64>,
    trial_columns: Vec<f64>,
    normal: Vec<f64>,
    damped: Vec<f64>,
    gradient: Vec<f64>,
    step: Vec<f64>,
    trial: Vec<f64>,
    free: Vec<usize>,
    /// Largest squared length each column has had: Moré's scaling, which never shrinks.
    largest: Vec<f64>,
}

impl Solver {
    /// Minimises from `start` inside `bounds` (one pair per parameter; infinities allowed).
    ///
    /// # Errors
    /// Fewer residuals than free parameters, or a model that is not finite at the start.
    pub fn minimise(
        &mut self,
        problem: &impl Residuals,
        start: &[f64],
        bounds: &[(f64, f64)],
        stop: Stop,
    ) -> Result<Minimum> {
        let (n, k) = (problem.count(), problem.parameters());
        if n < k {
            return Err(
                Error::compute(format!("{n} samples cannot carry {k} parameters"))
                    .remedy("widen the window, lower the continuum order, or hold shapes"),
            );
        }
        self.resize(n, k);
        let mut p: Vec<f64> = start
            .iter()
            .zip(bounds)
            .map(|(v, (low, high))| v.max(*low).min(*high))
            .collect();
        problem.evaluate(&p, &mut self.residuals, &mut self.columns);
        let mut chi2 = square_sum(&self.residuals);
        if !chi2.is_finite() {
            return Err(Error::compute(
                "the model is not finite at the starting values",
            ));
        }
        let (iterations, converged) = self.descend(problem, &mut p, &mut chi2, bounds, stop);
        for _ in 0..stop.polish {
            if !self.polish(problem, &mut p, &mut chi2, bounds) {
                break;
            }
        }
        let on_bound = p
            .iter()
            .zip(bounds)
            .map(|(v, (low, high))| *v <= *low || *v >= *high)
            .collect();
        Ok(Minimum {
            parameters: p,
            chi2,
            iterations,
            converged,
            on_bound,
        })
    }

    /// Derivative columns (n × k, column after column) where the last search ended.
    pub fn columns(&self) -> &[f64] {
        &self.columns
    }

    fn resize(&mut self, n: usize, k: usize) {
        for v in [&mut self.residuals, &mut self.trial_residuals] {
            v.resize(n, 0.0);
        }
        for v in [&mut self.columns, &mut self.trial_columns] {
            v.resize(n * k, 0.0);
        }
        for v in [&mut self.normal, &mut self.damped] {
            v.resize(k * k, 0.0);
        }
        for v in [
            &mut self.gradient,
            &mut self.step,
            &mut self.trial,
            &mut self.largest,
        ] {
            v.resize(k, 0.0);
        }
        self.largest.fill(0.0);
    }

    fn descend(
        &mut self,
        problem: &impl Residuals,
        p: &mut [f64],
        chi2: &mut f64,
        bounds: &[(f64, f64)],
        stop: Stop,
    ) -> (usize, bool) {
        let (n, k) = (problem.count(), problem.parameters());
        let dof = (n - k).max(1) as f64;
        let (mut damping, mut growth) = (stop.damping, 4.0);
        self.normal_equations(n, k);
        for iteration in 1..=stop.iterations {
            self.choose_free(p, bounds);
            if self.free.is_empty() || !self.damped_step(k, damping) {
                if self.free.is_empty() {
                    return (iteration, true);
                }
                damping *= growth;
                growth *= 2.0;
                continue;
            }
            let promised = self.project_and_promise(p, bounds, k);
            if promised <= stop.gain * *chi2 / dof || promised <= 0.0 {
                // A last undamped step costs nothing and lands closer.
                self.try_step(problem, p, chi2, 0.0);
                return (iteration, true);
            }
            match self.try_step(problem, p, chi2, promised) {
                Some(quality) => {
                    self.normal_equations(n, k);
                    if quality > 0.25 {
                        damping = (damping * 0.1_f64).max(1e-14);
                    }
                    growth = 4.0;
                }
                None => {
                    damping *= growth;
                    growth *= 2.0;
                    if damping > 1e18 {
                        return (iteration, true);
                    }
                }
            }
        }
        (stop.iterations, false)
    }

    fn normal_equations(&mut self, n: usize, k: usize) {
        for a in 0..k {
            let ca = &self.columns[a * n..(a + 1) * n];
            self.gradient[a] = dot(ca, &self.residuals);
            self.largest[a] = self.largest[a].max(dot(ca, ca));
            for b in 0..=a {
                let v = dot(ca, &self.columns[b * n..(b + 1) * n]);
                self.normal[a * k + b] = v;
                self.normal[b * k + a] = v;
            }
        }
    }

    fn choose_free(&mut self, p: &[f64], bounds: &[(f64, f64)]) {
        self.free.clear();
        for (i, (low, high)) in bounds.iter().enumerate() {
            let k = p.len();
            let outward = (p[i] <= *low && self.gradient[i] < 0.0)
                || (p[i] >= *high && self.gradient[i] > 0.0);
            if !outward && self.normal[i * k + i] > 0.0 {
                self.free.push(i);
            }
        }
    }

    /// Solves (N + μ D) δ = g, D the largest diagonal of N so far, on the free parameters by Cholesky; false if not definite.
    fn damped_step(&mut self, k: usize, damping: f64) -> bool {
        let m = self.free.len();
        for (a, &i) in self.free.iter().enumerate() {
            for (b, &j) in self.free.iter().enumerate().take(a + 1) {
                let scale = (self.normal[i * k + i] * self.normal[j * k + j]).sqrt();
                let diagonal = if a == b {
                    damping * self.largest[i] / self.normal[i * k + i]
                } else {
                    0.0
                };
                self.damped[a * k + b] = self.normal[i * k + j] / scale + diagonal;
            }
        }
        self.step.iter_mut().for_each(|s| *s = 0.0);
        let mut rhs = [0.0; 64];
        let mut spill = Vec::new();
        let rhs: &mut [f64] = if m <= 64 {
            &mut rhs[..m]
        } else {
            spill.resize(m, 0.0);
            &mut spill
        };
        for (a, &i) in self.free.iter().enumerate() {
            rhs[a] = self.gradient[i] / self.normal[i * k + i].sqrt();
        }
        if !cholesky_solve(&mut self.damped, k, m, rhs) {
            return false;
        }
        for (a, &i) in self.free.iter().enumerate() {
            self.step[i] = rhs[a] / self.normal[i * k + i].sqrt();
        }
        true
    }

    /// Cuts the step at the bounds and returns the fall of χ² that the linear model promises.
    fn project_and_promise(&mut self, p: &[f64], bounds: &[(f64, f64)], k: usize) -> f64 {
        for i in 0..k {
            self.trial[i] = (p[i] + self.step[i]).max(bounds[i].0).min(bounds[i].1);
            self.step[i] = self.trial[i] - p[i];
        }
        let mut promised = 0.0;
        for i in 0..k {
            let row = dot(&self.normal[i * k..(i + 1) * k], &self.step);
            promised += self.step[i] * (2.0 * self.gradient[i] - row);
        }
        promised
    }

    /// Takes the trial point if χ² falls there; returns achieved over promised fall.
    fn try_step(
        &mut self,
        problem: &impl Residuals,
        p: &mut [f64],
        chi2: &mut f64,
        promised: f64,
    ) -> Option<f64> {
        problem.evaluate(
            &self.trial,
            &mut self.trial_residuals,
            &mut self.trial_columns,
        );
        let trial_chi2 = square_sum(&self.trial_residuals);
        if !(trial_chi2.is_finite() && trial_chi2 < *chi2) {
            return None;
        }
        let quality = (*chi2 - trial_chi2) / promised;
        *chi2 = trial_chi2;
        p.copy_from_slice(&self.trial);
        std::mem::swap(&mut self.residuals, &mut self.trial_residuals);
        std::mem::swap(&mut self.columns, &mut self.trial_columns);
        Some(quality)
    }

    /// One Gauss–Newton step by QR on the parameters off their bounds; false when it gains nothing.
    fn polish(
        &mut self,
        problem: &impl Residuals,
        p: &mut [f64],
        chi2: &mut f64,
        bounds: &[(f64, f64)],
    ) -> bool {
        let (n, k) = (problem.count(), problem.parameters());
        self.normal_equations(n, k);
        self.choose_free(p, bounds);
        let m = self.free.len();
        let scales: Vec<f64> = self
            .free
            .iter()
            .map(|&i| self.normal[i * k + i].sqrt())
            .collect();
        let jacobian =
            DMatrix::from_fn(n, m, |r, c| self.columns[self.free[c] * n + r] / scales[c]);
        let qr = jacobian.qr();
        let rhs = qr.q().transpose() * DVector::from_column_slice(&self.residuals);
        let Some(step) = qr.r().solve_upper_triangular(&rhs) else {
            return false;
        };
        self.trial.copy_from_slice(p);
        for (c, &i) in self.free.iter().enumerate() {
            self.trial[i] = (p[i] + step[c] / scales[c])
                .max(bounds[i].0)
                .min(bounds[i].1);
        }
        self.try_step(problem, p, chi2, 1.0).is_some()
    }
}

/// Covariance (JᵀJ)⁻¹ of the parameters listed in `free` from the weighted derivative columns,
/// scaled to unit length: by Cholesky where that keeps nine digits, else by QR. Rows and columns
/// follow the order of `free`.
///
/// # Errors
/// Columns that are linearly dependent, within rounding.
pub fn covariance(columns: &[f64], n: usize, free: &[usize]) -> Result<DMatrix<f64>> {
    let m = free.len();
    let column = |a: usize| &columns[free[a] * n..(free[a] + 1) * n];
    let scales: Vec<f64> = (0..m).map(|a| square_sum(column(a)).sqrt()).collect();
    let degenerate = || {
        Error::compute("the parameters cannot be told apart by this spectrum (singular fit)")
            .remedy("leave out one of the blended bands, hold its shape, or lower the order")
    };
    if scales.iter().any(|s| *s <= 0.0 || !s.is_finite()) {
        return Err(degenerate());
    }
    let gram = DMatrix::from_fn(m, m, |a, b| {
        if b > a {
            0.0
        } else {
            dot(column(a), column(b)) / (scales[a] * scales[b])
        }
    });
    let well_posed = |c: &Cholesky<f64, Dyn>| (0..m).all(|a| c.l_dirty()[(a, a)] > 1e-3);
    let mut cov = match Cholesky::new(gram).filter(well_posed) {
        Some(cholesky) => cholesky.inverse(),
        None => {
            let jacobian = DMatrix::from_fn(n, m, |r, a| column(a)[r] / scales[a]);
            let r = jacobian.qr().r();
            let pivots = (0..m).map(|i| r[(i, i)].abs());
            if pivots.fold(f64::INFINITY, f64::min) < 1e-12 {
                return Err(degenerate());
            }
            let inverse = r
                .solve_upper_triangular(&DMatrix::identity(m, m))
                .ok_or_else(degenerate)?;
            &inverse * inverse.transpose()
        }
    };
    for a in 0..m {
        for b in 0..m {
            cov[(a, b)] /= scales[a] * scales[b];
        }
    }
    Ok(cov)
}

/// Solves A x = b in place for the lower triangle of a symmetric positive definite A stored with
/// row stride `stride`; false when A is not positive definite.
fn cholesky_solve(a: &mut [f64], stride: usize, m: usize, b: &mut [f64]) -> bool {
    for i in 0..m {
        for j in 0..=i {
            let mut sum = a[i * stride + j];
            for l in 0..j {
                sum -= a[i * stride + l] * a[j * stride + l];
            }
            if i == j {
                if sum <= 0.0 || !sum.is_finite() {
                    return false;
                }
                a[i * stride + i] = sum.sqrt();
            } else {
                a[i * stride + j] = sum / a[j * stride + j];
            }
        }
    }
    for i in 0..m {
        let done: f64 = (0..i).map(|l| a[i * stride + l] * b[l]).sum();
        b[i] = (b[i] - done) / a[i * stride + i];
    }
    for i in (0..m).rev() {
        let done: f64 = (i + 1..m).map(|l| a[l * stride + i] * b[l]).sum();
        b[i] = (b[i] - done) / a[i * stride + i];
    }
    true
}

/// Dot product with eight running sums, so that the compiler can use vector registers.
pub(super) fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut sums = [0.0; 8];
    let (ca, cb) = (a.chunks_exact(8), b.chunks_exact(8));
    let tail: f64 = ca
        .remainder()
        .iter()
        .zip(cb.remainder())
        .map(|(x, y)| x * y)
        .sum();
    for (x, y) in ca.zip(cb) {
        for i in 0..8 {
            sums[i] += x[i] * y[i];
        }
    }
    sums.iter().sum::<f64>() + tail
}

fn square_sum(a: &[f64]) -> f64 {
    dot(a, a)
}
