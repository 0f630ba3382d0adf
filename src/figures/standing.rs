//! Where this comet's ratios lie among those of known comets.

use super::canvas::{Anchor, Canvas, Point, Type, page};
use super::marker::Mark;
use super::standing_row::{Row, this_mark};
use super::style::{BLACK, LABEL_PT, LINE_PT, TITLE_PT, Width};
use super::text::{elide, width_pt, wrap};
use crate::ground::{Error, Result};

/// Ratios of this comet among those of comparison comets.
#[derive(Clone, Debug, Default)]
pub struct StandingFigure {
    /// Heading; empty for none.
    pub title: String,
    /// Name of this comet in the key.
    pub this_label: String,
    /// Names of the classes in the key; [`ComparisonComet::class`] counts from 0 in this list.
    pub classes: Vec<String>,
    /// One row per ratio.
    pub rows: Vec<StandingRow>,
}

/// One ratio.
#[derive(Clone, Debug, Default)]
pub struct StandingRow {
    /// Name as printed, for example `CO₂/H₂O`.
    pub ratio: String,
    /// One entry per comet.
    pub comets: Vec<ComparisonComet>,
    /// Steps of the cumulative distribution: ratio (ascending) and the fraction of comets at or below
    /// it; empty for none.
    pub cumulative: Vec<(f64, f64)>,
    /// This comet.
    pub this: ThisComet,
    /// Remark on the number of comets, for example `41 comets, 20 limits`.
    pub count_text: String,
    /// Remark on the place of this comet, for example `percentile 62 (55–70)`.
    pub place_text: String,
}

/// A comparison comet.
#[derive(Clone, Debug)]
pub struct ComparisonComet {
    /// Designation and name; printed where the row holds at most eight comets.
    pub name: String,
    /// Index into [`StandingFigure::classes`].
    pub class: usize,
    /// Its ratio.
    pub value: ComparisonValue,
}

/// A published ratio (linear, not its logarithm).
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum ComparisonValue {
    /// A value with the ends of its error bar; an end that is not positive reaches the frame.
    Measured {
        /// Best value, positive.
        value: f64,
        /// Lower and upper end of the error bar.
        bar: Bounds,
    },
    /// The ratio is below this.
    UpperLimit(f64),
    /// The ratio is above this.
    LowerLimit(f64),
}

/// An interval of ratios.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bounds {
    /// Lower end.
    pub low: f64,
    /// Upper end.
    pub high: f64,
}

/// The ratio of this comet (linear).
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub enum ThisComet {
    /// Median with the central 68.3 % and 95.4 % intervals.
    Measured {
        /// Median, positive.
        median: f64,
        /// Central 68.3 % interval.
        inner: Bounds,
        /// Central 95.4 % interval.
        outer: Bounds,
    },
    /// The ratio is below this.
    UpperLimit(f64),
    /// The ratio is above this.
    LowerLimit(f64),
    /// Nothing can be said; only the comparison comets are shown.
    #[default]
    Unconstrained,
}

pub(super) const EDGE_PT: f64 = 3.0;
const RIGHT_PT: f64 = 11.0;
/// Width of the remarks beside the rows of a double figure, pt.
const REMARKS_PT: f64 = 92.0;
/// Room for the tick labels of the cumulative fraction, pt.
const FRACTIONS_PT: f64 = 15.0;
const KEY_LINE_PT: f64 = LINE_PT + 1.0;

/// Draws one row per ratio: cumulative distribution above, comparison comets and this comet below, on
/// a logarithmic axis that each row has for itself.
///
/// # Errors
/// No row; a class that is not in the list; a ratio that is not positive or not finite; a row with
/// nothing to show.
pub fn standing_svg(figure: &StandingFigure, width: Width) -> Result<String> {
    if figure.rows.is_empty() {
        return Err(Error::compute("standing figure: no ratio to draw"));
    }
    for row in &figure.rows {
        check(row, figure.classes.len())?;
    }
    let room = width.points() - 2.0 * EDGE_PT;
    let title = wrap(&figure.title, TITLE_PT, true, room, 3);
    let key = key(figure, room);
    let key_lines = key.last().map_or(0.0, |e| e.line as f64 + 1.0);
    let top = EDGE_PT + (title.len() as f64 + key_lines) * KEY_LINE_PT + 2.0;
    let columns = Columns::new(figure, width);
    let mut rows = Vec::new();
    let mut y = top;
    for data in &figure.rows {
        let row = Row::new(data, &columns, y)?;
        y = row.bottom();
        rows.push(row);
    }
    Ok(page(width.points(), y + EDGE_PT, |canvas| {
        canvas.heading(&title, (EDGE_PT, EDGE_PT));
        draw_key(canvas, &key, EDGE_PT + title.len() as f64 * KEY_LINE_PT);
        for (i, row) in rows.iter().enumerate() {
            row.draw(canvas, i == 0);
        }
    }))
}

fn check(row: &StandingRow, classes: usize) -> Result<()> {
    let refuse = |what: String| Err(Error::compute(format!("{}: {what}", row.ratio)));
    for c in &row.comets {
        if c.class >= classes {
            let what = format!("{}: class {} of {classes}", c.name, c.class);
            return refuse(what);
        }
        let v = c.value.main();
        if !(v > 0.0 && v.is_finite()) {
            return refuse(format!("{}: {v} has no place on a log axis", c.name));
        }
    }
    if let Some(v) = row.this.main()
        && !(v > 0.0 && v.is_finite())
    {
        return refuse(format!("this comet: {v} has no place on a log axis"));
    }
    Ok(())
}

impl ComparisonValue {
    /// Value or limit.
    pub(super) fn main(&self) -> f64 {
        match *self {
            Self::Measured { value, .. } => value,
            Self::UpperLimit(v) | Self::LowerLimit(v) => v,
        }
    }
}

impl ThisComet {
    /// Median or limit.
    pub(super) fn main(&self) -> Option<f64> {
        match *self {
            Self::Measured { median, .. } => Some(median),
            Self::UpperLimit(v) | Self::LowerLimit(v) => Some(v),
            Self::Unconstrained => None,
        }
    }
}

/// The horizontal division of the page.
#[derive(Clone, Copy, Debug)]
pub(super) struct Columns {
    pub left: f64,
    pub right: f64,
    /// Names and remarks stand beside the rows rather than above them.
    pub beside: bool,
    pub page: f64,
}

impl Columns {
    fn new(figure: &StandingFigure, width: Width) -> Self {
        let page = width.points();
        if width == Width::Single {
            let left = EDGE_PT + FRACTIONS_PT;
            return Self {
                left,
                right: page - RIGHT_PT,
                beside: false,
                page,
            };
        }
        let names = figure
            .rows
            .iter()
            .map(|r| width_pt(r.ratio.trim(), LABEL_PT, true));
        let names = names.fold(0.0, f64::max).min(0.25 * page);
        Self {
            left: EDGE_PT + names + 6.0 + FRACTIONS_PT,
            right: page - REMARKS_PT,
            beside: true,
            page,
        }
    }
}

/// An entry of the key: mark (none = this comet), name, place.
struct KeyEntry {
    mark: Option<Mark>,
    name: String,
    x: f64,
    line: usize,
}

/// Lays the key out in lines of `room` pt: this comet first, then the classes that occur.
fn key(figure: &StandingFigure, room: f64) -> Vec<KeyEntry> {
    let occurs = |class: usize| {
        let mut comets = figure.rows.iter().flat_map(|r| &r.comets);
        comets.any(|c| c.class == class)
    };
    let this = (None, figure.this_label.trim());
    let classes = figure.classes.iter().enumerate();
    let classes = classes
        .filter(|(i, _)| occurs(*i))
        .map(|(i, name)| (Some(Mark::of_group(i)), name.trim()));
    let (mut x, mut line) = (0.0, 0);
    let mut entries = Vec::new();
    for (mark, name) in std::iter::once(this).chain(classes) {
        let bold = mark.is_none();
        let lead = if bold { 24.0 } else { 8.0 };
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

fn draw_key(canvas: &mut Canvas, key: &[KeyEntry], top: f64) {
    for e in key {
        let y = top + (e.line as f64 + 0.5) * KEY_LINE_PT;
        let how = Type::new(LABEL_PT, Anchor::Start);
        match e.mark {
            Some(mark) => {
                mark.draw(canvas, (e.x + 3.0, y), 2.0);
                canvas.text(&e.name, (e.x + 8.0, y), how);
            }
            None => {
                let at = |dx: f64| -> Point { (e.x + 10.0 + dx, y) };
                this_mark(canvas, at(0.0), (at(-5.0), at(5.0)), (at(-10.0), at(10.0)));
                canvas.text(&e.name, (e.x + 24.0, y), how.bold().colour(BLACK));
            }
        }
    }
}
