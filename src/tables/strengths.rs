//! Infrared band strengths, line strengths, band origins and rotational constants.

use super::provenance::{Confidence, Provenance, Sources};
use super::sheet::Sheet;
use crate::ground::{Result, Species};

/// One spectroscopic quantity of a molecule.
#[derive(Clone, Debug, PartialEq)]
pub struct Strength {
    /// Molecule.
    pub species: Species,
    /// Band, branch or level, for example `nu3` or `nu7 rQ0`.
    pub band: String,
    /// Quantity, for example `strength`, `band origin`, `B lower`.
    pub quantity: String,
    /// Value in `unit`.
    pub value: f64,
    /// Unit: `cm molecule-1`, `cm-1` or `s-1`.
    pub unit: String,
    /// Temperature for which a strength holds, K.
    pub temperature_k: Option<f64>,
    /// Number of lines summed.
    pub lines: Option<f64>,
    /// Range or mean position of the lines, cm⁻¹, as text.
    pub range: String,
    /// Isotopic abundance contained in a strength; divide by it for one molecule.
    pub isotopologue_fraction: Option<f64>,
    /// How far the number is trusted.
    pub confidence: Confidence,
    /// Source.
    pub provenance: Provenance,
}

impl Strength {
    pub(super) const COLUMNS: &[&str] = &[
        "species",
        "band",
        "quantity",
        "value",
        "unit",
        "T_K",
        "n_lines",
        "range_cm-1",
        "isotopologue_fraction_included",
        "source",
        "how",
        "confidence",
        "note",
    ];

    /// The value divided by the isotopic abundance it contains.
    pub fn per_molecule(&self) -> f64 {
        self.value / self.isotopologue_fraction.unwrap_or(1.0)
    }

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        let key = |s: &Self| {
            format!(
                "{} {} {} of {} ({:?} lines)",
                s.species, s.band, s.quantity, s.provenance.source, s.lines
            )
        };
        sheet.read("strength", key, |row| {
            let unit = row.word(
                "unit",
                &[
                    ("cm molecule-1", "cm molecule-1"),
                    ("cm-1", "cm-1"),
                    ("s-1", "s-1"),
                ],
            )?;
            Ok(Self {
                species: Species::new(row.required("species")?),
                band: row.required("band")?.to_owned(),
                quantity: row.required("quantity")?.to_owned(),
                value: row.number("value", f64::MIN_POSITIVE..=1.0e5)?,
                unit: unit.to_owned(),
                temperature_k: row.optional("T_K", 0.0..=5000.0)?,
                lines: row.optional("n_lines", 1.0..=1.0e7)?,
                range: row.text("range_cm-1").to_owned(),
                isotopologue_fraction: row
                    .optional("isotopologue_fraction_included", 1.0e-6..=1.0)?,
                confidence: row.word("confidence", Confidence::WORDS)?,
                provenance: sources.provenance(row)?,
            })
        })
    }
}
