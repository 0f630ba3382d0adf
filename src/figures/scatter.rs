//! Ratios of comets against a quantity such as heliocentric distance, both on logarithmic axes.

use super::axis::{Axis, Scale, Ticks};
use super::canvas::{Anchor, Canvas, Point, Type, page};
use super::marker::{Mark, Shape, arrow};
use super::panel::{Panel, labels_width, title_lines, x_ticks, y_ticks};
use super::standing::ComparisonValue;
use super::style::{
    BLACK, DARK, FAINT, LABEL_PT, LINE_PT, MIDDLE, Stroke, TICK_PT, TITLE_PT, WHITE, Width,
};
use super::text::{elide, width_pt, wrap};
use crate::ground::{Error, Result};

/// Comets in the plane of a quantity and a ratio.
#[derive(Clone, Debug, Default)]
pub struct ScatterFigure {
    /// Heading; empty for none.
    pub title: String,
    /// Name and unit of the abscissa as printed.
    pub x_label: String,
    /// Name of the ordinate as printed.
    pub y_label: String,
    /// Name of this comet in the key.
    pub this_label: String,
    /// Names of the classes in the key.
    pub classes: Vec<String>,
    /// Known comets.
    pub points: Vec<ScatterPoint>,
    /// This comet, one entry per date.
    pub this: Vec<ScatterPoint>,
    /// A fitted line with its band: x, y, lower and upper edge; empty for none.
    pub line: Vec<(f64, f64, f64, f64)>,
    /// A shaded range of the abscissa with its name.
    pub shaded: Option<(f64, f64, String)>,
}

/// One measurement.
#[derive(Clone, Copy, Debug)]
pub struct ScatterPoint {
    /// Abscissa, positive.
    pub x: f64,
    /// Error bar or limit of the abscissa, where it is a measurement itself.
    pub across: Option<ComparisonValue>,
    /// Ratio or limit.
    pub value: ComparisonValue,
    /// Index into [`ScatterFigure::classes`]; without meaning for this comet.
    pub class: usize,
}

const EDGE_PT: f64 = 3.0;
const RIGHT_PT: f64 = 11.0;
/// Height of the frame, pt, for the two widths.
const FRAME_PT: (f64, f64) = (150.0, 210.0);
const KEY_LINE_PT: f64 = LINE_PT + 1.0;
/// Length of the arrow of a limit, pt.
const ARROW_PT: f64 = 8.0;
/// How far error bars may widen the range beyond the values, as a factor.
const BAR_REACH: f64 = 3.0;
const MARK_PT: f64 = 2.0;

/// Draws the plane.
///
/// # Errors
/// No point; a class that is not in the list; a value or abscissa that is not positive or not
/// finite.
pub fn scatter_svg(figure: &ScatterFigure, width: Width) -> Result<String> {
    if figure
        .points
        .iter()
        .any(|p| p.class >= figure.classes.len())
    {
        return Err(Error::compute("scatter figure: a class is not in the list"));
    }
    let layout = Layout::new(figure, width)?;
    let height = layout.panel.bottom() + 2.0 * LINE_PT + 5.0;
    Ok(page(width.points(), height, |canvas| layout.draw(canvas)))
}

struct Layout<'a> {
    figure: &'a ScatterFigure,
    title: Vec<String>,
    key: Vec<KeyEntry>,
    key_top: f64,
    panel: Panel,
    x: Ticks,
    y: Ticks,
    y_title: Vec<String>,
}

/// Mark (none = this comet), name, place.
struct KeyEntry {
    mark: Option<Mark>,
    name: String,
    x: f64,
    line: usize,
}

impl<'a> Layout<'a> {
    fn new(figure: &'a ScatterFigure, width: Width) -> Result<Self> {
        let page_width = width.points();
        let room = page_width - 2.0 * EDGE_PT;
        let title = wrap(&figure.title, TITLE_PT, true, room, 3);
        let key = key(figure, room);
        let key_top = EDGE_PT + title.len() as f64 * KEY_LINE_PT;
        let key_lines = key.last().map_or(0.0, |e| e.line as f64 + 1.0);
        let height = if width == Width::Single {
            FRAME_PT.0
        } else {
            FRAME_PT.1
        };
        let (x_axis, y_axis) = axes(figure)?;
        let mut panel = Panel {
            left: EDGE_PT,
            top: key_top + key_lines * KEY_LINE_PT + 3.0,
            width: page_width - EDGE_PT - RIGHT_PT,
            height,
            x: x_axis,
            y: y_axis,
        };
        let y = y_ticks(&panel.y, height, 0);
        let y_title = title_lines(figure.y_label.trim(), "", height);
        panel.left = EDGE_PT + labels_width(&y) + 2.0 + LINE_PT * y_title.len() as f64;
        panel.width = page_width - RIGHT_PT - panel.left;
        Ok(Self {
            figure,
            title,
            key,
            key_top,
            x: x_ticks(&panel.x, panel.width, 0),
            y,
            panel,
            y_title,
        })
    }

    fn draw(&self, canvas: &mut Canvas) {
        canvas.heading(&self.title, (EDGE_PT, EDGE_PT));
        self.draw_key(canvas);
        self.draw_shade(canvas);
        self.draw_line(canvas);
        for p in &self.figure.points {
            self.draw_point(canvas, p);
        }
        for p in &self.figure.this {
            self.draw_this(canvas, p);
        }
        self.panel.frame(canvas, &self.x, &self.y, true);
        self.panel
            .x_title(canvas, &self.figure.x_label, 2.0 * LINE_PT - 1.5);
        let from = labels_width(&self.y) + 2.0;
        self.panel.y_title(canvas, &self.y_title, from);
    }

    fn draw_key(&self, canvas: &mut Canvas) {
        for e in &self.key {
            let y = self.key_top + (e.line as f64 + 0.5) * KEY_LINE_PT;
            let how = Type::new(LABEL_PT, Anchor::Start);
            match e.mark {
                Some(mark) => {
                    mark.draw(canvas, (e.x + 3.0, y), MARK_PT);
                    canvas.text(&e.name, (e.x + 8.0, y), how);
                }
                None => {
                    diamond(canvas, (e.x + 4.0, y));
                    canvas.text(&e.name, (e.x + 11.0, y), how.bold().colour(BLACK));
                }
            }
        }
    }

    fn draw_shade(&self, canvas: &mut Canvas) {
        let Some((low, high, name)) = &self.figure.shaded else {
            return;
        };
        let panel = &self.panel;
        let (from, to) = (panel.px_inside(*low), panel.px_inside(*high));
        if to > from {
            canvas.rectangle((from, panel.top), (to, panel.bottom()), FAINT, 1.0);
            let name = elide(name, TICK_PT, false, 0.6 * panel.width);
            let (p, anchor) = self.free_place(from, to, width_pt(&name, TICK_PT, false));
            canvas.text(&name, p, Type::new(TICK_PT, anchor).colour(DARK));
        }
    }

    /// A place for a name beside a range, at the bottom or the top, where no mark lies.
    fn free_place(&self, from: f64, to: f64, length: f64) -> (Point, Anchor) {
        let panel = &self.panel;
        let heights = [panel.bottom() - 7.0, panel.top + 7.0];
        let sides = [(from - 3.0, Anchor::End), (to + 3.0, Anchor::Start)];
        let marks = || self.figure.points.iter().chain(&self.figure.this);
        let free = |&((x, y), anchor): &(Point, Anchor)| {
            let left = if anchor == Anchor::End { x - length } else { x };
            let inside = left > panel.left + 2.0 && left + length < panel.right() - 2.0;
            let near = |m: &ScatterPoint| {
                let (mx, my) = (panel.px(m.x), panel.py(m.value.main()));
                mx > left - 4.0 && mx < left + length + 4.0 && (my - y).abs() < 12.0 + ARROW_PT
            };
            inside && !marks().any(near)
        };
        let places = heights
            .iter()
            .flat_map(|y| sides.iter().map(move |(x, anchor)| ((*x, *y), *anchor)));
        let all: Vec<(Point, Anchor)> = places.collect();
        all.iter().copied().find(|p| free(p)).unwrap_or(all[0])
    }

    fn draw_line(&self, canvas: &mut Canvas) {
        let line = &self.figure.line;
        let column = |f: fn(&(f64, f64, f64, f64)) -> f64| line.iter().map(f).collect::<Vec<_>>();
        let (x, y) = (column(|l| l.0), column(|l| l.1));
        let (low, high) = (column(|l| l.2), column(|l| l.3));
        let edge = Stroke::solid(MIDDLE, 0.5).dashed(&[3.0, 2.0]);
        self.panel.curve(canvas, &x, &low, edge);
        self.panel.curve(canvas, &x, &high, edge);
        self.panel.curve(canvas, &x, &y, Stroke::solid(DARK, 0.9));
    }

    fn draw_point(&self, canvas: &mut Canvas, p: &ScatterPoint) {
        let thin = Stroke::solid(MIDDLE, 0.4);
        let at = self.bar(canvas, p, thin, 2.4);
        let mut mark = Mark::of_group(p.class);
        mark.filled = matches!(p.value, ComparisonValue::Measured { .. });
        mark.draw(canvas, at, MARK_PT);
    }

    fn draw_this(&self, canvas: &mut Canvas, p: &ScatterPoint) {
        let at = self.bar(canvas, p, Stroke::solid(BLACK, 1.4), 4.0);
        diamond(canvas, at);
    }

    /// Error bar or arrow; gives the place of the mark.
    fn bar(&self, canvas: &mut Canvas, p: &ScatterPoint, stroke: Stroke, head_pt: f64) -> Point {
        let panel = &self.panel;
        let (x, y) = (panel.px_inside(p.x), panel.py_inside(p.value.main()));
        match p.value {
            ComparisonValue::Measured { bar, .. } => {
                let end = |v: f64| {
                    if v > 0.0 {
                        panel.py_inside(v)
                    } else {
                        panel.bottom()
                    }
                };
                canvas.path(&[(x, end(bar.low)), (x, end(bar.high))], stroke);
            }
            ComparisonValue::UpperLimit(_) => {
                let to = (y + ARROW_PT).min(panel.bottom());
                arrow(canvas, (x, y), (x, to), stroke, head_pt);
            }
            ComparisonValue::LowerLimit(_) => {
                let to = (y - ARROW_PT).max(panel.top);
                arrow(canvas, (x, y), (x, to), stroke, head_pt);
            }
        }
        self.bar_across(canvas, p, stroke, head_pt);
        (x, y)
    }

    fn bar_across(&self, canvas: &mut Canvas, p: &ScatterPoint, stroke: Stroke, head_pt: f64) {
        let panel = &self.panel;
        let (x, y) = (panel.px_inside(p.x), panel.py_inside(p.value.main()));
        match p.across {
            None => {}
            Some(ComparisonValue::Measured { bar, .. }) => {
                let low = if bar.low > 0.0 {
                    panel.px_inside(bar.low)
                } else {
                    panel.left
                };
                canvas.path(&[(low, y), (panel.px_inside(bar.high), y)], stroke);
            }
            Some(ComparisonValue::UpperLimit(_)) => {
                let to = (x - ARROW_PT).max(panel.left);
                arrow(canvas, (x, y), (to, y), stroke, head_pt);
            }
            Some(ComparisonValue::LowerLimit(_)) => {
                let to = (x + ARROW_PT).min(panel.right());
                arrow(canvas, (x, y), (to, y), stroke, head_pt);
            }
        }
    }
}

/// The mark of this comet.
fn diamond(canvas: &mut Canvas, p: Point) {
    canvas.disc(p, 4.2, WHITE);
    let mark = Mark {
        shape: Shape::Diamond,
        filled: true,
        colour: BLACK,
    };
    mark.draw(canvas, p, 3.0);
}

fn axes(figure: &ScatterFigure) -> Result<(Axis, Axis)> {
    let all = || figure.points.iter().chain(&figure.this);
    let core = Axis::covering(all().map(|p| p.x), Scale::Log, "abscissa of the comets")?;
    let reach = (core.lo / BAR_REACH, core.hi * BAR_REACH);
    let bars = all().flat_map(|p| match p.across {
        Some(ComparisonValue::Measured { bar, .. }) => {
            [bar.low, bar.high].map(|v| v.clamp(reach.0, reach.1))
        }
        _ => [core.lo, core.hi],
    });
    let x = Axis::covering(bars.chain([core.lo, core.hi]), Scale::Log, "abscissa")?;
    let core = Axis::covering(all().map(|p| p.value.main()), Scale::Log, "ratios")?;
    let reach = (core.lo / BAR_REACH, core.hi * BAR_REACH);
    let bars = all().flat_map(|p| match p.value {
        ComparisonValue::Measured { bar, .. } => {
            [bar.low, bar.high].map(|v| v.clamp(reach.0, reach.1))
        }
        _ => [core.lo, core.hi],
    });
    let y = Axis::covering(bars.chain([core.lo, core.hi]), Scale::Log, "ratios")?;
    Ok((x.padded(0.05, 0.05), y.padded(0.08, 0.08)))
}

/// Lays the key out: this comet, then the classes that occur.
fn key(figure: &ScatterFigure, room: f64) -> Vec<KeyEntry> {
    let occurs = |class: usize| figure.points.iter().any(|p| p.class == class);
    let classes = figure
        .classes
        .iter()
        .enumerate()
        .filter(|(i, _)| occurs(*i));
    let classes = classes.map(|(i, name)| (Some(Mark::of_group(i)), name.trim()));
    let (mut x, mut line) = (0.0, 0);
    let mut entries = Vec::new();
    for (mark, name) in std::iter::once((None, figure.this_label.trim())).chain(classes) {
        let bold = mark.is_none();
        let lead = if bold { 11.0 } else { 8.0 };
        let name = elide(name, LABEL_PT, bold, room - lead);
        let length = lead + width_pt(&name, LABEL_PT, bold);
        if x > 0.0 && x + length > room {
            x = 0.0;
            line += 1;
        }
        entries.push(KeyEntry {
            mark,
            name,
            x: EDGE_PT + x,
            line,
        });
        x += length + 10.0;
    }
    entries
}

#[cfg(test)]
mod tests {
    use super::super::standing::Bounds;
    use super::*;

    fn point(x: f64, value: f64) -> ScatterPoint {
        let bar = Bounds {
            low: 0.0,
            high: 2.0 * value,
        };
        ScatterPoint {
            x,
            across: None,
            value: ComparisonValue::Measured { value, bar },
            class: 0,
        }
    }

    #[test]
    fn draws_and_refuses() {
        let mut figure = ScatterFigure {
            this_label: "C/2031 A1".into(),
            classes: vec!["JFC".into()],
            points: vec![point(1.0, 0.1), point(3.0, 0.5)],
            this: vec![ScatterPoint {
                value: ComparisonValue::UpperLimit(0.2),
                ..point(2.0, 0.2)
            }],
            shaded: Some((2.5, 3.0, "water freezes".into())),
            line: vec![(1.0, 0.1, 0.05, 0.2), (3.0, 0.5, 0.2, 0.9)],
            ..ScatterFigure::default()
        };
        let svg = scatter_svg(&figure, Width::Single).expect("a figure");
        assert!(svg.contains("C/2031 A1") && svg.contains("water freezes"));
        figure.points[0].x = 0.0;
        assert!(scatter_svg(&figure, Width::Double).is_err());
        figure.points[0] = ScatterPoint {
            class: 3,
            ..point(1.0, 0.1)
        };
        assert!(scatter_svg(&figure, Width::Double).is_err());
        assert!(scatter_svg(&ScatterFigure::default(), Width::Double).is_err());
    }
}
