//! Emission peaks of a spectrum.

use super::centroid::{FEWEST_FOR_WIDTH, Gaussian};
use super::continuum::{baseline, middle_of};
use super::filter::{Excess, FWHM_PER_SIGMA};
use crate::fit::Resolution;
use crate::fit::solver::Solver;
use crate::frame::RestSpectrum;
use crate::ground::{Caveat, Error, Result};

/// How peaks are found.
#[derive(Clone, Debug, PartialEq)]
pub struct PeakSettings {
    /// Least signal-to-noise of a peak's height.
    pub sigma: f64,
    /// The instrument's; `None` estimates it from the strong lines.
    pub resolution: Option<Resolution>,
}

/// One emission peak.
#[derive(Clone, Debug, PartialEq)]
pub struct Peak {
    /// Centre in the comet's rest frame, vacuum Å.
    pub wavelength_vacuum_aa: f64,
    /// Its standard deviation, Å, from the fit alone.
    pub sigma_aa: f64,
    /// Signal-to-noise of the height of a line of instrumental width.
    pub significance: f64,
    /// Full width at half maximum of the fitted Gaussian, Å, the instrument's included.
    pub fwhm_aa: f64,
    /// Flux of that Gaussian, erg s⁻¹ cm⁻².
    pub flux_erg_s_cm2: f64,
}

/// Peaks with what they stand on.
#[derive(Clone, Debug)]
pub struct Found {
    /// In order of wavelength.
    pub peaks: Vec<Peak>,
    /// The running continuum at every sample, erg s⁻¹ cm⁻² Å⁻¹.
    pub continuum: Vec<f64>,
    /// Resolution given or estimated.
    pub resolution: Resolution,
    /// What was estimated, and what to doubt.
    pub caveats: Vec<Caveat>,
}

/// Samples, and instrumental widths, in a window of the running continuum: whichever is more.
const WINDOW_SAMPLES: usize = 151;
const WINDOW_FWHM: f64 = 60.0;
/// Rounds in which neighbouring peaks are fitted with each other taken off.
const ROUNDS: usize = 3;
/// Half width of the fitted range, and farthest that a peak's flux reaches, in FWHM.
const FIT_FWHM: f64 = 0.9;
const REACH_FWHM: f64 = 2.0;
/// Samples per FWHM when no line tells.
const DEFAULT_SAMPLES: f64 = 2.5;

/// Finds emission peaks: local maxima of the signal-to-noise of a line of instrumental width above a
/// running continuum, each then fitted with a Gaussian. The running continuum follows absorption lines
/// only roughly: between deep ones it finds peaks that are none.
///
/// # Errors
/// A spectrum of fewer than 15 samples, one without noise and without errors, a silly threshold.
pub fn find_peaks(spectrum: &RestSpectrum, settings: &PeakSettings) -> Result<Found> {
    check(spectrum, settings)?;
    let mut caveats = Vec::new();
    let first = excess(spectrum, WINDOW_SAMPLES)?;
    let resolution = match &settings.resolution {
        Some(r) => r.clone(),
        None => estimated(&first.0, spectrum, &mut caveats),
    };
    let x = spectrum.wavelength_aa();
    let middle = x.len() / 2;
    let spacing = sample_aa(x, middle);
    let samples = WINDOW_FWHM * resolution.fwhm_aa(x[middle]) / spacing;
    let window = WINDOW_SAMPLES.max(samples as usize);
    let (excess, continuum) = excess(spectrum, window)?;
    judge_errors(spectrum, &excess, window, &mut caveats);
    let significance = excess.significance(&resolution);
    let tops = tops(&excess, &significance, &resolution, settings.sigma);
    caveats.extend(false_peaks(x, &resolution, settings.sigma));
    Ok(Found {
        peaks: fit_all(&excess, &tops, &significance, &resolution),
        continuum,
        resolution,
        caveats,
    })
}

fn check(spectrum: &RestSpectrum, settings: &PeakSettings) -> Result<()> {
    if !(2.0..=1e4).contains(&settings.sigma) {
        return Err(Error::plan(format!(
            "a peak's significance of {} σ is outside 2 to 10000",
            settings.sigma
        ))
        .remedy("5 is usual"));
    }
    let good = spectrum.good().iter().filter(|g| **g).count();
    if good < 15 {
        return Err(Error::input(format!(
            "{}: {good} good samples are too few to look for lines in",
            spectrum.label()
        )));
    }
    Ok(())
}

/// The spectrum above its continuum, and the continuum.
fn excess(spectrum: &RestSpectrum, window: usize) -> Result<(Excess<'_>, Vec<f64>)> {
    let Some(base) = baseline(spectrum, window) else {
        return Err(Error::input(format!(
            "{}: the spectrum has no noise to compare peaks with",
            spectrum.label()
        ))
        .remedy("give a column of errors"));
    };
    let flux = spectrum.flux_erg_s_cm2_aa().iter().zip(&base.level);
    Ok((
        Excess {
            wavelength_aa: spectrum.wavelength_aa(),
            flux: flux.map(|(f, c)| f - c).collect(),
            sigma: spectrum
                .sigma_erg_s_cm2_aa()
                .map_or_else(|| base.scatter.clone(), <[f64]>::to_vec),
            good: spectrum.good(),
        },
        base.level,
    ))
}

fn sample_aa(x: &[f64], i: usize) -> f64 {
    let j = i.clamp(1, x.len() - 1);
    x[j] - x[j - 1]
}

fn estimated(excess: &Excess, spectrum: &RestSpectrum, caveats: &mut Vec<Caveat>) -> Resolution {
    let x = spectrum.wavelength_aa();
    let middle = x.len() / 2;
    let (power, how) = match excess.resolving_power() {
        Some(power) => (power, "from the widths of its strong lines"),
        None => (
            x[middle] / (DEFAULT_SAMPLES * sample_aa(x, middle)),
            "as 2.5 samples, for want of strong lines",
        ),
    };
    caveats.push(Caveat::Other {
        code: "resolution-estimated",
        text: format!(
            "{}: no resolution given; a resolving power of {power:.0} was taken {how}",
            spectrum.label()
        ),
    });
    Resolution::ResolvingPower(power)
}

/// Compares given errors with the scatter, or says that there were none.
fn judge_errors(
    spectrum: &RestSpectrum,
    excess: &Excess,
    window: usize,
    caveats: &mut Vec<Caveat>,
) {
    let typical = |v: &[f64]| {
        let finite = v.iter().copied().filter(|s| s.is_finite());
        middle_of(finite.collect()).unwrap_or(0.0)
    };
    let sigma = typical(&excess.sigma);
    if spectrum.sigma_erg_s_cm2_aa().is_none() {
        caveats.push(Caveat::ErrorsEstimated {
            spectrum: spectrum.label().to_owned(),
            sigma_erg_s_cm2_aa: sigma,
        });
        return;
    }
    let scatter = baseline(spectrum, window).map_or(0.0, |b| typical(&b.scatter));
    let factor = scatter / sigma;
    if factor > 1.5 {
        caveats.push(Caveat::Other {
            code: "errors-too-small",
            text: format!(
                "{}: the samples below the continuum scatter {factor:.1} times as much as their errors say; faint peaks may be noise or structure of the continuum",
                spectrum.label()
            ),
        });
    }
}

/// A caveat when noise alone is expected to give a peak.
fn false_peaks(x: &[f64], resolution: &Resolution, sigma: f64) -> Option<Caveat> {
    let middle = x[x.len() / 2];
    let trials = (x[x.len() - 1] - x[0]) / resolution.fwhm_aa(middle);
    let expected = trials * 0.5 * libm::erfc(sigma / std::f64::consts::SQRT_2);
    (expected > 0.5).then(|| Caveat::Other {
        code: "false-peaks",
        text: format!(
            "at {sigma} σ noise alone gives about {expected:.0} peaks in a spectrum of this length"
        ),
    })
}

/// Samples at which the significance is largest within half a width and above the threshold.
fn tops(excess: &Excess, significance: &[f64], resolution: &Resolution, least: f64) -> Vec<usize> {
    let x = excess.wavelength_aa;
    let highest = |i: usize| {
        let reach = 0.5 * resolution.fwhm_aa(x[i]);
        let left = (0..i).rev().take_while(|j| x[i] - x[*j] <= reach);
        let right = (i + 1..x.len()).take_while(|j| x[*j] - x[i] <= reach);
        let near = significance[i];
        // At least the two neighbours, however coarse the sampling.
        let beside =
            i > 0 && significance[i - 1] >= near || i + 1 < x.len() && significance[i + 1] > near;
        !beside
            && left.into_iter().all(|j| significance[j] < near)
            && right.into_iter().all(|j| significance[j] <= near)
    };
    (0..x.len())
        .filter(|i| significance[*i] >= least && highest(*i))
        .collect()
}

/// A peak while it is being fitted.
struct Shape {
    centre: f64,
    sd: f64,
    height: f64,
    centre_sigma: f64,
}

impl Shape {
    fn at(&self, x: f64) -> f64 {
        let t = (x - self.centre) / self.sd;
        self.height * (-0.5 * t * t).exp()
    }
}

fn fit_all(
    excess: &Excess,
    tops: &[usize],
    significance: &[f64],
    resolution: &Resolution,
) -> Vec<Peak> {
    let x = excess.wavelength_aa;
    let mut shapes: Vec<Shape> = tops
        .iter()
        .map(|&i| {
            let sd = resolution.fwhm_aa(x[i]) / FWHM_PER_SIGMA;
            Shape {
                centre: x[i],
                sd,
                height: excess.flux[i].max(excess.sigma[i]),
                centre_sigma: sd / significance[i],
            }
        })
        .collect();
    let mut solver = Solver::default();
    for _ in 0..ROUNDS {
        for (k, top) in tops.iter().enumerate() {
            refit(excess, *top, &mut shapes, k, resolution, &mut solver);
        }
    }
    shapes
        .iter()
        .zip(tops)
        .map(|(s, top)| Peak {
            wavelength_vacuum_aa: s.centre,
            sigma_aa: s.centre_sigma,
            significance: significance[*top],
            fwhm_aa: s.sd * FWHM_PER_SIGMA,
            flux_erg_s_cm2: s.height * s.sd * (2.0 * std::f64::consts::PI).sqrt(),
        })
        .collect()
}

/// Fits one peak with the neighbours' Gaussians taken off.
fn refit(
    excess: &Excess,
    top: usize,
    shapes: &mut [Shape],
    k: usize,
    resolution: &Resolution,
    solver: &mut Solver,
) {
    let x = excess.wavelength_aa;
    let fwhm = resolution.fwhm_aa(x[top]);
    let sd = fwhm / FWHM_PER_SIGMA;
    let reach = (FIT_FWHM * fwhm).max(1.2 * sample_aa(x, top));
    let from = x.partition_point(|w| *w < x[top] - reach);
    let to = x.partition_point(|w| *w <= x[top] + reach);
    let near = |s: &Shape| (s.centre - x[top]).abs() < REACH_FWHM * fwhm + reach;
    let left = (0..k).rev().take_while(|j| near(&shapes[*j]));
    let right = (k + 1..shapes.len()).take_while(|j| near(&shapes[*j]));
    let others: Vec<usize> = left.chain(right).collect();
    let guess = shapes[k].height.max(f64::MIN_POSITIVE);
    let (mut at, mut flux, mut sigma) = (Vec::new(), Vec::new(), Vec::new());
    for i in (from..to).filter(|i| excess.good[*i]) {
        let beside: f64 = others.iter().map(|j| shapes[*j].at(x[i])).sum();
        at.push((x[i] - x[top]) / sd);
        flux.push((excess.flux[i] - beside) / guess);
        sigma.push(excess.sigma[i] / guess);
    }
    let problem = Gaussian {
        x: &at,
        y: &flux,
        sigma: &sigma,
        free_width: at.len() >= FEWEST_FOR_WIDTH,
    };
    // A peak that its neighbours explain keeps its first shape.
    if let Some(found) = problem.fit(solver) {
        shapes[k] = Shape {
            centre: x[top] + found.centre * sd,
            sd: found.width * sd,
            height: found.height * guess,
            centre_sigma: found.centre_sigma * sd,
        };
    }
}
