//! Ni/Fe from a spectrum whose lines follow an independent solution of the statistical equilibrium
//! (`tests/external/fluorescence/g_independent.csv`), measured with the program's own efficiencies.

use comagauge::ground::vacuum_from_air_aa;
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::fmt::Write;
use std::path::Path;
use std::process::Command;

const RESOLVING_POWER: f64 = 40_000.0;

/// (species, vacuum Å, g photons s⁻¹) at 3 au and +15 km s⁻¹.
fn outside() -> Vec<(String, f64, f64)> {
    let path =
        Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/external/fluorescence/g_independent.csv");
    let mut table = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(path)
        .unwrap();
    table
        .records()
        .map(|r| r.unwrap())
        .filter(|r| &r[1] == "3.0" && &r[2] == "15.0" && &r[0] != "na_i")
        .map(|r| {
            let air: f64 = r[3].parse().unwrap();
            (
                r[0].to_owned(),
                vacuum_from_air_aa(air),
                r[5].parse().unwrap(),
            )
        })
        .collect()
}

/// Lines in use: at least this share of the power of the species' brightest.
const SHARE: f64 = 0.35;

fn bright<'a>(lines: &'a [(String, f64, f64)], species: &str) -> Vec<&'a (String, f64, f64)> {
    let power = |l: &(String, f64, f64)| l.2 / l.1;
    let own = || lines.iter().filter(move |l| l.0 == species);
    let most = own().map(power).fold(0.0, f64::max);
    // The near ultraviolet that a spectrograph on the ground records at once.
    own()
        .filter(|l| power(l) >= SHARE * most && (3340.0..3940.0).contains(&l.1))
        .collect()
}

fn windows(lines: &[&(String, f64, f64)]) -> String {
    let mut text: Vec<String> = Vec::new();
    let mut end = 0.0;
    let mut sorted = lines.to_vec();
    sorted.sort_by(|a, b| a.1.total_cmp(&b.1));
    for l in sorted {
        if l.1 - 1.2 > end {
            text.push(format!("[{:.2}, {:.2}]", l.1 - 1.2, l.1 + 1.2));
            end = l.1 + 1.2;
        }
    }
    text.join(", ")
}

#[test]
fn the_ratio_of_an_independent_solution_is_found() {
    let lines = outside();
    assert_eq!(lines.len(), 30);
    let (nickel, iron) = (2.0, 1.0);
    let content: Vec<(f64, f64)> = lines
        .iter()
        .map(|(s, w, g)| (*w, if s == "ni_i" { nickel } else { iron } * g * 8e-12 / w))
        .collect();
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(38);
    let mut csv = String::from("wavelength,flux,error\n");
    let mut x: f64 = 3330.0;
    while x < 3950.0 {
        let sigma = x / RESOLVING_POWER / (8.0 * 2f64.ln()).sqrt();
        let emission: f64 = content
            .iter()
            .filter(|(w, _)| (x - w).abs() < 8.0 * sigma)
            .map(|(w, f)| {
                let u = (x - w) / sigma;
                f / (sigma * (2.0 * std::f64::consts::PI).sqrt()) * (-0.5 * u * u).exp()
            })
            .sum();
        let error = 1.5e-18;
        let noise: f64 = StandardNormal.sample(&mut rng);
        let value = 2e-17 * (1.0 + (x - 3600.0) / 2000.0) + emission + error * noise;
        writeln!(csv, "{x:.5},{value:e},{error:e}").unwrap();
        x += x / RESOLVING_POWER / 3.0;
    }
    let plan = format!(
        r#"
[comet]
label = "C/2031 A1"
heliocentric_au = 3.0
heliocentric_km_s = 15.0
observer_au = 2.5
observer_km_s = 0.0
[aperture]
width_arcsec = 1.0
length_arcsec = 4.0
[[spectrum]]
file = "uv.csv"
wavelength_unit = "Angstrom"
medium = "vacuum"
flux_unit = "erg/s/cm2/Angstrom"
resolving_power = {RESOLVING_POWER}
frame = "comet"
calibration_sigma = 0.05
[measure]
bands = []
ratios = ["Ni I/Fe I"]
basis = "column"
[continuum]
order = 1
[[lines]]
species = "Ni I"
windows = [{}]
threshold = 0.3
[[lines]]
species = "Fe I"
windows = [{}]
threshold = 0.3
"#,
        windows(&bright(&lines, "ni_i")),
        windows(&bright(&lines, "fe_i"))
    );
    let dir = tempfile::tempdir().unwrap();
    std::fs::write(dir.path().join("uv.csv"), csv).unwrap();
    std::fs::write(dir.path().join("plan.toml"), plan).unwrap();
    let done = Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .arg("measure")
        .arg(dir.path().join("plan.toml"))
        .output()
        .unwrap();
    assert!(
        done.status.success(),
        "{}",
        String::from_utf8_lossy(&done.stderr)
    );
    println!("{}", String::from_utf8_lossy(&done.stdout));
    let json = std::fs::read_to_string(dir.path().join("plan-results/result.json")).unwrap();
    let json: serde_json::Value = serde_json::from_str(&json).unwrap();
    let ratio = &json["ratios"][0];
    let log = ratio["log10_median"].as_f64().unwrap();
    let wanted = (nickel / iron).log10();
    println!("log Ni/Fe: found {log:.3}, put in {wanted:.3}");
    assert!((log - wanted).abs() < 0.05, "{log} {wanted}");
    let width = ratio["log10_high68"].as_f64().unwrap() - ratio["log10_low68"].as_f64().unwrap();
    assert!(width > 0.005 && width < 0.2, "{width}");
}
