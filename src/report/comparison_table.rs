//! A comparison as CSV, and the check of the set as a table.

use super::cell;
use crate::comparison::{RatioComparison, Rederived, SubjectValue};
use crate::ratio::Basis;
use crate::standing::Known;

const HEADER: &str = "comet,of,to,basis,kind,value,low68,high68,dates,r_h_au,comets,limits,median_of_comets,percentile,percentile_low,percentile_high,above,undecided,fraction_above_low,fraction_above_high,percentile_without_selection,jfc,occ,log_rank_chi2,log_rank_p,peto_prentice_chi2,peto_prentice_p,anderson_darling_a2,anderson_darling_p,trend_slope,trend_slope_sigma,trend_scatter_dex,trend_off_sigma,depleted_probability,caveats";

/// One row per ratio; absent numbers are empty cells.
pub fn comparison_csv(found: &[RatioComparison]) -> String {
    let mut out = format!("{HEADER}\n");
    for c in found {
        out.push_str(&line(c));
        out.push('\n');
    }
    out
}

fn quoted(text: &str) -> String {
    if text.contains([',', '"', '\n']) {
        format!("\"{}\"", text.replace('"', "\"\""))
    } else {
        text.to_owned()
    }
}

fn line(c: &RatioComparison) -> String {
    let (kind, low, high) = match c.value {
        SubjectValue::Measured { low, high, .. } => ("value", Some(low), Some(high)),
        SubjectValue::Upper(_) => ("upper", None, None),
        SubjectValue::Lower(_) => ("lower", None, None),
    };
    let basis = match c.basis {
        Basis::Production => "production",
        Basis::Column => "column",
    };
    let limits = c.known.iter().filter(|e| e.known != Known::Value).count();
    let mut cells = vec![
        quoted(&c.label),
        quoted(c.of.as_str()),
        quoted(c.to.as_str()),
        basis.to_owned(),
        kind.to_owned(),
        cell(c.value.main()),
        cell(low),
        cell(high),
        c.dates.len().to_string(),
        cell(c.r_h_au),
        c.known.len().to_string(),
        limits.to_string(),
        cell(c.population_median),
        cell(c.standing.map(|s| s.percentile)),
        cell(c.standing.map(|s| s.percentile_low)),
        cell(c.standing.map(|s| s.percentile_high)),
        c.tail.above.to_string(),
        c.tail.undecided.to_string(),
        cell(c.tail.low),
        cell(c.tail.high),
        cell(c.without_selection.map(|s| s.percentile)),
    ];
    cells.extend(statistics(c));
    let codes: Vec<&str> = c.caveats.iter().map(crate::ground::Caveat::code).collect();
    cells.push(codes.join(";"));
    cells.join(",")
}

fn statistics(c: &RatioComparison) -> Vec<String> {
    let t = c.classes;
    let count = |n: Option<(usize, usize)>| n.map_or_else(String::new, |n| n.0.to_string());
    let anderson = t.and_then(|t| t.anderson);
    let carbon = c.carbon.as_ref();
    let fitted = carbon.and_then(|m| m.fitted.map(|f| f.1));
    vec![
        count(t.map(|t| t.first)),
        count(t.map(|t| t.second)),
        cell(t.map(|t| t.log_rank.chi2)),
        cell(t.map(|t| t.log_rank.p)),
        cell(t.map(|t| t.peto_prentice.chi2)),
        cell(t.map(|t| t.peto_prentice.p)),
        cell(anderson.map(|a| a.statistic)),
        cell(anderson.map(|a| a.p)),
        cell(c.distance.trend.map(|t| t.slope)),
        cell(c.distance.trend.map(|t| t.slope_sigma)),
        cell(c.distance.trend.map(|t| t.scatter)),
        cell(c.distance.off_sigma),
        cell(fitted.or(carbon.and_then(|m| m.published))),
    ]
}

/// Published numbers beside those derived from the rows of the set.
pub fn check_set_table(rows: &[Rederived]) -> String {
    let mut out = String::from("published statistics, derived again from the comparison set\n");
    for r in rows {
        let sigma = r.sigma.map_or_else(String::new, |s| format!(" ± {s}"));
        out.push_str(&format!(
            "\n{}\n  published {}{sigma} ({})\n",
            r.what, r.published, r.source
        ));
        for (how, value, comets) in &r.found {
            let off = r.sigma.filter(|s| *s > 0.0).map_or_else(String::new, |s| {
                format!(", {:+.1} published sigma off", (value - r.published) / s)
            });
            out.push_str(&format!(
                "  found     {value:.3} ({comets} comets; {how}{off})\n"
            ));
        }
    }
    out
}
