//! Detections against true flux: table, CSV and figure.

use super::cell;
use super::csv_files::table as csv_table;
use super::table::grid;
use crate::analysis::Settings;
use crate::figures::{Curve, CurveFigure, VerticalMark, Width, range_svg};
use crate::ground::Result;
use crate::rehearse::Completeness;
use statrs::distribution::{ContinuousCDF, Normal};

/// For people: per cent detected at each true flux, and what normal errors let expect.
pub fn completeness_table(list: &[Completeness], settings: &Settings) -> String {
    let Some(first) = list.first() else {
        return String::new();
    };
    let over = |c: &Completeness, s: usize| c.steps[s].flux_erg_s_cm2 / c.sigma_erg_s_cm2;
    let mut header = vec!["detected in %".to_owned()];
    header.extend((0..first.steps.len()).map(|s| format!("{} σ", over(first, s))));
    let mut rows: Vec<Vec<String>> = list
        .iter()
        .map(|c| {
            let mut row = vec![c.id.clone()];
            row.extend(c.steps.iter().map(|s| {
                let share = s.detected.value();
                share.map_or_else(|| "–".to_owned(), |v| format!("{:.1}", 100.0 * v))
            }));
            row
        })
        .collect();
    let mut expected = vec!["normal errors".to_owned()];
    expected.extend((0..first.steps.len()).map(|s| {
        let share = expected_share(over(first, s), settings.detection_sigma);
        format!("{:.1}", 100.0 * share)
    }));
    rows.push(expected);
    let header: Vec<&str> = header.iter().map(String::as_str).collect();
    format!(
        "\nDetections against the true flux, in units of the error an absent band has\n{}",
        grid(&header, rows)
    )
}

/// Share of normal values about `over_sigma` that reach the threshold.
fn expected_share(over_sigma: f64, threshold: f64) -> f64 {
    Normal::standard().cdf(over_sigma - threshold)
}

/// One row per band and step.
pub fn completeness_csv(list: &[Completeness]) -> String {
    let header = [
        "band",
        "true_flux_erg_s_cm2",
        "true_flux_over_sigma",
        "trials",
        "detected",
        "detected_low",
        "detected_high",
        "limit_wrong",
    ];
    let rows = list.iter().flat_map(|c| {
        c.steps.iter().map(|s| {
            let bounds = s.detected.bounds();
            vec![
                c.id.clone(),
                cell(s.flux_erg_s_cm2),
                cell(s.flux_erg_s_cm2 / c.sigma_erg_s_cm2),
                s.detected.of.to_string(),
                cell(s.detected.value()),
                cell(bounds.0),
                cell(bounds.1),
                cell(s.limit_wrong.value()),
            ]
        })
    });
    csv_table(&header, rows)
}

/// One curve per band; `None` without any.
///
/// # Errors
/// When the drawing library fails.
pub fn completeness_figure(
    list: &[Completeness],
    settings: &Settings,
    width: Width,
) -> Result<Option<String>> {
    if list.is_empty() {
        return Ok(None);
    }
    let curves = list.iter().map(|c| Curve {
        label: c.id.clone(),
        x: c.steps
            .iter()
            .map(|s| s.flux_erg_s_cm2 / c.sigma_erg_s_cm2)
            .collect(),
        y: c.steps
            .iter()
            .map(|s| s.detected.value().map_or(f64::NAN, |v| 100.0 * v))
            .collect(),
    });
    let figure = CurveFigure {
        title: format!("{}: detections", settings.label),
        x_label: "True flux over its error".to_owned(),
        y_quantity: "Detected".to_owned(),
        y_unit: "%".to_owned(),
        curves: curves.collect(),
        marks: vec![VerticalMark {
            x: settings.detection_sigma,
            label: "threshold".to_owned(),
        }],
        ..CurveFigure::default()
    };
    range_svg(&figure, width).map(Some)
}
