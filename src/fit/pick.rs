//! The samples of a window, sorted by their use, and the scale that brings them near one.

use super::form::Form;
use super::settings::FitSettings;
use crate::frame::RestSpectrum;

/// Half-width of a band's core in expected full widths, outside of which samples are continuum.
const CORE_FWHM: f64 = 1.5;

/// What became of a sample.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SampleUse {
    /// It took part in the fit.
    Fitted,
    /// It was summed up: it lies between the limits of a band that is integrated.
    Integrated,
    /// It was dropped because it lies too far from the fit.
    Clipped,
    /// It was masked, by the file, the plan, or because it is no number.
    Masked,
}

/// Bands fitted together, and their range.
pub(super) struct Group {
    pub window_aa: (f64, f64),
    /// Bands with a profile.
    pub bands: Vec<usize>,
    /// Bands that are integrated.
    pub integrals: Vec<usize>,
}

/// The samples of a window and the scale that brings them near one.
pub(super) struct Picked {
    pub inside: Vec<usize>,
    pub uses: Vec<SampleUse>,
    pub edges_aa: Vec<(f64, f64)>,
    pub has_sigma: bool,
    pub scale: f64,
    /// For every sample inside.
    pub in_core: Vec<bool>,
}

impl Picked {
    pub(super) fn new(spectrum: &RestSpectrum, settings: &FitSettings, group: &Group) -> Self {
        let x = spectrum.wavelength_aa();
        let inside: Vec<usize> = (0..x.len())
            .filter(|i| (group.window_aa.0..=group.window_aa.1).contains(&x[*i]))
            .collect();
        let in_core: Vec<bool> = inside
            .iter()
            .map(|i| is_in_core(settings, group, x[*i]))
            .collect();
        let within = |ranges: &[(f64, f64)], w: f64| {
            ranges.iter().any(|(low, high)| (*low..=*high).contains(&w))
        };
        let integrated = |(low, high): (f64, f64)| {
            group.integrals.iter().any(|b| {
                let limits = limits_aa(settings, *b);
                low < limits.1 && high > limits.0
            })
        };
        let edges_aa: Vec<(f64, f64)> = inside.iter().map(|i| edges(x, *i)).collect();
        let uses: Vec<SampleUse> = inside
            .iter()
            .zip(&in_core)
            .zip(&edges_aa)
            .map(|((&i, core), edges)| {
                let chosen = settings.continuum_ranges_aa.is_empty()
                    || *core
                    || within(&settings.continuum_ranges_aa, x[i]);
                if !spectrum.good()[i] || within(&settings.excluded_aa, x[i]) {
                    SampleUse::Masked
                } else if integrated(*edges) {
                    SampleUse::Integrated
                } else if chosen {
                    SampleUse::Fitted
                } else {
                    SampleUse::Masked
                }
            })
            .collect();
        let flux = spectrum.flux_erg_s_cm2_aa();
        let largest = inside
            .iter()
            .zip(&uses)
            .filter(|(_, u)| **u != SampleUse::Masked)
            .map(|(i, _)| flux[*i].abs())
            .fold(0.0, f64::max);
        Self {
            has_sigma: spectrum.sigma_erg_s_cm2_aa().is_some(),
            scale: if largest > 0.0 { largest } else { 1.0 },
            inside,
            uses,
            edges_aa,
            in_core,
        }
    }

    /// Positions among the samples inside that take part in the fit.
    pub(super) fn fitted(&self) -> impl Iterator<Item = usize> + '_ {
        (0..self.inside.len()).filter(|p| self.uses[*p] == SampleUse::Fitted)
    }
}

/// Limits of a band that is integrated.
pub(super) fn limits_aa(settings: &FitSettings, band: usize) -> (f64, f64) {
    match settings.bands[band].form {
        Form::Integral { limits_aa } => limits_aa,
        _ => unreachable!("invariant: only integrated bands are asked"),
    }
}

fn is_in_core(settings: &FitSettings, group: &Group, w: f64) -> bool {
    group.bands.iter().any(|b| {
        let band = &settings.bands[*b];
        let fwhm = settings
            .expected_fwhm_aa(band)
            .unwrap_or(0.15 * (band.window_aa.1 - band.window_aa.0));
        let (low, high) = match &band.form {
            Form::Template(template) => template.extent(),
            _ => band.structure.extent(),
        };
        w >= band.centre_aa * low - CORE_FWHM * fwhm
            && w <= band.centre_aa * high + CORE_FWHM * fwhm
    })
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
