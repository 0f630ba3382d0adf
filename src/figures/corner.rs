//! Draws of several ratios against each other: histograms on the diagonal, regions below it.

use super::axis::{Axis, Scale, Ticks};
use super::canvas::{Anchor, Canvas, Type, page};
use super::density::Density;
use super::panel::{Panel, labels_width, x_ticks, y_ticks};
use super::style::{
    BLACK, Colour, DARK, DOTTED, FAINT, LABEL_PT, LINE_PT, PALE, Stroke, TICK_PT, TITLE_PT, Width,
};
use super::text::{elide, width_pt, wrap};
use crate::ground::{Error, Result};

/// Draws of several ratios from one shared set.
#[derive(Clone, Debug, Default)]
pub struct CornerFigure {
    /// Heading; empty for none.
    pub title: String,
    /// The ratios.
    pub ratios: Vec<CornerRatio>,
}

/// Draws of one ratio.
#[derive(Clone, Debug, Default)]
pub struct CornerRatio {
    /// Name as printed.
    pub label: String,
    /// Value with its interval as printed, over the histogram.
    pub value: String,
    /// The draws, row by row those of the other ratios; only positive ones are shown.
    pub draws: Vec<f64>,
    /// Median and ends of the 68 % interval.
    pub marks: [f64; 3],
}

const EDGE_PT: f64 = 3.0;
const RIGHT_PT: f64 = 8.0;
const GAP_PT: f64 = 8.0;
/// Largest height of a panel, pt.
const TALLEST_PT: f64 = 104.0;
/// Columns of a histogram.
const COLUMNS: usize = 40;
/// Share of the draws left outside at either end.
const OUTSIDE: f64 = 0.002;
/// Shares of the two regions.
const SHARES: [f64; 2] = [0.954, 0.683];
const FILLS: [Colour; 2] = [FAINT, PALE];
/// Overlap of neighbouring rows of a filled region, pt; hides the seams.
const OVERLAP_PT: f64 = 0.15;

/// Draws the triangle.
///
/// # Errors
/// No ratio; numbers of draws that disagree; no positive draw.
pub fn corner_svg(figure: &CornerFigure, width: Width) -> Result<String> {
    let count = figure.ratios.first().map_or(0, |r| r.draws.len());
    if count == 0 || figure.ratios.iter().any(|r| r.draws.len() != count) {
        return Err(Error::compute(
            "corner figure: the ratios do not have the same number of draws",
        ));
    }
    let layout = Layout::new(figure, width)?;
    let height = layout.panel(figure.ratios.len() - 1, 0).bottom() + 2.0 * LINE_PT + 7.0;
    Ok(page(width.points(), height, |canvas| layout.draw(canvas)))
}

struct Layout<'a> {
    figure: &'a CornerFigure,
    title: Vec<String>,
    axes: Vec<Axis>,
    x: Vec<Ticks>,
    y: Vec<Ticks>,
    left: f64,
    top: f64,
    width: f64,
    height: f64,
    /// Blank between rows.
    row_gap: f64,
    page_width: f64,
}

impl<'a> Layout<'a> {
    fn new(figure: &'a CornerFigure, width: Width) -> Result<Self> {
        let axes: Vec<Axis> = figure.ratios.iter().map(axis).collect::<Result<_>>()?;
        let n = axes.len() as f64;
        let title = wrap(
            &figure.title,
            TITLE_PT,
            true,
            width.points() - 2.0 * EDGE_PT,
            3,
        );
        let top = 2.0 * EDGE_PT + title.len() as f64 * (LINE_PT + 1.0) + 2.2 * LINE_PT;
        let mut left = EDGE_PT + LINE_PT + 22.0;
        let size = |left: f64| (width.points() - left - RIGHT_PT - (n - 1.0) * GAP_PT) / n;
        let height = f64::min(size(left), TALLEST_PT);
        let y: Vec<Ticks> = axes.iter().map(|a| y_ticks(a, height, 0)).collect();
        let widest = y.iter().skip(1).map(labels_width).fold(0.0, f64::max);
        left = EDGE_PT + LINE_PT + widest + 3.0;
        Ok(Self {
            figure,
            title,
            x: axes.iter().map(|a| x_ticks(a, size(left), 0)).collect(),
            y,
            left,
            top,
            width: size(left),
            height,
            row_gap: row_gap(figure, size(left)),
            page_width: width.points(),
            axes,
        })
    }

    /// The panel with ratio `row` upwards and ratio `column` to the right.
    fn panel(&self, row: usize, column: usize) -> Panel {
        Panel {
            left: self.left + column as f64 * (self.width + GAP_PT),
            top: self.top + row as f64 * (self.height + self.row_gap),
            width: self.width,
            height: self.height,
            x: self.axes[column],
            y: self.axes[row],
        }
    }

    fn draw(&self, canvas: &mut Canvas) {
        canvas.heading(&self.title, (EDGE_PT, EDGE_PT));
        let last = self.figure.ratios.len() - 1;
        for row in 0..=last {
            for column in 0..row {
                self.draw_regions(canvas, row, column);
            }
            self.draw_histogram(canvas, row);
            if row > 0 {
                let name = vec![elide(
                    &self.figure.ratios[row].label,
                    LABEL_PT,
                    false,
                    self.height,
                )];
                let from = self.left - EDGE_PT - LINE_PT;
                self.panel(row, 0).y_title(canvas, &name, from);
            }
            let name = &self.figure.ratios[row].label;
            self.panel(last, row)
                .x_title(canvas, name, 2.0 * LINE_PT - 1.0);
        }
    }

    fn draw_regions(&self, canvas: &mut Canvas, row: usize, column: usize) {
        let panel = self.panel(row, column);
        let (a, b) = (&self.figure.ratios[column], &self.figure.ratios[row]);
        let points = a.draws.iter().zip(&b.draws);
        let density =
            Density::of(points.map(|(x, y)| (panel.x.fraction(*x), panel.y.fraction(*y))));
        let place = |(x, y): (f64, f64)| {
            (
                panel.left + x * panel.width,
                panel.bottom() - y * panel.height,
            )
        };
        for (share, fill) in SHARES.iter().zip(FILLS) {
            for ((low, high), (from, to)) in density.runs(density.level(*share)) {
                let (a, b) = (place((from, high)), place((to, low)));
                canvas.rectangle(a, (b.0, b.1 + OVERLAP_PT), fill, 1.0);
            }
        }
        for (share, thick) in SHARES.iter().zip([0.5, 0.9]) {
            for piece in density.outline(density.level(*share)) {
                canvas.path(&piece.map(place), Stroke::solid(DARK, thick));
            }
        }
        let (x, y) = (panel.px_inside(a.marks[0]), panel.py_inside(b.marks[0]));
        canvas.disc((x, y), 1.6, BLACK);
        let last = row + 1 == self.figure.ratios.len();
        let y_ticks = self.labels_if(&self.y[row], column == 0);
        panel.frame(canvas, &self.x[column], &y_ticks, last);
    }

    fn draw_histogram(&self, canvas: &mut Canvas, index: usize) {
        let panel = self.panel(index, index);
        let ratio = &self.figure.ratios[index];
        let mut counts = [0_usize; COLUMNS];
        for f in ratio.draws.iter().map(|d| panel.x.fraction(*d)) {
            if (0.0..1.0).contains(&f) {
                counts[(f * COLUMNS as f64) as usize] += 1;
            }
        }
        let most = counts.iter().copied().max().unwrap_or(1).max(1) as f64;
        let at = |i: usize| panel.left + panel.width * i as f64 / COLUMNS as f64;
        let up = |c: usize| panel.bottom() - 0.9 * panel.height * c as f64 / most;
        let mut steps = vec![(panel.left, panel.bottom())];
        for (i, c) in counts.iter().enumerate() {
            steps.extend([(at(i), up(*c)), (at(i + 1), up(*c))]);
        }
        steps.push((panel.right(), panel.bottom()));
        canvas.polygon(&steps, FAINT, 1.0);
        canvas.path(&steps, Stroke::solid(DARK, 0.8));
        for (k, mark) in ratio.marks.iter().enumerate() {
            let x = panel.px_inside(*mark);
            let stroke = if k == 0 {
                Stroke::solid(BLACK, 1.0)
            } else {
                DOTTED
            };
            canvas.path(&[(x, panel.bottom()), (x, panel.top)], stroke);
        }
        let middle = panel.left + panel.width / 2.0;
        for (line, lift) in [(&ratio.label, 1.6), (&ratio.value, 0.65)] {
            let text = elide(line, TICK_PT, false, self.page_width - 2.0 * EDGE_PT);
            let half = 0.5 * width_pt(&text, TICK_PT, false);
            let x = middle
                .min(self.page_width - EDGE_PT - half)
                .max(EDGE_PT + half);
            let p = (x, panel.top - lift * LINE_PT);
            canvas.text(&text, p, Type::new(TICK_PT, Anchor::Middle));
        }
        let last = index + 1 == self.figure.ratios.len();
        panel.frame(canvas, &self.x[index], &Ticks::default(), last);
    }

    fn labels_if(&self, ticks: &Ticks, labelled: bool) -> Ticks {
        let mut out = ticks.clone();
        if !labelled {
            out.major.iter_mut().for_each(|m| m.1.clear());
        }
        out
    }
}

/// Rows move apart when a heading is wider than its panel and would cover its neighbour.
fn row_gap(figure: &CornerFigure, panel_pt: f64) -> f64 {
    let widest = figure
        .ratios
        .iter()
        .flat_map(|r| [&r.label, &r.value])
        .map(|t| width_pt(t, TICK_PT, false))
        .fold(0.0, f64::max);
    if widest > panel_pt {
        2.4 * LINE_PT
    } else {
        GAP_PT
    }
}

/// The range that holds nearly all positive draws.
fn axis(ratio: &CornerRatio) -> Result<Axis> {
    let mut sorted: Vec<f64> = ratio.draws.iter().copied().filter(|d| *d > 0.0).collect();
    sorted.sort_by(f64::total_cmp);
    if sorted.is_empty() {
        return Err(Error::compute(format!(
            "corner figure: {} has no positive draw",
            ratio.label
        )));
    }
    let at = |p: f64| sorted[((sorted.len() - 1) as f64 * p).round() as usize];
    let ends = [at(OUTSIDE), at(1.0 - OUTSIDE)];
    Ok(Axis::covering(ends, Scale::Log, &ratio.label)?.padded(0.04, 0.04))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ratio(label: &str, scale: f64) -> CornerRatio {
        let draws = (0..400).map(|i| scale * (0.01 * f64::from(i % 37)).exp());
        CornerRatio {
            label: label.into(),
            value: "1.2 (1.1–1.3)".into(),
            draws: draws.collect(),
            marks: [1.2 * scale, 1.1 * scale, 1.3 * scale],
        }
    }

    #[test]
    fn draws_and_refuses() {
        let mut figure = CornerFigure {
            title: String::new(),
            ratios: vec![ratio("CO₂/H₂O", 0.1), ratio("CO/H₂O", 1.0)],
        };
        let svg = corner_svg(&figure, Width::Single).expect("a figure");
        assert!(svg.contains("CO₂/H₂O") && svg.contains("1.2 (1.1–1.3)"));
        figure.ratios[1].draws.pop();
        assert!(corner_svg(&figure, Width::Double).is_err());
        figure.ratios.truncate(1);
        assert!(corner_svg(&figure, Width::Double).is_ok());
        figure.ratios[0].draws.iter_mut().for_each(|d| *d = -1.0);
        assert!(corner_svg(&figure, Width::Double).is_err());
        assert!(corner_svg(&CornerFigure::default(), Width::Double).is_err());
    }
}
