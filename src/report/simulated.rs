//! A simulated spectrum, and what exposures can show.

use super::csv_files::table as csv_table;
use super::table::{grid, plain, power};
use super::{cell, shortest};
use crate::analysis::Settings;
use crate::figures::{Curve, CurveFigure, Scale, Width, range_svg};
use crate::forward::{Expected, SimulatedSample};
use crate::ground::{Error, Result};
use crate::spectrum::{Column, TextLayout};

/// The spectrum in the units of a layout and under its column names, after a comment line that says
/// `what` it is; `area_arcsec2` divides a surface brightness.
///
/// # Errors
/// A layout that finds its columns by number, other than 1, 2, 3, or that has a mask column.
pub fn simulated_csv(
    samples: &[SimulatedSample],
    layout: &TextLayout,
    area_arcsec2: f64,
    what: &str,
) -> Result<String> {
    let header = [
        name(layout.wavelength.as_ref(), "wavelength", 1)?,
        name(layout.flux.as_ref(), "flux", 2)?,
        name(layout.error.as_ref(), "error", 3)?,
    ];
    if layout.mask.is_some() {
        return Err(refusal("mask"));
    }
    let cells = header.each_ref().map(String::as_str);
    let rows = samples.iter().map(|s| {
        let (unit, flux) = (layout.wavelength_unit, layout.flux_unit);
        let shown = |v: f64| flux.from_erg_s_cm2_aa(v / area_arcsec2, s.wavelength_aa);
        vec![
            shortest(unit.from_vacuum_aa(s.wavelength_aa, layout.medium)),
            shortest(shown(s.flux_erg_s_cm2_aa)),
            shortest(shown(s.sigma_erg_s_cm2_aa)),
        ]
    });
    Ok(format!("# {what}\n{}", csv_table(&cells, rows)))
}

fn name(column: Option<&Column>, default: &str, place: usize) -> Result<String> {
    match column {
        None => Ok(default.to_owned()),
        Some(Column::Name(name)) => Ok(name.clone()),
        Some(Column::Number(n)) if *n == place => Ok(default.to_owned()),
        Some(Column::Number(_)) => Err(refusal(default)),
    }
}

fn refusal(column: &str) -> Error {
    Error::plan(format!(
        "a simulated spectrum has the columns wavelength, flux, error; the plan looks for {column} elsewhere"
    ))
    .remedy("leave out [spectrum.columns] for a simulation, or give names")
}

/// Expected signal-to-noise and faintest ratios for people.
pub fn expected_table(expected: &[Expected], settings: &Settings) -> String {
    let mut out = format!("{}: expected S/N of the bands\n\n", settings.label);
    let times = expected.iter().map(|e| format!("{} s", e.exposure_s));
    let mut header = vec!["band".to_owned(), "flux erg/s/cm²".to_owned()];
    header.extend(times.clone());
    let first = expected.first();
    let rows = first.map_or(0, |e| e.bands.len());
    let rows = (0..rows).map(|b| {
        let mut row = vec![
            expected[0].bands[b].id.clone(),
            power(expected[0].bands[b].flux_erg_s_cm2),
        ];
        row.extend(expected.iter().map(|e| {
            let band = &e.bands[b];
            format!("{:.1}", band.flux_erg_s_cm2 / band.sigma_erg_s_cm2)
        }));
        row
    });
    out.push_str(&sheet(&header, rows.collect()));
    let ratios = first.map_or(0, |e| e.ratios.len());
    if ratios == 0 {
        return out;
    }
    out.push_str(&format!(
        "\nFaintest ratio whose numerator reaches {} σ\n\n",
        settings.detection_sigma
    ));
    let mut header = vec!["ratio".to_owned()];
    header.extend(times);
    let rows = (0..ratios).map(|r| {
        let own = &expected[0].ratios[r];
        let mut row = vec![format!("{}/{}", own.of, own.to)];
        row.extend(expected.iter().map(|e| {
            let ratio = e.ratios[r].ratio;
            ratio.map_or_else(|| "–".to_owned(), plain)
        }));
        row
    });
    out.push_str(&sheet(&header, rows.collect()));
    out.push_str("\nNoise alone; errors of g, calibration, scale lengths and speed come on top.\n");
    out
}

fn sheet(header: &[String], rows: Vec<Vec<String>>) -> String {
    let header: Vec<&str> = header.iter().map(String::as_str).collect();
    grid(&header, rows)
}

/// The same as CSV: one row per exposure and band or ratio.
pub fn expected_csv(expected: &[Expected]) -> String {
    let header = [
        "exposure_s",
        "name",
        "quantity",
        "flux_erg_s_cm2",
        "sigma_erg_s_cm2",
        "signal_to_noise",
        "faintest_ratio",
    ];
    let rows = expected.iter().flat_map(|e| {
        let time = cell(e.exposure_s);
        let bands = e.bands.iter().map({
            let time = time.clone();
            move |b| {
                vec![
                    time.clone(),
                    b.id.clone(),
                    "flux".to_owned(),
                    cell(b.flux_erg_s_cm2),
                    cell(b.sigma_erg_s_cm2),
                    cell(b.flux_erg_s_cm2 / b.sigma_erg_s_cm2),
                    String::new(),
                ]
            }
        });
        let ratios = e.ratios.iter().map(move |r| {
            let mut row = vec![
                time.clone(),
                format!("{}/{}", r.of, r.to),
                "ratio".to_owned(),
            ];
            row.extend([String::new(), String::new(), String::new()]);
            row.push(cell(r.ratio));
            row
        });
        bands.chain(ratios)
    });
    csv_table(&header, rows)
}

/// The faintest ratios against exposure, or nothing when there is no such ratio.
///
/// # Errors
/// None for positive exposures.
pub fn expected_figure(
    expected: &[Expected],
    settings: &Settings,
    width: Width,
) -> Result<Option<String>> {
    let count = expected.first().map_or(0, |e| e.ratios.len());
    let curves: Vec<Curve> = (0..count)
        .filter(|r| expected[0].ratios[*r].ratio.is_some())
        .map(|r| Curve {
            label: format!(
                "{}/{}",
                expected[0].ratios[r].of.pretty(),
                expected[0].ratios[r].to.pretty()
            ),
            x: expected.iter().map(|e| e.exposure_s).collect(),
            y: expected
                .iter()
                .map(|e| e.ratios[r].ratio.unwrap_or(f64::NAN))
                .collect(),
        })
        .collect();
    if curves.is_empty() {
        return Ok(None);
    }
    let figure = CurveFigure {
        title: format!("{}: faintest ratios", settings.label),
        x_label: "exposure (s)".to_owned(),
        y_quantity: format!("ratio detected at {} σ", settings.detection_sigma),
        x_scale: Scale::Log,
        y_scale: Scale::Log,
        curves,
        ..CurveFigure::default()
    };
    range_svg(&figure, width).map(Some)
}
