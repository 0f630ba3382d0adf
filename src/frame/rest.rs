//! From the observer's frame to the comet's.

use super::{Aperture, Geometry};
use crate::ground::constants::LIGHT_KM_S;
use crate::spectrum::Spectrum;

/// The frame a spectrum's wavelengths are in.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Frame {
    /// As observed: shifted by the comet's velocity relative to the observer.
    Observer,
    /// Already shifted to the comet's rest frame.
    Comet,
    /// Shifted by another known velocity, km s⁻¹ (positive: towards the red).
    Shifted {
        /// Velocity of the comet in the spectrum's frame, km s⁻¹.
        velocity_km_s: f64,
    },
}

/// A spectrum in the comet's rest frame, of everything inside the aperture. Only [`to_rest`] makes
/// one, and fits accept nothing else.
#[derive(Clone, Debug)]
pub struct RestSpectrum {
    label: String,
    wavelength_aa: Vec<f64>,
    flux_erg_s_cm2_aa: Vec<f64>,
    sigma_erg_s_cm2_aa: Option<Vec<f64>>,
    good: Vec<bool>,
}

impl RestSpectrum {
    /// Name for messages.
    pub fn label(&self) -> &str {
        &self.label
    }

    /// Rest vacuum wavelengths, Å, strictly increasing.
    pub fn wavelength_aa(&self) -> &[f64] {
        &self.wavelength_aa
    }

    /// Flux densities in the aperture, erg s⁻¹ cm⁻² Å⁻¹.
    pub fn flux_erg_s_cm2_aa(&self) -> &[f64] {
        &self.flux_erg_s_cm2_aa
    }

    /// Standard deviations, same unit, if known.
    pub fn sigma_erg_s_cm2_aa(&self) -> Option<&[f64]> {
        self.sigma_erg_s_cm2_aa.as_deref()
    }

    /// Which samples may be used.
    pub fn good(&self) -> &[bool] {
        &self.good
    }

    /// Number of samples.
    pub fn len(&self) -> usize {
        self.wavelength_aa.len()
    }

    /// Always false.
    pub fn is_empty(&self) -> bool {
        self.wavelength_aa.is_empty()
    }
}

/// Shifts to the comet's rest frame, λ_rest = λ/s with the relativistic radial Doppler factor
/// s = √((1 + β)/(1 − β)), β = v/c, and multiplies a surface brightness by the aperture's solid
/// angle. Flux densities are multiplied by s so that a band keeps the flux it has in the observer's
/// frame, which is what the distance law needs.
pub fn to_rest(
    spectrum: &Spectrum,
    frame: Frame,
    geometry: &Geometry,
    aperture: &Aperture,
) -> RestSpectrum {
    to_rest_within(spectrum, frame, geometry, aperture, (0.0, f64::INFINITY))
}

/// As [`to_rest`], but only the samples inside a range of rest wavelengths, Å, and two on either side;
/// all of them when none lies inside. Keeps a large file from being copied whole.
pub fn to_rest_within(
    spectrum: &Spectrum,
    frame: Frame,
    geometry: &Geometry,
    aperture: &Aperture,
    range_aa: (f64, f64),
) -> RestSpectrum {
    let velocity_km_s = match frame {
        Frame::Observer => geometry.observer_km_s,
        Frame::Comet => 0.0,
        Frame::Shifted { velocity_km_s } => velocity_km_s,
    };
    let beta = velocity_km_s / LIGHT_KM_S;
    let stretch = ((1.0 + beta) / (1.0 - beta)).sqrt();
    let area = if spectrum.per_arcsec2() {
        aperture.area_arcsec2()
    } else {
        1.0
    };
    let x = spectrum.wavelength_aa();
    let low = x.partition_point(|w| w / stretch < range_aa.0);
    let high = x.partition_point(|w| w / stretch <= range_aa.1);
    let kept = if low < high {
        low.saturating_sub(2)..(high + 2).min(x.len())
    } else {
        0..x.len()
    };
    let scale = |values: &[f64]| {
        values[kept.clone()]
            .iter()
            .map(|v| v * stretch * area)
            .collect()
    };
    RestSpectrum {
        label: spectrum.label().to_owned(),
        wavelength_aa: x[kept.clone()].iter().map(|w| w / stretch).collect(),
        flux_erg_s_cm2_aa: scale(spectrum.flux_erg_s_cm2_aa()),
        sigma_erg_s_cm2_aa: spectrum.sigma_erg_s_cm2_aa().map(scale),
        good: spectrum.good()[kept.clone()].to_vec(),
    }
}
