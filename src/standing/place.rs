//! Percentile of a ratio among the comets, with its own error and the sample's size.

use super::uncertainty::Estimated;
use crate::ratio::Interval;
use rand::{RngExt, SeedableRng};
use rand_distr::{Beta, Distribution as _};
use rand_xoshiro::Xoshiro256PlusPlus;

/// Where a ratio stands.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Standing {
    /// Comets compared with, values and limits.
    pub comets: usize,
    /// Per cent of comets below.
    pub percentile: f64,
    /// Lower end of its 68.3 % interval.
    pub percentile_low: f64,
    /// Upper end.
    pub percentile_high: f64,
}

/// Fraction below and effective number of comets in one cell between steps, or on a step.
///
/// The fraction is known to be `fraction` up to the sample's size, or, where limits reach beyond the
/// outermost values, only to lie between that and `other_end`.
#[derive(Clone, Copy)]
struct Cell {
    fraction: f64,
    other_end: f64,
    comets: f64,
}

impl Cell {
    fn middle(&self) -> f64 {
        0.5 * (self.fraction + self.other_end)
    }
}

/// Percentile of a ratio known by draws. The interval joins two doubts: each draw of the ratio has
/// its own fraction p of comets below, and a fraction seen in n comets is itself uncertain, taken
/// as a Beta(np + ½, n(1 − p) + ½) distribution (Jeffreys' prior; common practice for fractions). A
/// limit tells less than a value, so n is the effective number p(1 − p)/σ² with Greenwood's σ, not
/// the number of entries (as in Cutler & Ederer 1958, J. Chronic Dis. 8, 699). Below the lowest value
/// (above the highest) nothing tells where limits there put their comets: the fraction is taken as
/// anything between 0 and theirs (theirs and 1) alike, and the percentile is the middle.
pub fn place(estimated: &Estimated, median: f64, draws: &[f64], seed: u64) -> Standing {
    let distribution = estimated.distribution();
    let points: Vec<f64> = distribution.steps().map(|s| s.0).collect();
    let known = |v: f64, fraction: f64| Cell {
        fraction,
        other_end: fraction,
        comets: estimated.effective_entries(v),
    };
    // The same for all draws between two steps.
    let below = Cell {
        other_end: 0.0,
        ..known(f64::NEG_INFINITY, distribution.below(f64::NEG_INFINITY))
    };
    let on: Vec<Cell> = points
        .iter()
        .map(|v| {
            known(
                *v,
                0.5 * (distribution.below(*v) + distribution.at_or_below(*v)),
            )
        })
        .collect();
    let mut after: Vec<Cell> = points
        .iter()
        .map(|v| known(*v, distribution.at_or_below(*v)))
        .collect();
    if let Some(last) = after.last_mut() {
        last.other_end = 1.0;
    }
    let find = |v: f64| match points.partition_point(|p| *p <= v) {
        0 => below,
        i if points[i - 1] == v => on[i - 1],
        i => after[i - 1],
    };
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed ^ 0x57a2d);
    let spread = Interval::of(draws.iter().map(|v| {
        let cell = find(*v);
        let p = cell.fraction.clamp(0.0, 1.0);
        let drawn = Beta::new(cell.comets * p + 0.5, cell.comets * (1.0 - p) + 0.5)
            .expect("invariant: both shapes are at least one half")
            .sample(&mut rng);
        if cell.fraction == cell.other_end {
            drawn
        } else {
            drawn + (cell.other_end - drawn) * rng.random::<f64>()
        }
    }));
    let percentile = 100.0 * find(median).middle();
    let (low, high) = spread.map_or((percentile, percentile), |i| {
        (100.0 * i.low68, 100.0 * i.high68)
    });
    Standing {
        comets: distribution.entries(),
        percentile,
        percentile_low: low.min(percentile),
        percentile_high: high.max(percentile),
    }
}

#[cfg(test)]
mod tests {
    use super::super::distribution::{Censored, Known};
    use super::*;

    #[test]
    fn a_value_in_the_middle_is_in_the_middle() {
        let sample: Vec<Censored> = (1..=9)
            .map(|v| Censored {
                value: f64::from(v),
                known: Known::Value,
            })
            .collect();
        let d = Estimated::of(&sample).expect("values");
        let s = place(&d, 5.0, &vec![5.0; 2000], 1);
        assert!((s.percentile - 50.0).abs() < 1e-9);
        assert!(s.percentile_low > 25.0 && s.percentile_low < 45.0);
        let wide: Vec<f64> = (0..2000).map(|i| f64::from(i) / 200.0).collect();
        let w = place(&d, 5.0, &wide, 1);
        assert!(w.percentile_high - w.percentile_low > s.percentile_high - s.percentile_low);
    }

    #[test]
    fn limits_widen_the_interval() {
        let value = |v: u8| Censored {
            value: f64::from(v),
            known: Known::Value,
        };
        let values: Vec<Censored> = (1..=20).map(value).collect();
        let mut limits = values.clone();
        for i in [11, 13, 15, 17, 19] {
            limits[i].known = Known::Upper;
        }
        let width = |sample: &[Censored]| {
            let d = Estimated::of(sample).expect("values");
            let s = place(&d, 8.5, &vec![8.5; 4000], 1);
            s.percentile_high - s.percentile_low
        };
        assert!(width(&limits) > 1.05 * width(&values));
    }
}
