//! log ratio against log heliocentric distance, with limits and an intrinsic scatter.
//!
//! y = a + b (log10 r_h − x₀) + N(0, s²) + N(0, σᵢ²), x₀ the mean of log10 r_h. Values enter the
//! likelihood by their density, limits by the probability beyond them (Tobin 1958, Econometrica 26,
//! 24). Maximised by the simplex of Nelder & Mead (1965) over a, b, ln s; errors from the inverse
//! of the observed information (numerical second derivatives). The maximum-likelihood scatter is
//! low by about a factor √((n − 2)/n) in small samples; it is given as found.

use super::distribution::Known;
use crate::ground::{Error, Result};
use argmin::core::{CostFunction, Executor, State};
use argmin::solver::neldermead::NelderMead;
use nalgebra::Matrix3;
use statrs::distribution::{ContinuousCDF, Normal};

/// Fewest values that carry a trend.
pub const FEWEST_FOR_TREND: usize = 6;
const MOST_STEPS: u64 = 4_000;
/// Least ln s, keeps the likelihood finite when all points lie on a line.
const LEAST_LN_SCATTER: f64 = -12.0;

/// One comet of a trend.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrendPoint {
    /// log10 of the heliocentric distance in au (or another abscissa).
    pub x: f64,
    /// log10 of the ratio or limit.
    pub y: f64,
    /// Error of y, dex; 0 where not published.
    pub sigma_dex: f64,
    /// Value or limit.
    pub known: Known,
}

/// A fitted line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Trend {
    /// Points, values and limits.
    pub points: usize,
    /// Abscissa at which `level` holds, log10 au.
    pub at_x: f64,
    /// y at `at_x`, dex.
    pub level: f64,
    /// Its standard error.
    pub level_sigma: f64,
    /// Slope, dex per dex: the exponent of the power law.
    pub slope: f64,
    /// Its standard error.
    pub slope_sigma: f64,
    /// Intrinsic scatter, dex.
    pub scatter: f64,
    /// Natural logarithm of the likelihood.
    pub log_likelihood: f64,
}

impl Trend {
    /// log10 ratio at an abscissa.
    pub fn at(&self, x: f64) -> f64 {
        self.level + self.slope * (x - self.at_x)
    }

    /// Standard error of the line there; level and slope are nearly uncorrelated about the mean.
    pub fn sigma_at(&self, x: f64) -> f64 {
        self.level_sigma.hypot(self.slope_sigma * (x - self.at_x))
    }
}

struct Likelihood<'a> {
    points: &'a [TrendPoint],
    at_x: f64,
}

impl Likelihood<'_> {
    fn minus_log(&self, p: [f64; 3]) -> f64 {
        let scatter = p[2].max(LEAST_LN_SCATTER).exp();
        let unit = Normal::standard();
        let one = |q: &TrendPoint| {
            let size = scatter.hypot(q.sigma_dex);
            let z = (q.y - p[0] - p[1] * (q.x - self.at_x)) / size;
            match q.known {
                Known::Value => 0.5 * z * z + size.ln() + 0.5 * (2.0 * std::f64::consts::PI).ln(),
                Known::Upper => -log_tail(&unit, -z),
                Known::Lower => -log_tail(&unit, z),
            }
        };
        self.points.iter().map(one).sum()
    }

    /// Observed information by central differences.
    fn information(&self, best: [f64; 3]) -> Matrix3<f64> {
        let step = [1e-3, 1e-3, 1e-3];
        Matrix3::from_fn(|i, j| {
            let shifted = |a: f64, b: f64| {
                let mut p = best;
                p[i] += a * step[i];
                p[j] += b * step[j];
                self.minus_log(p)
            };
            let mixed =
                shifted(1.0, 1.0) - shifted(1.0, -1.0) - shifted(-1.0, 1.0) + shifted(-1.0, -1.0);
            mixed / (4.0 * step[i] * step[j])
        })
    }
}

/// ln of the normal probability above z, by its asymptote far out.
fn log_tail(unit: &Normal, z: f64) -> f64 {
    if z < 30.0 {
        unit.sf(z).ln()
    } else {
        -0.5 * z * z - (z * (2.0 * std::f64::consts::PI).sqrt()).ln()
    }
}

impl CostFunction for Likelihood<'_> {
    type Param = Vec<f64>;
    type Output = f64;

    fn cost(&self, p: &Vec<f64>) -> std::result::Result<f64, argmin::core::Error> {
        Ok(self.minus_log([p[0], p[1], p[2]]))
    }
}

/// Fits the line.
///
/// # Errors
/// Fewer than [`FEWEST_FOR_TREND`] values, or all at one distance.
pub fn fit_trend(points: &[TrendPoint]) -> Result<Trend> {
    let values: Vec<&TrendPoint> = points.iter().filter(|p| p.known == Known::Value).collect();
    if values.len() < FEWEST_FOR_TREND {
        return Err(Error::compute(format!(
            "trend with distance: {} values; at least {FEWEST_FOR_TREND} are needed",
            values.len()
        )));
    }
    let count = values.len() as f64;
    let at_x = values.iter().map(|p| p.x).sum::<f64>() / count;
    let mean = values.iter().map(|p| p.y).sum::<f64>() / count;
    let sxx: f64 = values.iter().map(|p| (p.x - at_x).powi(2)).sum();
    let sxy: f64 = values.iter().map(|p| (p.x - at_x) * (p.y - mean)).sum();
    if sxx < 1e-9 {
        return Err(Error::compute(
            "trend with distance: all values lie at one distance",
        ));
    }
    let slope = sxy / sxx;
    let residual = |p: &&TrendPoint| (p.y - mean - slope * (p.x - at_x)).powi(2);
    let scatter = (values.iter().map(residual).sum::<f64>() / count)
        .sqrt()
        .max(1e-3);
    let likelihood = Likelihood { points, at_x };
    let best = maximum(&likelihood, [mean, slope, scatter.ln()])?;
    Ok(described(points.len(), &likelihood, best))
}

fn maximum(likelihood: &Likelihood, mut start: [f64; 3]) -> Result<[f64; 3]> {
    // A simplex can settle early; a second one from its end costs little and confirms the place.
    for size in [0.3, 0.05, 0.01] {
        let mut corners = vec![start.to_vec()];
        for i in 0..3 {
            let mut corner = start.to_vec();
            corner[i] += size;
            corners.push(corner);
        }
        let failed = |e: argmin::core::Error| Error::compute(format!("trend with distance: {e}"));
        let solver = NelderMead::new(corners)
            .with_sd_tolerance(1e-12)
            .map_err(failed)?;
        let problem = Likelihood {
            points: likelihood.points,
            at_x: likelihood.at_x,
        };
        let done = Executor::new(problem, solver)
            .configure(|state| state.max_iters(MOST_STEPS))
            .run()
            .map_err(failed)?;
        if let Some(best) = done.state().get_best_param() {
            start = [best[0], best[1], best[2]];
        }
    }
    Ok(start)
}

fn described(points: usize, likelihood: &Likelihood, best: [f64; 3]) -> Trend {
    let covariance = likelihood.information(best).try_inverse();
    let sigma = |i: usize| {
        covariance.map_or(f64::NAN, |c| {
            let v = c[(i, i)];
            if v > 0.0 { v.sqrt() } else { f64::NAN }
        })
    };
    Trend {
        points,
        at_x: likelihood.at_x,
        level: best[0],
        level_sigma: sigma(0),
        slope: best[1],
        slope_sigma: sigma(1),
        scatter: best[2].max(LEAST_LN_SCATTER).exp(),
        log_likelihood: -likelihood.minus_log(best),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn points() -> Vec<TrendPoint> {
        (0..20)
            .map(|i| {
                let x = 0.05 * f64::from(i);
                let wiggle = if i % 2 == 0 { 0.1 } else { -0.1 };
                TrendPoint {
                    x,
                    y: -1.0 + 2.0 * x + wiggle,
                    sigma_dex: 0.0,
                    known: Known::Value,
                }
            })
            .collect()
    }

    #[test]
    fn without_limits_it_is_least_squares() {
        let p = points();
        let t = fit_trend(&p).expect("a trend");
        let n = p.len() as f64;
        let (mx, my) = (
            p.iter().map(|q| q.x).sum::<f64>() / n,
            p.iter().map(|q| q.y).sum::<f64>() / n,
        );
        let sxx: f64 = p.iter().map(|q| (q.x - mx).powi(2)).sum();
        let slope = p.iter().map(|q| (q.x - mx) * (q.y - my)).sum::<f64>() / sxx;
        assert!((t.slope - slope).abs() < 1e-5, "{t:?} {slope}");
        assert!((t.slope_sigma - t.scatter / sxx.sqrt()).abs() < 1e-4);
        assert!((t.level_sigma - t.scatter / n.sqrt()).abs() < 1e-4);
    }

    #[test]
    fn loose_limits_change_nothing_and_tight_ones_pull() {
        let mut p = points();
        let plain = fit_trend(&p).expect("a trend");
        p.push(TrendPoint {
            x: 0.9,
            y: 9.0,
            sigma_dex: 0.0,
            known: Known::Upper,
        });
        let loose = fit_trend(&p).expect("a trend");
        assert!((loose.slope - plain.slope).abs() < 1e-4);
        p.push(TrendPoint {
            x: 0.9,
            y: 0.2,
            sigma_dex: 0.0,
            known: Known::Upper,
        });
        assert!(fit_trend(&p).expect("a trend").slope < plain.slope - 0.05);
        assert!(fit_trend(&p[..3]).is_err());
    }
}
