//! Division by a transmission.

use super::Spectrum;
use crate::ground::{Error, Result};

impl Spectrum {
    /// Divides fluxes and errors by a transmission, straight between its points (vacuum Å, rising);
    /// samples where it is below `floor` are flagged instead. Returns how many were.
    ///
    /// # Errors
    /// A transmission that does not cover the spectrum.
    pub fn divide(&mut self, wavelength_aa: &[f64], value: &[f64], floor: f64) -> Result<usize> {
        let (first, last) = (wavelength_aa.first(), wavelength_aa.last());
        let x = self.wavelength_aa();
        let covers =
            matches!((first, last), (Some(a), Some(b)) if *a <= x[0] && *b >= x[x.len() - 1]);
        if !covers || wavelength_aa.len() < 2 {
            return Err(Error::input(format!(
                "{}: the transmission covers {:.1} to {:.1} Å, the spectrum {:.1} to {:.1} Å",
                self.label(),
                first.unwrap_or(&f64::NAN),
                last.unwrap_or(&f64::NAN),
                x[0],
                x[x.len() - 1]
            ))
            .remedy("give a transmission over the whole spectrum, in the same frame"));
        }
        let at = |x: f64| {
            let after = wavelength_aa
                .partition_point(|w| *w <= x)
                .clamp(1, wavelength_aa.len() - 1);
            let (a, b) = (wavelength_aa[after - 1], wavelength_aa[after]);
            value[after - 1] + (value[after] - value[after - 1]) * (x - a) / (b - a)
        };
        let through: Vec<f64> = x.iter().map(|x| at(*x)).collect();
        Ok(self.divide_samples(&through, floor))
    }
}
