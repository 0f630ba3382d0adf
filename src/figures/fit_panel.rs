//! The inside of one fitted window: samples, curves, band names, residuals.

use super::axis::{Axis, Scale, Ticks};
use super::canvas::{Canvas, Point};
use super::fit::FitPanel;
use super::label::{Plan, plan};
use super::marker::Shape;
use super::panel::{Panel, y_ticks};
use super::style::{CONTINUUM, DARK, DOTTED, FAINT, MIDDLE, MODEL, PALE, Stroke, WHITE, series};
use crate::ground::Result;

/// Most samples that are drawn as points.
const MOST_POINTS: usize = 400;
/// Share of its peak below which a band's line is not drawn.
const WEAK: f64 = 0.01;
/// Radius of a data point, pt.
const POINT_PT: f64 = 0.8;
/// Residuals beyond this many errors are shown at the edge.
const MOST_SIGMA: f64 = 10.0;
const BAR: Stroke = Stroke::solid(MIDDLE, 0.35);

/// One window placed on the page.
pub(super) struct Cell<'a> {
    pub data: &'a FitPanel,
    pub main: Panel,
    pub residual: Panel,
    /// Range of the ordinate without the room for band names.
    pub closed: Axis,
    pub labels: Plan,
    pub exponent: i32,
    pub y_title: Vec<String>,
}

/// The range of used samples with their errors and of all curves. Samples that were not fitted do not
/// count unless there is nothing else: a cosmic-ray hit must not flatten the rest.
pub(super) fn flux_range(p: &FitPanel) -> Result<Axis> {
    let used = (0..p.x.len()).filter(|&i| p.used[i] && p.x[i].is_finite());
    let samples = used.flat_map(|i| {
        let s = if p.sigma[i].is_finite() {
            p.sigma[i].abs()
        } else {
            0.0
        };
        [p.y[i] - s, p.y[i] + s]
    });
    let bands = p.bands.iter().flat_map(|b| b.y.iter().zip(&p.continuum));
    let curves = p.continuum.iter().chain(&p.total).copied();
    let values: Vec<f64> = samples
        .chain(curves)
        .chain(bands.map(|(b, c)| b + c))
        .filter(|v| v.is_finite())
        .collect();
    let what = "ordinate of a fitted window";
    if values.is_empty() {
        return Axis::covering(p.y.iter().copied(), Scale::Linear, what);
    }
    Ok(Axis::covering(values, Scale::Linear, what)?.padded(0.05, 0.05))
}

/// Symmetric range of the residuals, at least ±4 and at most ±10 errors.
pub(super) fn residual_range(p: &FitPanel) -> Axis {
    let used = (0..p.x.len()).filter(|&i| p.used[i]);
    let sizes = used.map(|i| residual(p, i).abs()).filter(|r| r.is_finite());
    let most = (1.15 * sizes.fold(0.0, f64::max)).clamp(4.2, MOST_SIGMA);
    Axis {
        lo: -most,
        hi: most,
        scale: Scale::Linear,
    }
}

/// Ticks of the residuals: round numbers, or only −3, 0, 3 in a low panel.
pub(super) fn residual_ticks(panel: &Panel) -> Ticks {
    let ticks = y_ticks(&panel.y, panel.height, 0);
    if ticks.major.len() >= 3 || panel.height * panel.y.fraction(3.0 + panel.y.lo) < 7.5 {
        return ticks;
    }
    let major = [(-3.0, "−3"), (0.0, "0"), (3.0, "3")];
    Ticks {
        major: major.map(|(v, text)| (v, text.to_owned())).to_vec(),
        minor: Vec::new(),
    }
}

/// (data − model) / σ; not a number without a positive error.
fn residual(p: &FitPanel, i: usize) -> f64 {
    if p.sigma[i] > 0.0 {
        (p.y[i] - p.model[i]) / p.sigma[i]
    } else {
        f64::NAN
    }
}

/// A data point with its error bar between two ordinates on the page.
pub(super) fn data_mark(canvas: &mut Canvas, p: Point, bar: Option<(f64, f64)>) {
    if let Some((top, bottom)) = bar {
        canvas.path(&[(p.0, top), (p.0, bottom)], BAR);
    }
    canvas.disc(p, POINT_PT, DARK);
}

/// A sample that was not fitted, or one beyond the frame.
pub(super) fn pale_mark(canvas: &mut Canvas, p: Point, shape: Shape) {
    let stroke = Stroke::solid(PALE, 0.5);
    let (x, y) = p;
    match shape {
        Shape::TriangleUp => canvas.path(&triangle(x, y, 1.0), stroke),
        Shape::TriangleDown => canvas.path(&triangle(x, y, -1.0), stroke),
        _ => {
            canvas.disc(p, 1.1, WHITE);
            canvas.ring(p, 1.1, stroke);
        }
    }
}

/// A closed triangle whose tip points up (`way` = 1) or down (−1) and touches `y`.
fn triangle(x: f64, y: f64, way: f64) -> [Point; 4] {
    let base = y + 3.4 * way;
    [
        (x, y + 0.4 * way),
        (x + 1.8, base),
        (x - 1.8, base),
        (x, y + 0.4 * way),
    ]
}

impl Cell<'_> {
    /// Everything inside the main panel.
    pub(super) fn draw_main(&self, canvas: &mut Canvas) {
        let d = self.data;
        let main = &self.main;
        for &(from, to) in &d.left_out {
            hatch(canvas, main, from, to);
        }
        for (k, band) in d.bands.iter().enumerate() {
            let top: Vec<f64> = band
                .y
                .iter()
                .zip(&d.continuum)
                .map(|(b, c)| b + c)
                .collect();
            let style = series(k, 0.9);
            let line = self.where_strong(&band.y, &top);
            main.fill_between(
                canvas,
                &d.grid_x,
                (&d.continuum, &top),
                (style.colour, 0.16),
            );
            main.curve(canvas, &d.grid_x, &line, style);
        }
        main.curve(canvas, &d.grid_x, &d.continuum, CONTINUUM);
        self.samples(canvas);
        main.curve(canvas, &d.grid_x, &d.total, MODEL);
        self.names(canvas);
    }

    /// Puts both panels at `left` and finds places for the band names.
    pub(super) fn place(&mut self, left: f64, width: f64) {
        for panel in [&mut self.main, &mut self.residual] {
            panel.left = left;
            panel.width = width;
        }
        let bands = self.data.bands.iter();
        let named: Vec<(f64, &str)> = bands
            .map(|b| (self.peak_px(&b.y), b.label.as_str()))
            .collect();
        self.labels = plan(&named, left, left + width);
    }

    /// Puts the main panel of this height at `top`, the residuals under it, and opens the range of the
    /// main panel for the band names.
    pub(super) fn stand(&mut self, top: f64, main_height: f64, between: f64) {
        self.main.top = top;
        self.main.height = main_height;
        self.residual.top = top + main_height + between;
        self.main.y = self.closed.opened(self.labels.height_pt / main_height);
    }

    /// The caller's remark and how many bands found no room for their names.
    pub(super) fn caption(&self) -> String {
        let given = self.data.caption.trim();
        let left_out = match self.labels.unplaced {
            0 => return given.to_owned(),
            1 => "1 more band not named".to_owned(),
            n => format!("{n} more bands not named"),
        };
        if given.is_empty() {
            left_out
        } else {
            format!("{given}; {left_out}")
        }
    }

    /// Page abscissa of a band's greatest departure from the continuum.
    fn peak_px(&self, y: &[f64]) -> f64 {
        let finite = (0..y.len()).filter(|&i| y[i].is_finite() && self.data.grid_x[i].is_finite());
        let peak = finite.max_by(|&a, &b| y[a].abs().total_cmp(&y[b].abs()));
        match peak {
            Some(i) => self.main.px_inside(self.data.grid_x[i]),
            None => self.main.left + 0.5 * self.main.width,
        }
    }

    /// The curve where the band is more than [`WEAK`] of its peak, so that lines of many bands do not
    /// hide the continuum.
    fn where_strong(&self, band: &[f64], curve: &[f64]) -> Vec<f64> {
        let sizes = band.iter().map(|v| v.abs()).filter(|v| v.is_finite());
        let least = WEAK * sizes.fold(0.0, f64::max);
        let strong = |(b, c): (&f64, &f64)| if b.abs() > least { *c } else { f64::NAN };
        band.iter().zip(curve).map(strong).collect()
    }

    fn samples(&self, canvas: &mut Canvas) {
        let (d, main) = (self.data, &self.main);
        self.pale_line(canvas, main, &d.y);
        for i in self.shown(&d.y) {
            let p = (main.px(d.x[i]), main.py(d.y[i]));
            let s = d.sigma[i];
            if !main.holds(p) {
                edge_mark(canvas, main, p);
            } else if d.used[i] {
                let bar = (s > 0.0 && s.is_finite())
                    .then(|| (main.py_inside(d.y[i] + s), main.py_inside(d.y[i] - s)));
                data_mark(canvas, p, bar);
            } else {
                pale_mark(canvas, p, Shape::Circle);
            }
        }
    }

    /// Indices of the samples to draw as points: every n-th where there are many.
    fn shown(&self, y: &[f64]) -> Vec<usize> {
        let every = y.len().div_ceil(MOST_POINTS).max(1);
        let finite = |&i: &usize| self.data.x[i].is_finite() && y[i].is_finite();
        (0..y.len()).step_by(every).filter(finite).collect()
    }

    /// Where points are left out, a pale line through all used samples shows what they hide.
    fn pale_line(&self, canvas: &mut Canvas, panel: &Panel, y: &[f64]) {
        if y.len() <= MOST_POINTS {
            return;
        }
        let used = y.iter().zip(&self.data.used);
        let used: Vec<f64> = used.map(|(&y, &u)| if u { y } else { f64::NAN }).collect();
        panel.curve(canvas, &self.data.x, &used, Stroke::solid(PALE, 0.3));
    }

    fn names(&self, canvas: &mut Canvas) {
        let (d, main) = (self.data, &self.main);
        let foot = |k: usize| {
            let x = self.peak_px(&d.bands[k].y);
            let near = |px: f64| (px - x).abs() < 2.0;
            let curve = d.grid_x.iter().zip(&d.total);
            let samples = d.x.iter().zip(&d.y);
            let tops = curve
                .chain(samples)
                .filter(|(gx, gy)| gy.is_finite() && near(main.px(**gx)))
                .map(|(_, gy)| main.py_inside(*gy));
            tops.fold(main.bottom(), f64::min) - 2.0
        };
        self.labels
            .draw(canvas, main.top, &foot, &|k| Some(series(k, 0.9)));
    }

    /// Everything inside the residual panel.
    pub(super) fn draw_residuals(&self, canvas: &mut Canvas) {
        let (d, panel) = (self.data, &self.residual);
        for &(from, to) in &d.left_out {
            hatch(canvas, panel, from, to);
        }
        let line = |v: f64| [(panel.left, panel.py(v)), (panel.right(), panel.py(v))];
        canvas.path(&line(3.0), DOTTED);
        canvas.path(&line(-3.0), DOTTED);
        canvas.path(&line(0.0), Stroke::solid(DARK, 0.5));
        let r: Vec<f64> = (0..d.x.len()).map(|i| residual(d, i)).collect();
        self.pale_line(canvas, panel, &r);
        for i in self.shown(&r) {
            let p = (panel.px(d.x[i]), panel.py(r[i]));
            if !panel.holds(p) {
                edge_mark(canvas, panel, p);
            } else if d.used[i] {
                data_mark(canvas, p, None);
            } else {
                pale_mark(canvas, p, Shape::Circle);
            }
        }
    }
}

/// A triangle at the edge for a sample above or below the frame.
fn edge_mark(canvas: &mut Canvas, panel: &Panel, p: Point) {
    let x = p.0.clamp(panel.left + 2.0, panel.right() - 2.0);
    if p.1 < panel.top {
        pale_mark(canvas, (x, panel.top), Shape::TriangleUp);
    } else {
        pale_mark(canvas, (x, panel.bottom()), Shape::TriangleDown);
    }
}

/// Pale ground and slanted lines over a range of abscissae.
fn hatch(canvas: &mut Canvas, panel: &Panel, from: f64, to: f64) {
    if !(from.is_finite() && to.is_finite()) {
        return;
    }
    let (a, b) = (panel.px_inside(from.min(to)), panel.px_inside(from.max(to)));
    if b - a < 0.05 {
        return;
    }
    let strip = Panel {
        left: a,
        width: b - a,
        ..*panel
    };
    canvas.rectangle((a, panel.top), (b, panel.bottom()), FAINT, 0.5);
    let mut x = panel.left - panel.height;
    while x < b {
        let line = [(x, panel.bottom()), (x + panel.height, panel.top)];
        strip.chain(canvas, &line, Stroke::solid(PALE, 0.35));
        x += 4.0;
    }
}
