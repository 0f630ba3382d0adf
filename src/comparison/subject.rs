//! The ratio that is compared.

use crate::ground::Species;
use crate::ratio::{Basis, Interval};
use crate::standing::{ScatterRule, weighted_mean};
use rand::SeedableRng;
use rand_distr::{Distribution as _, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

/// Draws behind a percentile.
const DRAWS: usize = 4_000;
/// Least error of log10 ratio, dex: a ratio given without error.
const LEAST_SIGMA_DEX: f64 = 1e-6;

/// What is known of a ratio.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum SubjectValue {
    /// Median and ends of the 68.3 % interval, linear, positive.
    Measured {
        /// Median.
        median: f64,
        /// 15.87 % point.
        low: f64,
        /// 84.13 % point.
        high: f64,
    },
    /// The ratio is below this.
    Upper(f64),
    /// The ratio is above this.
    Lower(f64),
}

/// One ratio of one comet at one date.
#[derive(Clone, Debug, PartialEq)]
pub struct Subject {
    /// The comet.
    pub label: String,
    /// Date as given; empty when not known.
    pub date: String,
    /// Numerator.
    pub of: Species,
    /// Denominator.
    pub to: Species,
    /// Production rates or columns.
    pub basis: Basis,
    /// Heliocentric distance, au.
    pub r_h_au: Option<f64>,
    /// The ratio.
    pub value: SubjectValue,
}

impl SubjectValue {
    /// Median or limit.
    pub fn main(&self) -> f64 {
        match *self {
            Self::Measured { median, .. } => median,
            Self::Upper(v) | Self::Lower(v) => v,
        }
    }

    /// log10 of a measured value with its errors down and up, dex. A lower end that is not positive
    /// counts as one decade down.
    pub fn log10(&self) -> Option<(f64, f64, f64)> {
        let Self::Measured { median, low, high } = *self else {
            return None;
        };
        let centre = median.log10();
        let down = if low > 0.0 { centre - low.log10() } else { 1.0 };
        let up = high.log10() - centre;
        Some((centre, down.max(0.0), up.max(0.0)))
    }

    /// Mean of the errors down and up, dex; 0 for limits.
    pub fn sigma_dex(&self) -> f64 {
        self.log10().map_or(0.0, |(_, down, up)| 0.5 * (down + up))
    }

    /// Random log10 ratios: a normal distribution on each side of the median, each side with its own
    /// width and half of the probability, so that the given quantiles are met.
    pub fn log10_draws(&self, seed: u64) -> Vec<f64> {
        let Some((centre, down, up)) = self.log10() else {
            return Vec::new();
        };
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed ^ 0xc0_4a6e);
        (0..DRAWS)
            .map(|_| {
                let z: f64 = StandardNormal.sample(&mut rng);
                centre + z * if z < 0.0 { down } else { up }
            })
            .collect()
    }

    /// Median and intervals as drawn in figures.
    pub fn interval(&self) -> Option<Interval> {
        let (c, down, up) = self.log10()?;
        let at = |d: f64| 10f64.powf(c + d);
        Some(Interval {
            median: at(0.0),
            low68: at(-down),
            high68: at(up),
            low95: at(-2.0 * down),
            high95: at(2.0 * up),
        })
    }
}

/// One value for a comet seen on several dates. Values before limits: the weighted mean of log10
/// with an intrinsic scatter (Paule & Mandel), its 68.3 % interval being the error of the mean but
/// never less than the best date's error, because g-factors, scale lengths and calibration are common
/// to all dates and do not average out; of limits only, the tightest. The distance is the geometric mean of those used. `None` for an empty
/// slice; the scatter is that between the dates, dex, 0 for one date.
pub fn series(dates: &[&Subject]) -> Option<(SubjectValue, Option<f64>, f64)> {
    let measured: Vec<&&Subject> = dates.iter().filter(|s| s.value.log10().is_some()).collect();
    let used: Vec<&&Subject> = if measured.is_empty() {
        tightest(dates).into_iter().collect()
    } else {
        measured
    };
    let first = used.first()?;
    let distances: Vec<f64> = used.iter().filter_map(|s| s.r_h_au).collect();
    let mean_ln = distances.iter().map(|r| r.ln()).sum::<f64>() / distances.len() as f64;
    let r_h_au = (!distances.is_empty()).then(|| mean_ln.exp());
    if used.len() == 1 {
        return Some((first.value, r_h_au, 0.0));
    }
    let data: Vec<(f64, f64)> = used
        .iter()
        .filter_map(|s| s.value.log10())
        .map(|(c, down, up)| (c, (0.5 * (down + up)).max(LEAST_SIGMA_DEX)))
        .collect();
    let mean = weighted_mean(&data, ScatterRule::PauleMandel)?;
    let least = data.iter().map(|d| d.1).fold(f64::INFINITY, f64::min);
    let sigma = mean.sigma.max(least);
    let at = |d: f64| 10f64.powf(mean.mean + d);
    let value = SubjectValue::Measured {
        median: at(0.0),
        low: at(-sigma),
        high: at(sigma),
    };
    Some((value, r_h_au, mean.scatter))
}

fn tightest<'a, 's>(dates: &'a [&'s Subject]) -> Option<&'a &'s Subject> {
    // Upper and lower limits of one comet cannot be joined into one; the upper ones are taken.
    let upper = dates
        .iter()
        .filter(|s| matches!(s.value, SubjectValue::Upper(_)));
    let lower = dates
        .iter()
        .filter(|s| matches!(s.value, SubjectValue::Lower(_)));
    upper
        .min_by(|a, b| a.value.main().total_cmp(&b.value.main()))
        .or_else(|| lower.max_by(|a, b| a.value.main().total_cmp(&b.value.main())))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn subject(value: SubjectValue, r: f64) -> Subject {
        Subject {
            label: "C/2031 A1".into(),
            date: String::new(),
            of: Species::new("CO2"),
            to: Species::new("H2O"),
            basis: Basis::Production,
            r_h_au: Some(r),
            value,
        }
    }

    #[test]
    fn dates_are_joined_and_limits_stand_back() {
        let at = |m: f64| SubjectValue::Measured {
            median: m,
            low: m / 1.1,
            high: m * 1.1,
        };
        let (a, b) = (subject(at(0.1), 1.0), subject(at(0.4), 4.0));
        let limit = subject(SubjectValue::Upper(0.3), 9.0);
        let (value, r, scatter) = series(&[&a, &limit, &b]).expect("a series");
        assert!((value.main() - 0.2).abs() < 1e-9 && scatter > 0.3);
        assert!((r.expect("a distance") - 2.0).abs() < 1e-9);
        let tighter = subject(SubjectValue::Upper(0.2), 9.0);
        assert_eq!(
            series(&[&limit, &tighter]).expect("a limit").0,
            tighter.value
        );
        assert!(series(&[]).is_none());
    }

    #[test]
    fn draws_meet_the_quantiles() {
        let v = SubjectValue::Measured {
            median: 1.0,
            low: 0.5,
            high: 1.25,
        };
        let i = Interval::of(v.log10_draws(1)).expect("draws");
        assert!((i.low68 - 0.5f64.log10()).abs() < 0.02, "{i:?}");
        assert!((i.high68 - 1.25f64.log10()).abs() < 0.01, "{i:?}");
    }
}
