//! One spectrum's fit: bands sorted into windows, each window fitted, results in cgs.

use super::detect::upper_limit;
use super::fitted_continuum::{FittedContinuum, FittedThermal};
use super::form::Form;
use super::integral::{Integral, integrate, joint_covariance, model_over};
use super::noise::scatter;
use super::notes::{note_band, note_window};
use super::pick::{Group, Picked, SampleUse, limits_aa};
use super::results::{BandFit, SampleFit, SpectrumFit, WindowFit};
use super::robust::{CLIP_ROUNDS, clip, correlated_covariance, correlations, residuals};
use super::settings::{BandModel, FitSettings, Freedom, Uncertainty};
use super::solver::Solver;
use super::uncertain::{FluxErrors, flux_errors};
use super::window::{WindowInput, WindowOutcome, fit_window};
use crate::frame::RestSpectrum;
use crate::ground::constants::FWHM_PER_SIGMA;
use crate::ground::{Caveat, Error, Measured, Result};
use nalgebra::DMatrix;

/// Below this reduced χ² the data hold no noise to speak of, as in simulations without noise.
const NO_NOISE: f64 = 0.01;

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
        sided: vec![None; count],
        sampled: Vec::new(),
        caveats: Vec::new(),
    };
    if let Some(carrier) = &settings.continuum.carrier {
        out.caveats.extend(carrier.caveats().iter().cloned());
    }
    let mut found: Vec<Option<BandFit>> = vec![None; count];
    let mut solver = Solver::default();
    for group in &groups {
        let fitted = FittedGroup::new(spectrum, settings, group, &mut solver)?;
        fitted.report(&mut out, &mut found);
    }
    out.bands = found
        .into_iter()
        .map(|b| b.expect("invariant: every band is in a group"))
        .collect();
    Ok(out)
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
        let (low, high) = if settings.continuum.whole {
            (first, last)
        } else {
            (band.window_aa.0.max(first), band.window_aa.1.min(last))
        };
        let joins = groups.last().is_some_and(|g| g.window_aa.1 > low);
        if !joins {
            groups.push(Group {
                window_aa: (low, high),
                bands: Vec::new(),
                integrals: Vec::new(),
            });
        }
        let group = groups.last_mut().expect("invariant: pushed above");
        group.window_aa.1 = group.window_aa.1.max(high);
        match band.form {
            Form::Integral { .. } => group.integrals.push(b),
            _ => group.bands.push(b),
        }
    }
    Ok(groups)
}

fn order_of(settings: &FitSettings, window_aa: (f64, f64)) -> usize {
    let relative = (window_aa.1 - window_aa.0) / (0.5 * (window_aa.1 + window_aa.0));
    let default = if relative > 0.15 { 3 } else { 2 };
    let on_carrier = usize::from(settings.continuum.carrier.is_some());
    let order = settings.continuum.order.unwrap_or(default - on_carrier);
    let shift = isize::try_from(settings.continuum.order_shift).unwrap_or(0);
    order.saturating_add_signed(shift)
}

/// A window after its fit, before the results are put into cgs.
struct FittedGroup<'a> {
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
    fn new(
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

    fn report(&self, out: &mut SpectrumFit, found: &mut [Option<BandFit>]) {
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

/// Carrier over its mean at every sample inside the window, and the mean.
fn carrier_inside(
    spectrum: &RestSpectrum,
    settings: &FitSettings,
    picked: &Picked,
    group: &Group,
) -> Result<(Option<Vec<f64>>, f64)> {
    let Some(carrier) = &settings.continuum.carrier else {
        return Ok((None, 1.0));
    };
    let (low, high) = carrier.range_aa();
    let x = spectrum.wavelength_aa();
    let (Some(first), Some(last)) = (picked.inside.first(), picked.inside.last()) else {
        return Ok((None, 1.0));
    };
    if x[*first] < low || x[*last] > high {
        return Err(Error::input(format!(
            "the continuum of {} covers {low:.1} to {high:.1} Å, the window {:.1} to {:.1} Å",
            carrier.label(),
            group.window_aa.0,
            group.window_aa.1
        ))
        .remedy("give one that covers the window, or narrow the window"));
    }
    let values: Vec<f64> = picked
        .inside
        .iter()
        .zip(&picked.edges_aa)
        .map(|(i, edges)| match settings.sampling {
            super::Sampling::Centre => carrier.at(x[*i]),
            super::Sampling::Pixel => carrier.over_pixel(*edges),
        })
        .collect();
    let mean = values.iter().sum::<f64>() / values.len() as f64;
    if mean.is_nan() || mean <= 0.0 {
        return Err(Error::input(format!(
            "the continuum of {} is not positive between {:.1} and {:.1} Å",
            carrier.label(),
            group.window_aa.0,
            group.window_aa.1
        )));
    }
    Ok((Some(values.iter().map(|v| v / mean).collect()), mean))
}

fn window_input<'a>(
    spectrum: &RestSpectrum,
    settings: &'a FitSettings,
    group: &Group,
    picked: &Picked,
    carrier_inside: Option<Vec<f64>>,
) -> Result<WindowInput<'a>> {
    let at: Vec<usize> = picked.fitted().collect();
    if at.len() < 3 {
        return Err(Error::input(format!(
            "window {:.1} to {:.1} Å holds only {} usable samples",
            group.window_aa.0,
            group.window_aa.1,
            at.len()
        ))
        .remedy("widen the window or check masks and excluded ranges"));
    }
    let x = spectrum.wavelength_aa();
    let flux = spectrum.flux_erg_s_cm2_aa();
    let bands: Vec<&BandModel> = group.bands.iter().map(|b| &settings.bands[*b]).collect();
    let inside_aa: Vec<f64> = picked.inside.iter().map(|i| x[*i]).collect();
    let scale = picked.scale;
    let open = |limits: (f64, f64)| (limits.0 / scale, limits.1 / scale);
    Ok(WindowInput {
        x_aa: at.iter().map(|p| inside_aa[*p]).collect(),
        edges_aa: at.iter().map(|p| picked.edges_aa[*p]).collect(),
        data: at.iter().map(|p| flux[picked.inside[*p]] / scale).collect(),
        sigma: spectrum.sigma_erg_s_cm2_aa().map_or_else(
            || vec![1.0; at.len()],
            |s| at.iter().map(|p| s[picked.inside[*p]] / scale).collect(),
        ),
        window_aa: group.window_aa,
        order: order_of(settings, group.window_aa),
        carrier: carrier_inside
            .as_ref()
            .map(|c| at.iter().map(|p| c[*p]).collect()),
        carrier_inside,
        inside_aa,
        thermal: settings.continuum.thermal,
        sampling: settings.sampling,
        instrument_fwhm_aa: bands
            .iter()
            .map(|b| settings.resolution.as_ref().map(|r| r.fwhm_aa(b.centre_aa)))
            .collect(),
        expected_fwhm_aa: bands.iter().map(|b| settings.expected_fwhm_aa(b)).collect(),
        flux_limits: bands
            .iter()
            .map(|b| b.limits.flux_erg_s_cm2.map(open))
            .collect(),
        ties: ties(settings, &bands),
        bands,
        free_shape_sigma: settings.free_shape_sigma,
    })
}

/// Two lines nearer than this many full widths are a blend.
const BLEND_FWHM: f64 = 1.5;
/// A band narrower than this part of the instrument's profile is a line.
const LINE_PART: f64 = 0.5;

/// The user's ties; and lines of a blend, whose shapes come from one instrument and one comet, share
/// velocity and width too, unless the user frees them: their separate shapes would eat each other's flux.
fn ties(settings: &FitSettings, bands: &[&BandModel]) -> Vec<Option<String>> {
    let line = |b: &BandModel| {
        let instrument = settings.resolution.as_ref()?.fwhm_aa(b.centre_aa);
        let plain = matches!(b.form, Form::Lines) && b.structure.is_single() && !b.wings;
        let auto = b.centre == Freedom::Auto && b.width == Freedom::Auto && b.tie.is_none();
        let narrow = b.fwhm_aa.is_some_and(|w| w < LINE_PART * instrument);
        (plain && auto && narrow).then_some(instrument)
    };
    let mut order: Vec<usize> = (0..bands.len()).collect();
    order.sort_by(|a, b| bands[*a].centre_aa.total_cmp(&bands[*b].centre_aa));
    let mut out: Vec<Option<String>> = bands.iter().map(|b| b.tie.clone()).collect();
    let lines: Vec<(usize, f64)> = order
        .into_iter()
        .filter_map(|i| Some((i, line(bands[i])?)))
        .collect();
    for (n, pair) in lines.windows(2).enumerate() {
        let ((a, fwhm), (b, _)) = (pair[0], pair[1]);
        if bands[b].centre_aa - bands[a].centre_aa < BLEND_FWHM * fwhm {
            let word = out[a].clone().unwrap_or_else(|| format!("(blend {n})"));
            out[a] = Some(word.clone());
            out[b] = Some(word);
        }
    }
    out
}

/// Without given errors: fit, take the scatter in the continuum as the error of every sample of the
/// window, and fit again with it; the error settles after two rounds.
fn fit_with_estimated_errors(
    input: &mut WindowInput<'_>,
    picked: &Picked,
    solver: &mut Solver,
) -> Result<WindowOutcome> {
    let continuum_only: Vec<bool> = picked.fitted().map(|p| !picked.in_core[p]).collect();
    let mut outcome = fit_window(input, solver)?;
    for _ in 0..2 {
        let (over_sigma, _) = residuals(input, &outcome);
        let r: Vec<f64> = over_sigma
            .iter()
            .zip(&input.sigma)
            .map(|(r, s)| r * s)
            .collect();
        let parameters = input.data.len() - outcome.dof;
        let sigma =
            scatter(&r, &continuum_only, parameters).ok_or_else(|| {
                Error::input("errors are missing and cannot be estimated: the samples have no scatter about the fit")
                    .remedy("give an error column")
            })?;
        input.sigma = vec![sigma; input.data.len()];
        outcome = fit_window(input, solver)?;
    }
    Ok(outcome)
}

/// Scales the covariance to a reduced χ² of one, where the user asks for it and errors were given.
fn scale_errors(
    settings: &FitSettings,
    picked: &Picked,
    outcome: &mut WindowOutcome,
) -> Option<f64> {
    if !settings.scale_errors || !picked.has_sigma {
        return None;
    }
    let reduced = outcome.chi2 / outcome.dof as f64;
    outcome.covariance *= reduced;
    outcome.read_errors();
    Some(reduced.sqrt())
}

/// Raises errors where neighbouring residuals are correlated; returns the largest factor among the
/// fluxes.
fn raise_for_correlation(input: &WindowInput<'_>, outcome: &mut WindowOutcome) -> Option<f64> {
    let (r, columns) = residuals(input, outcome);
    let rho = correlations(&r);
    if rho.is_empty() || outcome.chi2 < NO_NOISE * outcome.dof as f64 {
        return None;
    }
    let before = outcome.flux_covariance.clone();
    outcome.covariance = correlated_covariance(outcome, &columns, &rho);
    outcome.read_errors();
    let factor = (0..before.nrows())
        .map(|b| (outcome.flux_covariance[(b, b)] / before[(b, b)]).sqrt())
        .fold(1.0, f64::max);
    Some(factor)
}
