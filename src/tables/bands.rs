//! Emission bands and lines.

use super::provenance::{Provenance, Sources};
use super::sheet::{Row, Sheet};
use crate::ground::{Medium, Result, Species, WavelengthUnit};

/// An emission band or line with its default fit window.
#[derive(Clone, Debug, PartialEq)]
pub struct Band {
    /// Identifier, for example `CO2-4.26um`.
    pub id: String,
    /// Emitting species.
    pub species: Species,
    /// Transition in the usual notation.
    pub transition: String,
    /// Centre of the photon distribution, vacuum Å.
    pub centre_aa: f64,
    /// Intrinsic full width at half maximum, Å; 0 for a line.
    pub fwhm_aa: f64,
    /// Default fit window with continuum on both sides, vacuum Å.
    pub window_aa: (f64, f64),
    /// Whether one Gaussian is only a rough stand-in for its shape.
    pub structured: bool,
    /// Source of centre and width.
    pub provenance: Provenance,
}

impl Band {
    pub(super) const COLUMNS: &[&str] = &[
        "id",
        "species",
        "transition",
        "centre",
        "unit",
        "medium",
        "fwhm",
        "window_low",
        "window_high",
        "structured",
        "source",
        "how",
        "note",
    ];

    /// Whether the centre lies beyond 1 µm.
    pub fn infrared(&self) -> bool {
        self.centre_aa > 1.0e4
    }

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        sheet.read(
            "band",
            |b: &Self| b.id.clone(),
            |row| Self::read(row, sources),
        )
    }

    fn read(row: &Row, sources: &Sources) -> Result<Self> {
        let (unit, largest) = row.word(
            "unit",
            &[
                ("um", (WavelengthUnit::Length { aa: 1.0e4 }, 30.0)),
                ("Angstrom", (WavelengthUnit::Length { aa: 1.0 }, 3.0e5)),
            ],
        )?;
        let medium = row.word(
            "medium",
            &[("vacuum", Medium::Vacuum), ("air", Medium::Air)],
        )?;
        let at = |column: &str| {
            row.number(column, largest / 300.0..=largest)
                .map(|value| (value, unit.vacuum_aa(value, medium)))
        };
        let (centre, centre_aa) = at("centre")?;
        let (low, low_aa) = at("window_low")?;
        let (high, high_aa) = at("window_high")?;
        if !(low < centre && centre < high) {
            return Err(row.fail(
                format!("the centre {centre} does not lie inside the window {low} to {high}"),
                "widen the window",
            ));
        }
        let fwhm = row.number("fwhm", 0.0..=high - low)?;
        Ok(Self {
            id: row.required("id")?.to_owned(),
            species: Species::new(row.required("species")?),
            transition: row.text("transition").to_owned(),
            centre_aa,
            fwhm_aa: unit.vacuum_aa(fwhm, Medium::Vacuum),
            window_aa: (low_aa, high_aa),
            structured: row.flag("structured")?,
            provenance: sources.provenance(row)?,
        })
    }
}
