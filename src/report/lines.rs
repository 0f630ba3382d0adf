//! Species line by line: `lines.csv`, their part of `result.json`, and the excitation figure.

use super::cell;
use super::csv_files::table;
use super::pictures::heading;
use crate::analysis::{Analysis, Settings};
use crate::by_line::{ByLine, LineResult};
use crate::figures::{ExcitationFigure, ExcitationPanel, ExcitationPoint, Width, excitation_svg};
use crate::ground::Result;
use crate::ground::constants::HC_ERG_AA;
use serde::Serialize;

/// Lines whose column is known worse than this, relative to the common one, are not drawn.
const WORST_DRAWN: f64 = 0.5;
/// erg in one eV.
const ERG_PER_EV: f64 = 1.602_176_634e-12;

/// `lines.csv`: one row per line of every `[[lines]]` species.
pub fn lines_csv(analysis: &Analysis) -> String {
    let header = [
        "species",
        "band",
        "wavelength_air_aa",
        "wavelength_vacuum_aa",
        "lower_cm1",
        "upper_cm1",
        "g_photons_s",
        "g_relative_sigma",
        "feature",
        "flux_erg_s_cm2",
        "flux_sigma_erg_s_cm2",
        "model_erg_s_cm2",
        "pull",
        "column_cm2",
        "column_sigma_cm2",
        "others",
        "blend",
        "discordant",
        "weight",
        "source",
    ];
    let rows = analysis
        .by_line
        .iter()
        .flat_map(|s| s.lines.iter().map(|l| row(&s.species.to_string(), l)));
    table(&header, rows)
}

fn row(species: &str, l: &LineResult) -> Vec<String> {
    vec![
        species.to_owned(),
        l.band.clone(),
        format!("{:.3}", l.line.wavelength_air_aa),
        format!("{:.3}", l.line.wavelength_vacuum_aa),
        format!("{:.2}", l.line.lower_cm1),
        format!("{:.2}", l.line.upper_cm1),
        cell(l.line.g_photons_s),
        cell(l.line.relative_sigma),
        (l.feature + 1).to_string(),
        cell(l.flux_erg_s_cm2.value),
        cell(l.flux_erg_s_cm2.sigma),
        cell(l.model_erg_s_cm2),
        format!("{:.2}", l.pull),
        cell(l.column_cm2.value),
        cell(l.column_cm2.sigma),
        format!("{:.3}", l.others),
        l.blend.to_string(),
        l.discordant.to_string(),
        format!("{:.4}", l.weight),
        l.line.source.to_string(),
    ]
}

/// A species in `result.json`.
#[derive(Serialize)]
pub(super) struct LinesOut<'a> {
    species: &'a str,
    robust: bool,
    features: usize,
    mean_column_cm2: Option<f64>,
    mean_column_sigma_cm2: Option<f64>,
    reduced_chi2: Option<f64>,
    robust_column_cm2: Option<f64>,
    robust_column_sigma_cm2: Option<f64>,
    robust_reduced_chi2: Option<f64>,
    error_factor: Option<f64>,
    table: Vec<LineOut<'a>>,
}

#[derive(Serialize)]
struct LineOut<'a> {
    band: &'a str,
    wavelength_air_aa: f64,
    wavelength_vacuum_aa: f64,
    lower_cm1: f64,
    upper_cm1: f64,
    g_photons_s: f64,
    g_relative_sigma: f64,
    feature: usize,
    flux_erg_s_cm2: Option<f64>,
    flux_sigma_erg_s_cm2: Option<f64>,
    model_erg_s_cm2: Option<f64>,
    pull: Option<f64>,
    column_cm2: Option<f64>,
    column_sigma_cm2: Option<f64>,
    others: Option<f64>,
    blend: bool,
    discordant: bool,
    weight: f64,
}

fn finite(v: f64) -> Option<f64> {
    v.is_finite().then_some(v)
}

pub(super) fn lines_out(s: &ByLine) -> LinesOut<'_> {
    LinesOut {
        species: s.species.as_str(),
        robust: s.robust,
        features: s.features,
        mean_column_cm2: finite(s.mean_cm2.value),
        mean_column_sigma_cm2: finite(s.mean_cm2.sigma),
        reduced_chi2: finite(s.reduced_chi2),
        robust_column_cm2: finite(s.robust_cm2.value),
        robust_column_sigma_cm2: finite(s.robust_cm2.sigma),
        robust_reduced_chi2: finite(s.robust_reduced_chi2),
        error_factor: finite(s.error_factor),
        table: s.lines.iter().map(line_out).collect(),
    }
}

fn line_out(l: &LineResult) -> LineOut<'_> {
    LineOut {
        band: &l.band,
        wavelength_air_aa: l.line.wavelength_air_aa,
        wavelength_vacuum_aa: l.line.wavelength_vacuum_aa,
        lower_cm1: l.line.lower_cm1,
        upper_cm1: l.line.upper_cm1,
        g_photons_s: l.line.g_photons_s,
        g_relative_sigma: l.line.relative_sigma,
        feature: l.feature + 1,
        flux_erg_s_cm2: finite(l.flux_erg_s_cm2.value),
        flux_sigma_erg_s_cm2: finite(l.flux_erg_s_cm2.sigma),
        model_erg_s_cm2: finite(l.model_erg_s_cm2),
        pull: finite(l.pull),
        column_cm2: finite(l.column_cm2.value),
        column_sigma_cm2: finite(l.column_cm2.sigma),
        others: finite(l.others),
        blend: l.blend,
        discordant: l.discordant,
        weight: l.weight,
    }
}

/// `excitation.svg`: column of each feature over the robust mean against the energy of its upper
/// level; `None` when no species has a line worth drawing.
///
/// # Errors
/// When the drawing library fails.
pub fn excitation_figure(
    analysis: &Analysis,
    settings: &Settings,
    width: Width,
) -> Result<Option<String>> {
    let panels: Vec<ExcitationPanel> = analysis.by_line.iter().filter_map(panel).collect();
    if panels.is_empty() {
        return Ok(None);
    }
    let figure = ExcitationFigure {
        title: heading(settings),
        x_label: "Energy of the upper level (eV)".to_owned(),
        y_label: "N(line) / N(mean)".to_owned(),
        panels,
    };
    excitation_svg(&figure, width).map(Some)
}

fn panel(s: &ByLine) -> Option<ExcitationPanel> {
    let common = s.robust_cm2.value;
    if common.is_nan() || common <= 0.0 {
        return None;
    }
    let strongest = strongest_of_each(s);
    let ev_per_cm1 = HC_ERG_AA * 1e-8 / ERG_PER_EV;
    let points: Vec<ExcitationPoint> = strongest
        .iter()
        .filter(|l| l.column_cm2.sigma < WORST_DRAWN * common)
        .map(|l| ExcitationPoint {
            x: l.line.upper_cm1 * ev_per_cm1,
            ratio: l.column_cm2.value / common,
            sigma: l.column_cm2.sigma / common,
            blend: !l.counts,
            discordant: l.discordant,
            label: format!("{:.2} Å", l.line.wavelength_air_aa),
        })
        .collect();
    let left = strongest.len() - points.len();
    let blends = points.iter().filter(|p| p.blend).count();
    let mut remark = format!("{} lines", points.len());
    if blends > 0 {
        remark += &format!(" ({blends} blended, open)");
    }
    if left > 0 {
        remark += &format!(", {left} too weak to draw");
    }
    (!points.is_empty()).then(|| ExcitationPanel {
        name: s.species.pretty(),
        remark,
        points,
    })
}

/// The strongest line of every feature.
fn strongest_of_each(s: &ByLine) -> Vec<&LineResult> {
    let mut out: Vec<&LineResult> = Vec::new();
    for l in &s.lines {
        match out.iter_mut().find(|o| o.feature == l.feature) {
            Some(o) if l.line.g_erg_s > o.line.g_erg_s => *o = l,
            Some(_) => {}
            None => out.push(l),
        }
    }
    out
}
