//! Efficiencies as tables and CSV.

use super::request::Places;
use crate::coma::equilibrium::Conditions;
use crate::efficiency::{Along, Detail, EfficiencyRow, EfficiencyTable, Series, Subject};
use crate::ground::air_from_vacuum_aa;

/// `--csv` without a range: one row per line or band.
pub(super) fn table_csv(subject: &Subject, table: &EfficiencyTable) -> String {
    let mut out = "species,wavelength_air_aa,wavelength_vacuum_aa,lower_cm1,upper_cm1,g_photons_s,g_erg_s,g_relative_sigma,source\n".to_owned();
    for row in &table.rows {
        let level = |v: Option<f64>| v.map_or_else(String::new, |v| format!("{v:.3}"));
        out.push_str(&format!(
            "{},{:.4},{:.4},{},{},{:.5e},{:.5e},{:.4},{}\n",
            name(subject, &row.band),
            row.wavelength_air_aa,
            row.wavelength_vacuum_aa,
            level(row.lower_cm1),
            level(row.upper_cm1),
            row.g_photons_s,
            row.g_erg_s,
            row.relative_sigma,
            quoted(&row.source)
        ));
    }
    out
}

/// The species, and the band where there is one.
fn name(subject: &Subject, band: &str) -> String {
    let species = subject.species();
    if band.is_empty() {
        species.to_string()
    } else {
        format!("{species} {band}")
    }
}

fn quoted(text: &str) -> String {
    format!("\"{}\"", text.replace('"', "\"\""))
}

/// A table for people, sources numbered below it.
pub(super) fn table_text(subject: &Subject, table: &EfficiencyTable) -> String {
    let mut out = format!(
        "{:12} {:>11} {:>11} {:>10} {:>10} {:>11} {:>11} {:>6}  source\n",
        "", "air Å", "vacuum Å", "lower cm⁻¹", "upper cm⁻¹", "photons/s", "erg/s", "error"
    );
    let sources = sources(table);
    for row in &table.rows {
        let number = sources.iter().position(|s| **s == *row.source);
        out.push_str(&line(subject, row, number.map_or(0, |n| n + 1)));
    }
    if table.fainter > 0 {
        out.push_str(&format!(
            "{} fainter ones below --threshold\n",
            table.fainter
        ));
    }
    for (i, source) in sources.iter().enumerate() {
        out.push_str(&format!("[{}] {source}\n", i + 1));
    }
    out
}

fn line(subject: &Subject, row: &EfficiencyRow, source: usize) -> String {
    let level = |v: Option<f64>| v.map_or_else(String::new, |v| format!("{v:.2}"));
    format!(
        "{:12} {:11.3} {:11.3} {:>10} {:>10} {:11.4e} {:11.4e} {:>6}  [{source}]\n",
        name(subject, &row.band),
        row.wavelength_air_aa,
        row.wavelength_vacuum_aa,
        level(row.lower_cm1),
        level(row.upper_cm1),
        row.g_photons_s,
        row.g_erg_s,
        format!("{:.0} %", 100.0 * row.relative_sigma),
    )
}

/// The distinct sources, in the order of the rows.
pub(super) fn sources(table: &EfficiencyTable) -> Vec<&str> {
    let mut found: Vec<&str> = Vec::new();
    for row in &table.rows {
        if !found.contains(&&*row.source) {
            found.push(&row.source);
        }
    }
    found
}

/// What was computed, in a few words.
pub(super) fn about(
    subject: &Subject,
    table: &EfficiencyTable,
    at: &Conditions,
    detail: &Detail,
) -> String {
    let place = format!(
        "{} at r_h = {} au, {:+} km/s",
        subject.species(),
        at.heliocentric_au,
        at.heliocentric_km_s
    );
    let errors = match subject {
        Subject::Infrared(_) => "errors: band strength and sunlight",
        _ if detail.bands && matches!(subject, Subject::Bands(_)) => {
            "errors: those of the lines, taken as wrong together"
        }
        _ if detail.draws == 0 => "errors: the line's own transition probability and sunlight",
        _ => "errors: drawn, all transition probabilities and sunlight",
    };
    match table.relaxation_s {
        Some(s) => format!("{place}; equilibrium after about {s:.0} s; {errors}"),
        None => format!("{place}; {errors}"),
    }
}

/// `--csv` with a range: one row per place and line or band.
pub(super) fn range_csv(subject: &Subject, found: &Along, places: &[Conditions]) -> String {
    let mut out = "species,heliocentric_au,heliocentric_km_s,wavelength_air_aa,wavelength_vacuum_aa,g_photons_s,g_erg_s\n".to_owned();
    for series in &found.series {
        let vacuum_aa = series.wavelength_vacuum_aa;
        for (i, at) in places.iter().enumerate() {
            out.push_str(&format!(
                "{},{},{},{:.4},{vacuum_aa:.4},{:.5e},{:.5e}\n",
                name(subject, &series.band),
                at.heliocentric_au,
                at.heliocentric_km_s,
                air_from_vacuum_aa(vacuum_aa),
                series.g_photons_s[i],
                series.g_erg_s[i]
            ));
        }
    }
    out
}

/// A range for people: where each line or band is faintest and brightest.
pub(super) fn range_text(subject: &Subject, found: &Along, places: &Places) -> String {
    let Places::Range(range) = places else {
        return String::new();
    };
    let (unit, of_distance) = if range.of_distance {
        ("au", true)
    } else {
        ("km/s", false)
    };
    let at = |i: usize| {
        let place = &range.places[i];
        if of_distance {
            place.heliocentric_au
        } else {
            place.heliocentric_km_s
        }
    };
    let mut out = format!(
        "{:12} {:>11} {:>12} {:>8} {:>12} {:>8} {:>8}\n",
        "", "air Å", "least ph./s", unit, "most ph./s", unit, "ratio"
    );
    for series in &found.series {
        let (low, high) = ends(series);
        let (least, most) = (series.g_photons_s[low], series.g_photons_s[high]);
        out.push_str(&format!(
            "{:12} {:11.3} {least:12.4e} {:8.2} {most:12.4e} {:8.2} {:8.2}\n",
            name(subject, &series.band),
            air_from_vacuum_aa(series.wavelength_vacuum_aa),
            at(low),
            at(high),
            most / least
        ));
    }
    if found.fainter > 0 {
        out.push_str(&format!("{} fainter ones left out\n", found.fainter));
    }
    out
}

/// Indices of the least and the most photons.
fn ends(series: &Series) -> (usize, usize) {
    let g = &series.g_photons_s;
    let by = |a: &usize, b: &usize| g[*a].total_cmp(&g[*b]);
    let least = (0..g.len()).min_by(by).unwrap_or(0);
    let most = (0..g.len()).max_by(by).unwrap_or(0);
    (least, most)
}
