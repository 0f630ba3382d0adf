//! Alternatives as tables, CSV, JSON and a figure.

use super::cell;
use super::csv_files::table as csv_table;
use super::table::{grid, plain};
use crate::alternatives::{Alternatives, Choice, Found, RatioSpread, Row};
use crate::analysis::Settings;
use crate::figures::{
    AlternativePanel, AlternativePoint, AlternativesFigure, Bounds, Reach, Width,
};
use crate::ground::Result;
use crate::ratio::{Basis, RatioKind};
use serde::Serialize;

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

fn kind_word(kind: RatioKind) -> &'static str {
    match kind {
        RatioKind::Value => "value",
        RatioKind::Upper => "upper",
        RatioKind::Lower => "lower",
        RatioKind::Unconstrained => "unconstrained",
    }
}

/// `alternatives.csv`: one row per choice and ratio; a single row per choice when no ratio is asked for.
pub fn alternatives_csv(found: &Alternatives, settings: &Settings) -> String {
    let header = [
        "choice",
        "chi2",
        "dof",
        "samples",
        "parameters",
        "aicc_difference",
        "bic_difference",
        "f",
        "f_more_parameters",
        "f_dof",
        "f_p",
        "same_fit",
        "ruled_out",
        "failure",
        "ratio",
        "basis",
        "kind",
        "median",
        "low68",
        "high68",
        "limit",
        "shift_sigma",
    ];
    let rows = found.rows.iter().flat_map(|row| {
        let head = head_cells(row);
        let ratios = settings.ratios.iter().zip(&row.ratios);
        let mut lines: Vec<Vec<String>> = ratios
            .map(|(wanted, f)| {
                let basis = match wanted.basis {
                    Basis::Production => "production",
                    Basis::Column => "column",
                };
                let name = [format!("{}/{}", wanted.of, wanted.to), basis.to_owned()];
                let cells = name.into_iter().chain(ratio_cells(f.as_ref()));
                head.iter().cloned().chain(cells).collect()
            })
            .collect();
        if lines.is_empty() {
            let blank = vec![String::new(); header.len() - head.len()];
            lines.push([head, blank].concat());
        }
        lines
    });
    csv_table(&header, rows)
}

fn head_cells(row: &Row) -> Vec<String> {
    let count = |v: Option<usize>| v.map_or_else(String::new, |v| v.to_string());
    vec![
        row.choice.to_string(),
        cell(row.quality.map(|q| q.chi2)),
        count(row.quality.map(|q| q.dof)),
        count(row.quality.map(|q| q.samples)),
        count(row.quality.map(|q| q.parameters)),
        cell(row.aicc_difference),
        cell(row.bic_difference),
        cell(row.f_test.map(|t| t.f)),
        count(row.f_test.map(|t| t.more)),
        count(row.f_test.map(|t| t.dof)),
        cell(row.f_test.map(|t| t.p)),
        row.same_fit.to_string(),
        row.ruled_out.to_string(),
        row.failure.clone().unwrap_or_default(),
    ]
}

fn ratio_cells(found: Option<&Found>) -> Vec<String> {
    let Some(f) = found else {
        return vec![String::new(); 6];
    };
    vec![
        kind_word(f.kind).to_owned(),
        cell(f.interval.map(|i| i.median)),
        cell(f.interval.map(|i| i.low68)),
        cell(f.interval.map(|i| i.high68)),
        cell(f.limit),
        cell(f.shift_sigma),
    ]
}

#[derive(Serialize)]
struct Document<'a> {
    comet: &'a str,
    choices: Vec<ChoiceOut>,
    spreads: Vec<SpreadOut<'a>>,
    caveats: Vec<CaveatOut>,
}

#[derive(Serialize)]
struct ChoiceOut {
    choice: String,
    chi2: Option<f64>,
    dof: Option<usize>,
    samples: Option<usize>,
    parameters: Option<usize>,
    aicc_difference: Option<f64>,
    bic_difference: Option<f64>,
    f: Option<f64>,
    f_p: Option<f64>,
    same_fit: bool,
    ruled_out: bool,
    failure: Option<String>,
    ratios: Vec<Option<RatioOut>>,
}

#[derive(Serialize)]
struct RatioOut {
    kind: &'static str,
    median: Option<f64>,
    low68: Option<f64>,
    high68: Option<f64>,
    limit: Option<f64>,
    shift_sigma: Option<f64>,
}

#[derive(Serialize)]
struct SpreadOut<'a> {
    ratio: &'a str,
    error_bar_dex: Option<f64>,
    noise_dex: Option<f64>,
    alternatives: usize,
    range_dex: Option<f64>,
    full_range_dex: Option<f64>,
    deviation_dex: Option<f64>,
    farthest: Option<String>,
    farthest_dex: Option<f64>,
    exceeds_error_bar: bool,
}

#[derive(Serialize)]
struct CaveatOut {
    code: &'static str,
    text: String,
}

/// `alternatives.json`. Ratios of each choice stand in the order of `spreads`.
pub fn alternatives_json(found: &Alternatives, settings: &Settings) -> String {
    let spreads = found.spreads.iter().map(|s| SpreadOut {
        ratio: &s.ratio,
        error_bar_dex: s.error_bar_dex,
        noise_dex: s.noise_dex,
        alternatives: s.alternatives,
        range_dex: s.range_dex,
        full_range_dex: s.full_range_dex,
        deviation_dex: s.deviation_dex,
        farthest: s.farthest.as_ref().map(|f| f.choice.to_string()),
        farthest_dex: s.farthest.as_ref().map(|f| f.dex),
        exceeds_error_bar: s.exceeds_error_bar(),
    });
    let caveats = found.caveats.iter().map(|c| CaveatOut {
        code: c.code(),
        text: c.to_string(),
    });
    let document = Document {
        comet: &settings.label,
        choices: found.rows.iter().map(choice_out).collect(),
        spreads: spreads.collect(),
        caveats: caveats.collect(),
    };
    serde_json::to_string_pretty(&document).expect("invariant: plain data") + "\n"
}

fn choice_out(row: &Row) -> ChoiceOut {
    let finite = |v: Option<f64>| v.filter(|v| v.is_finite());
    let ratio = |f: &Found| RatioOut {
        kind: kind_word(f.kind),
        median: finite(f.interval.map(|i| i.median)),
        low68: finite(f.interval.map(|i| i.low68)),
        high68: finite(f.interval.map(|i| i.high68)),
        limit: finite(f.limit),
        shift_sigma: finite(f.shift_sigma),
    };
    ChoiceOut {
        choice: row.choice.to_string(),
        chi2: finite(row.quality.map(|q| q.chi2)),
        dof: row.quality.map(|q| q.dof),
        samples: row.quality.map(|q| q.samples),
        parameters: row.quality.map(|q| q.parameters),
        aicc_difference: row.aicc_difference,
        bic_difference: row.bic_difference,
        f: row.f_test.map(|t| t.f),
        f_p: row.f_test.map(|t| t.p),
        same_fit: row.same_fit,
        ruled_out: row.ruled_out,
        failure: row.failure.clone(),
        ratios: row.ratios.iter().map(|f| f.as_ref().map(ratio)).collect(),
    }
}

/// `alternatives.svg`: a panel per ratio; `None` when no ratio has a value or a limit.
///
/// # Errors
/// When the drawing fails.
pub fn alternatives_figure(
    found: &Alternatives,
    settings: &Settings,
    width: Width,
) -> Result<Option<String>> {
    let rows: Vec<&Row> = found.rows.iter().filter(|r| r.failure.is_none()).collect();
    let panels = settings.ratios.iter().enumerate().map(|(r, wanted)| {
        let points = rows.iter().map(|row| row.ratios[r].and_then(|f| point(&f)));
        AlternativePanel {
            ratio: format!("{}/{}", wanted.of.pretty(), wanted.to.pretty()),
            inner: noise_bounds(found, r),
            points: points.collect(),
        }
    });
    let panels: Vec<AlternativePanel> = panels
        .filter(|p| p.points.iter().any(Option::is_some))
        .collect();
    if panels.is_empty() {
        return Ok(None);
    }
    let figure = AlternativesFigure {
        title: format!("{}: ratios under other choices", settings.label),
        note: "Grey: 68.3 % interval as planned, darker: of noise alone. White points: ruled out by the data."
            .to_owned(),
        labels: rows
            .iter()
            .map(|r| r.choice.to_string().replace(" -", " −"))
            .collect(),
        ruled_out: rows.iter().map(|r| r.ruled_out).collect(),
        panels,
    };
    crate::figures::alternatives_svg(&figure, width).map(Some)
}

/// The planned median with the error bar of noise alone.
fn noise_bounds(found: &Alternatives, r: usize) -> Option<Bounds> {
    let median = found.rows[0].ratios[r]?.log10_median()?;
    let half = found.spreads[r].noise_dex?;
    Some(Bounds {
        low: 10f64.powf(median - half),
        high: 10f64.powf(median + half),
    })
}

fn point(found: &Found) -> Option<AlternativePoint> {
    let positive = |v: &f64| *v > 0.0 && v.is_finite();
    let (value, reach) = match found.kind {
        RatioKind::Value => {
            let i = found.interval?;
            let bounds = Bounds {
                low: i.low68,
                high: i.high68,
            };
            (i.median, Reach::Interval(bounds))
        }
        RatioKind::Upper => (found.limit?, Reach::Below),
        RatioKind::Lower => (found.limit?, Reach::Above),
        RatioKind::Unconstrained => return None,
    };
    positive(&value).then_some(AlternativePoint { value, reach })
}
