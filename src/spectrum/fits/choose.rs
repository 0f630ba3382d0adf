//! Which part of a file holds the spectrum.

use super::columns;
use super::parts::{Kind, PartInfo, listing};
use super::words::Words;
use super::{FitsLayout, Part, axis, companions, image};
use crate::ground::{Error, Result};

/// The part the layout names, else the only one that reads as a spectrum.
pub(super) fn part(parts: &[PartInfo], layout: &FitsLayout) -> Result<usize> {
    if let Some(wanted) = &layout.part {
        let index = named(parts, wanted)?;
        return match &parts[index].kind {
            Kind::Empty => Err(unreadable(parts, index, "holds no data")),
            Kind::Other(why) => Err(unreadable(parts, index, &format!("is an {why}"))),
            _ => Ok(index),
        };
    }
    let candidates: Vec<usize> = (0..parts.len())
        .filter(|i| reads_as_spectrum(parts, &parts[*i], layout))
        .collect();
    match candidates[..] {
        [one] => Ok(one),
        [] => Err(none(parts)),
        _ => {
            let titles: Vec<String> = candidates.iter().map(|i| parts[*i].title()).collect();
            Err(Error::input(format!(
                "several parts read as a spectrum: {}",
                titles.join(", ")
            ))
            .showing(listing(parts))
            .remedy("say which with the plan key part, by name or by number counted from 0"))
        }
    }
}

/// The place of a part by name or number.
pub(super) fn named(parts: &[PartInfo], wanted: &Part) -> Result<usize> {
    let (found, shown) = match wanted {
        Part::Number(n) => (Some(*n).filter(|n| *n < parts.len()), n.to_string()),
        Part::Name(name) => {
            let same = |p: &PartInfo| {
                let own = p.name.as_deref().unwrap_or("");
                own.eq_ignore_ascii_case(name.trim())
                    || (p.number == 0 && own.is_empty() && name.eq_ignore_ascii_case("primary"))
            };
            let mut all = parts.iter().filter(|p| same(p));
            let first = all.next().map(|p| p.number);
            if all.next().is_some() {
                return Err(Error::input(format!("several parts are named {name:?}"))
                    .showing(listing(parts))
                    .remedy("give the number of the part, counted from 0"));
            }
            (first, format!("{name:?}"))
        }
    };
    found.ok_or_else(|| {
        Error::input(format!("the file has no part {shown}"))
            .showing(listing(parts))
            .remedy("name a part listed here, or give its number counted from 0")
    })
}

fn reads_as_spectrum(parts: &[PartInfo], part: &PartInfo, layout: &FitsLayout) -> bool {
    match &part.kind {
        Kind::Table { rows, columns, .. } => *rows > 0 && columns::pick(columns, layout).is_ok(),
        Kind::Image { shape } => {
            companions::role(part).is_none()
                && image::line(shape, layout.row)
                    .is_ok_and(|l| axis::may_be_spectral(Words::of(parts, part), l.axis + 1))
        }
        _ => false,
    }
}

fn unreadable(parts: &[PartInfo], index: usize, why: &str) -> Error {
    Error::input(format!("{} {why}", parts[index].title()))
        .showing(listing(parts))
        .remedy("choose another part with the plan key part")
}

fn none(parts: &[PartInfo]) -> Error {
    let flat = parts
        .iter()
        .any(|p| matches!(&p.kind, Kind::Image { shape } if image::line(shape, None).is_err()));
    let error = Error::input("no part of the file reads as a one-dimensional spectrum")
        .showing(listing(parts));
    error.remedy(if flat {
        "extract a one-dimensional spectrum first; if each row of the image is a spectrum, choose one with the plan keys part and row (from 1)"
    } else {
        "choose a part with the plan key part, and name the columns of a table with columns.wavelength and columns.flux"
    })
}
