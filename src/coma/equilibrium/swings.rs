//! Efficiencies against heliocentric velocity.

use super::field::{Conditions, SolarField};
use super::solve::Equilibrium;
use crate::atomic::LevelSystem;
use crate::ground::Result;
use rayon::prelude::*;

/// Solves the equilibrium at each velocity (km s⁻¹, positive receding) and keeps what `take` takes
/// from it – a line, a band, anything – so that thousands of lines need not be stored per velocity.
/// `at.heliocentric_km_s` is not used. Velocities are shared out over the processor's cores.
///
/// # Errors
/// Those of [`Equilibrium::solve`], for the first velocity that has one.
pub fn swings_curve<T: Send>(
    system: &LevelSystem,
    field: &SolarField,
    at: &Conditions,
    velocities_km_s: &[f64],
    take: impl Fn(&Equilibrium) -> T + Sync,
) -> Result<Vec<T>> {
    velocities_km_s
        .par_iter()
        .map(|&heliocentric_km_s| {
            let there = Conditions {
                heliocentric_km_s,
                ..*at
            };
            Equilibrium::solve(system, field, &there).map(|e| take(&e))
        })
        .collect()
}
