//! Time of one statistical equilibrium, of a Swings curve and of an error estimate.

use comagauge::atomic::{atom, cn_violet, sun};
use comagauge::coma::equilibrium::{Conditions, Equilibrium, SolarField, spread, swings_curve};
use comagauge::ground::Species;
use criterion::{Criterion, criterion_group, criterion_main};
use std::hint::black_box;

fn equilibrium(c: &mut Criterion) {
    let field = SolarField::sun(sun(None).expect("bundled"));
    let iron = atom(&Species::new("Fe I"), None).expect("bundled");
    let cn = cn_violet(None).expect("bundled");
    let at = Conditions {
        heliocentric_km_s: -20.0,
        ..Conditions::UNIT
    };
    let velocities: Vec<f64> = (-60..=60).map(f64::from).collect();
    let mut group = c.benchmark_group("equilibrium");
    group.sample_size(10);
    group.bench_function("read the tables of Fe I", |b| {
        b.iter(|| atom(black_box(&Species::new("Fe I")), None));
    });
    group.bench_function("read the Sun", |b| b.iter(|| sun(black_box(None))));
    group.bench_function("Fe I, one", |b| {
        b.iter(|| Equilibrium::solve(&iron, &field, black_box(&at)));
    });
    group.bench_function("CN, one", |b| {
        b.iter(|| Equilibrium::solve(&cn, &field, black_box(&at)));
    });
    group.bench_function("Fe I, 121 velocities", |b| {
        b.iter(|| {
            swings_curve(&iron, &field, black_box(&at), &velocities, |e| {
                e.brightest(1)[0].g_photons_s
            })
        });
    });
    group.bench_function("CN, 121 velocities", |b| {
        b.iter(|| swings_curve(&cn, &field, black_box(&at), &velocities, |e| e.band(0, 0)));
    });
    group.bench_function("Fe I, 100 draws", |b| {
        b.iter(|| spread(&iron, &field, black_box(&at), 100, 1));
    });
    group.finish();
}

criterion_group!(benches, equilibrium);
criterion_main!(benches);
