//! The columns of a binary table: what each holds, and which are wavelength, flux, error and mask.

use super::numbers::{Coding, element_bytes};
use super::words::text;
use super::{ErrorKind, FitsLayout};
use crate::ground::{Error, Result, did_you_mean};
use crate::spectrum::Column;
use fits_well::header::Header;
use fits_well::table::Schema;

/// One column, from its keywords alone.
#[derive(Clone, Debug)]
pub(super) struct ColumnInfo {
    pub(super) index: usize,
    pub(super) name: String,
    pub(super) unit: Option<String>,
    pub(super) ucd: String,
    utype: String,
    pub(super) coding: Coding,
    /// Bytes of one element; `None` when the elements are no real numbers.
    pub(super) element_bytes: Option<usize>,
    pub(super) repeat: usize,
    pub(super) byte_offset: usize,
    pub(super) variable: bool,
}

impl ColumnInfo {
    pub(super) fn all(schema: &Schema, header: &Header) -> Vec<Self> {
        let word = |key: &str, n: usize| text(header, &format!("{key}{n}"));
        let columns = schema.columns.iter().enumerate();
        columns
            .map(|(index, c)| {
                let element = c.tform.element();
                let coding = c.tscale().and_then(|scale| {
                    Ok(Coding {
                        element,
                        scale,
                        zero: c.tzero()?,
                        null: c.tnull()?,
                    })
                });
                let plain = Coding {
                    element,
                    scale: 1.0,
                    zero: 0.0,
                    null: None,
                };
                Self {
                    index,
                    name: word("TTYPE", index + 1).unwrap_or_default().to_owned(),
                    unit: word("TUNIT", index + 1).map(str::to_owned),
                    ucd: word("TUCD", index + 1).unwrap_or_default().to_lowercase(),
                    utype: bare_utype(word("TUTYP", index + 1).unwrap_or_default()),
                    element_bytes: coding.as_ref().ok().and_then(|_| element_bytes(element)),
                    coding: coding.unwrap_or(plain),
                    repeat: c.tform.repeat(),
                    byte_offset: c.byte_offset(),
                    variable: c.tform.descriptor_width().is_some(),
                }
            })
            .collect()
    }

    pub(super) fn title(&self) -> String {
        format!("column {} ({})", self.index + 1, self.name)
    }

    /// True when each row holds several values.
    pub(super) fn is_vector(&self) -> bool {
        self.variable || self.repeat > 1
    }

    pub(super) fn is_log10(&self) -> bool {
        LOG_WAVELENGTH.contains(&fold(&self.name).as_str())
    }
}

/// A TUTYP in lower case without its prefix: `spec:Data.FluxAxis.Value` becomes `fluxaxis.value`.
/// A prefix that is not of the spectral data model is kept, so that it never matches.
fn bare_utype(utype: &str) -> String {
    let mut bare = utype.to_lowercase();
    for prefix in ["spec:", "ssa:", "sdm:", "spectrum.", "spec.", "data."] {
        if let Some(rest) = bare.strip_prefix(prefix) {
            bare = rest.to_owned();
        }
    }
    bare
}

/// Letters and digits alone, in lower case.
pub(super) fn fold(name: &str) -> String {
    name.chars()
        .filter(char::is_ascii_alphanumeric)
        .map(|c| c.to_ascii_lowercase())
        .collect()
}

const LOG_WAVELENGTH: [&str; 3] = ["loglam", "loglambda", "logwave"];
const WAVELENGTH: [&str; 14] = [
    "wavelength",
    "wave",
    "lambda",
    "lam",
    "wl",
    "awav",
    "wavelengthair",
    "wavelengthvac",
    "loglam",
    "loglambda",
    "logwave",
    "frequency",
    "freq",
    "wavenumber",
];
const FLUX: [&str; 6] = [
    "flux",
    "fluxdensity",
    "flam",
    "flambda",
    "fnu",
    "fluxlambda",
];
const ERROR: [&str; 12] = [
    "fluxerror",
    "fluxerr",
    "errflux",
    "eflux",
    "error",
    "err",
    "sigma",
    "fluxsigma",
    "uncertainty",
    "fluxuncertainty",
    "stddev",
    "unc",
];
const VARIANCE: [&str; 4] = ["var", "variance", "fluxvar", "fluxvariance"];
const INVERSE: [&str; 5] = ["ivar", "invvar", "inversevariance", "fluxivar", "ivarflux"];
const MASK: [&str; 9] = [
    "dq",
    "mask",
    "quality",
    "qual",
    "andmask",
    "flag",
    "flags",
    "bitmask",
    "pixelmask",
];
/// Columns of surface brightness and its error in space-telescope tables.
pub(super) const SURFACE: (&str, &str) = ("surfbright", "sberror");

/// Places of the columns in use.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Picks {
    pub(super) wavelength: usize,
    pub(super) flux: usize,
    pub(super) error: Option<usize>,
    pub(super) mask: Option<usize>,
}

/// Finds the columns of a spectrum; the error says which is missing and lists those found.
pub(super) fn pick(columns: &[ColumnInfo], layout: &FitsLayout) -> Result<Picks> {
    let given =
        |c: &Option<Column>, what: &str| c.as_ref().map(|c| look_up(columns, c, what)).transpose();
    let wavelength = given(&layout.wavelength, "wavelength")?
        .or_else(|| by_utype(columns, &["spectralaxis.value"]))
        .or_else(|| by_name(columns, &WAVELENGTH))
        .or_else(|| by_ucd(columns, |u| u.starts_with("em.")))
        .ok_or_else(|| missing(columns, "wavelength"))?;
    let usual = usual_flux(columns);
    let flux = given(&layout.flux, "flux")?
        .or(usual)
        .ok_or_else(|| missing(columns, "flux"))?;
    let error = match given(&layout.error, "error")? {
        Some(column) => Some(column),
        None => error_of(columns, flux, usual == Some(flux)),
    };
    let mask = given(&layout.mask, "mask")?
        .or_else(|| by_utype(columns, &["fluxaxis.accuracy.quality", "fluxaxis.quality"]))
        .or_else(|| by_name(columns, &MASK))
        .or_else(|| by_ucd(columns, |u| u.starts_with("meta.code.qual")));
    Ok(Picks {
        wavelength,
        flux,
        error: error.filter(|e| *e != flux),
        mask,
    })
}

fn usual_flux(columns: &[ColumnInfo]) -> Option<usize> {
    let is_flux = |u: &str| u.starts_with("phot.flux.density") && !u.contains("continuum");
    by_utype(columns, &["fluxaxis.value"])
        .or_else(|| by_name(columns, &FLUX))
        .or_else(|| by_ucd(columns, |u| is_flux(u) && u.contains("meta.main")))
        .or_else(|| by_ucd(columns, is_flux))
        .or_else(|| by_name(columns, &[SURFACE.0]))
}

/// The errors that belong to a flux column: those named after it, else, for the usual flux, the
/// usual errors.
fn error_of(columns: &[ColumnInfo], flux: usize, usual: bool) -> Option<usize> {
    let name = fold(&columns[flux].name);
    if name == SURFACE.0 {
        return by_name(columns, &[SURFACE.1]);
    }
    let words = ["err", "error", "e", "sigma", "unc", "ivar", "var"];
    let after: Vec<String> = words
        .iter()
        .flat_map(|w| [format!("{w}{name}"), format!("{name}{w}")])
        .collect();
    let after: Vec<&str> = after.iter().map(String::as_str).collect();
    let named = by_name(columns, &after);
    if !usual {
        return named;
    }
    let known: Vec<&str> = [&ERROR[..], &VARIANCE, &INVERSE].concat();
    let utypes = [
        "fluxaxis.accuracy.staterror",
        "fluxaxis.accuracy.staterrhigh",
    ];
    let is_error = |u: &str| u.starts_with("stat.error") && u.contains("phot.flux.density");
    by_utype(columns, &utypes)
        .or(named)
        .or_else(|| by_name(columns, &known))
        .or_else(|| by_ucd(columns, |u| is_error(u) && u.contains("meta.main")))
        .or_else(|| by_ucd(columns, is_error))
}

/// What a column of errors holds, by its name; a standard deviation when its TUTYP or TUCD says so.
pub(super) fn error_kind(column: &ColumnInfo) -> Option<ErrorKind> {
    let name = fold(&column.name);
    if name.contains("ivar") || INVERSE.contains(&name.as_str()) {
        return Some(ErrorKind::InverseVariance);
    }
    if name.contains("var") {
        return Some(ErrorKind::Variance);
    }
    let sigma = ["err", "sigma", "unc", "std"]
        .iter()
        .any(|w| name.contains(w))
        || name.starts_with('e')
        || column.utype.contains("staterr")
        || column.ucd.starts_with("stat.error");
    sigma.then_some(ErrorKind::Sigma)
}

fn numeric(column: &ColumnInfo) -> bool {
    column.element_bytes.is_some() && column.repeat > 0
}

fn by_name(columns: &[ColumnInfo], known: &[&str]) -> Option<usize> {
    let place = |k: &&str| {
        columns
            .iter()
            .position(|c| numeric(c) && fold(&c.name) == **k)
    };
    known.iter().find_map(place)
}

/// The only numeric column with one of these types.
fn by_utype(columns: &[ColumnInfo], utypes: &[&str]) -> Option<usize> {
    utypes.iter().find_map(|u| only(columns, |c| c.utype == *u))
}

fn by_ucd(columns: &[ColumnInfo], is: impl Fn(&str) -> bool) -> Option<usize> {
    only(columns, |c| is(&c.ucd))
}

fn only(columns: &[ColumnInfo], is: impl Fn(&ColumnInfo) -> bool) -> Option<usize> {
    let mut found = columns.iter().filter(|c| numeric(c) && is(c));
    let first = found.next()?;
    found.next().is_none().then_some(first.index)
}

fn look_up(columns: &[ColumnInfo], wanted: &Column, what: &str) -> Result<usize> {
    let found = match wanted {
        Column::Number(n) => n.checked_sub(1).filter(|i| *i < columns.len()),
        Column::Name(name) => columns
            .iter()
            .position(|c| c.name.eq_ignore_ascii_case(name.trim()))
            .or_else(|| only(columns, |c| fold(&c.name) == fold(name))),
    };
    let Some(index) = found else {
        let (shown, close) = match wanted {
            Column::Number(n) => (n.to_string(), None),
            Column::Name(n) => (
                format!("{n:?}"),
                did_you_mean(n, columns.iter().map(|c| c.name.as_str())),
            ),
        };
        let error = Error::input(format!("the table has no {what} column {shown}"));
        return Err(error.remedy(match close {
            Some(close) => format!("did you mean {close:?}?"),
            None => format!("its columns are: {}", names(columns)),
        }));
    };
    if numeric(&columns[index]) {
        return Ok(index);
    }
    Err(Error::input(format!(
        "{} does not hold real numbers",
        columns[index].title()
    ))
    .remedy(format!("name another {what} column: {}", names(columns))))
}

fn names(columns: &[ColumnInfo]) -> String {
    let names: Vec<&str> = columns.iter().map(|c| c.name.as_str()).collect();
    names.join(", ")
}

fn missing(columns: &[ColumnInfo], what: &str) -> Error {
    Error::input(format!("the table has no column known to hold the {what}")).remedy(format!(
        "name it with the plan key columns.{what}; its columns are: {}",
        names(columns)
    ))
}
