//! Coverage of intervals in repeated trials, with the distribution of pulls beside it.

use super::axis::{Axis, Scale, Ticks};
use super::canvas::{Anchor, Canvas, Type, page};
use super::marker::{Mark, Shape};
use super::panel::{Panel, x_ticks};
use super::style::{
    BLACK, DARK, DOTTED, LABEL_PT, LINE_PT, Stroke, TITLE_PT, Width, series_colour,
};
use super::text::{elide, width_pt, wrap};
use crate::ground::{Error, Result};

/// Coverage of two intervals for several quantities.
#[derive(Clone, Debug, Default)]
pub struct CoverageFigure {
    /// Heading; empty for none.
    pub title: String,
    /// Shares that the narrow and the wide interval should cover, 0 to 1.
    pub nominal: (f64, f64),
    /// One row per quantity, from above.
    pub rows: Vec<CoverageRow>,
}

/// One quantity.
#[derive(Clone, Debug, Default)]
pub struct CoverageRow {
    /// Name as printed.
    pub label: String,
    /// Coverage of the narrow interval; none where no trial gave one.
    pub narrow: Option<CoveragePoint>,
    /// Coverage of the wide interval.
    pub wide: Option<CoveragePoint>,
    /// (value − truth)/σ of the trials; values that are not finite are left out.
    pub pulls: Vec<f64>,
}

/// A share with bounds, 0 to 1.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct CoveragePoint {
    /// The share found.
    pub value: f64,
    /// Lower bound.
    pub low: f64,
    /// Upper bound.
    pub high: f64,
}

const EDGE_PT: f64 = 3.0;
/// Height of one row, pt.
const ROW_PT: f64 = 26.0;
/// Blank between coverage and pulls, pt.
const BETWEEN_PT: f64 = 14.0;
/// Share of the width for coverage.
const COVERAGE_SHARE: f64 = 0.6;
/// Pulls are shown from minus to plus this, in bins of half a standard deviation.
const PULL_REACH: f64 = 4.0;
const PULL_BINS: usize = 16;

/// Draws one row per quantity: coverage with bounds against the two nominal shares on the left, the
/// histogram of pulls with the standard normal distribution on the right.
///
/// # Errors
/// No row, or no row with a coverage.
pub fn coverage_svg(figure: &CoverageFigure, width: Width) -> Result<String> {
    let points = || {
        figure
            .rows
            .iter()
            .flat_map(|r| [r.narrow, r.wide])
            .flatten()
    };
    if points().next().is_none() {
        return Err(Error::compute("coverage figure: no interval to judge")
            .remedy("more trials, or a plan whose bands are detected"));
    }
    let room = width.points() - 2.0 * EDGE_PT;
    let title = wrap(&figure.title, TITLE_PT, true, room, 3);
    let top = 2.0 * EDGE_PT + (title.len() as f64 + 1.0) * (LINE_PT + 1.0);
    let names: Vec<String> = figure
        .rows
        .iter()
        .map(|r| elide(r.label.trim(), LABEL_PT, false, 0.25 * width.points()))
        .collect();
    let widest = names.iter().map(|n| width_pt(n, LABEL_PT, false));
    let left = EDGE_PT + widest.fold(0.0, f64::max) + 5.0;
    let across = width.points() - EDGE_PT - 8.0 - left - BETWEEN_PT;
    let height = figure.rows.len() as f64 * ROW_PT;
    let ends = points().flat_map(|p| [p.low, p.high]);
    let nominal = [figure.nominal.0, figure.nominal.1];
    let shares = Axis::covering(
        ends.chain(nominal).map(|v| 100.0 * v),
        Scale::Linear,
        "coverage",
    )?;
    let rows = Axis {
        lo: figure.rows.len() as f64,
        hi: 0.0,
        scale: Scale::Linear,
    };
    let coverage = Panel {
        left,
        top,
        width: COVERAGE_SHARE * across,
        height,
        x: shares.padded(0.06, 0.06),
        y: rows,
    };
    let pulls = Panel {
        left: coverage.right() + BETWEEN_PT,
        width: (1.0 - COVERAGE_SHARE) * across,
        x: Axis {
            lo: -PULL_REACH,
            hi: PULL_REACH,
            scale: Scale::Linear,
        },
        ..coverage
    };
    let bottom = coverage.bottom() + 2.0 * LINE_PT + 6.0;
    Ok(page(width.points(), bottom, |canvas| {
        canvas.heading(&title, (EDGE_PT, EDGE_PT));
        key(canvas, left, top - 0.5 * LINE_PT - 2.0);
        for (name, i) in names.iter().zip(0..) {
            let y = coverage.py(f64::from(i) + 0.5);
            canvas.text(name, (left - 4.0, y), Type::new(LABEL_PT, Anchor::End));
        }
        draw_coverage(canvas, &coverage, figure);
        draw_pulls(canvas, &pulls, figure);
    }))
}

fn mark(wide: bool) -> Mark {
    Mark {
        shape: if wide { Shape::Square } else { Shape::Circle },
        filled: true,
        colour: series_colour(usize::from(wide)),
    }
}

fn key(canvas: &mut Canvas, left: f64, y: f64) {
    let mut x = left;
    for (wide, name) in [(false, "68.3 % interval"), (true, "95.4 % interval")] {
        mark(wide).draw(canvas, (x + 3.0, y), 2.2);
        canvas.text(name, (x + 9.0, y), Type::new(LABEL_PT, Anchor::Start));
        x += 9.0 + width_pt(name, LABEL_PT, false) + 12.0;
    }
}

fn draw_coverage(canvas: &mut Canvas, panel: &Panel, figure: &CoverageFigure) {
    for nominal in [figure.nominal.0, figure.nominal.1] {
        let x = panel.px(100.0 * nominal);
        let line = Stroke::solid(DARK, 0.6).dashed(&[3.0, 2.0]);
        canvas.path(&[(x, panel.top), (x, panel.bottom())], line);
    }
    for (i, row) in figure.rows.iter().enumerate() {
        for (point, wide) in [(row.narrow, false), (row.wide, true)] {
            let Some(p) = point else { continue };
            let y = panel.py(i as f64 + if wide { 0.64 } else { 0.36 });
            let x = |share: f64| panel.px(100.0 * share);
            let bar = Stroke::solid(BLACK, 0.7);
            canvas.path(&[(x(p.low), y), (x(p.high), y)], bar);
            for end in [p.low, p.high] {
                canvas.path(&[(x(end), y - 2.0), (x(end), y + 2.0)], bar);
            }
            mark(wide).draw(canvas, (x(p.value), y), 2.2);
        }
    }
    finish(canvas, panel, figure.rows.len(), "coverage (%)");
}

fn draw_pulls(canvas: &mut Canvas, panel: &Panel, figure: &CoverageFigure) {
    let bin = 2.0 * PULL_REACH / PULL_BINS as f64;
    let normal = |x: f64| (-0.5 * x * x).exp() / (2.0 * std::f64::consts::PI).sqrt();
    // The row's height holds the normal peak with a third to spare.
    let tall = |density: f64, i: usize| {
        let share = (density / (1.35 * normal(0.0))).min(1.0);
        panel.py(i as f64 + 1.0 - share)
    };
    for (i, row) in figure.rows.iter().enumerate() {
        let kept: Vec<f64> = row
            .pulls
            .iter()
            .copied()
            .filter(|p| p.is_finite())
            .collect();
        let mut counts = [0usize; PULL_BINS];
        for pull in kept.iter().filter(|p| p.abs() < PULL_REACH) {
            counts[(((pull + PULL_REACH) / bin) as usize).min(PULL_BINS - 1)] += 1;
        }
        for (b, count) in counts.into_iter().enumerate().filter(|(_, c)| *c > 0) {
            let from = -PULL_REACH + b as f64 * bin;
            let density = count as f64 / (kept.len() as f64 * bin);
            let corner = (panel.px(from), tall(density, i));
            let base = (panel.px(from + bin), panel.py(i as f64 + 1.0));
            canvas.rectangle(corner, base, series_colour(5), 0.6);
        }
        let curve: Vec<_> = (0..=64)
            .map(|k| -PULL_REACH + 2.0 * PULL_REACH * f64::from(k) / 64.0)
            .map(|x| (panel.px(x), tall(normal(x), i)))
            .collect();
        canvas.path(&curve, Stroke::solid(BLACK, 0.7));
    }
    finish(canvas, panel, figure.rows.len(), "(value − truth) / σ");
}

/// Rulers between rows, frame and title of the abscissa.
fn finish(canvas: &mut Canvas, panel: &Panel, rows: usize, title: &str) {
    for i in 1..rows {
        let y = panel.py(i as f64);
        canvas.path(&[(panel.left, y), (panel.right(), y)], DOTTED);
    }
    let x = x_ticks(&panel.x, panel.width, 0);
    panel.frame(canvas, &x, &Ticks::default(), true);
    panel.x_title(canvas, title, 2.0 * LINE_PT - 1.5);
}
