//! Bands without a profile: the flux between two wavelengths above the fitted model.

use super::model::{Basis, Samples, WindowModel};
use super::outcome::WindowOutcome;
use super::pick::{Picked, SampleUse};
use super::solver::Residuals;
use super::window::WindowInput;
use crate::frame::RestSpectrum;
use crate::ground::{Error, Result};
use nalgebra::{DMatrix, DVector};

/// The sum over one band, in the unit of the fit.
pub(super) struct Integral {
    pub flux: f64,
    /// Σ (Δλ σ)², the noise of the band's own samples.
    pub own_variance: f64,
    /// −∂F/∂p for all parameters of the fit: what the model takes away.
    pub taken: DVector<f64>,
    /// Part of the range between the limits that good samples cover.
    pub covered: f64,
}

/// F = Σ Δλᵢ (dᵢ − mᵢ) over the samples between the limits, m the fitted continuum and bands, and Δλᵢ
/// the part of the pixel between them; scaled up by the covered part where samples are masked.
///
/// # Errors
/// Less than half of the range covered by good samples.
pub(super) fn integrate(
    spectrum: &RestSpectrum,
    picked: &Picked,
    input: &WindowInput<'_>,
    outcome: &WindowOutcome,
    (id, limits_aa): (&str, (f64, f64)),
) -> Result<Integral> {
    let at: Vec<usize> = (0..picked.inside.len())
        .filter(|p| {
            let (low, high) = picked.edges_aa[*p];
            picked.uses[*p] == SampleUse::Integrated && low < limits_aa.1 && high > limits_aa.0
        })
        .collect();
    let width = |p: usize| {
        let (low, high) = picked.edges_aa[p];
        (high.min(limits_aa.1) - low.max(limits_aa.0)).max(0.0)
    };
    let covered = at.iter().map(|p| width(*p)).sum::<f64>() / (limits_aa.1 - limits_aa.0);
    if covered < 0.5 {
        return Err(Error::input(format!(
            "band {id}: good samples cover only {:.0} % of the range between its limits {:.1} and {:.1} Å",
            100.0 * covered, limits_aa.0, limits_aa.1
        ))
        .remedy("change its limits, or check masks and excluded ranges"));
    }
    let flux = spectrum.flux_erg_s_cm2_aa();
    let data: Vec<f64> = at
        .iter()
        .map(|p| flux[picked.inside[*p]] / picked.scale)
        .collect();
    let model = model_over(picked, &at, input, outcome, &data);
    let n = at.len();
    let (mut rest, mut columns) = (vec![0.0; n], vec![0.0; n * model.parameters()]);
    model.evaluate(&outcome.parameters, &mut rest, &mut columns);
    let weights: Vec<f64> = at.iter().map(|p| width(*p) / covered).collect();
    let sigma = |p: usize| match spectrum.sigma_erg_s_cm2_aa() {
        Some(s) => s[picked.inside[p]] / picked.scale,
        None => input.sigma.first().copied().unwrap_or(f64::NAN),
    };
    let taken = DVector::from_iterator(
        model.parameters(),
        columns
            .chunks(n)
            .map(|c| c.iter().zip(&weights).map(|(v, w)| v * w).sum()),
    );
    Ok(Integral {
        flux: rest.iter().zip(&weights).map(|(r, w)| r * w).sum(),
        own_variance: at
            .iter()
            .zip(&weights)
            .map(|(p, w)| (w * sigma(*p)).powi(2))
            .sum(),
        taken,
        covered,
    })
}

/// The fitted model over some of the samples inside the window, unit weights.
pub(super) fn model_over(
    picked: &Picked,
    at: &[usize],
    input: &WindowInput<'_>,
    outcome: &WindowOutcome,
    data: &[f64],
) -> WindowModel {
    let choose = |all: &[f64]| at.iter().map(|p| all[*p]).collect::<Vec<f64>>();
    let carrier = input.carrier_inside.as_deref().map(choose);
    let samples = Samples {
        x_aa: &choose(&input.inside_aa),
        edges_aa: &at.iter().map(|p| picked.edges_aa[*p]).collect::<Vec<_>>(),
        data,
        sigma: &vec![1.0; at.len()],
    };
    let continuum = Basis {
        window_aa: input.window_aa,
        order: input.order,
        carrier: carrier.as_deref(),
    };
    let mut model = WindowModel::new(samples, continuum, input.sampling);
    model.set_components(outcome.components.clone(), outcome.shapes);
    model
}

/// Covariance of all fluxes: the fitted ones, then the integrated ones.
pub(super) fn joint_covariance(outcome: &WindowOutcome, integrals: &[Integral]) -> DMatrix<f64> {
    let (fitted, summed) = (outcome.flux.len(), integrals.len());
    let mut out = DMatrix::zeros(fitted + summed, fitted + summed);
    out.view_mut((0, 0), (fitted, fitted))
        .copy_from(&outcome.flux_covariance);
    let taken: Vec<DVector<f64>> = integrals
        .iter()
        .map(|i| {
            DVector::from_iterator(outcome.free.len(), outcome.free.iter().map(|f| i.taken[*f]))
        })
        .collect();
    for (a, ta) in taken.iter().enumerate() {
        let response = &outcome.covariance * ta;
        for b in 0..fitted {
            let at = outcome
                .position(outcome.flux_index(b))
                .expect("invariant: fluxes are always free");
            out[(fitted + a, b)] = -response[at];
            out[(b, fitted + a)] = -response[at];
        }
        for (b, tb) in taken.iter().enumerate() {
            let own = if a == b {
                integrals[a].own_variance
            } else {
                0.0
            };
            out[(fitted + a, fitted + b)] = tb.dot(&response) + own;
        }
    }
    out
}
