//! One column from the columns of many lines.

use crate::ground::Measured;

/// Tuning constant of the biweight: 95 % efficient for normal errors (Beaton & Tukey 1974,
/// Technometrics 16, 147).
const TUNING: f64 = 4.685;
const ROUNDS: usize = 200;
/// Median absolute deviation to standard deviation of a normal distribution.
const SIGMA_PER_MAD: f64 = 1.482_602_218_505_602;

/// Column of one feature: value, error of its flux, relative error of its g.
#[derive(Clone, Copy, Debug)]
pub(super) struct Column {
    pub value: f64,
    pub flux_sigma: f64,
    pub g_relative_sigma: f64,
}

impl Column {
    /// Full error if the true column is `common`: the error of g acts on the light that is expected,
    /// not on what was measured, or bright outliers would excuse themselves.
    pub(super) fn sigma(&self, common: f64) -> f64 {
        self.flux_sigma
            .hypot(self.g_relative_sigma * common.max(0.0))
    }
}

/// A mean and what it rests on.
#[derive(Clone, Debug)]
pub(super) struct Mean {
    /// Mean and its formal error.
    pub column: Measured,
    /// Weight of every feature; they sum to one.
    pub weights: Vec<f64>,
    /// χ² of the features about the mean over the degrees of freedom; 1 where there are none.
    pub reduced_chi2: f64,
    /// Standard deviation of the features' pulls, at least 1.
    pub scale: f64,
}

/// Mean weighted by the inverse square of the full errors.
pub(super) fn plain_mean(columns: &[Column]) -> Mean {
    let ones = vec![1.0; columns.len()];
    let mut common = median(columns);
    for _ in 0..3 {
        common = weighted(columns, common, &ones).0;
    }
    let (value, weights) = weighted(columns, common, &ones);
    let chi2: f64 = pulls(columns, value).iter().map(|u| u * u).sum();
    let dof = columns.len().saturating_sub(1);
    Mean {
        column: Measured::new(value, formal(columns, value, &weights)),
        weights,
        reduced_chi2: if dof > 0 { chi2 / dof as f64 } else { 1.0 },
        scale: 1.0,
    }
}

/// Mean from which discordant features are taken out by degrees (Tukey's biweight, started at the
/// weighted median): weight (1 − (u/c s)²)² σ⁻² with the pull u, c = 4.685 and s the scatter of the
/// pulls from their median absolute value, at least 1. The same input gives the same bits.
pub(super) fn robust_mean(columns: &[Column]) -> Mean {
    let mut value = median(columns);
    let mut biweights = vec![1.0; columns.len()];
    let mut scale = 1.0;
    for _ in 0..ROUNDS {
        let u = pulls(columns, value);
        let mut sizes: Vec<f64> = u.iter().map(|u| u.abs()).collect();
        sizes.sort_by(f64::total_cmp);
        scale = (SIGMA_PER_MAD * middle(&sizes)).max(1.0);
        biweights = u.iter().map(|u| biweight(u / scale)).collect();
        let next = weighted(columns, value, &biweights).0;
        let settled = (next - value).abs() <= 1e-12 * value.abs();
        value = next;
        if settled {
            break;
        }
    }
    let (_, weights) = weighted(columns, value, &biweights);
    let chi2: f64 = pulls(columns, value)
        .iter()
        .zip(&biweights)
        .map(|(u, w)| w * u * u)
        .sum();
    let count = biweights.iter().sum::<f64>() - 1.0;
    Mean {
        column: Measured::new(value, formal(columns, value, &weights)),
        weights,
        reduced_chi2: if count > 0.0 {
            chi2 / count / kept_square()
        } else {
            1.0
        },
        scale,
    }
}

/// Mean of w u² over the mean of w for normal pulls, to second order in 1/c².
fn kept_square() -> f64 {
    let c2 = TUNING * TUNING;
    let square = 1.0 - 6.0 / c2 + 15.0 / (c2 * c2);
    square / (1.0 - 2.0 / c2 + 3.0 / (c2 * c2))
}

fn biweight(u: f64) -> f64 {
    let t = u / TUNING;
    if t.abs() < 1.0 {
        (1.0 - t * t).powi(2)
    } else {
        0.0
    }
}

fn pulls(columns: &[Column], common: f64) -> Vec<f64> {
    columns
        .iter()
        .map(|c| (c.value - common) / c.sigma(common))
        .collect()
}

/// Weighted mean and normalised weights; plain inverse variances where every factor is zero.
fn weighted(columns: &[Column], common: f64, factors: &[f64]) -> (f64, Vec<f64>) {
    let none = factors.iter().all(|f| *f == 0.0);
    let raw: Vec<f64> = columns
        .iter()
        .zip(factors)
        .map(|(c, f)| if none { 1.0 } else { *f } / c.sigma(common).powi(2))
        .collect();
    let sum: f64 = raw.iter().sum();
    let weights: Vec<f64> = raw.iter().map(|w| w / sum).collect();
    let value = columns.iter().zip(&weights).map(|(c, w)| w * c.value).sum();
    (value, weights)
}

fn formal(columns: &[Column], common: f64, weights: &[f64]) -> f64 {
    let one = |(c, w): (&Column, &f64)| (w * c.sigma(common)).powi(2);
    columns.iter().zip(weights).map(one).sum::<f64>().sqrt()
}

/// Weighted median; weights from the flux errors, then from the full errors.
fn median(columns: &[Column]) -> f64 {
    let mut common = 0.0;
    for _ in 0..2 {
        let mut order: Vec<(f64, f64)> = columns
            .iter()
            .map(|c| (c.value, c.sigma(common).powi(-2)))
            .collect();
        order.sort_by(|a, b| a.0.total_cmp(&b.0));
        let half = 0.5 * order.iter().map(|o| o.1).sum::<f64>();
        let mut sum = 0.0;
        for (value, weight) in order {
            sum += weight;
            common = value;
            if sum >= half {
                break;
            }
        }
    }
    common
}

fn middle(sorted: &[f64]) -> f64 {
    let n = sorted.len();
    if n == 0 {
        return 0.0;
    }
    0.5 * (sorted[(n - 1) / 2] + sorted[n / 2])
}

#[cfg(test)]
mod tests {
    use super::*;

    fn columns(values: &[f64]) -> Vec<Column> {
        values
            .iter()
            .map(|v| Column {
                value: *v,
                flux_sigma: 0.1,
                g_relative_sigma: 0.0,
            })
            .collect()
    }

    #[test]
    fn like_lines_give_the_mean_and_its_error() {
        let same = columns(&[0.9, 1.0, 1.1, 1.0]);
        let plain = plain_mean(&same);
        assert!((plain.column.value - 1.0).abs() < 1e-12);
        assert!((plain.column.sigma - 0.05).abs() < 1e-12);
        // Two lines one sigma off, three degrees of freedom.
        assert!((plain.reduced_chi2 - 2.0 / 3.0).abs() < 1e-9);
        let robust = robust_mean(&same);
        assert!((robust.column.value - 1.0).abs() < 1e-9);
    }

    #[test]
    fn a_wrong_line_moves_the_plain_mean_alone() {
        let one_wrong = columns(&[0.9, 1.0, 1.1, 1.0, 3.0]);
        assert!((plain_mean(&one_wrong).column.value - 1.4).abs() < 1e-9);
        let robust = robust_mean(&one_wrong);
        assert!((robust.column.value - 1.0).abs() < 1e-9);
        assert_eq!(robust.weights[4], 0.0);
        assert!(robust.reduced_chi2 < 1.0);
        assert!(plain_mean(&one_wrong).reduced_chi2 > 50.0);
    }

    #[test]
    fn errors_of_g_act_on_the_common_column() {
        let mut lines = columns(&[1.0, 1.0, 1.0, 30.0]);
        for l in &mut lines {
            l.g_relative_sigma = 0.3;
        }
        assert!((robust_mean(&lines).column.value - 1.0).abs() < 1e-6);
    }

    #[test]
    fn normal_pulls_give_a_reduced_chi2_near_one() {
        // Quantiles of the normal distribution as a sample without chance.
        use statrs::distribution::{ContinuousCDF, Normal};
        let normal = Normal::standard();
        let n = 400;
        let values: Vec<f64> = (0..n)
            .map(|i| 10.0 + 0.1 * normal.inverse_cdf((f64::from(i) + 0.5) / f64::from(n)))
            .collect();
        let robust = robust_mean(&columns(&values));
        assert!(
            (robust.reduced_chi2 - 1.0).abs() < 0.02,
            "{}",
            robust.reduced_chi2
        );
        assert!((robust.column.sigma / 0.005 - 1.0).abs() < 0.05);
    }
}
