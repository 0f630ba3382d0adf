//! Ratios under different choices: a panel per ratio, a row per choice.

use super::axis::{Axis, Scale, Ticks};
use super::canvas::{Anchor, Canvas, Type, page};
use super::marker::{Mark, Shape, arrow};
use super::panel::{Panel, x_ticks};
use super::standing::Bounds;
use super::style::{
    BLACK, DARK, DOTTED, FAINT, LABEL_PT, LINE_PT, PALE, Stroke, TICK_PT, TITLE_PT, WHITE, Width,
    series_colour,
};
use super::text::{elide, width_pt, wrap};
use crate::ground::{Error, Result};

/// Ratios under different choices; the first row is the reference.
#[derive(Clone, Debug, Default)]
pub struct AlternativesFigure {
    /// Heading; empty for none.
    pub title: String,
    /// Explanation under the heading; empty for none.
    pub note: String,
    /// One label per row, from above.
    pub labels: Vec<String>,
    /// Rows that the data rule out, drawn without colour; rows beyond its end are not.
    pub ruled_out: Vec<bool>,
    /// One panel per ratio.
    pub panels: Vec<AlternativePanel>,
}

/// One ratio.
#[derive(Clone, Debug, Default)]
pub struct AlternativePanel {
    /// Name of the ratio.
    pub ratio: String,
    /// A narrower interval of the first row, drawn as a darker band.
    pub inner: Option<Bounds>,
    /// One point per row; none where a choice gives no ratio.
    pub points: Vec<Option<AlternativePoint>>,
}

/// A ratio under one choice.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AlternativePoint {
    /// Median or limit; positive.
    pub value: f64,
    /// What it stands for.
    pub reach: Reach,
}

/// What a drawn value stands for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Reach {
    /// A value with its 68.3 % interval.
    Interval(Bounds),
    /// An upper limit.
    Below,
    /// A lower limit.
    Above,
}

const EDGE_PT: f64 = 3.0;
/// Height of a row, pt.
const ROW_PT: f64 = 9.5;
/// Blank between panels, pt.
const BETWEEN_PT: f64 = 18.0;
/// Narrowest panel, pt.
const NARROWEST_PT: f64 = 74.0;
/// Most of the width that labels may take.
const LABEL_SHARE: f64 = 0.4;
/// Length of a limit's arrow, pt.
const ARROW_PT: f64 = 9.0;
/// Bars may widen the axis beyond the values by this factor.
const BAR_REACH: f64 = 10.0;

/// Draws every ratio in a panel of its own on a logarithmic axis: the first row's interval as a band
/// through all rows, each choice as a point with its 68.3 % interval or as a limit. Panels stand side
/// by side and, where the page is too narrow, below each other.
///
/// # Errors
/// No panel, a panel without a positive value, or a number of points other than of labels.
pub fn alternatives_svg(figure: &AlternativesFigure, width: Width) -> Result<String> {
    if figure.panels.is_empty() {
        return Err(Error::compute("alternatives figure: no ratio"));
    }
    for panel in &figure.panels {
        if panel.points.len() != figure.labels.len() {
            return Err(Error::compute(format!(
                "alternatives figure: {} has {} points for {} labels",
                panel.ratio,
                panel.points.len(),
                figure.labels.len()
            )));
        }
    }
    let layout = Layout::new(figure, width);
    let panels = layout.place(figure)?;
    let bottom = panels.iter().map(Panel::bottom).fold(0.0, f64::max) + 2.0 * LINE_PT;
    Ok(page(width.points(), bottom, |canvas| {
        canvas.heading(&layout.title, (EDGE_PT, EDGE_PT));
        for (i, line) in layout.note.iter().enumerate() {
            let y = EDGE_PT + layout.heading_pt() + (i as f64 + 0.5) * LINE_PT;
            canvas.text(line, (EDGE_PT, y), Type::new(TICK_PT, Anchor::Start));
        }
        for (i, (panel, data)) in panels.iter().zip(&figure.panels).enumerate() {
            if i % layout.across == 0 {
                layout.draw_labels(canvas, panel);
            }
            draw(canvas, panel, data, &figure.ruled_out);
        }
    }))
}

struct Layout {
    title: Vec<String>,
    note: Vec<String>,
    labels: Vec<String>,
    left: f64,
    across: usize,
    panel_pt: f64,
    height_pt: f64,
}

impl Layout {
    fn new(figure: &AlternativesFigure, width: Width) -> Self {
        let page = width.points();
        let labels: Vec<String> = figure
            .labels
            .iter()
            .map(|l| elide(l.trim(), TICK_PT, false, LABEL_SHARE * page))
            .collect();
        let widest = labels.iter().map(|l| width_pt(l, TICK_PT, false));
        let left = EDGE_PT + widest.fold(0.0, f64::max) + 5.0;
        let room = page - left - EDGE_PT - 6.0;
        let fits = ((room + BETWEEN_PT) / (NARROWEST_PT + BETWEEN_PT)).floor() as usize;
        let count = figure.panels.len();
        // As few lines as fit, and these about equally full.
        let lines = count.div_ceil(fits.max(1));
        let across = count.div_ceil(lines);
        Self {
            title: wrap(&figure.title, TITLE_PT, true, page - 2.0 * EDGE_PT, 2),
            note: wrap(&figure.note, TICK_PT, false, page - 2.0 * EDGE_PT, 3),
            left,
            across,
            panel_pt: (room - BETWEEN_PT * (across - 1) as f64) / across as f64,
            height_pt: ROW_PT * labels.len() as f64 + 4.0,
            labels,
        }
    }

    fn heading_pt(&self) -> f64 {
        self.title.len() as f64 * (LINE_PT + 1.0)
    }

    fn place(&self, figure: &AlternativesFigure) -> Result<Vec<Panel>> {
        let note_pt = self.note.len() as f64 * LINE_PT;
        let first = 2.0 * EDGE_PT + self.heading_pt() + note_pt + LINE_PT + 2.0;
        let pitch = self.height_pt + 3.0 * LINE_PT + 8.0;
        figure
            .panels
            .iter()
            .enumerate()
            .map(|(i, data)| {
                let (line, column) = (i / self.across, i % self.across);
                Ok(Panel {
                    left: self.left + column as f64 * (self.panel_pt + BETWEEN_PT),
                    top: first + line as f64 * pitch,
                    width: self.panel_pt,
                    height: self.height_pt,
                    x: range(data)?,
                    y: Axis {
                        lo: 0.0,
                        hi: 1.0,
                        scale: Scale::Linear,
                    },
                })
            })
            .collect()
    }

    fn draw_labels(&self, canvas: &mut Canvas, panel: &Panel) {
        for (i, label) in self.labels.iter().enumerate() {
            let mut how = Type::new(TICK_PT, Anchor::End);
            if i > 0 {
                how = how.colour(DARK);
            }
            canvas.text(label, (self.left - 4.0, row_y(panel, i)), how);
        }
    }
}

fn row_y(panel: &Panel, row: usize) -> f64 {
    panel.top + 2.0 + (row as f64 + 0.5) * ROW_PT
}

/// All values, and bars as far as they do not dwarf the values.
fn range(data: &AlternativePanel) -> Result<Axis> {
    let what = format!("axis of {}", data.ratio);
    let values: Vec<f64> = data.points.iter().flatten().map(|p| p.value).collect();
    let core = Axis::covering(values.iter().copied(), Scale::Log, &what)?;
    let reach = (core.lo / BAR_REACH, core.hi * BAR_REACH);
    let mut all = values;
    for point in data.points.iter().flatten() {
        match point.reach {
            Reach::Interval(b) => all.extend(
                [b.low, b.high]
                    .into_iter()
                    .filter(|v| v.is_finite())
                    .map(|v| v.clamp(reach.0, reach.1)),
            ),
            // An arrow needs some room on its side.
            Reach::Below => all.push(point.value / 1.3),
            Reach::Above => all.push(point.value * 1.3),
        }
    }
    Ok(Axis::covering(all, Scale::Log, &what)?.padded(0.07, 0.07))
}

fn draw(canvas: &mut Canvas, panel: &Panel, data: &AlternativePanel, ruled_out: &[bool]) {
    if let Some(Some(reference)) = data.points.first() {
        if let Reach::Interval(b) = reference.reach {
            let (low, high) = (edge(panel, b.low), edge(panel, b.high));
            canvas.rectangle((low, panel.top), (high, panel.bottom()), FAINT, 1.0);
        }
        if let Some(b) = data.inner {
            let (low, high) = (edge(panel, b.low), edge(panel, b.high));
            canvas.rectangle((low, panel.top), (high, panel.bottom()), PALE, 0.7);
        }
        let x = panel.px_inside(reference.value);
        canvas.path(&[(x, panel.top), (x, panel.bottom())], DOTTED);
    }
    for (i, point) in data.points.iter().enumerate() {
        let y = row_y(panel, i);
        match point {
            Some(point) => {
                let look = if i == 0 {
                    Look::Reference
                } else if ruled_out.get(i) == Some(&true) {
                    Look::RuledOut
                } else {
                    Look::Plain
                };
                draw_point(canvas, panel, point, y, look);
            }
            None => {
                let p = (panel.left + 4.0, y);
                canvas.text("–", p, Type::new(TICK_PT, Anchor::Start).colour(DARK));
            }
        }
    }
    panel.frame(
        canvas,
        &x_ticks(&panel.x, panel.width, 0),
        &Ticks::default(),
        true,
    );
    let name = elide(data.ratio.trim(), LABEL_PT, true, panel.width);
    let p = (
        panel.left + 0.5 * panel.width,
        panel.top - 0.5 * LINE_PT - 1.0,
    );
    canvas.text(&name, p, Type::new(LABEL_PT, Anchor::Middle).bold());
}

/// An end of a bar; one that is not a positive number lies at the left edge.
fn edge(panel: &Panel, v: f64) -> f64 {
    if v > 0.0 {
        panel.px_inside(v)
    } else {
        panel.left
    }
}

/// How a row is drawn.
#[derive(Clone, Copy, PartialEq)]
enum Look {
    Reference,
    Plain,
    RuledOut,
}

impl Look {
    fn mark(self) -> Mark {
        let (shape, colour) = match self {
            Self::Reference => (Shape::Diamond, BLACK),
            Self::Plain => (Shape::Circle, series_colour(0)),
            Self::RuledOut => (Shape::Circle, WHITE),
        };
        Mark {
            shape,
            filled: true,
            colour,
        }
    }

    fn bar(self) -> Stroke {
        match self {
            Self::Reference => Stroke::solid(BLACK, 1.2),
            Self::Plain => Stroke::solid(BLACK, 0.7),
            Self::RuledOut => Stroke::solid(BLACK, 0.7).dashed(&[1.5, 1.5]),
        }
    }

    fn radius_pt(self) -> f64 {
        if self == Self::Reference { 2.6 } else { 2.0 }
    }
}

fn draw_point(canvas: &mut Canvas, panel: &Panel, point: &AlternativePoint, y: f64, look: Look) {
    let x = panel.px_inside(point.value);
    let bar = look.bar();
    let to = match point.reach {
        Reach::Interval(b) => {
            canvas.path(&[(edge(panel, b.low), y), (edge(panel, b.high), y)], bar);
            look.mark().draw(canvas, (x, y), look.radius_pt());
            return;
        }
        Reach::Below => (x - ARROW_PT).max(panel.left),
        Reach::Above => (x + ARROW_PT).min(panel.right()),
    };
    arrow(canvas, (x, y), (to, y), bar, 2.6);
    canvas.path(&[(x, y - 2.8), (x, y + 2.8)], bar);
}
