//! CN: rotation and vibration of the ground electronic state.

use super::bundle::{Table, table};
use super::cn::{Key, LevelIndex};
use super::system::{Line, LineKind};
use crate::ground::constants::PLANCK_ERG_S;
use crate::ground::{Error, Result};
use serde::Deserialize;
use std::f64::consts::PI;
use std::path::Path;
use std::sync::Arc;

/// One vibrational state of X ²Σ⁺.
#[derive(Deserialize)]
pub(super) struct State {
    v: u8,
    term_cm1: f64,
    b_cm1: f64,
    d_cm1: f64,
    einstein_a_per_s: f64,
    dipole_debye: f64,
}

/// One debye in esu cm.
const DEBYE_ESU_CM: f64 = 1.0e-18;
/// σ of ln A of rotation and vibration, both from memory.
const SIGMA: f64 = 0.15;

impl State {
    /// Rotational energy above v = 0, N = 0, cm⁻¹.
    pub fn energy_cm1(&self, n: u16) -> f64 {
        let x = f64::from(n) * (f64::from(n) + 1.0);
        self.term_cm1 + self.b_cm1 * x - self.d_cm1 * x * x
    }
}

/// Reads `cn_ground_state.csv`: v = 0, 1, 2 … in order.
pub(super) fn states(dir: Option<&Path>) -> Result<Vec<State>> {
    let table: Table = table(dir, "molecules/cn_ground_state.csv")?;
    let mut states = Vec::new();
    for (line, row) in table.rows::<State>()? {
        if usize::from(row.v) != states.len() {
            return Err(table.refuse(line, format!("v = {} is out of order", row.v)));
        }
        if !(row.b_cm1 > 0.0 && row.einstein_a_per_s >= 0.0 && row.dipole_debye >= 0.0) {
            return Err(table.refuse(line, "a constant is not positive"));
        }
        states.push(row);
    }
    if states.is_empty() {
        return Err(Error::table("no vibrational states in this table").in_file(&table.path));
    }
    Ok(states)
}

/// Makes the lines within the ground state.
pub(super) struct GroundState<'a> {
    states: &'a [State],
    index: &'a LevelIndex,
    source: Arc<str>,
}

impl<'a> GroundState<'a> {
    pub fn new(states: &'a [State], index: &'a LevelIndex) -> Self {
        Self {
            states,
            index,
            source: "rotation and vibration of the ground state, from memory".into(),
        }
    }

    /// N → N − 1 out of one level.
    pub fn add_rotation(&self, from: Key, lines: &mut Vec<Line>) {
        let (_, v, n, two_j) = from;
        if n == 0 {
            return;
        }
        let state = &self.states[usize::from(v)];
        let nu_cm1 = state.energy_cm1(n) - state.energy_cm1(n - 1);
        let dipole = state.dipole_debye * DEBYE_ESU_CM;
        let nf = f64::from(n);
        let total_per_s = 64.0 * PI.powi(4) * nu_cm1.powi(3) * dipole * dipole * nf
            / (3.0 * PLANCK_ERG_S * (2.0 * nf + 1.0));
        if two_j > 2 * n {
            self.push(from, (0, v, n - 1, two_j - 2), nu_cm1, total_per_s, lines);
        } else {
            let across = 1.0 / (nf * (2.0 * nf - 1.0));
            let to = (0, v, n - 1, two_j);
            self.push(from, to, nu_cm1, total_per_s * across, lines);
            if n > 1 {
                let along = total_per_s * (1.0 - across);
                self.push(from, (0, v, n - 1, two_j - 2), nu_cm1, along, lines);
            }
        }
    }

    /// v → v − 1 out of one level.
    pub fn add_vibration(&self, from: Key, lines: &mut Vec<Line>) {
        let (_, v, n, two_j) = from;
        if v == 0 {
            return;
        }
        let total_per_s = self.states[usize::from(v)].einstein_a_per_s;
        let upper_cm1 = self.states[usize::from(v)].energy_cm1(n);
        let below = &self.states[usize::from(v - 1)];
        let up = total_per_s * (f64::from(n) + 1.0) / (2.0 * f64::from(n) + 1.0);
        let to_up = upper_cm1 - below.energy_cm1(n + 1);
        let has_up = self.push(from, (0, v - 1, n + 1, two_j + 2), to_up, up, lines);
        if n == 0 {
            return;
        }
        let down = if has_up {
            total_per_s - up
        } else {
            total_per_s
        };
        // J = 1/2 of N = 1 can only go to the single level of N = 0.
        let two_j_down = if two_j > 1 { two_j - 2 } else { two_j };
        let to_down = upper_cm1 - below.energy_cm1(n - 1);
        self.push(from, (0, v - 1, n - 1, two_j_down), to_down, down, lines);
    }

    /// Adds the line if the table has the lower level.
    fn push(&self, from: Key, to: Key, nu_cm1: f64, a_per_s: f64, lines: &mut Vec<Line>) -> bool {
        let Some(&lower) = self.index.get(&to) else {
            return false;
        };
        if a_per_s > 0.0 {
            lines.push(Line {
                wavelength_vacuum_aa: 1.0e8 / nu_cm1,
                lower,
                upper: self.index[&from],
                einstein_a_per_s: a_per_s,
                sigma_ln_a: SIGMA,
                kind: LineKind::Rovibrational,
                source: Arc::clone(&self.source),
            });
        }
        true
    }
}
