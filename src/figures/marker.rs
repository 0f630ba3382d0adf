//! Marks for single values.

use super::canvas::{Canvas, Point};
use super::style::{Colour, Stroke, WHITE};

/// Shapes that tell groups apart without colour.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Shape {
    Circle,
    Square,
    TriangleUp,
    Diamond,
    TriangleDown,
    Cross,
    Plus,
    Pentagon,
}

const SHAPES: [Shape; 8] = [
    Shape::Circle,
    Shape::Square,
    Shape::TriangleUp,
    Shape::Diamond,
    Shape::TriangleDown,
    Shape::Cross,
    Shape::Plus,
    Shape::Pentagon,
];

/// A mark: shape, whether filled, colour.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Mark {
    pub shape: Shape,
    pub filled: bool,
    pub colour: Colour,
}

impl Mark {
    /// The mark of the group with this index: eight shapes filled, then the same open.
    pub(super) fn of_group(index: usize) -> Self {
        Self {
            shape: SHAPES[index % SHAPES.len()],
            filled: (index / SHAPES.len()).is_multiple_of(2),
            colour: super::style::series_colour(index),
        }
    }

    /// Draws the mark with a thin outline; `radius_pt` is that of a disc of the same weight.
    pub(super) fn draw(&self, canvas: &mut Canvas, p: Point, radius_pt: f64) {
        let edge = Stroke::solid(super::style::BLACK, 0.4);
        let fill = if self.filled { self.colour } else { WHITE };
        let r = radius_pt;
        match self.shape {
            Shape::Circle => {
                canvas.disc(p, r, fill);
                canvas.ring(p, r, edge);
            }
            Shape::Cross | Shape::Plus => strokes(canvas, p, r, self),
            Shape::Square => ring_of(canvas, &corners(p, 1.25 * r, 4, 45.0), fill, edge),
            Shape::Diamond => ring_of(canvas, &corners(p, 1.4 * r, 4, 0.0), fill, edge),
            Shape::TriangleUp => ring_of(canvas, &corners(p, 1.35 * r, 3, 0.0), fill, edge),
            Shape::TriangleDown => ring_of(canvas, &corners(p, 1.35 * r, 3, 180.0), fill, edge),
            Shape::Pentagon => ring_of(canvas, &corners(p, 1.15 * r, 5, 0.0), fill, edge),
        }
    }
}

/// Corners of a regular polygon, the first at `turned_deg` clockwise from the top.
fn corners(p: Point, radius_pt: f64, count: u32, turned_deg: f64) -> Vec<Point> {
    let corner = |i: u32| {
        let angle = (turned_deg + 360.0 * f64::from(i) / f64::from(count)).to_radians();
        (p.0 + radius_pt * angle.sin(), p.1 - radius_pt * angle.cos())
    };
    (0..count).map(corner).collect()
}

fn ring_of(canvas: &mut Canvas, points: &[Point], fill: Colour, edge: Stroke) {
    canvas.polygon(points, fill, 1.0);
    let mut closed = points.to_vec();
    closed.extend(points.first());
    canvas.path(&closed, edge);
}

fn strokes(canvas: &mut Canvas, p: Point, r: f64, mark: &Mark) {
    let colour = if mark.filled {
        mark.colour
    } else {
        super::style::BLACK
    };
    let stroke = Stroke::solid(colour, if mark.filled { 1.2 } else { 0.6 });
    let turned = if mark.shape == Shape::Plus { 0.0 } else { 45.0 };
    let ends = corners(p, 1.2 * r, 4, turned);
    canvas.path(&[ends[0], ends[2]], stroke);
    canvas.path(&[ends[1], ends[3]], stroke);
}

/// A line with an arrow head at its end.
pub(super) fn arrow(canvas: &mut Canvas, from: Point, to: Point, stroke: Stroke, head_pt: f64) {
    let length = (to.0 - from.0).hypot(to.1 - from.1).max(1e-6);
    let (ux, uy) = ((to.0 - from.0) / length, (to.1 - from.1) / length);
    let back = |side: f64| {
        (
            to.0 - head_pt * ux - side * 0.55 * head_pt * uy,
            to.1 - head_pt * uy + side * 0.55 * head_pt * ux,
        )
    };
    canvas.path(&[from, to], stroke);
    canvas.polygon(&[back(1.0), to, back(-1.0)], stroke.colour, 1.0);
}
