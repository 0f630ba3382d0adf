//! The Gaussian band profile of unit area, at a point or averaged over a pixel.

use crate::ground::constants::FWHM_PER_SIGMA;

/// How a model profile is compared with a sample.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sampling {
    /// The profile's value at the sample's wavelength: right when the quoted width already holds
    /// the pixel's broadening and the line spans at least two pixels.
    Centre,
    /// The profile averaged over the pixel: right for undersampled lines.
    Pixel,
}

const INV_SQRT_2PI: f64 = 0.398_942_280_401_432_7;
/// Beyond this many sigma a Gaussian is below 1e-14 of its peak.
pub const REACH_SIGMA: f64 = 8.0;

/// Profile value and derivatives.
#[derive(Clone, Copy, Debug, Default)]
pub struct ProfileValue {
    /// Unit-area profile, Å⁻¹.
    pub value: f64,
    /// ∂/∂centre, Å⁻².
    pub by_centre: f64,
    /// ∂/∂sigma, Å⁻².
    pub by_sigma: f64,
}

/// exp(−u²/2)/(σ√2π) with u = (x − centre)/σ, and its derivatives.
#[inline]
pub fn gaussian(x_aa: f64, centre_aa: f64, sigma_aa: f64) -> ProfileValue {
    let inv = 1.0 / sigma_aa;
    let u = (x_aa - centre_aa) * inv;
    let value = INV_SQRT_2PI * inv * (-0.5 * u * u).exp();
    ProfileValue {
        value,
        by_centre: value * u * inv,
        by_sigma: value * (u * u - 1.0) * inv,
    }
}

/// The same averaged over a pixel from `low_aa` to `high_aa`, by the error function.
#[inline]
pub fn gaussian_over_pixel(
    low_aa: f64,
    high_aa: f64,
    centre_aa: f64,
    sigma_aa: f64,
) -> ProfileValue {
    let inv = 1.0 / sigma_aa;
    let (a, b) = ((low_aa - centre_aa) * inv, (high_aa - centre_aa) * inv);
    let per_width = 1.0 / (high_aa - low_aa);
    let density = |u: f64| INV_SQRT_2PI * (-0.5 * u * u).exp();
    let (da, db) = (density(a), density(b));
    ProfileValue {
        value: normal_between(a, b) * per_width,
        by_centre: (da - db) * inv * per_width,
        by_sigma: (a * da - b * db) * inv * per_width,
    }
}

/// Probability of a standard normal between a < b, without cancellation in the upper tail.
fn normal_between(a: f64, b: f64) -> f64 {
    let s = std::f64::consts::FRAC_1_SQRT_2;
    if a > 0.0 {
        0.5 * (libm::erfc(a * s) - libm::erfc(b * s))
    } else {
        0.5 * (libm::erfc(-b * s) - libm::erfc(-a * s))
    }
}

/// Standard deviation of a Gaussian from its full width at half maximum.
pub fn sigma_from_fwhm(fwhm: f64) -> f64 {
    fwhm / FWHM_PER_SIGMA
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn derivatives_match_differences() {
        let (x, c, s, h) = (10.3, 10.0, 0.4, 1e-6);
        let p = gaussian(x, c, s);
        let dc = (gaussian(x, c + h, s).value - gaussian(x, c - h, s).value) / (2.0 * h);
        let ds = (gaussian(x, c, s + h).value - gaussian(x, c, s - h).value) / (2.0 * h);
        assert!((p.by_centre - dc).abs() < 1e-8 && (p.by_sigma - ds).abs() < 1e-8);
        let q = gaussian_over_pixel(10.1, 10.5, c, s);
        let at = |c: f64, s: f64| gaussian_over_pixel(10.1, 10.5, c, s).value;
        assert!((q.by_centre - (at(c + h, s) - at(c - h, s)) / (2.0 * h)).abs() < 1e-8);
        assert!((q.by_sigma - (at(c, s + h) - at(c, s - h)) / (2.0 * h)).abs() < 1e-8);
    }

    #[test]
    fn pixel_average_is_the_integral() {
        let (low, high, c, s) = (0.3, 1.5, 0.2, 0.5);
        let n = 2000;
        let step = (high - low) / f64::from(n);
        let sum: f64 = (0..n)
            .map(|i| gaussian(low + (f64::from(i) + 0.5) * step, c, s).value)
            .sum();
        let integral = sum * step / (high - low);
        assert!((gaussian_over_pixel(low, high, c, s).value / integral - 1.0).abs() < 1e-6);
    }
}
