//! Time per fit of small windows: one Gaussian on a line, three tied Gaussians on a line, both on
//! 200 points with noise, from starting values a third of a width off; and the same with the whole
//! search for a start and all judgements (`fit_spectrum`).

use comagauge::fit::solver::{Solver, Stop, covariance};
use comagauge::fit::{BandModel, FitSettings, Resolution, WindowModel, fit_spectrum};
use comagauge::frame::{Aperture, Frame, Geometry, RestSpectrum, to_rest};
use comagauge::spectrum::{Sample, Spectrum};
use criterion::{Criterion, criterion_group, criterion_main};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::hint::black_box;

const SIGMA: f64 = 0.05;

fn scene(lines: &[(f64, f64, f64)]) -> (Vec<f64>, Vec<f64>) {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(3);
    let x: Vec<f64> = (0..200).map(|i| 5000.0 + 0.5 * f64::from(i)).collect();
    let y = x
        .iter()
        .map(|x| {
            let noise: f64 = StandardNormal.sample(&mut rng);
            let emission: f64 = lines
                .iter()
                .map(|(c, s, f)| f / (s * 2.5066) * (-0.5 * ((x - c) / s).powi(2)).exp())
                .sum();
            1.0 + 0.002 * (x - 5050.0) + emission + SIGMA * noise
        })
        .collect();
    (x, y)
}

fn spectrum(x: &[f64], y: &[f64]) -> RestSpectrum {
    let samples = x
        .iter()
        .zip(y)
        .enumerate()
        .map(|(i, (x, y))| Sample {
            wavelength_aa: *x,
            flux_erg_s_cm2_aa: *y,
            sigma_erg_s_cm2_aa: Some(SIGMA),
            flagged: false,
            line: i + 1,
        })
        .collect();
    let spectrum = Spectrum::new("bench", samples, false).expect("a spectrum");
    let geometry = Geometry::new(1.0, 0.0, 1.0, 0.0).expect("a geometry");
    to_rest(
        &spectrum,
        Frame::Comet,
        &geometry,
        &Aperture::Circle { radius_arcsec: 1.0 },
    )
}

fn near(c: &mut Criterion, name: &str, lines: &[(f64, f64, f64)], tied: bool) {
    let (x, y) = scene(lines);
    let sigma = vec![SIGMA; x.len()];
    let off: Vec<(f64, f64)> = lines
        .iter()
        .map(|(c, s, _)| (c + 0.3 * s, 1.3 * s))
        .collect();
    let mut solver = Solver::default();
    c.bench_function(name, |b| {
        b.iter(|| {
            let model = WindowModel::gaussians(&x, black_box(&y), &sigma, 1, &off, tied);
            let start = model.start().expect("a start");
            let bounds = vec![(f64::NEG_INFINITY, f64::INFINITY); start.len()];
            let minimum = solver
                .minimise(&model, &start, &bounds, Stop::default())
                .expect("a minimum");
            let free: Vec<usize> = (0..start.len()).collect();
            let cov = covariance(solver.columns(), x.len(), &free).expect("a covariance");
            black_box((minimum.chi2, cov[(0, 0)]))
        });
    });
}

fn whole(c: &mut Criterion, name: &str, lines: &[(f64, f64, f64)], tie: Option<&str>) {
    let (x, y) = scene(lines);
    let rest = spectrum(&x, &y);
    let bands = lines
        .iter()
        .enumerate()
        .map(|(i, (centre, _, _))| BandModel {
            tie: tie.map(str::to_owned),
            ..BandModel::gaussian(&i.to_string(), centre + 0.5, Some(0.0), (5000.0, 5099.5))
        })
        .collect();
    let mut settings = FitSettings::new(bands);
    settings.resolution = Some(Resolution::FwhmAa(4.0));
    settings.continuum.order = Some(1);
    c.bench_function(name, |b| {
        b.iter(|| black_box(fit_spectrum(black_box(&rest), &settings).expect("a fit")));
    });
}

fn fits(c: &mut Criterion) {
    let one = [(5050.0, 2.0, 8.0)];
    let three = [(5030.0, 2.0, 8.0), (5050.0, 2.0, 4.0), (5070.0, 2.0, 6.0)];
    near(c, "one Gaussian + line, from a near start", &one, false);
    near(
        c,
        "three tied Gaussians + line, from a near start",
        &three,
        true,
    );
    whole(
        c,
        "one Gaussian + line, with search and judgement",
        &one,
        None,
    );
    whole(
        c,
        "three tied Gaussians + line, with search and judgement",
        &three,
        Some("t"),
    );
}

criterion_group!(benches, fits);
criterion_main!(benches);
