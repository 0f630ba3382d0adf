//! How far a ratio moves with the choices, beside its error bar.

use super::{Choice, Found, Row};
use crate::analysis::RatioSettings;
use crate::ground::Caveat;
use crate::ratio::RatioKind;

/// How much one ratio depends on the choices. All widths are in log10 (dex). Choices that the data
/// rule out count in the full range alone: nobody has to fear a model that does not fit.
#[derive(Clone, Debug, PartialEq)]
pub struct RatioSpread {
    /// "CO2/H2O".
    pub ratio: String,
    /// Half the 68.3 % interval of the plan's result; `None` for a limit.
    pub error_bar_dex: Option<f64>,
    /// The same without the errors of calibration, g, scale lengths and speed.
    pub noise_dex: Option<f64>,
    /// Alternatives that give a value, are not ruled out and change a flux of the ratio.
    pub alternatives: usize,
    /// Largest minus smallest log10 median, the plan's included.
    pub range_dex: Option<f64>,
    /// The same with the choices that are ruled out.
    pub full_range_dex: Option<f64>,
    /// Standard deviation of the log10 medians, the plan's included (divided by their number
    /// minus one).
    pub deviation_dex: Option<f64>,
    /// The alternative that moves the ratio most.
    pub farthest: Option<Shift>,
}

/// A move of a ratio away from the plan's result.
#[derive(Clone, Debug, PartialEq)]
pub struct Shift {
    /// What was done differently.
    pub choice: Choice,
    /// log10 of the new median over the plan's.
    pub dex: f64,
}

impl RatioSpread {
    /// Whether the choices move the ratio further than its error bar: half of the range
    /// against half of the 68.3 % interval.
    pub fn exceeds_error_bar(&self) -> bool {
        matches!((self.range_dex, self.error_bar_dex), (Some(r), Some(e)) if 0.5 * r > e)
    }
}

fn name(ratio: &RatioSettings) -> String {
    format!("{}/{}", ratio.of, ratio.to)
}

pub(super) fn spreads(
    ratios: &[RatioSettings],
    rows: &[Row],
    noise: &[Option<Found>],
) -> Vec<RatioSpread> {
    ratios
        .iter()
        .enumerate()
        .map(|(r, ratio)| {
            let planned = rows[0].ratios[r];
            let spread = RatioSpread {
                ratio: name(ratio),
                error_bar_dex: planned.and_then(|f| f.error_bar_dex()),
                noise_dex: noise[r].and_then(|f| f.error_bar_dex()),
                alternatives: 0,
                range_dex: None,
                full_range_dex: None,
                deviation_dex: None,
                farthest: None,
            };
            match planned.and_then(|f| f.log10_median()) {
                Some(planned) => fill(spread, planned, rows, r),
                None => spread,
            }
        })
        .collect()
}

fn fill(mut spread: RatioSpread, planned: f64, rows: &[Row], r: usize) -> RatioSpread {
    let moved: Vec<(&Row, f64)> = rows[1..]
        .iter()
        .filter_map(|row| Some((row, row.ratios[r].filter(|f| !f.unchanged)?)))
        .filter_map(|(row, f)| Some((row, f.log10_median()? - planned)))
        .collect();
    let kept: Vec<(&Row, f64)> = moved.iter().copied().filter(|m| !m.0.ruled_out).collect();
    spread.full_range_dex = range(&moved);
    spread.range_dex = range(&kept);
    spread.alternatives = kept.len();
    if kept.is_empty() {
        return spread;
    }
    let all = || kept.iter().map(|(_, d)| *d).chain([0.0]);
    let mean = all().sum::<f64>() / (kept.len() + 1) as f64;
    let squares: f64 = all().map(|d| (d - mean).powi(2)).sum();
    spread.deviation_dex = Some((squares / kept.len() as f64).sqrt());
    let farthest = kept.iter().max_by(|a, b| a.1.abs().total_cmp(&b.1.abs()));
    spread.farthest = farthest.map(|(row, dex)| Shift {
        choice: row.choice.clone(),
        dex: *dex,
    });
    spread
}

/// Range of moves, no move included.
fn range(moved: &[(&Row, f64)]) -> Option<f64> {
    let ends = moved
        .iter()
        .fold((0.0f64, 0.0f64), |(l, h), (_, d)| (l.min(*d), h.max(*d)));
    (!moved.is_empty()).then_some(ends.1 - ends.0)
}

pub(super) fn caveats(
    ratios: &[RatioSettings],
    rows: &[Row],
    spreads: &[RatioSpread],
) -> Vec<Caveat> {
    let mut out = Vec::new();
    for (r, (ratio, spread)) in ratios.iter().zip(spreads).enumerate() {
        if let (true, Some(range), Some(bar), Some(far)) = (
            spread.exceeds_error_bar(),
            spread.range_dex,
            spread.error_bar_dex,
            &spread.farthest,
        ) {
            out.push(Caveat::Other {
                code: "choices-matter",
                text: format!(
                    "{}: the choices matter more than the noise: alternatives span ±{:.3} dex, the error bar is ±{bar:.3} dex; farthest is “{}” at {:+.3} dex",
                    spread.ratio,
                    0.5 * range,
                    far.choice,
                    far.dex
                ),
            });
        }
        out.extend(changed_kind(&name(ratio), rows, r));
    }
    out
}

/// A ratio that is a value for some choices and a limit for others.
fn changed_kind(name: &str, rows: &[Row], r: usize) -> Option<Caveat> {
    let planned = rows[0].ratios[r]?.kind;
    let other: Vec<String> = rows[1..]
        .iter()
        .filter(|row| !row.ruled_out && row.ratios[r].is_some_and(|f| f.kind != planned))
        .map(|row| format!("“{}”", row.choice))
        .collect();
    let is = match planned {
        RatioKind::Value => "a value",
        RatioKind::Upper => "an upper limit",
        RatioKind::Lower => "a lower limit",
        RatioKind::Unconstrained => "unconstrained",
    };
    (!other.is_empty()).then(|| Caveat::Other {
        code: "choices-decide-detection",
        text: format!("{name}: {is} as planned, but not with {}", other.join(", ")),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Species;
    use crate::ratio::{Basis, Interval};

    fn row(choice: Choice, median: f64, unchanged: bool) -> Row {
        let interval = Interval {
            median,
            low68: median / 1.1,
            high68: median * 1.1,
            low95: median / 1.3,
            high95: median * 1.3,
        };
        Row {
            ratios: vec![Some(Found {
                kind: RatioKind::Value,
                interval: Some(interval),
                limit: None,
                shift_sigma: None,
                unchanged,
            })],
            ..Row::empty(choice, 1)
        }
    }

    fn wanted() -> Vec<RatioSettings> {
        vec![RatioSettings {
            of: Species::new("CO2"),
            to: Species::new("H2O"),
            basis: Basis::Column,
            known: Vec::new(),
            beside: vec![],
        }]
    }

    #[test]
    fn range_and_deviation_leave_out_what_changes_nothing() {
        let rows = [
            row(Choice::Planned, 1.0, false),
            row(Choice::Order(1), 10.0, false),
            row(Choice::Order(-1), 0.1, false),
            row(Choice::WidthsHeld, 1.0, true),
        ];
        let spread = &spreads(&wanted(), &rows, &rows[0].ratios)[0];
        assert_eq!(spread.alternatives, 2);
        assert!((spread.range_dex.expect("a range") - 2.0).abs() < 1e-12);
        assert!((spread.deviation_dex.expect("a deviation") - 1.0).abs() < 1e-12);
        assert!((spread.error_bar_dex.expect("a bar") - 1.1f64.log10()).abs() < 1e-12);
        assert!(spread.exceeds_error_bar());
        let doubts = caveats(&wanted(), &rows, std::slice::from_ref(spread));
        assert_eq!(doubts.len(), 1);
        assert!(doubts[0].to_string().contains("matter more than the noise"));
    }

    #[test]
    fn what_the_data_rule_out_counts_in_the_full_range_alone() {
        let mut rows = [
            row(Choice::Planned, 1.0, false),
            row(Choice::Order(1), 1.05, false),
            row(Choice::SingleGaussians, 100.0, false),
        ];
        rows[2].ruled_out = true;
        let spread = &spreads(&wanted(), &rows, &rows[0].ratios)[0];
        assert_eq!(spread.alternatives, 1);
        assert!(spread.range_dex.expect("a range") < 0.03);
        assert!((spread.full_range_dex.expect("a range") - 2.0).abs() < 1e-12);
        assert!(caveats(&wanted(), &rows, std::slice::from_ref(spread)).is_empty());
        rows[2].ruled_out = false;
        assert!(spreads(&wanted(), &rows, &rows[0].ratios)[0].exceeds_error_bar());
    }

    #[test]
    fn small_moves_and_no_moves_draw_no_caveat() {
        let rows = [
            row(Choice::Planned, 1.0, false),
            row(Choice::Order(1), 1.05, false),
        ];
        let few = spreads(&wanted(), &rows, &rows[0].ratios);
        assert!(caveats(&wanted(), &rows, &few).is_empty());
        let none = spreads(&wanted(), &rows[..1], &rows[0].ratios);
        assert_eq!((none[0].alternatives, none[0].range_dex), (0, None));
        assert!(caveats(&wanted(), &rows[..1], &none).is_empty());
    }

    #[test]
    fn a_value_that_becomes_a_limit_is_told() {
        let mut rows = [
            row(Choice::Planned, 1.0, false),
            row(Choice::Order(1), 1.0, false),
        ];
        let found = rows[1].ratios[0].as_mut().expect("a ratio");
        (found.kind, found.interval, found.limit) = (RatioKind::Upper, None, Some(2.0));
        let spread = spreads(&wanted(), &rows, &rows[0].ratios);
        let doubts = caveats(&wanted(), &rows, &spread);
        assert_eq!(doubts[0].code(), "choices-decide-detection");
        assert!(doubts[0].to_string().contains("continuum order +1"));
    }
}
