//! False detections and broken limits of the fit alone, over many fast trials with held shapes.

use comagauge::fit::{BandModel, FitSettings, Freedom, Resolution, fit_spectrum};
use comagauge::forward::gaussian_per_aa;
use comagauge::frame::{Aperture, Frame, Geometry, to_rest};
use comagauge::rehearse::Share;
use comagauge::spectrum::{Columns, LineNumbers, Spectrum};
use rand::{RngExt, SeedableRng};
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use rayon::prelude::*;

const CENTRE_AA: f64 = 46_700.0;
const FWHM_AA: f64 = 300.0;
const SAMPLES: usize = 36;
const TRIALS: u64 = 20_000;

/// One trial: the fitted flux with its error, whether it counts as detected, and its limit.
struct Outcome {
    truth: f64,
    sigma: f64,
    detected: bool,
    limit: Option<f64>,
}

fn settings() -> FitSettings {
    let band = BandModel {
        centre: Freedom::Held,
        width: Freedom::Held,
        ..BandModel::gaussian(
            "line",
            CENTRE_AA,
            Some(0.0),
            (CENTRE_AA - 1500.0, CENTRE_AA + 1500.0),
        )
    };
    let mut settings = FitSettings::new(vec![band]);
    settings.resolution = Some(Resolution::FwhmAa(FWHM_AA));
    settings.continuum.order = Some(1);
    settings
}

/// Fits a line of the given flux on a sloped continuum with errors of one.
fn trial(settings: &FitSettings, truth: f64, rng: &mut Xoshiro256PlusPlus) -> Outcome {
    let x: Vec<f64> = (0..SAMPLES)
        .map(|i| CENTRE_AA - 1600.0 + 3200.0 * i as f64 / (SAMPLES - 1) as f64)
        .collect();
    let sample = |x: &f64| {
        let noise: f64 = StandardNormal.sample(rng);
        let continuum = 50.0 + 0.004 * (x - CENTRE_AA);
        continuum + truth * gaussian_per_aa(*x, CENTRE_AA, FWHM_AA) + noise
    };
    let columns = Columns {
        flux_erg_s_cm2_aa: x.iter().map(sample).collect(),
        sigma_erg_s_cm2_aa: Some(vec![1.0; SAMPLES]),
        wavelength_aa: x,
        flagged: Vec::new(),
        lines: LineNumbers::default(),
    };
    let spectrum = Spectrum::from_columns("trial", columns, false).expect("a spectrum");
    let geometry = Geometry::new(1.0, 0.0, 1.0, 0.0).expect("a geometry");
    let aperture = Aperture::Circle { radius_arcsec: 1.0 };
    let rest = to_rest(&spectrum, Frame::Comet, &geometry, &aperture);
    let fit = fit_spectrum(&rest, settings).expect("a fit");
    let band = &fit.bands[0];
    Outcome {
        truth,
        sigma: band.flux_erg_s_cm2.sigma,
        detected: band.detected,
        limit: band.flux_limit_erg_s_cm2,
    }
}

/// All trials, each with its own generator; the truth is made from a uniform number.
fn trials(seed: u64, truth: impl Fn(f64) -> f64 + Sync) -> Vec<Outcome> {
    let settings = settings();
    (0..TRIALS)
        .into_par_iter()
        .map(|k| {
            let stride = 0xd134_2543_de82_ef95_u64;
            let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed ^ (k + 1).wrapping_mul(stride));
            let uniform = rng.random();
            trial(&settings, truth(uniform), &mut rng)
        })
        .collect()
}

#[test]
fn an_absent_line_is_rarely_detected() {
    let found = Share::count(trials(5, |_| 0.0).iter().map(|o| o.detected));
    let percent = 100.0 * found.value().expect("trials");
    println!(
        "false detections: {} of {}, {percent:.3} %",
        found.count, found.of
    );
    assert!((0.07..=0.25).contains(&percent), "{percent} %");
}

#[test]
fn limits_hold_over_faint_lines() {
    // The error does not depend on the flux: shapes are held and errors given.
    let sigma = trials(6, |_| 0.0)[0].sigma;
    let outcomes = trials(7, |u| 3.0 * sigma * u);
    let limits = outcomes.iter().filter_map(|o| Some((o.limit?, o.truth)));
    let broken = Share::count(limits.map(|(limit, truth)| limit < truth));
    let percent = 100.0 * broken.value().expect("trials without a detection");
    let brightest = outcomes.iter().map(|o| o.truth).fold(0.0, f64::max);
    println!(
        "limits below the truth: {} of {}, {percent:.3} %",
        broken.count, broken.of
    );
    assert!(brightest > 2.99 * sigma && broken.of > 15_000);
    assert!(percent <= 0.6, "{percent} %");
}
