//! Results as figures: translates into the plain structs of [`crate::figures`].

use crate::analysis::{Analysis, RatioResult, Settings};
use crate::figures::{
    Bounds, ComparisonComet, ComparisonValue, FitBand, FitFigure, FitPanel, StandingFigure,
    StandingRow, ThisComet, Width, fit_svg, standing_svg,
};
use crate::fit::{SpectrumFit, WindowFit};
use crate::ground::Result;
use crate::ratio::RatioKind;
use crate::standing::{Distribution, Entry, Known};
use crate::tables::DynamicalClass;

/// Model curves are drawn with this many points per window at least and at most.
const CURVE_POINTS: (usize, usize) = (160, 2000);
/// Points per standard deviation of a line.
const POINTS_PER_SIGMA: f64 = 3.0;
/// Windows longer than this are drawn in µm.
const MICRON_FROM_AA: f64 = 10_000.0;

/// `fit.svg`: one panel per fitted window with data, continuum, bands, total and residuals.
///
/// # Errors
/// When the drawing library fails.
pub fn fit_figure(analysis: &Analysis, settings: &Settings, width: Width) -> Result<String> {
    let windows = || {
        analysis
            .fits
            .iter()
            .flat_map(|(_, fit)| fit.windows.iter().map(move |w| (fit, w)))
    };
    let micron = windows().all(|(_, w)| w.window_aa.0 > MICRON_FROM_AA);
    let (x_unit, aa) = if micron { ("µm", 1e4) } else { ("Å", 1.0) };
    let figure = FitFigure {
        title: heading(settings),
        x_label: format!("Rest wavelength in vacuum ({x_unit})"),
        y_quantity: "Flux density".to_owned(),
        y_unit: "erg s⁻¹ cm⁻² Å⁻¹".to_owned(),
        panels: windows()
            .map(|(fit, window)| panel(analysis, fit, window, aa))
            .collect(),
    };
    fit_svg(&figure, width)
}

pub(super) fn heading(settings: &Settings) -> String {
    match &settings.date {
        Some(date) => format!("{}, {date}", settings.label),
        None => settings.label.clone(),
    }
}

fn panel(analysis: &Analysis, fit: &SpectrumFit, window: &WindowFit, aa: f64) -> FitPanel {
    let (low, high) = window.window_aa;
    let points = curve_points(fit, window);
    let grid: Vec<f64> = (0..points)
        .map(|i| low + (high - low) * i as f64 / (points - 1) as f64)
        .collect();
    let mut total: Vec<f64> = grid.iter().map(|x| window.continuum_at(*x)).collect();
    let continuum = total.clone();
    let mut bands = Vec::new();
    for id in &window.bands {
        let Some(band) = fit.bands.iter().find(|b| b.id == *id) else {
            continue;
        };
        let y: Vec<f64> = match band.integral_aa {
            Some(_) => summed(window, id, &grid),
            None => grid.iter().map(|x| band.at(*x)).collect(),
        };
        for (t, v) in total.iter_mut().zip(&y) {
            *t += v;
        }
        bands.push(FitBand {
            label: band_name(analysis, id),
            y,
        });
    }
    FitPanel {
        caption: if window.errors_estimated {
            "errors estimated from the scatter".to_owned()
        } else {
            format!("χ²/ν = {:.2}", window.chi2 / window.dof as f64)
        },
        x: window
            .samples
            .iter()
            .map(|s| s.wavelength_aa / aa)
            .collect(),
        y: window.samples.iter().map(|s| s.flux_erg_s_cm2_aa).collect(),
        sigma: window
            .samples
            .iter()
            .map(|s| s.sigma_erg_s_cm2_aa)
            .collect(),
        used: window.samples.iter().map(|s| s.used).collect(),
        model: window
            .samples
            .iter()
            .map(|s| s.total_erg_s_cm2_aa)
            .collect(),
        grid_x: grid.iter().map(|x| x / aa).collect(),
        continuum,
        total,
        bands,
        left_out: gaps(window, aa),
    }
}

/// So many points that the narrowest line is drawn smoothly, and no more.
fn curve_points(fit: &SpectrumFit, window: &WindowFit) -> usize {
    let own = fit.bands.iter().filter(|b| window.bands.contains(&b.id));
    let sigma = own
        .map(|b| b.line_sigma_aa)
        .filter(|s| *s > 0.0)
        .fold(f64::INFINITY, f64::min);
    let wanted = POINTS_PER_SIGMA * (window.window_aa.1 - window.window_aa.0) / sigma;
    (wanted as usize).clamp(CURVE_POINTS.0, CURVE_POINTS.1)
}

/// What was summed up of an integrated band, straight between the samples.
fn summed(window: &WindowFit, id: &str, grid: &[f64]) -> Vec<f64> {
    let position = window.bands.iter().position(|b| b == id);
    let samples = &window.samples;
    let at = |i: usize| position.map_or(0.0, |p| samples[i].bands_erg_s_cm2_aa[p]);
    grid.iter()
        .map(|x| {
            let after = samples.partition_point(|s| s.wavelength_aa <= *x);
            if after == 0 || after == samples.len() {
                return 0.0;
            }
            let (a, b) = (&samples[after - 1], &samples[after]);
            let part = (x - a.wavelength_aa) / (b.wavelength_aa - a.wavelength_aa);
            at(after - 1) + part * (at(after) - at(after - 1))
        })
        .collect()
}

/// Species with subscripts, or the identifier of a band without a species.
fn band_name(analysis: &Analysis, id: &str) -> String {
    analysis
        .bands
        .iter()
        .find(|b| b.fit.id == id)
        .and_then(|b| b.species.as_ref())
        .map_or_else(|| id.to_owned(), |s| s.pretty())
}

/// Ranges of neighbouring samples that the fit did not use.
fn gaps(window: &WindowFit, aa: f64) -> Vec<(f64, f64)> {
    let mut out: Vec<(f64, f64)> = Vec::new();
    let samples = &window.samples;
    let mut i = 0;
    while i < samples.len() {
        let start = i;
        while i < samples.len() && !samples[i].used {
            i += 1;
        }
        if i > start + 1 {
            out.push((
                samples[start].wavelength_aa / aa,
                samples[i - 1].wavelength_aa / aa,
            ));
        }
        i += 1;
    }
    out
}

/// `standing.svg`: each ratio on the comparison set; `None` when no ratio was asked for.
///
/// # Errors
/// When the drawing library fails.
pub fn standing_figure(
    analysis: &Analysis,
    settings: &Settings,
    width: Width,
) -> Result<Option<String>> {
    let rows = || {
        let drawn =
            |r: &&RatioResult| !r.known.is_empty() || r.ratio.kind != RatioKind::Unconstrained;
        analysis.ratios.iter().filter(drawn)
    };
    if rows().next().is_none() {
        return Ok(None);
    }
    // Always the same list, so that a class keeps its mark from figure to figure.
    let classes: Vec<String> = DynamicalClass::words().map(str::to_owned).collect();
    let figure = StandingFigure {
        title: String::new(),
        this_label: heading(settings),
        rows: rows().map(|r| row(r, &classes)).collect(),
        classes,
    };
    standing_svg(&figure, width).map(Some)
}

fn row(result: &RatioResult, classes: &[String]) -> StandingRow {
    let ratio = &result.ratio;
    let limits = result
        .known
        .iter()
        .filter(|e| e.known != Known::Value)
        .count();
    let sample: Vec<_> = result.known.iter().map(Entry::censored).collect();
    let this = match (ratio.kind, ratio.interval, ratio.limit) {
        (RatioKind::Value, Some(i), _) if i.median > 0.0 => ThisComet::Measured {
            median: i.median,
            inner: Bounds {
                low: i.low68,
                high: i.high68,
            },
            outer: Bounds {
                low: i.low95,
                high: i.high95,
            },
        },
        (RatioKind::Upper, _, Some(limit)) => ThisComet::UpperLimit(limit),
        (RatioKind::Lower, _, Some(limit)) => ThisComet::LowerLimit(limit),
        _ => ThisComet::Unconstrained,
    };
    StandingRow {
        ratio: format!("{}/{}", ratio.of.pretty(), ratio.to.pretty()),
        comets: result.known.iter().map(|e| comet(e, classes)).collect(),
        cumulative: Distribution::estimate(&sample).map_or_else(Vec::new, |d| d.steps().collect()),
        this,
        count_text: count_text(result.known.len(), limits),
        place_text: result.standing.map_or_else(String::new, |s| {
            format!(
                "percentile {:.0} ({:.0}–{:.0})",
                s.percentile, s.percentile_low, s.percentile_high
            )
        }),
    }
}

/// Remark on the number of comets.
pub(super) fn count_text(comets: usize, limits: usize) -> String {
    match (comets, limits) {
        (1, 0) => "1 comet".to_owned(),
        (n, 0) => format!("{n} comets"),
        (n, 1) => format!("{n} comets, 1 limit"),
        (n, k) => format!("{n} comets, {k} limits"),
    }
}

fn comet(entry: &Entry, classes: &[String]) -> ComparisonComet {
    ComparisonComet {
        name: entry.comet.clone(),
        class: class_index(entry, classes),
        value: published_value(entry),
    }
}

/// Place of an entry's class in the list.
pub(super) fn class_index(entry: &Entry, classes: &[String]) -> usize {
    classes.iter().position(|c| *c == entry.class).unwrap_or(0)
}

/// A published ratio as drawn.
pub(super) fn published_value(entry: &Entry) -> ComparisonValue {
    match entry.known {
        Known::Value => {
            let (minus, plus) = entry.errors.unwrap_or((0.0, 0.0));
            ComparisonValue::Measured {
                value: entry.value,
                bar: Bounds {
                    low: entry.value - minus,
                    high: entry.value + plus,
                },
            }
        }
        Known::Upper => ComparisonValue::UpperLimit(entry.value),
        Known::Lower => ComparisonValue::LowerLimit(entry.value),
    }
}
