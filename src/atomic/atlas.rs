//! Reads the table of lines identified in a real comet.

use super::bundle::table;
use crate::ground::{Result, Species, vacuum_from_air_aa};
use serde::Deserialize;
use std::path::Path;

#[derive(Deserialize)]
struct Row {
    wavelength_air_aa: f64,
    wavenumber_cm1: f64,
    species: String,
    system: String,
    band: String,
    transition: String,
    doubtful: u8,
}

/// A line seen in a comet.
#[derive(Clone, Debug)]
pub struct AtlasLine {
    /// Vacuum wavelength in the comet's rest frame, Å, from the air wavelength.
    pub wavelength_vacuum_aa: f64,
    /// Who emits it; `None` for a line that the atlas does not identify.
    pub species: Option<Species>,
    /// Electronic system, band and transition, for people.
    pub transition: String,
    /// True where wavelength and wavenumber of the atlas disagree.
    pub doubtful: bool,
}

/// Wavelengths that a table of optical lines may hold, Å.
const RANGE_AA: (f64, f64) = (500.0, 1.0e6);
/// Largest disagreement of wavelength and wavenumber of a row that is not marked, Å.
const AGREE_AA: f64 = 0.03;

/// All rows of `atlas/comet_lines.csv`, in order: 16 274 lines of comet 122P/de Vico (Cochran & Cochran
/// 2002, NASA PDS EAR-C-CS2-5-RDR-DEVICO-ATLAS-V1.0). Positions are good to a few 0.01 Å.
///
/// # Errors
/// An unreadable table, a wavelength out of range, or a row that contradicts itself without being
/// marked as doubtful, with file and line.
pub fn line_atlas(dir: Option<&Path>) -> Result<Vec<AtlasLine>> {
    let table = table(dir, "atlas/comet_lines.csv")?;
    let mut lines = Vec::new();
    for (at, row) in table.rows::<Row>()? {
        let air_aa = row.wavelength_air_aa;
        if !(RANGE_AA.0..=RANGE_AA.1).contains(&air_aa) {
            return Err(table
                .refuse(at, format!("wavelength {air_aa} Å is not from 500 to 1e6"))
                .remedy("give the wavelength in air, Å"));
        }
        let wavelength_vacuum_aa = vacuum_from_air_aa(air_aa);
        let off_aa = (1.0e8 / row.wavenumber_cm1 - wavelength_vacuum_aa).abs();
        let doubtful = row.doubtful != 0;
        if !doubtful && (off_aa.is_nan() || off_aa > AGREE_AA) {
            return Err(table
                .refuse(
                    at,
                    format!(
                        "{air_aa} Å in air and {} cm-1 differ by {off_aa:.3} Å",
                        row.wavenumber_cm1
                    ),
                )
                .remedy("correct one of them, or mark the row with doubtful = 1"));
        }
        let species = row.species.trim();
        lines.push(AtlasLine {
            wavelength_vacuum_aa,
            species: (!species.is_empty()).then(|| Species::new(species)),
            transition: [row.system, row.band, row.transition]
                .join(" ")
                .trim()
                .to_owned(),
            doubtful,
        });
    }
    Ok(lines)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_bundled_atlas_is_whole() {
        let lines = line_atlas(None).unwrap();
        assert_eq!(lines.len(), 16_274);
        assert_eq!(lines.iter().filter(|l| l.doubtful).count(), 20);
        assert_eq!(lines.iter().filter(|l| l.species.is_none()).count(), 4055);
    }

    #[test]
    fn contradictions_and_nonsense_are_refused() {
        let dir = tempfile::tempdir().unwrap();
        std::fs::create_dir(dir.path().join("atlas")).unwrap();
        let refusal = |row: &str| {
            let head = "wavelength_air_aa,wavenumber_cm1,species,system,band,transition,doubtful";
            let path = dir.path().join("atlas/comet_lines.csv");
            std::fs::write(path, format!("{head}\n{row}\n")).unwrap();
            line_atlas(Some(dir.path()))
                .err()
                .map_or_else(String::new, |e| e.to_string())
        };
        assert_eq!(refusal("5000.000,19994.43,C2,Swan,0-0,R(1),0"), "");
        assert!(refusal("5000.000,19990.43,C2,Swan,0-0,R(1),0").contains("differ by"));
        assert_eq!(refusal("5000.000,19990.43,C2,Swan,0-0,R(1),1"), "");
        assert!(refusal("5000.000,0,C2,Swan,0-0,R(1),0").contains("differ by"));
        assert!(refusal("-3,1,C2,Swan,0-0,R(1),1").contains(":2"));
    }
}
