//! `comagauge compare` as a user runs it.

use comagauge::tables::{Statistic, Tables};
use std::path::Path;
use std::process::{Command, Output};

fn run(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .args(arguments)
        .output()
        .expect("the program starts")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("UTF-8")
}

fn said(arguments: &[&str]) -> String {
    let done = run(arguments);
    assert!(done.status.success(), "{}", text(&done.stderr));
    text(&done.stdout)
}

/// The published medians hold within two published sigmas, the fraction exactly; the derivation is
/// that of `comagauge::comparison`, not of this test.
#[test]
fn medians_and_fractions_beside_the_published_ones() {
    let tables = Tables::bundled();
    let derived = comagauge::comparison::rederive(&tables);
    let mut compared = 0;
    for p in tables.populations() {
        let wanted = p.provenance.source == "harringtonpinto2022"
            && p.of.is_some()
            && matches!(p.statistic, Statistic::Median | Statistic::Fraction);
        let what = format!("{}, {}", p.quantity, p.group);
        let Some(d) = derived.iter().find(|d| wanted && d.what == what) else {
            continue;
        };
        let tolerance = p.sigma.map_or(1e-3, |s| 2.0 * s);
        for (how, value, comets) in &d.found {
            println!(
                "{what}: published {}, found {value} ({comets}; {how})",
                p.value
            );
            assert!(
                (value - p.value).abs() <= tolerance,
                "{what} {how}: {value}"
            );
        }
        compared += 1;
    }
    assert_eq!(compared, 3);
    let shown = said(&["compare", "--check-set"]);
    assert!(
        shown.contains("published 0.12 ± 0.02") && shown.contains("8 of 9"),
        "{shown}"
    );
}

#[test]
fn a_number_stands_among_comets() {
    let dir = tempfile::tempdir().unwrap();
    let out = dir.path().join("out");
    let number = [
        "compare",
        "0.24",
        "--of",
        "CO2",
        "--to",
        "H2O",
        "--sigma",
        "0.02",
        "--distance",
        "1.4",
    ];
    let mut whole = number.to_vec();
    whole.extend(["--out", out.to_str().unwrap()]);
    let shown = said(&whole);
    for wanted in [
        "higher than",
        "exceed it",
        "JFC",
        "water stops subliming",
        "Comets most like",
    ] {
        assert!(shown.contains(wanted), "{wanted}: {shown}");
    }
    for file in [
        "compare.txt",
        "compare.csv",
        "compare-standing.svg",
        "compare-distance.svg",
        "compare-distance-narrow.svg",
    ] {
        assert!(out.join(file).is_file(), "{file}");
    }
    let mut narrow = number.to_vec();
    narrow.extend(["--rh", "..1.2", "--csv"]);
    let (all, near) = (said(&number), said(&narrow));
    assert_ne!(all, near);
    let mut reader = csv::Reader::from_reader(near.as_bytes());
    let heading = reader.headers().unwrap().clone();
    let row = reader.records().next().unwrap().unwrap();
    assert_eq!(row.len(), heading.len());
}

#[test]
fn bad_requests_are_refused_with_a_remedy() {
    for (arguments, word) in [
        (vec!["compare", "0.2", "--of", "CO2"], "--of and --to"),
        (vec!["compare", "-0.2"], "unexpected argument"),
        (
            vec!["compare", "0.2", "--of", "XX", "--to", "H2O"],
            "ratios in the comparison set",
        ),
        (
            vec![
                "compare", "0.2", "--of", "CO2", "--to", "H2O", "--class", "JFX",
            ],
            "did you mean",
        ),
        (
            vec![
                "compare", "0.2", "--of", "CO2", "--to", "H2O", "--rh", "9..8",
            ],
            "0.8..2.5",
        ),
        (
            vec![
                "compare", "0.2", "--of", "CO2", "--to", "H2O", "--rh", "80..90",
            ],
            "widen",
        ),
        (
            vec![
                "compare", "0.2", "--of", "CO2", "--to", "H2O", "--low", "0.3", "--high", "0.4",
            ],
            "does not hold",
        ),
        (
            vec!["compare", "Cargo.toml"],
            "not a result of comagauge measure",
        ),
        (vec!["compare"], "required"),
    ] {
        let done = run(&arguments);
        assert!(!done.status.success(), "{arguments:?}");
        let complaint = text(&done.stderr);
        assert!(complaint.contains(word), "{arguments:?}: {complaint}");
        assert!(!complaint.contains("panicked"), "{complaint}");
    }
}

fn measured(out: &Path) -> String {
    let plan = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-spectra/infrared.toml");
    said(&[
        "measure",
        plan.to_str().unwrap(),
        "--out",
        out.to_str().unwrap(),
    ]);
    out.join("result.json").to_str().unwrap().to_owned()
}

#[test]
fn results_are_one_series_and_can_be_added() {
    let dir = tempfile::tempdir().unwrap();
    let first = measured(&dir.path().join("a"));
    let mut later: serde_json::Value =
        serde_json::from_str(&std::fs::read_to_string(&first).unwrap()).unwrap();
    later["geometry"]["heliocentric_au"] = 2.9.into();
    later["date"] = "2031-09-01".into();
    let second = dir.path().join("later.json");
    std::fs::write(&second, later.to_string()).unwrap();
    let both = said(&["compare", &first, second.to_str().unwrap()]);
    assert!(both.contains("2 dates as one series"), "{both}");
    let set = dir.path().join("set");
    std::fs::create_dir(&set).unwrap();
    let bundled = Path::new(env!("CARGO_MANIFEST_DIR")).join("comparison-set");
    for file in [
        "measurements.csv",
        "populations.csv",
        "solar_ratios.csv",
        "sources.csv",
    ] {
        std::fs::copy(bundled.join(file), set.join(file)).unwrap();
    }
    let file = set.join("measurements.csv");
    let before = std::fs::read_to_string(&file).unwrap();
    let add = [
        "compare",
        &first,
        "--add",
        file.to_str().unwrap(),
        "--add-class",
        "OCC",
    ];
    said(&add);
    let after = std::fs::read_to_string(&file).unwrap();
    assert!(after.starts_with(&before) && after.len() > before.len());
    said(&add);
    assert_eq!(
        std::fs::read_to_string(&file).unwrap(),
        after,
        "added twice"
    );
    // The rows are readable once their source is named.
    let label = later["comet"].as_str().unwrap();
    let sources = std::fs::read_to_string(set.join("sources.csv")).unwrap();
    std::fs::write(
        set.join("sources.csv"),
        format!("{sources}\"{label}\",this work,\n"),
    )
    .unwrap();
    let shown = said(&[
        "compare",
        "0.2",
        "--of",
        "CO2",
        "--to",
        "H2O",
        "--class",
        "OCC",
        "--comparison",
        set.to_str().unwrap(),
    ]);
    assert!(shown.contains("higher than"), "{shown}");
    let tables = Tables::load(None, Some(&set)).unwrap();
    let own = tables
        .comparison()
        .iter()
        .filter(|r| r.comet == label)
        .count();
    assert!(own >= 2, "{own}");
}
