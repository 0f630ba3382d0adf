//! One ratio of the standing figure: distribution, comparison comets in lanes, this comet.

use super::axis::{Axis, Scale, Ticks};
use super::canvas::{Anchor, Canvas, Point, Type};
use super::lanes::{ARROW_PT, Lanes, MARK_PT, NAME_TYPE_PT, ends, name_place, named};
use super::marker::{Mark, Shape, arrow};
use super::panel::{Panel, x_ticks};
use super::standing::{
    Bounds, Columns, ComparisonComet, ComparisonValue, EDGE_PT, StandingRow, ThisComet,
};
use super::style::{BLACK, DARK, DOTTED, LABEL_PT, LINE_PT, MIDDLE, PALE, Stroke, TICK_PT, WHITE};
use super::text::{elide, width_pt, wrap};
use crate::ground::Result;

/// Height of the cumulative panel, pt.
const CUMULATIVE_PT: f64 = 27.0;
/// Height of the lane of this comet, pt.
const THIS_PT: f64 = 12.0;

/// How far a bar may widen the range beyond the values, as a factor.
const BAR_REACH: f64 = 10.0;

/// A row placed on the page.
pub(super) struct Row<'a> {
    data: &'a StandingRow,
    columns: Columns,
    top: f64,
    head: Vec<String>,
    cumulative: Option<Panel>,
    strip: Panel,
    lanes: Lanes,
}

impl<'a> Row<'a> {
    /// Places the row under `top`.
    pub(super) fn new(data: &'a StandingRow, columns: &Columns, top: f64) -> Result<Self> {
        let axis = range(data)?;
        let head = remarks(data, columns);
        let head_pt = if columns.beside {
            0.0
        } else {
            head.len().max(1) as f64 * LINE_PT
        };
        let mut panel = Panel {
            left: columns.left,
            top: top + 5.5 + head_pt,
            width: columns.right - columns.left,
            height: CUMULATIVE_PT,
            x: axis,
            y: Axis {
                lo: 0.0,
                hi: 1.0,
                scale: Scale::Linear,
            },
        };
        let cumulative = (!data.cumulative.is_empty()).then_some(panel);
        if cumulative.is_some() {
            panel.top += CUMULATIVE_PT;
        }
        let lanes = Lanes::new(data, &panel);
        panel.height = THIS_PT + lanes.height_pt + 3.0;
        Ok(Self {
            data,
            columns: *columns,
            top,
            head,
            cumulative,
            strip: panel,
            lanes,
        })
    }

    pub(super) fn bottom(&self) -> f64 {
        self.strip.bottom() + 13.0
    }

    pub(super) fn draw(&self, canvas: &mut Canvas, first: bool) {
        let ticks = x_ticks(&self.strip.x, self.strip.width, 0);
        self.draw_text(canvas);
        if let Some(value) = self.data.this.main() {
            let x = self.strip.px_inside(value);
            let top = self.cumulative.map_or(self.strip.top, |c| c.top);
            canvas.path(&[(x, top), (x, self.strip.bottom())], DOTTED);
        }
        if let Some(panel) = &self.cumulative {
            self.draw_cumulative(canvas, panel, &ticks, first);
        }
        for (comet, &lane) in self.data.comets.iter().zip(&self.lanes.of_comet) {
            let y = self.strip.top + 3.0 + (lane as f64 + 0.5) * self.lanes.pitch_pt;
            self.draw_comet(canvas, comet, y);
        }
        self.draw_this(canvas);
        self.strip.frame(canvas, &ticks, &Ticks::default(), true);
    }

    fn draw_text(&self, canvas: &mut Canvas) {
        let c = &self.columns;
        let bold = Type::new(LABEL_PT, Anchor::Start).bold();
        let plain = Type::new(TICK_PT, Anchor::Start);
        let top = self.cumulative.map_or(self.strip.top, |p| p.top);
        let ratio = self.data.ratio.trim();
        if c.beside {
            let middle = 0.5 * (top + self.strip.bottom());
            let room = c.left - EDGE_PT - 18.0;
            canvas.text(&elide(ratio, LABEL_PT, true, room), (EDGE_PT, middle), bold);
            let start = middle - 0.5 * LINE_PT * (self.head.len() as f64 - 1.0);
            for (i, line) in self.head.iter().enumerate() {
                let p = (c.right + 8.0, start + LINE_PT * i as f64);
                canvas.text(line, p, plain);
            }
            return;
        }
        let y = self.top + 0.5 * LINE_PT + 2.0;
        canvas.text(
            &elide(ratio, LABEL_PT, true, 0.45 * c.page),
            (EDGE_PT, y),
            bold,
        );
        for (i, line) in self.head.iter().enumerate() {
            let p = (c.right, y + LINE_PT * i as f64);
            canvas.text(line, p, Type::new(TICK_PT, Anchor::End));
        }
    }

    fn draw_cumulative(&self, canvas: &mut Canvas, panel: &Panel, x: &Ticks, first: bool) {
        let mut chain: Vec<Point> = vec![(panel.left, panel.bottom())];
        let mut level = 0.0_f64;
        for &(value, fraction) in &self.data.cumulative {
            if !(value > 0.0 && value.is_finite() && fraction.is_finite()) {
                continue;
            }
            let px = panel.px_inside(value);
            chain.push((px, panel.py_inside(level)));
            chain.push((px, panel.py_inside(fraction)));
            level = fraction;
        }
        chain.push((panel.right(), panel.py_inside(level)));
        let half = [(panel.left, panel.py(0.5)), (panel.right(), panel.py(0.5))];
        canvas.path(&half, Stroke::solid(PALE, 0.4));
        canvas.path(&chain, Stroke::solid(DARK, 0.8));
        let label = |v: f64, text: &str| (v, text.to_owned());
        let y = Ticks {
            major: vec![label(0.0, ""), label(0.5, "0.5"), label(1.0, "1")],
            minor: Vec::new(),
        };
        panel.frame(canvas, x, &y, false);
        if first {
            self.name_fractions(canvas, panel);
        }
    }

    /// Names the ordinate in a corner that the steps leave free.
    fn name_fractions(&self, canvas: &mut Canvas, panel: &Panel) {
        let text = "fraction of comets";
        let width = width_pt(text, NAME_TYPE_PT, false);
        let (mut l, mut t) = (panel.left + 4.0, panel.top + 4.0);
        let under = |&&(v, _): &&(f64, f64)| panel.px(v) < l + width + 4.0;
        let steps = self.data.cumulative.iter().filter(under);
        if steps.map(|s| s.1).fold(0.0, f64::max) > 0.5 {
            l = panel.right() - 5.0 - width;
            t = panel.bottom() - 11.5;
        }
        canvas.rectangle((l, t), (l + width + 1.0, t + 7.0), WHITE, 1.0);
        let how = Type::new(NAME_TYPE_PT, Anchor::Start).colour(DARK);
        canvas.text(text, (l, t + 3.5), how);
    }

    fn draw_comet(&self, canvas: &mut Canvas, comet: &ComparisonComet, y: f64) {
        let strip = &self.strip;
        let x = strip.px_inside(comet.value.main());
        let thin = if self.lanes.crowded {
            Stroke::solid(PALE, 0.3)
        } else {
            Stroke::solid(MIDDLE, 0.4)
        };
        let mut mark = Mark::of_group(comet.class);
        match comet.value {
            ComparisonValue::Measured { bar, .. } => {
                let (a, b) = ends(strip, bar, x);
                canvas.path(&[(a, y), (b, y)], thin);
            }
            ComparisonValue::UpperLimit(_) => {
                let to = (x - ARROW_PT).max(strip.left);
                arrow(canvas, (x, y), (to, y), thin, 2.4);
                mark.filled = false;
            }
            ComparisonValue::LowerLimit(_) => {
                let to = (x + ARROW_PT).min(strip.right());
                arrow(canvas, (x, y), (to, y), thin, 2.4);
                mark.filled = false;
            }
        }
        mark.draw(canvas, (x, y), MARK_PT);
        if named(self.data) {
            let (from, name) = name_place(strip, comet);
            let end = from + width_pt(&name, NAME_TYPE_PT, false);
            canvas.rectangle((from, y - 3.5), (end, y + 3.5), WHITE, 1.0);
            let how = Type::new(NAME_TYPE_PT, Anchor::Start).colour(DARK);
            canvas.text(&name, (from, y), how);
        }
    }

    fn draw_this(&self, canvas: &mut Canvas) {
        let strip = &self.strip;
        let y = strip.bottom() - 0.5 * THIS_PT - 0.5;
        let bold = Stroke::solid(BLACK, 1.2);
        match self.data.this {
            ThisComet::Measured {
                median,
                inner,
                outer,
            } => {
                let x = strip.px_inside(median);
                let pair = |b: Bounds| {
                    let (low, high) = ends(strip, b, x);
                    ((low, y), (high, y))
                };
                this_mark(canvas, (x, y), pair(inner), pair(outer));
            }
            ThisComet::UpperLimit(v) => {
                self.draw_limit(canvas, (strip.px_inside(v), y), -1.0, bold)
            }
            ThisComet::LowerLimit(v) => self.draw_limit(canvas, (strip.px_inside(v), y), 1.0, bold),
            ThisComet::Unconstrained => {
                let p = (strip.left + 5.0, y);
                let how = Type::new(TICK_PT, Anchor::Start).colour(DARK);
                canvas.text("this comet: unconstrained", p, how);
            }
        }
    }

    fn draw_limit(&self, canvas: &mut Canvas, p: Point, way: f64, stroke: Stroke) {
        let to = (p.0 + way * 18.0).clamp(self.strip.left, self.strip.right());
        arrow(canvas, p, (to, p.1), stroke, 4.0);
        canvas.path(&[(p.0, p.1 - 3.5), (p.0, p.1 + 3.5)], stroke);
    }
}

/// This comet: thin bar for the outer interval, thick bar for the inner one, black diamond.
pub(super) fn this_mark(
    canvas: &mut Canvas,
    p: Point,
    inner: (Point, Point),
    outer: (Point, Point),
) {
    canvas.path(&[outer.0, outer.1], Stroke::solid(BLACK, 0.7));
    canvas.path(&[inner.0, inner.1], Stroke::solid(BLACK, 2.0));
    let mark = Mark {
        shape: Shape::Diamond,
        filled: true,
        colour: BLACK,
    };
    canvas.disc(p, 3.2, WHITE);
    mark.draw(canvas, p, 2.6);
}

/// The range of a row: all values, and bars as far as they do not dwarf the values.
fn range(data: &StandingRow) -> Result<Axis> {
    let values = data.comets.iter().map(|c| c.value.main());
    let values: Vec<f64> = values.chain(data.this.main()).collect();
    let what = format!("axis of {}", data.ratio);
    let core = Axis::covering(values.iter().copied(), Scale::Log, &what)?;
    let mut all = values;
    let mut bars: Vec<Bounds> = Vec::new();
    if let ThisComet::Measured { inner, outer, .. } = data.this {
        bars.extend([inner, outer]);
    }
    bars.extend(data.comets.iter().filter_map(|c| match c.value {
        ComparisonValue::Measured { bar, .. } => Some(bar),
        _ => None,
    }));
    let reach = (core.lo / BAR_REACH, core.hi * BAR_REACH);
    for b in bars {
        let ends = [b.low, b.high].into_iter().filter(|v| v.is_finite());
        all.extend(ends.map(|v| v.clamp(reach.0, reach.1)));
    }
    Ok(Axis::covering(all, Scale::Log, &what)?.padded(0.06, 0.06))
}

/// Remarks on count and place, broken into lines.
fn remarks(data: &StandingRow, columns: &Columns) -> Vec<String> {
    if columns.beside {
        let room = columns.page - columns.right - 8.0 - EDGE_PT;
        let mut lines = wrap(&data.count_text, TICK_PT, false, room, 2);
        lines.extend(wrap(&data.place_text, TICK_PT, false, room, 2));
        return lines;
    }
    let parts = [data.count_text.trim(), data.place_text.trim()];
    let parts: Vec<&str> = parts.into_iter().filter(|p| !p.is_empty()).collect();
    let name = width_pt(data.ratio.trim(), LABEL_PT, true).min(0.45 * columns.page);
    let room = columns.right - EDGE_PT - name - 10.0;
    wrap(&parts.join("; "), TICK_PT, false, room, 2)
}
