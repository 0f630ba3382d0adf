//! Named curves y(x), for example distances against time or g-factors against velocity.

use super::axis::{Axis, Scale, Ticks};
use super::canvas::{Anchor, Canvas, Type, page};
use super::label::{Plan, plan, spread};
use super::panel::{Panel, labels_width, title_lines, unit_with_power, x_ticks, y_ticks};
use super::style::{DARK, DOTTED, LABEL_PT, LINE_PT, PALE, Stroke, TITLE_PT, Width, series};
use super::text::{elide, width_pt, wrap};
use crate::ground::{Error, Result};

/// Curves in one frame.
#[derive(Clone, Debug, Default)]
pub struct CurveFigure {
    /// Heading; empty for none.
    pub title: String,
    /// Name and unit of the abscissa as printed.
    pub x_label: String,
    /// Name of the ordinate without its unit.
    pub y_quantity: String,
    /// Unit of the ordinate; a power of ten is put before it where that shortens the tick labels.
    pub y_unit: String,
    /// Scale of the abscissa.
    pub x_scale: Scale,
    /// Scale of the ordinate.
    pub y_scale: Scale,
    /// The curves; each is named at its right end.
    pub curves: Vec<Curve>,
    /// Vertical lines, for example the time of an observation.
    pub marks: Vec<VerticalMark>,
    /// Ticks of the abscissa, for example dates; empty for round numbers. Ticks outside the range are
    /// not drawn, nor are labels that would touch their left neighbour.
    pub x_ticks: Vec<Tick>,
}

/// One curve.
#[derive(Clone, Debug, Default)]
pub struct Curve {
    /// Name as printed.
    pub label: String,
    /// Abscissae in the order in which they are joined.
    pub x: Vec<f64>,
    /// Ordinates; a value that is not finite breaks the line.
    pub y: Vec<f64>,
}

/// A vertical line with a name.
#[derive(Clone, Debug, Default)]
pub struct VerticalMark {
    /// Abscissa.
    pub x: f64,
    /// Name as printed; empty for none.
    pub label: String,
}

/// A tick that the caller places.
#[derive(Clone, Debug, Default)]
pub struct Tick {
    /// Abscissa.
    pub x: f64,
    /// Label as printed.
    pub label: String,
}

const EDGE_PT: f64 = 3.0;
/// Rounds in which margins and ranges settle.
const ROUNDS: usize = 3;
/// Height of the frame, pt, unless many curves need more.
const FRAME_PT: (f64, f64) = (130.0, 190.0);
/// Length of the line sample beside a name, pt.
const SAMPLE_PT: f64 = 13.0;
/// Room for the bend from a curve's end to its name, pt.
const LEADER_PT: f64 = 8.0;
/// Distance of names at the curves' ends, pt.
const NAME_PT: f64 = 8.8;

/// Draws curves with their names at the right end.
///
/// # Errors
/// No curve; lengths that disagree; nothing finite; a value ≤ 0 on a logarithmic axis.
pub fn range_svg(figure: &CurveFigure, width: Width) -> Result<String> {
    for c in &figure.curves {
        if c.x.len() != c.y.len() {
            return Err(Error::compute(format!(
                "curve {:?}: {} abscissae but {} ordinates",
                c.label,
                c.x.len(),
                c.y.len()
            )));
        }
    }
    let layout = Layout::new(figure, width)?;
    let height = layout.panel.bottom() + 2.0 * LINE_PT + 5.0;
    Ok(page(width.points(), height, |canvas| layout.draw(canvas)))
}

struct Layout<'a> {
    figure: &'a CurveFigure,
    title: Vec<String>,
    panel: Panel,
    x: Ticks,
    y: Ticks,
    y_title: Vec<String>,
    marks: Plan,
    /// Names of the curves, shortened.
    names: Vec<String>,
}

impl<'a> Layout<'a> {
    fn new(figure: &'a CurveFigure, width: Width) -> Result<Self> {
        let (x_axis, y_axis) = axes(figure)?;
        let page_width = width.points();
        let title = wrap(&figure.title, TITLE_PT, true, page_width - 2.0 * EDGE_PT, 3);
        let top = 2.0 * EDGE_PT + title.len() as f64 * (LINE_PT + 1.0);
        let wanted = if width == Width::Single {
            FRAME_PT.0
        } else {
            FRAME_PT.1
        };
        let height = f64::max(wanted, (figure.curves.len() as f64 + 1.0) * NAME_PT);
        let short = |c: &Curve| elide(c.label.trim(), LABEL_PT, false, 0.3 * page_width);
        let names: Vec<String> = figure.curves.iter().map(short).collect();
        let widths = names.iter().map(|n| width_pt(n, LABEL_PT, false));
        let right = LEADER_PT + SAMPLE_PT + 4.0 + widths.fold(0.0, f64::max) + EDGE_PT;
        let exponent = y_axis.exponent();
        let unit = unit_with_power(&figure.y_unit, exponent);
        let mut layout = Self {
            figure,
            title,
            panel: Panel {
                left: EDGE_PT,
                top,
                width: page_width - EDGE_PT - right,
                height,
                x: x_axis,
                y: y_axis,
            },
            x: Ticks::default(),
            y: Ticks::default(),
            y_title: title_lines(figure.y_quantity.trim(), &unit, height),
            marks: plan(&[], 0.0, 0.0),
            names,
        };
        layout.settle(y_axis, exponent, page_width - right);
        Ok(layout)
    }

    /// Names of marks open the range, wider tick labels narrow the frame: a few rounds settle both.
    fn settle(&mut self, closed: Axis, exponent: i32, right: f64) {
        for _ in 0..ROUNDS {
            self.y = y_ticks(&self.panel.y, self.panel.height, exponent);
            let titles = LINE_PT * self.y_title.len() as f64;
            self.panel.left = EDGE_PT + labels_width(&self.y) + 2.0 + titles;
            self.panel.width = right - self.panel.left;
            let named = named_marks(self.figure, &self.panel);
            self.marks = plan(&named, self.panel.left, self.panel.right());
            self.panel.y = closed.opened(self.marks.height_pt / self.panel.height);
        }
        self.y = y_ticks(&self.panel.y, self.panel.height, exponent);
        self.x = ticks_of(self.figure, &self.panel);
    }

    fn draw(&self, canvas: &mut Canvas) {
        canvas.heading(&self.title, (EDGE_PT, EDGE_PT));
        self.draw_marks(canvas);
        for (k, c) in self.figure.curves.iter().enumerate() {
            self.panel.curve(canvas, &c.x, &c.y, series(k, 1.0));
        }
        self.draw_names(canvas);
        self.panel.frame(canvas, &self.x, &self.y, true);
        self.panel
            .x_title(canvas, &self.figure.x_label, 2.0 * LINE_PT - 1.5);
        let from = labels_width(&self.y) + 2.0;
        self.panel.y_title(canvas, &self.y_title, from);
    }

    fn draw_marks(&self, canvas: &mut Canvas) {
        let panel = &self.panel;
        let top = panel.top + self.marks.height_pt;
        for m in inside(self.figure, panel) {
            let x = panel.px_inside(m.x);
            canvas.path(&[(x, top), (x, panel.bottom())], DOTTED);
        }
        self.marks.draw(canvas, panel.top, &|_| top, &|_| None);
    }

    fn draw_names(&self, canvas: &mut Canvas) {
        let panel = &self.panel;
        let mut ends: Vec<(usize, f64, bool)> = Vec::new();
        for (k, c) in self.figure.curves.iter().enumerate() {
            let finite = (0..c.x.len()).filter(|&i| c.x[i].is_finite() && c.y[i].is_finite());
            let Some(i) = finite.max_by(|&a, &b| c.x[a].total_cmp(&c.x[b])) else {
                continue;
            };
            let touches = panel.px(c.x[i]) > panel.right() - 4.0;
            ends.push((k, panel.py_inside(c.y[i]), touches));
        }
        ends.sort_by(|a, b| a.1.total_cmp(&b.1));
        let wanted: Vec<f64> = ends.iter().map(|e| e.1).collect();
        let half = vec![0.5 * NAME_PT; ends.len()];
        let room = (panel.top, panel.bottom() + NAME_PT);
        let places = spread(&wanted, &half, &|_| NAME_PT, room.0, room.1).unwrap_or(wanted);
        for (&(k, end, touches), y) in ends.iter().zip(places) {
            let style = series(k, 1.0);
            let (x, sample) = (panel.right() + 1.0, panel.right() + LEADER_PT);
            if touches {
                let leader = Stroke::solid(PALE, 0.4);
                canvas.path(&[(x, end), (sample - 1.0, y)], leader);
            }
            canvas.path(&[(sample, y), (sample + SAMPLE_PT, y)], style);
            let p = (sample + SAMPLE_PT + 3.0, y);
            canvas.text(
                &self.names[k],
                p,
                Type::new(LABEL_PT, Anchor::Start).colour(DARK),
            );
        }
    }
}

fn axes(figure: &CurveFigure) -> Result<(Axis, Axis)> {
    if figure.curves.is_empty() {
        return Err(Error::compute("curve figure: no curve to draw"));
    }
    let x = figure.curves.iter().flat_map(|c| c.x.iter().copied());
    let y = figure.curves.iter().flat_map(|c| c.y.iter().copied());
    let x = Axis::covering(x, figure.x_scale, "abscissa of the curves")?;
    let y = Axis::covering(y, figure.y_scale, "ordinate of the curves")?;
    Ok((x, y.padded(0.06, 0.06)))
}

/// The marks within the range of the curves.
fn inside<'a>(figure: &'a CurveFigure, panel: &Panel) -> Vec<&'a VerticalMark> {
    let within = |m: &&VerticalMark| {
        let f = panel.x.fraction(m.x);
        (0.0..=1.0).contains(&f)
    };
    figure.marks.iter().filter(within).collect()
}

fn named_marks<'a>(figure: &'a CurveFigure, panel: &Panel) -> Vec<(f64, &'a str)> {
    let marks = inside(figure, panel).into_iter();
    marks
        .filter(|m| !m.label.trim().is_empty())
        .map(|m| (panel.px_inside(m.x), m.label.as_str()))
        .collect()
}

/// The caller's ticks where given, otherwise round numbers.
fn ticks_of(figure: &CurveFigure, panel: &Panel) -> Ticks {
    if figure.x_ticks.is_empty() {
        return x_ticks(&panel.x, panel.width, 0);
    }
    let mut given: Vec<&Tick> = figure
        .x_ticks
        .iter()
        .filter(|t| (0.0..=1.0).contains(&panel.x.fraction(t.x)))
        .collect();
    given.sort_by(|a, b| a.x.total_cmp(&b.x));
    let mut ticks = Ticks::default();
    let mut free_from = f64::NEG_INFINITY;
    for t in given {
        let half = 0.5 * width_pt(t.label.trim(), super::style::TICK_PT, false);
        let middle = panel.px(t.x);
        if middle - half >= free_from {
            free_from = middle + half + 4.0;
            ticks.major.push((t.x, t.label.clone()));
        } else {
            ticks.major.push((t.x, String::new()));
        }
    }
    ticks
}
