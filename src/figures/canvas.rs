//! The drawing surface: plotters' SVG backend driven in points.
//!
//! The backend rounds to whole units and knows neither dashes nor physical sizes. One point is
//! therefore [`UNITS_PER_PT`] units, dashes are cut here, and the root element gets its size in inches.

use super::style::{Colour, LINE_PT, Stroke, TITLE_PT, WHITE};
use super::text::clean;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};

/// Drawing units per point.
pub(super) const UNITS_PER_PT: f64 = 20.0;
/// What every text element asks for.
const FAMILY: &str = "DejaVu Sans, Helvetica, Arial, sans-serif";
/// plotters divides the type size by this before it writes it.
const PLOTTERS_TYPE_FACTOR: f64 = 1.24;
/// Baseline below the middle of capital letters and digits, in em (cap height of DejaVu Sans 0.729).
const HALF_CAP_EM: f64 = 0.365;

/// A point on the page, pt from the upper left corner.
pub(super) type Point = (f64, f64);

/// Where the given point lies on a piece of text.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Anchor {
    Start,
    Middle,
    End,
}

/// How a piece of text is set.
#[derive(Clone, Copy, Debug)]
pub(super) struct Type {
    pub size_pt: f64,
    pub colour: Colour,
    pub anchor: Anchor,
    pub bold: bool,
    /// Reads from bottom to top.
    pub upright: bool,
}

impl Type {
    /// Black text of this size that starts at the point.
    pub(super) fn new(size_pt: f64, anchor: Anchor) -> Self {
        Self {
            size_pt,
            colour: super::style::BLACK,
            anchor,
            bold: false,
            upright: false,
        }
    }

    pub(super) fn bold(mut self) -> Self {
        self.bold = true;
        self
    }

    pub(super) fn upright(mut self) -> Self {
        self.upright = true;
        self
    }

    pub(super) fn colour(mut self, colour: Colour) -> Self {
        self.colour = colour;
        self
    }
}

/// A page under construction.
pub(super) struct Canvas<'a> {
    backend: SVGBackend<'a>,
}

/// Draws a page of the given size and returns the SVG document.
pub(super) fn page(width_pt: f64, height_pt: f64, draw: impl FnOnce(&mut Canvas)) -> String {
    let size = (units(width_pt) as u32, units(height_pt) as u32);
    let mut text = String::new();
    let mut canvas = Canvas {
        backend: SVGBackend::with_string(&mut text, size),
    };
    canvas.rectangle((0.0, 0.0), (width_pt, height_pt), WHITE, 1.0);
    draw(&mut canvas);
    canvas.backend.present().expect(WRITES);
    drop(canvas);
    with_print_size(&text, size)
}

const WRITES: &str = "invariant: writing to a string succeeds";

/// Replaces the root element: inches outside, drawing units inside, round line joins for noisy curves.
fn with_print_size(text: &str, size: (u32, u32)) -> String {
    let body = text
        .find('>')
        .map(|end| &text[end + 1..])
        .expect("invariant: the backend opens a root element");
    let inches = |n: u32| f64::from(n) / UNITS_PER_PT / 72.0;
    format!(
        "<svg width=\"{:.4}in\" height=\"{:.4}in\" viewBox=\"0 0 {} {}\" stroke-linejoin=\"round\" \
         xmlns=\"http://www.w3.org/2000/svg\">{body}",
        inches(size.0),
        inches(size.1),
        size.0,
        size.1
    )
}

fn units(pt: f64) -> i32 {
    (pt * UNITS_PER_PT).round() as i32
}

fn at(p: Point) -> (i32, i32) {
    (units(p.0), units(p.1))
}

fn shape(colour: Colour, opacity: f64, width_pt: f64) -> ShapeStyle {
    ShapeStyle {
        color: RGBColor(colour.0, colour.1, colour.2).mix(opacity),
        filled: false,
        stroke_width: units(width_pt).max(1) as u32,
    }
}

impl Canvas<'_> {
    /// A straight line or a chain of them.
    pub(super) fn path(&mut self, points: &[Point], stroke: Stroke) {
        if stroke.dash_pt.is_empty() {
            self.chain(points, stroke);
        } else {
            for piece in dashes(points, stroke.dash_pt) {
                self.chain(&piece, stroke);
            }
        }
    }

    fn chain(&mut self, points: &[Point], stroke: Stroke) {
        if points.len() < 2 {
            return;
        }
        let mut whole: Vec<(i32, i32)> = points.iter().map(|&p| at(p)).collect();
        whole.dedup();
        let style = shape(stroke.colour, stroke.opacity, stroke.width_pt);
        self.backend.draw_path(whole, &style).expect(WRITES);
    }

    /// A filled rectangle between two corners.
    pub(super) fn rectangle(&mut self, from: Point, to: Point, colour: Colour, opacity: f64) {
        let style = shape(colour, opacity, 0.0);
        let drawn = self.backend.draw_rect(at(from), at(to), &style, true);
        drawn.expect(WRITES);
    }

    /// A filled polygon.
    pub(super) fn polygon(&mut self, points: &[Point], colour: Colour, opacity: f64) {
        let style = shape(colour, opacity, 0.0);
        let corners = points.iter().map(|&p| at(p));
        self.backend.fill_polygon(corners, &style).expect(WRITES);
    }

    /// A filled disc.
    pub(super) fn disc(&mut self, centre: Point, radius_pt: f64, colour: Colour) {
        let style = shape(colour, 1.0, 0.0);
        let radius = units(radius_pt).max(1) as u32;
        let drawn = self.backend.draw_circle(at(centre), radius, &style, true);
        drawn.expect(WRITES);
    }

    /// An open circle.
    pub(super) fn ring(&mut self, centre: Point, radius_pt: f64, stroke: Stroke) {
        let style = shape(stroke.colour, stroke.opacity, stroke.width_pt);
        let radius = units(radius_pt).max(1) as u32;
        let drawn = self.backend.draw_circle(at(centre), radius, &style, false);
        drawn.expect(WRITES);
    }

    /// Bold lines of a figure's heading, from the given corner downwards.
    pub(super) fn heading(&mut self, lines: &[String], (left, top): Point) {
        for (i, line) in lines.iter().enumerate() {
            let y = top + (i as f64 + 0.5) * (LINE_PT + 1.0);
            self.text(line, (left, y), Type::new(TITLE_PT, Anchor::Start).bold());
        }
    }

    /// Text whose capitals are centred on the point across the reading direction.
    pub(super) fn text(&mut self, text: &str, p: Point, how: Type) {
        let text = clean(text);
        if text.is_empty() {
            return;
        }
        let cut = if how.bold {
            FontStyle::Bold
        } else {
            FontStyle::Normal
        };
        let size = how.size_pt * UNITS_PER_PT * PLOTTERS_TYPE_FACTOR;
        let mut font = FontDesc::new(FontFamily::Name(FAMILY), size, cut);
        // The backend shifts "top" text down by a fixed 0.76 em; from there the baseline is exact.
        let lift = how.size_pt * (0.76 - HALF_CAP_EM);
        let mut place = (p.0, p.1 - lift);
        if how.upright {
            font = font.transform(FontTransform::Rotate270);
            place = (p.0 - lift, p.1);
        }
        let across = match how.anchor {
            Anchor::Start => HPos::Left,
            Anchor::Middle => HPos::Center,
            Anchor::End => HPos::Right,
        };
        let colour = RGBColor(how.colour.0, how.colour.1, how.colour.2);
        let style = TextStyle::from(font)
            .color(&colour)
            .pos(Pos::new(across, VPos::Top));
        let drawn = self.backend.draw_text(&text, &style, at(place));
        drawn.expect(WRITES);
    }
}

/// Cuts a chain of lines into dashes: lengths of dash and gap in turn.
fn dashes(points: &[Point], pattern_pt: &[f64]) -> Vec<Vec<Point>> {
    let mut out = Vec::new();
    let mut piece: Vec<Point> = points.first().copied().into_iter().collect();
    let (mut part, mut left) = (0, pattern_pt[0]);
    for pair in points.windows(2) {
        let (from, to) = (pair[0], pair[1]);
        let length = (to.0 - from.0).hypot(to.1 - from.1);
        let mut walked = 0.0;
        while length - walked > left {
            walked += left;
            let f = walked / length;
            let p = (from.0 + f * (to.0 - from.0), from.1 + f * (to.1 - from.1));
            if part % 2 == 0 {
                piece.push(p);
                out.push(std::mem::take(&mut piece));
            } else {
                piece = vec![p];
            }
            part += 1;
            left = pattern_pt[part % pattern_pt.len()];
        }
        left -= length - walked;
        if part % 2 == 0 {
            piece.push(to);
        }
    }
    if part % 2 == 0 {
        out.push(piece);
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn dashes_cover_what_they_should() {
        let line = [(0.0, 0.0), (4.0, 0.0), (10.0, 0.0)];
        let pieces = dashes(&line, &[3.0, 2.0]);
        let drawn: Vec<(f64, f64)> = pieces.iter().map(|p| (p[0].0, p[p.len() - 1].0)).collect();
        assert_eq!(drawn, [(0.0, 3.0), (5.0, 8.0)]);
    }

    #[test]
    fn the_page_has_its_print_size() {
        let svg = page(252.0, 72.0, |_| {});
        assert!(svg.starts_with("<svg width=\"3.5000in\" height=\"1.0000in\""));
        assert!(svg.contains("viewBox=\"0 0 5040 1440\""));
        assert!(svg.trim_end().ends_with("</svg>"));
    }
}
