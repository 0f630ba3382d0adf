//! Quantiles of draws.

use serde::Serialize;

/// Half of the probability outside ±1σ of a normal distribution.
const TAIL_68: f64 = 0.158_655_253_931_457_05;
/// Half of the probability outside ±2σ of a normal distribution.
const TAIL_95: f64 = 0.022_750_131_948_179_21;

/// Median, 68.3 % and 95.4 % intervals (the one- and two-sigma intervals of a normal distribution).
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Interval {
    /// Median.
    pub median: f64,
    /// 15.87 % point.
    pub low68: f64,
    /// 84.13 % point.
    pub high68: f64,
    /// 2.28 % point.
    pub low95: f64,
    /// 97.72 % point.
    pub high95: f64,
}

impl Interval {
    /// Intervals of a set of draws; `None` when there are none.
    pub fn of(draws: impl IntoIterator<Item = f64>) -> Option<Self> {
        let mut sorted: Vec<f64> = draws.into_iter().collect();
        if sorted.is_empty() {
            return None;
        }
        sorted.sort_by(f64::total_cmp);
        let at = |p: f64| quantile(&sorted, p);
        Some(Self {
            median: at(0.5),
            low68: at(TAIL_68),
            high68: at(1.0 - TAIL_68),
            low95: at(TAIL_95),
            high95: at(1.0 - TAIL_95),
        })
    }

    /// Half the width of the 68.3 % interval.
    pub fn half_width68(&self) -> f64 {
        0.5 * (self.high68 - self.low68)
    }
}

/// Quantile p of sorted values, linear between order statistics (rule 7 of Hyndman & Fan 1996).
///
/// # Panics
/// Never for a non-empty slice.
pub fn quantile(sorted: &[f64], p: f64) -> f64 {
    let position = p.clamp(0.0, 1.0) * (sorted.len() - 1) as f64;
    let below = position.floor() as usize;
    let above = (below + 1).min(sorted.len() - 1);
    let share = position - below as f64;
    sorted[below] * (1.0 - share) + sorted[above] * share
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quantiles_interpolate() {
        assert_eq!(quantile(&[1.0, 2.0, 4.0], 0.5), 2.0);
        assert_eq!(quantile(&[1.0, 2.0, 4.0], 0.75), 3.0);
        assert_eq!(quantile(&[7.0], 0.3), 7.0);
        assert!(Interval::of(Vec::new()).is_none());
    }
}
