//! The CSV files, units in the header names.

use super::cell;
use crate::analysis::Analysis;
use crate::fit::{SpectrumFit, WindowFit};

pub(super) fn table(header: &[&str], rows: impl IntoIterator<Item = Vec<String>>) -> String {
    let mut writer = csv::Writer::from_writer(Vec::new());
    writer
        .write_record(header)
        .expect("invariant: writing to memory");
    for row in rows {
        writer
            .write_record(&row)
            .expect("invariant: rows as long as the header");
    }
    String::from_utf8(writer.into_inner().expect("invariant: writing to memory"))
        .expect("invariant: cells are UTF-8")
}

fn name<T: ToString>(value: Option<T>) -> String {
    value.map_or_else(String::new, |v| v.to_string())
}

/// `bands.csv`: one row per band.
pub fn bands_csv(analysis: &Analysis) -> String {
    let header = [
        "id",
        "species",
        "centre_aa",
        "centre_sigma_aa",
        "fwhm_aa",
        "fwhm_sigma_aa",
        "flux_erg_s_cm2",
        "flux_sigma_erg_s_cm2",
        "signal_to_noise",
        "detected",
        "flux_limit_erg_s_cm2",
        "g_photons_s",
        "column_cm2",
        "column_sigma_cm2",
    ];
    let rows = analysis.bands.iter().map(|b| {
        let f = &b.fit;
        vec![
            f.id.clone(),
            name(b.species.as_ref()),
            cell(f.centre_aa),
            cell(f.centre_sigma_aa),
            cell(f.fwhm_aa),
            cell(f.fwhm_sigma_aa),
            cell(f.flux_erg_s_cm2.value),
            cell(f.flux_erg_s_cm2.sigma),
            cell(f.flux_erg_s_cm2.signal_to_noise()),
            f.detected.to_string(),
            cell(f.flux_limit_erg_s_cm2),
            cell(b.efficiency.as_ref().map(|g| g.g_photons_s)),
            cell(b.column_cm2.map(|c| c.value)),
            cell(b.column_cm2.map(|c| c.sigma)),
        ]
    });
    table(&header, rows)
}

/// `species.csv`: one row per species.
pub fn species_csv(analysis: &Analysis) -> String {
    let header = [
        "species",
        "detected",
        "molecules",
        "molecules_sigma",
        "column_cm2",
        "column_sigma_cm2",
        "production_per_s",
        "production_sigma_per_s",
    ];
    let rows = analysis.species.iter().map(|s| {
        vec![
            s.species.to_string(),
            s.detected.to_string(),
            cell(s.molecules.value),
            cell(s.molecules.sigma),
            cell(s.column_cm2.value),
            cell(s.column_cm2.sigma),
            cell(s.production_per_s.map(|q| q.value)),
            cell(s.production_per_s.map(|q| q.sigma)),
        ]
    });
    table(&header, rows)
}

/// `ratios.csv`: one row per ratio, with its standing.
pub fn ratios_csv(analysis: &Analysis) -> String {
    let header = [
        "of",
        "to",
        "basis",
        "kind",
        "median",
        "low68",
        "high68",
        "low95",
        "high95",
        "log10_median",
        "log10_low68",
        "log10_high68",
        "limit",
        "comets",
        "percentile",
        "percentile_low",
        "percentile_high",
    ];
    let rows = analysis.ratios.iter().map(|r| {
        let (i, log) = (r.ratio.interval, r.ratio.log10());
        vec![
            r.ratio.of.to_string(),
            r.ratio.to.to_string(),
            word(&r.ratio.basis),
            word(&r.ratio.kind),
            cell(i.map(|i| i.median)),
            cell(i.map(|i| i.low68)),
            cell(i.map(|i| i.high68)),
            cell(i.map(|i| i.low95)),
            cell(i.map(|i| i.high95)),
            cell(log.map(|i| i.median)),
            cell(log.map(|i| i.low68)),
            cell(log.map(|i| i.high68)),
            cell(r.ratio.limit),
            r.known.len().to_string(),
            cell(r.standing.map(|s| s.percentile)),
            cell(r.standing.map(|s| s.percentile_low)),
            cell(r.standing.map(|s| s.percentile_high)),
        ]
    });
    table(&header, rows)
}

fn word(value: &impl serde::Serialize) -> String {
    match serde_json::to_value(value) {
        Ok(serde_json::Value::String(s)) => s,
        _ => String::new(),
    }
}

/// All results in one table for scripts: one row per band, species and ratio; cells that do not
/// apply are empty.
pub fn summary_csv(analysis: &Analysis) -> String {
    let header = [
        "row",
        "name",
        "detected",
        "flux_erg_s_cm2",
        "flux_sigma_erg_s_cm2",
        "flux_limit_erg_s_cm2",
        "signal_to_noise",
        "column_cm2",
        "column_sigma_cm2",
        "production_per_s",
        "production_sigma_per_s",
        "ratio_kind",
        "ratio_median",
        "ratio_low68",
        "ratio_high68",
        "ratio_limit",
        "comets",
        "percentile",
        "percentile_low",
        "percentile_high",
    ];
    let blank = || vec![String::new(); header.len()];
    let mut rows = Vec::new();
    for b in &analysis.bands {
        let mut row = blank();
        let f = &b.fit;
        row[0] = "band".to_owned();
        row[1].clone_from(&f.id);
        row[2] = f.detected.to_string();
        row[3] = cell(f.flux_erg_s_cm2.value);
        row[4] = cell(f.flux_erg_s_cm2.sigma);
        row[5] = cell(f.flux_limit_erg_s_cm2);
        row[6] = cell(f.flux_erg_s_cm2.signal_to_noise());
        row[7] = cell(b.column_cm2.map(|c| c.value));
        row[8] = cell(b.column_cm2.map(|c| c.sigma));
        rows.push(row);
    }
    for s in &analysis.species {
        let mut row = blank();
        row[0] = "species".to_owned();
        row[1] = s.species.to_string();
        row[2] = s.detected.to_string();
        row[7] = cell(s.column_cm2.value);
        row[8] = cell(s.column_cm2.sigma);
        row[9] = cell(s.production_per_s.map(|q| q.value));
        row[10] = cell(s.production_per_s.map(|q| q.sigma));
        rows.push(row);
    }
    for r in &analysis.ratios {
        let mut row = blank();
        let i = r.ratio.interval;
        row[0] = "ratio".to_owned();
        row[1] = format!("{}/{}", r.ratio.of, r.ratio.to);
        row[11] = word(&r.ratio.kind);
        row[12] = cell(i.map(|i| i.median));
        row[13] = cell(i.map(|i| i.low68));
        row[14] = cell(i.map(|i| i.high68));
        row[15] = cell(r.ratio.limit);
        row[16] = r.known.len().to_string();
        row[17] = cell(r.standing.map(|s| s.percentile));
        row[18] = cell(r.standing.map(|s| s.percentile_low));
        row[19] = cell(r.standing.map(|s| s.percentile_high));
        rows.push(row);
    }
    table(&header, rows)
}

/// `fit.csv`: every sample of every fitted window. One column per band; a band outside its window
/// has an empty cell.
pub fn fit_csv(analysis: &Analysis) -> String {
    let bands: Vec<&str> = analysis.bands.iter().map(|b| b.fit.id.as_str()).collect();
    let band_names: Vec<String> = bands.iter().map(|b| format!("{b}_erg_s_cm2_aa")).collect();
    let mut header = vec![
        "spectrum",
        "window",
        "wavelength_rest_vacuum_aa",
        "flux_erg_s_cm2_aa",
        "sigma_erg_s_cm2_aa",
        "used",
        "continuum_erg_s_cm2_aa",
    ];
    header.extend(band_names.iter().map(String::as_str));
    header.extend(["total_erg_s_cm2_aa", "residual_erg_s_cm2_aa"]);
    let rows = analysis.fits.iter().flat_map(|(_, fit)| {
        fit.windows
            .iter()
            .enumerate()
            .flat_map(|(w, window)| window_rows(fit, w, window, &bands))
    });
    table(&header, rows)
}

fn window_rows(
    fit: &SpectrumFit,
    number: usize,
    window: &WindowFit,
    bands: &[&str],
) -> Vec<Vec<String>> {
    let place: Vec<Option<usize>> = bands
        .iter()
        .map(|b| window.bands.iter().position(|w| w == b))
        .collect();
    window
        .samples
        .iter()
        .map(|s| {
            let mut row = vec![
                fit.label.clone(),
                (number + 1).to_string(),
                cell(s.wavelength_aa),
                cell(s.flux_erg_s_cm2_aa),
                cell(s.sigma_erg_s_cm2_aa),
                s.used.to_string(),
                cell(s.continuum_erg_s_cm2_aa),
            ];
            row.extend(
                place
                    .iter()
                    .map(|p| cell(p.map(|i| s.bands_erg_s_cm2_aa[i]))),
            );
            row.push(cell(s.total_erg_s_cm2_aa));
            row.push(cell(s.flux_erg_s_cm2_aa - s.total_erg_s_cm2_aa));
            row
        })
        .collect()
}
