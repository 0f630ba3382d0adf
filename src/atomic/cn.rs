//! CN: violet lines with the rotation and vibration of the ground state.

use super::bundle::{Table, table};
use super::cn_ground::{GroundState, State, states};
use super::cn_red::{red_bands, red_levels};
use super::system::{Level, LevelSystem, Line, LineKind};
use crate::ground::{Caveat, Result, Species};
use serde::Deserialize;
use std::collections::BTreeMap;
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

/// σ of ln A of the violet lines: the calculated band strengths against measured lifetimes, from memory.
const VIOLET_SIGMA: f64 = 0.05;

/// Relative error of every violet g from what is simplified or from memory. The largest part is the
/// vibrational A: with 0.2 s⁻¹ for v = 1 – 0 instead of about 9, one molecule in five sits in v ≥ 1 and
/// the g of the 0–0 band falls by 17 %.
const MODEL_SIGMA: f64 = 0.15;

/// Quantum numbers of a level: electronic state (0 X, 1 B, 2 and 3 the Λ components of A), v, N, 2J.
pub(super) type Key = (u8, u8, u16, u16);
/// Where each level is in the system.
pub(super) type LevelIndex = BTreeMap<Key, usize>;

/// Levels and lines of CN for its violet bands: X ²Σ⁺ v = 0, 1, 2 and B ²Σ⁺ v = 0, 1, each with
/// rotation and spin doublets.
///
/// Violet lines: Brooke et al. 2014. Added here, with A from memory and hence approximate:
/// * rotation N → N − 1: A = (64π⁴/3hc³) ν³ μ² N/(2N + 1), shared between the spin doublets as for
///   a Hund case (b) doublet: F₁ → F₁ always; F₂ → F₁ the fraction 1/(N(2N − 1)), else F₂ → F₂;
/// * vibration v → v − 1: total A split over N ± 1 by Hönl–London factors, doublet kept;
/// * red bands A ²Π – X ²Σ⁺, v′ = 0–3, in outline (`cn_red.rs`): they matter for the populations
///   only, their own lines are not meant for use.
///
/// # Errors
/// An unreadable or inconsistent table, with file and line.
pub fn cn_violet(dir: Option<&Path>) -> Result<LevelSystem> {
    let states = states(dir)?;
    let lines_table = table(dir, "molecules/cn_violet_lines.csv")?;
    let rows = lines_table.rows::<LineRow>()?;
    let energies = energies(&lines_table, &rows, &states)?;
    let bands = red_bands(&states, dir)?;

    let mut order: Vec<(Key, f64)> = energies.into_iter().map(|(k, e)| (k, e.mean())).collect();
    order.extend(red_levels(&bands, &states));
    order.sort_by(|a, b| a.1.total_cmp(&b.1).then(a.0.cmp(&b.0)));
    let index: LevelIndex = order.iter().enumerate().map(|(i, o)| (o.0, i)).collect();
    let levels: Vec<Level> = order.iter().map(|(k, e)| level(k, *e)).collect();

    let mut lines = violet_lines(&rows, &index);
    let red: Arc<str> = "A–X bands after Brooke et al. 2014, in outline".into();
    for band in &bands {
        band.add_lines(&states, &index, &red, &mut lines);
    }
    let ground = GroundState::new(&states, &index);
    for key in index.keys().filter(|k| k.0 == 0) {
        ground.add_rotation(*key, &mut lines);
        ground.add_vibration(*key, &mut lines);
    }
    let mut system = LevelSystem::new(Species::new("CN"), levels, lines)?;
    system.caveats = caveats();
    system.model_sigma = MODEL_SIGMA;
    Ok(system)
}

fn violet_lines(rows: &[(usize, LineRow)], index: &LevelIndex) -> Vec<Line> {
    let source: Arc<str> = "Brooke et al. 2014, ApJS 210, 23".into();
    let line = |(_, r): &(usize, LineRow)| Line {
        wavelength_vacuum_aa: r.wavelength_vacuum_aa,
        lower: index[&lower_key(r)],
        upper: index[&upper_key(r)],
        einstein_a_per_s: r.einstein_a_per_s,
        sigma_ln_a: VIOLET_SIGMA,
        kind: LineKind::Band {
            upper_v: r.v_upper,
            lower_v: r.v_lower,
        },
        source: Arc::clone(&source),
    };
    rows.iter().map(line).collect()
}

fn caveats() -> Vec<Caveat> {
    vec![
        Caveat::Other {
            code: "red-bands-in-outline",
            text: "CN violet g: pumping through the A-X red bands is followed in outline only (no spin-orbit splitting, band strengths to about 15 %); the g of the 0-0 band may be off by a few per cent for that".into(),
        },
        Caveat::FromMemory {
            what: "dipole moment and vibrational transition probability of CN (with 0.2 per second instead of 9 for v = 1-0 the g of the 0-0 band would be 17 % smaller)".into(),
            source: "Thomson & Dalby 1968; Langhoff & Bauschlicher 1989".into(),
        },
    ]
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
    states: &[State],
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
    let state = match electronic {
        0 => "X",
        1 => "B",
        2 => "A (P, R)",
        _ => "A (Q)",
    };
    Level {
        energy_cm1,
        weight: f64::from(two_j) + 1.0,
        label: format!("{state} v={v} N={n} J={two_j}/2"),
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
