//! Parallel bands of linear molecules from rotational constants.

use super::super::bundle::{Table, table};
use super::pumped::{Pumped, Transition};
use crate::ground::{Caveat, Result};
use serde::Deserialize;
use std::path::Path;

/// Levels of the ground state are followed up to here; e^(−hcE/kT) is 6e-7 at 2000 K.
const HIGHEST_CM1: f64 = 20_000.0;
/// A last stop for J should the constants let the energy stall.
const HIGHEST_J: u32 = 600;

/// A row of `rotational_constants.csv`; cm⁻¹.
#[derive(Debug, Deserialize)]
pub(super) struct Constants {
    band: String,
    origin_cm1: f64,
    b_upper_cm1: f64,
    d_upper_cm1: f64,
    h_upper_cm1: f64,
    b_lower_cm1: f64,
    d_lower_cm1: f64,
    h_lower_cm1: f64,
    weight_even: f64,
    weight_odd: f64,
    source: String,
    how: String,
}

/// The constants of a band, if the table has them.
pub(super) fn constants(id: &str, dir: Option<&Path>) -> Result<Option<Constants>> {
    let table = table(dir, "molecules/rotational_constants.csv")?;
    for (line, row) in table.rows::<Constants>()? {
        if row.band == id {
            row.check(&table, line)?;
            return Ok(Some(row));
        }
    }
    Ok(None)
}

impl Constants {
    fn check(&self, table: &Table, line: usize) -> Result<()> {
        for (name, value, most) in [
            ("origin_cm1", self.origin_cm1, 1e5),
            ("b_upper_cm1", self.b_upper_cm1, 100.0),
            ("b_lower_cm1", self.b_lower_cm1, 100.0),
        ] {
            if !(value > 0.0 && value <= most) {
                let text = format!("{name} {value} is not above 0 and at most {most:e}");
                return Err(table.refuse(line, text));
            }
        }
        let weights = [self.weight_even, self.weight_odd];
        if !weights.iter().all(|w| *w >= 0.0 && w.is_finite()) || weights == [0.0, 0.0] {
            let text = format!("weights {weights:?} must not be negative, nor both zero");
            return Err(table.refuse(line, text));
        }
        let distortion = [self.d_upper_cm1, self.d_lower_cm1];
        let sextic = [self.h_upper_cm1, self.h_lower_cm1];
        if !distortion.iter().chain(&sextic).all(|d| d.abs() < 1.0) {
            return Err(table.refuse(line, "D or H is not a number below 1 cm-1"));
        }
        if self.how != "read" && self.how != "memory" {
            let text = format!("how is '{}', not read or memory", self.how);
            return Err(table.refuse(line, text));
        }
        Ok(())
    }

    fn lower_cm1(&self, j: u32) -> f64 {
        rotation(j, self.b_lower_cm1, self.d_lower_cm1, self.h_lower_cm1)
    }

    fn upper_cm1(&self, j: u32) -> f64 {
        let rotation = rotation(j, self.b_upper_cm1, self.d_upper_cm1, self.h_upper_cm1);
        self.origin_cm1 + rotation
    }

    /// P and R lines. Hönl–London factors of a Σ–Σ band: max(J′, J″) for weight times B_lu as for
    /// 2J′ + 1 times A_ul / ν³ (Herzberg 1950, Spectra of Diatomic Molecules, section IV 4).
    pub fn lines(&self) -> Pumped {
        let mut lower = vec![self.lower_cm1(0)];
        for j in 1..=HIGHEST_J {
            let energy = self.lower_cm1(j);
            if energy > HIGHEST_CM1 || energy <= lower[lower.len() - 1] {
                break;
            }
            lower.push(energy);
        }
        let mut lines = Vec::new();
        for (j, energy) in (0_u32..).zip(&lower) {
            let weight = if j % 2 == 0 {
                self.weight_even
            } else {
                self.weight_odd
            };
            for upper in [j.checked_sub(1), Some(j + 1)].into_iter().flatten() {
                let nu_cm1 = self.upper_cm1(upper) - energy;
                if weight > 0.0 && nu_cm1 > 0.0 {
                    let honl_london = f64::from(j.max(upper));
                    lines.push(Transition {
                        nu_cm1,
                        lower: j as usize,
                        upper: upper as usize,
                        pump: weight * honl_london,
                        decay: nu_cm1.powi(3) * honl_london,
                    });
                }
            }
        }
        let uppers = lower.len() + 1;
        Pumped::new(lower, uppers, lines)
    }

    pub fn caveats(&self) -> Vec<Caveat> {
        if self.how == "read" {
            return Vec::new();
        }
        vec![Caveat::FromMemory {
            what: format!("rotational constants of {}", self.band),
            source: self.source.clone(),
        }]
    }
}

/// B x − D x² + H x³ with x = J(J + 1), cm⁻¹.
fn rotation(j: u32, b_cm1: f64, d_cm1: f64, h_cm1: f64) -> f64 {
    let x = f64::from(j) * (f64::from(j) + 1.0);
    x * (b_cm1 - x * (d_cm1 - x * h_cm1))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_two_lines_of_one_upper_level_are_in_the_ratio_of_the_branching() {
        // At 1 K most molecules sit in J = 0 (one in seven in J = 2, none in J = 1): the strong lines
        // are R(0) and P(2) out of J' = 1, one to two in A over nu cubed; a further nu for the energy.
        let co2 = constants("CO2-4.26um", None).unwrap().unwrap();
        let lines = co2.lines().emission(1.0).unwrap();
        let main: Vec<_> = lines.iter().filter(|l| l.share > 0.2).collect();
        assert_eq!(main.len(), 2, "{lines:?}");
        let expected = 2.0 * (main[0].vacuum_aa / main[1].vacuum_aa).powi(4);
        let p_over_r = main[1].share / main[0].share;
        assert!((p_over_r / expected - 1.0).abs() < 1e-12, "{p_over_r}");
    }

    #[test]
    fn bad_constants_are_refused_with_their_line() {
        let head = "band,origin_cm1,b_upper_cm1,d_upper_cm1,h_upper_cm1,b_lower_cm1,d_lower_cm1,h_lower_cm1,weight_even,weight_odd,source,how";
        for bad in [
            "X,-2000,1,0,0,1,0,0,1,1,a,read",
            "X,2000,1,0,0,nan,0,0,1,1,a,read",
            "X,2000,1,0,0,1,inf,0,1,1,a,read",
            "X,2000,1,0,0,1,0,0,0,0,a,read",
            "X,2000,1,0,0,1,0,0,1,-1,a,read",
            "X,2000,1,0,0,1,0,0,1,1,a,guess",
        ] {
            let dir = tempfile::tempdir().unwrap();
            std::fs::create_dir(dir.path().join("molecules")).unwrap();
            let path = dir.path().join("molecules/rotational_constants.csv");
            std::fs::write(&path, format!("{head}\n{bad}\n")).unwrap();
            let error = constants("X", Some(dir.path())).unwrap_err();
            assert_eq!(error.line(), Some(2), "{bad}: {error}");
        }
    }
}
