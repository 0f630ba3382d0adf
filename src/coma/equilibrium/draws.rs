//! How the errors of transition probabilities and sunlight reach the efficiencies.

use super::field::{Conditions, SolarField};
use super::network::rates;
use super::solve::{occupations, populations};
use crate::atomic::LevelSystem;
use crate::ground::{Error, Result};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use rayon::prelude::*;

/// Efficiencies under drawn errors.
#[derive(Clone, Debug)]
pub struct Spread {
    /// One row per draw, one column per line of the level system, photons s⁻¹ per atom. Rows share
    /// their draws between lines, so that ratios of lines keep their correlation.
    pub g_photons_s: Vec<Vec<f64>>,
}

/// Fewest draws that give a standard deviation worth having.
const FEWEST_DRAWS: usize = 16;

/// Solves the equilibrium again and again with every A and every n̄ multiplied by its own log-normal
/// factor: σ(ln A) by quality letter, σ of the sunlight from its level and resolution. Neighbouring
/// lines are drawn independently although an error of the solar level is common to them; that part
/// (1–3 % above 3000 Å) is small beside the rest. Reproducible to the bit for one seed, whatever
/// the number of threads.
///
/// # Errors
/// Impossible conditions; fewer than 16 draws.
pub fn spread(
    system: &LevelSystem,
    field: &SolarField,
    at: &Conditions,
    draws: usize,
    seed: u64,
) -> Result<Spread> {
    at.check()?;
    if draws < FEWEST_DRAWS {
        return Err(
            Error::plan(format!("{draws} draws are too few for an error bar"))
                .remedy(format!("use at least {FEWEST_DRAWS}; 100 is usual")),
        );
    }
    let occupation = occupations(system, field, at);
    let solar: Vec<f64> = system
        .lines()
        .iter()
        .map(|l| field.relative_sigma(l.wavelength_vacuum_aa, at))
        .collect();
    let mut stream = Xoshiro256PlusPlus::seed_from_u64(seed);
    let streams: Vec<Xoshiro256PlusPlus> = (0..draws)
        .map(|_| {
            let own = stream.clone();
            stream.jump();
            own
        })
        .collect();
    let g_photons_s = streams
        .into_par_iter()
        .map(|mut random| one_draw(system, &occupation, &solar, &mut random))
        .collect::<Result<Vec<_>>>()?;
    Ok(Spread { g_photons_s })
}

fn one_draw(
    system: &LevelSystem,
    occupation: &[f64],
    solar: &[f64],
    random: &mut Xoshiro256PlusPlus,
) -> Result<Vec<f64>> {
    let mut factor = |sigma: f64| {
        let z: f64 = StandardNormal.sample(random);
        (sigma * z).exp()
    };
    let lines = system.lines();
    let a_per_s: Vec<f64> = lines
        .iter()
        .map(|l| l.einstein_a_per_s * factor(l.sigma_ln_a))
        .collect();
    let occupation: Vec<f64> = occupation
        .iter()
        .zip(solar)
        .map(|(n, sigma)| n * factor(*sigma))
        .collect();
    let solved = populations(system, &rates(system, &occupation, &a_per_s))?;
    Ok(lines
        .iter()
        .zip(&a_per_s)
        .map(|(l, a)| solved.populations[l.upper] * a)
        .collect())
}

impl Spread {
    /// Relative standard deviation of one line: that of ln g over the draws. Zero for a line that
    /// never shines.
    pub fn relative_sigma(&self, line: usize) -> f64 {
        let logs: Vec<f64> = self
            .g_photons_s
            .iter()
            .map(|g| g[line])
            .filter(|g| *g > 0.0)
            .map(f64::ln)
            .collect();
        if logs.len() < 2 {
            return 0.0;
        }
        #[expect(clippy::cast_precision_loss, reason = "a count of draws")]
        let count = logs.len() as f64;
        let mean = logs.iter().sum::<f64>() / count;
        let squares: f64 = logs.iter().map(|l| (l - mean).powi(2)).sum();
        (squares / (count - 1.0)).sqrt()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::atomic::{atom, sun};
    use crate::ground::Species;

    #[test]
    fn sodium_is_known_as_well_as_its_a_and_the_sun() {
        let sodium = atom(&Species::new("Na I"), None).unwrap();
        let field = SolarField::sun(sun(None).unwrap());
        let at = Conditions {
            heliocentric_km_s: 40.0,
            ..Conditions::UNIT
        };
        let d2 = sodium
            .lines()
            .iter()
            .position(|l| l.lower == 0 && l.upper == 2)
            .unwrap();
        let expected = sodium.lines()[d2]
            .sigma_ln_a
            .hypot(field.relative_sigma(sodium.lines()[d2].wavelength_vacuum_aa, &at));
        let spread_1 = spread(&sodium, &field, &at, 400, 7).unwrap();
        let found = spread_1.relative_sigma(d2);
        assert!((found / expected - 1.0).abs() < 0.2, "{found} {expected}");
        let spread_2 = spread(&sodium, &field, &at, 400, 7).unwrap();
        assert_eq!(spread_1.g_photons_s, spread_2.g_photons_s);
        assert!(spread(&sodium, &field, &at, 3, 7).is_err());
    }
}
