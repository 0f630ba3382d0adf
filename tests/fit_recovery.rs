//! Injection and recovery with the fit alone: known Gaussians on sloped continua with known noise.

use comagauge::fit::{
    BandModel, FitSettings, Freedom, Resolution, Sampling, SpectrumFit, Structure, features,
    fit_spectrum,
};
use comagauge::frame::{Aperture, Frame, Geometry, RestSpectrum, to_rest};
use comagauge::spectrum::{Sample, Spectrum};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

fn rest(samples: Vec<Sample>) -> RestSpectrum {
    let spectrum = Spectrum::new("synthetic", samples, false).expect("a spectrum");
    let geometry = Geometry::new(1.0, 0.0, 1.0, 0.0).expect("a geometry");
    to_rest(
        &spectrum,
        Frame::Comet,
        &geometry,
        &Aperture::Circle { radius_arcsec: 1.0 },
    )
}

/// (centre, full width, flux)
type Line = (f64, f64, f64);

struct Scene {
    x: Vec<f64>,
    lines: Vec<Line>,
    continuum: fn(f64) -> f64,
    sigma: f64,
}

impl Scene {
    fn draw(&self, rng: &mut Xoshiro256PlusPlus, with_errors: bool) -> RestSpectrum {
        let samples = self
            .x
            .iter()
            .enumerate()
            .map(|(i, x)| {
                let noise: f64 = StandardNormal.sample(rng);
                let emission: f64 = self.lines.iter().map(|l| gaussian(*x, *l)).sum();
                Sample {
                    wavelength_aa: *x,
                    flux_erg_s_cm2_aa: (self.continuum)(*x) + emission + self.sigma * noise,
                    sigma_erg_s_cm2_aa: with_errors.then_some(self.sigma),
                    flagged: false,
                    line: i + 1,
                }
            })
            .collect();
        rest(samples)
    }
}

fn gaussian(x: f64, (centre, fwhm, flux): Line) -> f64 {
    let sigma = fwhm / (8.0 * 2f64.ln()).sqrt();
    let u = (x - centre) / sigma;
    flux / (sigma * (2.0 * std::f64::consts::PI).sqrt()) * (-0.5 * u * u).exp()
}

fn band(id: &str, centre: f64, half_window: f64) -> BandModel {
    let window = (centre - half_window, centre + half_window);
    BandModel::gaussian(id, centre, Some(0.0), window)
}

fn grid(from: f64, to: f64, n: usize) -> Vec<f64> {
    (0..n)
        .map(|i| from + (to - from) * i as f64 / (n - 1) as f64)
        .collect()
}

/// Mean and scatter of (fitted − true)/σ for each line over many trials.
fn pulls(scene: &Scene, settings: &FitSettings, trials: u64, errors: bool) -> Vec<(f64, f64)> {
    let mut sums = vec![(0.0, 0.0); scene.lines.len()];
    for seed in 0..trials {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed);
        let fit = fit_spectrum(&scene.draw(&mut rng, errors), settings).expect("a fit");
        for (i, band) in fit.bands.iter().enumerate() {
            let pull = (band.flux_erg_s_cm2.value - scene.lines[i].2) / band.flux_erg_s_cm2.sigma;
            sums[i].0 += pull;
            sums[i].1 += pull * pull;
        }
    }
    let n = trials as f64;
    sums.iter()
        .map(|(s, q)| (s / n, (q / n - (s / n).powi(2)).sqrt()))
        .collect()
}

fn check(name: &str, found: &[(f64, f64)], trials: u64) {
    let bias = 3.5 / (trials as f64).sqrt();
    for (mean, scatter) in found {
        println!("{name}: mean pull {mean:+.3}, scatter {scatter:.3}");
        assert!(
            mean.abs() < bias.max(0.12),
            "{name}: biased, mean pull {mean:+.3}"
        );
        assert!(
            (0.88..1.13).contains(scatter),
            "{name}: scatter of pulls {scatter:.3}"
        );
    }
}

#[test]
fn blend_on_a_slope_is_unbiased() {
    let scene = Scene {
        x: grid(40_000.0, 49_000.0, 160),
        lines: vec![
            (42_600.0, 290.0, 900.0),
            (43_100.0, 290.0, 300.0),
            (46_700.0, 320.0, 40.0),
        ],
        continuum: |x| 1.0 + 0.4 * (x - 44_500.0) / 4_500.0,
        sigma: 0.12,
    };
    let mut settings = FitSettings::new(vec![
        band("a", 42_600.0, 2_000.0),
        band("b", 43_100.0, 2_000.0),
        band("c", 46_700.0, 1_900.0),
    ]);
    settings.resolution = Some(Resolution::ResolvingPower(147.0));
    check("blend", &pulls(&scene, &settings, 400, true), 400);
}

#[test]
fn zero_flux_stays_unbiased_and_false_detections_are_rare() {
    let scene = Scene {
        x: grid(3_800.0, 4_000.0, 120),
        lines: vec![(3_883.0, 4.0, 0.0)],
        continuum: |x| 2.0 + 0.001 * (x - 3_900.0),
        sigma: 0.1,
    };
    let mut settings = FitSettings::new(vec![band("CN", 3_883.0, 80.0)]);
    settings.resolution = Some(Resolution::FwhmAa(4.0));
    let found = pulls(&scene, &settings, 1500, true);
    check("zero flux", &found, 1500);
}

#[test]
fn a_wrong_expected_width_is_found_and_freed() {
    let scene = Scene {
        x: grid(3_800.0, 4_000.0, 160),
        lines: vec![(3_884.5, 5.0, 12.0)],
        continuum: |_| 1.0,
        sigma: 0.1,
    };
    let mut wide = band("CN", 3_883.0, 80.0);
    wide.fwhm_aa = Some(20.0);
    let settings = FitSettings::new(vec![wide]);
    let found = pulls(&scene, &settings, 300, true);
    println!("wrong width: {found:?}");
    assert!(
        found[0].0.abs() < 0.3 && (0.85..1.2).contains(&found[0].1),
        "{found:?}"
    );
}

#[test]
fn errors_estimated_from_the_scatter_are_right() {
    let scene = Scene {
        x: grid(5_000.0, 5_300.0, 200),
        lines: vec![(5_160.0, 20.0, 30.0)],
        continuum: |x| 3.0 - 0.002 * (x - 5_100.0),
        sigma: 0.15,
    };
    let mut one = band("C2", 5_160.0, 140.0);
    one.fwhm_aa = Some(20.0);
    let found = pulls(&scene, &FitSettings::new(vec![one]), 300, false);
    println!("estimated errors: {found:?}");
    assert!(
        found[0].0.abs() < 0.25 && (0.85..1.2).contains(&found[0].1),
        "{found:?}"
    );
}

#[test]
fn tied_bands_share_velocity_and_width() {
    let shift = 1.0 + 2.0e-4;
    let scene = Scene {
        x: grid(6_250.0, 6_420.0, 300),
        lines: vec![(6_302.0 * shift, 3.0, 9.0), (6_365.5 * shift, 3.0, 3.0)],
        continuum: |_| 1.0,
        sigma: 0.05,
    };
    let mut settings = FitSettings::new(vec![band("a", 6_302.0, 60.0), band("b", 6_365.5, 60.0)]);
    for b in &mut settings.bands {
        b.tie = Some("O".to_owned());
    }
    settings.resolution = Some(Resolution::FwhmAa(2.5));
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(1);
    let fit: SpectrumFit = fit_spectrum(&scene.draw(&mut rng, true), &settings).expect("a fit");
    let ratio = |i: usize, expected: f64| fit.bands[i].centre_aa / expected;
    assert!((ratio(0, 6_302.0) - ratio(1, 6_365.5)).abs() < 1e-12);
    assert!((fit.bands[0].fwhm_aa - fit.bands[1].fwhm_aa).abs() < 1e-9);
    assert!((ratio(0, 6_302.0) - shift).abs() < 3e-5);
}

#[test]
fn pixel_sampling_keeps_the_flux_of_an_undersampled_line() {
    for phase in [0.0, 0.13, 0.25, 0.41, 0.5] {
        let centre = 100.0 + phase;
        let scene = Scene {
            x: grid(60.0, 140.0, 81),
            lines: Vec::new(),
            continuum: |_| 1.0,
            sigma: 0.01,
        };
        let fine = 400;
        let samples = scene
            .x
            .iter()
            .enumerate()
            .map(|(i, x)| {
                let mean: f64 = (0..fine)
                    .map(|k| x - 0.5 + (f64::from(k) + 0.5) / f64::from(fine))
                    .map(|y| gaussian(y, (centre, 1.2, 5.0)))
                    .sum::<f64>()
                    / f64::from(fine);
                Sample {
                    wavelength_aa: *x,
                    flux_erg_s_cm2_aa: 1.0 + mean,
                    sigma_erg_s_cm2_aa: Some(0.01),
                    flagged: false,
                    line: i + 1,
                }
            })
            .collect();
        let mut settings = FitSettings::new(vec![band("l", 100.2, 39.0)]);
        settings.resolution = Some(Resolution::FwhmAa(1.3));
        settings.sampling = Sampling::Pixel;
        let fit = fit_spectrum(&rest(samples), &settings).expect("a fit");
        let found = fit.bands[0].flux_erg_s_cm2.value;
        assert!((found / 5.0 - 1.0).abs() < 5e-3, "phase {phase}: {found}");
    }
}

#[test]
fn impossible_fits_are_refused_in_words() {
    let x = grid(5_000.0, 5_010.0, 6);
    let scene = Scene {
        x,
        lines: vec![],
        continuum: |_| 1.0,
        sigma: 0.1,
    };
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(1);
    let spectrum = scene.draw(&mut rng, true);
    let short = fit_spectrum(
        &spectrum,
        &FitSettings::new(vec![band("s", 5_005.0, 5.0); 3]),
    );
    let text = short.expect_err("too short").to_string();
    assert!(text.contains("remedy"), "{text}");
    let outside = fit_spectrum(
        &spectrum,
        &FitSettings::new(vec![band("out", 9_000.0, 50.0)]),
    );
    let text = outside.expect_err("outside").to_string();
    assert!(text.contains("lies outside"), "{text}");
}

/// A band of four lines with tabulated shares 0.4, 0.3, 0.2, 0.1: the third is three times too bright,
/// the last two are nearer than a width to each other.
#[test]
fn lines_of_a_band_are_measured_one_by_one() {
    let (centre_aa, structure) =
        Structure::of_lines(&[(3600.0, 0.4), (3602.0, 0.3), (3605.0, 0.2), (3605.05, 0.1)])
            .unwrap();
    let mut model = band("lines", centre_aa, 5.0);
    model.structure = structure;
    model.width = Freedom::Held;
    let mut settings = FitSettings::new(vec![model]);
    settings.resolution = Some(Resolution::FwhmAa(0.1));
    settings.continuum.order = Some(1);
    let scene = Scene {
        x: grid(3597.0, 3609.0, 300),
        lines: vec![
            (3600.0, 0.1, 400.0),
            (3602.0, 0.1, 300.0),
            (3605.0, 0.1, 600.0),
            (3605.05, 0.1, 300.0),
        ],
        continuum: |x| 500.0 + 20.0 * (x - 3603.0),
        sigma: 60.0,
    };
    let wanted = [400.0, 300.0, 900.0];
    let mut sums = [(0.0, 0.0); 3];
    let trials = 300;
    for seed in 0..trials {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed);
        let fit = fit_spectrum(&scene.draw(&mut rng, true), &settings).expect("a fit");
        let found = features(&fit, &[0], Sampling::Centre).expect("features");
        let sizes: Vec<usize> = found.list.iter().map(|f| f.lines.len()).collect();
        assert_eq!(sizes, [1, 1, 2]);
        assert!(found.list[0].others[0] < 1e-6);
        // The weak companion lies in the strong line's light: more than twice its own.
        assert!(found.list[2].others[1] > 1.0 && found.list[2].others[0] < 0.5);
        for (i, f) in found.list.iter().enumerate() {
            let flux = f.flux_erg_s_cm2;
            let pull = (flux.value - wanted[i]) / flux.sigma;
            sums[i].0 += pull;
            sums[i].1 += pull * pull;
        }
    }
    let n = trials as f64;
    for (i, (s, q)) in sums.iter().enumerate() {
        let (mean, scatter) = (s / n, (q / n - (s / n).powi(2)).sqrt());
        println!("line {i}: pull {mean:+.3}, scatter {scatter:.3}");
        assert!(
            mean.abs() < 0.25 && (scatter - 1.0).abs() < 0.15,
            "{mean} {scatter}"
        );
    }
}
