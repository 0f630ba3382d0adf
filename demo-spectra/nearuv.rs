//! The near-ultraviolet demo: all lines of Ni I, Fe I and CN from the statistical equilibrium at the
//! comet on faint sunlight reflected by dust, at high resolution.

use comagauge::atomic::{atom, cn_violet, sun};
use comagauge::coma::equilibrium::{Conditions, Equilibrium, SolarField};
use comagauge::forward::{gaussian_per_aa, grid_aa};
use comagauge::frame::Aperture;
use comagauge::ground::constants::LIGHT_KM_S;
use comagauge::ground::{Species, air_from_vacuum_aa};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::f64::consts::PI;
use std::fmt::Write;

const HELIOCENTRIC_AU: f64 = 3.0;
const HELIOCENTRIC_KM_S: f64 = 19.9;
const OBSERVER_AU: f64 = 2.55;
const OBSERVER_KM_S: f64 = -8.4;
const APERTURE: Aperture = Aperture::Slit {
    width_arcsec: 0.5,
    length_arcsec: 10.0,
    offset_across_arcsec: 0.0,
    offset_along_arcsec: 0.0,
};
const RESOLVING_POWER: f64 = 40_000.0;
const SAMPLES_PER_FWHM: f64 = 2.2;
const RANGE_AA: (f64, f64) = (3300.0, 3900.0);
/// Mean column in the aperture, cm⁻².
const COLUMNS_CM2: [(&str, f64); 3] = [("Ni I", 1.2e10), ("Fe I", 1.6e10), ("CN", 2.0e11)];
/// Reflected sunlight as a fraction of the Sun at 1 au.
const REFLECTED: f64 = 5.0e-18;
/// Relative noise and noise floor, erg s⁻¹ cm⁻² Å⁻¹.
const NOISE: (f64, f64) = (0.01, 3.0e-16);
const SEED: u64 = 20_320_111;
/// Full width at half maximum of the high-resolution solar table above 3500 Å.
const SOLAR_FWHM_AA: f64 = 0.06;

/// Vacuum wavelength, Å, and flux, erg s⁻¹ cm⁻², of every line.
fn lines() -> Vec<(f64, f64)> {
    let field = SolarField::sun(sun(None).expect("the solar table"));
    let at = Conditions {
        heliocentric_au: HELIOCENTRIC_AU,
        heliocentric_km_s: HELIOCENTRIC_KM_S,
        ..Conditions::UNIT
    };
    let area_over_4pi_delta2 = {
        let delta_cm = OBSERVER_AU * 1.495_978_707e13;
        APERTURE.area_cm2(OBSERVER_AU) / (4.0 * PI * delta_cm * delta_cm)
    };
    let mut out = Vec::new();
    for (name, column_cm2) in COLUMNS_CM2 {
        let system = match name {
            "CN" => cn_violet(None),
            _ => atom(&Species::new(name), None),
        };
        let solved = Equilibrium::solve(&system.expect("levels"), &field, &at).expect("a solution");
        let seen = solved.lines().iter().filter(|l| {
            l.g_erg_s > 0.0 && (RANGE_AA.0..RANGE_AA.1 + 5.0).contains(&l.wavelength_vacuum_aa)
        });
        out.extend(seen.map(|l| {
            (
                l.wavelength_vacuum_aa,
                column_cm2 * area_over_4pi_delta2 * l.g_erg_s,
            )
        }));
    }
    out.sort_by(|a, b| a.0.total_cmp(&b.0));
    out
}

/// The spectrum as text.
pub fn near_ultraviolet() -> String {
    let lines = lines();
    let sunlight = sun(None).expect("the solar table");
    let beta = OBSERVER_KM_S / LIGHT_KM_S;
    let doppler = ((1.0 + beta) / (1.0 - beta)).sqrt();
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(SEED);
    let mut out = String::from(
        "# Invented comet C/2031 A1; made by make_demo.rs\n\
         # wavelength in air, Angstrom; flux density and error, erg s-1 cm-2 Angstrom-1\n\
         wavelength flux error\n",
    );
    for x in grid_aa(RANGE_AA.0, RANGE_AA.1, RESOLVING_POWER, SAMPLES_PER_FWHM) {
        let rest = x / doppler;
        let fwhm = rest / RESOLVING_POWER;
        let reach = 4.0 * fwhm;
        let from = lines.partition_point(|l| l.0 < rest - reach);
        let emission: f64 = lines[from..]
            .iter()
            .take_while(|l| l.0 < rest + reach)
            .map(|(centre, flux)| flux * gaussian_per_aa(rest, *centre, fwhm))
            .sum();
        // Dust recedes from the Sun with the comet. Below 3500 Å the table is coarser than the
        // instrument (0.4 Å) and averaging makes it no finer.
        let left_aa = rest / (1.0 + HELIOCENTRIC_KM_S / LIGHT_KM_S);
        let missing = (fwhm * fwhm - SOLAR_FWHM_AA * SOLAR_FWHM_AA)
            .max(0.0)
            .sqrt();
        let width = if left_aa > 3500.0 { missing } else { 0.0 };
        let continuum = REFLECTED * sunlight.averaged_erg_s_cm2_aa(left_aa, width);
        let clean = continuum + emission;
        let sigma = (NOISE.0 * clean).hypot(NOISE.1);
        let noise: f64 = StandardNormal.sample(&mut rng);
        let flux = clean + sigma * noise;
        writeln!(out, "{:.4} {flux:.4e} {sigma:.3e}", air_from_vacuum_aa(x)).expect("memory");
    }
    out
}
