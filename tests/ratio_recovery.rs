//! Injection and recovery of ratios: spectra of a known composition through the whole analysis, with
//! noise as the only doubt, so that the intervals must cover as often as they say.

use comagauge::analysis::{Settings, analyse};
use comagauge::coma::molecules_per_flux;
use comagauge::plan::{check, read_plan};
use comagauge::spectrum::{Sample, Spectrum};
use comagauge::tables::Tables;
use rand::{RngExt, SeedableRng};
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::path::Path;

const TRIALS: usize = 150;

fn settings() -> Settings {
    let plan = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-spectra/infrared.toml");
    let mut settings = check(&read_plan(&plan).unwrap(), &Tables::bundled())
        .unwrap()
        .settings;
    // Noise alone: no error of calibration, g, lifetimes or speed.
    settings.spectra[0].calibration_sigma = 0.0;
    settings.speed_sigma = 0.0;
    for band in &mut settings.bands {
        band.efficiency.as_mut().unwrap().relative_sigma = 0.0;
    }
    for species in &mut settings.species {
        species.coma.as_mut().unwrap().length_sigma = 0.0;
    }
    settings.draws.count = 2000;
    settings
}

/// A spectrum at R ≈ 150 with the given band fluxes on a random slope, in the observer's frame.
fn spectrum(settings: &Settings, fluxes: &[f64], rng: &mut Xoshiro256PlusPlus) -> Spectrum {
    let velocity_stretch = 1.0 + settings.geometry.observer_km_s / 299_792.458;
    let (level, slope) = (
        1e-15 * (0.5 + rng.random::<f64>()),
        rng.random::<f64>() - 0.7,
    );
    let sigma = 4e-17;
    let samples = (0..260)
        .map(|i| {
            let x = 24_000.0 * (f64::from(i) / 345.0).exp();
            let rest = x / velocity_stretch;
            let mut value = level * (1.0 + slope * (rest - 36_000.0) / 24_000.0);
            for (band, flux) in settings.bands.iter().zip(fluxes) {
                let centre = band.model.centre_aa;
                let fwhm = band.model.fwhm_aa.unwrap().hypot(centre / 150.0);
                let s = fwhm / (8.0 * 2f64.ln()).sqrt();
                let u = (rest - centre) / s;
                value += flux / (s * (2.0 * std::f64::consts::PI).sqrt()) * (-0.5 * u * u).exp();
            }
            let noise: f64 = StandardNormal.sample(rng);
            Sample {
                wavelength_aa: x,
                flux_erg_s_cm2_aa: value + sigma * noise,
                sigma_erg_s_cm2_aa: Some(sigma),
                flagged: false,
                line: i as usize + 1,
            }
        })
        .collect();
    Spectrum::new("synthetic", samples, false).unwrap()
}

#[test]
fn intervals_cover_as_often_as_they_say() {
    let settings = settings();
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(20_260_101);
    let fluxes = [1.4e-12, 8.0e-13, 4.0e-13];
    // The factor from flux ratio to production ratio, from the analysis of a noiseless flux pair.
    let mut inside = [[0_usize; 2]; 2];
    let mut residence = None;
    for _ in 0..TRIALS {
        let done = analyse(&[spectrum(&settings, &fluxes, &mut rng)], &settings).unwrap();
        for (k, ratio) in done.ratios.iter().take(2).enumerate() {
            let i = ratio.ratio.interval.expect("detected");
            // Q ∝ M/τ; τ follows from any one trial because its draws have no spread.
            let tau = |s: usize| {
                done.species[s].molecules.value / done.species[s].production_per_s.unwrap().value
            };
            let molecules = |b: usize| {
                fluxes[b]
                    * molecules_per_flux(
                        settings.bands[b].efficiency.as_ref().unwrap().g_photons_s,
                        settings.bands[b].model.centre_aa,
                        settings.geometry.observer_au,
                    )
            };
            let (of, to) = (k + 1, 0);
            let truth = molecules(of) / tau(of) / (molecules(to) / tau(to));
            let first = *residence.get_or_insert(tau(0));
            assert!((tau(0) / first - 1.0).abs() < 1e-9);
            inside[k][0] += usize::from(i.low68 < truth && truth < i.high68);
            inside[k][1] += usize::from(i.low95 < truth && truth < i.high95);
        }
    }
    for (k, [c68, c95]) in inside.into_iter().enumerate() {
        let (c68, c95) = (c68 as f64 / TRIALS as f64, c95 as f64 / TRIALS as f64);
        println!("ratio {k}: 68.3 % intervals cover {c68:.3}, 95.4 % cover {c95:.3}");
        // Three standard deviations of a binomial of 150.
        assert!((0.57..=0.80).contains(&c68), "{c68}");
        assert!((0.90..=1.0).contains(&c95), "{c95}");
    }
}
