//! What a continuum polynomial multiplies: sunlight as the dust returns it, or a spectrum of a star
//! like the Sun.

use super::settings::Resolution;
use crate::atomic::SolarSpectrum;
use crate::ground::constants::LIGHT_KM_S;
use crate::ground::{Caveat, Error, Result};

/// Table points per instrumental full width: cubic interpolation is then good to 1e-5 of a line's depth.
const POINTS_PER_FWHM: f64 = 12.0;
/// Beyond this many standard deviations the instrument's profile is cut.
const REACH_SIGMA: f64 = 5.0;
/// Most points of one table.
const MOST_POINTS: usize = 4_000_000;

/// A spectrum in the comet's frame at the instrument's resolution, tabulated.
#[derive(Clone, Debug)]
pub struct Carrier {
    label: String,
    wavelength_aa: Vec<f64>,
    value: Vec<f64>,
    /// True when the values are the irradiance of the Sun at 1 au, so that a ratio to them is an albedo.
    absolute: bool,
    caveats: Vec<Caveat>,
}

impl Carrier {
    /// Sunlight returned by dust, in the comet's rest frame: irradiance at 1 au at λ/(1 + v/c),
    /// v the heliocentric velocity (Swings 1941), convolved with a Gaussian of
    /// FWHM² = instrument² − reference². Where the reference is the coarser of the two it is taken as
    /// it is, and a caveat says so.
    ///
    /// # Errors
    /// A range outside the solar spectrum, or so long that its table would not fit.
    pub fn sunlight(
        sun: &SolarSpectrum,
        range_aa: (f64, f64),
        resolution: &Resolution,
        heliocentric_km_s: f64,
    ) -> Result<Self> {
        let margin = 3.0 * resolution.fwhm_aa(range_aa.1);
        let range = (range_aa.0 - margin, range_aa.1 + margin);
        let grid = grid_aa(range, resolution)?;
        let shift = 1.0 + heliocentric_km_s / LIGHT_KM_S;
        let (first, _) = sun.range_aa();
        if grid[0] / shift < first {
            return Err(Error::input(format!(
                "the solar spectrum begins at {first:.0} Å, the spectrum at {:.0} Å",
                range_aa.0
            ))
            .remedy("use a polynomial continuum there"));
        }
        let mut coarse: Option<(f64, f64)> = None;
        let value: Vec<f64> = grid
            .iter()
            .map(|x| {
                let at = x / shift;
                let (wanted, has) = (resolution.fwhm_aa(*x), sun.fwhm_aa(at));
                if has > 1.05 * wanted {
                    let (low, high) = coarse.unwrap_or((*x, *x));
                    coarse = Some((low.min(*x), high.max(*x)));
                }
                let extra = (wanted * wanted - has * has).max(0.0).sqrt();
                sun.convolved_erg_s_cm2_aa(at, extra, REACH_SIGMA)
            })
            .collect();
        let caveats = coarse.map(|(low, high)| Caveat::Other {
            code: "sun-coarse",
            text: format!(
                "the solar reference is coarser than the instrument between {low:.0} and {high:.0} Å: Fraunhofer lines of the continuum are too shallow there"
            ),
        });
        Ok(Self {
            label: "sunlight".to_owned(),
            wavelength_aa: grid,
            value,
            absolute: true,
            caveats: caveats.into_iter().collect(),
        })
    }

    /// From a spectrum of one's own, already at the instrument's resolution; wavelengths are those of
    /// the source at rest, vacuum Å, and are moved to the comet's heliocentric velocity.
    ///
    /// # Errors
    /// Fewer than four usable samples, or a mean that is not positive.
    pub fn from_samples(
        label: &str,
        wavelength_aa: &[f64],
        value: &[f64],
        heliocentric_km_s: f64,
    ) -> Result<Self> {
        let shift = 1.0 + heliocentric_km_s / LIGHT_KM_S;
        let good: Vec<(f64, f64)> = wavelength_aa
            .iter()
            .zip(value)
            .filter(|(_, v)| v.is_finite())
            .map(|(w, v)| (w * shift, *v))
            .collect();
        let mean = good.iter().map(|g| g.1).sum::<f64>() / good.len().max(1) as f64;
        if good.len() < 4 || mean <= 0.0 {
            return Err(Error::input(format!(
                "{label}: {} usable samples with a mean of {mean:.3e} make no continuum",
                good.len()
            ))
            .remedy("give a spectrum of the Sun or of a star like it, with positive fluxes"));
        }
        Ok(Self {
            label: label.to_owned(),
            wavelength_aa: good.iter().map(|g| g.0).collect(),
            value: good.iter().map(|g| g.1).collect(),
            absolute: false,
            caveats: Vec::new(),
        })
    }

    /// What it is, for messages.
    pub fn label(&self) -> &str {
        &self.label
    }

    /// True when the values are solar irradiance at 1 au, erg s⁻¹ cm⁻² Å⁻¹.
    pub fn is_absolute(&self) -> bool {
        self.absolute
    }

    /// Doubts about it.
    pub fn caveats(&self) -> &[Caveat] {
        &self.caveats
    }

    /// Rest-frame range covered, vacuum Å.
    pub fn range_aa(&self) -> (f64, f64) {
        let last = self.wavelength_aa.len() - 1;
        (self.wavelength_aa[0], self.wavelength_aa[last])
    }

    /// Value at a rest vacuum wavelength, Å, by a cubic through the four nearest samples; the end
    /// value outside.
    pub fn at(&self, x_aa: f64) -> f64 {
        let (w, v) = (&self.wavelength_aa, &self.value);
        let n = w.len();
        if x_aa <= w[0] {
            return v[0];
        }
        if x_aa >= w[n - 1] {
            return v[n - 1];
        }
        let after = w.partition_point(|p| *p <= x_aa);
        let first = after.saturating_sub(2).min(n - 4);
        (first..first + 4)
            .map(|j| {
                let weight: f64 = (first..first + 4)
                    .filter(|k| *k != j)
                    .map(|k| (x_aa - w[k]) / (w[j] - w[k]))
                    .product();
                weight * v[j]
            })
            .sum()
    }

    /// Mean over a pixel, by three Gauss–Legendre points.
    pub fn over_pixel(&self, (low, high): (f64, f64)) -> f64 {
        let (middle, half) = (0.5 * (low + high), 0.5 * (high - low));
        let node = half * 0.6_f64.sqrt();
        (5.0 * (self.at(middle - node) + self.at(middle + node)) + 8.0 * self.at(middle)) / 18.0
    }
}

fn grid_aa((low, high): (f64, f64), resolution: &Resolution) -> Result<Vec<f64>> {
    let mut out = Vec::new();
    let mut x = low;
    while x < high + resolution.fwhm_aa(high) / POINTS_PER_FWHM {
        out.push(x);
        x += resolution.fwhm_aa(x) / POINTS_PER_FWHM;
        if out.len() > MOST_POINTS {
            return Err(Error::input(format!(
                "{low:.0} to {high:.0} Å at this resolution needs more than {MOST_POINTS} points of sunlight"
            ))
            .remedy("fit a shorter range"));
        }
    }
    Ok(out)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::atomic::sun;

    #[test]
    fn is_shifted_with_the_comet() {
        let sun = sun(None).unwrap();
        let resolution = Resolution::FwhmAa(2.0);
        let still = Carrier::sunlight(&sun, (3900.0, 4000.0), &resolution, 0.0).unwrap();
        let moving = Carrier::sunlight(&sun, (3900.0, 4000.0), &resolution, 60.0).unwrap();
        let shift = 1.0 + 60.0 / LIGHT_KM_S;
        for x in [3915.3, 3934.9, 3968.0, 3990.7] {
            assert!(
                (moving.at(x * shift) / still.at(x) - 1.0).abs() < 1e-4,
                "{x}"
            );
        }
        assert!(
            still.at(3934.8) < 0.6 * still.at(3950.0),
            "the K line of calcium is deep"
        );
    }

    #[test]
    fn cubic_interpolation_passes_through_a_cubic() {
        let x: Vec<f64> = (0..12)
            .map(|i| 100.0 + f64::from(i * i) * 0.1 + f64::from(i))
            .collect();
        let f = |x: f64| 3.0 + 0.1 * (x - 105.0).powi(3);
        let y: Vec<f64> = x.iter().map(|x| f(*x)).collect();
        let carrier = Carrier::from_samples("mine", &x, &y, 0.0).unwrap();
        for at in [100.4, 103.3, 109.9, 118.0] {
            assert!((carrier.at(at) - f(at)).abs() < 1e-9);
        }
        let mean = (f(105.0) + f(107.0) + 4.0 * f(106.0)) / 6.0;
        assert!((carrier.over_pixel((105.0, 107.0)) - mean).abs() < 1e-9);
    }

    #[test]
    fn refuses_what_is_no_continuum() {
        assert!(Carrier::from_samples("dark", &[1.0, 2.0, 3.0, 4.0], &[0.0; 4], 0.0).is_err());
        assert!(Carrier::from_samples("short", &[1.0, 2.0], &[1.0; 2], 0.0).is_err());
        let sun = sun(None).unwrap();
        assert!(Carrier::sunlight(&sun, (100.0, 200.0), &Resolution::FwhmAa(1.0), 0.0).is_err());
    }
}
