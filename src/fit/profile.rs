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

/// A Gaussian with wing terms, φ(u)/σ · [1 + h₃ He₃(u)/√6 + h₄ He₄(u)/√24], at a point or averaged over
/// a pixel, with its derivatives by h₃ and h₄. The terms have no area, so a band's flux stays its flux.
pub fn winged(
    x_aa: f64,
    pixel_aa: Option<(f64, f64)>,
    centre_aa: f64,
    sigma_aa: f64,
    wings: [f64; 2],
) -> (ProfileValue, [f64; 2]) {
    let norms = [6.0_f64.sqrt().recip(), 24.0_f64.sqrt().recip()];
    let (a, b) = (wings[0] * norms[0], wings[1] * norms[1]);
    let inv = 1.0 / sigma_aa;
    let density = |u: f64| INV_SQRT_2PI * (-0.5 * u * u).exp();
    let he = |u: f64| {
        let (u2, u3) = (u * u, u * u * u);
        [u2 - 1.0, u3 - 3.0 * u, u2 * u2 - 6.0 * u2 + 3.0]
    };
    let q = |u: f64| {
        let [_, h3, h4] = he(u);
        density(u) * (1.0 + a * h3 + b * h4)
    };
    let Some((low, high)) = pixel_aa else {
        let u = (x_aa - centre_aa) * inv;
        let [_, h3, h4] = he(u);
        let h5 = u * h4 - 4.0 * h3;
        let (f, value) = (density(u), q(u));
        let slope = -f * (u + a * h4 + b * h5);
        let out = ProfileValue {
            value: value * inv,
            by_centre: -slope * inv * inv,
            by_sigma: -(value + u * slope) * inv * inv,
        };
        return (out, [f * h3 * inv * norms[0], f * h4 * inv * norms[1]]);
    };
    let (ua, ub) = ((low - centre_aa) * inv, (high - centre_aa) * inv);
    let per_width = 1.0 / (high - low);
    let ([a2, a3, _], [b2, b3, _]) = (he(ua), he(ub));
    let (fa, fb) = (density(ua), density(ub));
    let (qa, qb) = (q(ua), q(ub));
    let (d2, d3) = (fb * b2 - fa * a2, fb * b3 - fa * a3);
    let out = ProfileValue {
        value: (normal_between(ua, ub) - a * d2 - b * d3) * per_width,
        by_centre: (qa - qb) * inv * per_width,
        by_sigma: (ua * qa - ub * qb) * inv * per_width,
    };
    (
        out,
        [-d2 * per_width * norms[0], -d3 * per_width * norms[1]],
    )
}

/// Profile of a line at any wavelength, Å⁻¹: at the point, or averaged over the pixel.
pub(super) fn profile_at(
    sampling: Sampling,
    x_aa: f64,
    edges_aa: (f64, f64),
    centre_aa: f64,
    sigma_aa: f64,
) -> f64 {
    if (x_aa - centre_aa).abs() > REACH_SIGMA * sigma_aa + (edges_aa.1 - edges_aa.0) {
        return 0.0;
    }
    match sampling {
        Sampling::Centre => gaussian(x_aa, centre_aa, sigma_aa).value,
        Sampling::Pixel => gaussian_over_pixel(edges_aa.0, edges_aa.1, centre_aa, sigma_aa).value,
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
    fn wings_have_no_area_and_right_derivatives() {
        let (c, s, wings, h) = (10.0, 0.4, [0.08, 0.12], 1e-6);
        let n = 8000;
        let step = 10.0 / f64::from(n);
        let sum: f64 = (0..n)
            .map(|i| {
                winged(5.0 + (f64::from(i) + 0.5) * step, None, c, s, wings)
                    .0
                    .value
                    * step
            })
            .sum();
        assert!((sum - 1.0).abs() < 1e-9, "{sum}");
        for pixel in [None, Some((10.1, 10.5))] {
            let at = |c: f64, s: f64, w: [f64; 2]| winged(10.3, pixel, c, s, w).0.value;
            let (v, by_wings) = winged(10.3, pixel, c, s, wings);
            let half = |up: f64, down: f64| (up - down) / (2.0 * h);
            assert!((v.by_centre - half(at(c + h, s, wings), at(c - h, s, wings))).abs() < 1e-7);
            assert!((v.by_sigma - half(at(c, s + h, wings), at(c, s - h, wings))).abs() < 1e-7);
            for k in 0..2 {
                let (mut up, mut down) = (wings, wings);
                up[k] += h;
                down[k] -= h;
                assert!((by_wings[k] - half(at(c, s, up), at(c, s, down))).abs() < 1e-7);
            }
        }
        let fine: f64 = (0..4000)
            .map(|i| {
                winged(
                    10.1 + 0.4 * (f64::from(i) + 0.5) / 4000.0,
                    None,
                    c,
                    s,
                    wings,
                )
                .0
                .value
            })
            .sum();
        let pixel = winged(0.0, Some((10.1, 10.5)), c, s, wings).0.value;
        assert!((pixel / (fine / 4000.0) - 1.0).abs() < 1e-6);
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
