//! Envelopes: a band with rotational structure is measured right by its lines, and a single Gaussian
//! in its place is warned of. Line positions are checked against HITRAN in `outside_bands.rs`.

use comagauge::atomic::RotationalBand;
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::fmt::Write;
use std::path::Path;
use std::process::Command;

const PLAN: &str = r#"
[comet]
label = "C/2031 A1"
heliocentric_au = 1.0
heliocentric_km_s = 0.0
observer_au = 1.0
observer_km_s = 0.0
[aperture]
radius_arcsec = 2.0
[[spectrum]]
file = "co2.csv"
wavelength_unit = "um"
medium = "vacuum"
flux_unit = "erg/s/cm2/Angstrom"
frame = "comet"
resolving_power = 1000
calibration_sigma = 0.05
[measure]
bands = ["CO2-4.26um"]
ratios = []
"#;

const FLUX: f64 = 1e-13;

/// A spectrum at R = 1000 of CO₂ at 70 K on a slope, S/N per sample near 30 at the band's peak.
fn spectrum(seed: u64) -> String {
    let band = RotationalBand::load("CO2-4.26um", None).unwrap().unwrap();
    let lines = band.lines(70.0).unwrap();
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed);
    let (sigma, error) = (42_600.0 / 1000.0 / (8.0 * 2f64.ln()).sqrt(), 1e-17);
    let mut out = String::from("wavelength,flux,error\n");
    for i in 0..230 {
        let x = 41_000.0 + 16.0 * f64::from(i);
        let emission: f64 = lines
            .iter()
            .map(|l| {
                let u = (x - l.vacuum_aa) / sigma;
                FLUX * l.share / (sigma * (2.0 * std::f64::consts::PI).sqrt())
                    * (-0.5 * u * u).exp()
            })
            .sum();
        let noise: f64 = StandardNormal.sample(&mut rng);
        let value = 3e-16 * (1.0 - (x - 42_600.0) / 9000.0) + emission + error * noise;
        writeln!(out, "{},{value:e},{error:e}", x * 1e-4).unwrap();
    }
    out
}

fn measure(dir: &Path, plan: &str, seed: u64) -> serde_json::Value {
    std::fs::write(dir.join("co2.csv"), spectrum(seed)).unwrap();
    std::fs::write(dir.join("plan.toml"), plan).unwrap();
    let done = Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .arg("measure")
        .arg(dir.join("plan.toml"))
        .output()
        .unwrap();
    assert!(
        done.status.success(),
        "{}",
        String::from_utf8_lossy(&done.stderr)
    );
    let json = std::fs::read_to_string(dir.join("plan-results/result.json")).unwrap();
    serde_json::from_str(&json).unwrap()
}

#[test]
fn an_envelope_is_unbiased_and_a_gaussian_draws_a_caveat() {
    let dir = tempfile::tempdir().unwrap();
    let envelope = format!(
        "{PLAN}\n[[band]]\nid = \"CO2-4.26um\"\nshape = \"envelope\"\ntemperature_k = 70.0\n"
    );
    let mut pulls = Vec::new();
    for seed in 0..25 {
        let result = measure(dir.path(), &envelope, seed);
        let band = &result["bands"][0];
        let (flux, error) = (
            band["flux_erg_s_cm2"].as_f64().unwrap(),
            band["flux_sigma_erg_s_cm2"].as_f64().unwrap(),
        );
        assert!(flux / error > 50.0);
        assert!((flux / FLUX - 1.0).abs() < 0.05, "{flux:e}");
        pulls.push((flux - FLUX) / error);
        let reduced = result["fits"][0]["chi2"].as_f64().unwrap()
            / result["fits"][0]["dof"].as_f64().unwrap();
        assert!((0.6..1.4).contains(&reduced), "{reduced}");
        assert!(
            !result["caveats"]
                .to_string()
                .contains("gaussian-for-structured")
        );
    }
    let mean = pulls.iter().sum::<f64>() / pulls.len() as f64;
    let scatter = (pulls.iter().map(|p| (p - mean).powi(2)).sum::<f64>() / 24.0).sqrt();
    println!("pulls: mean {mean:.2}, scatter {scatter:.2}");
    assert!(
        mean.abs() < 0.6 && (0.6..1.45).contains(&scatter),
        "{mean} {scatter}"
    );

    let gaussian = measure(dir.path(), PLAN, 0);
    assert!(
        gaussian["caveats"]
            .to_string()
            .contains("gaussian-for-structured")
    );
    let reduced = gaussian["fits"][0]["chi2"].as_f64().unwrap()
        / gaussian["fits"][0]["dof"].as_f64().unwrap();
    assert!(
        reduced > 2.0,
        "one Gaussian cannot follow two humps: {reduced}"
    );
}

#[test]
fn envelopes_are_refused_where_nothing_is_known() {
    let dir = tempfile::tempdir().unwrap();
    for (extra, wanted) in [
        (
            "[[band]]\nid = \"CO2-4.26um\"\nshape = \"box\"\n",
            "is not known",
        ),
        (
            "[[band]]\nid = \"CO2-4.26um\"\ntemperature_k = 70.0\n",
            "goes with",
        ),
        (
            "[[band]]\nid = \"CO2-4.26um\"\nshape = \"envelope\"\ntemperature_k = 0.0\n",
            "temperature_k = 0",
        ),
    ] {
        std::fs::write(dir.path().join("co2.csv"), spectrum(1)).unwrap();
        std::fs::write(dir.path().join("plan.toml"), format!("{PLAN}\n{extra}")).unwrap();
        let done = Command::new(env!("CARGO_BIN_EXE_comagauge"))
            .arg("measure")
            .arg(dir.path().join("plan.toml"))
            .output()
            .unwrap();
        assert_eq!(done.status.code(), Some(2));
        let said = String::from_utf8_lossy(&done.stderr).into_owned();
        assert!(said.contains(wanted), "{said}");
    }
}
