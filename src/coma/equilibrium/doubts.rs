//! When an equilibrium is to be read with care.

use super::network::Rates;
use super::result::Dropped;
use crate::atomic::LevelSystem;
use crate::ground::{Caveat, Species};

/// Share of the population in contested levels above which a caveat is given.
const CONTESTED_SHARE: f64 = 0.03;
/// A of a magnetic dipole line per cm⁻¹ cubed, for a line strength of one Bohr magneton squared per
/// unit of statistical weight: 64π⁴ μ_B²/3h, s⁻¹ cm³.
const M1_PER_S_CM3: f64 = 2.697e-11;
/// Share of the rate out of a level from which an untabulated decay would matter.
const MATTERS: f64 = 0.1;

/// Share of the transit time from which the relaxation is slow.
const SLOW_SHARE: f64 = 0.3;

/// Shares of the population in excited levels without a tabulated way down: all of them, and those for
/// which that may matter.
pub(super) fn stranded(system: &LevelSystem, rates: &[Rates], populations: &[f64]) -> (f64, f64) {
    let mut decays = vec![false; populations.len()];
    let mut pumped_per_s = vec![0.0; populations.len()];
    for (line, rate) in system.lines().iter().zip(rates) {
        decays[line.upper] = true;
        pumped_per_s[line.lower] += rate.up_per_s;
    }
    let (mut stranded, mut contested) = (0.0, 0.0);
    for (i, x) in populations.iter().enumerate().skip(1) {
        if decays[i] {
            continue;
        }
        stranded += x;
        let decay_per_s = M1_PER_S_CM3 * system.levels()[i].energy_cm1.powi(3);
        if decay_per_s > MATTERS * pumped_per_s[i] {
            contested += x;
        }
    }
    (stranded, contested)
}

/// Caveats of one solution.
pub(super) fn doubts(system: &LevelSystem, dropped: &[Dropped], contested: f64) -> Vec<Caveat> {
    let species = system.species();
    let mut caveats = Vec::new();
    if contested > CONTESTED_SHARE {
        caveats.push(Caveat::Other {
            code: "levels-without-decay",
            text: format!(
                "{species}: {:.0} % of the atoms sit in excited levels without a tabulated way down, where an untabulated decay could compete with sunlight; lines from those levels may be too bright and the others too faint by that share",
                100.0 * contested
            ),
        });
    }
    let traps: Vec<&str> = dropped
        .iter()
        .filter(|d| d.trap)
        .map(|d| system.levels()[d.level].label.as_str())
        .collect();
    if !traps.is_empty() {
        caveats.push(Caveat::Other {
            code: "levels-without-return",
            text: format!(
                "{species}: levels that atoms fall into and cannot leave were left out: {}",
                traps.join(", ")
            ),
        });
    }
    caveats
}

/// A caveat when the relaxation takes more than a third of the time atoms are in view.
pub(super) fn slow(species: &Species, relaxation_s: f64, transit_s: f64) -> Option<Caveat> {
    (relaxation_s > SLOW_SHARE * transit_s).then(|| Caveat::Other {
        code: "not-in-equilibrium",
        text: format!(
            "{species}: the levels need about {relaxation_s:.0} s of sunlight to reach equilibrium, but atoms cross the aperture in about {transit_s:.0} s; the g of equilibrium does not hold"
        ),
    })
}
