//! CN: pumping through the red bands, in outline.
//!
//! A ²Π – X ²Σ⁺ absorbs about as often as the violet bands and so shapes the rotational populations
//! that the violet g depends on. Sunlight is smooth at 0.7–1.1 µm, so positions good to a few Å
//! are enough. Branches as for ¹Π – ¹Σ, spin doublets kept: from the Λ component that P and R lines
//! reach, (N′ + 1)/(2N′ + 1) of the decays go to N′ − 1 and the rest to N′ + 1; from the other one all
//! go to N′ (Herzberg 1950). Departs from reality: the spin–orbit splitting (−53 cm⁻¹) mixes the
//! doublets and branches at low N.

use super::bundle::table;
use super::cn::{Key, LevelIndex};
use super::cn_ground::State;
use super::system::{Line, LineKind};
use crate::ground::Result;
use serde::Deserialize;
use std::path::Path;
use std::sync::Arc;

/// Band of the red system.
#[derive(Deserialize)]
pub(super) struct RedBand {
    v_upper: u8,
    v_lower: u8,
    nu_cm1: f64,
    einstein_a_per_s: f64,
    b_upper_cm1: f64,
}

/// Electronic number, in a key, of the Λ component reached by P and R lines, and by Q lines.
const PR_COMPONENT: u8 = 2;
const Q_COMPONENT: u8 = 3;
/// Highest N of the upper state; beyond, hardly any molecule is found.
const HIGHEST_N: u16 = 45;
/// σ of ln A: Franck–Condon factors of Morse potentials and simplified branches.
const SIGMA: f64 = 0.15;

/// Reads `cn_red_bands.csv`.
pub(super) fn red_bands(states: &[State], dir: Option<&Path>) -> Result<Vec<RedBand>> {
    let table = table(dir, "molecules/cn_red_bands.csv")?;
    let mut bands = Vec::new();
    for (line, row) in table.rows::<RedBand>()? {
        if usize::from(row.v_lower) >= states.len() {
            return Err(table
                .refuse(
                    line,
                    format!("v'' = {} is not in cn_ground_state.csv", row.v_lower),
                )
                .remedy("add the state there, or remove the band"));
        }
        if !(row.nu_cm1 > 0.0 && row.einstein_a_per_s > 0.0 && row.b_upper_cm1 > 0.0) {
            return Err(table.refuse(line, "a constant is not positive"));
        }
        bands.push(row);
    }
    Ok(bands)
}

/// Keys and energies (cm⁻¹) of the upper levels that can decay.
pub(super) fn red_levels(bands: &[RedBand], states: &[State]) -> Vec<(Key, f64)> {
    let mut levels: Vec<(Key, f64)> = Vec::new();
    for band in bands {
        for n in 1..=HIGHEST_N {
            let energy_cm1 = band.upper_cm1(states, n);
            for component in [PR_COMPONENT, Q_COMPONENT] {
                for two_j in [2 * n - 1, 2 * n + 1] {
                    let key = (component, band.v_upper, n, two_j);
                    if !levels.iter().any(|(k, _)| *k == key) {
                        levels.push((key, energy_cm1));
                    }
                }
            }
        }
    }
    levels
}

impl RedBand {
    fn upper_cm1(&self, states: &[State], n: u16) -> f64 {
        let x = f64::from(n) * (f64::from(n) + 1.0);
        self.nu_cm1 + states[usize::from(self.v_lower)].energy_cm1(0) + self.b_upper_cm1 * x
    }

    /// Adds the lines of this band.
    pub fn add_lines(
        &self,
        states: &[State],
        index: &LevelIndex,
        source: &Arc<str>,
        lines: &mut Vec<Line>,
    ) {
        for n in 1..=HIGHEST_N {
            let to_lower_n = f64::from(n + 1) / f64::from(2 * n + 1);
            for (component, n_lower, share) in [
                (Q_COMPONENT, n, 1.0),
                (PR_COMPONENT, n - 1, to_lower_n),
                (PR_COMPONENT, n + 1, 1.0 - to_lower_n),
            ] {
                for first in [true, false] {
                    let (upper_j, lower_j) = (two_j(n, first), two_j(n_lower, first));
                    let lower_cm1 = states[usize::from(self.v_lower)].energy_cm1(n_lower);
                    let ends = (
                        index.get(&(0, self.v_lower, n_lower, lower_j)),
                        index.get(&(component, self.v_upper, n, upper_j)),
                    );
                    let (Some(&lower), Some(&upper)) = ends else {
                        continue;
                    };
                    lines.push(Line {
                        wavelength_vacuum_aa: 1.0e8 / (self.upper_cm1(states, n) - lower_cm1),
                        lower,
                        upper,
                        einstein_a_per_s: self.einstein_a_per_s * share,
                        sigma_ln_a: SIGMA,
                        kind: LineKind::Pump,
                        source: Arc::clone(source),
                    });
                }
            }
        }
    }
}

/// 2J of the first (J = N + 1/2) or second spin component; N = 0 has only the first.
fn two_j(n: u16, first: bool) -> u16 {
    if first || n == 0 {
        2 * n + 1
    } else {
        2 * n - 1
    }
}
