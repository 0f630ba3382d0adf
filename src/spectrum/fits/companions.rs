//! Parts beside an image that hold its errors or its flags.

use super::columns::fold;
use super::parts::{Kind, PartInfo, listing};
use super::words::text;
use super::{ErrorKind, FitsLayout, Part, choose};
use crate::ground::{Error, Result};
use crate::spectrum::Column;

/// What a part is to another one.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Role {
    Errors(Option<ErrorKind>),
    Flags,
}

/// The role the words HDUCLAS2 and HDUCLAS3, or the name of a part give it; `None` for data.
pub(super) fn role(part: &PartInfo) -> Option<Role> {
    let class = |key: &str| text(&part.header, key).map(str::to_uppercase);
    match class("HDUCLAS2").as_deref() {
        Some("ERROR") => {
            return Some(Role::Errors(match class("HDUCLAS3").as_deref() {
                Some("RMSE") => Some(ErrorKind::Sigma),
                Some("MSE") => Some(ErrorKind::Variance),
                Some("INVMSE") => Some(ErrorKind::InverseVariance),
                _ => None,
            }));
        }
        Some("QUALITY") => return Some(Role::Flags),
        Some("DATA") => return None,
        _ => {}
    }
    let name = part.name.as_deref()?;
    name.split(|c: char| !c.is_ascii_alphabetic())
        .find_map(|token| by_token(&fold(token)))
}

fn by_token(token: &str) -> Option<Role> {
    match token {
        "err" | "error" | "errs" | "errors" | "sigma" | "uncert" | "uncertainty" | "stddev" => {
            Some(Role::Errors(Some(ErrorKind::Sigma)))
        }
        "stat" | "var" | "variance" => Some(Role::Errors(Some(ErrorKind::Variance))),
        "ivar" | "invvar" => Some(Role::Errors(Some(ErrorKind::InverseVariance))),
        "dq" | "mask" | "quality" | "qual" | "flags" => Some(Role::Flags),
        _ => None,
    }
}

/// The part with the errors of the image `main`.
pub(super) fn errors(
    parts: &[PartInfo],
    main: &PartInfo,
    layout: &FitsLayout,
) -> Result<Option<usize>> {
    let is = |r: Role| matches!(r, Role::Errors(_));
    find(parts, main, layout.error.as_ref(), "ERRDATA", "error", is)
}

/// The part with the flags of the image `main`.
pub(super) fn flags(
    parts: &[PartInfo],
    main: &PartInfo,
    layout: &FitsLayout,
) -> Result<Option<usize>> {
    let is = |r: Role| r == Role::Flags;
    find(parts, main, layout.mask.as_ref(), "QUALDATA", "mask", is)
}

fn find(
    parts: &[PartInfo],
    main: &PartInfo,
    wanted: Option<&Column>,
    keyword: &str,
    key: &str,
    is: impl Fn(Role) -> bool,
) -> Result<Option<usize>> {
    let by_layout = wanted.map(|w| match w {
        Column::Name(name) => Part::Name(name.clone()),
        Column::Number(n) => Part::Number(*n),
    });
    let by_keyword = text(&main.header, keyword).map(|name| Part::Name(name.to_owned()));
    if let Some(part) = by_layout.or(by_keyword) {
        let index = choose::named(parts, &part)?;
        same_shape(main, &parts[index])?;
        return Ok(Some(index));
    }
    let version = |p: &PartInfo| p.header.get_integer("EXTVER").ok().flatten().unwrap_or(1);
    let beside: Vec<&PartInfo> = parts
        .iter()
        .filter(|p| p.number != main.number && role(p).is_some_and(&is))
        .filter(|p| same_shape(main, p).is_ok())
        .collect();
    let twins: Vec<&&PartInfo> = beside
        .iter()
        .filter(|p| version(p) == version(main))
        .collect();
    match (&beside[..], &twins[..]) {
        ([], _) => Ok(None),
        ([one], _) => Ok(Some(one.number)),
        (_, [one]) => Ok(Some(one.number)),
        _ => Err(Error::input(format!(
            "several parts may hold the {key}s of {}",
            main.title()
        ))
        .showing(listing(parts))
        .remedy(format!(
            "say which with the plan key columns.{key}, by name or by number counted from 0"
        ))),
    }
}

fn same_shape(main: &PartInfo, other: &PartInfo) -> Result<()> {
    match (&main.kind, &other.kind) {
        (Kind::Image { shape: a }, Kind::Image { shape: b }) if a == b => Ok(()),
        _ => Err(Error::input(format!(
            "{} is not an image of the same size as {}",
            other.title(),
            main.title()
        ))
        .remedy("name the part that belongs to it")),
    }
}
