//! Linear and logarithmic axes: ranges, round tick values and their labels.

use super::text::{number, power_of_ten};
use crate::ground::{Error, Result};

/// How values are laid out along an axis.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Scale {
    /// Equal steps for equal differences.
    #[default]
    Linear,
    /// Equal steps for equal ratios; every value must be positive.
    Log,
}

/// A finite, non-empty range with its scale.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Axis {
    pub lo: f64,
    pub hi: f64,
    pub scale: Scale,
}

/// Labelled and unlabelled ticks.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Ticks {
    pub major: Vec<(f64, String)>,
    pub minor: Vec<f64>,
}

/// Smallest range, relative to the values, that is drawn as it is.
const NARROWEST: f64 = 1e-10;

impl Axis {
    /// The range of the finite values; when they are all equal, some room around them.
    ///
    /// # Errors
    /// No finite value; a value ≤ 0 on a logarithmic axis; a range beyond double precision.
    pub(super) fn covering(
        values: impl IntoIterator<Item = f64>,
        scale: Scale,
        what: &str,
    ) -> Result<Self> {
        let (mut lo, mut hi) = (f64::INFINITY, f64::NEG_INFINITY);
        for v in values.into_iter().filter(|v| v.is_finite()) {
            lo = lo.min(v);
            hi = hi.max(v);
        }
        if lo > hi {
            return Err(Error::compute(format!("{what}: no finite value to draw")));
        }
        if scale == Scale::Log && lo <= 0.0 {
            return Err(Error::compute(format!(
                "{what}: {lo} cannot be shown on a logarithmic axis"
            ))
            .remedy("leave out values ≤ 0 or use a linear axis"));
        }
        if !(hi - lo).is_finite() || (lo > 0.0 && scale == Scale::Log && !(hi / lo).is_finite()) {
            return Err(Error::compute(format!(
                "{what}: the range {lo:e} to {hi:e} is too large to draw"
            )));
        }
        Ok(Self { lo, hi, scale }.not_empty())
    }

    /// Gives an empty range some room.
    fn not_empty(mut self) -> Self {
        match self.scale {
            Scale::Linear => {
                let size = self.lo.abs().max(self.hi.abs());
                if self.hi - self.lo <= NARROWEST * size {
                    let room = if size > 0.0 { 0.1 * size } else { 1.0 };
                    self.lo -= room;
                    self.hi += room;
                }
            }
            Scale::Log => {
                if (self.hi / self.lo).ln() < 1e-6 {
                    self.lo /= 2.0;
                    self.hi *= 2.0;
                }
            }
        }
        self
    }

    /// The range widened at both ends by fractions of its length.
    pub(super) fn padded(self, below: f64, above: f64) -> Self {
        let (lo, hi) = match self.scale {
            Scale::Linear => {
                let range = self.hi - self.lo;
                (self.lo - below * range, self.hi + above * range)
            }
            Scale::Log => {
                let range = (self.hi / self.lo).ln();
                let lo = self.lo * (-below * range).exp();
                (lo, self.hi * (above * range).exp())
            }
        };
        let usable = lo.is_finite() && hi.is_finite() && (lo > 0.0 || self.scale == Scale::Linear);
        if usable {
            Self { lo, hi, ..self }
        } else {
            self
        }
    }

    /// The range widened at its upper end so that the upper `share` of the axis (at most 0.6) is free.
    pub(super) fn opened(self, share: f64) -> Self {
        let share = share.min(0.6);
        self.padded(0.0, share / (1.0 - share))
    }

    /// Place along the axis: 0 at `lo`, 1 at `hi`. Values ≤ 0 on a logarithmic axis lie at −∞.
    pub(super) fn fraction(&self, v: f64) -> f64 {
        match self.scale {
            Scale::Linear => (v - self.lo) / (self.hi - self.lo),
            Scale::Log if v <= 0.0 => f64::NEG_INFINITY,
            Scale::Log => (v / self.lo).ln() / (self.hi / self.lo).ln(),
        }
    }

    /// The power of ten to pull into the label: 0 when plain numbers are short enough.
    pub(super) fn exponent(&self) -> i32 {
        let size = self.lo.abs().max(self.hi.abs());
        if self.scale == Scale::Log || size == 0.0 {
            return 0;
        }
        let e = size.log10().floor() as i32;
        if (-2..=3).contains(&e) { 0 } else { e }
    }

    /// Ticks for an axis `length_pt` long. `room_pt` tells how far apart two ticks with such labels
    /// must be, `wanted_pt` how far apart they had better be; labels are divided by 10^`exponent`.
    pub(super) fn ticks(
        &self,
        length_pt: f64,
        exponent: i32,
        wanted_pt: f64,
        room_pt: &dyn Fn(&str) -> f64,
    ) -> Ticks {
        let fits = |major: &[(f64, String)], wanted: f64| {
            let room = major.iter().map(|m| room_pt(&m.1)).fold(wanted, f64::max);
            let place = |i: usize| self.fraction(major[i].0) * length_pt;
            (1..major.len()).all(|i| place(i) - place(i - 1) >= room)
        };
        let sets = match self.scale {
            Scale::Linear => self.linear_sets(exponent),
            Scale::Log => self.log_sets(),
        };
        let mut best: Option<&Ticks> = None;
        for set in &sets {
            if fits(&set.major, wanted_pt) && set.major.len() >= 2 {
                best = Some(set);
                break;
            }
        }
        let closer = || sets.iter().find(|s| fits(&s.major, 0.0));
        best.or_else(closer).cloned().unwrap_or_default()
    }

    /// Sets of ticks with steps 1, 2, 5 × 10ⁿ, the densest first.
    fn linear_sets(&self, exponent: i32) -> Vec<Ticks> {
        let range = self.hi - self.lo;
        let first = (range / 40.0).log10().floor() as i32;
        let mut sets = Vec::new();
        for power in first..first + 3 {
            for (mantissa, parts) in [(1.0, 5.0), (2.0, 4.0), (5.0, 5.0)] {
                let decimals = (exponent - power).max(0) as usize;
                let step = mantissa * 10f64.powi(power);
                let label = |v: f64| number(scaled(v, -exponent), decimals);
                let major = self.multiples(step);
                sets.push(Ticks {
                    major: major.into_iter().map(|v| (v, label(v))).collect(),
                    minor: self.multiples(step / parts),
                });
            }
        }
        sets
    }

    /// The multiples of `step` inside the range; none when there would be absurdly many.
    fn multiples(&self, step: f64) -> Vec<f64> {
        let slack = 1e-9;
        let (from, to) = (
            (self.lo / step - slack).ceil(),
            (self.hi / step + slack).floor(),
        );
        let few = to - from <= 1000.0;
        if !few || !step.is_normal() {
            return Vec::new();
        }
        let count = (to - from).max(-1.0) as i64 + 1;
        (0..count).map(|i| (from + i as f64) * step).collect()
    }

    /// Sets of ticks on a logarithmic axis, the densest first; a short axis falls back to equal steps.
    fn log_sets(&self) -> Vec<Ticks> {
        let (first, last) = (
            self.lo.log10().floor() as i32,
            self.hi.log10().ceil() as i32,
        );
        let inside = |v: &f64| *v >= self.lo * (1.0 - 1e-9) && *v <= self.hi * (1.0 + 1e-9);
        let at = |mantissas: &[f64], every: i32| -> Vec<f64> {
            (first..=last)
                .filter(|d| d.rem_euclid(every) == 0)
                .flat_map(|d| mantissas.iter().map(move |m| m * 10f64.powi(d)))
                .filter(inside)
                .collect()
        };
        let plain = self.lo >= 0.9e-4 && self.hi <= 1.1e4;
        let labelled = |values: Vec<f64>| -> Vec<(f64, String)> {
            let label = |v: f64| (v, log_label(v, plain));
            values.into_iter().map(label).collect()
        };
        let nine: Vec<f64> = (1..10).map(f64::from).collect();
        let mut sets = Vec::new();
        if self.hi / self.lo < 3.0 {
            let straight = Self {
                scale: Scale::Linear,
                ..*self
            };
            sets = straight.linear_sets(0);
        }
        for mantissas in [&[1.0, 2.0, 3.0, 5.0][..], &[1.0, 2.0, 5.0], &[1.0, 3.0]] {
            if self.hi / self.lo < 300.0 {
                let minor = at(&nine, 1);
                let major = labelled(at(mantissas, 1));
                sets.push(Ticks { major, minor });
            }
        }
        for every in [1, 2, 3, 5, 10, 20, 50, 100] {
            let minor = match every {
                1 if last - first <= 9 => at(&nine, 1),
                1 => Vec::new(),
                _ if last - first <= 40 => at(&[1.0], 1),
                _ => Vec::new(),
            };
            let major = labelled(at(&[1.0], every));
            sets.push(Ticks { major, minor });
        }
        sets
    }
}

/// `v · 10^power` without overflow on the way.
fn scaled(v: f64, power: i32) -> f64 {
    let half = power / 2;
    v * 10f64.powi(half) * 10f64.powi(power - half)
}

fn log_label(v: f64, plain: bool) -> String {
    let power = (v.log10() + 1e-9).floor() as i32;
    let mantissa = scaled(v, -power).round() as i64;
    if plain {
        number(v, (-power).max(0) as usize)
    } else if mantissa == 1 {
        power_of_ten(power)
    } else {
        format!("{mantissa}×{}", power_of_ten(power))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn linear(lo: f64, hi: f64) -> Axis {
        Axis::covering([lo, hi], Scale::Linear, "x").expect("a range")
    }

    fn labels(t: &Ticks) -> Vec<&str> {
        t.major.iter().map(|m| m.1.as_str()).collect()
    }

    #[test]
    fn round_steps_and_minor_ticks() {
        let t = linear(4.2, 4.32).ticks(120.0, 0, 28.0, &|_| 25.0);
        assert_eq!(labels(&t), ["4.20", "4.25", "4.30"]);
        assert_eq!(t.minor.len(), 13);
        let t = linear(-3e-15, 2e-15).ticks(100.0, -15, 10.0, &|_| 10.0);
        assert_eq!(labels(&t), ["−3", "−2", "−1", "0", "1", "2"]);
    }

    #[test]
    fn decades_and_short_log_axes() {
        let axis = Axis::covering([0.01, 10.0], Scale::Log, "x").expect("a range");
        let t = axis.ticks(100.0, 0, 25.0, &|_| 25.0);
        assert_eq!(labels(&t), ["0.01", "0.1", "1", "10"]);
        assert_eq!(t.minor.len(), 28);
        let axis = Axis::covering([1.1e-9, 7e-3], Scale::Log, "x").expect("a range");
        let t = axis.ticks(80.0, 0, 20.0, &|_| 20.0);
        assert_eq!(labels(&t), ["10⁻⁸", "10⁻⁶", "10⁻⁴"]);
        let axis = Axis::covering([1.1, 1.3], Scale::Log, "x").expect("a range");
        assert!(axis.ticks(100.0, 0, 25.0, &|_| 15.0).major.len() >= 2);
    }

    #[test]
    fn equal_values_open_up_and_nonsense_is_refused() {
        let flat = linear(5.0, 5.0);
        assert!(flat.lo < 5.0 && flat.hi > 5.0);
        assert!(linear(0.0, 0.0).hi > 0.0);
        assert!(Axis::covering([f64::NAN], Scale::Linear, "x").is_err());
        assert!(Axis::covering([], Scale::Linear, "x").is_err());
        assert!(Axis::covering([0.0, 1.0], Scale::Log, "x").is_err());
        assert!(Axis::covering([-1e308, 1e308], Scale::Linear, "x").is_err());
        for (lo, hi) in [(1e-320, 3e-320), (1e15, 1e15 + 1.0), (-1e300, 1e300)] {
            let axis = linear(lo, hi);
            axis.ticks(100.0, axis.exponent(), 20.0, &|_| 20.0);
        }
    }
}
