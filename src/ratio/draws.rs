//! The shared draws: one random universe per row, the same for every species and ratio.
//!
//! In each draw the band fluxes of a spectrum come from one multivariate normal distribution with
//! the fit's full covariance, or have the form the fit gives them (sides of a profile, refits of a
//! bootstrap, places of walkers); every other factor (flux calibration per spectrum, g per band,
//! scale lengths per species, the expansion speed common to all) is log-normal with median one,
//! exp(σ z), so that it cannot be negative. Whatever two species share is drawn once and cancels
//! in their ratio.

use crate::coma::{Lengths, ResidenceGrid};
use crate::ground::{Error, Measured, Result, Species};
use nalgebra::{DMatrix, DVector};
use ndarray::Array2;
use rand::{RngExt, SeedableRng};
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

/// How many draws, from which seed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct DrawSettings {
    /// Number of draws, 100 to 10 million.
    pub count: usize,
    /// Seed of the generator (xoshiro256++).
    pub seed: u64,
}

impl DrawSettings {
    /// Checks the count.
    ///
    /// # Errors
    /// A count outside 100 to 10 million.
    pub fn checked(self) -> Result<Self> {
        if !(100..=10_000_000).contains(&self.count) {
            return Err(
                Error::plan(format!("draws = {} is outside 100 to 10000000", self.count))
                    .remedy("10000 draws give a 68 % interval to about 2 % of its width"),
            );
        }
        Ok(self)
    }
}

/// Fluxes of one spectrum.
#[derive(Clone, Debug)]
pub struct FluxBlock {
    /// Band fluxes, erg s⁻¹ cm⁻².
    pub flux_erg_s_cm2: Vec<f64>,
    /// Their covariance.
    pub covariance: DMatrix<f64>,
    /// Relative error of the flux calibration, common to the spectrum's bands.
    pub calibration_sigma: f64,
    /// Distances below and above the flux where they differ, one per band or none at all.
    pub sided: Vec<Option<(f64, f64)>>,
    /// Drawn fluxes that stand for the normal distribution: bands, and one row per draw.
    pub sampled: Vec<(Vec<usize>, DMatrix<f64>)>,
}

impl FluxBlock {
    /// Fluxes of one draw from the normal deviate's, where errors have another form.
    fn shaped(&self, mut drawn: DVector<f64>, rng: &mut Xoshiro256PlusPlus) -> DVector<f64> {
        for (b, sides) in self.sided.iter().enumerate() {
            if let Some((below, above)) = sides {
                let best = self.flux_erg_s_cm2[b];
                let off = (drawn[b] - best) / self.covariance[(b, b)].sqrt();
                drawn[b] = best + off * if off < 0.0 { below } else { above };
            }
        }
        for (bands, rows) in &self.sampled {
            let row = rng.random_range(0..rows.nrows());
            for (column, b) in bands.iter().enumerate() {
                drawn[*b] = rows[(row, column)];
            }
        }
        drawn
    }
}

/// One band's contribution to a species.
#[derive(Clone, Debug)]
pub struct BandShare {
    /// Index of the spectrum.
    pub block: usize,
    /// Index of the band in that spectrum.
    pub band: usize,
    /// Molecules in the aperture per unit flux, cm² s erg⁻¹.
    pub molecules_per_flux: f64,
    /// Relative error of g.
    pub g_sigma: f64,
}

/// Lifetimes of a species in the coma model.
#[derive(Clone, Debug)]
pub struct Lifetimes {
    /// Residence time M/Q as a function of lengths and speed.
    pub grid: ResidenceGrid,
    /// Scale lengths at the comet.
    pub lengths: Lengths,
    /// Relative error of the parent scale length.
    pub parent_sigma: f64,
    /// Relative error of the daughter scale length.
    pub daughter_sigma: f64,
    /// Expansion speed, km s⁻¹.
    pub speed_km_s: f64,
    /// True when the lengths were made from the speed (length = speed × lifetime) and move with it.
    pub lengths_follow_speed: bool,
}

/// A species: which bands, and the way to a production rate.
#[derive(Clone, Debug)]
pub struct SpeciesPlan {
    /// The species.
    pub species: Species,
    /// Its bands, at least one.
    pub bands: Vec<BandShare>,
    /// Weights of the bands, where they are not to be the inverse variances; they sum to one.
    pub weights: Option<Vec<f64>>,
    /// Factor ≥ 1 on the error of the species' molecules, from the scatter of its lines.
    pub error_factor: f64,
    /// Coma model; `None` leaves the production rate open.
    pub lifetimes: Option<Lifetimes>,
}

/// Best values and draws of molecules and production rates. Columns are species.
#[derive(Clone, Debug)]
pub struct Draws {
    /// Species in the order of the columns.
    pub species: Vec<Species>,
    /// Molecules in the aperture, best value and the error from the fit alone.
    pub molecules: Vec<Measured>,
    /// Best production rate, s⁻¹; NaN where the coma model is open.
    pub production_per_s: Vec<f64>,
    /// Draws of the molecules, draws × species.
    pub molecule_draws: Array2<f64>,
    /// The part of each draw that multiplies the flux: calibration and g.
    pub factor_draws: Array2<f64>,
    /// Draws of the residence time M/Q in s, draws × species; NaN where open.
    pub residence_draws_s: Array2<f64>,
    /// Seed, for whoever draws on from here.
    pub seed: u64,
}

impl Draws {
    /// Column of a species.
    pub fn column(&self, species: &Species) -> Option<usize> {
        self.species.iter().position(|s| s == species)
    }

    /// Draws of a production rate.
    pub fn production_draws(&self, column: usize) -> impl Iterator<Item = f64> + '_ {
        self.molecule_draws
            .column(column)
            .into_iter()
            .zip(self.residence_draws_s.column(column))
            .map(|(m, t)| m / t)
    }
}

/// Draws everything.
///
/// # Errors
/// A covariance that is not positive semi-definite.
pub fn draw(
    blocks: &[FluxBlock],
    plans: &[SpeciesPlan],
    speed_sigma: f64,
    settings: DrawSettings,
) -> Result<Draws> {
    let settings = settings.checked()?;
    let roots = blocks.iter().map(root).collect::<Result<Vec<_>>>()?;
    let weights: Vec<Vec<f64>> = plans.iter().map(|p| band_weights(blocks, p)).collect();
    let extra: Vec<f64> = plans
        .iter()
        .zip(&weights)
        .map(|(p, w)| scatter_molecules(blocks, p, w))
        .collect();
    let shape = (settings.count, plans.len());
    let mut out = Draws {
        species: plans.iter().map(|p| p.species.clone()).collect(),
        molecules: plans
            .iter()
            .zip(&weights)
            .zip(&extra)
            .map(|((p, w), extra)| {
                let found = combine(blocks, p, w);
                Measured::new(found.value, found.sigma.hypot(*extra))
            })
            .collect(),
        production_per_s: Vec::new(),
        molecule_draws: Array2::zeros(shape),
        factor_draws: Array2::zeros(shape),
        residence_draws_s: Array2::from_elem(shape, f64::NAN),
        seed: settings.seed,
    };
    out.production_per_s = plans
        .iter()
        .zip(&out.molecules)
        .map(|(p, m)| {
            p.lifetimes.as_ref().map_or(f64::NAN, |l| {
                m.value / l.grid.residence_s(&l.lengths, l.speed_km_s)
            })
        })
        .collect();
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(settings.seed);
    for row in 0..settings.count {
        let universe = Universe::new(blocks, &roots, speed_sigma, &mut rng);
        for (column, (plan, weight)) in plans.iter().zip(&weights).enumerate() {
            let (mut molecules, factor) = universe.molecules(plan, weight, &mut rng);
            if extra[column] > 0.0 {
                molecules += extra[column] * normal(&mut rng);
            }
            out.molecule_draws[(row, column)] = molecules;
            out.factor_draws[(row, column)] = factor;
            if let Some(lifetimes) = &plan.lifetimes {
                out.residence_draws_s[(row, column)] = universe.residence_s(lifetimes, &mut rng);
            }
        }
    }
    Ok(out)
}

/// Lower-triangular-like square root of a covariance through its eigenvalues, which allows a
/// semi-definite one.
fn root(block: &FluxBlock) -> Result<DMatrix<f64>> {
    let n = block.flux_erg_s_cm2.len();
    let sigma: Vec<f64> = (0..n).map(|i| block.covariance[(i, i)].sqrt()).collect();
    if sigma.iter().any(|s| !(s.is_finite() && *s > 0.0)) {
        return Err(Error::compute(
            "a band flux has no finite error; its ratio cannot be drawn",
        ));
    }
    let correlation = DMatrix::from_fn(n, n, |a, b| {
        block.covariance[(a, b)] / (sigma[a] * sigma[b])
    });
    let eigen = correlation.symmetric_eigen();
    if eigen.eigenvalues.iter().any(|v| *v < -1e-8) {
        return Err(Error::compute(
            "the covariance of the band fluxes is not positive",
        ));
    }
    let mut out = eigen.eigenvectors;
    for (c, value) in eigen.eigenvalues.iter().enumerate() {
        for r in 0..n {
            out[(r, c)] *= value.max(0.0).sqrt() * sigma[r];
        }
    }
    Ok(out)
}

/// Weights of a species' bands: inverse variance of the molecules each gives, from flux error and
/// g error; they sum to one and stay the same in all draws.
fn band_weights(blocks: &[FluxBlock], plan: &SpeciesPlan) -> Vec<f64> {
    if let Some(weights) = &plan.weights {
        return weights.clone();
    }
    let inverse: Vec<f64> = plan
        .bands
        .iter()
        .map(|share| 1.0 / molecule_variance(blocks, share))
        .collect();
    let sum: f64 = inverse.iter().sum();
    inverse.iter().map(|w| w / sum).collect()
}

/// Variance of the molecules that one band gives, from flux error and g error.
fn molecule_variance(blocks: &[FluxBlock], share: &BandShare) -> f64 {
    let block = &blocks[share.block];
    let flux_variance = block.covariance[(share.band, share.band)];
    let g_error = block.flux_erg_s_cm2[share.band] * share.g_sigma;
    (flux_variance + g_error * g_error) * share.molecules_per_flux.powi(2)
}

/// Standard deviation that, added in square to the formal one, multiplies it by the plan's factor.
fn scatter_molecules(blocks: &[FluxBlock], plan: &SpeciesPlan, weights: &[f64]) -> f64 {
    let formal: f64 = plan
        .bands
        .iter()
        .zip(weights)
        .map(|(share, w)| w * w * molecule_variance(blocks, share))
        .sum();
    let factor = plan.error_factor;
    (formal * (factor * factor - 1.0).max(0.0)).sqrt()
}

fn combine(blocks: &[FluxBlock], plan: &SpeciesPlan, weights: &[f64]) -> Measured {
    let slope = |i: usize| weights[i] * plan.bands[i].molecules_per_flux;
    let mut value = 0.0;
    let mut variance = 0.0;
    for (i, a) in plan.bands.iter().enumerate() {
        value += slope(i) * blocks[a.block].flux_erg_s_cm2[a.band];
        for (j, b) in plan.bands.iter().enumerate() {
            if a.block == b.block {
                variance += slope(i) * slope(j) * blocks[a.block].covariance[(a.band, b.band)];
            }
        }
    }
    Measured::new(value, variance.sqrt())
}

/// One draw of everything that several species share.
struct Universe {
    fluxes: Vec<DVector<f64>>,
    calibration: Vec<f64>,
    speed: f64,
}

impl Universe {
    fn new(
        blocks: &[FluxBlock],
        roots: &[DMatrix<f64>],
        speed_sigma: f64,
        rng: &mut Xoshiro256PlusPlus,
    ) -> Self {
        let fluxes = blocks
            .iter()
            .zip(roots)
            .map(|(block, root)| {
                let n = block.flux_erg_s_cm2.len();
                let z = DVector::from_fn(n, |_, _| normal(rng));
                let drawn = DVector::from_column_slice(&block.flux_erg_s_cm2) + root * z;
                block.shaped(drawn, rng)
            })
            .collect();
        let calibration = blocks
            .iter()
            .map(|b| factor(b.calibration_sigma, rng))
            .collect();
        Self {
            fluxes,
            calibration,
            speed: factor(speed_sigma, rng),
        }
    }

    /// Molecules of a species and the factor that multiplied its flux.
    fn molecules(
        &self,
        plan: &SpeciesPlan,
        weights: &[f64],
        rng: &mut Xoshiro256PlusPlus,
    ) -> (f64, f64) {
        let (mut molecules, mut mean_factor) = (0.0, 0.0);
        for (share, weight) in plan.bands.iter().zip(weights) {
            let f = self.calibration[share.block] * factor(share.g_sigma, rng);
            let flux = self.fluxes[share.block][share.band];
            molecules += weight * share.molecules_per_flux * flux * f;
            mean_factor += weight * f;
        }
        (molecules, mean_factor)
    }

    fn residence_s(&self, lifetimes: &Lifetimes, rng: &mut Xoshiro256PlusPlus) -> f64 {
        let follow = if lifetimes.lengths_follow_speed {
            self.speed
        } else {
            1.0
        };
        let parent = factor(lifetimes.parent_sigma, rng) * follow;
        let daughter = factor(lifetimes.daughter_sigma, rng) * follow;
        let lengths = Lengths {
            parent_km: lifetimes.lengths.parent_km * parent,
            daughter_km: lifetimes.lengths.daughter_km.map(|d| d * daughter),
        };
        lifetimes
            .grid
            .residence_s(&lengths, lifetimes.speed_km_s * self.speed)
    }
}

fn normal(rng: &mut Xoshiro256PlusPlus) -> f64 {
    StandardNormal.sample(rng)
}

fn factor(sigma: f64, rng: &mut Xoshiro256PlusPlus) -> f64 {
    (sigma * normal(rng)).exp()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn plan(weights: Option<Vec<f64>>, error_factor: f64) -> SpeciesPlan {
        let share = |band| BandShare {
            block: 0,
            band,
            molecules_per_flux: 2.0,
            g_sigma: 0.0,
        };
        SpeciesPlan {
            species: Species::new("Fe I"),
            bands: vec![share(0), share(1)],
            weights,
            error_factor,
            lifetimes: None,
        }
    }

    fn drawn(plan: SpeciesPlan) -> (Measured, f64) {
        let block = FluxBlock {
            flux_erg_s_cm2: vec![10.0, 12.0],
            covariance: DMatrix::from_diagonal_element(2, 2, 1.0),
            calibration_sigma: 0.0,
            sided: vec![],
            sampled: vec![],
        };
        let settings = DrawSettings {
            count: 40_000,
            seed: 3,
        };
        let draws = draw(&[block], &[plan], 0.0, settings).unwrap();
        let column = draws.molecule_draws.column(0);
        let mean = column.mean().unwrap();
        let variance = column.iter().map(|m| (m - mean).powi(2)).sum::<f64>() / 39_999.0;
        (draws.molecules[0], variance.sqrt())
    }

    #[test]
    fn scatter_multiplies_the_error_and_leaves_the_value() {
        // Equal weights: 2 × 11 ± 2/√2.
        let (plain, spread) = drawn(plan(None, 1.0));
        assert!((plain.value - 22.0).abs() < 1e-12 && (spread / 2f64.sqrt() - 1.0).abs() < 0.02);
        let (wide, spread) = drawn(plan(None, 3.0));
        assert!((wide.value - 22.0).abs() < 1e-12);
        assert!((wide.sigma / plain.sigma - 3.0).abs() < 1e-12);
        assert!((spread / wide.sigma - 1.0).abs() < 0.02);
    }

    #[test]
    fn given_weights_are_used() {
        let (found, _) = drawn(plan(Some(vec![1.0, 0.0]), 1.0));
        assert!((found.value - 20.0).abs() < 1e-12 && (found.sigma - 2.0).abs() < 1e-12);
    }
}
