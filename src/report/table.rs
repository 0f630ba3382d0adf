//! The table for people.

use crate::analysis::{Analysis, BandResult, RatioResult, Settings, SpeciesResult};
use crate::by_line::ByLine;
use crate::dust::DustResult;
use crate::ground::Measured;
use crate::ratio::RatioKind;
use comfy_table::presets;
use comfy_table::{CellAlignment, Table};

/// A compact summary: geometry, bands, species, ratios with their standing, caveats.
pub fn summary_table(analysis: &Analysis, settings: &Settings) -> String {
    let g = settings.geometry;
    let mut out = format!(
        "{}{}   r_h {} au, ṙ_h {:+} km/s   Δ {} au, Δ̇ {:+} km/s\n\n",
        settings.label,
        settings
            .date
            .as_ref()
            .map_or_else(String::new, |d| format!(", {d}")),
        g.heliocentric_au,
        g.heliocentric_km_s,
        g.observer_au,
        g.observer_km_s
    );
    out.push_str(&bands(&analysis.bands));
    if !analysis.species.is_empty() {
        out.push('\n');
        out.push_str(&species(&analysis.species));
    }
    if !analysis.by_line.is_empty() {
        out.push('\n');
        out.push_str(&by_line(&analysis.by_line));
    }
    if !analysis.ratios.is_empty() {
        out.push('\n');
        out.push_str(&ratios(&analysis.ratios));
        out.push_str(&beside(analysis, settings));
    }
    if !analysis.dust.is_empty() {
        out.push('\n');
        out.push_str(&dust(&analysis.dust));
    }
    if !analysis.caveats.is_empty() {
        out.push_str("\nCaveats\n");
        for caveat in &analysis.caveats {
            out.push_str(&format!("  {}: {caveat}\n", caveat.code()));
        }
    }
    out
}

pub(super) fn grid(header: &[&str], rows: Vec<Vec<String>>) -> String {
    let mut table = Table::new();
    table.load_style(presets::NOTHING).set_header(header);
    for row in rows {
        table.add_row(row);
    }
    for (i, column) in table.column_iter_mut().enumerate() {
        column.set_padding((0, 2));
        if i > 0 {
            column.set_cell_alignment(CellAlignment::Right);
        }
    }
    let text = table.to_string();
    text.lines()
        .map(|l| l.trim_end().to_owned() + "\n")
        .collect()
}

fn bands(list: &[BandResult]) -> String {
    let warm = list.iter().any(|b| b.fit.temperature_k.is_some());
    let rows = list
        .iter()
        .map(|b| {
            let f = &b.fit;
            let flux = if f.detected {
                pair(f.flux_erg_s_cm2)
            } else {
                format!(
                    "< {}",
                    f.flux_limit_erg_s_cm2.map_or_else(String::new, power)
                )
            };
            let mut row = vec![
                f.id.clone(),
                format!("{:.2}", f.centre_aa),
                format!("{:.2}", f.fwhm_aa),
                flux,
                format!("{:.1}", f.flux_erg_s_cm2.signal_to_noise()),
                b.efficiency
                    .as_ref()
                    .map_or_else(|| "–".to_owned(), |g| format!("{:.3e}", g.g_photons_s)),
                b.column_cm2
                    .filter(|_| f.detected)
                    .map_or_else(|| "–".to_owned(), pair),
            ];
            if warm {
                row.push(match f.temperature_k {
                    Some((k, Some(sigma))) => format!("{k:.1} ± {sigma:.1}"),
                    Some((k, None)) => format!("{k:.1} held"),
                    None => "–".to_owned(),
                });
            }
            row
        })
        .collect();
    let mut header = vec![
        "band",
        "centre Å",
        "FWHM Å",
        "flux erg/s/cm²",
        "S/N",
        "g photons/s",
        "column cm⁻²",
    ];
    if warm {
        header.push("T_rot K");
    }
    grid(&header, rows)
}

/// More windows than this share one line.
const MOST_DUST_ROWS: usize = 6;
/// A reddening with a larger error, % per 1000 Å, is not shown: its window is too narrow.
const USELESS_REDDENING: f64 = 100.0;

/// The dust of many narrow windows in one line.
fn many_windows(list: &[DustResult]) -> String {
    let mut values: Vec<f64> = list
        .iter()
        .flat_map(|d| &d.afrho_cm)
        .map(|(_, a)| a.value)
        .collect();
    values.sort_by(f64::total_cmp);
    let (Some(least), Some(most)) = (values.first(), values.last()) else {
        return String::new();
    };
    format!(
        "dust in {} windows, {:.0}–{:.0} Å: A(θ)fρ {:.0} cm in the median, {least:.0} to {most:.0}\n",
        list.len(),
        list[0].window_aa.0,
        list[list.len() - 1].window_aa.1,
        values[values.len() / 2]
    )
}

fn dust(list: &[DustResult]) -> String {
    let digits = |m: Measured, unit: &str| {
        let digits = (1 - m.sigma.log10().floor() as i32).clamp(0, 4) as usize;
        format!("{:.digits$} ± {:.digits$}{unit}", m.value, m.sigma)
    };
    let dash = || "–".to_owned();
    if list.len() > MOST_DUST_ROWS {
        return many_windows(list);
    }
    let rows = list
        .iter()
        .map(|d| {
            let afrho: Vec<String> = d
                .afrho_cm
                .iter()
                .map(|(x, a)| format!("{} at {x:.0} Å", digits(*a, "")))
                .collect();
            vec![
                format!("{:.0}–{:.0}", d.window_aa.0, d.window_aa.1),
                d.reddening_percent
                    .filter(|s| s.sigma < USELESS_REDDENING)
                    .map_or_else(dash, |s| digits(s, "")),
                if afrho.is_empty() {
                    dash()
                } else {
                    afrho.join("; ")
                },
                match d.temperature_k {
                    Some((k, Some(sigma))) => digits(Measured::new(k, sigma), ""),
                    Some((k, None)) => format!("{k:.0} held"),
                    None => dash(),
                },
            ]
        })
        .collect();
    grid(
        &[
            "dust in Å",
            "reddening %/1000 Å",
            "A(θ)fρ cm",
            "temperature K",
        ],
        rows,
    )
}

fn species(list: &[SpeciesResult]) -> String {
    let rows = list
        .iter()
        .map(|s| {
            let shown = |m: Measured| {
                if s.detected {
                    pair(m)
                } else {
                    format!("({})", pair(m))
                }
            };
            vec![
                s.species.to_string(),
                shown(s.column_cm2),
                s.production_per_s.map_or_else(|| "–".to_owned(), shown),
            ]
        })
        .collect();
    grid(&["species", "column cm⁻²", "Q s⁻¹"], rows)
}

fn ratios(list: &[RatioResult]) -> String {
    let rows = list
        .iter()
        .map(|r| {
            let name = format!("{}/{}", r.ratio.of, r.ratio.to);
            let (value, range) = match (r.ratio.kind, r.ratio.interval) {
                (RatioKind::Value, Some(i)) => (
                    plain(i.median),
                    format!("{} – {}", plain(i.low68), plain(i.high68)),
                ),
                (RatioKind::Upper, _) => (
                    format!("< {}", r.ratio.limit.map_or_else(String::new, plain)),
                    "99.7 % limit".into(),
                ),
                (RatioKind::Lower, _) => (
                    format!("> {}", r.ratio.limit.map_or_else(String::new, plain)),
                    "99.7 % limit".into(),
                ),
                _ => ("unconstrained".to_owned(), String::new()),
            };
            let standing = match r.standing {
                Some(s) => format!(
                    "above {:.0} ({:.0}–{:.0}) % of {}",
                    s.percentile,
                    s.percentile_low,
                    s.percentile_high,
                    comets(s.comets)
                ),
                None if r.known.is_empty() => "nothing to compare with".to_owned(),
                None => format!("{} to compare with", comets(r.known.len())),
            };
            vec![name, value, range, standing]
        })
        .collect();
    grid(&["ratio", "median", "68 % interval", "standing"], rows)
}

/// Means over single lines beside the column in use.
fn by_line(list: &[ByLine]) -> String {
    let rows = list
        .iter()
        .map(|s| {
            let discordant = s.lines.iter().filter(|l| l.discordant).count();
            let mark = |used: bool, text: String| if used { format!("{text} ←") } else { text };
            vec![
                s.species.to_string(),
                s.lines.len().to_string(),
                s.features.to_string(),
                discordant.to_string(),
                pair(s.mean_cm2),
                format!("{:.2}", s.reduced_chi2),
                mark(s.robust, pair(s.robust_cm2)),
                format!("{:.2}", s.robust_reduced_chi2),
                format!("{:.2}", s.error_factor),
            ]
        })
        .collect();
    grid(
        &[
            "line by line",
            "lines",
            "unblended",
            "discordant",
            "weighted mean cm⁻²",
            "χ²/ν",
            "robust mean cm⁻²",
            "χ²/ν",
            "error ×",
        ],
        rows,
    )
}

/// log10 of ratios with published values to read them beside.
fn beside(analysis: &Analysis, settings: &Settings) -> String {
    let mut out = String::new();
    for (r, s) in analysis.ratios.iter().zip(&settings.ratios) {
        let Some(log) = r.ratio.log10().filter(|_| !s.beside.is_empty()) else {
            continue;
        };
        let others: Vec<String> = s
            .beside
            .iter()
            .map(|b| {
                let sigma = b
                    .log10_sigma
                    .map_or_else(String::new, |s| format!(" ± {s:.2}"));
                let memory = if b.from_memory { ", from memory" } else { "" };
                format!("{} {:.2}{sigma} ({}{memory})", b.what, b.log10, b.source)
            })
            .collect();
        out.push_str(&format!(
            "log10 {}/{} = {:.3} ({:.3} – {:.3}); {}\n",
            r.ratio.of,
            r.ratio.to,
            log.median,
            log.low68,
            log.high68,
            others.join("; ")
        ));
    }
    out
}

fn comets(count: usize) -> String {
    match count {
        1 => "1 comet".to_owned(),
        n => format!("{n} comets"),
    }
}

/// Value ± sigma with one power of ten and two digits of the error.
fn pair(m: Measured) -> String {
    if !(m.value.is_finite() && m.sigma.is_finite()) {
        return "–".to_owned();
    }
    let largest = m.value.abs().max(m.sigma);
    if largest == 0.0 {
        return "0".to_owned();
    }
    let exponent = largest.log10().floor() as i32;
    let unit = 10f64.powi(exponent);
    let digits = (1 - (m.sigma / unit).log10().floor() as i32).clamp(0, 6) as usize;
    format!(
        "({:.digits$} ± {:.digits$})e{exponent}",
        m.value / unit,
        m.sigma / unit
    )
}

pub(super) fn power(v: f64) -> String {
    format!("{v:.2e}")
}

/// Three digits, plain between 0.001 and 1000.
pub(super) fn plain(v: f64) -> String {
    if v == 0.0 || !(1e-3..1e3).contains(&v.abs()) {
        return format!("{v:.2e}");
    }
    let digits = (2 - v.abs().log10().floor() as i32).max(0) as usize;
    format!("{v:.digits$}")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_for_people() {
        assert_eq!(
            pair(Measured::new(1.234e-14, 5.6e-16)),
            "(1.234 ± 0.056)e-14"
        );
        assert_eq!(pair(Measured::new(-2.0, 30.0)), "(-0.2 ± 3.0)e1");
        assert_eq!(plain(0.12345), "0.123");
        assert_eq!(plain(0.000012), "1.20e-5");
    }
}
