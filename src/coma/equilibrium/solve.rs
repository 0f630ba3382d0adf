//! Populations and line efficiencies in steady state.

use super::chain::Chain;
use super::doubts::{doubts, slow, stranded};
use super::field::{Conditions, SolarField};
use super::network::{Rates, connected, matrix, rates};
use super::result::{BandG, Dropped, LineG};
use crate::atomic::{LevelSystem, LineKind};
use crate::ground::constants::HC_ERG_AA;
use crate::ground::{Caveat, Error, Result, Species, air_from_vacuum_aa};
use std::sync::Arc;

/// Steady state of a species in sunlight: Σ rates = 0 for every level, Σ x = 1, with upward rate
/// (g_u/g_l) A n̄ and downward rate A (1 + n̄); g of a line is x_u A.
///
/// Solved by state reduction (Grassmann, Taksar & Heyman 1985), which cannot give a negative
/// population. Only spontaneous emission counts in g: stimulated photons leave with the sunlight.
#[derive(Clone, Debug)]
pub struct Equilibrium {
    species: Species,
    populations: Vec<f64>,
    lines: Vec<LineG>,
    dropped: Vec<Dropped>,
    relaxation_s: f64,
    stranded: f64,
    contested: f64,
    absorbed_erg_s: f64,
    emitted_erg_s: f64,
    caveats: Vec<Caveat>,
}

impl Equilibrium {
    /// Solves for one place and velocity.
    ///
    /// # Errors
    /// Impossible conditions; rates beyond the range of numbers.
    pub fn solve(system: &LevelSystem, field: &SolarField, at: &Conditions) -> Result<Self> {
        at.check()?;
        let occupation = occupations(system, field, at);
        let a_per_s: Vec<f64> = system.lines().iter().map(|l| l.einstein_a_per_s).collect();
        let rates = rates(system, &occupation, &a_per_s);
        let solved = populations(system, &rates)?;
        let lines = lines(system, field, at, &solved.populations);
        let (absorbed_erg_s, emitted_erg_s) = energy(system, &rates, &solved.populations);
        let (stranded, contested) = stranded(system, &rates, &solved.populations);
        let mut caveats = system.caveats().to_vec();
        caveats.extend(doubts(system, &solved.dropped, contested));
        Ok(Self {
            species: system.species().clone(),
            populations: solved.populations,
            lines,
            dropped: solved.dropped,
            relaxation_s: solved.relaxation_s,
            stranded,
            contested,
            absorbed_erg_s,
            emitted_erg_s,
            caveats,
        })
    }

    /// Fraction of the species in each level, in the order of the level system; sums to one.
    pub fn populations(&self) -> &[f64] {
        &self.populations
    }

    /// Efficiency of every line, in the order of the level system.
    pub fn lines(&self) -> &[LineG] {
        &self.lines
    }

    /// The lines with the most photons, brightest first.
    pub fn brightest(&self, count: usize) -> Vec<&LineG> {
        let mut all: Vec<&LineG> = self.lines.iter().collect();
        all.sort_by(|a, b| b.g_photons_s.total_cmp(&a.g_photons_s));
        all.truncate(count);
        all
    }

    /// Sum over a molecular band, `None` when there is no such band.
    pub fn band(&self, upper: u8, lower: u8) -> Option<BandG> {
        let kind = LineKind::Band {
            upper_v: upper,
            lower_v: lower,
        };
        let mut sum = BandG {
            g_photons_s: 0.0,
            g_erg_s: 0.0,
            relative_sigma: 0.0,
        };
        for line in self.lines.iter().filter(|l| l.kind == kind) {
            sum.g_photons_s += line.g_photons_s;
            sum.g_erg_s += line.g_erg_s;
            sum.relative_sigma += line.relative_sigma * line.g_photons_s;
        }
        if sum.g_photons_s == 0.0 {
            return None;
        }
        sum.relative_sigma /= sum.g_photons_s;
        Some(sum)
    }

    /// Levels left out because nothing feeds them or nothing leaves them.
    pub fn dropped(&self) -> &[Dropped] {
        &self.dropped
    }

    /// Mean time in which an atom released in its ground level forgets that, s: ‖∫(p(t) − x) dt‖₁ /
    /// ‖p(0) − x‖₁. Where atoms cross the field of view faster than this, g is not that of
    /// equilibrium.
    pub fn relaxation_s(&self) -> f64 {
        self.relaxation_s
    }

    /// A caveat when atoms cross the field of view, in `transit_s` seconds, before they are in
    /// equilibrium.
    pub fn slow_for(&self, transit_s: f64) -> Option<Caveat> {
        slow(&self.species, self.relaxation_s, transit_s)
    }

    /// Share of the population in excited levels from which no transition downwards is tabulated.
    pub fn stranded(&self) -> f64 {
        self.stranded
    }

    /// The part of [`Equilibrium::stranded`] for which that may matter: levels that a magnetic dipole
    /// line of typical strength down to the ground level, A = 2.7e-11 ν̃³ s⁻¹, would empty at 10 % or
    /// more of the rate at which sunlight does. Low fine-structure levels do not count: their decay is
    /// slow. An upper bound, since most such decays are slower than this.
    pub fn contested(&self) -> f64 {
        self.contested
    }

    /// Power absorbed from the field, erg s⁻¹ per atom.
    pub fn absorbed_erg_s(&self) -> f64 {
        self.absorbed_erg_s
    }

    /// Power emitted, spontaneous and stimulated, erg s⁻¹ per atom.
    pub fn emitted_erg_s(&self) -> f64 {
        self.emitted_erg_s
    }

    /// Doubts that go with these numbers.
    pub fn caveats(&self) -> &[Caveat] {
        &self.caveats
    }
}

pub(super) fn occupations(system: &LevelSystem, field: &SolarField, at: &Conditions) -> Vec<f64> {
    system
        .lines()
        .iter()
        .map(|l| field.occupation(l.wavelength_vacuum_aa, at))
        .collect()
}

pub(super) struct Solved {
    pub populations: Vec<f64>,
    pub dropped: Vec<Dropped>,
    pub relaxation_s: f64,
}

pub(super) fn populations(system: &LevelSystem, rates: &[Rates]) -> Result<Solved> {
    let connected = connected(system, rates);
    let states = connected.kept.len();
    let chain = Chain::reduce(states, matrix(system, rates, &connected)).ok_or_else(|| {
        Error::compute(format!(
            "the rates between the levels of {} leave the range of numbers",
            system.species()
        ))
        .remedy("check the transition probabilities and the solar spectrum in the line lists")
    })?;
    let mut populations = vec![0.0; system.levels().len()];
    for (level, x) in connected.kept.iter().zip(chain.stationary()) {
        populations[*level] = *x;
    }
    Ok(Solved {
        populations,
        dropped: connected.dropped,
        relaxation_s: chain.relaxation(),
    })
}

fn lines(
    system: &LevelSystem,
    field: &SolarField,
    at: &Conditions,
    populations: &[f64],
) -> Vec<LineG> {
    let levels = system.levels();
    let one = |(index, line): (usize, &crate::atomic::Line)| {
        let g_photons_s = populations[line.upper] * line.einstein_a_per_s;
        let vacuum_aa = line.wavelength_vacuum_aa;
        LineG {
            line: index,
            wavelength_air_aa: air_from_vacuum_aa(vacuum_aa),
            wavelength_vacuum_aa: vacuum_aa,
            lower_cm1: levels[line.lower].energy_cm1,
            upper_cm1: levels[line.upper].energy_cm1,
            kind: line.kind,
            g_photons_s,
            g_erg_s: g_photons_s * HC_ERG_AA / vacuum_aa,
            relative_sigma: line
                .sigma_ln_a
                .hypot(field.relative_sigma(vacuum_aa, at))
                .hypot(system.model_sigma()),
            source: Arc::clone(&line.source),
        }
    };
    system.lines().iter().enumerate().map(one).collect()
}

fn energy(system: &LevelSystem, rates: &[Rates], populations: &[f64]) -> (f64, f64) {
    let (mut absorbed, mut emitted) = (0.0, 0.0);
    for (line, rate) in system.lines().iter().zip(rates) {
        let photon_erg = HC_ERG_AA / line.wavelength_vacuum_aa;
        absorbed += populations[line.lower] * rate.up_per_s * photon_erg;
        emitted += populations[line.upper] * rate.down_per_s * photon_erg;
    }
    (absorbed, emitted)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::atomic::{Level, Line};

    fn system(energies_cm1: &[f64], lines: &[(usize, usize, f64)]) -> LevelSystem {
        let levels = energies_cm1.iter().map(|&energy_cm1| Level {
            energy_cm1,
            weight: 1.0,
            label: format!("at {energy_cm1}"),
        });
        let line = |&(lower, upper, einstein_a_per_s): &(usize, usize, f64)| Line {
            wavelength_vacuum_aa: 1e8 / (energies_cm1[upper] - energies_cm1[lower]),
            lower,
            upper,
            einstein_a_per_s,
            sigma_ln_a: 0.1,
            kind: LineKind::Allowed,
            source: "invented".into(),
        };
        let lines = lines.iter().map(line).collect();
        LevelSystem::new(Species::new("X I"), levels.collect(), lines).unwrap()
    }

    fn sun() -> SolarField {
        SolarField::sun(crate::atomic::sun(None).unwrap())
    }

    #[test]
    fn islands_are_dropped_and_named() {
        let islands = system(
            &[0.0, 100.0, 20_000.0, 21_000.0],
            &[(0, 2, 1e7), (1, 3, 1e7)],
        );
        let found = Equilibrium::solve(&islands, &sun(), &Conditions::UNIT).unwrap();
        let (a, b) = (found.dropped()[0], found.dropped()[1]);
        assert_eq!((a.level, b.level, a.trap, b.trap), (1, 3, false, false));
        assert_eq!(found.lines()[1].g_photons_s, 0.0);
        assert!((found.populations().iter().sum::<f64>() - 1.0).abs() < 1e-14);
        assert!(found.caveats().is_empty());
    }

    #[test]
    fn a_trap_is_left_out_with_a_caveat() {
        // 0 → 2 → 3 by sunlight; 3 falls to 1 by light of 625 Å, which the Sun does not have here.
        let lines = [(0, 2, 1e7), (2, 3, 1e7), (1, 3, 1e7)];
        let trap = system(&[0.0, 10.0, 80_000.0, 160_000.0], &lines);
        let found = Equilibrium::solve(&trap, &sun(), &Conditions::UNIT).unwrap();
        let expected = Dropped {
            level: 1,
            trap: true,
        };
        assert_eq!(found.dropped(), [expected]);
        assert_eq!(found.populations()[1], 0.0);
        assert_eq!(found.caveats()[0].code(), "levels-without-return");
        assert!(found.caveats()[0].to_string().contains("at 10"));
    }

    #[test]
    fn atoms_in_a_level_without_decay_are_reported() {
        let metastable = system(&[0.0, 10_000.0, 30_000.0], &[(0, 2, 1e7), (1, 2, 1e7)]);
        let found = Equilibrium::solve(&metastable, &sun(), &Conditions::UNIT).unwrap();
        assert!(found.stranded() > 0.03 && found.stranded() < 1.0);
        assert_eq!(found.caveats()[0].code(), "levels-without-decay");
        assert!(found.slow_for(1e9).is_none());
        let slow = found.slow_for(0.1 * found.relaxation_s()).unwrap();
        assert_eq!(slow.code(), "not-in-equilibrium");
    }

    #[test]
    fn the_ground_level_alone_is_fine() {
        let lonely = system(&[0.0], &[]);
        let found = Equilibrium::solve(&lonely, &sun(), &Conditions::UNIT).unwrap();
        assert_eq!(found.populations(), [1.0]);
        assert_eq!(found.relaxation_s(), 0.0);
    }
}
