//! Errors of a window whose spectrum came without any, from the scatter about the fit.

/// Factor from a median absolute deviation to a normal standard deviation, 1/Φ⁻¹(3/4).
const MAD_TO_SIGMA: f64 = 1.482_602_218_505_602;

/// Standard deviation of the residuals at the samples marked as continuum, corrected for the
/// `parameters` taken from `n` samples. Robust (median absolute deviation) so that an unmodelled
/// line in the continuum does not pass for noise.
pub(super) fn scatter(residuals: &[f64], is_continuum: &[bool], parameters: usize) -> Option<f64> {
    let mut chosen: Vec<f64> = residuals
        .iter()
        .zip(is_continuum)
        .filter(|(_, c)| **c)
        .map(|(r, _)| *r)
        .collect();
    if chosen.len() < 5 {
        chosen = residuals.to_vec();
    }
    let n = residuals.len();
    if n <= parameters {
        return None;
    }
    let centre = median(&mut chosen);
    let mut deviations: Vec<f64> = chosen.iter().map(|r| (r - centre).abs()).collect();
    let robust = MAD_TO_SIGMA * median(&mut deviations);
    let rms = (chosen.iter().map(|r| r * r).sum::<f64>() / chosen.len() as f64).sqrt();
    let sigma = if robust > 0.0 { robust } else { rms };
    let corrected = sigma * (n as f64 / (n - parameters) as f64).sqrt();
    (corrected > 0.0).then_some(corrected)
}

fn median(values: &mut [f64]) -> f64 {
    values.sort_by(f64::total_cmp);
    let n = values.len();
    if n % 2 == 1 {
        values[n / 2]
    } else {
        0.5 * (values[n / 2 - 1] + values[n / 2])
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_spike_does_not_pass_for_noise() {
        let mut r: Vec<f64> = (0..101).map(|i| f64::from(i % 5) - 2.0).collect();
        let clean = scatter(&r, &[true; 101], 3).expect("a scatter");
        r[50] = 1000.0;
        let spiked = scatter(&r, &[true; 101], 3).expect("a scatter");
        assert!((spiked / clean - 1.0).abs() < 0.05, "{clean} {spiked}");
    }

    #[test]
    fn perfect_data_have_none() {
        assert_eq!(scatter(&[0.0; 20], &[true; 20], 3), None);
    }
}
