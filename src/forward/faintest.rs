//! What an exposure can show: signal-to-noise of every band, and the faintest ratios.

use super::SceneSettings;
use crate::analysis::Settings;
use crate::coma::{ApertureKm, molecules_km, molecules_per_flux};
use crate::fit::{SpectrumFit, fit_spectrum};
use crate::frame::to_rest;
use crate::ground::{Result, Species};
use crate::ratio::Basis;

/// Expected signal-to-noise of one band.
#[derive(Clone, Debug, PartialEq)]
pub struct ExpectedBand {
    /// Identifier.
    pub id: String,
    /// Injected flux, erg s⁻¹ cm⁻².
    pub flux_erg_s_cm2: f64,
    /// Error that the fit of the plan quotes, same unit.
    pub sigma_erg_s_cm2: f64,
}

/// The smallest ratio whose numerator is detected.
#[derive(Clone, Debug, PartialEq)]
pub struct FaintestRatio {
    /// Numerator.
    pub of: Species,
    /// Denominator, at its given production rate.
    pub to: Species,
    /// The ratio; `None` when the denominator has no production rate.
    pub ratio: Option<f64>,
}

/// What is expected after one exposure.
#[derive(Clone, Debug, PartialEq)]
pub struct Expected {
    /// Exposure, s.
    pub exposure_s: f64,
    /// Bands inside the range.
    pub bands: Vec<ExpectedBand>,
    /// Ratios of the plan.
    pub ratios: Vec<FaintestRatio>,
}

/// What is expected after each of several exposures, in their order.
///
/// Fits the noise-free spectrum with the errors of each exposure, as the plan would.
///
/// The faintest ratio is taken with the numerator absent: n σ_M over the molecules of the denominator
/// (over their residence times for production rates), n the plan's detection threshold and σ_M the
/// error of the numerator's molecules, its bands weighted by inverse variance as in the analysis.
///
/// # Errors
/// As [`SceneSettings::bands`], and whatever the fit refuses.
pub fn expect(
    scene: &SceneSettings,
    settings: &Settings,
    times_s: &[f64],
) -> Result<Vec<Expected>> {
    times_s.iter().map(|t| at(scene, settings, *t)).collect()
}

fn at(scene: &SceneSettings, settings: &Settings, exposure_s: f64) -> Result<Expected> {
    let truth = scene.bands(settings)?;
    let fit = fit_of(scene, settings, exposure_s)?;
    let bands = truth
        .iter()
        .zip(&fit.bands)
        .map(|(t, f)| ExpectedBand {
            id: t.id.clone(),
            flux_erg_s_cm2: t.flux_erg_s_cm2,
            sigma_erg_s_cm2: f.flux_erg_s_cm2.sigma,
        })
        .collect();
    let mut ratios = Vec::new();
    for r in &settings.ratios {
        let shown = |s: &Species| truth.iter().any(|b| b.species.as_ref() == Some(s));
        if !(shown(&r.of) && shown(&r.to)) {
            continue;
        }
        let to = scene.rate(&r.to);
        let empty = scene.with_rate(&r.of, 0.0);
        let least =
            settings.detection_sigma * molecules_sigma(&empty, settings, &r.of, exposure_s)?;
        let (least, at_hand) = match r.basis {
            Basis::Production => (least / residence_s(settings, &r.of), to),
            Basis::Column => (least, to * residence_s(settings, &r.to)),
        };
        ratios.push(FaintestRatio {
            of: r.of.clone(),
            to: r.to.clone(),
            ratio: (to > 0.0).then(|| least / at_hand),
        });
    }
    Ok(Expected {
        exposure_s,
        bands,
        ratios,
    })
}

/// The plan's fit of the noise-free spectrum, with the bands inside the range.
fn fit_of(scene: &SceneSettings, settings: &Settings, exposure_s: f64) -> Result<SpectrumFit> {
    let inside = scene.bands(settings)?;
    let spectrum = scene.clean_spectrum(settings, exposure_s)?;
    let how = &settings.spectra[0];
    let mut fit = how.fit.clone();
    fit.bands = settings
        .bands
        .iter()
        .filter(|b| inside.iter().any(|i| i.id == b.model.id))
        .map(|b| b.model.clone())
        .collect();
    let rest = to_rest(&spectrum, how.frame, &settings.geometry, &settings.aperture);
    fit_spectrum(&rest, &fit)
}

/// Residence time M/Q, s; NaN without a coma model.
fn residence_s(settings: &Settings, species: &Species) -> f64 {
    let km = ApertureKm::at(&settings.aperture, settings.geometry.observer_au);
    let found = settings.species.iter().find(|s| s.species == *species);
    found
        .and_then(|s| s.coma.as_ref())
        .map_or(f64::NAN, |c| molecules_km(&c.lengths, &km) / c.speed_km_s)
}

/// Error of the molecules of an absent species after an exposure.
fn molecules_sigma(
    empty: &SceneSettings,
    settings: &Settings,
    species: &Species,
    exposure_s: f64,
) -> Result<f64> {
    let fit = fit_of(empty, settings, exposure_s)?;
    // (index in the fit, molecules per flux)
    let own: Vec<(usize, f64)> = fit
        .bands
        .iter()
        .enumerate()
        .filter_map(|(i, f)| {
            let band = settings.bands.iter().find(|b| b.model.id == f.id)?;
            let g = band.efficiency.as_ref()?.g_photons_s;
            let per_flux =
                molecules_per_flux(g, band.model.centre_aa, settings.geometry.observer_au);
            (band.species.as_ref() == Some(species)).then_some((i, per_flux))
        })
        .collect();
    let inverse = |(i, k): (usize, f64)| 1.0 / (k * k * fit.flux_covariance[(i, i)]);
    let sum: f64 = own.iter().map(|b| inverse(*b)).sum();
    let mut variance = 0.0;
    for &(i, k) in &own {
        for &(j, l) in &own {
            let weights = inverse((i, k)) * inverse((j, l)) / (sum * sum);
            variance += weights * k * l * fit.flux_covariance[(i, j)];
        }
    }
    Ok(variance.sqrt())
}
