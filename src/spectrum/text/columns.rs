//! Which column is which: by the layout, by plain header names, or by place.

use super::preamble::Preamble;
use super::{Column, TextLayout};
use crate::ground::{Error, Result, did_you_mean};

const WAVELENGTH: [&str; 4] = ["wavelength", "wave", "lambda", "wl"];
const FLUX: [&str; 2] = ["flux", "fluxdensity"];
const ERROR: [&str; 6] = [
    "error",
    "sigma",
    "err",
    "errflux",
    "uncertainty",
    "fluxerror",
];
const MASK: [&str; 4] = ["mask", "flag", "quality", "pixelmask"];

/// Zero-based places of the columns in use.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Picks {
    pub(super) wavelength: usize,
    pub(super) flux: usize,
    pub(super) error: Option<usize>,
    pub(super) mask: Option<usize>,
    /// Number of cells every row must have.
    pub(super) count: usize,
}

/// Finds the columns of a table whose first row has `cells` cells.
pub(super) fn pick(layout: &TextLayout, preamble: &Preamble, cells: usize) -> Result<Picks> {
    let names = Names::find(layout, preamble, cells)?;
    let count = names.list.as_ref().map_or(cells, |l| l.len());
    let by_name = layout.wavelength.is_none() || layout.flux.is_none();
    let given = |c: &Option<Column>, what| {
        c.as_ref()
            .map(|c| names.look_up(c, what, count))
            .transpose()
    };
    let mut wavelength = given(&layout.wavelength, "wavelength")?;
    let mut flux = given(&layout.flux, "flux")?;
    let mut error = given(&layout.error, "error")?;
    let mut mask = given(&layout.mask, "mask")?;
    if by_name {
        wavelength = wavelength.or_else(|| names.known(&WAVELENGTH));
        flux = flux.or_else(|| names.known(&FLUX));
        if names.usable() {
            error = error.or_else(|| names.known(&ERROR));
            mask = mask.or_else(|| names.known(&MASK));
        } else if layout.wavelength.is_none() && layout.flux.is_none() {
            let third_free = [mask, error].iter().all(|c| *c != Some(2));
            error = error.or((count > 2 && third_free).then_some(2));
        }
    }
    let picks = Picks {
        wavelength: names.or_place(wavelength, 0, "wavelength", count)?,
        flux: names.or_place(flux, 1, "flux", count)?,
        error,
        mask,
        count,
    };
    picks.check_distinct()?;
    Ok(picks)
}

impl Picks {
    fn check_distinct(&self) -> Result<()> {
        let all = [
            ("wavelength", Some(self.wavelength)),
            ("flux", Some(self.flux)),
            ("error", self.error),
            ("mask", self.mask),
        ];
        for (i, (a, place)) in all.iter().enumerate() {
            for (b, other) in &all[i + 1..] {
                if place.is_some() && place == other {
                    return Err(Error::input(format!(
                        "{a} and {b} are both column {}",
                        place.unwrap_or(0) + 1
                    ))
                    .remedy("name the columns wavelength, flux, error and mask explicitly"));
                }
            }
        }
        Ok(())
    }
}

/// The header names of a table; `firm` when they cannot be anything else than a header.
struct Names<'a> {
    list: Option<&'a Vec<String>>,
    firm: bool,
}

impl<'a> Names<'a> {
    fn find(layout: &TextLayout, preamble: &'a Preamble, cells: usize) -> Result<Self> {
        if let Some(header) = &preamble.header {
            let trailing = header.len() > 1 && header.last().is_some_and(String::is_empty);
            if header.len() != cells && !(trailing || header.len() + 1 == cells) {
                return Err(Error::input(format!(
                    "the header has {} names but the first row has {cells} cells",
                    header.len()
                ))
                .at_line(preamble.first)
                .remedy("give each column one name and each row as many cells; quote names with blanks; write numbers with a point, not a comma"));
            }
            return Ok(Self {
                list: Some(header),
                firm: true,
            });
        }
        let fitting: Vec<&Vec<String>> = preamble
            .comments
            .iter()
            .filter(|c| c.len() == cells)
            .collect();
        let asked: Vec<&str> = [
            &layout.wavelength,
            &layout.flux,
            &layout.error,
            &layout.mask,
        ]
        .into_iter()
        .filter_map(|c| match c {
            Some(Column::Name(name)) => Some(name.as_str()),
            _ => None,
        })
        .collect();
        let holds = |list: &[String], name: &str| list.iter().any(|l| fold(l) == fold(name));
        let best = if asked.is_empty() {
            let known = |l: &[String], k: &[&str]| k.iter().any(|k| holds(l, k));
            fitting
                .iter()
                .find(|l| known(l, &WAVELENGTH) && known(l, &FLUX))
        } else {
            fitting
                .iter()
                .find(|l| asked.iter().all(|a| holds(l, a)))
                .or(fitting.first())
        };
        Ok(Self {
            list: best.copied(),
            firm: false,
        })
    }

    fn usable(&self) -> bool {
        self.list.is_some()
    }

    /// Place of the first well-known name.
    fn known(&self, candidates: &[&str]) -> Option<usize> {
        let list = self.list?;
        candidates
            .iter()
            .find_map(|c| list.iter().position(|l| fold(l) == *c))
    }

    fn or_place(
        &self,
        found: Option<usize>,
        place: usize,
        what: &str,
        count: usize,
    ) -> Result<usize> {
        match found {
            Some(found) => Ok(found),
            None if self.firm => Err(Error::input(format!("no column is plainly the {what}"))
                .remedy(format!("say which it is; {}", self.listing(count)))),
            None if place < count => Ok(place),
            None => Err(Error::input(format!(
                "no {what}: the rows have {count} cell{}",
                if count == 1 { "" } else { "s" }
            ))
            .remedy("give at least wavelength and flux, separated by commas, semicolons, tabs or blanks")),
        }
    }

    fn look_up(&self, column: &Column, what: &str, count: usize) -> Result<usize> {
        match column {
            Column::Number(n) if (1..=count).contains(n) => Ok(n - 1),
            Column::Number(n) => Err(Error::input(format!(
                "{what} column {n} is not there; columns are counted from 1"
            ))
            .remedy(self.listing(count))),
            Column::Name(name) => self.by_name(name, what, count),
        }
    }

    fn by_name(&self, name: &str, what: &str, count: usize) -> Result<usize> {
        let Some(list) = self.list else {
            return Err(Error::input(format!(
                "{what} column {name:?} is not there: the file has no header names"
            ))
            .remedy(format!("give the column by its number, 1 to {count}")));
        };
        let all = |test: &dyn Fn(&str) -> bool| -> Vec<usize> {
            (0..list.len()).filter(|i| test(&list[*i])).collect()
        };
        let mut hits = all(&|l| l == name);
        if hits.is_empty() {
            hits = all(&|l| fold(l) == fold(name));
        }
        match hits[..] {
            [one] => Ok(one),
            [] => {
                let hint = did_you_mean(name, list.iter().map(String::as_str))
                    .map_or(String::new(), |h| format!("did you mean {h:?}? "));
                Err(Error::input(format!("{what} column {name:?} is not there"))
                    .remedy(format!("{hint}{}", self.listing(count))))
            }
            _ => Err(Error::input(format!(
                "{what} column {name:?} is there {} times",
                hits.len()
            ))
            .remedy(format!("give it by its number; {}", self.listing(count)))),
        }
    }

    fn listing(&self, count: usize) -> String {
        match self.list {
            Some(list) => {
                let shown: Vec<&str> = list.iter().take(40).map(String::as_str).collect();
                format!("the columns are {}", shown.join(", "))
            }
            None => format!("the file has {count} columns without names"),
        }
    }
}

/// Lower case without units in brackets and without punctuation.
fn fold(name: &str) -> String {
    let body = name.split(['[', '(']).next().unwrap_or(name);
    body.chars()
        .filter(|c| c.is_alphanumeric())
        .flat_map(char::to_lowercase)
        .collect()
}
