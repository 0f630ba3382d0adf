//! A spectrum with the places of known bands.

use super::axis::{Axis, Scale};
use super::canvas::{Anchor, Canvas, Type, page};
use super::label::{Plan, plan};
use super::panel::{Panel, labels_width, title_lines, unit_with_power, x_ticks, y_ticks};
use super::style::{BLACK, DARK, DOTTED, LINE_PT, Stroke, TICK_PT, TITLE_PT, Width};
use super::text::wrap;
use crate::ground::{Error, Result};

/// A spectrum and names over it.
#[derive(Clone, Debug, Default)]
pub struct QuicklookFigure {
    /// Heading; empty for none.
    pub title: String,
    /// Name and unit of the abscissa as printed.
    pub x_label: String,
    /// Name of the ordinate without its unit.
    pub y_quantity: String,
    /// Unit of the ordinate; a power of ten is put before it.
    pub y_unit: String,
    /// Sample positions, ascending.
    pub x: Vec<f64>,
    /// Sample values; a value that is not finite breaks the line.
    pub y: Vec<f64>,
    /// Places to be named, the most important first; those outside the spectrum are not drawn. When
    /// not all names find room, the last ones lose theirs and the figure says how many.
    pub positions: Vec<Position>,
}

/// A named abscissa.
#[derive(Clone, Debug, Default)]
pub struct Position {
    /// Abscissa in the spectrum's unit.
    pub x: f64,
    /// Name as printed, for example `CO₂`.
    pub label: String,
}

const EDGE_PT: f64 = 3.0;
/// Rounds in which margins and ranges settle.
const ROUNDS: usize = 3;
const RIGHT_PT: f64 = 11.0;
/// Height of the frame without names, pt, for the two widths.
const FRAME_PT: (f64, f64) = (120.0, 170.0);
const SPECTRUM: Stroke = Stroke::solid(BLACK, 0.6);

/// Draws a spectrum with named positions; where samples crowd, only the extremes are kept.
///
/// # Errors
/// Lengths that disagree; nothing finite to draw.
pub fn quicklook_svg(figure: &QuicklookFigure, width: Width) -> Result<String> {
    if figure.x.len() != figure.y.len() {
        return Err(Error::compute(format!(
            "quick-look figure: {} positions but {} values",
            figure.x.len(),
            figure.y.len()
        )));
    }
    let layout = Layout::new(figure, width)?;
    Ok(page(width.points(), layout.height(), |canvas| {
        layout.draw(canvas)
    }))
}

struct Layout<'a> {
    figure: &'a QuicklookFigure,
    title: Vec<String>,
    panel: Panel,
    y_title: Vec<String>,
    exponent: i32,
    shown: Vec<&'a Position>,
    labels: Plan,
}

impl<'a> Layout<'a> {
    fn new(figure: &'a QuicklookFigure, width: Width) -> Result<Self> {
        let finite = figure.x.iter().zip(&figure.y);
        let finite = finite.filter(|(x, y)| x.is_finite() && y.is_finite());
        let x = finite.clone().map(|(x, _)| *x);
        let x = Axis::covering(x, Scale::Linear, "abscissa of the spectrum")?;
        let y = finite.map(|(_, y)| *y);
        let y = Axis::covering(y, Scale::Linear, "ordinate of the spectrum")?.padded(0.05, 0.05);
        let room = width.points() - 2.0 * EDGE_PT;
        let title = wrap(&figure.title, TITLE_PT, true, room, 3);
        let exponent = y.exponent();
        let wanted = if width == Width::Single {
            FRAME_PT.0
        } else {
            FRAME_PT.1
        };
        let unit = unit_with_power(&figure.y_unit, exponent);
        let panel = Panel {
            left: EDGE_PT,
            top: 2.0 * EDGE_PT + title.len() as f64 * (LINE_PT + 1.0),
            width: width.points() - EDGE_PT - RIGHT_PT,
            height: wanted,
            x,
            y,
        };
        let within = |p: &&Position| (0.0..=1.0).contains(&panel.x.fraction(p.x));
        let mut layout = Self {
            figure,
            title,
            y_title: title_lines(figure.y_quantity.trim(), &unit, wanted),
            exponent,
            shown: figure.positions.iter().filter(within).collect(),
            labels: plan(&[], 0.0, 0.0),
            panel,
        };
        layout.settle(y, wanted, width.points() - RIGHT_PT);
        Ok(layout)
    }

    /// Names open the range, wider tick labels narrow the frame: a few rounds settle both.
    fn settle(&mut self, closed: Axis, height: f64, right: f64) {
        for _ in 0..ROUNDS {
            let y = y_ticks(&self.panel.y, self.panel.height, self.exponent);
            let titles = LINE_PT * self.y_title.len() as f64;
            self.panel.left = EDGE_PT + labels_width(&y) + 2.0 + titles;
            self.panel.width = right - self.panel.left;
            let named = self.shown.iter();
            let named: Vec<(f64, &str)> = named
                .map(|p| (self.panel.px(p.x), p.label.as_str()))
                .collect();
            self.labels = plan(&named, self.panel.left, self.panel.right());
            self.panel.height = height + self.labels.height_pt;
            self.panel.y = closed.opened(self.labels.height_pt / self.panel.height);
        }
    }

    /// Height of the page, pt.
    fn height(&self) -> f64 {
        let remark = if self.labels.unplaced > 0 {
            LINE_PT
        } else {
            0.0
        };
        self.panel.bottom() + 2.0 * LINE_PT + 5.0 + remark
    }

    fn draw(&self, canvas: &mut Canvas) {
        canvas.heading(&self.title, (EDGE_PT, EDGE_PT));
        let panel = &self.panel;
        let zero = panel.y.fraction(0.0);
        if zero > 0.0 && zero < 1.0 {
            let y = panel.py(0.0);
            canvas.path(&[(panel.left, y), (panel.right(), y)], DOTTED);
        }
        panel.curve(canvas, &self.figure.x, &self.figure.y, SPECTRUM);
        self.single_sample(canvas);
        let foot = |k: usize| self.foot(self.shown[k].x);
        self.labels.draw(canvas, panel.top, &foot, &|_| None);
        if self.labels.unplaced > 0 {
            let text = format!("{} more places not named", self.labels.unplaced);
            let p = (panel.right(), self.height() - 0.5 * LINE_PT - 1.0);
            canvas.text(&text, p, Type::new(TICK_PT, Anchor::End).colour(DARK));
        }
        let x = x_ticks(&panel.x, panel.width, 0);
        let y = y_ticks(&panel.y, panel.height, self.exponent);
        panel.frame(canvas, &x, &y, true);
        panel.x_title(canvas, &self.figure.x_label, 2.0 * LINE_PT - 1.5);
        panel.y_title(canvas, &self.y_title, labels_width(&y) + 2.0);
    }

    /// A lone sample makes no line; show it as a point.
    fn single_sample(&self, canvas: &mut Canvas) {
        let (x, y) = (&self.figure.x, &self.figure.y);
        let mut finite = (0..x.len()).filter(|&i| x[i].is_finite() && y[i].is_finite());
        if let (Some(i), None) = (finite.next(), finite.next()) {
            canvas.disc((self.panel.px(x[i]), self.panel.py(y[i])), 1.0, BLACK);
        }
    }

    /// Where a leader ends: just above the spectrum near this abscissa.
    fn foot(&self, at: f64) -> f64 {
        let panel = &self.panel;
        let x = panel.px(at);
        let samples = self.figure.x.iter().zip(&self.figure.y);
        let tops = samples
            .filter(|(sx, sy)| sy.is_finite() && (panel.px(**sx) - x).abs() < 2.0)
            .map(|(_, sy)| panel.py_inside(*sy));
        let top = tops.fold(f64::INFINITY, f64::min);
        if top.is_finite() {
            top - 2.0
        } else {
            panel.bottom()
        }
    }
}
