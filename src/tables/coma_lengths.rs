//! Haser scale lengths and expansion-speed laws.

use super::provenance::{Provenance, Sources};
use super::sheet::Sheet;
use crate::ground::{Result, Species};

/// Haser scale lengths of one daughter species in one published set.
#[derive(Clone, Debug, PartialEq)]
pub struct ScaleLengths {
    /// Name of the set, for example `ahearn1995`.
    pub set: String,
    /// The observed species.
    pub species: Species,
    /// Parent scale length at 1 au, km.
    pub parent_km: f64,
    /// Power of the heliocentric distance for the parent.
    pub parent_rh_power: f64,
    /// Daughter scale length at 1 au, km.
    pub daughter_km: f64,
    /// Power of the heliocentric distance for the daughter.
    pub daughter_rh_power: f64,
    /// Speed that belongs to the set, km s⁻¹.
    pub speed_km_s: f64,
    /// Relative standard deviation of each length.
    pub relative_sigma: f64,
    /// Source.
    pub provenance: Provenance,
}

impl ScaleLengths {
    pub(super) const COLUMNS: &[&str] = &[
        "set",
        "species",
        "parent_km",
        "parent_rh_power",
        "daughter_km",
        "daughter_rh_power",
        "speed_km_s",
        "relative_sigma",
        "source",
        "how",
        "note",
    ];

    /// Parent and daughter scale lengths at a heliocentric distance, km.
    pub fn at_km(&self, r_h_au: f64) -> (f64, f64) {
        (
            self.parent_km * r_h_au.powf(self.parent_rh_power),
            self.daughter_km * r_h_au.powf(self.daughter_rh_power),
        )
    }

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        let key = |s: &Self| format!("{} in {}", s.species, s.set);
        sheet.read("scale lengths of", key, |row| {
            Ok(Self {
                set: row.required("set")?.to_owned(),
                species: Species::new(row.required("species")?),
                parent_km: row.number("parent_km", 1.0..=1.0e9)?,
                parent_rh_power: row.number("parent_rh_power", 0.0..=4.0)?,
                daughter_km: row.number("daughter_km", 1.0..=1.0e9)?,
                daughter_rh_power: row.number("daughter_rh_power", 0.0..=4.0)?,
                speed_km_s: row.number("speed_km_s", 0.01..=10.0)?,
                relative_sigma: row.number("relative_sigma", 0.0..=2.0)?,
                provenance: sources.provenance(row)?,
            })
        })
    }
}

/// An expansion-speed law v = coefficient · r_h^power.
#[derive(Clone, Debug, PartialEq)]
pub struct SpeedLaw {
    /// Name, for example `parents-0.85`.
    pub name: String,
    /// Speed at 1 au, km s⁻¹.
    pub coefficient_km_s: f64,
    /// Power of the heliocentric distance.
    pub rh_power: f64,
    /// What the law holds for.
    pub valid: String,
    /// Source.
    pub provenance: Provenance,
}

impl SpeedLaw {
    pub(super) const COLUMNS: &[&str] = &[
        "name",
        "coefficient_km_s",
        "rh_power",
        "valid",
        "source",
        "how",
        "note",
    ];

    /// Speed at a heliocentric distance, km s⁻¹.
    pub fn at_km_s(&self, r_h_au: f64) -> f64 {
        self.coefficient_km_s * r_h_au.powf(self.rh_power)
    }

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        sheet.read(
            "speed law",
            |s: &Self| s.name.clone(),
            |row| {
                Ok(Self {
                    name: row.required("name")?.to_owned(),
                    coefficient_km_s: row.number("coefficient_km_s", 0.01..=10.0)?,
                    rh_power: row.number("rh_power", -2.0..=2.0)?,
                    valid: row.required("valid")?.to_owned(),
                    provenance: sources.provenance(row)?,
                })
            },
        )
    }
}
