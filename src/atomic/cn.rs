//! CN: violet lines with the rotation and vibration of the ground state.

use super::bundle::{Table, table};
use super::system::{Level, LevelSystem, Line, LineKind};
use crate::ground::constants::PLANCK_ERG_S;
use crate::ground::{Caveat, Error, Result, Species};
use serde::Deserialize;
use std::collections::BTreeMap;
use std::f64::consts::PI;
use std::path::Path;
use std::sync::Arc;

#[derive(Deserialize)]
struct LineRow {
    wavelength_vacuum_aa: f64,
    v_upper: u8,
    n_upper: u16,
    j_upper: f64,
    v_lower: u8,
    n_lower: u16,
    j_lower: f64,
    einstein_a_per_s: f64,
}

#[derive(Deserialize)]
struct StateRow {
    v: u8,
    term_cm1: f64,
    b_cm1: f64,
    d_cm1: f64,
    einstein_a_per_s: f64,
    dipole_debye: f64,
}

/// One debye in esu cm.
const DEBYE_ESU_CM: f64 = 1.0e-18;
/// σ of ln A of the violet lines: the calculated band strengths against measured lifetimes, from memory.
const VIOLET_SIGMA: f64 = 0.05;
/// σ of ln A of rotation and vibration, both from memory.
const ROVIBRATIONAL_SIGMA: f64 = 0.15;

/// Quantum numbers of a level: electronic state (0 X, 1 B), v, N, and 2J.
type Key = (u8, u8, u16, u16);

/// Levels and lines of CN for its violet bands: X ²Σ⁺ v = 0, 1, 2 and B ²Σ⁺ v = 0, 1, each with
/// rotation and spin doublets.
///
/// Violet lines: Brooke et al. 2014. Added here from the constants in `cn_ground_state.csv`, all from
/// memory and hence approximate:
/// * rotation N → N − 1: A = (64π⁴/3hc³) ν³ μ² N/(2N + 1), shared between the spin doublets as for
///   a Hund case (b) doublet: F₁ → F₁ always; F₂ → F₁ the fraction 1/(N(2N − 1)), else F₂ → F₂;
/// * vibration v → v − 1: total A split over N ± 1 by Hönl–London factors, doublet kept.
///
/// Left out: the A ²Π – X red bands. They are pumped about as often as the violet bands, move the
/// rotational populations by ΔN up to 2 each time and populate v ≥ 1; a caveat says so.
///
/// # Errors
/// An unreadable or inconsistent table, with file and line.
pub fn cn_violet(dir: Option<&Path>) -> Result<LevelSystem> {
    let states_table = table(dir, "molecules/cn_ground_state.csv")?;
    let states = states(&states_table)?;
    let lines_table = table(dir, "molecules/cn_violet_lines.csv")?;
    let rows = lines_table.rows::<LineRow>()?;
    let energies = energies(&lines_table, &rows, &states)?;

    let mut order: Vec<(Key, f64)> = energies.into_iter().map(|(k, e)| (k, e.mean())).collect();
    order.sort_by(|a, b| a.1.total_cmp(&b.1).then(a.0.cmp(&b.0)));
    let index: BTreeMap<Key, usize> = order.iter().enumerate().map(|(i, o)| (o.0, i)).collect();
    let levels: Vec<Level> = order.iter().map(|(k, e)| level(k, *e)).collect();

    let violet: Arc<str> = "Brooke et al. 2014, ApJS 210, 23".into();
    let mut lines: Vec<Line> = rows
        .iter()
        .map(|(_, r)| Line {
            wavelength_vacuum_aa: r.wavelength_vacuum_aa,
            lower: index[&lower_key(r)],
            upper: index[&upper_key(r)],
            einstein_a_per_s: r.einstein_a_per_s,
            sigma_ln_a: VIOLET_SIGMA,
            kind: LineKind::Band {
                upper_v: r.v_upper,
                lower_v: r.v_lower,
            },
            source: Arc::clone(&violet),
        })
        .collect();
    let ground = GroundState {
        states: &states,
        index: &index,
        source: "rotation and vibration of the ground state, from memory".into(),
    };
    for key in index.keys().filter(|k| k.0 == 0) {
        ground.add_rotation(*key, &mut lines);
        ground.add_vibration(*key, &mut lines);
    }
    let mut system = LevelSystem::new(Species::new("CN"), levels, lines)?;
    system.caveats = caveats();
    Ok(system)
}

fn caveats() -> Vec<Caveat> {
    vec![
        Caveat::Other {
            code: "red-bands-left-out",
            text: "CN violet g: pumping through the A-X red bands is left out; it changes the rotational populations and the g of the 0-0 band by an estimated 10 %".into(),
        },
        Caveat::FromMemory {
            what: "dipole moment and vibrational transition probability of CN".into(),
            source: "Thomson & Dalby 1968; Langhoff & Bauschlicher 1989".into(),
        },
    ]
}

fn states(table: &Table) -> Result<Vec<StateRow>> {
    let mut states = Vec::new();
    for (line, row) in table.rows::<StateRow>()? {
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

/// Mean of the energies that the lines give a level.
#[derive(Default)]
struct Energy {
    sum_cm1: f64,
    count: f64,
}

impl Energy {
    fn add(&mut self, energy_cm1: f64) {
        self.sum_cm1 += energy_cm1;
        self.count += 1.0;
    }

    fn mean(&self) -> f64 {
        self.sum_cm1 / self.count
    }
}

fn energies(
    table: &Table,
    rows: &[(usize, LineRow)],
    states: &[StateRow],
) -> Result<BTreeMap<Key, Energy>> {
    let mut energies: BTreeMap<Key, Energy> = BTreeMap::new();
    for (line, r) in rows {
        let Some(state) = states.get(usize::from(r.v_lower)) else {
            return Err(table
                .refuse(
                    *line,
                    format!("v'' = {} is not in cn_ground_state.csv", r.v_lower),
                )
                .remedy("add the state there, or remove the line"));
        };
        if !(r.wavelength_vacuum_aa > 0.0 && r.einstein_a_per_s > 0.0) {
            return Err(table.refuse(*line, "wavelength or A is not positive"));
        }
        for (n, j) in [(r.n_upper, r.j_upper), (r.n_lower, r.j_lower)] {
            if (j - f64::from(n)).abs() != 0.5 || j < 0.5 {
                return Err(table.refuse(*line, format!("J = {j} is not N ± 1/2 for N = {n}")));
            }
        }
        let lower_cm1 = state.energy_cm1(r.n_lower);
        energies.entry(lower_key(r)).or_default().add(lower_cm1);
        let upper_cm1 = lower_cm1 + 1.0e8 / r.wavelength_vacuum_aa;
        energies.entry(upper_key(r)).or_default().add(upper_cm1);
    }
    Ok(energies)
}

impl StateRow {
    fn energy_cm1(&self, n: u16) -> f64 {
        let x = f64::from(n) * (f64::from(n) + 1.0);
        self.term_cm1 + self.b_cm1 * x - self.d_cm1 * x * x
    }
}

#[expect(
    clippy::cast_possible_truncation,
    clippy::cast_sign_loss,
    reason = "2J was checked"
)]
fn key(electronic: u8, v: u8, n: u16, j: f64) -> Key {
    (electronic, v, n, (2.0 * j) as u16)
}

fn lower_key(r: &LineRow) -> Key {
    key(0, r.v_lower, r.n_lower, r.j_lower)
}

fn upper_key(r: &LineRow) -> Key {
    key(1, r.v_upper, r.n_upper, r.j_upper)
}

fn level(key: &Key, energy_cm1: f64) -> Level {
    let (electronic, v, n, two_j) = *key;
    let state = if electronic == 0 { 'X' } else { 'B' };
    Level {
        energy_cm1,
        weight: f64::from(two_j) + 1.0,
        label: format!("{state} v={v} N={n} J={two_j}/2"),
    }
}

struct GroundState<'a> {
    states: &'a [StateRow],
    index: &'a BTreeMap<Key, usize>,
    source: Arc<str>,
}

impl GroundState<'_> {
    fn add_rotation(&self, from: Key, lines: &mut Vec<Line>) {
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
            self.push(
                from,
                (0, v, n - 1, two_j),
                nu_cm1,
                total_per_s * across,
                lines,
            );
            if n > 1 {
                let along = total_per_s * (1.0 - across);
                self.push(from, (0, v, n - 1, two_j - 2), nu_cm1, along, lines);
            }
        }
    }

    fn add_vibration(&self, from: Key, lines: &mut Vec<Line>) {
        let (_, v, n, two_j) = from;
        if v == 0 {
            return;
        }
        let total_per_s = self.states[usize::from(v)].einstein_a_per_s;
        let upper_cm1 = self.states[usize::from(v)].energy_cm1(n);
        let below = &self.states[usize::from(v - 1)];
        let weights = 2.0 * f64::from(n) + 1.0;
        let up = total_per_s * (f64::from(n) + 1.0) / weights;
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
                sigma_ln_a: ROVIBRATIONAL_SIGMA,
                kind: LineKind::Rovibrational,
                source: Arc::clone(&self.source),
            });
        }
        true
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::constants::LIGHT_CM_S;

    #[test]
    fn the_lowest_rotational_line_is_that_of_radio_astronomy() {
        let cn = cn_violet(None).unwrap();
        let first = cn
            .lines()
            .iter()
            .filter(|l| l.kind == LineKind::Rovibrational)
            .find(|l| cn.levels()[l.upper].label == "X v=0 N=1 J=3/2")
            .unwrap();
        let ghz = LIGHT_CM_S / (first.wavelength_vacuum_aa * 1e-8) / 1e9;
        // N = 1-0 of CN near 113.5 GHz with A near 1.2e-5 per second, from memory.
        assert!((ghz - 113.4).abs() < 0.3, "{ghz}");
        assert!((first.einstein_a_per_s / 1.2e-5 - 1.0).abs() < 0.1);
    }

    #[test]
    fn every_excited_level_can_decay() {
        let cn = cn_violet(None).unwrap();
        for (i, level) in cn.levels().iter().enumerate().skip(1) {
            assert!(cn.lines().iter().any(|l| l.upper == i), "{}", level.label);
        }
    }
}
