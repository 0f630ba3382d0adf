//! The figures of a kit: which there are, their names and captions.

use super::KitFile;
use super::print::print;
use super::stamp::Stamp;
use super::study::Study;
use crate::comparison::RatioComparison;
use crate::figures::{CornerFigure, CornerRatio, Width, corner_svg};
use crate::ground::Result;
use crate::report;
use rayon::prelude::*;

mod plane;
mod profile;

/// Most ratios of a corner figure.
const MOST_IN_CORNER: usize = 5;
/// Fewest points on a distance or ratio–ratio figure that are worth the ink.
const FEWEST_POINTS: usize = 3;

/// One figure in both widths.
pub(super) struct Figure {
    /// File name without ending.
    pub name: String,
    /// What it shows, in journal style; plain Unicode.
    pub caption: String,
    /// Drawing two columns wide.
    pub wide: String,
    /// Drawing one column wide.
    pub narrow: String,
}

/// Draws all figures.
///
/// # Errors
/// A value that has no place on its axis.
pub(super) fn figures(studies: &[Study], places: &[RatioComparison]) -> Result<Vec<Figure>> {
    let mut out = Vec::new();
    for (k, s) in studies.iter().enumerate() {
        let name = |word: &str| {
            if studies.len() == 1 {
                word.to_owned()
            } else {
                format!("{word}-{}", k + 1)
            }
        };
        out.push(both(name("fit"), fit_caption(s), |w| {
            report::fit_figure(&s.analysis, &s.settings, w)
        })?);
        let standing = |w| report::standing_figure(&s.analysis, &s.settings, w);
        out.extend(maybe(name("standing"), standing_caption(s), standing)?);
        let corner = corner(s);
        if !corner.ratios.is_empty() {
            let draw = |w| corner_svg(&corner, w);
            let caption = corner_caption(s, corner.ratios.len());
            out.push(both(name("posterior"), caption, draw)?);
        }
        if let Some(figure) = profile::profile(s) {
            let draw = |w| crate::figures::range_svg(&figure, w);
            out.push(both(name("profile"), profile::caption(s), draw)?);
        }
    }
    let mut comets: Vec<&str> = places.iter().map(|c| c.label.as_str()).collect();
    comets.dedup();
    for c in places {
        if c.rows
            .iter()
            .filter(|e| e.heliocentric_au.is_some())
            .count()
            < FEWEST_POINTS
        {
            continue;
        }
        let mut name = format!("distance-{}-{}", word(c.of.as_str()), word(c.to.as_str()));
        if comets.len() > 1 {
            let number = comets.iter().position(|l| *l == c.label).unwrap_or(0) + 1;
            name.push_str(&format!("-{number}"));
        }
        let one = std::slice::from_ref(c);
        let draw = |w| report::comparison_distance_figure(one, w);
        out.extend(maybe(name, distance_caption(c), draw)?);
    }
    if let Some((figure, caption)) = plane::plane(studies, places) {
        let draw = |w| crate::figures::scatter_svg(&figure, w);
        out.push(both("plane".to_owned(), caption, draw)?);
    }
    Ok(out)
}

/// All figures as files.
///
/// # Errors
/// A drawing that a renderer refuses.
pub(super) fn printed(figures: &[Figure], stamp: &Stamp) -> Result<Vec<Vec<KitFile>>> {
    let sheets: Vec<(String, &String)> = figures
        .iter()
        .flat_map(|f| {
            [
                (f.name.clone(), &f.wide),
                (format!("{}-narrow", f.name), &f.narrow),
            ]
        })
        .collect();
    sheets
        .par_iter()
        .map(|(name, svg)| {
            let p = print(svg, name, stamp)?;
            Ok(vec![
                (format!("{name}.svg"), p.svg),
                (format!("{name}.pdf"), p.pdf),
                (format!("{name}.png"), p.png),
            ])
        })
        .collect()
}

fn both(name: String, caption: String, draw: impl Fn(Width) -> Result<String>) -> Result<Figure> {
    Ok(Figure {
        name,
        caption,
        wide: draw(Width::Double)?,
        narrow: draw(Width::Single)?,
    })
}

fn maybe(
    name: String,
    caption: String,
    draw: impl Fn(Width) -> Result<Option<String>>,
) -> Result<Option<Figure>> {
    let (Some(wide), Some(narrow)) = (draw(Width::Double)?, draw(Width::Single)?) else {
        return Ok(None);
    };
    Ok(Some(Figure {
        name,
        caption,
        wide,
        narrow,
    }))
}

/// Letters and digits of a species for file names.
fn word(species: &str) -> String {
    let kept = species.chars().filter(char::is_ascii_alphanumeric);
    kept.collect::<String>().to_lowercase()
}

fn fit_caption(s: &Study) -> String {
    format!(
        "Spectrum of {} with the fitted model. Points: flux density with 1σ errors; line: model; dashed: continuum; shaded: bands. Wavelengths are in vacuum in the rest frame of the comet. Lower panels: residuals in units of the errors.",
        s.heading()
    )
}

fn standing_caption(s: &Study) -> String {
    format!(
        "Ratios of {} among published comets, each comet once. Bars: 68 % and 95 % intervals; arrows: limits; curve: share of comets at or below a value, limits taken into account.",
        s.heading()
    )
}

fn corner(s: &Study) -> CornerFigure {
    let drawn = s.analysis.ratios.iter().filter_map(|r| {
        let i = r.ratio.interval?;
        let usable = i.median > 0.0 && r.ratio.draws.len() == s.settings.draws.count;
        usable.then(|| CornerRatio {
            label: format!("{}/{}", r.ratio.of.pretty(), r.ratio.to.pretty()),
            value: super::rounding::interval_text(&i),
            draws: r.ratio.draws.clone(),
            marks: [i.median, i.low68, i.high68],
        })
    });
    CornerFigure {
        title: s.heading(),
        ratios: drawn.take(MOST_IN_CORNER).collect(),
    }
}

fn corner_caption(s: &Study, drawn: usize) -> String {
    let measured = s
        .analysis
        .ratios
        .iter()
        .filter(|r| r.ratio.interval.is_some());
    let only = match measured.count() {
        all if all > drawn => format!("{drawn} of {all} ratios"),
        _ => "Ratios".to_owned(),
    };
    format!(
        "{only} of {} in {} shared random draws of fluxes, calibration, efficiencies, scale lengths and expansion speed. Diagonal: distribution with median and 68 % interval; below: regions that hold 68 % (dark) and 95 % (light) of the draws. A slanted region means that the errors of two ratios move together.",
        s.heading(),
        s.settings.draws.count
    )
}

fn distance_caption(c: &RatioComparison) -> String {
    let trend = if c.distance.trend.is_some() {
        " Line: power law fitted with limits and intrinsic scatter; dashed: range that holds 68 % of comets."
    } else {
        ""
    };
    format!(
        "{}/{} of {} and of published comets against heliocentric distance. Filled: values; open with arrow: limits.{trend}",
        c.of.pretty(),
        c.to.pretty(),
        c.label
    )
}
