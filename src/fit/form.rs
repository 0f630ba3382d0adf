//! Forms of a band other than fixed lines: rotational lines of a temperature that is fitted, a
//! profile of the user's, direct integration.

use super::structure::Structure;
use crate::ground::{Error, Result};
use std::sync::Arc;

/// What a band looks like.
#[derive(Clone, Debug, Default)]
pub enum Form {
    /// The lines of [`Structure`], each with the instrument's profile.
    #[default]
    Lines,
    /// Lines whose shares follow a rotational temperature that is fitted too.
    Warm(Arc<Rotor>),
    /// A tabulated profile, as the instrument shows it.
    Template(Arc<Template>),
    /// No profile: the flux between two wavelengths (rest vacuum Å) above the fitted continuum, other
    /// bands subtracted. The samples between them take no part in the fit.
    Integral {
        /// Limits of the integration.
        limits_aa: (f64, f64),
    },
}

/// Shares of a band's lines against temperature, tabulated in ln T.
#[derive(Clone, Debug)]
pub struct Rotor {
    ratios: Vec<f64>,
    first_ln_k: f64,
    step: f64,
    /// Node by node.
    shares: Vec<Vec<f64>>,
    /// Where the search begins, K.
    pub start_k: f64,
}

impl Rotor {
    /// Temperatures between which shares are tabulated, K.
    pub const RANGE_K: (f64, f64) = (8.0, 400.0);
    const NODES: usize = 72;

    /// Tabulates the lines that `lines_at` gives for a temperature in K as (wavelength in Å, share);
    /// returns the centre (mean wavelength at the starting temperature), the structure there, and the
    /// table about that centre. Cubic interpolation between nodes is good to 1e-4 of a share.
    ///
    /// # Errors
    /// Whatever `lines_at` refuses.
    pub fn new(
        start_k: f64,
        lines_at: impl Fn(f64) -> Result<Vec<(f64, f64)>>,
    ) -> Result<(f64, Structure, Self)> {
        let (low, high) = Self::RANGE_K;
        let step = (high / low).ln() / (Self::NODES - 1) as f64;
        let temperature = |n: usize| low * (step * n as f64).exp();
        let nodes = (0..Self::NODES)
            .map(|n| lines_at(temperature(n)))
            .collect::<Result<Vec<_>>>()?;
        let mut wavelengths: Vec<f64> = nodes.iter().flatten().map(|l| l.0).collect();
        wavelengths.sort_by(f64::total_cmp);
        wavelengths.dedup();
        let (centre_aa, structure) = Structure::of_lines(&lines_at(start_k)?)?;
        let shares = nodes
            .iter()
            .map(|lines| {
                let sum: f64 = lines.iter().map(|l| l.1).sum();
                let mut row = vec![0.0; wavelengths.len()];
                for (w, s) in lines {
                    let at = wavelengths.partition_point(|x| x < w);
                    row[at] += s / sum;
                }
                row
            })
            .collect();
        let rotor = Self {
            ratios: wavelengths.iter().map(|w| w / centre_aa).collect(),
            first_ln_k: low.ln(),
            step,
            shares,
            start_k,
        };
        Ok((centre_aa, structure, rotor))
    }

    /// (wavelength over the centre, share, derivative of the share by T in K⁻¹) of every line.
    pub(super) fn lines(&self, temperature_k: f64) -> impl Iterator<Item = (f64, f64, f64)> + '_ {
        let at = (temperature_k.ln() - self.first_ln_k) / self.step;
        let node = (at.floor().max(1.0) as usize).min(Self::NODES - 3);
        let t = at - node as f64;
        // Cubic of Catmull and Rom through the four nodes about T, and its derivative.
        let (t2, t3) = (t * t, t * t * t);
        let weights = [
            0.5 * (-t3 + 2.0 * t2 - t),
            0.5 * (3.0 * t3 - 5.0 * t2 + 2.0),
            0.5 * (-3.0 * t3 + 4.0 * t2 + t),
            0.5 * (t3 - t2),
        ];
        let slopes = [
            0.5 * (-3.0 * t2 + 4.0 * t - 1.0),
            0.5 * (9.0 * t2 - 10.0 * t),
            0.5 * (-9.0 * t2 + 8.0 * t + 1.0),
            0.5 * (3.0 * t2 - 2.0 * t),
        ];
        let per_k = 1.0 / (self.step * temperature_k);
        self.ratios.iter().enumerate().map(move |(l, ratio)| {
            let (mut share, mut slope) = (0.0, 0.0);
            for k in 0..4 {
                let s = self.shares[node - 1 + k][l];
                share += weights[k] * s;
                slope += slopes[k] * s;
            }
            (*ratio, share, slope * per_k)
        })
    }

    /// The lines at a temperature as a structure about the same centre.
    pub fn structure(&self, temperature_k: f64) -> Structure {
        Structure::about_centre(self.lines(temperature_k).map(|(r, s, _)| (r, s.max(0.0))))
    }
}

/// A profile of unit area.
#[derive(Clone, Debug)]
pub struct Template {
    /// (wavelength over the centre, density per unit of that ratio).
    points: Vec<(f64, f64)>,
}

impl Template {
    /// From wavelengths (vacuum Å, rising) and relative intensities; returns the centre (the mean
    /// wavelength) and the profile about it, straight between the points and zero outside.
    ///
    /// # Errors
    /// Fewer than three points, wavelengths that do not rise, an area that is not positive.
    pub fn new(label: &str, wavelength_aa: &[f64], value: &[f64]) -> Result<(f64, Self)> {
        let refuse = |what: String| {
            Err(Error::input(format!("{label}: {what}"))
                .remedy("give two columns, wavelength rising and intensity, zero at both ends"))
        };
        if wavelength_aa.len() < 3 {
            return refuse(format!(
                "a profile needs at least 3 points, not {}",
                wavelength_aa.len()
            ));
        }
        if wavelength_aa.windows(2).any(|w| w[1] <= w[0]) || value.iter().any(|v| !v.is_finite()) {
            return refuse("wavelengths must rise and intensities be numbers".to_owned());
        }
        let cells = || (1..value.len()).map(|i| (i, wavelength_aa[i] - wavelength_aa[i - 1]));
        let area: f64 = cells()
            .map(|(i, d)| 0.5 * d * (value[i] + value[i - 1]))
            .sum();
        if area.is_nan() || area <= 0.0 {
            return refuse(format!("its area {area:.3e} is not positive"));
        }
        let moment: f64 = cells()
            .map(|(i, d)| {
                let (a, b) = (wavelength_aa[i - 1], wavelength_aa[i]);
                d / 6.0 * (value[i - 1] * (2.0 * a + b) + value[i] * (a + 2.0 * b))
            })
            .sum();
        let centre_aa = moment / area;
        let points = wavelength_aa
            .iter()
            .zip(value)
            .map(|(w, v)| (w / centre_aa, v * centre_aa / area))
            .collect();
        Ok((centre_aa, Self { points }))
    }

    /// Lowest and highest wavelength over the centre.
    pub fn extent(&self) -> (f64, f64) {
        (self.points[0].0, self.points[self.points.len() - 1].0)
    }

    /// Width at half of the peak over the centre, outermost points.
    pub fn fwhm(&self) -> f64 {
        let peak = self.points.iter().map(|p| p.1).fold(0.0, f64::max);
        let mut high = self.points.iter().filter(|p| p.1 >= 0.5 * peak);
        let first = high.next().map_or(1.0, |p| p.0);
        high.next_back().map_or(0.0, |p| p.0 - first)
    }

    /// Density and its slope at a wavelength over the centre.
    pub(super) fn at(&self, ratio: f64) -> (f64, f64) {
        let after = self.points.partition_point(|p| p.0 <= ratio);
        if after == 0 || after == self.points.len() {
            return (0.0, 0.0);
        }
        let ((a, fa), (b, fb)) = (self.points[after - 1], self.points[after]);
        let slope = (fb - fa) / (b - a);
        (fa + slope * (ratio - a), slope)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Two lines whose shares are a Boltzmann factor apart.
    fn pair(t: f64) -> Result<Vec<(f64, f64)>> {
        let up = (-40.0 / t).exp();
        Ok(vec![(100.0, 1.0), (101.0, up)])
    }

    #[test]
    fn shares_and_slopes_follow_the_temperature() {
        let (centre, structure, rotor) = Rotor::new(50.0, pair).unwrap();
        assert_eq!(structure.lines().len(), 2);
        for t in [12.0, 33.3, 80.0, 250.0] {
            let up = (-40.0_f64 / t).exp();
            let exact = up / (1.0 + up);
            let by_t = exact * (1.0 - exact) * 40.0 / (t * t);
            let lines: Vec<_> = rotor.lines(t).collect();
            assert!((lines[1].0 * centre - 101.0).abs() < 1e-12);
            assert!((lines[1].1 - exact).abs() < 1e-4, "{t}");
            assert!((lines[1].2 / by_t - 1.0).abs() < 1e-2, "{t}");
        }
    }

    #[test]
    fn a_triangle_has_unit_area() {
        let (centre, t) = Template::new("mine", &[10.0, 11.0, 13.0], &[0.0, 5.0, 0.0]).unwrap();
        assert!((centre - 34.0 / 3.0).abs() < 1e-12);
        let n = 30_000;
        let sum: f64 = (0..n)
            .map(|i| {
                t.at((10.0 + 3.0 * (f64::from(i) + 0.5) / f64::from(n)) / centre)
                    .0
            })
            .sum();
        assert!((sum * 3.0 / f64::from(n) / centre - 1.0).abs() < 1e-6);
        assert_eq!(t.at(0.5), (0.0, 0.0));
        assert!(Template::new("flat", &[1.0, 2.0, 3.0], &[0.0; 3]).is_err());
        assert!(Template::new("back", &[1.0, 3.0, 2.0], &[1.0; 3]).is_err());
    }
}
