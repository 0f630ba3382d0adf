//! Measured abundance ratios of comets.

use super::provenance::{Confidence, Provenance, Sources};
use super::sheet::{Row, Sheet};
use crate::ground::{Result, Species};

/// What the ratio compares.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Basis {
    /// Production rates.
    Production,
    /// Column densities or numbers of particles.
    Column,
}

impl Basis {
    pub(super) const WORDS: &[(&str, Self)] =
        &[("production", Self::Production), ("column", Self::Column)];
}

/// Whether a number is a value or a limit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// A measured value.
    Value,
    /// An upper limit.
    Upper,
    /// A lower limit.
    Lower,
}

/// Dynamical class of a comet.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum DynamicalClass {
    /// Jupiter-family comet.
    JupiterFamily,
    /// Halley-type comet.
    HalleyType,
    /// Oort-cloud (long-period) comet.
    OortCloud,
    /// Centaur.
    Centaur,
    /// Main-belt comet.
    MainBelt,
    /// Anything else; the note tells.
    Other,
}

impl DynamicalClass {
    const WORDS: &[(&str, Self)] = &[
        ("JFC", Self::JupiterFamily),
        ("HTC", Self::HalleyType),
        ("OCC", Self::OortCloud),
        ("Centaur", Self::Centaur),
        ("MBC", Self::MainBelt),
        ("other", Self::Other),
    ];

    /// The words of all classes, in a fixed order.
    pub fn words() -> impl Iterator<Item = &'static str> {
        Self::WORDS.iter().map(|(word, _)| *word)
    }

    /// The word of the tables, for example `JFC`.
    pub fn as_str(self) -> &'static str {
        let named = Self::WORDS.iter().find(|(_, class)| *class == self);
        named.expect("invariant: every variant has a word").0
    }
}

/// One published ratio of one comet.
#[derive(Clone, Debug, PartialEq)]
pub struct ComparisonRow {
    /// Designation and name.
    pub comet: String,
    /// Numerator.
    pub of: Species,
    /// Denominator.
    pub to: Species,
    /// Production rates or columns.
    pub basis: Basis,
    /// Whether `value` and errors are decimal logarithms.
    pub log10: bool,
    /// The ratio, or its logarithm.
    pub value: f64,
    /// Error downwards, where published; same scale as `value`.
    pub err_minus: Option<f64>,
    /// Error upwards, where published.
    pub err_plus: Option<f64>,
    /// Value or limit.
    pub kind: Kind,
    /// Heliocentric distance, au.
    pub r_h_au: Option<f64>,
    /// Date as published, possibly a month or a range; empty when not known.
    pub date: String,
    /// Dynamical class.
    pub class: DynamicalClass,
    /// Instrument or technique.
    pub method: String,
    /// Key of the compilation in which the row was read, if not in the original.
    pub compiled_in: Option<String>,
    /// How far the number is trusted.
    pub confidence: Confidence,
    /// Source.
    pub provenance: Provenance,
}

impl ComparisonRow {
    pub(super) const COLUMNS: &[&str] = &[
        "comet",
        "of",
        "to",
        "basis",
        "scale",
        "value",
        "err_minus",
        "err_plus",
        "kind",
        "r_h_au",
        "date",
        "class",
        "method",
        "source",
        "compiled_in",
        "how",
        "confidence",
        "note",
    ];

    /// Decimal logarithm of the ratio.
    pub fn log10_value(&self) -> f64 {
        if self.log10 {
            self.value
        } else {
            self.value.log10()
        }
    }

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        let key = |r: &Self| {
            format!(
                "{}/{} of {}, {}, {} by {} ({} {:?})",
                r.of, r.to, r.comet, r.date, r.method, r.provenance.source, r.value, r.kind
            )
        };
        sheet.read("measurement", key, |row| Self::read(row, sources))
    }

    fn read(row: &Row, sources: &Sources) -> Result<Self> {
        let log10 = row.word("scale", &[("ratio", false), ("log10", true)])?;
        let range = if log10 { -40.0..=40.0 } else { 1.0e-12..=1.0e6 };
        let err_minus = row.optional("err_minus", 0.0..=1.0e6)?;
        let err_plus = row.optional("err_plus", 0.0..=1.0e6)?;
        if err_minus.is_some() != err_plus.is_some() {
            return Err(row.fail(
                "only one of err_minus and err_plus is given".into(),
                "give both or none",
            ));
        }
        let kind = row.word(
            "kind",
            &[
                ("value", Kind::Value),
                ("upper", Kind::Upper),
                ("lower", Kind::Lower),
            ],
        )?;
        if kind != Kind::Value && err_minus.is_some() {
            return Err(row.fail("a limit has no errors".into(), "leave the errors empty"));
        }
        Ok(Self {
            comet: row.required("comet")?.to_owned(),
            of: Species::new(row.required("of")?),
            to: Species::new(row.required("to")?),
            basis: row.word("basis", Basis::WORDS)?,
            log10,
            value: row.number("value", range)?,
            err_minus,
            err_plus,
            kind,
            r_h_au: row.optional("r_h_au", 0.001..=100.0)?,
            date: row.text("date").to_owned(),
            class: row.word("class", DynamicalClass::WORDS)?,
            method: row.required("method")?.to_owned(),
            compiled_in: match row.text("compiled_in") {
                "" => None,
                _ => Some(sources.key(row, "compiled_in")?),
            },
            confidence: row.word("confidence", Confidence::WORDS)?,
            provenance: sources.provenance(row)?,
        })
    }
}
