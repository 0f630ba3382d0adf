//! Bands with structure: many lines with fixed relative fluxes, one velocity and one line width.

use crate::ground::{Error, Result};
use std::sync::Arc;

/// Lines of a band relative to its centre.
#[derive(Clone, Debug, PartialEq)]
pub struct Structure {
    /// (wavelength over the band's centre, share of the band's flux).
    lines: Arc<[(f64, f64)]>,
}

impl Structure {
    /// One line at the centre.
    pub fn single() -> Self {
        Self {
            lines: Arc::from([(1.0, 1.0)]),
        }
    }

    /// From (wavelength in Å, share) pairs; returns the band's centre (the mean wavelength) and the
    /// structure about it. Shares are normalised to sum 1.
    ///
    /// # Errors
    /// No line, or a wavelength or share that is not a positive number.
    pub fn of_lines(lines_aa: &[(f64, f64)]) -> Result<(f64, Self)> {
        let positive = |v: f64| v.is_finite() && v > 0.0;
        if lines_aa.is_empty() || lines_aa.iter().any(|(w, s)| !positive(*w) || !positive(*s)) {
            return Err(Error::compute(
                "a band with structure needs lines with positive wavelengths and fluxes",
            ));
        }
        let sum: f64 = lines_aa.iter().map(|l| l.1).sum();
        let centre_aa = lines_aa.iter().map(|(w, s)| w * s).sum::<f64>() / sum;
        let lines = lines_aa
            .iter()
            .map(|(w, s)| (w / centre_aa, s / sum))
            .collect();
        Ok((centre_aa, Self { lines }))
    }

    /// From (wavelength over the centre, share) pairs as they are.
    pub(super) fn about_centre(lines: impl Iterator<Item = (f64, f64)>) -> Self {
        Self {
            lines: lines.collect(),
        }
    }

    /// (wavelength over the centre, share) of every line.
    pub fn lines(&self) -> &[(f64, f64)] {
        &self.lines
    }

    /// True for one line.
    pub fn is_single(&self) -> bool {
        self.lines.len() == 1
    }

    /// Lowest and highest wavelength over the centre.
    pub fn extent(&self) -> (f64, f64) {
        self.lines
            .iter()
            .fold((1.0_f64, 1.0_f64), |(low, high), (r, _)| {
                (low.min(*r), high.max(*r))
            })
    }

    /// Standard deviation of the lines about the centre, over the centre.
    pub fn spread(&self) -> f64 {
        let variance: f64 = self.lines.iter().map(|(r, s)| s * (r - 1.0).powi(2)).sum();
        variance.sqrt()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn mean_and_spread() {
        let (centre, s) = Structure::of_lines(&[(99.0, 2.0), (101.0, 2.0)]).unwrap();
        assert!((centre - 100.0).abs() < 1e-12 && (s.spread() - 0.01).abs() < 1e-12);
        assert_eq!(s.extent(), (0.99, 1.01));
        assert!(Structure::of_lines(&[]).is_err());
        assert!(Structure::of_lines(&[(5.0, f64::NAN)]).is_err());
    }
}
