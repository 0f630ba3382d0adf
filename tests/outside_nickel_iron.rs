//! Ni/Fe of spectra made by another program (`tests/external/nickel_iron/make_spectra.py`), with CN in
//! the windows and two lines with a wrong gf. `SEEDS=4,5,6` runs other seeds once the script made them.

use serde_json::Value;
use std::path::{Path, PathBuf};
use std::process::Command;

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/external/nickel_iron")
}

fn rows(path: &Path) -> Vec<csv::StringRecord> {
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(path)
        .unwrap();
    reader.records().map(|r| r.unwrap()).collect()
}

struct Truth {
    /// log10 N(Ni)/N(Fe).
    log_ratio: f64,
    /// (species, air Å) of the lines that are too bright.
    wrong: Vec<(String, f64)>,
}

fn pretty(stem: &str) -> &'static str {
    match stem {
        "ni_i" => "Ni I",
        "fe_i" => "Fe I",
        other => panic!("{other}"),
    }
}

fn truth() -> Truth {
    let rows = rows(&folder().join("truth.csv"));
    let column = |species: &str| -> f64 {
        let row = rows.iter().find(|r| &r[0] == "column" && &r[1] == species);
        row.unwrap()[3].parse().unwrap()
    };
    let wrong = rows.iter().filter(|r| &r[0] == "wrong");
    Truth {
        log_ratio: (column("ni_i") / column("fe_i")).log10(),
        wrong: wrong
            .map(|r| (pretty(&r[1]).to_owned(), r[2].parse().unwrap()))
            .collect(),
    }
}

/// Windows of ± 1.2 Å around the independent solution's lines of one species, air Å.
fn windows(species: &str) -> Vec<(f64, f64)> {
    let path = folder()
        .with_file_name("fluorescence")
        .join("g_independent.csv");
    let mut lines: Vec<f64> = rows(&path)
        .iter()
        .filter(|r| &r[0] == species && &r[1] == "3.0" && &r[2] == "15.0")
        .map(|r| r[3].parse().unwrap())
        .filter(|aa| (3300.0..3900.0).contains(aa))
        .collect();
    lines.sort_by(f64::total_cmp);
    let mut out: Vec<(f64, f64)> = Vec::new();
    for aa in lines {
        match out.last_mut() {
            Some(last) if last.1 > aa - 1.2 => last.1 = aa + 1.2,
            _ => out.push((aa - 1.2, aa + 1.2)),
        }
    }
    out
}

/// Masks over the CN 0–0 lines of low rotation, vacuum Å made air by the program's own inverse.
fn masks() -> Vec<(f64, f64)> {
    let path =
        Path::new(env!("CARGO_MANIFEST_DIR")).join("line-lists/molecules/cn_violet_lines.csv");
    let mut centres: Vec<f64> = rows(&path)
        .iter()
        .filter(|r| &r[1] == "0" && &r[4] == "0")
        .filter(|r| r[5].parse::<u32>().unwrap() <= 30 && r[7].parse::<f64>().unwrap() > 1e5)
        .map(|r| comagauge::ground::air_from_vacuum_aa(r[0].parse().unwrap()))
        .filter(|aa| {
            windows("fe_i")
                .iter()
                .any(|w| w.0 - 0.2 < *aa && *aa < w.1 + 0.2)
        })
        .collect();
    centres.sort_by(f64::total_cmp);
    assert!(centres.len() > 3);
    centres.iter().map(|aa| (aa - 0.13, aa + 0.13)).collect()
}

fn listed(ranges: &[(f64, f64)]) -> String {
    let texts: Vec<String> = ranges
        .iter()
        .map(|(low, high)| format!("[{low:.2}, {high:.2}]"))
        .collect();
    texts.join(", ")
}

/// `extra` goes into the tables of Ni I and Fe I.
fn plan(seed: u32, extra: [&str; 2]) -> String {
    format!(
        r#"
[comet]
label = "C/2031 A1"
heliocentric_au = 3.0
heliocentric_km_s = 15.0
observer_au = 2.5
observer_km_s = -8.4
[aperture]
width_arcsec = 0.5
length_arcsec = 8.0
[[spectrum]]
file = '{}'
wavelength_unit = "Angstrom"
medium = "air"
flux_unit = "erg/s/cm2/Angstrom"
resolving_power = 40000
[measure]
bands = []
ratios = ["Ni I/Fe I"]
basis = "column"
[continuum]
order = 1
exclude = [{}]
[[lines]]
species = "Ni I"
windows = [{}]
threshold = 0.1
{}
[[lines]]
species = "Fe I"
windows = [{}]
threshold = 0.18
{}
"#,
        folder().join(format!("uv_{seed}.csv")).display(),
        listed(&masks()),
        listed(&windows("ni_i")),
        extra[0],
        listed(&windows("fe_i")),
        extra[1]
    )
}

fn measured(seed: u32, extra: [&str; 2]) -> Value {
    run(&plan(seed, extra))
}

fn run(plan: &str) -> Value {
    let dir = tempfile::tempdir().unwrap();
    std::fs::write(dir.path().join("plan.toml"), plan).unwrap();
    let done = Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .arg("measure")
        .arg(dir.path().join("plan.toml"))
        .output()
        .unwrap();
    let told = String::from_utf8_lossy(&done.stderr);
    assert!(done.status.success(), "{told}");
    if std::env::var("SHOW").is_ok() {
        println!("{}", String::from_utf8_lossy(&done.stdout));
    }
    let results = dir.path().join("plan-results");
    assert!(results.join("lines.csv").is_file() && results.join("excitation.svg").is_file());
    let text = std::fs::read_to_string(results.join("result.json")).unwrap();
    serde_json::from_str(&text).unwrap()
}

/// log10 ratio and half its 68 % interval.
fn log_ratio(result: &Value) -> (f64, f64) {
    let r = &result["ratios"][0];
    let get = |key: &str| r[key].as_f64().unwrap();
    let half = 0.5 * (get("log10_high68") - get("log10_low68"));
    (get("log10_median"), half)
}

fn discordant(result: &Value) -> Vec<(String, f64)> {
    let species = result["lines"].as_array().unwrap().iter();
    species
        .flat_map(|s| s["table"].as_array().unwrap().iter().map(move |l| (s, l)))
        .filter(|(_, l)| l["discordant"].as_bool().unwrap())
        .map(|(s, l)| {
            let name = s["species"].as_str().unwrap().to_owned();
            (name, l["wavelength_air_aa"].as_f64().unwrap())
        })
        .collect()
}

/// The `without = […]` that the caveat of one species offers.
fn offered(result: &Value, species: &str) -> String {
    let caveats = result["caveats"].as_array().unwrap().iter();
    let mut texts = caveats
        .filter(|c| c["code"] == "line-discordant")
        .map(|c| c["text"].as_str().unwrap());
    let text = texts.find(|t| t.starts_with(species)).unwrap();
    text[text.find("without = [").unwrap()..].to_owned()
}

fn seeds() -> Vec<u32> {
    match std::env::var("SEEDS") {
        Ok(list) => list.split(',').map(|s| s.parse().unwrap()).collect(),
        Err(_) => vec![1, 2, 3],
    }
}

#[test]
fn robust_columns_give_the_ratio_and_name_the_wrong_lines() {
    let truth = truth();
    for seed in seeds() {
        let result = measured(seed, ["robust = true"; 2]);
        let (log, sigma) = log_ratio(&result);
        let off = log - truth.log_ratio;
        println!("seed {seed}: log Ni/Fe off by {off:+.4} dex, error {sigma:.4}");
        assert!(off.abs() < 0.05 && off.abs() < 2.0 * sigma, "seed {seed}");
        let named = discordant(&result);
        for (species, aa) in &truth.wrong {
            let found = named
                .iter()
                .any(|(s, w)| s == species && (w - aa).abs() < 0.05);
            assert!(found, "seed {seed}: {species} {aa} is not among {named:?}");
        }
        assert_eq!(named.len(), truth.wrong.len(), "seed {seed}: {named:?}");
    }
}

#[test]
fn the_plain_mean_says_what_is_wrong_and_its_advice_helps() {
    let truth = truth();
    for seed in seeds() {
        let result = measured(seed, ["", ""]);
        let has = |code: &str| {
            let caveats = result["caveats"].as_array().unwrap();
            caveats.iter().any(|c| c["code"] == code)
        };
        assert!(has("line-discordant") && has("line-scatter"));
        let factors: Vec<f64> = result["lines"]
            .as_array()
            .unwrap()
            .iter()
            .map(|s| s["error_factor"].as_f64().unwrap())
            .collect();
        assert!(factors.iter().all(|f| *f > 1.5), "{factors:?}");
        let (with, with_sigma) = log_ratio(&result);
        let advice = [offered(&result, "Ni I"), offered(&result, "Fe I")];
        let better = measured(seed, [&advice[0], &advice[1]]);
        let (log, sigma) = log_ratio(&better);
        println!(
            "seed {seed}: off by {:+.3} ± {with_sigma:.3} with the wrong lines, {:+.4} ± {sigma:.4} without",
            with - truth.log_ratio,
            log - truth.log_ratio
        );
        assert!(discordant(&better).is_empty());
        assert!((log - truth.log_ratio).abs() < f64::min(0.05, 2.0 * sigma));
        assert!(sigma < with_sigma);
    }
}

#[test]
fn lifetimes_are_named_where_they_part_columns_from_rates() {
    let caveat = |plan: &str| {
        let result = run(plan);
        let caveats = result["caveats"].as_array().unwrap().iter();
        let mut texts = caveats.filter(|c| c["code"] == "column-not-production");
        texts.next().map(|c| c["text"].as_str().unwrap().to_owned())
    };
    let far = plan(1, ["robust = true"; 2]);
    assert_eq!(caveat(&far), None);
    let near = far
        .replace("heliocentric_au = 3.0", "heliocentric_au = 0.6")
        .replace("width_arcsec = 0.5", "width_arcsec = 60.0")
        .replace("length_arcsec = 8.0", "length_arcsec = 60.0");
    let text = caveat(&near).unwrap();
    // Lifetimes at 0.6 au from the default rates of the line lists, quiet Sun.
    let rates = rows(&Path::new(env!("CARGO_MANIFEST_DIR")).join("line-lists/photo_rates.csv"));
    let iron = rows_of(&rates, "Fe I");
    let fastest = iron.iter().copied().fold(0.0, f64::max);
    assert!(
        text.contains(&format!("Fe I after {:.1e} s", 0.36 / fastest)),
        "{text}"
    );
}

/// Quiet-Sun rates of a species.
fn rows_of(rates: &[csv::StringRecord], species: &str) -> Vec<f64> {
    let own = rates.iter().filter(|r| &r[0] == species);
    own.map(|r| r[2].parse().unwrap()).collect()
}
