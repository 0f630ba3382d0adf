//! Where a number comes from and how it got here.

use super::sheet::{Row, Sheet};
use crate::ground::{Result, did_you_mean};
use std::collections::BTreeMap;

/// How a number came into the tables.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum How {
    /// The number was read in a text of the source.
    Read,
    /// The number was recalled and not confirmed in the source.
    Memory,
    /// The number was computed by this project from data of the source.
    Derived,
    /// The number is a convention, not a measurement.
    CommonPractice,
}

impl How {
    pub(super) const WORDS: &[(&str, Self)] = &[
        ("read", Self::Read),
        ("memory", Self::Memory),
        ("derived", Self::Derived),
        ("common practice", Self::CommonPractice),
    ];

    /// Whether the number must be marked as recalled wherever it is used.
    pub fn is_memory(self) -> bool {
        self == Self::Memory
    }

    /// The word of the tables.
    pub fn as_str(self) -> &'static str {
        let named = Self::WORDS.iter().find(|(_, how)| *how == self);
        named.expect("invariant: every variant has a word").0
    }
}

/// How far a published number is trusted.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Confidence {
    /// Something about the number is inconsistent; do not use without a second source.
    Check,
    /// Preliminary, approximate or superseded.
    Low,
    /// Usable with care.
    Medium,
    /// Usable.
    High,
}

impl Confidence {
    pub(super) const WORDS: &[(&str, Self)] = &[
        ("high", Self::High),
        ("medium", Self::Medium),
        ("low", Self::Low),
        ("check", Self::Check),
    ];
}

/// A published work or database.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Source {
    /// Key used in the `source` columns, for example `schleicher2010`.
    pub key: String,
    /// Citation.
    pub reference: String,
    /// DOI, arXiv number or data-set identifier, where known.
    pub doi_or_id: Option<String>,
}

/// The source of one row.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Provenance {
    /// Key of the source, to be looked up with `Tables::source`.
    pub source: String,
    /// How the number got here.
    pub how: How,
    /// Remark; empty when there is none.
    pub note: String,
}

/// The sources of one folder.
pub(super) struct Sources(BTreeMap<String, Source>);

impl Sources {
    pub(super) const COLUMNS: &[&str] = &["key", "reference", "doi_or_id"];

    pub(super) fn read(sheet: &Sheet) -> Result<Self> {
        let list = sheet.read(
            "source key",
            |s: &Source| s.key.clone(),
            |row| {
                let id = row.text("doi_or_id");
                Ok(Source {
                    key: row.required("key")?.to_owned(),
                    reference: row.required("reference")?.to_owned(),
                    doi_or_id: (!id.is_empty()).then(|| id.to_owned()),
                })
            },
        )?;
        Ok(Self(list.into_iter().map(|s| (s.key.clone(), s)).collect()))
    }

    /// The key of a column, refused when no source has it.
    pub(super) fn key(&self, row: &Row, column: &str) -> Result<String> {
        let key = row.required(column)?;
        if self.0.contains_key(key) {
            return Ok(key.to_owned());
        }
        let hint = did_you_mean(key, self.0.keys().map(String::as_str))
            .map(|near| format!(" (did you mean {near:?}?)"))
            .unwrap_or_default();
        Err(row.fail(
            format!("column {column:?}: no source has the key {key:?}{hint}"),
            "add the source to sources.csv in the same folder",
        ))
    }

    /// Columns `source`, `how` and `note`.
    pub(super) fn provenance(&self, row: &Row) -> Result<Provenance> {
        Ok(Provenance {
            source: self.key(row, "source")?,
            how: row.word("how", How::WORDS)?,
            note: row.text("note").to_owned(),
        })
    }

    pub(super) fn into_map(self) -> BTreeMap<String, Source> {
        self.0
    }
}
