//! `alternatives.svg`.

use crate::alternatives::{Alternatives, Found, Row};
use crate::analysis::Settings;
use crate::figures::{
    AlternativePanel, AlternativePoint, AlternativesFigure, Bounds, Reach, Width, alternatives_svg,
};
use crate::ground::Result;
use crate::ratio::RatioKind;

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
    alternatives_svg(&figure, width).map(Some)
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
