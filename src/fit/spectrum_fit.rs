//! One spectrum's fit: bands sorted into windows, each window fitted, results in cgs.

use super::basis::{chebyshev, to_unit_interval};
use super::detect::upper_limit;
use super::model::profile_at;
use super::noise::scatter;
use super::profile::gaussian;
use super::settings::{BandModel, FitSettings};
use super::solver::Solver;
use super::structure::Structure;
use super::window::{WindowInput, WindowOutcome, fit_window};
use crate::frame::RestSpectrum;
use crate::ground::constants::FWHM_PER_SIGMA;
use crate::ground::{Caveat, Error, Measured, Result};
use nalgebra::DMatrix;

/// Reduced χ² above which a fit is called poor when the errors were given.
const POOR_REDUCED_CHI2: f64 = 2.0;
/// Half-width of a band's core in expected full widths, outside of which samples are continuum.
const CORE_FWHM: f64 = 1.5;

/// A band's measured flux and shape.
#[derive(Clone, Debug)]
pub struct BandFit {
    /// Identifier.
    pub id: String,
    /// Index of the window it was fitted in.
    pub window: usize,
    /// Rest centre, vacuum Å.
    pub centre_aa: f64,
    /// Its error; `None` when the centre was held.
    pub centre_sigma_aa: Option<f64>,
    /// Full width at half maximum, instrument included, Å.
    pub fwhm_aa: f64,
    /// Its error; `None` when the width was held.
    pub fwhm_sigma_aa: Option<f64>,
    /// Standard deviation of each line, Å; that of the band for a single Gaussian.
    pub line_sigma_aa: f64,
    /// The lines the band consists of.
    pub structure: Structure,
    /// Band flux, erg s⁻¹ cm⁻²; may be negative.
    pub flux_erg_s_cm2: Measured,
    /// True at or above the detection threshold.
    pub detected: bool,
    /// One-sided 99.7 % upper limit, erg s⁻¹ cm⁻², for a band that is not detected.
    pub flux_limit_erg_s_cm2: Option<f64>,
}

/// One sample of a fitted window.
#[derive(Clone, Debug)]
pub struct SampleFit {
    /// Rest vacuum wavelength, Å.
    pub wavelength_aa: f64,
    /// Data, erg s⁻¹ cm⁻² Å⁻¹; may be NaN.
    pub flux_erg_s_cm2_aa: f64,
    /// Error used in the fit, same unit.
    pub sigma_erg_s_cm2_aa: f64,
    /// Whether the fit used it.
    pub used: bool,
    /// Continuum, same unit.
    pub continuum_erg_s_cm2_aa: f64,
    /// Each band of the window, same unit, in the order of [`WindowFit::bands`].
    pub bands_erg_s_cm2_aa: Vec<f64>,
    /// Continuum and bands.
    pub total_erg_s_cm2_aa: f64,
}

/// One fitted window.
#[derive(Clone, Debug)]
pub struct WindowFit {
    /// Range, rest vacuum Å.
    pub window_aa: (f64, f64),
    /// Weighted sum of squared residuals.
    pub chi2: f64,
    /// Degrees of freedom.
    pub dof: usize,
    /// Chebyshev order of the continuum.
    pub continuum_order: usize,
    /// Chebyshev coefficients over the window, erg s⁻¹ cm⁻² Å⁻¹.
    pub continuum_erg_s_cm2_aa: Vec<f64>,
    /// True when the errors were estimated from the scatter.
    pub errors_estimated: bool,
    /// Identifiers of its bands.
    pub bands: Vec<String>,
    /// Every sample inside the window, used or not.
    pub samples: Vec<SampleFit>,
}

impl WindowFit {
    /// The continuum at a rest vacuum wavelength in Å, erg s⁻¹ cm⁻² Å⁻¹.
    pub fn continuum_at(&self, x_aa: f64) -> f64 {
        continuum_at(x_aa, self.window_aa, &self.continuum_erg_s_cm2_aa)
    }
}

impl BandFit {
    /// The band's flux density at a rest vacuum wavelength in Å, erg s⁻¹ cm⁻² Å⁻¹, not averaged
    /// over a pixel.
    pub fn at(&self, x_aa: f64) -> f64 {
        let profile: f64 = self
            .structure
            .lines()
            .iter()
            .map(|(ratio, share)| {
                share * gaussian(x_aa, self.centre_aa * ratio, self.line_sigma_aa).value
            })
            .sum();
        self.flux_erg_s_cm2.value * profile
    }
}

/// Everything the fit of one spectrum yields.
#[derive(Clone, Debug)]
pub struct SpectrumFit {
    /// Label of the spectrum.
    pub label: String,
    /// Windows in order of wavelength.
    pub windows: Vec<WindowFit>,
    /// Bands in the order asked for.
    pub bands: Vec<BandFit>,
    /// Covariance of the band fluxes, (erg s⁻¹ cm⁻²)², same order.
    pub flux_covariance: DMatrix<f64>,
    /// Doubts.
    pub caveats: Vec<Caveat>,
}

/// Fits all bands of the settings to a spectrum. Bands whose windows overlap are fitted together.
///
/// # Errors
/// Impossible settings, a band outside the spectrum, too few samples, or bands that the data cannot
/// tell apart.
pub fn fit_spectrum(spectrum: &RestSpectrum, settings: &FitSettings) -> Result<SpectrumFit> {
    settings.check()?;
    let groups = group_bands(spectrum, settings)?;
    let count = settings.bands.len();
    let mut out = SpectrumFit {
        label: spectrum.label().to_owned(),
        windows: Vec::new(),
        bands: Vec::new(),
        flux_covariance: DMatrix::zeros(count, count),
        caveats: Vec::new(),
    };
    let mut found: Vec<Option<BandFit>> = vec![None; count];
    let mut solver = Solver::default();
    for group in groups {
        fit_group(
            spectrum,
            settings,
            &group,
            &mut solver,
            &mut out,
            &mut found,
        )?;
    }
    out.bands = found
        .into_iter()
        .map(|b| b.expect("invariant: every band is in a group"))
        .collect();
    Ok(out)
}

struct Group {
    window_aa: (f64, f64),
    bands: Vec<usize>,
}

fn group_bands(spectrum: &RestSpectrum, settings: &FitSettings) -> Result<Vec<Group>> {
    let x = spectrum.wavelength_aa();
    let (first, last) = (x[0], x[x.len() - 1]);
    let mut order: Vec<usize> = (0..settings.bands.len()).collect();
    order.sort_by(|a, b| {
        settings.bands[*a]
            .window_aa
            .0
            .total_cmp(&settings.bands[*b].window_aa.0)
    });
    let mut groups: Vec<Group> = Vec::new();
    for b in order {
        let band = &settings.bands[b];
        if band.centre_aa <= first || band.centre_aa >= last {
            return Err(Error::input(format!(
                "band {} at {:.1} Å lies outside {}, which covers {first:.1} to {last:.1} Å",
                band.id,
                band.centre_aa,
                spectrum.label()
            ))
            .remedy("leave the band out or check the wavelength unit and medium"));
        }
        let low = band.window_aa.0.max(first);
        let high = band.window_aa.1.min(last);
        match groups.last_mut() {
            Some(group) if group.window_aa.1 > low => {
                group.window_aa.1 = group.window_aa.1.max(high);
                group.bands.push(b);
            }
            _ => groups.push(Group {
                window_aa: (low, high),
                bands: vec![b],
            }),
        }
    }
    Ok(groups)
}

fn default_order(window_aa: (f64, f64)) -> usize {
    let relative = (window_aa.1 - window_aa.0) / (0.5 * (window_aa.1 + window_aa.0));
    if relative > 0.15 { 3 } else { 2 }
}

fn fit_group(
    spectrum: &RestSpectrum,
    settings: &FitSettings,
    group: &Group,
    solver: &mut Solver,
    out: &mut SpectrumFit,
    found: &mut [Option<BandFit>],
) -> Result<()> {
    let picked = pick_samples(spectrum, settings, group);
    let mut input = picked.input(settings, group)?;
    let outcome = if picked.has_sigma {
        fit_window(&input, solver)?
    } else {
        fit_with_estimated_errors(&mut input, &picked, solver)?
    };
    let index = out.windows.len();
    for (position, &b) in group.bands.iter().enumerate() {
        let fit = band_fit(
            &settings.bands[b],
            settings,
            index,
            &outcome,
            position,
            picked.scale,
        );
        note_band(
            &fit,
            &outcome,
            position,
            &picked,
            settings,
            &mut out.caveats,
        );
        found[b] = Some(fit);
        for (other, &c) in group.bands.iter().enumerate() {
            out.flux_covariance[(b, c)] =
                outcome.flux_covariance[(position, other)] * picked.scale * picked.scale;
        }
    }
    let window = window_fit(spectrum, settings, group, &picked, &outcome, &input);
    note_window(&window, spectrum.label(), &mut out.caveats);
    out.windows.push(window);
    Ok(())
}

/// The samples of a window and the scale that brings them near one.
struct Picked {
    inside: Vec<usize>,
    used: Vec<bool>,
    edges_aa: Vec<(f64, f64)>,
    x_aa: Vec<f64>,
    data: Vec<f64>,
    sigma: Vec<f64>,
    continuum_only: Vec<bool>,
    has_sigma: bool,
    scale: f64,
}

fn pick_samples(spectrum: &RestSpectrum, settings: &FitSettings, group: &Group) -> Picked {
    let x = spectrum.wavelength_aa();
    let inside: Vec<usize> = (0..x.len())
        .filter(|i| (group.window_aa.0..=group.window_aa.1).contains(&x[*i]))
        .collect();
    let in_core = |w: f64| {
        group.bands.iter().any(|b| {
            let band = &settings.bands[*b];
            let fwhm = settings
                .expected_fwhm_aa(band)
                .unwrap_or(0.15 * (band.window_aa.1 - band.window_aa.0));
            let (low, high) = band.structure.extent();
            w >= band.centre_aa * low - CORE_FWHM * fwhm
                && w <= band.centre_aa * high + CORE_FWHM * fwhm
        })
    };
    let within = |ranges: &[(f64, f64)], w: f64| {
        ranges.iter().any(|(low, high)| (*low..=*high).contains(&w))
    };
    let keep = |i: usize| {
        spectrum.good()[i]
            && !within(&settings.excluded_aa, x[i])
            && (settings.continuum_ranges_aa.is_empty()
                || in_core(x[i])
                || within(&settings.continuum_ranges_aa, x[i]))
    };
    let used: Vec<bool> = inside.iter().map(|i| keep(*i)).collect();
    let chosen: Vec<usize> = inside
        .iter()
        .zip(&used)
        .filter(|(_, u)| **u)
        .map(|(i, _)| *i)
        .collect();
    let flux = spectrum.flux_erg_s_cm2_aa();
    let largest = chosen.iter().map(|i| flux[*i].abs()).fold(0.0, f64::max);
    let scale = if largest > 0.0 { largest } else { 1.0 };
    Picked {
        edges_aa: inside.iter().map(|i| edges(x, *i)).collect(),
        x_aa: chosen.iter().map(|i| x[*i]).collect(),
        data: chosen.iter().map(|i| flux[*i] / scale).collect(),
        sigma: spectrum.sigma_erg_s_cm2_aa().map_or_else(
            || vec![1.0; chosen.len()],
            |s| chosen.iter().map(|i| s[*i] / scale).collect(),
        ),
        continuum_only: chosen.iter().map(|i| !in_core(x[*i])).collect(),
        has_sigma: spectrum.sigma_erg_s_cm2_aa().is_some(),
        inside,
        used,
        scale,
    }
}

/// Pixel edges half-way to the neighbours.
fn edges(x: &[f64], i: usize) -> (f64, f64) {
    let n = x.len();
    if n == 1 {
        return (x[0] - 0.5, x[0] + 0.5);
    }
    let before = if i > 0 { x[i] - x[i - 1] } else { x[1] - x[0] };
    let after = if i + 1 < n { x[i + 1] - x[i] } else { before };
    (x[i] - 0.5 * before, x[i] + 0.5 * after)
}

impl Picked {
    fn input<'a>(&self, settings: &'a FitSettings, group: &Group) -> Result<WindowInput<'a>> {
        if self.x_aa.len() < 3 {
            return Err(Error::input(format!(
                "window {:.1} to {:.1} Å holds only {} usable samples",
                group.window_aa.0,
                group.window_aa.1,
                self.x_aa.len()
            ))
            .remedy("widen the window or check masks and excluded ranges"));
        }
        let bands: Vec<&BandModel> = group.bands.iter().map(|b| &settings.bands[*b]).collect();
        Ok(WindowInput {
            x_aa: self.x_aa.clone(),
            edges_aa: self
                .edges_aa
                .iter()
                .zip(&self.used)
                .filter(|(_, u)| **u)
                .map(|(e, _)| *e)
                .collect(),
            data: self.data.clone(),
            sigma: self.sigma.clone(),
            window_aa: group.window_aa,
            order: settings
                .continuum_order
                .unwrap_or_else(|| default_order(group.window_aa))
                .saturating_add_signed(settings.continuum_order_shift as isize),
            sampling: settings.sampling,
            instrument_fwhm_aa: bands
                .iter()
                .map(|b| settings.resolution.map(|r| r.fwhm_aa(b.centre_aa)))
                .collect(),
            expected_fwhm_aa: bands.iter().map(|b| settings.expected_fwhm_aa(b)).collect(),
            bands,
            free_shape_sigma: settings.free_shape_sigma,
        })
    }
}

/// Without given errors: fit, take the scatter in the continuum as the error of every sample of the
/// window, and fit again with it; the error settles after two rounds.
fn fit_with_estimated_errors(
    input: &mut WindowInput<'_>,
    picked: &Picked,
    solver: &mut Solver,
) -> Result<WindowOutcome> {
    let mut outcome = fit_window(input, solver)?;
    for _ in 0..2 {
        let model = model_values(input, &outcome);
        let residuals: Vec<f64> = input.data.iter().zip(model).map(|(d, m)| d - m).collect();
        let parameters = input.data.len() - outcome.dof;
        let sigma =
            scatter(&residuals, &picked.continuum_only, parameters).ok_or_else(|| {
                Error::input("errors are missing and cannot be estimated: the samples have no scatter about the fit")
                    .remedy("give an error column")
            })?;
        input.sigma = vec![sigma; input.data.len()];
        outcome = fit_window(input, solver)?;
    }
    Ok(outcome)
}

fn model_values(input: &WindowInput<'_>, outcome: &WindowOutcome) -> Vec<f64> {
    input
        .x_aa
        .iter()
        .zip(&input.edges_aa)
        .map(|(x, edges)| {
            continuum_at(*x, input.window_aa, &outcome.continuum)
                + (0..outcome.flux.len())
                    .map(|b| band_at(input, outcome, b, *x, *edges))
                    .sum::<f64>()
        })
        .collect()
}

fn continuum_at(x_aa: f64, window_aa: (f64, f64), coefficients: &[f64]) -> f64 {
    chebyshev(to_unit_interval(x_aa, window_aa), coefficients.len() - 1)
        .iter()
        .zip(coefficients)
        .map(|(t, c)| t * c)
        .sum()
}

fn band_at(
    input: &WindowInput<'_>,
    outcome: &WindowOutcome,
    band: usize,
    x_aa: f64,
    edges_aa: (f64, f64),
) -> f64 {
    let (centre, sigma) = (outcome.centre_aa[band], outcome.sigma_aa[band]);
    let lines = input.bands[band].structure.lines();
    let profile: f64 = lines
        .iter()
        .map(|(ratio, share)| {
            share * profile_at(input.sampling, x_aa, edges_aa, centre * ratio, sigma)
        })
        .sum();
    outcome.flux[band] * profile
}

fn band_fit(
    band: &BandModel,
    settings: &FitSettings,
    window: usize,
    outcome: &WindowOutcome,
    position: usize,
    scale: f64,
) -> BandFit {
    let flux = Measured::new(
        outcome.flux[position] * scale,
        outcome.flux_covariance[(position, position)].sqrt() * scale,
    );
    let detected = flux.signal_to_noise() >= settings.detection_sigma;
    let spread_aa = band.structure.spread() * outcome.centre_aa[position];
    let total = outcome.sigma_aa[position].hypot(spread_aa);
    BandFit {
        id: band.id.clone(),
        window,
        centre_aa: outcome.centre_aa[position],
        centre_sigma_aa: outcome.centre_sigma_aa[position],
        fwhm_aa: total * FWHM_PER_SIGMA,
        fwhm_sigma_aa: outcome.sigma_sigma_aa[position]
            .map(|s| s * (outcome.sigma_aa[position] / total) * FWHM_PER_SIGMA),
        line_sigma_aa: outcome.sigma_aa[position],
        structure: band.structure.clone(),
        flux_erg_s_cm2: flux,
        detected,
        flux_limit_erg_s_cm2: (!detected).then(|| upper_limit(flux)),
    }
}

fn note_band(
    fit: &BandFit,
    outcome: &WindowOutcome,
    position: usize,
    picked: &Picked,
    settings: &FitSettings,
    caveats: &mut Vec<Caveat>,
) {
    if let Some(why) = &outcome.shape[position].note {
        caveats.push(Caveat::ShapeHeld {
            band: fit.id.clone(),
            why: why.clone(),
        });
    }
    let nearest = picked
        .x_aa
        .partition_point(|x| *x < fit.centre_aa)
        .clamp(1, picked.x_aa.len() - 1);
    let pixel = picked.x_aa[nearest] - picked.x_aa[nearest - 1];
    let pixels = fit.line_sigma_aa * FWHM_PER_SIGMA / pixel;
    if pixels < 2.0 && settings.sampling == super::Sampling::Centre {
        caveats.push(Caveat::Undersampled {
            band: fit.id.clone(),
            fwhm_pixels: pixels,
        });
    }
    if let (Some(resolution), Some(error)) = (settings.resolution, fit.fwhm_sigma_aa)
        && fit.structure.is_single()
    {
        let instrument = resolution.fwhm_aa(fit.centre_aa);
        if fit.fwhm_aa + 3.0 * error < 0.9 * instrument {
            caveats.push(Caveat::Other {
                code: "narrower-than-instrument",
                text: format!(
                    "{}: fitted width {:.2} Å is below the instrument's {instrument:.2} Å; the resolution in the plan is too low",
                    fit.id, fit.fwhm_aa
                ),
            });
        }
    }
}

fn note_window(window: &WindowFit, label: &str, caveats: &mut Vec<Caveat>) {
    if window.errors_estimated {
        let sigma = window
            .samples
            .iter()
            .find(|s| s.used)
            .map_or(f64::NAN, |s| s.sigma_erg_s_cm2_aa);
        caveats.push(Caveat::ErrorsEstimated {
            spectrum: format!(
                "{label}, {:.0}–{:.0} Å",
                window.window_aa.0, window.window_aa.1
            ),
            sigma_erg_s_cm2_aa: sigma,
        });
        return;
    }
    let reduced = window.chi2 / window.dof as f64;
    if reduced > POOR_REDUCED_CHI2 {
        caveats.push(Caveat::PoorFit {
            window_aa: window.window_aa,
            reduced_chi2: reduced,
        });
    }
}

fn window_fit(
    spectrum: &RestSpectrum,
    settings: &FitSettings,
    group: &Group,
    picked: &Picked,
    outcome: &WindowOutcome,
    input: &WindowInput<'_>,
) -> WindowFit {
    let scale = picked.scale;
    let estimated = (!picked.has_sigma).then(|| input.sigma[0] * scale);
    let samples = picked
        .inside
        .iter()
        .enumerate()
        .map(|(position, &i)| {
            let x = spectrum.wavelength_aa()[i];
            let continuum = continuum_at(x, group.window_aa, &outcome.continuum) * scale;
            let bands: Vec<f64> = (0..group.bands.len())
                .map(|b| band_at(input, outcome, b, x, picked.edges_aa[position]) * scale)
                .collect();
            SampleFit {
                wavelength_aa: x,
                flux_erg_s_cm2_aa: spectrum.flux_erg_s_cm2_aa()[i],
                sigma_erg_s_cm2_aa: estimated
                    .unwrap_or_else(|| spectrum.sigma_erg_s_cm2_aa().map_or(f64::NAN, |s| s[i])),
                used: picked.used[position],
                continuum_erg_s_cm2_aa: continuum,
                total_erg_s_cm2_aa: continuum + bands.iter().sum::<f64>(),
                bands_erg_s_cm2_aa: bands,
            }
        })
        .collect();
    WindowFit {
        window_aa: group.window_aa,
        chi2: outcome.chi2,
        dof: outcome.dof,
        continuum_order: input.order,
        continuum_erg_s_cm2_aa: outcome.continuum.iter().map(|c| c * scale).collect(),
        errors_estimated: !picked.has_sigma,
        bands: group
            .bands
            .iter()
            .map(|b| settings.bands[*b].id.clone())
            .collect(),
        samples,
    }
}
