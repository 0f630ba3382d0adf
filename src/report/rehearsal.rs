//! A rehearsal as a table, a CSV file and a figure.

use super::cell;
use super::csv_files::table as csv_table;
use super::table::{grid, plain, power};
use crate::figures::{CoverageFigure, CoveragePoint, CoverageRow, Width, coverage_svg};
use crate::ground::Result;
use crate::rehearse::{Noise, Quantity, Recovered, Rehearsed, Share};

/// Shares of a normal distribution within one and two standard deviations.
const NOMINAL: (f64, f64) = (0.682_689_492_137_086, 0.954_499_736_103_642);

/// Bias, coverage and detections for people, with a line on what the trials vary.
pub fn rehearsal_table(rehearsed: &Rehearsed, label: &str) -> String {
    let mut out = format!("{label}: {}\n\n", what(rehearsed));
    let rows = rehearsed.rows.iter().map(table_row).collect();
    out.push_str(&grid(
        &[
            "quantity",
            "truth",
            "bias / σ",
            "pull scatter",
            "68.3 % covers",
            "95.4 % covers",
            "detected",
            "limit wrong",
        ],
        rows,
    ));
    out.push_str(
        "\nCoverage in % with 95.4 % binomial (Wilson) bounds; * marks bounds that miss the nominal share.\n\
         Bias is mean(value − truth), of ratios the median, over the median error; fluxes in erg/s/cm².\n",
    );
    out.push_str(intervals_are(rehearsed));
    let missed = |r: &Recovered| r.quantity == Quantity::Ratio && r.detected.count < r.detected.of;
    if rehearsed.rows.iter().any(missed) {
        out.push_str(
            "Only trials that detect both species give an interval of their ratio: where some do not, the\n\
             faint ones are missing, which shifts bias and coverage; their 99.7 % limits are judged at the right.\n",
        );
    }
    if let Some(why) = &rehearsed.first_failure {
        out.push_str(&format!(
            "{} trials gave no answer; the first: {why}\n",
            rehearsed.failed
        ));
    }
    out
}

fn what(rehearsed: &Rehearsed) -> String {
    let noise = match rehearsed.how.noise {
        Noise::Gaussian => "the fitted model with fresh normal noise",
        Noise::Residuals => "the fitted model with its residuals drawn anew",
    };
    format!(
        "{} trials of {noise}, seed {}",
        rehearsed.how.trials, rehearsed.how.seed
    )
}

fn intervals_are(rehearsed: &Rehearsed) -> &'static str {
    if rehearsed.how.full {
        "Ratio intervals are the full ones: they also hold errors of g, calibration, scale lengths and\n\
         speed, which the trials do not vary, and therefore cover too much.\n"
    } else {
        "Ratio intervals hold the noise alone: errors of g, calibration, scale lengths and speed, which\n\
         the trials do not vary, are set to zero (--full keeps them).\n"
    }
}

fn table_row(r: &Recovered) -> Vec<String> {
    let truth = match r.quantity {
        Quantity::Flux => power(r.truth),
        Quantity::Ratio => plain(r.truth),
    };
    let bias = if r.bias_sigma.sigma.is_finite() {
        format!("{:+.3} ± {:.3}", r.bias_sigma.value, r.bias_sigma.sigma)
    } else {
        "–".to_owned()
    };
    let scatter = if r.pull_scatter.is_finite() {
        format!("{:.3}", r.pull_scatter)
    } else {
        "–".to_owned()
    };
    vec![
        r.name.clone(),
        truth,
        bias,
        scatter,
        covers(r.coverage68, NOMINAL.0),
        covers(r.coverage95, NOMINAL.1),
        percent(r.detected),
        percent(r.limit_wrong),
    ]
}

fn covers(share: Share, nominal: f64) -> String {
    let (low, high) = share.bounds();
    match share.value() {
        None => "–".to_owned(),
        Some(v) => format!(
            "{:.1} ({:.1}–{:.1}){}",
            100.0 * v,
            100.0 * low,
            100.0 * high,
            if share.agrees_with(nominal) { " " } else { "*" }
        ),
    }
}

fn percent(share: Share) -> String {
    share
        .value()
        .map_or_else(|| "–".to_owned(), |v| format!("{:.1} %", 100.0 * v))
}

/// `rehearse.csv`: one row per flux and ratio. Shares are 0 to 1.
pub fn rehearsal_csv(rehearsed: &Rehearsed) -> String {
    let header = [
        "name",
        "quantity",
        "unit",
        "trials",
        "truth",
        "typical_sigma",
        "bias_over_sigma",
        "bias_over_sigma_error",
        "pull_scatter",
        "intervals",
        "coverage68",
        "coverage68_low",
        "coverage68_high",
        "coverage95",
        "coverage95_low",
        "coverage95_high",
        "detected",
        "limit_wrong",
        "interval_holds",
    ];
    let holds = if rehearsed.how.full {
        "everything"
    } else {
        "noise"
    };
    let rows = rehearsed.rows.iter().map(|r| csv_row(r, holds));
    csv_table(&header, rows)
}

fn csv_row(r: &Recovered, holds: &str) -> Vec<String> {
    let (quantity, unit, holds) = match r.quantity {
        Quantity::Flux => ("flux", "erg/s/cm2", "noise"),
        Quantity::Ratio => ("ratio", "", holds),
    };
    let mut out = vec![
        r.name.clone(),
        quantity.to_owned(),
        unit.to_owned(),
        r.detected.of.to_string(),
        cell(r.truth),
        cell(r.typical_sigma),
        cell(r.bias_sigma.value),
        cell(r.bias_sigma.sigma),
        cell(r.pull_scatter),
        r.coverage68.of.to_string(),
    ];
    for share in [r.coverage68, r.coverage95] {
        let bounds = share.value().map(|_| share.bounds());
        out.push(cell(share.value()));
        out.push(cell(bounds.map(|b| b.0)));
        out.push(cell(bounds.map(|b| b.1)));
    }
    out.push(cell(r.detected.value()));
    out.push(cell(r.limit_wrong.value()));
    out.push(holds.to_owned());
    out
}

/// `rehearse.svg`: coverage against the nominal shares, and the pulls of every row.
///
/// # Errors
/// No row with an interval.
pub fn rehearsal_figure(rehearsed: &Rehearsed, label: &str, width: Width) -> Result<String> {
    let point = |share: Share| {
        let value = share.value()?;
        let (low, high) = share.bounds();
        Some(CoveragePoint { value, low, high })
    };
    let rows = rehearsed.rows.iter().map(|r| CoverageRow {
        label: r.name.clone(),
        narrow: point(r.coverage68),
        wide: point(r.coverage95),
        pulls: r.pulls.clone(),
    });
    let figure = CoverageFigure {
        title: format!("{label}: {}", what(rehearsed)),
        nominal: NOMINAL,
        rows: rows.collect(),
    };
    coverage_svg(&figure, width)
}
