//! The tables of a kit: bands, species, ratios.

use super::study::Study;
use super::table::{Cell, Column, Table};
use crate::analysis::{BandResult, RatioResult, SpeciesResult};
use crate::ratio::{Basis, RatioKind};

/// Wavelengths from here are printed in µm.
const MICRON_FROM_AA: f64 = 10_000.0;

/// All tables, several results one under the other with their dates.
pub(super) fn tables(studies: &[Study]) -> Vec<Table> {
    vec![bands(studies), species(studies), ratios(studies)]
}

fn column(title: &str, unit: &str) -> Column {
    Column {
        title: title.to_owned(),
        unit: unit.to_owned(),
    }
}

/// Puts comet and date before rows and columns when there are several results.
fn dated(
    studies: &[Study],
    mut columns: Vec<Column>,
    rows_of: impl Fn(&Study) -> Vec<Vec<Cell>>,
) -> (Vec<Column>, Vec<Vec<Cell>>) {
    let several = studies.len() > 1;
    if several {
        columns.splice(0..0, [column("Comet", ""), column("Date", "")]);
    }
    let mut rows = Vec::new();
    for s in studies {
        for mut row in rows_of(s) {
            if several {
                let date = s.settings.date.clone().unwrap_or_default();
                let label = s.settings.label.clone();
                row.splice(0..0, [Cell::text(label), Cell::text(date)]);
            }
            rows.push(row);
        }
    }
    (columns, rows)
}

fn whose(studies: &[Study]) -> String {
    let mut names: Vec<String> = studies.iter().map(Study::heading).collect();
    names.dedup();
    names.join("; ")
}

fn bands(studies: &[Study]) -> Table {
    let all = || studies.iter().flat_map(|s| &s.analysis.bands);
    let micron = all().all(|b| b.fit.centre_aa >= MICRON_FROM_AA);
    let (unit, aa) = if micron { ("µm", 1e4) } else { ("Å", 1.0) };
    let columns = vec![
        column("Band", ""),
        column("Centre", unit),
        column("FWHM", unit),
        column("Flux", "erg s⁻¹ cm⁻²"),
        column("S/N", ""),
        column("g", "s⁻¹ molecule⁻¹"),
        column("Column density", "cm⁻²"),
    ];
    let (columns, rows) = dated(studies, columns, |s| {
        s.analysis.bands.iter().map(|b| band(b, aa)).collect()
    });
    Table {
        name: "bands",
        caption: format!("Emission bands of {}", whose(studies)),
        note: "Centres are vacuum wavelengths in the rest frame of the comet; a centre or width without error was held. g: photons per second and molecule at the heliocentric distance of the comet. Column densities are means in the aperture; their errors are those of the fit alone.".to_owned(),
        columns,
        rows,
    }
}

fn band(b: &BandResult, aa: f64) -> Vec<Cell> {
    let f = &b.fit;
    let measured = |v: f64, sigma: Option<f64>| match sigma {
        Some(s) => Cell::value(v / aa, s / aa, s / aa),
        None => position(v / aa, aa),
    };
    let (flux, column) = if f.detected {
        let v = f.flux_erg_s_cm2;
        let column = b
            .column_cm2
            .map_or(Cell::Blank, |c| Cell::value(c.value, c.sigma, c.sigma));
        (Cell::value(v.value, v.sigma, v.sigma), column)
    } else {
        let limit = f.flux_limit_erg_s_cm2;
        let per_flux = b.column_cm2.map(|c| c.sigma / f.flux_erg_s_cm2.sigma);
        let column = limit.zip(per_flux).map(|(l, p)| l * p);
        (Cell::limit('<', limit), Cell::limit('<', column))
    };
    let g = b.efficiency.as_ref().map_or(Cell::Blank, |g| {
        let sigma = g.g_photons_s * g.relative_sigma;
        Cell::value(g.g_photons_s, sigma, sigma)
    });
    let noise = f.flux_erg_s_cm2.signal_to_noise();
    vec![
        Cell::text(band_name(b)),
        measured(f.centre_aa, f.centre_sigma_aa),
        measured(f.fwhm_aa, f.fwhm_sigma_aa),
        flux,
        Cell::Number(super::rounding::plain_number(noise, 1), noise),
        g,
        column,
    ]
}

/// `CO₂ 4.26 µm` for `CO2-4.26um`, `CN 3883 Å` for `CN-3883`, `Ni I 3411–3426 Å` for a window; other identifiers as they are.
pub(super) fn band_name(b: &BandResult) -> String {
    let id = super::latex::harmless(&b.fit.id);
    let Some(species) = &b.species else {
        return id;
    };
    let lead = |sign: char| id.strip_prefix(&format!("{species}{sign}"));
    let Some(rest) = lead('-').or(lead(' ')) else {
        return id;
    };
    let is_number = |t: &str| t.parse::<f64>().is_ok_and(|v| v > 0.0);
    let range = rest.split_once('-');
    let range = range.filter(|(low, high)| is_number(low) && is_number(high));
    match (rest.strip_suffix("um"), range) {
        (Some(n), _) if is_number(n) => format!("{} {n} µm", species.pretty()),
        (None, Some((low, high))) => format!("{} {low}–{high} Å", species.pretty()),
        (None, None) if is_number(rest) => format!("{} {rest} Å", species.pretty()),
        _ => id,
    }
}

/// A wavelength or width without error: digits that a reader can use.
fn position(v: f64, aa: f64) -> Cell {
    let decimals = if aa > 1.0 { 4 } else { 1 };
    Cell::Number(super::rounding::plain_number(v, decimals), v)
}

fn species(studies: &[Study]) -> Table {
    let columns = vec![
        column("Species", ""),
        column("Column density", "cm⁻²"),
        column("Q", "s⁻¹"),
        column("Parent length", "km"),
        column("Daughter length", "km"),
        column("Speed", "km s⁻¹"),
    ];
    let (columns, rows) = dated(studies, columns, |s| {
        let all = s.analysis.species.iter();
        all.map(|r| one_species(s, r)).collect()
    });
    Table {
        name: "species",
        caption: format!("Column densities and production rates Q of {}", whose(studies)),
        note: "Errors are half the 68.3 % interval of the draws and include flux calibration, efficiencies, scale lengths and expansion speed. Production rates follow from the Haser model with the listed scale lengths at the heliocentric distance of the comet. Species that were not detected have no value here; see the ratios for limits.".to_owned(),
        columns,
        rows,
    }
}

fn one_species(s: &Study, r: &SpeciesResult) -> Vec<Cell> {
    let mut all = s.settings.species.iter();
    let coma = all
        .find(|t| t.species == r.species)
        .and_then(|t| t.coma.as_ref());
    let shown = |m: crate::ground::Measured| {
        if r.detected {
            Cell::value(m.value, m.sigma, m.sigma)
        } else {
            Cell::Blank
        }
    };
    vec![
        Cell::text(r.species.pretty()),
        shown(r.column_cm2),
        r.production_per_s.map_or(Cell::Blank, shown),
        Cell::bare(coma.map(|c| c.lengths.parent_km)),
        Cell::bare(coma.and_then(|c| c.lengths.daughter_km)),
        Cell::bare(coma.map(|c| c.speed_km_s)),
    ]
}

fn ratios(studies: &[Study]) -> Table {
    let columns = vec![
        column("Ratio", ""),
        column("Value", ""),
        column("95 % interval", ""),
        column("Comets", ""),
        column("Percentile", ""),
    ];
    let (columns, rows) = dated(studies, columns, |s| {
        s.analysis.ratios.iter().map(ratio).collect()
    });
    Table {
        name: "ratios",
        caption: format!("Abundance ratios of {}", whose(studies)),
        note: format!(
            "Ratios of {}: medians with 68.3 % intervals; limits are one-sided at 99.7 %. Comets: published comets with this ratio, one measurement each. Percentile: share of them that lies below, with its 68 % interval.",
            basis(studies)
        ),
        columns,
        rows,
    }
}

/// What the ratios are ratios of.
fn basis(studies: &[Study]) -> &'static str {
    let has = |b: Basis| {
        let mut all = studies.iter().flat_map(|s| &s.analysis.ratios);
        all.any(|r| r.ratio.basis == b)
    };
    match (has(Basis::Production), has(Basis::Column)) {
        (_, false) => "production rates",
        (false, true) => "column densities",
        (true, true) => "production rates or, in some results, column densities",
    }
}

fn ratio(r: &RatioResult) -> Vec<Cell> {
    let i = r.ratio.interval;
    let value = match (r.ratio.kind, i) {
        (RatioKind::Value, Some(i)) => {
            Cell::value(i.median, i.median - i.low68, i.high68 - i.median)
        }
        (RatioKind::Upper, _) => Cell::limit('<', r.ratio.limit),
        (RatioKind::Lower, _) => Cell::limit('>', r.ratio.limit),
        _ => Cell::Blank,
    };
    let wide = i.map_or(Cell::Blank, |i| {
        let places = super::rounding::decimals_of_interval(&i);
        let text = |v: f64| super::rounding::fixed(v, places);
        Cell::text(format!("{}–{}", text(i.low95), text(i.high95)))
    });
    let known = (!r.known.is_empty()).then_some(r.known.len() as f64);
    let percentile = r.standing.map_or(Cell::Blank, |s| {
        Cell::text(format!(
            "{:.0} ({:.0}–{:.0})",
            s.percentile, s.percentile_low, s.percentile_high
        ))
    });
    vec![
        Cell::text(format!("{}/{}", r.ratio.of.pretty(), r.ratio.to.pretty())),
        value,
        wide,
        known.map_or(Cell::Blank, |n| {
            Cell::Number(super::rounding::plain_number(n, 0), n)
        }),
        percentile,
    ]
}
