//! A frame with two axes on the page and what is drawn inside it.

use super::axis::{Axis, Ticks};
use super::canvas::{Anchor, Canvas, Point, Type};
use super::style::{Colour, FRAME, LABEL_PT, LINE_PT, Stroke, TICK_PT};
use super::text::{power_of_ten, width_pt, wrap};
use super::thin::extremes;

/// Blank between the frame and its tick labels, pt.
const LABEL_GAP_PT: f64 = 2.5;

/// A rectangle on the page that shows a range of values.
#[derive(Clone, Copy, Debug)]
pub(super) struct Panel {
    pub left: f64,
    pub top: f64,
    pub width: f64,
    pub height: f64,
    pub x: Axis,
    pub y: Axis,
}

/// Ticks of a horizontal axis.
pub(super) fn x_ticks(axis: &Axis, length_pt: f64, exponent: i32) -> Ticks {
    let room = |label: &str| width_pt(label, TICK_PT, false) + 6.0;
    axis.ticks(length_pt, exponent, 24.0, &room)
}

/// Ticks of a vertical axis.
pub(super) fn y_ticks(axis: &Axis, length_pt: f64, exponent: i32) -> Ticks {
    let wanted = if length_pt < 40.0 { 10.0 } else { 15.0 };
    axis.ticks(length_pt, exponent, wanted, &|_| 8.5)
}

/// Width of the widest tick label with its gap, pt.
pub(super) fn labels_width(ticks: &Ticks) -> f64 {
    let widths = ticks.major.iter().map(|m| width_pt(&m.1, TICK_PT, false));
    widths.fold(0.0, f64::max) + LABEL_GAP_PT
}

impl Panel {
    pub(super) fn right(&self) -> f64 {
        self.left + self.width
    }

    pub(super) fn bottom(&self) -> f64 {
        self.top + self.height
    }

    /// Page abscissa of a value; may lie outside the frame.
    pub(super) fn px(&self, x: f64) -> f64 {
        self.left + self.width * self.x.fraction(x)
    }

    /// Page ordinate of a value; may lie outside the frame.
    pub(super) fn py(&self, y: f64) -> f64 {
        self.bottom() - self.height * self.y.fraction(y)
    }

    /// Page abscissa of a value, moved to the frame when it lies outside.
    pub(super) fn px_inside(&self, x: f64) -> f64 {
        self.px(x).clamp(self.left, self.right())
    }

    /// Page ordinate of a value, moved to the frame when it lies outside.
    pub(super) fn py_inside(&self, y: f64) -> f64 {
        self.py(y).clamp(self.top, self.bottom())
    }

    /// Whether a point on the page lies inside the frame.
    pub(super) fn holds(&self, p: Point) -> bool {
        let across = p.0 >= self.left && p.0 <= self.right();
        across && p.1 >= self.top && p.1 <= self.bottom()
    }

    /// Draws y(x) inside the frame; a sample that is not finite breaks the line, and where samples
    /// crowd, only the extremes are kept.
    pub(super) fn curve(&self, canvas: &mut Canvas, x: &[f64], y: &[f64], stroke: Stroke) {
        let usable = |i: usize| y[i].is_finite() && x[i].is_finite();
        let kept = extremes(y, (self.width * 4.0) as usize);
        let mut run: Vec<Point> = Vec::new();
        let mut last = None;
        for i in kept.into_iter().filter(|&i| usable(i)) {
            let gap = last.is_some_and(|l: usize| (l + 1..=i).any(|k| !usable(k)));
            if gap {
                self.chain(canvas, &run, stroke);
                run.clear();
            }
            last = Some(i);
            run.push((self.px(x[i]), self.py(y[i])));
        }
        self.chain(canvas, &run, stroke);
    }

    /// Draws the parts of a chain of lines, given on the page, that lie inside the frame.
    pub(super) fn chain(&self, canvas: &mut Canvas, points: &[Point], stroke: Stroke) {
        let mut run: Vec<Point> = Vec::new();
        for pair in points.windows(2) {
            let Some((from, to)) = self.clip(pair[0], pair[1]) else {
                continue;
            };
            if run.last() != Some(&from) {
                canvas.path(&run, stroke);
                run = vec![from];
            }
            run.push(to);
        }
        canvas.path(&run, stroke);
    }

    /// The part of a line inside the frame (Liang & Barsky 1984).
    fn clip(&self, from: Point, to: Point) -> Option<(Point, Point)> {
        let far = 1e7;
        let tame = |p: Point| (p.0.clamp(-far, far), p.1.clamp(-far, far));
        let (from, to) = (tame(from), tame(to));
        let (dx, dy) = (to.0 - from.0, to.1 - from.1);
        let edges = [
            (-dx, from.0 - self.left),
            (dx, self.right() - from.0),
            (-dy, from.1 - self.top),
            (dy, self.bottom() - from.1),
        ];
        let (mut enter, mut leave) = (0.0_f64, 1.0_f64);
        for (slope, room) in edges {
            if slope == 0.0 {
                if room < 0.0 {
                    return None;
                }
            } else if slope < 0.0 {
                enter = enter.max(room / slope);
            } else {
                leave = leave.min(room / slope);
            }
        }
        let at = |f: f64| (from.0 + f * dx, from.1 + f * dy);
        let start = if enter == 0.0 { from } else { at(enter) };
        let end = if leave == 1.0 { to } else { at(leave) };
        (enter <= leave).then_some((start, end))
    }

    /// Fills the area between two curves on the same finite abscissae.
    pub(super) fn fill_between(
        &self,
        canvas: &mut Canvas,
        x: &[f64],
        (low, high): (&[f64], &[f64]),
        (colour, opacity): (Colour, f64),
    ) {
        let corner = |i: usize, y: f64| (self.px_inside(x[i]), self.py_inside(y));
        let usable: Vec<usize> = (0..x.len())
            .filter(|&i| x[i].is_finite() && low[i].is_finite() && high[i].is_finite())
            .collect();
        let there = usable.iter().map(|&i| corner(i, high[i]));
        let back = usable.iter().rev().map(|&i| corner(i, low[i]));
        let outline: Vec<Point> = there.chain(back).collect();
        if outline.len() >= 4 {
            canvas.polygon(&outline, colour, opacity);
        }
    }

    /// Frame and ticks on all four sides, labels of the ordinate, labels of the abscissa on request.
    pub(super) fn frame(&self, canvas: &mut Canvas, x: &Ticks, y: &Ticks, label_x: bool) {
        for &v in &x.minor {
            self.x_tick(canvas, v, 1.6);
        }
        for &v in &y.minor {
            self.y_tick(canvas, v, 1.6);
        }
        for (v, label) in &x.major {
            self.x_tick(canvas, *v, 3.2);
            if label_x {
                self.x_label(canvas, *v, label);
            }
        }
        for (v, label) in &y.major {
            self.y_tick(canvas, *v, 3.2);
            let p = (self.left - LABEL_GAP_PT, self.py_inside(*v));
            canvas.text(label, p, Type::new(TICK_PT, Anchor::End));
        }
        self.outline(canvas, FRAME);
    }

    /// The bare frame.
    pub(super) fn outline(&self, canvas: &mut Canvas, stroke: Stroke) {
        let (l, t, r, b) = (self.left, self.top, self.right(), self.bottom());
        canvas.path(&[(l, t), (r, t), (r, b), (l, b), (l, t)], stroke);
    }

    fn x_tick(&self, canvas: &mut Canvas, v: f64, length: f64) {
        let x = self.px_inside(v);
        canvas.path(&[(x, self.bottom()), (x, self.bottom() - length)], FRAME);
        canvas.path(&[(x, self.top), (x, self.top + length)], FRAME);
    }

    fn y_tick(&self, canvas: &mut Canvas, v: f64, length: f64) {
        let y = self.py_inside(v);
        canvas.path(&[(self.left, y), (self.left + length, y)], FRAME);
        canvas.path(&[(self.right(), y), (self.right() - length, y)], FRAME);
    }

    /// A label under the frame.
    pub(super) fn x_label(&self, canvas: &mut Canvas, v: f64, label: &str) {
        let p = (self.px_inside(v), self.bottom() + LABEL_GAP_PT + 4.8);
        canvas.text(label, p, Type::new(TICK_PT, Anchor::Middle));
    }

    /// The name of the abscissa, its middle `below_pt` under the frame.
    pub(super) fn x_title(&self, canvas: &mut Canvas, text: &str, below_pt: f64) {
        let text = super::text::elide(text, LABEL_PT, false, self.width);
        let p = (self.left + self.width / 2.0, self.bottom() + below_pt);
        canvas.text(&text, p, Type::new(LABEL_PT, Anchor::Middle));
    }

    /// The name of the ordinate, read upwards, its lines ending `from_pt` left of the frame.
    pub(super) fn y_title(&self, canvas: &mut Canvas, lines: &[String], from_pt: f64) {
        for (i, line) in lines.iter().rev().enumerate() {
            let x = self.left - from_pt - LINE_PT * (i as f64 + 0.5);
            let p = (x, self.top + self.height / 2.0);
            canvas.text(line, p, Type::new(LABEL_PT, Anchor::Middle).upright());
        }
    }
}

/// `(10⁻¹⁵ W m⁻²)`; empty without unit and power.
pub(super) fn unit_with_power(unit: &str, exponent: i32) -> String {
    match (exponent, unit.trim()) {
        (0, "") => String::new(),
        (0, unit) => format!("({unit})"),
        (e, unit) => format!("({})", format!("{} {unit}", power_of_ten(e)).trim()),
    }
}

/// Breaks an axis name for an axis of this length: quantity over unit when both do not fit one line.
pub(super) fn title_lines(quantity: &str, unit: &str, length_pt: f64) -> Vec<String> {
    let one = format!("{quantity} {unit}");
    if width_pt(one.trim(), LABEL_PT, false) <= length_pt || unit.is_empty() {
        return wrap(&one, LABEL_PT, false, length_pt, 2);
    }
    let mut lines = wrap(quantity, LABEL_PT, false, length_pt, 1);
    lines.extend(balanced(unit, length_pt));
    lines
}

/// A text in at most two lines of like length.
fn balanced(text: &str, length_pt: f64) -> Vec<String> {
    let broken = |room: f64| wrap(text, LABEL_PT, false, room, 3);
    if broken(length_pt).len() != 2 {
        return wrap(text, LABEL_PT, false, length_pt, 2);
    }
    let mut room = length_pt;
    while broken(room - 1.0).len() == 2 && !broken(room - 1.0).iter().any(|l| l.ends_with('…')) {
        room -= 1.0;
    }
    broken(room)
}
