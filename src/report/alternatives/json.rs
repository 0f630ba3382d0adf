//! `alternatives.json`.

use super::kind_word;
use crate::alternatives::{Alternatives, Found, Row};
use crate::analysis::Settings;
use serde::Serialize;

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
