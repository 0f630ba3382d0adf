//! Where a line of the instrument's width stands out.

use crate::fit::Resolution;

/// A spectrum with its continuum taken off.
pub(super) struct Excess<'a> {
    pub wavelength_aa: &'a [f64],
    /// Flux above the continuum.
    pub flux: Vec<f64>,
    pub sigma: Vec<f64>,
    pub good: &'a [bool],
}

/// FWHM over standard deviation of a Gaussian, 2√(2 ln 2).
pub(super) const FWHM_PER_SIGMA: f64 = 2.354_820_045_030_949;
/// Half width of the filter in units of the FWHM.
const REACH: f64 = 1.2;
/// A sample must stand out by so much to serve for an estimate of the resolution.
const CLEAR: f64 = 8.0;
/// Widths used for that: the strongest lines, and of these a low quantile, since blends are wider.
const STRONGEST: usize = 200;
const NARROW: f64 = 0.3;

impl Excess<'_> {
    /// Signal-to-noise of the height of a line of instrumental width centred on each sample, all else
    /// being continuum: Σ w f/σ² / √(Σ w²/σ²), w the Gaussian profile.
    pub fn significance(&self, resolution: &Resolution) -> Vec<f64> {
        let x = self.wavelength_aa;
        let mut from = 0;
        (0..x.len())
            .map(|i| {
                let fwhm = resolution.fwhm_aa(x[i]);
                while x[from] < x[i] - REACH * fwhm {
                    from += 1;
                }
                let (mut signal, mut weight) = (0.0, 0.0);
                for j in (from..x.len()).take_while(|j| x[*j] <= x[i] + REACH * fwhm) {
                    if self.good[j] {
                        let t = FWHM_PER_SIGMA * (x[j] - x[i]) / fwhm;
                        let w = (-0.5 * t * t).exp() / self.sigma[j];
                        signal += w * self.flux[j] / self.sigma[j];
                        weight += w * w;
                    }
                }
                if weight > 0.0 && self.good[i] {
                    signal / weight.sqrt()
                } else {
                    0.0
                }
            })
            .collect()
    }

    /// The resolving power that the narrower ones of the strong lines show; `None` with fewer than
    /// three such lines.
    pub fn resolving_power(&self) -> Option<f64> {
        let (x, f) = (self.wavelength_aa, &self.flux);
        let ratio = |i: usize| f[i] / self.sigma[i];
        let top = |i: &usize| {
            let i = *i;
            (i - 1..=i + 1).all(|k| self.good[k])
                && f[i] > f[i - 1]
                && f[i] >= f[i + 1]
                && ratio(i) > CLEAR
        };
        let mut tops: Vec<usize> = (1..x.len().saturating_sub(1)).filter(top).collect();
        tops.sort_by(|a, b| ratio(*b).total_cmp(&ratio(*a)));
        tops.truncate(STRONGEST);
        let mut powers: Vec<f64> = tops
            .iter()
            .filter_map(|i| Some(x[*i] / self.half_width_aa(*i)?))
            .collect();
        powers.sort_by(f64::total_cmp);
        let narrow = ((1.0 - NARROW) * powers.len() as f64) as usize;
        (powers.len() >= 3).then(|| powers[narrow.min(powers.len() - 1)])
    }

    /// Width between the places left and right of a top where the flux crosses half of it.
    fn half_width_aa(&self, top: usize) -> Option<f64> {
        let (x, f) = (self.wavelength_aa, &self.flux);
        let half = 0.5 * f[top];
        let right = (top..x.len() - 1).find(|i| f[i + 1] < half)?;
        let left = (1..=top).rev().find(|i| f[i - 1] < half)?;
        let cross = |high: usize, low: usize| {
            x[high] + (x[low] - x[high]) * (f[high] - half) / (f[high] - f[low])
        };
        Some(cross(right, right + 1) - cross(left, left - 1))
    }
}
