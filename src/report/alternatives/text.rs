//! Tables for people.

use crate::alternatives::{Alternatives, Choice, Found, RatioSpread, Row};
use crate::analysis::Settings;
use crate::ratio::RatioKind;
use crate::report::table::{grid, plain};

/// Ratios side by side in one table.
const RATIOS_ACROSS: usize = 4;
const NOTHING: &str = "–";

/// Which model the data prefer, each ratio under each choice, and how far the ratios move.
pub fn alternatives_table(found: &Alternatives, settings: &Settings) -> String {
    let mut out = format!(
        "How much does the answer depend on the choices? {}\n\n",
        settings.label
    );
    out.push_str(&criteria_table(&found.rows));
    out.push_str(
        "\nΔ is the alternative minus the plan: below −10 the data clearly prefer the alternative, above +10 in\n\
         AICc they rule it out. p is the chance that noise alone makes the larger of the two models look as much\n\
         better. – where the samples differ or neither model contains the other.\n",
    );
    for row in found.rows.iter().filter(|r| r.failure.is_some()) {
        let why = row.failure.as_deref().unwrap_or_default();
        out.push_str(&format!("{}: no result: {why}\n", row.choice));
    }
    let names: Vec<&str> = found.spreads.iter().map(|s| s.ratio.as_str()).collect();
    for from in (0..names.len()).step_by(RATIOS_ACROSS) {
        let to = (from + RATIOS_ACROSS).min(names.len());
        out.push('\n');
        out.push_str(&ratio_table(&found.rows, &names, from..to));
    }
    if !found.spreads.is_empty() {
        out.push_str(
            "\nIn brackets: shift of log10 in units of the plan's error bar; × marks what the data rule out.\n\
             A band alone in its window can always be left unused.\n\n",
        );
        out.push_str(&spread_table(&found.spreads));
        out.push_str(
            "\nIn log10 (dex). Error bar: half the 68.3 % interval; noise: the same without calibration, g, scale\n\
             lengths and speed; range: largest minus smallest median of plan and alternatives; full range: with those\n\
             that the data rule out, which count nowhere else.\n",
        );
    }
    if !found.caveats.is_empty() {
        out.push_str("\nCaveats\n");
        for caveat in &found.caveats {
            out.push_str(&format!("  {}: {caveat}\n", caveat.code()));
        }
    }
    out
}

fn criteria_table(rows: &[Row]) -> String {
    let signed = |v: Option<f64>| v.map_or_else(|| NOTHING.to_owned(), |v| format!("{v:+.1}"));
    let cells = rows.iter().map(|row| {
        let planned = row.choice == Choice::Planned;
        let (chi2, dof) = row.quality.map_or_else(
            || (NOTHING.to_owned(), NOTHING.to_owned()),
            |q| (format!("{:.1}", q.chi2), q.dof.to_string()),
        );
        let p = match row.f_test {
            _ if planned => String::new(),
            _ if row.same_fit => "same fit".to_owned(),
            Some(test) => probability(test.p),
            None => NOTHING.to_owned(),
        };
        let difference = |v| if planned { String::new() } else { signed(v) };
        vec![
            row.choice.to_string(),
            chi2,
            dof,
            difference(row.aicc_difference),
            difference(row.bic_difference),
            p,
        ]
    });
    let header = ["choice", "χ²", "dof", "Δ AICc", "Δ BIC", "F-test p"];
    grid(&header, cells.collect())
}

fn probability(p: f64) -> String {
    match p {
        0.0 => "< 1e-300".to_owned(),
        p if p < 1e-3 => format!("{p:.0e}"),
        p => format!("{p:.3}"),
    }
}

fn ratio_table(rows: &[Row], names: &[&str], across: std::ops::Range<usize>) -> String {
    let mut header = vec!["choice"];
    header.extend(&names[across.clone()]);
    let cells = rows.iter().filter(|r| r.failure.is_none()).map(|row| {
        let ratios = row.ratios[across.clone()].iter();
        let mark = if row.ruled_out { " ×" } else { "" };
        std::iter::once(format!("{}{mark}", row.choice))
            .chain(ratios.map(|f| value(f.as_ref(), row)))
            .collect()
    });
    grid(&header, cells.collect())
}

fn value(found: Option<&Found>, row: &Row) -> String {
    let Some(found) = found else {
        return NOTHING.to_owned();
    };
    let limit = || found.limit.map_or_else(String::new, plain);
    match (found.kind, found.interval) {
        (RatioKind::Value, Some(i)) if row.choice == Choice::Planned => plain(i.median),
        _ if found.unchanged && row.choice != Choice::Planned => "same".to_owned(),
        (RatioKind::Value, Some(i)) => match found.shift_sigma {
            Some(s) => format!("{} ({s:+.1})", plain(i.median)),
            None => plain(i.median),
        },
        (RatioKind::Upper, _) => format!("< {}", limit()),
        (RatioKind::Lower, _) => format!("> {}", limit()),
        _ => "unconstrained".to_owned(),
    }
}

fn spread_table(spreads: &[RatioSpread]) -> String {
    let dex = |v: Option<f64>| v.map_or_else(|| NOTHING.to_owned(), |v| format!("{v:.3}"));
    let rows = spreads.iter().map(|s| {
        vec![
            s.ratio.clone(),
            s.error_bar_dex
                .map_or_else(|| NOTHING.to_owned(), |v| format!("± {v:.3}")),
            s.noise_dex
                .map_or_else(|| NOTHING.to_owned(), |v| format!("± {v:.3}")),
            s.alternatives.to_string(),
            dex(s.range_dex),
            dex(s.deviation_dex),
            dex(s.full_range_dex),
            s.farthest.as_ref().map_or_else(
                || NOTHING.to_owned(),
                |f| format!("{:+.3} {}", f.dex, f.choice),
            ),
        ]
    });
    let header = [
        "ratio",
        "error bar",
        "of it noise",
        "alternatives",
        "range",
        "std. deviation",
        "full range",
        "farthest",
    ];
    grid(&header, rows.collect())
}
