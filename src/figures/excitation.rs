//! Columns from single lines against the energy of their upper level.

use super::axis::{Axis, Scale, Ticks};
use super::canvas::{Anchor, Canvas, Point, Type, page};
use super::marker::{Mark, Shape, arrow};
use super::panel::{Panel, labels_width, title_lines, x_ticks, y_ticks};
use super::style::{
    BLACK, DARK, DOTTED, LABEL_PT, LINE_PT, MIDDLE, Stroke, TICK_PT, TITLE_PT, WHITE, Width,
    series_colour,
};
use super::text::{elide, width_pt, wrap};
use crate::ground::{Error, Result};

/// One panel per species with a common abscissa.
#[derive(Clone, Debug, Default)]
pub struct ExcitationFigure {
    /// Heading; empty for none.
    pub title: String,
    /// Name and unit of the abscissa as printed.
    pub x_label: String,
    /// Name of the ordinate as printed.
    pub y_label: String,
    /// The panels from top to bottom.
    pub panels: Vec<ExcitationPanel>,
}

/// One species.
#[derive(Clone, Debug, Default)]
pub struct ExcitationPanel {
    /// Its name as printed.
    pub name: String,
    /// A remark after the name, for example how many lines are not drawn.
    pub remark: String,
    /// Its lines.
    pub points: Vec<ExcitationPoint>,
}

/// One line.
#[derive(Clone, Debug, Default)]
pub struct ExcitationPoint {
    /// Energy of the upper level.
    pub x: f64,
    /// Column of the line over the common one.
    pub ratio: f64,
    /// Its error.
    pub sigma: f64,
    /// True for a blend: drawn open.
    pub blend: bool,
    /// True for a line that does not belong: drawn as a cross, with its name.
    pub discordant: bool,
    /// Its name as printed.
    pub label: String,
}

const EDGE_PT: f64 = 3.0;
const RIGHT_PT: f64 = 11.0;
/// Height of one panel, pt, for the two widths.
const FRAME_PT: (f64, f64) = (95.0, 105.0);
const BETWEEN_PT: f64 = 4.0;
/// Least and greatest ratio shown; what lies beyond gets an arrow at the edge.
const REACH: (f64, f64) = (0.1, 10.0);
const MARK_PT: f64 = 2.0;
/// Room above the points for the panel's name, as a share of the axis.
const HEAD: f64 = 0.16;

/// Draws the panels.
///
/// # Errors
/// No panel with a point; a value that is not finite.
pub fn excitation_svg(figure: &ExcitationFigure, width: Width) -> Result<String> {
    let layout = Layout::new(figure, width)?;
    let last = layout.panels.last().expect("invariant: at least one panel");
    let height = last.bottom() + 2.0 * LINE_PT + 5.0;
    Ok(page(width.points(), height, |canvas| layout.draw(canvas)))
}

struct Layout<'a> {
    figure: &'a ExcitationFigure,
    title: Vec<String>,
    panels: Vec<Panel>,
    x: Ticks,
    y: Vec<Ticks>,
    y_title: Vec<String>,
}

impl<'a> Layout<'a> {
    fn new(figure: &'a ExcitationFigure, width: Width) -> Result<Self> {
        let points = || figure.panels.iter().flat_map(|p| &p.points);
        if points().any(|p| ![p.x, p.ratio, p.sigma].iter().all(|v| v.is_finite())) {
            return Err(Error::compute("excitation figure: a value is not finite"));
        }
        let x_axis = Axis::covering(points().map(|p| p.x), Scale::Linear, "upper energies")?
            .padded(0.04, 0.04);
        let page_width = width.points();
        let title = wrap(&figure.title, TITLE_PT, true, page_width - 2.0 * EDGE_PT, 3);
        let top = 2.0 * EDGE_PT + title.len() as f64 * (LINE_PT + 1.0);
        let height = if width == Width::Single {
            FRAME_PT.0
        } else {
            FRAME_PT.1
        };
        let axes = figure
            .panels
            .iter()
            .map(y_axis)
            .collect::<Result<Vec<_>>>()?;
        let y: Vec<Ticks> = axes.iter().map(|a| y_ticks(a, height, 0)).collect();
        let y_title = title_lines(figure.y_label.trim(), "", height);
        let labels = y.iter().map(labels_width).fold(0.0, f64::max);
        let left = EDGE_PT + labels + 2.0 + LINE_PT * y_title.len() as f64;
        let panels: Vec<Panel> = axes
            .into_iter()
            .enumerate()
            .map(|(i, y)| Panel {
                left,
                top: top + i as f64 * (height + BETWEEN_PT),
                width: page_width - RIGHT_PT - left,
                height,
                x: x_axis,
                y,
            })
            .collect();
        Ok(Self {
            figure,
            title,
            x: x_ticks(&x_axis, panels[0].width, 0),
            panels,
            y,
            y_title,
        })
    }

    fn draw(&self, canvas: &mut Canvas) {
        canvas.heading(&self.title, (EDGE_PT, EDGE_PT));
        let labels = self.y.iter().map(labels_width).fold(0.0, f64::max);
        for (i, panel) in self.panels.iter().enumerate() {
            let content = &self.figure.panels[i];
            let one = panel.py_inside(1.0);
            canvas.path(&[(panel.left, one), (panel.right(), one)], DOTTED);
            for p in &content.points {
                draw_point(canvas, panel, p, i);
            }
            draw_names(canvas, panel, &content.points);
            draw_head(canvas, panel, content);
            let lowest = i + 1 == self.panels.len();
            panel.frame(canvas, &self.x, &self.y[i], lowest);
            panel.y_title(canvas, &self.y_title, labels + 2.0);
            if lowest {
                panel.x_title(canvas, &self.figure.x_label, 2.0 * LINE_PT - 1.5);
            }
        }
    }
}

/// Logarithmic axis over the points and most of their bars, at least 0.5 to 2.
fn y_axis(panel: &ExcitationPanel) -> Result<Axis> {
    let ends = panel
        .points
        .iter()
        .flat_map(|p| [p.ratio - p.sigma, p.ratio + p.sigma]);
    let inside = ends.map(|v| v.clamp(REACH.0, REACH.1)).chain([0.5, 2.0]);
    Ok(Axis::covering(inside, Scale::Log, "columns of lines")?
        .padded(0.06, 0.06)
        .opened(HEAD))
}

fn draw_head(canvas: &mut Canvas, panel: &Panel, content: &ExcitationPanel) {
    let (x, y) = (panel.left + 6.0, panel.top + 8.0);
    let name = elide(content.name.trim(), LABEL_PT, true, 0.4 * panel.width);
    canvas.text(&name, (x, y), Type::new(LABEL_PT, Anchor::Start).bold());
    let from = x + width_pt(&name, LABEL_PT, true) + 8.0;
    let remark = elide(
        content.remark.trim(),
        TICK_PT,
        false,
        panel.right() - from - 6.0,
    );
    canvas.text(
        &remark,
        (from, y),
        Type::new(TICK_PT, Anchor::Start).colour(DARK),
    );
}

fn draw_point(canvas: &mut Canvas, panel: &Panel, p: &ExcitationPoint, series: usize) {
    let at = place(panel, p);
    let inside = |v: f64| {
        if v > 0.0 {
            panel.py(v).clamp(cap(panel), panel.bottom())
        } else {
            panel.bottom()
        }
    };
    let colour = if p.discordant { BLACK } else { MIDDLE };
    let bar = [
        (at.0, inside(p.ratio - p.sigma)),
        (at.0, inside(p.ratio + p.sigma)),
    ];
    canvas.path(&bar, Stroke::solid(colour, 0.5));
    let (above, below) = (panel.py(p.ratio) < at.1, panel.py(p.ratio) > at.1);
    if above || below || p.ratio <= 0.0 {
        let from = if above { at.1 + 8.0 } else { at.1 - 8.0 };
        arrow(canvas, (at.0, from), at, Stroke::solid(BLACK, 0.8), 3.0);
        return;
    }
    let mark = Mark {
        shape: if p.discordant {
            Shape::Cross
        } else {
            Shape::Circle
        },
        filled: !p.blend,
        colour: if p.discordant {
            BLACK
        } else {
            series_colour(series)
        },
    };
    mark.draw(canvas, at, if p.discordant { 3.2 } else { MARK_PT });
}

/// Ordinate on the page under the room for the panel's name.
fn cap(panel: &Panel) -> f64 {
    panel.top + HEAD * panel.height
}

/// Where a point is drawn: at the edge when it lies beyond.
fn place(panel: &Panel, p: &ExcitationPoint) -> Point {
    let y = if p.ratio > 0.0 {
        panel.py(p.ratio)
    } else {
        panel.bottom()
    };
    (panel.px_inside(p.x), y.clamp(cap(panel), panel.bottom()))
}

/// Names of discordant lines beside their crosses, where they touch neither each other nor a mark.
fn draw_names(canvas: &mut Canvas, panel: &Panel, points: &[ExcitationPoint]) {
    type Box4 = (f64, f64, f64, f64);
    let marks = points.iter().map(|p| place(panel, p));
    let mut taken: Vec<Box4> = marks
        .map(|(x, y)| (x - 3.0, y - 3.0, x + 3.0, y + 3.0))
        .collect();
    let apart = |a: &Box4, b: &Box4| a.2 < b.0 || b.2 < a.0 || a.3 < b.1 || b.3 < a.1;
    for p in points.iter().filter(|p| p.discordant) {
        let (x, y) = place(panel, p);
        let label = elide(p.label.trim(), TICK_PT, false, 0.4 * panel.width);
        let long = width_pt(&label, TICK_PT, false);
        let tries = [(5.0, 0.0), (-5.0 - long, 0.0), (5.0, 9.0), (5.0, -9.0)];
        let more = [
            (-0.5 * long, 11.0),
            (-0.5 * long, -11.0),
            (-5.0 - long, 9.0),
            (-5.0 - long, -9.0),
        ];
        let spot = tries.iter().chain(&more).find_map(|(dx, dy)| {
            let b = (x + dx, y + dy - 4.0, x + dx + long, y + dy + 4.0);
            let inside = b.0 > panel.left + 2.0
                && b.2 < panel.right() - 2.0
                && b.1 > panel.top + 14.0
                && b.3 < panel.bottom() - 2.0;
            (inside && taken.iter().all(|t| apart(t, &b))).then_some(b)
        });
        // A name without room is left to the table.
        if let Some(b) = spot {
            taken.push(b);
            let white = Stroke::solid(WHITE, 0.0);
            canvas.rectangle((b.0, b.1), (b.2, b.3), white.colour, 0.8);
            canvas.text(&label, (b.0, b.1 + 4.0), Type::new(TICK_PT, Anchor::Start));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn point(x: f64, ratio: f64) -> ExcitationPoint {
        ExcitationPoint {
            x,
            ratio,
            sigma: 0.1,
            label: format!("line {x}"),
            ..ExcitationPoint::default()
        }
    }

    #[test]
    fn draws_and_refuses() {
        let mut figure = ExcitationFigure {
            x_label: "Energy (eV)".into(),
            y_label: "Column over the common one".into(),
            panels: vec![ExcitationPanel {
                name: "Fe I".into(),
                remark: "3 lines".into(),
                points: vec![
                    point(3.1, 1.0),
                    point(4.0, 25.0),
                    ExcitationPoint {
                        discordant: true,
                        ..point(3.5, 3.0)
                    },
                ],
            }],
            ..ExcitationFigure::default()
        };
        for width in [Width::Single, Width::Double] {
            let svg = excitation_svg(&figure, width).expect("a figure");
            assert!(svg.contains("line 3.5") && svg.contains("Fe I"));
            assert!(!svg.contains("line 3.1"));
        }
        figure.panels[0].points[0].ratio = f64::NAN;
        assert!(excitation_svg(&figure, Width::Double).is_err());
        assert!(excitation_svg(&ExcitationFigure::default(), Width::Double).is_err());
    }
}
