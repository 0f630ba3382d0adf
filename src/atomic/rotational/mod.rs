//! Rotational structure of molecular bands: relative line lists at a rotational temperature.
//!
//! Uses the rest of floor 1 only. Never computes a g-factor: shares are relative within one band.

mod linear;
mod pumped;
mod violet;
mod water;

use crate::ground::{Caveat, Result};
use pumped::Pumped;
use std::path::Path;

/// One line of a band.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ShapeLine {
    /// Vacuum wavelength, Å.
    pub vacuum_aa: f64,
    /// Fraction of the energy of the whole band.
    pub share: f64,
}

/// A band's lines, ready to be weighted at any rotational temperature.
///
/// Model: the ground vibrational state is thermal at T_rot; sunlight, taken as flat per unit
/// frequency over the band, lifts molecules along single lines (rate ∝ n_l B_lu); each upper level
/// then decays by its own branching, A ∝ ν³ × Hönl–London factor. With photons per level
/// P_u = Σ_l n_l B_lu, the energy in a line u → l is ∝ P_u ν A_ul / Σ_k A_uk. One absorption and
/// one decay: collisions in the upper state and cascades that change the ground state are left out.
///
/// * Parallel bands of linear molecules (CO, CO₂, HCN, OCS): P and R branches, Hönl–London factors
///   max(J′, J″). No Herman–Wallis factors: they change line strengths by up to 3 % at |m| = 50,
///   below 0.3 % at |m| = 10. ν₁–ν₃ interaction, l-type hot bands and rarer isotopologues: none.
/// * H₂O 2.7 µm: the list gives gf and lower energies (to 4 cm⁻¹) but no quantum numbers. Lines whose
///   upper energies agree within 16 cm⁻¹, and whose gA are alike, are taken to share one upper level:
///   P and R sides are filled as they should be, but single lines are approximate. Emission back into the lower states of
///   hot bands, and ortho and para, are not told apart. See [`Self::caveats`].
/// * CN violet: (0–0) band, lines of Brooke et al. 2014, X ²Σ⁺ v = 0 thermal; (1–1) left out.
#[derive(Clone, Debug)]
pub struct RotationalBand {
    pumped: Pumped,
    caveats: Vec<Caveat>,
}

impl RotationalBand {
    /// Temperatures for which lines are computed, K.
    pub const TEMPERATURES_K: (f64, f64) = (1.0, 2000.0);

    /// The structure of the band with an identifier of `line-lists/bands.csv`, for example
    /// `CO2-4.26um`; `None` if there are no data on its structure.
    ///
    /// # Errors
    /// An unreadable or inconsistent table, with file and line.
    pub fn load(id: &str, dir: Option<&Path>) -> Result<Option<Self>> {
        let (pumped, caveats) = match id {
            "H2O-2.7um" => (water::lines(dir)?, water::caveats()),
            "CN-3883" => (violet::lines(dir)?, Vec::new()),
            _ => match linear::constants(id, dir)? {
                Some(constants) => (constants.lines(), constants.caveats()),
                None => return Ok(None),
            },
        };
        Ok(Some(Self { pumped, caveats }))
    }

    /// Lines of the fluorescence at a rotational temperature (K), in order of wavelength, shares
    /// summing to 1; lines below 1e-5 of the sum are left out.
    ///
    /// # Errors
    /// A temperature outside [`Self::TEMPERATURES_K`].
    pub fn lines(&self, temperature_k: f64) -> Result<Vec<ShapeLine>> {
        self.pumped.emission(temperature_k)
    }

    /// Lines in absorption by a thermal gas at `temperature_k` (K): shares of the integrated band
    /// strength, S ∝ ν B_lu n_l (1 − e^(−hν/kT)), in order of wavelength. No line is left out.
    ///
    /// # Errors
    /// A temperature outside [`Self::TEMPERATURES_K`].
    pub fn absorption(&self, temperature_k: f64) -> Result<Vec<ShapeLine>> {
        self.pumped.absorption(temperature_k)
    }

    /// What to tell the user about these lines: constants from memory, approximations.
    pub fn caveats(&self) -> &[Caveat] {
        &self.caveats
    }
}

/// Lines of a band at a rotational temperature (K): [`RotationalBand::load`] and
/// [`RotationalBand::lines`] in one; a fit should keep the [`RotationalBand`].
///
/// # Errors
/// An unreadable table, or a temperature outside [`RotationalBand::TEMPERATURES_K`].
pub fn rotational_lines(
    species_band: &str,
    temperature_k: f64,
    dir: Option<&Path>,
) -> Result<Option<Vec<ShapeLine>>> {
    let band = RotationalBand::load(species_band, dir)?;
    band.map(|b| b.lines(temperature_k)).transpose()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bands_without_data_and_absurd_temperatures() {
        assert!(rotational_lines("C3-4050", 50.0, None).unwrap().is_none());
        for bad in [0.0, -5.0, f64::NAN, f64::INFINITY, 2001.0] {
            let error = rotational_lines("CO-4.67um", bad, None).unwrap_err();
            assert!(error.to_string().contains("2000 K"), "{error}");
        }
    }

    #[test]
    fn what_rests_on_memory_says_so() {
        for (id, doubtful) in [
            ("CO2-4.26um", false),
            ("CO-4.67um", false),
            ("HCN-3.02um", true),
            ("OCS-4.85um", true),
            ("H2O-2.7um", true),
        ] {
            let band = RotationalBand::load(id, None).unwrap().unwrap();
            assert_eq!(!band.caveats().is_empty(), doubtful, "{id}");
        }
    }
}
