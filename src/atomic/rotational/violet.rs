//! CN B ²Σ⁺ – X ²Σ⁺ (0–0) from the published violet lines.

use super::super::bundle::table;
use super::super::cn_ground::states;
use super::pumped::{Pumped, Transition};
use crate::ground::{Error, Result};
use serde::Deserialize;
use std::collections::BTreeMap;
use std::path::Path;

#[derive(Deserialize)]
struct Row {
    wavelength_vacuum_aa: f64,
    v_upper: u8,
    n_upper: u16,
    j_upper: f64,
    v_lower: u8,
    n_lower: u16,
    j_lower: f64,
    einstein_a_per_s: f64,
}

/// Places given to levels as they are met; the key is N and 2J.
#[derive(Default)]
struct Places(BTreeMap<(u16, u32), usize>);

impl Places {
    fn of(&mut self, n: u16, j: f64) -> usize {
        let next = self.0.len();
        *self.0.entry((n, (2.0 * j) as u32)).or_insert(next)
    }
}

/// Lines out of v′ = 0. Decays to v″ > 0 count in the branching but are not part of the band.
/// The spin splitting of the ground state, 0.01 cm⁻¹, is left out of its energies only.
pub(super) fn lines(dir: Option<&Path>) -> Result<Pumped> {
    let ground = states(dir)?;
    let table = table(dir, "molecules/cn_violet_lines.csv")?;
    let (mut lowers, mut uppers) = (Places::default(), Places::default());
    let mut lower_cm1: Vec<f64> = Vec::new();
    let mut lines = Vec::new();
    for (line, r) in table.rows::<Row>()? {
        if !(r.wavelength_vacuum_aa > 0.0 && r.einstein_a_per_s > 0.0) {
            return Err(table.refuse(line, "wavelength or A is not positive"));
        }
        if !(r.j_upper >= 0.5 && r.j_lower >= 0.5) {
            return Err(table.refuse(line, "J is below 1/2"));
        }
        if r.v_upper != 0 {
            continue;
        }
        let nu_cm1 = 1e8 / r.wavelength_vacuum_aa;
        let in_band = r.v_lower == 0;
        let lower = if in_band {
            lowers.of(r.n_lower, r.j_lower)
        } else {
            usize::MAX
        };
        if lower == lower_cm1.len() {
            lower_cm1.push(ground[0].energy_cm1(r.n_lower));
        }
        let weight = 2.0 * r.j_upper + 1.0;
        lines.push(Transition {
            nu_cm1,
            lower,
            upper: uppers.of(r.n_upper, r.j_upper),
            pump: if in_band {
                weight * r.einstein_a_per_s / nu_cm1.powi(3)
            } else {
                0.0
            },
            decay: r.einstein_a_per_s,
        });
    }
    if lower_cm1.is_empty() {
        return Err(Error::table("no lines of the 0-0 band in this table").in_file(&table.path));
    }
    Ok(Pumped::new(lower_cm1, uppers.0.len(), lines))
}
