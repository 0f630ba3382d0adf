//! The bands of one window fitted together, and their results in cgs.

use super::detect::upper_limit;
use super::fitted_continuum::{FittedContinuum, FittedThermal};
use super::form::Form;
use super::integral::{Integral, integrate, joint_covariance, model_over};
use super::notes::{note_band, note_window};
use super::outcome::WindowOutcome;
use super::pick::{Group, Picked, SampleUse, limits_aa};
use super::prepare::{
    carrier_inside, fit_with_estimated_errors, raise_for_correlation, scale_errors, window_input,
};
use super::results::{BandFit, SampleFit, SpectrumFit, WindowFit};
use super::robust::{CLIP_ROUNDS, clip, residuals};
use super::settings::{BandModel, FitSettings, Uncertainty};
use super::solver::Solver;
use super::uncertain::{FluxErrors, flux_errors};
use super::window::{WindowInput, fit_window};
use crate::frame::RestSpectrum;
use crate::ground::constants::FWHM_PER_SIGMA;
use crate::ground::{Caveat, Measured, Result};
use nalgebra::DMatrix;

/// A window after its fit, before the results are put into cgs.
pub(super) struct FittedGroup<'a> {
    spectrum: &'a RestSpectrum,
    settings: &'a FitSettings,
    group: &'a Group,
    picked: Picked,
    input: WindowInput<'a>,
    outcome: WindowOutcome,
    integrals: Vec<Integral>,
    carrier_mean: f64,
    errors_scaled: Option<f64>,
    inflation: Option<f64>,
    errors: Option<FluxErrors>,
    /// Factor by which scaling and correlation raised each flux error.
    raised: Vec<f64>,
}

impl<'a> FittedGroup<'a> {
    pub(super) fn new(
        spectrum: &'a RestSpectrum,
        settings: &'a FitSettings,
        group: &'a Group,
        solver: &mut Solver,
    ) -> Result<Self> {
        let mut picked = Picked::new(spectrum, settings, group);
        let (carrier_inside, carrier_mean) = carrier_inside(spectrum, settings, &picked, group)?;
        let fit = |picked: &Picked, solver: &mut Solver| {
            let carrier = carrier_inside.clone();
            let mut input = window_input(spectrum, settings, group, picked, carrier)?;
            let outcome = if picked.has_sigma {
                fit_window(&input, solver)?
            } else {
                fit_with_estimated_errors(&mut input, picked, solver)?
            };
            Ok((input, outcome))
        };
        let (mut input, mut outcome) = fit(&picked, solver)?;
        if let Some(clip_sigma) = settings.clip_sigma {
            for _ in 0..CLIP_ROUNDS {
                let (r, _) = residuals(&input, &outcome);
                if clip(&mut picked, &r, clip_sigma) == 0 {
                    break;
                }
                (input, outcome) = fit(&picked, solver)?;
            }
        }
        // Before any scaling, which would move the rise of χ² that belongs to one sigma.
        let errors = flux_errors(settings.uncertainty, &input, &outcome, settings.seed)?;
        let before = outcome.flux_covariance.diagonal();
        let errors_scaled = scale_errors(settings, &picked, &mut outcome);
        let inflation = raise_for_correlation(&input, &mut outcome);
        let raised = (0..before.len())
            .map(|b| (outcome.flux_covariance[(b, b)] / before[b]).sqrt())
            .collect();
        let integrals = group
            .integrals
            .iter()
            .map(|b| {
                let named = (settings.bands[*b].id.as_str(), limits_aa(settings, *b));
                integrate(spectrum, &picked, &input, &outcome, named)
            })
            .collect::<Result<Vec<_>>>()?;
        Ok(Self {
            spectrum,
            settings,
            group,
            picked,
            input,
            outcome,
            integrals,
            carrier_mean,
            errors_scaled,
            inflation,
            errors,
            raised,
        })
    }

    pub(super) fn report(&self, out: &mut SpectrumFit, found: &mut [Option<BandFit>]) {
        let scale = self.picked.scale;
        let covariance = joint_covariance(&self.outcome, &self.integrals) * (scale * scale);
        let all: Vec<usize> = self
            .group
            .bands
            .iter()
            .chain(&self.group.integrals)
            .copied()
            .collect();
        let window = out.windows.len();
        for (position, &b) in all.iter().enumerate() {
            let sigma = covariance[(position, position)].sqrt();
            let mut fit = self.band_fit(b, position, window, sigma);
            if position < self.group.bands.len() {
                self.own_errors(&mut fit, position, out);
            }
            if position < self.group.bands.len() {
                let x = &self.input.x_aa;
                note_band(
                    &fit,
                    &self.outcome,
                    position,
                    x,
                    self.settings,
                    &mut out.caveats,
                );
            } else {
                self.note_integral(&fit, position, &mut out.caveats);
            }
            found[b] = Some(fit);
            for (other, &c) in all.iter().enumerate() {
                out.flux_covariance[(b, c)] = covariance[(position, other)];
            }
        }
        if let Some(FluxErrors::Drawn(draws, chain)) = &self.errors {
            let mut scaled = draws * scale;
            for (b, raised) in self.raised_draws().iter().enumerate() {
                let best = self.outcome.flux[b] * scale;
                for v in scaled.column_mut(b).iter_mut() {
                    *v = best + (*v - best) * raised;
                }
            }
            out.sampled.push((self.group.bands.clone(), scaled));
            self.note_draws(*chain, &mut out.caveats);
        }
        let window = self.window_fit(&all);
        note_window(&window, self.spectrum.label(), &mut out.caveats);
        out.windows.push(window);
    }

    /// Factors for drawn fluxes: resampled residuals have the true size already.
    fn raised_draws(&self) -> Vec<f64> {
        match self.settings.uncertainty {
            Uncertainty::Walkers => self.raised.clone(),
            _ => vec![1.0; self.raised.len()],
        }
    }

    /// Interval and error of a flux whose errors do not come from the covariance.
    fn own_errors(&self, fit: &mut BandFit, position: usize, out: &mut SpectrumFit) {
        let (scale, best) = (self.picked.scale, fit.flux_erg_s_cm2.value);
        let (below, above) = match &self.errors {
            None => return,
            Some(FluxErrors::Sided(sides)) => {
                let raised = self.raised[position] * scale;
                let sides = (sides[position].0 * raised, sides[position].1 * raised);
                let b = self.group.bands[position];
                out.sided[b] = Some(sides);
                sides
            }
            Some(FluxErrors::Drawn(draws, _)) => {
                let raised = self.raised_draws()[position] * scale;
                let mut sorted: Vec<f64> = draws.column(position).iter().copied().collect();
                sorted.sort_by(f64::total_cmp);
                let at =
                    |p: f64| sorted[((p * sorted.len() as f64) as usize).min(sorted.len() - 1)];
                let best = self.outcome.flux[position];
                (
                    (best - at(0.158_655)) * raised,
                    (at(0.841_345) - best) * raised,
                )
            }
        };
        fit.flux_interval_erg_s_cm2 = Some((best - below, best + above));
        fit.flux_erg_s_cm2.sigma = 0.5 * (below + above);
        fit.detected = fit.flux_erg_s_cm2.signal_to_noise() >= self.settings.detection_sigma;
        fit.flux_limit_erg_s_cm2 = (!fit.detected).then(|| upper_limit(fit.flux_erg_s_cm2));
    }

    fn note_draws(&self, chain: Option<super::walkers::Chain>, caveats: &mut Vec<Caveat>) {
        let (low, high) = self.group.window_aa;
        if let Some(chain) = chain.filter(|c| !c.is_good()) {
            caveats.push(Caveat::Other {
                code: "walkers-stuck",
                text: format!(
                    "{low:.0}–{high:.0} Å: the walkers remember {:.0} rounds and took {:.0} % of their moves: their errors are rough",
                    chain.autocorrelation,
                    100.0 * chain.accepted
                ),
            });
        }
        if chain.is_none() && self.inflation.is_some() {
            caveats.push(Caveat::Other {
                code: "resampling-uncorrelated",
                text: format!(
                    "{low:.0}–{high:.0} Å: resampling takes the residuals as independent, and they are not: the errors of its fluxes are too small"
                ),
            });
        }
    }

    fn note_integral(&self, fit: &BandFit, position: usize, caveats: &mut Vec<Caveat>) {
        let covered = self.integrals[position - self.group.bands.len()].covered;
        if self.settings.clip_sigma.is_some() {
            caveats.push(Caveat::Other {
                code: "integral-not-clipped",
                text: format!(
                    "{}: hits of cosmic rays between its limits cannot be told from the band and are not dropped",
                    fit.id
                ),
            });
        }
        if covered < 0.97 {
            caveats.push(Caveat::Other {
                code: "integral-gaps",
                text: format!(
                    "{}: masked samples leave gaps between its limits; the flux was scaled up from the {:.0} % covered",
                    fit.id,
                    100.0 * covered
                ),
            });
        }
    }

    fn band_fit(&self, b: usize, position: usize, window: usize, sigma: f64) -> BandFit {
        let (band, scale) = (&self.settings.bands[b], self.picked.scale);
        let fitted = self.group.bands.len();
        let value = if position < fitted {
            self.outcome.flux[position]
        } else {
            self.integrals[position - fitted].flux
        };
        let flux = Measured::new(value * scale, sigma);
        let detected = flux.signal_to_noise() >= self.settings.detection_sigma;
        let mut out = BandFit {
            id: band.id.clone(),
            window,
            centre_aa: band.centre_aa,
            centre_sigma_aa: None,
            fwhm_aa: 0.0,
            fwhm_sigma_aa: None,
            line_sigma_aa: 0.0,
            structure: band.structure.clone(),
            template: None,
            integral_aa: None,
            temperature_k: None,
            wings: None,
            flux_erg_s_cm2: flux,
            flux_interval_erg_s_cm2: None,
            detected,
            flux_limit_erg_s_cm2: (!detected).then(|| upper_limit(flux)),
        };
        if let Form::Integral { limits_aa } = band.form {
            out.integral_aa = Some(limits_aa);
            out.fwhm_aa = limits_aa.1 - limits_aa.0;
            return out;
        }
        self.shape_into(&mut out, band, position);
        out
    }

    fn shape_into(&self, out: &mut BandFit, band: &BandModel, position: usize) {
        let o = &self.outcome;
        out.centre_aa = o.centre_aa[position];
        out.centre_sigma_aa = o.centre_sigma_aa[position];
        let extra = &o.extra[position];
        match &band.form {
            Form::Template(template) => {
                out.template = Some(template.clone());
                out.fwhm_aa = template.fwhm() * out.centre_aa;
                out.line_sigma_aa = out.fwhm_aa / FWHM_PER_SIGMA;
                return;
            }
            Form::Warm(rotor) => {
                out.temperature_k = Some(extra[0]);
                out.structure = rotor.structure(extra[0].0);
            }
            _ if band.wings => out.wings = Some([extra[0], extra[1]]),
            _ => {}
        }
        let spread_aa = out.structure.spread() * out.centre_aa;
        let total = o.sigma_aa[position].hypot(spread_aa);
        out.fwhm_aa = total * FWHM_PER_SIGMA;
        out.fwhm_sigma_aa =
            o.sigma_sigma_aa[position].map(|s| s * (o.sigma_aa[position] / total) * FWHM_PER_SIGMA);
        out.line_sigma_aa = o.sigma_aa[position];
    }

    fn continuum(&self) -> FittedContinuum {
        let (o, scale) = (&self.outcome, self.picked.scale);
        let at: Vec<usize> = (0..o.continuum.len())
            .map(|c| {
                o.position(c)
                    .expect("invariant: the continuum is always free")
            })
            .collect();
        FittedContinuum {
            window_aa: self.group.window_aa,
            coefficients: o.continuum.iter().map(|c| c * scale).collect(),
            covariance: DMatrix::from_fn(at.len(), at.len(), |a, b| {
                o.covariance[(at[a], at[b])] * scale * scale
            }),
            carrier: self
                .settings
                .continuum
                .carrier
                .clone()
                .map(|c| (c, self.carrier_mean)),
            thermal: o.thermal.map(|t| FittedThermal {
                reference_aa: t.reference_aa,
                flux_erg_s_cm2_aa: Measured::new(
                    t.flux_density.0 * scale,
                    t.flux_density.1 * scale,
                ),
                temperature_k: t.temperature_k.0,
                temperature_sigma_k: t.temperature_k.1,
            }),
        }
    }

    fn window_fit(&self, all: &[usize]) -> WindowFit {
        WindowFit {
            window_aa: self.group.window_aa,
            chi2: self.outcome.chi2,
            dof: self.outcome.dof,
            continuum_order: self.input.order,
            continuum: self.continuum(),
            errors_estimated: !self.picked.has_sigma,
            errors_scaled: self.errors_scaled,
            inflation: self.inflation,
            bands: all
                .iter()
                .map(|b| self.settings.bands[*b].id.clone())
                .collect(),
            samples: self.samples(),
        }
    }

    /// Data and model at every sample of the window.
    fn samples(&self) -> Vec<SampleFit> {
        let (picked, o) = (&self.picked, &self.outcome);
        let n = picked.inside.len();
        let everywhere: Vec<usize> = (0..n).collect();
        let model = model_over(picked, &everywhere, &self.input, o, &vec![0.0; n]);
        let mut columns = Vec::new();
        let linear = o.parameters.len() - o.shapes;
        model.linear_columns(&o.parameters[linear..], &mut columns);
        let part = |p: usize, parameter: usize| {
            columns[parameter * n + p] * o.parameters[parameter] * picked.scale
        };
        let estimated = (!picked.has_sigma).then(|| self.input.sigma[0] * picked.scale);
        let first_band = o.continuum.len();
        let after_bands = first_band + o.flux.len();
        (0..n)
            .map(|p| {
                let i = picked.inside[p];
                let data = self.spectrum.flux_erg_s_cm2_aa()[i];
                let x = self.spectrum.wavelength_aa()[i];
                let continuum: f64 = (0..first_band)
                    .chain(after_bands..linear)
                    .map(|c| part(p, c))
                    .sum();
                let mut bands: Vec<f64> = (first_band..after_bands).map(|b| part(p, b)).collect();
                let mut total = continuum + bands.iter().sum::<f64>();
                for b in &self.group.integrals {
                    let (low, high) = limits_aa(self.settings, *b);
                    let (from, to) = picked.edges_aa[p];
                    let inside = picked.uses[p] == SampleUse::Integrated && from < high && to > low;
                    bands.push(if inside { data - total } else { 0.0 });
                }
                total = continuum + bands.iter().sum::<f64>();
                SampleFit {
                    wavelength_aa: x,
                    flux_erg_s_cm2_aa: data,
                    sigma_erg_s_cm2_aa: estimated.unwrap_or_else(|| {
                        self.spectrum
                            .sigma_erg_s_cm2_aa()
                            .map_or(f64::NAN, |s| s[i])
                    }),
                    used: matches!(picked.uses[p], SampleUse::Fitted | SampleUse::Integrated),
                    sample_use: picked.uses[p],
                    continuum_erg_s_cm2_aa: continuum,
                    total_erg_s_cm2_aa: total,
                    bands_erg_s_cm2_aa: bands,
                }
            })
            .collect()
    }
}
