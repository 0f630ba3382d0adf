//! The windows of an analysis as the criteria need them: samples, quality, and which model contains
//! which.

use super::criteria::{FTest, Quality};
use crate::analysis::Analysis;
use crate::fit::solver::Residuals;
use crate::fit::{Structure, WindowFit, WindowModel};

/// One window with its model.
#[derive(Clone, Debug)]
pub(super) struct View {
    spectrum: usize,
    /// Wavelengths of the samples that the fit used.
    used_aa: Vec<f64>,
    order: usize,
    bands: Vec<Shape>,
    quality: Quality,
}

#[derive(Clone, Debug, PartialEq)]
struct Shape {
    id: String,
    centre_fitted: bool,
    width_fitted: bool,
    structure: Structure,
}

/// The windows of an analysis. With `base`, windows with estimated errors are judged by the base's
/// errors, and windows of the base that are missing are added with a continuum alone.
pub(super) fn views(analysis: &Analysis, base: Option<&Analysis>) -> Vec<View> {
    let mut out: Vec<View> = windows(analysis)
        .map(|(spectrum, fit_bands, window)| View {
            spectrum,
            used_aa: used_aa(window),
            order: window.continuum_order,
            bands: fit_bands,
            quality: quality(window, sigma_for(spectrum, window, base)),
        })
        .collect();
    if let Some(base) = base {
        for (spectrum, _, window) in windows(base) {
            let (low, high) = window.window_aa;
            let overlaps = |v: &View| {
                v.spectrum == spectrum && v.used_aa.iter().any(|x| (low..=high).contains(x))
            };
            if !out.iter().any(overlaps) {
                out.extend(bare(spectrum, window));
            }
        }
        let place = |v: &View| (v.spectrum, v.used_aa.first().copied().unwrap_or(0.0));
        out.sort_by(|a, b| place(a).partial_cmp(&place(b)).expect("invariant: finite"));
    }
    out
}

fn windows(analysis: &Analysis) -> impl Iterator<Item = (usize, Vec<Shape>, &WindowFit)> {
    analysis.fits.iter().flat_map(|(spectrum, fit)| {
        fit.windows.iter().enumerate().map(move |(w, window)| {
            let own = fit.bands.iter().filter(move |b| b.window == w);
            let shapes = own.map(|b| Shape {
                id: b.id.clone(),
                centre_fitted: b.centre_sigma_aa.is_some(),
                width_fitted: b.fwhm_sigma_aa.is_some(),
                structure: b.structure.clone(),
            });
            (*spectrum, shapes.collect(), window)
        })
    })
}

fn used_aa(window: &WindowFit) -> Vec<f64> {
    let used = window.samples.iter().filter(|s| s.used);
    used.map(|s| s.wavelength_aa).collect()
}

/// The one error of a window whose errors were estimated.
fn estimated_sigma(window: &WindowFit) -> Option<f64> {
    let used = window.samples.iter().find(|s| s.used);
    used.filter(|_| window.errors_estimated)
        .map(|s| s.sigma_erg_s_cm2_aa)
}

/// The base's estimated error where it has one, this window's own otherwise.
fn sigma_for(spectrum: usize, window: &WindowFit, base: Option<&Analysis>) -> Option<f64> {
    let own = estimated_sigma(window)?;
    let middle = 0.5 * (window.window_aa.0 + window.window_aa.1);
    let same = base
        .into_iter()
        .flat_map(windows)
        .find(|(i, _, w)| *i == spectrum && w.window_aa.0 <= middle && middle <= w.window_aa.1);
    Some(same.and_then(|(_, _, w)| estimated_sigma(w)).unwrap_or(own))
}

fn quality(window: &WindowFit, sigma: Option<f64>) -> Quality {
    let n = window.samples.iter().filter(|s| s.used).count();
    match (estimated_sigma(window), sigma) {
        (Some(own), Some(common)) => {
            Quality::unknown_error(window.chi2 * own * own, n, window.dof, common)
        }
        _ => Quality::known_errors(window.chi2, n, window.dof),
    }
}

/// A window of the base fitted with its continuum alone; `None` when that has no answer.
fn bare(spectrum: usize, window: &WindowFit) -> Option<View> {
    let used: Vec<_> = window.samples.iter().filter(|s| s.used).collect();
    let x: Vec<f64> = used.iter().map(|s| s.wavelength_aa).collect();
    if window.continuum.carrier.is_some() || window.continuum.thermal.is_some() {
        return None;
    }
    let largest = used.iter().map(|s| s.flux_erg_s_cm2_aa.abs());
    let scale = largest.fold(0.0, f64::max);
    if x.len() < window.continuum_order + 2 || scale == 0.0 {
        return None;
    }
    let data: Vec<f64> = used.iter().map(|s| s.flux_erg_s_cm2_aa / scale).collect();
    let sigma: Vec<f64> = used.iter().map(|s| s.sigma_erg_s_cm2_aa / scale).collect();
    let chi2 = continuum_chi2(&x, &data, &sigma, window.continuum_order)?;
    let (n, dof) = (x.len(), x.len() - window.continuum_order - 1);
    let quality = match estimated_sigma(window) {
        Some(own) => Quality::unknown_error(chi2 * own * own, n, dof, own),
        None => Quality::known_errors(chi2, n, dof),
    };
    Some(View {
        spectrum,
        used_aa: x,
        order: window.continuum_order,
        bands: Vec::new(),
        quality,
    })
}

/// χ² of a polynomial of this order through data with errors.
fn continuum_chi2(x: &[f64], data: &[f64], sigma: &[f64], order: usize) -> Option<f64> {
    let model = WindowModel::gaussians(x, data, sigma, order, &[], false);
    let parameters = model.start().ok()?;
    let mut residuals = vec![0.0; model.count()];
    let mut columns = vec![0.0; model.count() * model.parameters()];
    model.evaluate(&parameters, &mut residuals, &mut columns);
    Some(residuals.iter().map(|r| r * r).sum())
}

/// How the models of two analyses compare on the same data.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Comparison {
    /// AICc of the other minus that of the base.
    pub aicc: Option<f64>,
    /// BIC of the other minus that of the base.
    pub bic: Option<f64>,
    /// F-test of the larger against the smaller, in the windows where they differ.
    pub f_test: Option<FTest>,
    /// Both fits are the same.
    pub same: bool,
}

/// All windows together.
pub(super) fn total(views: &[View]) -> Option<Quality> {
    views.iter().map(|v| v.quality).reduce(Quality::and)
}

/// Compares two analyses; `None` when their windows do not hold the same samples.
pub(super) fn compare(base: &[View], other: &[View]) -> Option<Comparison> {
    let paired = base.len() == other.len()
        && base
            .iter()
            .zip(other)
            .all(|(a, b)| a.spectrum == b.spectrum && a.used_aa == b.used_aa);
    if !paired {
        return None;
    }
    let (a, b) = (total(base)?, total(other)?);
    let less = |x: Option<f64>, y: Option<f64>| Some(x? - y?);
    Some(Comparison {
        aicc: less(b.aicc(), a.aicc()),
        bic: less(b.bic(), a.bic()),
        f_test: nested(base, other).or_else(|| nested(other, base)),
        same: base.iter().zip(other).all(|(a, b)| a.equals(b)),
    })
}

/// The F-test of `larger` against `smaller` where every window of the one contains that of the other.
fn nested(smaller: &[View], larger: &[View]) -> Option<FTest> {
    let pairs = || smaller.iter().zip(larger);
    if !pairs().all(|(s, l)| l.contains(s)) {
        return None;
    }
    let differing = || pairs().filter(|(s, l)| s.quality.dof != l.quality.dof);
    let small = differing().map(|(s, _)| s.quality).reduce(Quality::and)?;
    let large = differing().map(|(_, l)| l.quality).reduce(Quality::and)?;
    FTest::between(&small, &large)
}

impl View {
    /// Whether this model becomes the other for some values of its parameters.
    fn contains(&self, smaller: &Self) -> bool {
        let holds = |s: &Shape| {
            self.bands.iter().any(|l| {
                l.id == s.id
                    && l.structure == s.structure
                    && l.centre_fitted >= s.centre_fitted
                    && l.width_fitted >= s.width_fitted
            })
        };
        self.order >= smaller.order && smaller.bands.iter().all(holds)
    }

    fn equals(&self, other: &Self) -> bool {
        let (a, b) = (self.quality.chi2, other.quality.chi2);
        self.order == other.order && self.bands == other.bands && (a - b).abs() <= 1e-9 * a.abs()
    }
}
