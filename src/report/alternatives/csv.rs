//! `alternatives.csv`.

use super::kind_word;
use crate::alternatives::{Alternatives, Found, Row};
use crate::analysis::Settings;
use crate::ratio::Basis;
use crate::report::cell;
use crate::report::csv_files::table as csv_table;

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
