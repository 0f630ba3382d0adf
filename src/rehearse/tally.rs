//! What many trials say about one flux or ratio.

use super::share::Share;
use super::trial::{RatioTrial, Trial};
use super::truth::Scene;
use crate::ground::Measured;
use crate::ratio::{RatioKind, quantile};

/// What a row is about.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Quantity {
    /// A band flux, erg s⁻¹ cm⁻².
    Flux,
    /// A ratio of two species.
    Ratio,
}

/// How well one flux or ratio was recovered.
#[derive(Clone, Debug)]
pub struct Recovered {
    /// Band, or ratio such as `CO2/H2O`.
    pub name: String,
    /// Flux or ratio.
    pub quantity: Quantity,
    /// The injected value.
    pub truth: f64,
    /// Median error quoted by the trials, unit of the truth: σ of a flux, half the 68.3 % interval of
    /// a ratio.
    pub typical_sigma: f64,
    /// Mean of (value − truth), in units of the typical error, with its own error σ/√n; for a ratio,
    /// whose mean its noisy denominator pulls up, the median, with 1.253 σ/√n.
    pub bias_sigma: Measured,
    /// Standard deviation of the pulls (value − truth)/σ, with the σ of each trial.
    pub pull_scatter: f64,
    /// Pulls of the trials in their order.
    pub pulls: Vec<f64>,
    /// Trials whose 68.3 % interval holds the truth, of those that give an interval.
    pub coverage68: Share,
    /// The same for the 95.4 % interval.
    pub coverage95: Share,
    /// Trials that detect the band, or both species of the ratio.
    pub detected: Share,
    /// Trials that quote a 99.7 % limit on the wrong side of the truth, of all trials.
    pub limit_wrong: Share,
}

/// A value with error and the two verdicts on its intervals.
struct Estimate {
    value: f64,
    sigma: f64,
    inside68: bool,
    inside95: bool,
}

/// Rows for all bands, then all ratios.
pub(super) fn tally(scene: &Scene, trials: &[Trial]) -> Vec<Recovered> {
    let bands = (0..scene.base.bands.len()).map(|b| band_row(scene, trials, b));
    let ratios = (0..scene.base.ratios.len()).map(|r| ratio_row(scene, trials, r));
    bands.chain(ratios).collect()
}

fn band_row(scene: &Scene, trials: &[Trial], b: usize) -> Recovered {
    let fit = &scene.base.bands[b].fit;
    let truth = fit.flux_erg_s_cm2.value;
    let estimates: Vec<Estimate> = trials
        .iter()
        .map(|t| {
            let Measured { value, sigma } = t.bands[b].flux;
            let pull = ((value - truth) / sigma).abs();
            Estimate {
                value,
                sigma,
                inside68: pull <= 1.0,
                inside95: pull <= 2.0,
            }
        })
        .collect();
    let limits = trials.iter().map(|t| t.bands[b].limit);
    Recovered {
        detected: Share::count(trials.iter().map(|t| t.bands[b].detected)),
        limit_wrong: Share::count(limits.map(|l| l.is_some_and(|l| l < truth))),
        ..row(fit.id.clone(), Quantity::Flux, truth, &estimates)
    }
}

fn ratio_row(scene: &Scene, trials: &[Trial], r: usize) -> Recovered {
    let ratio = &scene.base.ratios[r].ratio;
    let truth = scene.ratios[r];
    let own = || trials.iter().map(move |t| &t.ratios[r]);
    let estimates: Vec<Estimate> = own()
        .filter_map(|t| t.interval)
        .map(|i| Estimate {
            value: i.median,
            sigma: i.half_width68(),
            inside68: (i.low68..=i.high68).contains(&truth),
            inside95: (i.low95..=i.high95).contains(&truth),
        })
        .collect();
    Recovered {
        detected: Share::count(own().map(|t| t.kind == RatioKind::Value)),
        limit_wrong: Share::count(own().map(|t| limit_is_wrong(t, truth))),
        ..row(
            format!("{}/{}", ratio.of, ratio.to),
            Quantity::Ratio,
            truth,
            &estimates,
        )
    }
}

fn limit_is_wrong(trial: &RatioTrial, truth: f64) -> bool {
    trial.limit.is_some_and(|limit| match trial.kind {
        RatioKind::Upper => limit < truth,
        RatioKind::Lower => limit > truth,
        RatioKind::Value | RatioKind::Unconstrained => false,
    })
}

fn row(name: String, quantity: Quantity, truth: f64, estimates: &[Estimate]) -> Recovered {
    let n = estimates.len() as f64;
    let mut sigmas: Vec<f64> = estimates.iter().map(|e| e.sigma).collect();
    sigmas.sort_by(f64::total_cmp);
    let typical_sigma = if sigmas.is_empty() {
        f64::NAN
    } else {
        quantile(&sigmas, 0.5)
    };
    let pulls: Vec<f64> = estimates
        .iter()
        .map(|e| (e.value - truth) / e.sigma)
        .collect();
    let off: Vec<f64> = estimates
        .iter()
        .map(|e| (e.value - truth) / typical_sigma)
        .collect();
    let (mean, scatter) = mean_and_scatter(&off);
    let (bias, bias_error) = match quantity {
        Quantity::Flux => (mean, scatter / n.sqrt()),
        Quantity::Ratio => (median(off), MEDIAN_ERROR * scatter / n.sqrt()),
    };
    Recovered {
        name,
        quantity,
        truth,
        typical_sigma,
        bias_sigma: Measured::new(bias, bias_error),
        pull_scatter: mean_and_scatter(&pulls).1,
        coverage68: Share::count(estimates.iter().map(|e| e.inside68)),
        coverage95: Share::count(estimates.iter().map(|e| e.inside95)),
        detected: Share { count: 0, of: 0 },
        limit_wrong: Share { count: 0, of: 0 },
        pulls,
    }
}

/// √(π/2): error of a median over that of a mean, for normal values.
const MEDIAN_ERROR: f64 = 1.253_314_137_315_500_3;

fn median(mut values: Vec<f64>) -> f64 {
    if values.is_empty() {
        return f64::NAN;
    }
    values.sort_by(f64::total_cmp);
    quantile(&values, 0.5)
}

/// Mean and sample standard deviation; NaN where there are too few values.
fn mean_and_scatter(values: &[f64]) -> (f64, f64) {
    let n = values.len() as f64;
    let mean = values.iter().sum::<f64>() / n;
    let squares: f64 = values.iter().map(|v| (v - mean).powi(2)).sum();
    (mean, (squares / (n - 1.0)).sqrt())
}
