//! The data model: levels joined by radiative transitions.

use crate::ground::{Caveat, Error, Result, Species};
use std::sync::Arc;

/// One energy level.
#[derive(Clone, Debug)]
pub struct Level {
    /// Energy above the ground level, cm⁻¹.
    pub energy_cm1: f64,
    /// Statistical weight, 2J + 1.
    pub weight: f64,
    /// Configuration and term, or quantum numbers, for people.
    pub label: String,
}

/// What a transition is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LineKind {
    /// Electric dipole line of an atom.
    Allowed,
    /// Magnetic dipole, electric quadrupole or higher.
    Forbidden,
    /// Line of an electronic band of a molecule, with its vibrational numbers.
    Band {
        /// Vibrational number of the upper state.
        upper_v: u8,
        /// Vibrational number of the lower state.
        lower_v: u8,
    },
    /// Line of a molecule that is there for the populations only: position and strength in outline.
    Pump,
    /// Rotation or vibration within the ground electronic state of a molecule.
    Rovibrational,
}

/// One transition.
#[derive(Clone, Debug)]
pub struct Line {
    /// Vacuum wavelength, Å; for atoms the Ritz value of the level energies.
    pub wavelength_vacuum_aa: f64,
    /// Index of the lower level.
    pub lower: usize,
    /// Index of the upper level.
    pub upper: usize,
    /// Einstein coefficient of spontaneous emission, s⁻¹.
    pub einstein_a_per_s: f64,
    /// Standard deviation of ln A.
    pub sigma_ln_a: f64,
    /// What it is.
    pub kind: LineKind,
    /// Where A comes from.
    pub source: Arc<str>,
}

/// Levels and lines of one species, checked by the reader that made it: every line joins two
/// existing levels, the upper one above the lower one, with a positive finite A.
#[derive(Clone, Debug)]
pub struct LevelSystem {
    pub(super) species: Species,
    pub(super) levels: Vec<Level>,
    pub(super) lines: Vec<Line>,
    pub(super) caveats: Vec<Caveat>,
    pub(super) model_sigma: f64,
}

impl LevelSystem {
    /// Puts a system together from levels (lowest first) and lines.
    ///
    /// # Errors
    /// No levels, levels out of order, or a line without two levels, a wavelength or an A.
    pub fn new(species: Species, levels: Vec<Level>, lines: Vec<Line>) -> Result<Self> {
        let ordered = levels
            .windows(2)
            .all(|pair| pair[0].energy_cm1 <= pair[1].energy_cm1);
        if levels.is_empty()
            || !ordered
            || levels.iter().any(|l| l.weight.is_nan() || l.weight <= 0.0)
        {
            return Err(Error::table(format!(
                "{species}: levels must be there, in order of energy, with positive weights"
            )));
        }
        let sound = |l: &Line| {
            l.lower < l.upper
                && l.upper < levels.len()
                && [l.wavelength_vacuum_aa, l.einstein_a_per_s]
                    .iter()
                    .all(|v| *v > 0.0 && v.is_finite())
        };
        if let Some(at) = lines.iter().position(|l| !sound(l)) {
            return Err(Error::table(format!(
                "{species}: line {} lacks a level, a positive wavelength or a positive A, or names the upper level first",
                at + 1
            )));
        }
        Ok(Self {
            species,
            levels,
            lines,
            caveats: Vec::new(),
            model_sigma: 0.0,
        })
    }

    /// The species.
    pub fn species(&self) -> &Species {
        &self.species
    }

    /// Levels, lowest first.
    pub fn levels(&self) -> &[Level] {
        &self.levels
    }

    /// Transitions, in the order of the table.
    pub fn lines(&self) -> &[Line] {
        &self.lines
    }

    /// What to know before trusting anything made from these data.
    pub fn caveats(&self) -> &[Caveat] {
        &self.caveats
    }

    /// Relative standard deviation that simplifications of this system bring into every g, beside the
    /// errors of its lines: 0 for atoms.
    pub fn model_sigma(&self) -> f64 {
        self.model_sigma
    }
}
