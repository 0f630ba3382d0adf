//! The lines of fitted bands measured one by one.
//!
//! A band of many lines is fitted with their relative fluxes held. Here every line gets its own flux,
//! at the fitted velocity and width, so that one that does not belong shows. Lines nearer than one
//! instrument width cannot be told apart and stay one feature with their relative fluxes held.

use super::basis::{chebyshev, to_unit_interval};
use super::carrier::Carrier;
use super::pick::SampleUse;
use super::profile::{Sampling, profile_at};
use super::results::{BandFit, SpectrumFit, WindowFit};
use crate::ground::constants::FWHM_PER_SIGMA;
use crate::ground::{Error, Measured, Result};
use nalgebra::{DMatrix, DVector};
use std::sync::Arc;

/// Added to the normalised normal matrix, so that features of two species at one place get a large
/// error instead of none: their errors are at most 10³ times those they would have alone.
const RIDGE: f64 = 1e-6;

/// Lines of one band that the instrument does not separate, with their own flux.
#[derive(Clone, Debug)]
pub struct Feature {
    /// Index of the band in the fit.
    pub band: usize,
    /// Indices into the band's lines, strongest first.
    pub lines: Vec<usize>,
    /// Share of the band's flux that the fit gives to these lines.
    pub share: f64,
    /// Flux measured at these lines, erg s⁻¹ cm⁻²; continuum and all other components fitted with it.
    pub flux_erg_s_cm2: Measured,
    /// Flux of everything else in the model under the profile of each line, over the line's own.
    pub others: Vec<f64>,
}

/// All features of a spectrum.
#[derive(Clone, Debug)]
pub struct Features {
    /// In the order of the bands, then of wavelength.
    pub list: Vec<Feature>,
    /// Covariance of their fluxes, (erg s⁻¹ cm⁻²)².
    pub covariance: DMatrix<f64>,
}

/// Measures the lines of the bands `wanted` (indices into the fit's bands): in every window one
/// weighted linear fit of the residuals with changes of the continuum (its order kept), one amplitude
/// per other band, and one per feature. Errors are those of the samples;
/// errors of the fitted velocity and width are not in them.
///
/// # Errors
/// A window whose samples do not determine the amplitudes.
pub fn features(fit: &SpectrumFit, wanted: &[usize], sampling: Sampling) -> Result<Features> {
    let mut out = Features {
        list: Vec::new(),
        covariance: DMatrix::zeros(0, 0),
    };
    for (index, window) in fit.windows.iter().enumerate() {
        let inside: Vec<usize> = (0..fit.bands.len())
            .filter(|b| fit.bands[*b].window == index)
            .collect();
        if inside.iter().any(|b| wanted.contains(b)) {
            let one = Window::new(fit, window, &inside, sampling).measure(wanted)?;
            out.covariance = joined(&out.covariance, &one.covariance);
            out.list.extend(one.list);
        }
    }
    Ok(out)
}

fn joined(a: &DMatrix<f64>, b: &DMatrix<f64>) -> DMatrix<f64> {
    let (n, m) = (a.nrows(), b.nrows());
    let mut out = DMatrix::zeros(n + m, n + m);
    out.view_mut((0, 0), (n, n)).copy_from(a);
    out.view_mut((n, n), (m, m)).copy_from(b);
    out
}

/// The used samples of one window and its bands.
struct Window<'a> {
    fit: &'a SpectrumFit,
    window: &'a WindowFit,
    bands: &'a [usize],
    sampling: Sampling,
    x_aa: Vec<f64>,
    edges_aa: Vec<(f64, f64)>,
    weight: Vec<f64>,
    residual: Vec<f64>,
}

impl<'a> Window<'a> {
    fn new(
        fit: &'a SpectrumFit,
        window: &'a WindowFit,
        bands: &'a [usize],
        sampling: Sampling,
    ) -> Self {
        let all: Vec<f64> = window.samples.iter().map(|s| s.wavelength_aa).collect();
        let used: Vec<usize> = (0..all.len())
            .filter(|i| window.samples[*i].sample_use == SampleUse::Fitted)
            .collect();
        let pick = |f: &dyn Fn(usize) -> f64| used.iter().map(|i| f(*i)).collect::<Vec<_>>();
        let sample = |i: usize| &window.samples[i];
        Self {
            fit,
            window,
            bands,
            sampling,
            x_aa: pick(&|i| all[i]),
            edges_aa: used.iter().map(|i| edges(&all, *i)).collect(),
            weight: pick(&|i| 1.0 / sample(i).sigma_erg_s_cm2_aa),
            residual: pick(&|i| sample(i).flux_erg_s_cm2_aa - sample(i).total_erg_s_cm2_aa),
        }
    }

    fn measure(&self, wanted: &[usize]) -> Result<Features> {
        let mut columns = self.continuum_columns();
        let mut list = Vec::new();
        let mut place = Vec::new();
        for &b in self.bands {
            let band = &self.fit.bands[b];
            if band.integral_aa.is_some() {
                continue;
            }
            if !wanted.contains(&b) {
                if band.template.is_some() || band.wings.is_some() {
                    let unit = self.x_aa.iter().zip(&self.weight);
                    columns.push(unit.map(|(x, w)| band.unit_at(*x) * w).collect());
                    continue;
                }
                let all: Vec<usize> = (0..band.structure.lines().len()).collect();
                columns.push(self.column(band, &all));
                continue;
            }
            for lines in clusters(band) {
                place.push(columns.len());
                columns.push(self.column(band, &lines));
                list.push(Feature {
                    band: b,
                    share: share(band, &lines),
                    others: lines.iter().map(|l| self.others(b, *l)).collect(),
                    lines,
                    flux_erg_s_cm2: Measured::new(0.0, 0.0),
                });
            }
        }
        let (change, covariance) = self.solve(&columns)?;
        for (feature, &at) in list.iter_mut().zip(&place) {
            let model = self.fit.bands[feature.band].flux_erg_s_cm2.value * feature.share;
            feature.flux_erg_s_cm2 = Measured::new(model + change[at], covariance[(at, at)].sqrt());
        }
        let covariance = DMatrix::from_fn(place.len(), place.len(), |a, b| {
            covariance[(place[a], place[b])]
        });
        Ok(Features { list, covariance })
    }

    /// Ways in which the continuum may change: its carrier times Chebyshev polynomials, and the size of
    /// its thermal part.
    fn continuum_columns(&self) -> Vec<Vec<f64>> {
        let continuum = &self.window.continuum;
        let order = self.window.continuum_order;
        let n = self.x_aa.len();
        let carrier = |x: f64| {
            let over_mean = |(c, mean): &(Arc<Carrier>, f64)| c.at(x) / mean;
            continuum.carrier.as_ref().map_or(1.0, over_mean)
        };
        let basis: Vec<Vec<f64>> = self
            .x_aa
            .iter()
            .map(|x| chebyshev(to_unit_interval(*x, self.window.window_aa), order))
            .collect();
        let shape: Vec<f64> = self.x_aa.iter().map(|x| carrier(*x)).collect();
        let mut out: Vec<Vec<f64>> = (0..=order)
            .map(|k| {
                let one = |i: usize| basis[i][k] * shape[i] * self.weight[i];
                (0..n).map(one).collect()
            })
            .collect();
        let warm = |i: usize| continuum.thermal_at(self.x_aa[i]) * self.weight[i];
        if (0..n).any(|i| warm(i) != 0.0) {
            out.push((0..n).map(warm).collect());
        }
        out
    }

    fn profile(&self, band: &BandFit, line: usize, i: usize) -> f64 {
        let (ratio, _) = band.structure.lines()[line];
        profile_at(
            self.sampling,
            self.x_aa[i],
            self.edges_aa[i],
            band.centre_aa * ratio,
            band.line_sigma_aa,
        )
    }

    /// Weighted profile of unit flux of some lines together.
    fn column(&self, band: &BandFit, lines: &[usize]) -> Vec<f64> {
        let total = share(band, lines);
        let shares = band.structure.lines();
        (0..self.x_aa.len())
            .map(|i| {
                let sum: f64 = lines
                    .iter()
                    .map(|l| shares[*l].1 * self.profile(band, *l, i))
                    .sum();
                sum / total * self.weight[i]
            })
            .collect()
    }

    /// Everything else in the model under a line's profile, over the line itself. A band that was not
    /// found counts with its error, so that the question has an answer.
    fn others(&self, own: usize, line: usize) -> f64 {
        let amplitude = |b: usize| {
            let flux = self.fit.bands[b].flux_erg_s_cm2;
            flux.value.max(flux.sigma)
        };
        let band = &self.fit.bands[own];
        let strength = amplitude(own) * band.structure.lines()[line].1;
        let (mut mine, mut all) = (0.0, 0.0);
        for i in 0..self.x_aa.len() {
            let p = self.profile(band, line, i);
            let matched = p * self.weight[i] * self.weight[i];
            if matched == 0.0 {
                continue;
            }
            mine += matched * strength * p;
            for &b in self.bands {
                let other = &self.fit.bands[b];
                let shares = other.structure.lines().iter().enumerate();
                let sum: f64 = shares
                    .map(|(l, (_, s))| s * self.profile(other, l, i))
                    .sum();
                all += matched * amplitude(b) * sum;
            }
        }
        if mine > 0.0 {
            all / mine - 1.0
        } else {
            f64::INFINITY
        }
    }

    /// Amplitudes that best explain the residuals, and their covariance.
    fn solve(&self, columns: &[Vec<f64>]) -> Result<(DVector<f64>, DMatrix<f64>)> {
        let n = self.x_aa.len();
        let norm: Vec<f64> = columns
            .iter()
            .map(|c| c.iter().map(|v| v * v).sum::<f64>().sqrt())
            .collect();
        let (low, high) = self.window.window_aa;
        if norm.iter().any(|v| !(v.is_finite() && *v > 0.0)) || n <= columns.len() {
            return Err(Error::compute(format!(
                "window {low:.1} to {high:.1} Å: a line has no usable samples, so it cannot be measured alone"
            ))
            .remedy("leave the line out (without = […]), widen the window, or check masks"));
        }
        let a = DMatrix::from_fn(n, columns.len(), |i, c| columns[c][i] / norm[c]);
        let mut normal = a.tr_mul(&a);
        for c in 0..columns.len() {
            normal[(c, c)] += RIDGE;
        }
        let rhs = a.tr_mul(&DVector::from_fn(n, |i, _| {
            self.residual[i] * self.weight[i]
        }));
        let inverse = normal.cholesky().map(|c| c.inverse()).ok_or_else(|| {
            Error::compute(format!(
                "window {low:.1} to {high:.1} Å: its lines cannot be measured one by one"
            ))
        })?;
        let found = &inverse * rhs;
        Ok((
            DVector::from_fn(columns.len(), |c, _| found[c] / norm[c]),
            DMatrix::from_fn(columns.len(), columns.len(), |c, d| {
                inverse[(c, d)] / (norm[c] * norm[d])
            }),
        ))
    }
}

/// Pixel edges half-way to the neighbours.
fn edges(x: &[f64], i: usize) -> (f64, f64) {
    let step = |a: usize, b: usize| 0.5 * (x[b] - x[a]);
    let last = x.len() - 1;
    let before = if i > 0 {
        step(i - 1, i)
    } else {
        step(0, 1.min(last))
    };
    let after = if i < last { step(i, i + 1) } else { before };
    (x[i] - before, x[i] + after)
}

fn share(band: &BandFit, lines: &[usize]) -> f64 {
    lines.iter().map(|l| band.structure.lines()[*l].1).sum()
}

/// Lines of a band in groups whose neighbours are nearer than one full width; strongest line first.
fn clusters(band: &BandFit) -> Vec<Vec<usize>> {
    let lines = band.structure.lines();
    let at = |l: usize| band.centre_aa * lines[l].0;
    let mut order: Vec<usize> = (0..lines.len()).collect();
    order.sort_by(|a, b| at(*a).total_cmp(&at(*b)));
    let width = band.line_sigma_aa * FWHM_PER_SIGMA;
    let mut out: Vec<Vec<usize>> = Vec::new();
    for l in order {
        match out.last_mut() {
            Some(group) if at(l) - at(group[group.len() - 1]) < width => group.push(l),
            _ => out.push(vec![l]),
        }
    }
    for group in &mut out {
        group.sort_by(|a, b| lines[*b].1.total_cmp(&lines[*a].1));
    }
    out
}
