//! Figures of a comparison with known comets.

use super::pictures::{class_index, count_text, published_value};
use crate::comparison::{RatioComparison, SubjectValue};
use crate::figures::{
    Bounds, ComparisonComet, ComparisonValue, ScatterFigure, ScatterPoint, StandingFigure,
    StandingRow, ThisComet, Width, scatter_svg, standing_svg,
};
use crate::ground::Result;
use crate::standing::{Entry, Known};
use crate::tables::DynamicalClass;

/// Points of the trend line.
const LINE_POINTS: usize = 40;

fn classes() -> Vec<String> {
    DynamicalClass::words().map(str::to_owned).collect()
}

/// All comets in one label.
fn label(found: &[RatioComparison]) -> String {
    let mut names: Vec<&str> = found.iter().map(|c| c.label.as_str()).collect();
    names.dedup();
    names.join(", ")
}

/// `compare-standing.svg`: each ratio on the comparison set.
///
/// # Errors
/// No ratio; a value that has no place on a logarithmic axis.
pub fn comparison_standing_figure(found: &[RatioComparison], width: Width) -> Result<String> {
    let classes = classes();
    let figure = StandingFigure {
        title: String::new(),
        this_label: label(found),
        rows: found.iter().map(|c| row(c, &classes)).collect(),
        classes,
    };
    standing_svg(&figure, width)
}

fn row(c: &RatioComparison, classes: &[String]) -> StandingRow {
    let this = match (c.value, c.value.interval()) {
        (_, Some(i)) => ThisComet::Measured {
            median: i.median,
            inner: Bounds {
                low: i.low68,
                high: i.high68,
            },
            outer: Bounds {
                low: i.low95,
                high: i.high95,
            },
        },
        (SubjectValue::Lower(v), None) => ThisComet::LowerLimit(v),
        (v, None) => ThisComet::UpperLimit(v.main()),
    };
    let limits = c.known.iter().filter(|e| e.known != Known::Value).count();
    StandingRow {
        ratio: format!("{}/{}", c.of.pretty(), c.to.pretty()),
        comets: c
            .known
            .iter()
            .map(|e| ComparisonComet {
                name: e.comet.clone(),
                class: class_index(e, classes),
                value: published_value(e),
            })
            .collect(),
        cumulative: c.band.iter().map(|s| (s.value, s.at_or_below)).collect(),
        this,
        count_text: count_text(c.known.len(), limits),
        place_text: c.standing.map_or_else(String::new, |s| {
            format!(
                "percentile {:.0} ({:.0}–{:.0})",
                s.percentile, s.percentile_low, s.percentile_high
            )
        }),
    }
}

/// `compare-distance.svg`: the first ratio with distances against heliocentric distance, with the
/// fitted trend, limits, classes and this comet; `None` when no known comet has a distance.
///
/// # Errors
/// A value that has no place on a logarithmic axis.
pub fn comparison_distance_figure(
    found: &[RatioComparison],
    width: Width,
) -> Result<Option<String>> {
    let placed = |c: &&RatioComparison| c.rows.iter().any(|e| e.heliocentric_au.is_some());
    let Some(c) = found.iter().find(placed) else {
        return Ok(None);
    };
    let classes = classes();
    let points: Vec<ScatterPoint> = c
        .rows
        .iter()
        .filter_map(|e: &Entry| {
            Some(ScatterPoint {
                x: e.heliocentric_au?,
                across: None,
                value: published_value(e),
                class: class_index(e, &classes),
            })
        })
        .collect();
    let freezing = c.distance.freezing_au;
    let figure = ScatterFigure {
        title: String::new(),
        x_label: "Heliocentric distance (au)".to_owned(),
        y_label: format!("{}/{}", c.of.pretty(), c.to.pretty()),
        this_label: c.label.clone(),
        classes,
        line: line(c, &points),
        points,
        this: this_points(c),
        shaded: freezing.map(|(low, high)| (low, high, "water freezes".to_owned())),
    };
    scatter_svg(&figure, width).map(Some)
}

/// This comet, one point per date with a distance.
fn this_points(c: &RatioComparison) -> Vec<ScatterPoint> {
    let dates = c.dates.iter().filter_map(|d| {
        let value = match d.value {
            SubjectValue::Measured { median, low, high } => ComparisonValue::Measured {
                value: median,
                bar: Bounds { low, high },
            },
            SubjectValue::Upper(v) => ComparisonValue::UpperLimit(v),
            SubjectValue::Lower(v) => ComparisonValue::LowerLimit(v),
        };
        Some(ScatterPoint {
            x: d.r_h_au?,
            across: None,
            value,
            class: 0,
        })
    });
    dates.collect()
}

/// The trend with the range that holds 68 % of comets (intrinsic scatter and error of the line).
fn line(c: &RatioComparison, points: &[ScatterPoint]) -> Vec<(f64, f64, f64, f64)> {
    let Some(t) = c.distance.trend else {
        return Vec::new();
    };
    let logs = || points.iter().map(|p| p.x.log10());
    let (from, to) = (
        logs().fold(f64::INFINITY, f64::min),
        logs().fold(f64::NEG_INFINITY, f64::max),
    );
    (0..LINE_POINTS)
        .map(|i| {
            let x = from + (to - from) * i as f64 / (LINE_POINTS - 1) as f64;
            let size = t.scatter.hypot(t.sigma_at(x));
            let at = |y: f64| 10f64.powf(y);
            (at(x), at(t.at(x)), at(t.at(x) - size), at(t.at(x) + size))
        })
        .collect()
}
