//! Floor 7: what the fitted continuum says of the dust: reddening, A(θ)fρ, colour temperature.
//!
//! Imports floors 0–6 and the analysis' settings.

use crate::analysis::Settings;
use crate::coma::{ApertureKm, afrho_cm};
use crate::fit::{SpectrumFit, WindowFit};
use crate::frame::Aperture;
use crate::ground::{Caveat, Measured};

/// The dust in one fitted window.
#[derive(Clone, Debug, PartialEq)]
pub struct DustResult {
    /// Index of the spectrum.
    pub spectrum: usize,
    /// The window, rest vacuum Å.
    pub window_aa: (f64, f64),
    /// Reddening S′ over the window, % per 1000 Å.
    pub reddening_percent: Option<Measured>,
    /// A(θ)fρ at wavelengths (rest vacuum Å), cm; the error holds fit and flux calibration.
    pub afrho_cm: Vec<(f64, Measured)>,
    /// Colour temperature of the thermal emission, K, and its error when it was fitted.
    pub temperature_k: Option<(f64, Option<f64>)>,
    /// Thermal flux density in the middle of the window, erg s⁻¹ cm⁻² Å⁻¹.
    pub thermal_erg_s_cm2_aa: Option<Measured>,
}

/// The dust in every window with a continuum of sunlight, of a star, or with thermal emission.
pub fn dust(
    settings: &Settings,
    fits: &[(usize, SpectrumFit)],
    caveats: &mut Vec<Caveat>,
) -> Vec<DustResult> {
    let mut out = Vec::new();
    for (spectrum, fit) in fits {
        for window in &fit.windows {
            let continuum = &window.continuum;
            if continuum.carrier.is_none() && continuum.thermal.is_none() {
                continue;
            }
            out.push(of_window(settings, *spectrum, window));
        }
    }
    let measured = out.iter().any(|d| !d.afrho_cm.is_empty());
    if measured && !matches!(settings.aperture, Aperture::Circle { .. }) {
        caveats.push(Caveat::Other {
            code: "afrho-aperture",
            text:
                "A(θ)fρ is for the circle that takes in as much of a 1/ρ coma as the aperture does"
                    .to_owned(),
        });
    }
    if let Some(d) = out.iter().find(|d| {
        let t = d.temperature_k.and_then(|(k, sigma)| Some((k, sigma?)));
        t.is_some_and(|(k, sigma)| sigma > 0.3 * k)
    }) {
        caveats.push(Caveat::Other {
            code: "temperature-open",
            text: format!(
                "the dust temperature is hardly constrained by {:.0}–{:.0} Å: hold it, or fit one continuum over the whole spectrum",
                d.window_aa.0, d.window_aa.1
            ),
        });
    }
    out
}

fn of_window(settings: &Settings, spectrum: usize, window: &WindowFit) -> DustResult {
    let continuum = &window.continuum;
    let (low, high) = used_range_aa(window);
    let mut wanted: Vec<f64> = settings
        .afrho_at_aa
        .iter()
        .copied()
        .filter(|x| (low..=high).contains(x))
        .collect();
    if settings.afrho_at_aa.is_empty() {
        wanted.push(0.5 * (low + high));
    }
    DustResult {
        spectrum,
        window_aa: window.window_aa,
        reddening_percent: continuum.reddening_percent(low, high),
        afrho_cm: wanted
            .into_iter()
            .filter_map(|x| Some((x, afrho(settings, spectrum, window, x)?)))
            .collect(),
        temperature_k: continuum
            .thermal
            .map(|t| (t.temperature_k, t.temperature_sigma_k)),
        thermal_erg_s_cm2_aa: continuum.thermal.map(|t| t.flux_erg_s_cm2_aa),
    }
}

/// The range that samples of the fit span.
fn used_range_aa(window: &WindowFit) -> (f64, f64) {
    let mut used = window.samples.iter().filter(|s| s.used);
    let first = used.next().map_or(window.window_aa.0, |s| s.wavelength_aa);
    let last = used
        .next_back()
        .map_or(window.window_aa.1, |s| s.wavelength_aa);
    (first, last)
}

fn afrho(settings: &Settings, spectrum: usize, window: &WindowFit, x_aa: f64) -> Option<Measured> {
    let reflectance = window.continuum.reflectance_at(x_aa)?;
    let geometry = &settings.geometry;
    let radius_km = ApertureKm::at(&settings.aperture, geometry.observer_au).equivalent_radius_km();
    let unit = afrho_cm(
        1.0,
        1.0,
        radius_km,
        geometry.heliocentric_au,
        geometry.observer_au,
    );
    let found = reflectance.scaled(unit);
    let calibration = settings.spectra[spectrum].calibration_sigma * found.value;
    Some(Measured::new(found.value, found.sigma.hypot(calibration)))
}
