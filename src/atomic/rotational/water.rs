//! H₂O at 2.7 µm: lines without quantum numbers.

use super::super::bundle::table;
use super::pumped::{Pumped, Transition};
use crate::ground::constants::{BOLTZMANN_ERG_K, HC_OVER_K_CM_K};
use crate::ground::{Caveat, Error, Result};
use serde::Deserialize;
use std::collections::BTreeMap;
use std::path::Path;

/// erg per electron volt (exact, SI).
const EV_ERG: f64 = 1.602_176_634e-12;

#[derive(Deserialize)]
struct Row {
    nu_cm1: f64,
    lower_ev: f64,
    log_gf: f64,
}

/// Lines whose upper energies, ν + E″, fall into one step of this size share an upper level here, cm⁻¹.
/// Twice the rounding of E″ (8 cm⁻¹): the lines of one true level then mostly stay together.
const STEP_CM1: f64 = 16.0;
/// Shift of the steps, cm⁻¹, so that the lines of the lowest levels, near 3780 (ν₃) and 3696 (ν₁),
/// are not cut apart.
const SHIFT_CM1: f64 = 5.0;
/// Within a step, lines with gA below this fraction of the largest are taken to belong to another level
/// (ν₁ and 2ν₂, at the energies of ν₃, are an order of magnitude weaker).
///
/// Step, shift and this fraction are judgements, settled after a scan (steps 8, 12, 16; shifts 0, 5, 10;
/// fractions 0.1, 0.2, 0.3) with an eye on the coldest gas, whose mean should be that of a few known lines.
/// For fractions of 0.2 and 0.3 the mean wavelength at 70 K runs from 26 753 to 26 862 Å over the scan;
/// steps that cut the lowest level apart are off by 300 Å at 10 K.
const WEAK: f64 = 0.25;

/// g_l B_lu ∝ gf / ν and g_u A_ul ∝ gf ν²; upper levels by their energy and strength alone.
pub(super) fn lines(dir: Option<&Path>) -> Result<Pumped> {
    let rows = rows(dir)?;
    let mut strongest: BTreeMap<u64, f64> = BTreeMap::new();
    for row in &rows {
        let most = strongest.entry(row.step()).or_default();
        *most = most.max(row.decay());
    }
    let mut uppers: BTreeMap<(u64, bool), usize> = BTreeMap::new();
    let mut lines = Vec::new();
    for (lower, row) in rows.iter().enumerate() {
        let weak = row.decay() < WEAK * strongest[&row.step()];
        let next = uppers.len();
        lines.push(Transition {
            nu_cm1: row.nu_cm1,
            lower,
            upper: *uppers.entry((row.step(), weak)).or_insert(next),
            pump: row.gf() / row.nu_cm1,
            decay: row.decay(),
        });
    }
    let lower_cm1 = rows.iter().map(Row::lower_cm1).collect();
    Ok(Pumped::new(lower_cm1, uppers.len(), lines))
}

fn rows(dir: Option<&Path>) -> Result<Vec<Row>> {
    let table = table(dir, "molecules/h2o_2p7um_lines.csv")?;
    let mut rows = Vec::new();
    for (line, row) in table.rows::<Row>()? {
        let sound = row.nu_cm1 > 1.0 && row.nu_cm1 < 1e5 && row.log_gf.abs() < 30.0;
        if !(sound && row.lower_ev >= 0.0 && row.lower_ev < 10.0) {
            return Err(table.refuse(line, "nu, lower energy or log gf is out of range"));
        }
        rows.push(row);
    }
    if rows.is_empty() {
        return Err(Error::table("no lines in this table").in_file(&table.path));
    }
    Ok(rows)
}

impl Row {
    fn lower_cm1(&self) -> f64 {
        self.lower_ev * EV_ERG / (BOLTZMANN_ERG_K * HC_OVER_K_CM_K)
    }

    fn step(&self) -> u64 {
        ((self.lower_cm1() + self.nu_cm1 + SHIFT_CM1) / STEP_CM1) as u64
    }

    fn gf(&self) -> f64 {
        10.0_f64.powf(self.log_gf)
    }

    /// g_u A_ul in a unit common to the table.
    fn decay(&self) -> f64 {
        self.gf() * self.nu_cm1.powi(2)
    }
}

pub(super) fn caveats() -> Vec<Caveat> {
    vec![Caveat::Other {
        code: "water-levels-by-energy",
        text: "H2O 2.7 um: the line list has no quantum numbers; upper levels are told apart only by energy to 16 cm-1 and by strength, lower energies are good to 4 cm-1, ortho and para are mixed: single lines may be off by a factor of 2 below 50 K, the mean of the band by some 60 Å; the list is incomplete above 300 K".into(),
    }]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_lowest_level_returns_by_one_r_and_one_p_line() {
        // Out of J'' = 0 nu3 lifts to 1(01), which returns to 0(00) and 2(02), nearly one to two as in a
        // linear molecule; nu1, one fifteenth as strong, has its own lines.
        let water = lines(None).unwrap();
        let mut found = water.emission(2.0).unwrap();
        found.sort_by(|a, b| b.share.total_cmp(&a.share));
        let (p, r) = (found[0], found[1]);
        assert!(p.vacuum_aa > r.vacuum_aa + 400.0, "{p:?} {r:?}");
        assert!((1.6..2.4).contains(&(p.share / r.share)), "{p:?} {r:?}");
        assert!(p.share + r.share > 0.85, "{p:?} {r:?}");
    }
}
