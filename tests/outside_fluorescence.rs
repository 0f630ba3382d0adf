//! Fluorescence efficiencies against outside values, exact limits and conservation laws.

use comagauge::atomic::{
    LevelSystem, LineKind, atom, bundled_atoms, cn_violet, infrared_bands, sun,
};
use comagauge::coma::equilibrium::{
    Conditions, Equilibrium, LineG, SolarField, infrared_g, spread, swings_curve,
};
use comagauge::ground::Species;
use serde::Deserialize;
use serde::de::DeserializeOwned;

fn external<T: DeserializeOwned>(name: &str) -> Vec<T> {
    let path = format!(
        "{}/tests/external/fluorescence/{name}",
        env!("CARGO_MANIFEST_DIR")
    );
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(path)
        .unwrap();
    reader.deserialize().map(|r| r.unwrap()).collect()
}

fn sunlight() -> SolarField {
    SolarField::sun(sun(None).unwrap())
}

fn load(name: &str) -> LevelSystem {
    atom(&Species::new(name), None).unwrap()
}

fn at(heliocentric_au: f64, heliocentric_km_s: f64) -> Conditions {
    Conditions {
        heliocentric_au,
        heliocentric_km_s,
        width_km_s: 0.0,
    }
}

#[derive(Deserialize)]
struct IndependentG {
    species: String,
    r_h_au: f64,
    rdot_km_s: f64,
    #[serde(rename = "wl_air_A")]
    air_aa: f64,
    #[serde(rename = "E_low_cm1")]
    lower_cm1: f64,
    g_photons_s: f64,
}

#[test]
fn agrees_with_an_independent_solution() {
    let field = sunlight();
    let rows: Vec<IndependentG> = external("g_independent.csv");
    for (species, name) in [("fe_i", "Fe I"), ("ni_i", "Ni I"), ("na_i", "Na I")] {
        let system = load(name);
        let mine: Vec<&IndependentG> = rows.iter().filter(|r| r.species == species).collect();
        for case in mine.chunk_by(|a, b| a.r_h_au == b.r_h_au && a.rdot_km_s == b.rdot_km_s) {
            let there = at(case[0].r_h_au, case[0].rdot_km_s);
            let solved = Equilibrium::solve(&system, &field, &there).unwrap();
            let mut worst = 0.0_f64;
            for row in &case[..10] {
                let off = |l: &LineG| (l.wavelength_air_aa - row.air_aa).abs();
                let line = solved
                    .lines()
                    .iter()
                    .filter(|l| off(l) < 0.01 && (l.lower_cm1 - row.lower_cm1).abs() < 0.01)
                    .min_by(|a, b| off(a).total_cmp(&off(b)))
                    .unwrap_or_else(|| panic!("no line at {} Å", row.air_aa));
                worst = worst.max((line.g_photons_s / row.g_photons_s - 1.0).abs());
            }
            println!(
                "{name} r_h {} au, {} km/s: worst of ten {worst:.1e}, relaxation {:.3e} s, stranded {:.1e}",
                there.heliocentric_au,
                there.heliocentric_km_s,
                solved.relaxation_s(),
                solved.stranded()
            );
            assert!(worst < 0.01, "{name} {there:?}: {worst}");
        }
    }
}

#[derive(Deserialize)]
struct Pair {
    species: String,
    #[serde(rename = "air_A")]
    air_aa: f64,
    #[serde(rename = "vac_A")]
    vacuum_aa: f64,
}

#[test]
fn strong_resonance_lines_are_where_they_were_published() {
    let pairs: Vec<Pair> = external("published_pairs_morton2003.csv");
    let field = sunlight();
    for name in ["Fe I", "Ni I", "Co I", "Cu I", "Na I", "K I"] {
        let system = load(name);
        let solved = Equilibrium::solve(&system, &field, &Conditions::UNIT).unwrap();
        let mut resonance: Vec<_> = solved
            .lines()
            .iter()
            .filter(|l| l.lower_cm1 == 0.0 && l.wavelength_vacuum_aa > 2001.0)
            .collect();
        resonance.sort_by(|a, b| {
            let a_of = |i: usize| system.lines()[i].einstein_a_per_s;
            a_of(b.line).total_cmp(&a_of(a.line))
        });
        let mut worst = 0.0_f64;
        for line in resonance.iter().take(if name == "Na I" { 2 } else { 4 }) {
            let off = pairs
                .iter()
                .filter(|p| p.species == name)
                .map(|p| {
                    let vacuum = (p.vacuum_aa - line.wavelength_vacuum_aa).abs();
                    vacuum.max((p.air_aa - line.wavelength_air_aa).abs())
                })
                .fold(f64::INFINITY, f64::min);
            worst = worst.max(off);
        }
        println!("{name}: strongest resonance lines within {worst:.4} Å");
        assert!(worst < 0.01, "{name}: {worst} Å");
    }
}

#[test]
fn sodium_d_is_nearly_two_level() {
    // Ground and upper level alone: x_u = (g_u/g_l) n̄ / (1 + n̄ (1 + g_u/g_l)), g = x_u A. Both D
    // lines share the ground level, and cascades through higher levels add 0.1–1 %.
    let system = load("Na I");
    let field = sunlight();
    let there = at(1.0, -30.0);
    let solved = Equilibrium::solve(&system, &field, &there).unwrap();
    for upper in [1, 2] {
        let line = &system.lines()[system
            .lines()
            .iter()
            .position(|l| l.lower == 0 && l.upper == upper)
            .unwrap()];
        let n = field.occupation(line.wavelength_vacuum_aa, &there);
        let weights = system.levels()[upper].weight / system.levels()[0].weight;
        let expected = line.einstein_a_per_s * weights * n / (1.0 + n * (1.0 + weights));
        let found = solved.populations()[upper] * line.einstein_a_per_s;
        println!("Na D: {found:.4} against two-level {expected:.4}");
        assert!((found / expected - 1.0).abs() < 0.02);
    }
}

#[test]
fn a_blackbody_gives_boltzmann() {
    for species in bundled_atoms() {
        let system = load(species.as_str());
        for temperature_k in [800.0, 5000.0] {
            let field = SolarField::planck(temperature_k).unwrap();
            let solved = Equilibrium::solve(&system, &field, &Conditions::UNIT).unwrap();
            let ground = solved.populations()[0] / system.levels()[0].weight;
            let hc_over_k = comagauge::ground::constants::HC_OVER_K_CM_K;
            let mut worst = 0.0_f64;
            for (i, level) in system.levels().iter().enumerate() {
                if solved.dropped().iter().any(|d| d.level == i) {
                    continue;
                }
                let boltzmann = (-hc_over_k * level.energy_cm1 / temperature_k).exp();
                let found = solved.populations()[i] / level.weight / ground;
                worst = worst.max((found / boltzmann - 1.0).abs());
            }
            assert!(worst < 1e-8, "{species} at {temperature_k} K: {worst:e}");
        }
    }
}

#[test]
fn a_blackbody_gives_boltzmann_for_cn_within_its_wavelengths() {
    // Its line wavelengths are tabulated apart from its levels, which limits the balance.
    let system = cn_violet(None).unwrap();
    let temperature_k = 5000.0;
    let field = SolarField::planck(temperature_k).unwrap();
    let solved = Equilibrium::solve(&system, &field, &Conditions::UNIT).unwrap();
    let ground = solved.populations()[0] / system.levels()[0].weight;
    let hc_over_k = comagauge::ground::constants::HC_OVER_K_CM_K;
    let mut worst = 0.0_f64;
    for (x, level) in solved.populations().iter().zip(system.levels()) {
        let boltzmann = (-hc_over_k * level.energy_cm1 / temperature_k).exp();
        worst = worst.max((x / level.weight / ground / boltzmann - 1.0).abs());
    }
    println!("CN: worst departure from Boltzmann {worst:.1e}");
    assert!(worst < 1e-3, "{worst:e}");
}

#[test]
fn populations_and_energy_are_conserved_everywhere() {
    let field = sunlight();
    let mut systems: Vec<LevelSystem> = bundled_atoms()
        .iter()
        .map(|s| atom(s, None).unwrap())
        .collect();
    systems.push(cn_violet(None).unwrap());
    for system in &systems {
        for heliocentric_au in [0.3, 0.6, 1.0, 1.7, 3.0, 6.0] {
            for heliocentric_km_s in [-60.0, -33.0, -10.0, -1.0, 0.0, 5.0, 17.0, 42.0, 60.0] {
                let there = at(heliocentric_au, heliocentric_km_s);
                let solved = Equilibrium::solve(system, &field, &there).unwrap();
                let x = solved.populations();
                let species = system.species();
                assert!(x.iter().all(|x| *x >= 0.0), "{species} {there:?}");
                assert!((x.iter().sum::<f64>() - 1.0).abs() < 1e-12, "{species}");
                // CN line wavelengths are tabulated, not differences of levels, hence its tolerance.
                let tolerance = if species.as_str() == "CN" { 1e-5 } else { 1e-8 };
                let balance = solved.emitted_erg_s() / solved.absorbed_erg_s() - 1.0;
                assert!(
                    balance.abs() < tolerance,
                    "{species} {there:?}: {balance:e}"
                );
                assert!(solved.lines().iter().all(|l| l.g_photons_s.is_finite()));
                assert!(solved.relaxation_s() > 0.0 && solved.relaxation_s().is_finite());
            }
        }
        let solved = Equilibrium::solve(system, &field, &Conditions::UNIT).unwrap();
        let traps = solved.dropped().iter().filter(|d| d.trap).count();
        println!(
            "{}: {} levels, {} dropped ({traps} traps), stranded {:.3}, contested {:.3}, relaxation {:.3e} s",
            system.species(),
            system.levels().len(),
            solved.dropped().len(),
            solved.stranded(),
            solved.contested(),
            solved.relaxation_s()
        );
    }
}

#[test]
fn errors_of_iron_lines_follow_their_data() {
    let system = load("Fe I");
    let field = sunlight();
    let there = at(1.0, -20.0);
    let solved = Equilibrium::solve(&system, &field, &there).unwrap();
    let drawn = spread(&system, &field, &there, 48, 11).unwrap();
    for line in solved.brightest(10) {
        let sigma = drawn.relative_sigma(line.line);
        println!(
            "Fe I {:.2} Å: g {:.2e} ± {:.0} %, first estimate {:.0} %",
            line.wavelength_air_aa,
            line.g_photons_s,
            100.0 * sigma,
            100.0 * line.relative_sigma
        );
        // No line is better than half its own A, none of the bright ones worse than a factor two.
        assert!(sigma > 0.5 * system.lines()[line.line].sigma_ln_a && sigma < 0.69);
    }
    let mean = |i: usize| {
        let sum: f64 = drawn.g_photons_s.iter().map(|g| g[i]).sum();
        sum / drawn.g_photons_s.len() as f64
    };
    let brightest = solved.brightest(1)[0];
    assert!((mean(brightest.line) / brightest.g_photons_s - 1.0).abs() < 0.2);
}

#[derive(Deserialize)]
struct PublishedG {
    species: String,
    band: String,
    low: f64,
    high: f64,
}

fn published(species: &str) -> PublishedG {
    let rows: Vec<PublishedG> = external("published_g.csv");
    rows.into_iter().find(|r| r.species == species).unwrap()
}

#[test]
fn cn_violet_lies_near_the_published_range() {
    let cn = cn_violet(None).unwrap();
    let velocities: Vec<f64> = (-12..=12).map(|i| 5.0 * f64::from(i)).collect();
    let curve = swings_curve(&cn, &sunlight(), &Conditions::UNIT, &velocities, |e| {
        e.band(0, 0).unwrap()
    })
    .unwrap();
    let published = published("CN");
    for (v, g) in velocities.iter().zip(&curve) {
        let outside = (g.g_erg_s / published.high).max(1.0) * (g.g_erg_s / published.low).min(1.0);
        println!(
            "CN 0-0 at {v:>4} km/s: {:.3} photons/s, {:.2e} erg/s, outside by {outside:.3}",
            g.g_photons_s, g.g_erg_s
        );
    }
    let low = curve
        .iter()
        .map(|g| g.g_erg_s)
        .fold(f64::INFINITY, f64::min);
    let high = curve.iter().map(|g| g.g_erg_s).fold(0.0, f64::max);
    println!(
        "CN 0-0: {low:.2e}–{high:.2e} erg/s, published {:.2e}–{:.2e}",
        published.low, published.high
    );
    // Both ends come out about 20 % high, by a common factor. A slower vibrational decay than assumed
    // here, with more molecules in v ≥ 1, would do that (see `cn_violet`); the published text does
    // not tell. The contrast between best and worst velocity is free of it.
    assert!((low / published.low - 1.0).abs() < 0.25, "{low:e}");
    assert!((high / published.high - 1.0).abs() < 0.25, "{high:e}");
    let contrast = (high / low) / (published.high / published.low);
    println!("CN 0-0: contrast over velocity against published {contrast:.3}");
    assert!((contrast - 1.0).abs() < 0.1, "{contrast}");
}

#[test]
fn infrared_fundamentals_lie_near_published_values() {
    let field = sunlight();
    for name in ["CO2", "CO", "H2O"] {
        let published = published(name);
        let bands = infrared_bands(None).unwrap();
        let band = bands
            .iter()
            .find(|b| b.species.as_str() == name && b.band == published.band)
            .unwrap();
        let g = infrared_g(band, &field, &Conditions::UNIT).unwrap();
        println!(
            "{name} {}: {:.3e} photons/s ± {:.0} %",
            band.band,
            g.g_photons_s,
            100.0 * g.relative_sigma
        );
        assert!(g.g_photons_s > 0.85 * published.low && g.g_photons_s < 1.15 * published.high);
    }
}

#[test]
fn bands_are_sums_of_their_lines() {
    let cn = cn_violet(None).unwrap();
    let solved = Equilibrium::solve(&cn, &sunlight(), &at(1.5, 20.0)).unwrap();
    let kind = LineKind::Band {
        upper_v: 0,
        lower_v: 0,
    };
    let sum: f64 = solved
        .lines()
        .iter()
        .filter(|l| l.kind == kind)
        .map(|l| l.g_erg_s)
        .sum();
    assert!((sum / solved.band(0, 0).unwrap().g_erg_s - 1.0).abs() < 1e-12);
    assert!(solved.band(7, 7).is_none());
    assert!(
        solved
            .caveats()
            .iter()
            .any(|c| c.code() == "red-bands-in-outline")
    );
}
