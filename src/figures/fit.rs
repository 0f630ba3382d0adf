//! Data, model and residuals of every fitted window.

use super::axis::{Axis, Scale};
use super::canvas::{Anchor, Canvas, Type, page};
use super::fit_panel::Cell;
use super::marker::Shape;
use super::panel::{Panel, labels_width, title_lines, unit_with_power, x_ticks, y_ticks};
use super::style::{CONTINUUM, DARK, LABEL_PT, LINE_PT, MODEL, TICK_PT, TITLE_PT, Width};
use super::text::{elide, width_pt, wrap};
use crate::ground::{Error, Result};

/// The fitted windows of one spectrum.
#[derive(Clone, Debug, Default)]
pub struct FitFigure {
    /// Heading; empty for none.
    pub title: String,
    /// Name and unit of the abscissa as printed, for example `Wavelength (µm)`.
    pub x_label: String,
    /// Name of the ordinate without its unit, for example `Flux density`.
    pub y_quantity: String,
    /// Unit of the ordinate, for example `W m⁻² µm⁻¹`; a power of ten is put before it.
    pub y_unit: String,
    /// The windows, in the order in which they are to be shown.
    pub panels: Vec<FitPanel>,
}

/// One fitted window. All abscissae and ordinates are in the units named in [`FitFigure`].
#[derive(Clone, Debug, Default)]
pub struct FitPanel {
    /// Remark above the panel, for example `χ²/ν = 1.08`; empty for none.
    pub caption: String,
    /// Sample positions.
    pub x: Vec<f64>,
    /// Sample values; not-a-number samples are skipped.
    pub y: Vec<f64>,
    /// One-sigma errors; without a positive one a sample has neither error bar nor residual.
    pub sigma: Vec<f64>,
    /// Whether the fit used the sample; the others are shown as open pale marks.
    pub used: Vec<bool>,
    /// The total model at the samples, for the residuals.
    pub model: Vec<f64>,
    /// Positions, ascending, at which the model curves are given; usually finer than the samples.
    pub grid_x: Vec<f64>,
    /// Continuum on the grid.
    pub continuum: Vec<f64>,
    /// Total model on the grid.
    pub total: Vec<f64>,
    /// Emission bands on the grid.
    pub bands: Vec<FitBand>,
    /// Ranges left out of the fit, hatched.
    pub left_out: Vec<(f64, f64)>,
}

/// One emission band of the model.
#[derive(Clone, Debug, Default)]
pub struct FitBand {
    /// Name as printed, for example `CO₂`.
    pub label: String,
    /// The band alone, without continuum, on the grid; drawn standing on the continuum.
    pub y: Vec<f64>,
}

/// Most lines of a heading.
const TITLE_LINES: usize = 3;
/// Blank at the page's edges, pt.
const EDGE_PT: f64 = 3.0;
/// Room right of a panel for half a tick label, pt.
const RIGHT_PT: f64 = 11.0;
/// Blank between main and residual panel, pt.
const BETWEEN_PT: f64 = 3.0;
/// Height of the tick labels under a panel, pt.
const TICKS_PT: f64 = 12.0;
/// Residual panels lower than this get a shorter name, pt.
const SHORT_PT: f64 = 35.0;
/// How far the name of an ordinate may reach beyond its panel, both ends together, pt.
const OVERHANG_PT: f64 = 10.0;
/// Share of a panel that band names may take before the panel grows.
const NAMES_SHARE: f64 = 0.35;
/// Rounds in which margins and ranges settle.
const ROUNDS: usize = 3;
/// Height to which a page is filled where the windows are many, pt.
const PAGE_PT: f64 = 660.0;

/// Sizes shared by all cells of the figure, pt.
#[derive(Clone, Copy, Debug)]
struct Sizes {
    columns: usize,
    cell_width: f64,
    main: f64,
    residual: f64,
    caption: f64,
}

/// Draws the fitted windows: data, continuum, bands and total model above, residuals in units of the
/// errors below. Of more than 400 samples only every n-th is a point with an error bar, over a pale
/// line through the extremes of all; `Δ/σ` names (data − model)/σ in low panels. Two columns when there are several windows and the figure is [`Width::Double`].
///
/// # Errors
/// No window; lengths that disagree; no finite value to draw; ranges beyond double precision.
pub fn fit_svg(figure: &FitFigure, width: Width) -> Result<String> {
    if figure.panels.is_empty() {
        return Err(Error::compute("fit figure: no fitted window to draw"));
    }
    for (i, panel) in figure.panels.iter().enumerate() {
        check(panel).map_err(|what| {
            Error::compute(format!("fit figure, window {}: {what}", i + 1))
                .remedy("give every list of a window the same length")
        })?;
    }
    let sizes = sizes(figure, width);
    let heading = heading(figure, width);
    let cells = cells(figure, &sizes, heading.height)?;
    let last = cells
        .iter()
        .map(|c| c.residual.bottom())
        .fold(0.0, f64::max);
    let height = last + TICKS_PT + LINE_PT + EDGE_PT;
    Ok(page(width.points(), height, |canvas| {
        heading.draw(canvas);
        for (i, cell) in cells.iter().enumerate() {
            let lowest = i + sizes.columns >= cells.len();
            cell.draw(canvas, lowest.then_some(figure.x_label.as_str()));
        }
    }))
}

fn check(p: &FitPanel) -> std::result::Result<(), String> {
    let samples = p.x.len();
    for (what, n) in [
        ("values", p.y.len()),
        ("errors", p.sigma.len()),
        ("use flags", p.used.len()),
        ("model values", p.model.len()),
    ] {
        if n != samples {
            return Err(format!("{n} {what} for {samples} samples"));
        }
    }
    let grid = p.grid_x.len();
    let bands = p.bands.iter().map(|b| (b.label.as_str(), b.y.len()));
    let curves = [("continuum", p.continuum.len()), ("model", p.total.len())];
    for (what, n) in curves.into_iter().chain(bands) {
        if n != grid {
            return Err(format!("{n} values of {what} for {grid} grid points"));
        }
    }
    Ok(())
}

fn sizes(figure: &FitFigure, width: Width) -> Sizes {
    let count = figure.panels.len();
    let columns = if width == Width::Double && count > 1 {
        2
    } else {
        1
    };
    let caption = LINE_PT + 1.0;
    let rows = count.div_ceil(columns) as f64;
    let fixed = caption + BETWEEN_PT + TICKS_PT + 6.0;
    let (most, least) = if width == Width::Double && columns == 1 {
        (225.0, 80.0)
    } else {
        (150.0, 84.0)
    };
    let both = (PAGE_PT / rows - fixed).clamp(least, most);
    Sizes {
        columns,
        cell_width: width.points() / columns as f64,
        main: 0.74 * both,
        residual: 0.26 * both,
        caption,
    }
}

/// Places the panels. Band names open the range and the panel, which can make tick labels wider and
/// so the panel narrower; a few rounds settle that.
fn cells<'a>(figure: &'a FitFigure, sizes: &Sizes, top: f64) -> Result<Vec<Cell<'a>>> {
    let panels = figure.panels.iter();
    let mut cells = panels
        .map(|data| cell(figure, data, sizes))
        .collect::<Result<Vec<Cell>>>()?;
    for _ in 0..ROUNDS {
        for column in 0..sizes.columns {
            set_column(&mut cells, column, sizes);
        }
        let mut y = top;
        for row in cells.chunks_mut(sizes.columns) {
            let names = row.iter().map(|c| c.labels.height_pt);
            let extra = (names.fold(0.0, f64::max) - NAMES_SHARE * sizes.main).max(0.0);
            for cell in row {
                cell.stand(y + sizes.caption, sizes.main + extra, BETWEEN_PT);
            }
            y += row_height(sizes) + extra;
        }
    }
    Ok(cells)
}

/// Gives all panels of a column the left margin of the widest labels.
fn set_column(cells: &mut [Cell], column: usize, sizes: &Sizes) {
    let mine = || (column..cells.len()).step_by(sizes.columns);
    let margin = mine().map(|i| cells[i].margin_pt()).fold(0.0, f64::max);
    let left = column as f64 * sizes.cell_width + EDGE_PT + margin;
    let width = sizes.cell_width - EDGE_PT - margin - RIGHT_PT;
    for cell in cells.iter_mut().skip(column).step_by(sizes.columns) {
        cell.place(left, width);
    }
}

fn row_height(sizes: &Sizes) -> f64 {
    sizes.caption + sizes.main + BETWEEN_PT + sizes.residual + TICKS_PT + 6.0
}

fn cell<'a>(figure: &FitFigure, data: &'a FitPanel, sizes: &Sizes) -> Result<Cell<'a>> {
    let x = data.x.iter().chain(&data.grid_x).copied();
    let x = Axis::covering(x, Scale::Linear, "abscissa of a fitted window")?.padded(0.01, 0.01);
    let y = super::fit_panel::flux_range(data)?;
    let exponent = y.exponent();
    let main = Panel {
        left: 0.0,
        top: 0.0,
        width: sizes.cell_width,
        height: sizes.main,
        x,
        y,
    };
    let residual = Panel {
        height: sizes.residual,
        y: super::fit_panel::residual_range(data),
        ..main
    };
    let unit = unit_with_power(&figure.y_unit, exponent);
    Ok(Cell {
        data,
        main,
        residual,
        closed: y,
        labels: super::label::plan(&[], 0.0, 0.0),
        exponent,
        y_title: title_lines(figure.y_quantity.trim(), &unit, sizes.main + OVERHANG_PT),
    })
}

impl Cell<'_> {
    /// Room for labels and name of the ordinate, pt.
    fn margin_pt(&self) -> f64 {
        let main = labels_width(&y_ticks(&self.main.y, self.main.height, self.exponent));
        let residual = labels_width(&super::fit_panel::residual_ticks(&self.residual));
        let lines = self.y_title.len().max(self.residual_title().len());
        main.max(residual) + 2.0 + LINE_PT * lines as f64
    }

    fn residual_title(&self) -> Vec<String> {
        if self.residual.height < SHORT_PT {
            return vec!["Δ/σ".to_owned()];
        }
        title_lines("Residual", "(σ)", self.residual.height)
    }

    /// Draws both panels with their axes.
    fn draw(&self, canvas: &mut Canvas, x_label: Option<&str>) {
        let x = x_ticks(&self.main.x, self.main.width, 0);
        let y = y_ticks(&self.main.y, self.main.height, self.exponent);
        let r = super::fit_panel::residual_ticks(&self.residual);
        self.draw_main(canvas);
        self.draw_residuals(canvas);
        self.main.frame(canvas, &x, &y, false);
        self.residual.frame(canvas, &x, &r, true);
        let from = labels_width(&y).max(labels_width(&r)) + 2.0;
        self.main.y_title(canvas, &self.y_title, from);
        self.residual.y_title(canvas, &self.residual_title(), from);
        if let Some(label) = x_label {
            self.residual.x_title(canvas, label, TICKS_PT + 5.0);
        }
        let caption = elide(&self.caption(), TICK_PT, false, self.main.width);
        let p = (self.main.left, self.main.top - 5.0);
        canvas.text(&caption, p, Type::new(TICK_PT, Anchor::Start));
    }
}

/// Title and key above the panels.
struct Heading {
    title: Vec<String>,
    unused: bool,
    height: f64,
}

fn heading(figure: &FitFigure, width: Width) -> Heading {
    let room = width.points() - 2.0 * EDGE_PT;
    let title = wrap(&figure.title, TITLE_PT, true, room, TITLE_LINES);
    let unused = figure.panels.iter().any(|p| p.used.contains(&false));
    let height = EDGE_PT + (title.len() as f64 + 1.0) * (LINE_PT + 1.0);
    Heading {
        title,
        unused,
        height,
    }
}

impl Heading {
    fn draw(&self, canvas: &mut Canvas) {
        canvas.heading(&self.title, (EDGE_PT, EDGE_PT));
        let y = EDGE_PT + (self.title.len() as f64 + 0.5) * (LINE_PT + 1.0);
        let mut x = EDGE_PT;
        self.entry(canvas, (&mut x, y), "data", |c, (x, y)| {
            super::fit_panel::data_mark(c, (x + 5.0, y), Some((y - 3.5, y + 3.5)));
        });
        self.entry(canvas, (&mut x, y), "model", |c, (x, y)| {
            c.path(&[(x, y), (x + 13.0, y)], MODEL);
        });
        self.entry(canvas, (&mut x, y), "continuum", |c, (x, y)| {
            c.path(&[(x, y), (x + 13.0, y)], CONTINUUM);
        });
        if self.unused {
            self.entry(canvas, (&mut x, y), "not fitted", |c, (x, y)| {
                super::fit_panel::pale_mark(c, (x + 5.0, y), Shape::Circle);
            });
        }
    }

    /// A sample and its name, moving `x` on.
    fn entry(
        &self,
        canvas: &mut Canvas,
        (x, y): (&mut f64, f64),
        name: &str,
        sample: impl Fn(&mut Canvas, (f64, f64)),
    ) {
        sample(canvas, (*x, y));
        let how = Type::new(LABEL_PT, Anchor::Start).colour(DARK);
        canvas.text(name, (*x + 16.0, y), how);
        *x += 16.0 + width_pt(name, LABEL_PT, false) + 9.0;
    }
}
