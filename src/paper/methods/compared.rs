//! The published comets in use.

use super::super::bib::References;
use super::super::study::Study;
use crate::analysis::RatioResult;
use crate::comparison::rows_of;
use crate::tables::Source;

/// Relative difference of a published value before and after its logarithm.
const SAME: f64 = 1e-9;

pub(super) fn comparison(s: &Study, refs: &mut References) -> String {
    let mut parts = Vec::new();
    for r in s.analysis.ratios.iter().filter(|r| !r.known.is_empty()) {
        let (of, to) = (&r.ratio.of, &r.ratio.to);
        let cited = compiled(s, r);
        let n = r.known.len();
        let noun = if n == 1 { "comet" } else { "comets" };
        parts.push(format!(
            "{}/{} with {n} {noun}{}",
            of.pretty(),
            to.pretty(),
            refs.cite(&cited)
        ));
    }
    format!(
        "Ratios were compared with published ones: {}. Each comet counts once, with a value before a limit and then the measurement nearest in heliocentric distance. Limits enter the distribution as censored data (product-limit estimator). Percentile intervals (68.3 %) hold the error of the ratio and the number of comets.",
        parts.join("; ")
    )
}

/// Where the rows that had a vote were read: the compilation where there is one, else the original.
fn compiled(s: &Study, r: &RatioResult) -> Vec<Source> {
    let mut out: Vec<Source> = Vec::new();
    for row in rows_of(&s.tables, &r.ratio.of, &r.ratio.to, r.ratio.basis) {
        let linear = 10f64.powf(row.log10_value());
        let voted = r.known.iter().any(|e| {
            e.comet == row.comet
                && e.heliocentric_au == row.r_h_au
                && (e.value / linear - 1.0).abs() < SAME
        });
        let key = row.compiled_in.as_deref();
        let key = key.unwrap_or(&row.provenance.source);
        if let Some(source) = s.tables.source(key)
            && voted
            && !out.iter().any(|o| o.key == source.key)
        {
            out.push(source.clone());
        }
    }
    out
}
