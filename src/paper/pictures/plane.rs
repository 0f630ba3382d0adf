//! Two ratios against each other with the comets that have both.

use super::super::study::Study;
use crate::comparison::{RatioComparison, Subject, SubjectValue};
use crate::figures::{Bounds, ComparisonValue, ScatterFigure, ScatterPoint};
use crate::standing::{Entry, Known};
use crate::tables::DynamicalClass;

/// The pair of ratios with the most comets in common, and a caption; `None` without such a pair.
pub(super) fn plane(
    studies: &[Study],
    places: &[RatioComparison],
) -> Option<(ScatterFigure, String)> {
    let first = places.first()?;
    let own: Vec<&RatioComparison> = places.iter().filter(|c| c.label == first.label).collect();
    let mut best: Option<(usize, &RatioComparison, &RatioComparison)> = None;
    for (i, a) in own.iter().enumerate() {
        for b in &own[i + 1..] {
            let common = shared(a, b).count();
            if best.is_none_or(|(most, ..)| common > most) {
                best = Some((common, a, b));
            }
        }
    }
    let (common, a, b) = best.filter(|(n, ..)| *n >= super::FEWEST_POINTS)?;
    let classes: Vec<String> = DynamicalClass::words().map(str::to_owned).collect();
    let points = shared(a, b)
        .map(|(x, y)| ScatterPoint {
            x: x.value,
            across: Some(published(x)),
            value: published(y),
            class: classes.iter().position(|c| *c == y.class).unwrap_or(0),
        })
        .collect();
    let name = |c: &RatioComparison| format!("{}/{}", c.of.pretty(), c.to.pretty());
    let figure = ScatterFigure {
        x_label: name(a),
        y_label: name(b),
        this_label: a.label.clone(),
        this: dates(studies, a, b),
        classes,
        points,
        ..ScatterFigure::default()
    };
    let caption = format!(
        "{} against {} of {} and of the {common} published comets that have both, by dynamical class. Open marks with arrows are limits.",
        name(b),
        name(a),
        a.label
    );
    Some((figure, caption))
}

/// Entries of comets that have both ratios.
fn shared<'a>(
    a: &'a RatioComparison,
    b: &'a RatioComparison,
) -> impl Iterator<Item = (&'a Entry, &'a Entry)> {
    a.known.iter().filter_map(|x| {
        let y = b.known.iter().find(|y| y.comet == x.comet)?;
        Some((x, y))
    })
}

/// This comet at the dates that have both ratios.
fn dates(studies: &[Study], a: &RatioComparison, b: &RatioComparison) -> Vec<ScatterPoint> {
    let of = |subjects: &[Subject], c: &RatioComparison| {
        let mut all = subjects.iter();
        all.find(|s| s.label == c.label && s.of == c.of && s.to == c.to)
            .map(|s| s.value)
    };
    let points = studies.iter().filter_map(|study| {
        let subjects = study.subjects();
        let (x, y) = (of(&subjects, a)?, of(&subjects, b)?);
        Some(ScatterPoint {
            x: x.main(),
            across: Some(drawn(&x)),
            value: drawn(&y),
            class: 0,
        })
    });
    points.collect()
}

fn drawn(value: &SubjectValue) -> ComparisonValue {
    match *value {
        SubjectValue::Measured { median, low, high } => ComparisonValue::Measured {
            value: median,
            bar: Bounds { low, high },
        },
        SubjectValue::Upper(v) => ComparisonValue::UpperLimit(v),
        SubjectValue::Lower(v) => ComparisonValue::LowerLimit(v),
    }
}

fn published(entry: &Entry) -> ComparisonValue {
    match entry.known {
        Known::Value => {
            let (minus, plus) = entry.errors.unwrap_or((0.0, 0.0));
            ComparisonValue::Measured {
                value: entry.value,
                bar: Bounds {
                    low: entry.value - minus,
                    high: entry.value + plus,
                },
            }
        }
        Known::Upper => ComparisonValue::UpperLimit(entry.value),
        Known::Lower => ComparisonValue::LowerLimit(entry.value),
    }
}
