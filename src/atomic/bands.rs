//! Infrared fundamentals: strengths and branchings.

use super::bundle::table;
use crate::ground::{Result, Species};
use serde::Deserialize;
use std::path::Path;

/// A fundamental band pumped out of the ground vibrational state.
#[derive(Clone, Debug, Deserialize)]
pub struct InfraredBand {
    /// The molecule.
    pub species: Species,
    /// Name of the band, for example `nu3`.
    pub band: String,
    /// Band origin, cm⁻¹.
    pub nu_cm1: f64,
    /// Integrated strength, cm per molecule.
    pub strength_cm: f64,
    /// Fraction of excitations that come back in the same band.
    pub branching: f64,
    /// Relative standard deviation of strength times branching.
    pub strength_sigma: f64,
    /// Relative standard deviation of the sunlight at the lines.
    pub solar_sigma: f64,
    /// Source.
    pub source: String,
    /// `read` or `memory`.
    pub how: String,
}

/// All rows of `molecules/infrared_bands.csv`.
///
/// # Errors
/// An unreadable table or a value that is not positive, with file and line.
pub fn infrared_bands(dir: Option<&Path>) -> Result<Vec<InfraredBand>> {
    let table = table(dir, "molecules/infrared_bands.csv")?;
    let mut bands = Vec::new();
    for (line, row) in table.rows::<InfraredBand>()? {
        for (name, value, most) in [
            ("nu_cm1", row.nu_cm1, 1e5),
            ("strength_cm", row.strength_cm, 1e-10),
            ("branching", row.branching, 1.0),
        ] {
            if !(value > 0.0 && value <= most) {
                return Err(table.refuse(
                    line,
                    format!("{name} {value} is not above 0 and at most {most:e}"),
                ));
            }
        }
        bands.push(row);
    }
    Ok(bands)
}
