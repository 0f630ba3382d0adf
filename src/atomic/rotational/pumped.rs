//! Lines pumped out of a thermal lower state, whatever the molecule.

use super::{RotationalBand, ShapeLine};
use crate::ground::constants::HC_OVER_K_CM_K;
use crate::ground::{Error, Result};

/// Emission lines below this fraction of the sum are left out.
const SMALLEST_SHARE: f64 = 1e-5;
/// Å times cm⁻¹.
const AA_CM1: f64 = 1e8;

/// A line between one lower and one upper level.
#[derive(Clone, Copy, Debug)]
pub(super) struct Transition {
    /// Wavenumber, cm⁻¹.
    pub nu_cm1: f64,
    /// Place of the lower level.
    pub lower: usize,
    /// Place of the upper level.
    pub upper: usize,
    /// Weight of the lower level times B_lu, in a unit common to the band.
    pub pump: f64,
    /// g_u A_ul before [`Pumped::new`], fraction A_ul / Σ_k A_uk after it.
    pub decay: f64,
}

/// Levels and lines of a band, sorted by wavelength.
#[derive(Clone, Debug)]
pub(super) struct Pumped {
    lower_cm1: Vec<f64>,
    uppers: usize,
    lines: Vec<Transition>,
}

impl Pumped {
    /// `lines` with `decay` ∝ A of the upper level; lines that leave the band (pump 0 and
    /// `lower` out of range) count in the sum over decays and are then dropped.
    pub fn new(lower_cm1: Vec<f64>, uppers: usize, mut lines: Vec<Transition>) -> Self {
        let mut total = vec![0.0; uppers];
        for line in &lines {
            total[line.upper] += line.decay;
        }
        lines.retain(|l| l.lower < lower_cm1.len());
        for line in &mut lines {
            line.decay /= total[line.upper];
        }
        lines.sort_by(|a, b| b.nu_cm1.total_cmp(&a.nu_cm1));
        Self {
            lower_cm1,
            uppers,
            lines,
        }
    }

    pub fn emission(&self, temperature_k: f64) -> Result<Vec<ShapeLine>> {
        let boltzmann = self.boltzmann(temperature_k)?;
        let mut photons = vec![0.0; self.uppers];
        for line in &self.lines {
            photons[line.upper] += boltzmann[line.lower] * line.pump;
        }
        let energy = |l: &Transition| photons[l.upper] * l.decay * l.nu_cm1;
        let sum: f64 = self.lines.iter().map(energy).sum();
        let least = SMALLEST_SHARE * sum;
        Ok(shares(&self.lines, |l| {
            Some(energy(l)).filter(|e| *e >= least)
        }))
    }

    pub fn absorption(&self, temperature_k: f64) -> Result<Vec<ShapeLine>> {
        let boltzmann = self.boltzmann(temperature_k)?;
        let strength = |l: &Transition| {
            let stimulated = (-HC_OVER_K_CM_K * l.nu_cm1 / temperature_k).exp();
            Some(l.nu_cm1 * l.pump * boltzmann[l.lower] * (1.0 - stimulated))
        };
        Ok(shares(&self.lines, strength))
    }

    fn boltzmann(&self, temperature_k: f64) -> Result<Vec<f64>> {
        let (least, most) = RotationalBand::TEMPERATURES_K;
        if !(temperature_k >= least && temperature_k <= most) {
            return Err(Error::compute(format!(
                "rotational temperature {temperature_k} K is outside {least} to {most} K"
            ))
            .remedy("give a temperature in this range; comets have 10 to 300 K"));
        }
        // Energies count from the lowest level, or all populations vanish at a few kelvin.
        let ground = self.lower_cm1.iter().copied().fold(f64::INFINITY, f64::min);
        let factor = |e: &f64| (HC_OVER_K_CM_K * (ground - e) / temperature_k).exp();
        Ok(self.lower_cm1.iter().map(factor).collect())
    }
}

fn shares(lines: &[Transition], value: impl Fn(&Transition) -> Option<f64>) -> Vec<ShapeLine> {
    let mut found: Vec<ShapeLine> = lines
        .iter()
        .filter_map(|l| {
            Some(ShapeLine {
                vacuum_aa: AA_CM1 / l.nu_cm1,
                share: value(l)?,
            })
        })
        .collect();
    let sum: f64 = found.iter().map(|l| l.share).sum();
    for line in &mut found {
        line.share /= sum;
    }
    found
}
