//! Makes the demo spectra of an invented comet: `cargo run --example make_demo [FOLDER]`.
//!
//! Composition in, spectrum out: production rates through the Haser model, g-factors and the
//! geometry to band fluxes, Gaussian bands on a continuum of reflected sunlight and heat, Gaussian
//! noise with a fixed seed. README.md beside this file holds the truth.

mod nearuv;

use comagauge::coma::{ApertureKm, Lengths};
use comagauge::forward::{band_flux_erg_s_cm2, gaussian_per_aa, grid_aa};
use comagauge::frame::Aperture;
use comagauge::ground::constants::{HC_ERG_AA, HC_OVER_K_CM_K, LIGHT_AA_S, LIGHT_KM_S};
use comagauge::ground::{Species, air_from_vacuum_aa};
use comagauge::tables::Tables;
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::fmt::Write;
use std::path::PathBuf;

/// One observation of the invented comet.
struct Scene {
    heliocentric_au: f64,
    observer_au: f64,
    observer_km_s: f64,
    radius_arcsec: f64,
    resolving_power: f64,
    samples_per_fwhm: f64,
    range_aa: (f64, f64),
    /// Band and production rate, s⁻¹.
    content: &'static [(&'static str, f64)],
    /// Reflected sunlight as a fraction of the Sun at 1 au, and its slope per 1000 Å.
    reflected: f64,
    reddening_per_1000_aa: f64,
    /// Emitting area over Δ², sr; temperature 278 K r_h^−½.
    thermal_sr: f64,
    /// Relative noise and noise floor, erg s⁻¹ cm⁻² Å⁻¹.
    noise: (f64, f64),
    seed: u64,
}

const INFRARED: Scene = Scene {
    heliocentric_au: 1.82,
    observer_au: 1.35,
    observer_km_s: 12.4,
    radius_arcsec: 2.0,
    resolving_power: 150.0,
    samples_per_fwhm: 2.2,
    range_aa: (24_000.0, 50_000.0),
    content: &[
        ("H2O-2.7um", 2.0e28),
        ("CO2-4.26um", 3.4e27),
        ("CO-4.67um", 1.6e27),
    ],
    reflected: 3.0e-15,
    reddening_per_1000_aa: 0.004,
    thermal_sr: 4.0e-15,
    noise: (0.006, 4.0e-19),
    seed: 20_310_417,
};

const OPTICAL: Scene = Scene {
    heliocentric_au: 1.21,
    observer_au: 0.78,
    observer_km_s: -17.9,
    radius_arcsec: 5.0,
    resolving_power: 1000.0,
    samples_per_fwhm: 2.5,
    range_aa: (3000.0, 6000.0),
    content: &[
        ("OH-3085", 4.0e28),
        ("NH-3360", 1.7e26),
        ("CN-3883", 1.0e26),
        ("C3-4050", 2.4e25),
        ("C2-4737", 1.3e26),
        ("C2-5165", 1.3e26),
    ],
    reflected: 1.6e-14,
    reddening_per_1000_aa: 0.08,
    thermal_sr: 0.0,
    noise: (0.006, 4.0e-16),
    seed: 20_310_611,
};

impl Scene {
    fn wavelengths_aa(&self) -> Vec<f64> {
        let (low, high) = self.range_aa;
        grid_aa(low, high, self.resolving_power, self.samples_per_fwhm)
    }

    /// Rest centre, full width with the instrument's, and flux of every band.
    fn bands(&self, tables: &Tables) -> Vec<(f64, f64, f64)> {
        let aperture = Aperture::Circle {
            radius_arcsec: self.radius_arcsec,
        };
        let km = ApertureKm::at(&aperture, self.observer_au);
        self.content
            .iter()
            .map(|(id, production)| {
                let band = tables.band(id).expect("a band of the line lists");
                let g = tables.default_efficiency(id).expect("a g-factor");
                let (lengths, speed) = self.coma(tables, &band.species);
                let flux = band_flux_erg_s_cm2(
                    *production,
                    (&lengths, speed),
                    &km,
                    g.g_at_photons_s(self.heliocentric_au),
                    band.centre_aa,
                    self.observer_au,
                );
                let fwhm = band.fwhm_aa.hypot(band.centre_aa / self.resolving_power);
                (band.centre_aa, fwhm, flux)
            })
            .collect()
    }

    fn coma(&self, tables: &Tables, species: &Species) -> (Lengths, f64) {
        if let Some(row) = tables.scale_lengths("ahearn1995", species) {
            let (parent_km, daughter_km) = row.at_km(self.heliocentric_au);
            return (
                Lengths {
                    parent_km,
                    daughter_km: Some(daughter_km),
                },
                row.speed_km_s,
            );
        }
        let law = tables.speed_law("parents-0.85").expect("a speed law");
        let speed = law.at_km_s(self.heliocentric_au);
        let rate = tables
            .photo_rate(species)
            .expect("a photo rate")
            .quiet_per_s;
        let parent_km = speed * self.heliocentric_au.powi(2) / rate;
        (
            Lengths {
                parent_km,
                daughter_km: None,
            },
            speed,
        )
    }

    fn continuum(&self, tables: &Tables, x_aa: f64) -> f64 {
        // A smooth Sun: a black body of 5772 K with the solid angle of the Sun at 1 au. The real
        // one has lines that the Chebyshev continuum of this demo's plans could not follow.
        let sun = tables
            .solar()
            .irradiance_erg_s_cm2_aa(12_000.0)
            .expect("inside the table");
        let smooth = sun * planck(x_aa, 5772.0) / planck(12_000.0, 5772.0);
        let slope = 1.0 + self.reddening_per_1000_aa * (x_aa - 4500.0) / 1000.0;
        let heat = planck(x_aa, 278.0 / self.heliocentric_au.sqrt());
        self.reflected * slope * smooth + self.thermal_sr * heat
    }

    /// Observed vacuum wavelength Å, flux, error.
    fn samples(&self, tables: &Tables) -> Vec<(f64, f64, f64)> {
        let bands = self.bands(tables);
        let beta = self.observer_km_s / LIGHT_KM_S;
        let doppler = ((1.0 + beta) / (1.0 - beta)).sqrt();
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(self.seed);
        self.wavelengths_aa()
            .into_iter()
            .map(|x| {
                let rest = x / doppler;
                let emission: f64 = bands
                    .iter()
                    .map(|(centre, fwhm, flux)| flux * gaussian_per_aa(rest, *centre, *fwhm))
                    .sum();
                let clean = self.continuum(tables, rest) + emission;
                let sigma = (self.noise.0 * clean).hypot(self.noise.1);
                let noise: f64 = StandardNormal.sample(&mut rng);
                (x, clean + sigma * noise, sigma)
            })
            .collect()
    }
}

/// Planck function, erg s⁻¹ cm⁻² Å⁻¹ sr⁻¹.
fn planck(x_aa: f64, temperature_k: f64) -> f64 {
    let cm = x_aa * 1e-8;
    2.0 * HC_ERG_AA * LIGHT_AA_S / x_aa.powi(5) * 1e16
        / (HC_OVER_K_CM_K / (cm * temperature_k)).exp_m1()
}

fn infrared(tables: &Tables) -> String {
    let mut out = String::from(
        "# Invented comet C/2031 A1; made by make_demo.rs\n\
         # wavelength in vacuum, micron; flux density and error, W m-2 um-1\n\
         wavelength,flux,error\n",
    );
    for (x, flux, sigma) in INFRARED.samples(tables) {
        // 1 erg s⁻¹ cm⁻² Å⁻¹ = 10 W m⁻² µm⁻¹.
        writeln!(
            out,
            "{:.6},{:.6e},{:.4e}",
            x * 1e-4,
            flux * 10.0,
            sigma * 10.0
        )
        .expect("memory");
    }
    out
}

fn optical(tables: &Tables) -> String {
    let mut out = String::from(
        "# Invented comet C/2031 A1; made by make_demo.rs\n\
         # wavelength in air, Angstrom; flux density and error, erg s-1 cm-2 Angstrom-1; flag 1 = cosmic ray\n\
         wavelength flux error flag\n",
    );
    for (i, (x, flux, sigma)) in OPTICAL.samples(tables).into_iter().enumerate() {
        let hit = i % 389 == 200;
        let flux = if hit { flux + 60.0 * sigma } else { flux };
        let (air, flag) = (air_from_vacuum_aa(x), u8::from(hit));
        writeln!(out, "{air:.4} {flux:.6e} {sigma:.4e} {flag}").expect("memory");
    }
    out
}

fn main() -> std::io::Result<()> {
    let folder = std::env::args()
        .nth(1)
        .map_or_else(|| PathBuf::from("demo-spectra"), PathBuf::from);
    let tables = Tables::bundled();
    std::fs::write(folder.join("infrared.csv"), infrared(&tables))?;
    std::fs::write(folder.join("optical.txt"), optical(&tables))?;
    std::fs::write(folder.join("nearuv.txt"), nearuv::near_ultraviolet())
}
