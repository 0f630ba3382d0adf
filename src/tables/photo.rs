//! Photo-destruction rates and their branches.

use super::provenance::{Provenance, Sources};
use super::sheet::Sheet;
use crate::ground::{Result, Species};

/// Total photo-destruction rate of a species at 1 au; it scales as r_h⁻².
#[derive(Clone, Debug, PartialEq)]
pub struct PhotoRate {
    /// Species.
    pub species: Species,
    /// Which of several published rates; empty when there is one.
    pub variant: String,
    /// Rate for the quiet Sun, s⁻¹.
    pub quiet_per_s: f64,
    /// Rate for the active Sun, s⁻¹.
    pub active_per_s: f64,
    /// Relative standard deviation.
    pub relative_sigma: f64,
    /// Whether this variant is used when none is named.
    pub default: bool,
    /// Source.
    pub provenance: Provenance,
}

impl PhotoRate {
    pub(super) const COLUMNS: &[&str] = &[
        "species",
        "variant",
        "quiet_per_s",
        "active_per_s",
        "relative_sigma",
        "default",
        "source",
        "how",
        "note",
    ];

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        let key = |p: &Self| format!("{} {}", p.species, p.variant);
        let list = sheet.read("photo rate of", key, |row| {
            Ok(Self {
                species: Species::new(row.required("species")?),
                variant: row.text("variant").to_owned(),
                quiet_per_s: row.number("quiet_per_s", 1.0e-12..=1.0)?,
                active_per_s: row.number("active_per_s", 1.0e-12..=1.0)?,
                relative_sigma: row.number("relative_sigma", 0.0..=2.0)?,
                default: row.flag("default")?,
                provenance: sources.provenance(row)?,
            })
        })?;
        for p in &list {
            let same = list.iter().filter(|o| o.species == p.species);
            if same.filter(|o| o.default).count() != 1 {
                return Err(sheet
                    .fail(format!("{} has no single default photo rate", p.species))
                    .remedy("mark exactly one variant of each species default = true"));
            }
        }
        Ok(list)
    }
}

/// What a photo-destruction branch does.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum BranchKind {
    /// Neutral fragments.
    Dissociation,
    /// At least one ion.
    Ionisation,
}

/// One branch of a photo-destruction rate at 1 au; it scales as r_h⁻².
#[derive(Clone, Debug, PartialEq)]
pub struct PhotoBranch {
    /// Species destroyed.
    pub species: Species,
    /// Variant of the rate it belongs to; empty when there is one.
    pub variant: String,
    /// Products, joined by ` + `.
    pub products: String,
    /// Rate for the quiet Sun, s⁻¹.
    pub quiet_per_s: f64,
    /// Rate for the active Sun, s⁻¹.
    pub active_per_s: f64,
    /// Dissociation or ionisation.
    pub kind: BranchKind,
    /// Source.
    pub provenance: Provenance,
}

impl PhotoBranch {
    pub(super) const COLUMNS: &[&str] = &[
        "species",
        "variant",
        "products",
        "quiet_per_s",
        "active_per_s",
        "kind",
        "source",
        "how",
        "note",
    ];

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        let key = |b: &Self| format!("{} {} -> {}", b.species, b.variant, b.products);
        sheet.read("photo branch", key, |row| {
            Ok(Self {
                species: Species::new(row.required("species")?),
                variant: row.text("variant").to_owned(),
                products: row.required("products")?.to_owned(),
                quiet_per_s: row.number("quiet_per_s", 1.0e-14..=1.0)?,
                active_per_s: row.number("active_per_s", 1.0e-14..=1.0)?,
                kind: row.word(
                    "kind",
                    &[
                        ("dissociation", BranchKind::Dissociation),
                        ("ionisation", BranchKind::Ionisation),
                    ],
                )?,
                provenance: sources.provenance(row)?,
            })
        })
    }
}
