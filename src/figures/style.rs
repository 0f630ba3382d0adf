//! Sizes, colours and line styles shared by all figures.

/// Width at which a figure is printed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Width {
    /// One journal column, 3.5 in.
    Single,
    /// The whole page width, 7.1 in.
    Double,
}

impl Width {
    /// Width in points (1/72 in).
    pub(super) fn points(self) -> f64 {
        match self {
            Self::Single => 252.0,
            Self::Double => 511.2,
        }
    }
}

/// Type size of axis labels, names and legends, pt.
pub(super) const LABEL_PT: f64 = 7.5;
/// Type size of tick labels and remarks, pt.
pub(super) const TICK_PT: f64 = 7.0;
/// Type size of titles, pt.
pub(super) const TITLE_PT: f64 = 8.0;
/// Height of one line of text, pt.
pub(super) const LINE_PT: f64 = 9.0;

/// Red, green and blue, 0–255.
pub(super) type Colour = (u8, u8, u8);

pub(super) const BLACK: Colour = (0, 0, 0);
pub(super) const DARK: Colour = (70, 70, 70);
pub(super) const MIDDLE: Colour = (120, 120, 120);
pub(super) const PALE: Colour = (170, 170, 170);
pub(super) const FAINT: Colour = (225, 225, 225);
pub(super) const WHITE: Colour = (255, 255, 255);

const BLUE: Colour = (0, 114, 178);
const VERMILION: Colour = (213, 94, 0);
const GREEN: Colour = (0, 158, 115);
const ORANGE: Colour = (230, 159, 0);
const PURPLE: Colour = (204, 121, 167);
const SKY: Colour = (86, 180, 233);

/// A line: colour, opacity, thickness and lengths of dashes and gaps in turn (empty = solid), pt.
#[derive(Clone, Copy, Debug)]
pub(super) struct Stroke {
    pub colour: Colour,
    pub opacity: f64,
    pub width_pt: f64,
    pub dash_pt: &'static [f64],
}

impl Stroke {
    /// A solid, opaque line.
    pub(super) const fn solid(colour: Colour, width_pt: f64) -> Self {
        Self {
            colour,
            opacity: 1.0,
            width_pt,
            dash_pt: &[],
        }
    }

    /// The same line broken into dashes.
    pub(super) const fn dashed(mut self, dash_pt: &'static [f64]) -> Self {
        self.dash_pt = dash_pt;
        self
    }
}

/// Lines of frames and ticks.
pub(super) const FRAME: Stroke = Stroke::solid(BLACK, 0.5);
/// Continuum under the bands.
pub(super) const CONTINUUM: Stroke = Stroke::solid(DARK, 0.8).dashed(&[4.0, 2.0]);
/// The total model.
pub(super) const MODEL: Stroke = Stroke::solid(BLACK, 1.0);
/// Reference lines inside panels.
pub(super) const DOTTED: Stroke = Stroke::solid(DARK, 0.5).dashed(&[0.8, 1.6]);

/// The colour-blind-safe set of Okabe & Ito (2008, "Color Universal Design"), without black and
/// yellow (yellow is too pale for lines on white), in an order that alternates dark and light so that
/// neighbours differ in grey as well.
const SERIES: [Colour; 6] = [BLUE, ORANGE, GREEN, PURPLE, VERMILION, SKY];

const DASHES: [&[f64]; 6] = [
    &[],
    &[4.5, 1.5],
    &[1.2, 1.2],
    &[5.0, 1.3, 1.2, 1.3],
    &[2.4, 1.2],
    &[5.0, 1.2, 1.0, 1.2, 1.0, 1.2],
];

/// Line style of the series with this index. The pair of colour and dash repeats after 36.
pub(super) fn series(index: usize, width_pt: f64) -> Stroke {
    let dash = (index + index / SERIES.len()) % DASHES.len();
    Stroke::solid(series_colour(index), width_pt).dashed(DASHES[dash])
}

/// Colour of the series with this index; repeats after six.
pub(super) fn series_colour(index: usize) -> Colour {
    SERIES[index % SERIES.len()]
}
