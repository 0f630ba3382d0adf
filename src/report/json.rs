//! `result.json`.

use super::lines::{LinesOut, lines_out};
use crate::analysis::{Analysis, BandResult, RatioResult, RatioSettings, Settings, SpeciesResult};
use crate::fit::SampleUse;
use crate::frame::Geometry;
use serde::Serialize;

/// A file the result rests on.
#[derive(Clone, Debug, Serialize)]
pub struct Input {
    /// Path.
    pub path: String,
    /// SHA-256 of its bytes, hexadecimal.
    pub sha256: String,
}

#[derive(Serialize)]
struct Document<'a> {
    program: String,
    comet: &'a str,
    date: Option<&'a str>,
    inputs: &'a [Input],
    geometry: GeometryOut,
    seed: u64,
    draws: usize,
    fits: Vec<FitOut>,
    bands: Vec<BandOut<'a>>,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    dust: Vec<DustOut>,
    species: Vec<SpeciesOut<'a>>,
    lines: Vec<LinesOut<'a>>,
    ratios: Vec<RatioOut<'a>>,
    standings: Vec<StandingOut<'a>>,
    caveats: Vec<CaveatOut>,
    sources: Vec<SourceOut<'a>>,
}

#[derive(Serialize)]
struct GeometryOut {
    #[serde(flatten)]
    geometry: Geometry,
    aperture_arcsec2: Option<f64>,
    aperture_cm2: Option<f64>,
}

#[derive(Serialize)]
struct FitOut {
    spectrum: String,
    window_aa: [f64; 2],
    chi2: Option<f64>,
    dof: usize,
    continuum_order: usize,
    errors_estimated: bool,
    errors_scaled: Option<f64>,
    correlation_factor: Option<f64>,
    samples_clipped: usize,
}

#[derive(Serialize)]
struct DustOut {
    spectrum: String,
    window_aa: [f64; 2],
    reddening_percent_per_1000_aa: Option<f64>,
    reddening_sigma: Option<f64>,
    afrho: Vec<AfrhoOut>,
    temperature_k: Option<f64>,
    temperature_sigma_k: Option<f64>,
    thermal_erg_s_cm2_aa: Option<f64>,
    thermal_sigma_erg_s_cm2_aa: Option<f64>,
}

#[derive(Serialize)]
struct AfrhoOut {
    wavelength_aa: f64,
    afrho_cm: Option<f64>,
    afrho_sigma_cm: Option<f64>,
}

#[derive(Serialize)]
struct BandOut<'a> {
    id: &'a str,
    species: Option<&'a str>,
    centre_aa: Option<f64>,
    centre_sigma_aa: Option<f64>,
    fwhm_aa: Option<f64>,
    fwhm_sigma_aa: Option<f64>,
    flux_erg_s_cm2: Option<f64>,
    flux_sigma_erg_s_cm2: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    flux_low68_erg_s_cm2: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    flux_high68_erg_s_cm2: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    temperature_k: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    temperature_sigma_k: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    wings: Option<[f64; 2]>,
    detected: bool,
    flux_limit_erg_s_cm2: Option<f64>,
    g_photons_s: Option<f64>,
    g_relative_sigma: Option<f64>,
    g_source: Option<&'a str>,
    column_cm2: Option<f64>,
    column_sigma_cm2: Option<f64>,
}

#[derive(Serialize)]
struct SpeciesOut<'a> {
    species: &'a str,
    detected: bool,
    molecules: Option<f64>,
    molecules_sigma: Option<f64>,
    column_cm2: Option<f64>,
    column_sigma_cm2: Option<f64>,
    production_per_s: Option<f64>,
    production_sigma_per_s: Option<f64>,
    parent_km: Option<f64>,
    daughter_km: Option<f64>,
    speed_km_s: Option<f64>,
    lengths_source: Option<&'a str>,
}

#[derive(Serialize)]
struct RatioOut<'a> {
    of: &'a str,
    to: &'a str,
    basis: crate::ratio::Basis,
    kind: crate::ratio::RatioKind,
    median: Option<f64>,
    low68: Option<f64>,
    high68: Option<f64>,
    low95: Option<f64>,
    high95: Option<f64>,
    log10_median: Option<f64>,
    log10_low68: Option<f64>,
    log10_high68: Option<f64>,
    limit: Option<f64>,
    beside: &'a [crate::analysis::Beside],
}

#[derive(Serialize)]
struct StandingOut<'a> {
    of: &'a str,
    to: &'a str,
    comets: usize,
    percentile: Option<f64>,
    percentile_low: Option<f64>,
    percentile_high: Option<f64>,
}

#[derive(Serialize)]
struct CaveatOut {
    code: &'static str,
    text: String,
}

#[derive(Serialize)]
struct SourceOut<'a> {
    key: &'a str,
    reference: &'a str,
}

/// The result as JSON, indented, ending with a newline. Absent values are null; a number that is
/// not finite counts as absent.
pub fn result_json(analysis: &Analysis, settings: &Settings, inputs: &[Input]) -> String {
    let document = Document {
        program: format!("comagauge {}", env!("CARGO_PKG_VERSION")),
        comet: &settings.label,
        date: settings.date.as_deref(),
        inputs,
        geometry: GeometryOut {
            geometry: settings.geometry,
            aperture_arcsec2: finite(settings.aperture.area_arcsec2()),
            aperture_cm2: finite(analysis.aperture_cm2),
        },
        seed: settings.draws.seed,
        draws: settings.draws.count,
        fits: fits(analysis),
        bands: analysis.bands.iter().map(band).collect(),
        dust: dust(analysis),
        species: analysis
            .species
            .iter()
            .map(|s| species(s, settings))
            .collect(),
        lines: analysis.by_line.iter().map(lines_out).collect(),
        ratios: analysis
            .ratios
            .iter()
            .zip(&settings.ratios)
            .map(|(r, s)| ratio(r, s))
            .collect(),
        standings: analysis.ratios.iter().filter_map(standing).collect(),
        caveats: analysis
            .caveats
            .iter()
            .map(|c| CaveatOut {
                code: c.code(),
                text: c.to_string(),
            })
            .collect(),
        sources: settings
            .sources
            .iter()
            .map(|(key, reference)| SourceOut { key, reference })
            .collect(),
    };
    let mut text = serde_json::to_string_pretty(&document)
        .expect("invariant: the document has string keys only");
    text.push('\n');
    text
}

fn finite(v: f64) -> Option<f64> {
    v.is_finite().then_some(v)
}

fn fits(analysis: &Analysis) -> Vec<FitOut> {
    analysis
        .fits
        .iter()
        .flat_map(|(_, fit)| {
            fit.windows.iter().map(|w| FitOut {
                spectrum: fit.label.clone(),
                window_aa: [w.window_aa.0, w.window_aa.1],
                chi2: finite(w.chi2),
                dof: w.dof,
                continuum_order: w.continuum_order,
                errors_estimated: w.errors_estimated,
                errors_scaled: w.errors_scaled,
                correlation_factor: w.inflation,
                samples_clipped: w
                    .samples
                    .iter()
                    .filter(|s| s.sample_use == SampleUse::Clipped)
                    .count(),
            })
        })
        .collect()
}

fn band(b: &BandResult) -> BandOut<'_> {
    BandOut {
        id: &b.fit.id,
        species: b.species.as_ref().map(crate::ground::Species::as_str),
        centre_aa: finite(b.fit.centre_aa),
        centre_sigma_aa: b.fit.centre_sigma_aa.and_then(finite),
        fwhm_aa: finite(b.fit.fwhm_aa),
        fwhm_sigma_aa: b.fit.fwhm_sigma_aa.and_then(finite),
        flux_erg_s_cm2: finite(b.fit.flux_erg_s_cm2.value),
        flux_sigma_erg_s_cm2: finite(b.fit.flux_erg_s_cm2.sigma),
        flux_low68_erg_s_cm2: b.fit.flux_interval_erg_s_cm2.and_then(|i| finite(i.0)),
        flux_high68_erg_s_cm2: b.fit.flux_interval_erg_s_cm2.and_then(|i| finite(i.1)),
        temperature_k: b.fit.temperature_k.and_then(|t| finite(t.0)),
        temperature_sigma_k: b.fit.temperature_k.and_then(|t| finite(t.1?)),
        wings: b.fit.wings.map(|w| [w[0].0, w[1].0]),
        detected: b.fit.detected,
        flux_limit_erg_s_cm2: b.fit.flux_limit_erg_s_cm2.and_then(finite),
        g_photons_s: b.efficiency.as_ref().map(|g| g.g_photons_s),
        g_relative_sigma: b.efficiency.as_ref().map(|g| g.relative_sigma),
        g_source: b.efficiency.as_ref().map(|g| g.source.as_str()),
        column_cm2: b.column_cm2.and_then(|c| finite(c.value)),
        column_sigma_cm2: b.column_cm2.and_then(|c| finite(c.sigma)),
    }
}

fn dust(analysis: &Analysis) -> Vec<DustOut> {
    let label = |i: usize| {
        let found = analysis.fits.iter().find(|(of, _)| *of == i);
        found.map_or_else(String::new, |(_, f)| f.label.clone())
    };
    let dust = analysis.dust.iter().map(|d| DustOut {
        spectrum: label(d.spectrum),
        window_aa: [d.window_aa.0, d.window_aa.1],
        reddening_percent_per_1000_aa: d.reddening_percent.and_then(|s| finite(s.value)),
        reddening_sigma: d.reddening_percent.and_then(|s| finite(s.sigma)),
        afrho: d
            .afrho_cm
            .iter()
            .map(|(x, a)| AfrhoOut {
                wavelength_aa: *x,
                afrho_cm: finite(a.value),
                afrho_sigma_cm: finite(a.sigma),
            })
            .collect(),
        temperature_k: d.temperature_k.and_then(|t| finite(t.0)),
        temperature_sigma_k: d.temperature_k.and_then(|t| finite(t.1?)),
        thermal_erg_s_cm2_aa: d.thermal_erg_s_cm2_aa.and_then(|t| finite(t.value)),
        thermal_sigma_erg_s_cm2_aa: d.thermal_erg_s_cm2_aa.and_then(|t| finite(t.sigma)),
    });
    dust.collect()
}

fn species<'a>(s: &'a SpeciesResult, settings: &'a Settings) -> SpeciesOut<'a> {
    let coma = settings
        .species
        .iter()
        .find(|t| t.species == s.species)
        .and_then(|t| t.coma.as_ref());
    SpeciesOut {
        species: s.species.as_str(),
        detected: s.detected,
        molecules: finite(s.molecules.value),
        molecules_sigma: finite(s.molecules.sigma),
        column_cm2: finite(s.column_cm2.value),
        column_sigma_cm2: finite(s.column_cm2.sigma),
        production_per_s: s.production_per_s.and_then(|q| finite(q.value)),
        production_sigma_per_s: s.production_per_s.and_then(|q| finite(q.sigma)),
        parent_km: coma.map(|c| c.lengths.parent_km),
        daughter_km: coma.and_then(|c| c.lengths.daughter_km),
        speed_km_s: coma.map(|c| c.speed_km_s),
        lengths_source: coma.map(|c| c.source.as_str()),
    }
}

fn ratio<'a>(r: &'a RatioResult, settings: &'a RatioSettings) -> RatioOut<'a> {
    let linear = r.ratio.interval;
    let log = r.ratio.log10();
    RatioOut {
        of: r.ratio.of.as_str(),
        to: r.ratio.to.as_str(),
        basis: r.ratio.basis,
        kind: r.ratio.kind,
        median: linear.and_then(|i| finite(i.median)),
        low68: linear.and_then(|i| finite(i.low68)),
        high68: linear.and_then(|i| finite(i.high68)),
        low95: linear.and_then(|i| finite(i.low95)),
        high95: linear.and_then(|i| finite(i.high95)),
        log10_median: log.and_then(|i| finite(i.median)),
        log10_low68: log.and_then(|i| finite(i.low68)),
        log10_high68: log.and_then(|i| finite(i.high68)),
        limit: r.ratio.limit.and_then(finite),
        beside: &settings.beside,
    }
}

fn standing(r: &RatioResult) -> Option<StandingOut<'_>> {
    if r.known.is_empty() {
        return None;
    }
    Some(StandingOut {
        of: r.ratio.of.as_str(),
        to: r.ratio.to.as_str(),
        comets: r.known.len(),
        percentile: r.standing.and_then(|s| finite(s.percentile)),
        percentile_low: r.standing.and_then(|s| finite(s.percentile_low)),
        percentile_high: r.standing.and_then(|s| finite(s.percentile_high)),
    })
}
