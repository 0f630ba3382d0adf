//! The program as a user runs it: the demo, its files, `--csv`, `--check`, re-running a resolved plan.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn run(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .args(arguments)
        .output()
        .expect("the program starts")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("UTF-8")
}

fn demo(plan: &str, out: &Path) -> serde_json::Value {
    let plan = root().join("demo-spectra").join(plan);
    let done = run(&[
        "measure",
        plan.to_str().unwrap(),
        "--out",
        out.to_str().unwrap(),
    ]);
    assert!(done.status.success(), "{}", text(&done.stderr));
    let json = std::fs::read_to_string(out.join("result.json")).unwrap();
    assert!(!json.contains("NaN"));
    serde_json::from_str(&json).unwrap()
}

/// The truth table of the demo's README: `| species | … | production rate |` rows of one section.
fn truth(section: &str) -> Vec<(String, f64)> {
    let readme = std::fs::read_to_string(root().join("demo-spectra/README.md")).unwrap();
    let from = readme.find(section).expect("the section");
    let rows: Vec<(String, f64)> = readme[from..]
        .lines()
        .skip(1)
        .take_while(|l| !l.starts_with("## "))
        .filter(|l| l.starts_with("| "))
        .filter_map(|l| {
            let cells: Vec<&str> = l.trim_matches('|').split('|').map(str::trim).collect();
            Some((cells[0].to_owned(), cells[1].parse().ok()?))
        })
        .collect();
    assert!(rows.len() >= 3, "{rows:?}");
    rows
}

#[test]
fn demo_rates_agree_with_the_truth() {
    let dir = tempfile::tempdir().unwrap();
    for (plan, section) in [
        ("infrared.toml", "## infrared"),
        ("optical.toml", "## optical"),
    ] {
        let result = demo(plan, &dir.path().join(plan));
        for (species, wanted) in truth(section) {
            let row = result["species"]
                .as_array()
                .unwrap()
                .iter()
                .find(|r| r["species"] == species.as_str())
                .unwrap_or_else(|| panic!("{species}"));
            let found = row["production_per_s"].as_f64().unwrap();
            let flux_error = result["bands"]
                .as_array()
                .unwrap()
                .iter()
                .filter(|b| b["species"] == species.as_str())
                .map(|b| {
                    b["flux_sigma_erg_s_cm2"].as_f64().unwrap()
                        / b["flux_erg_s_cm2"].as_f64().unwrap()
                })
                .fold(f64::INFINITY, f64::min);
            // The demo is made with the same g and lengths, so only noise is between them.
            assert!(
                (found / wanted - 1.0).abs() < 3.5 * flux_error,
                "{species}: {found:e} {wanted:e} {flux_error}"
            );
        }
    }
}

#[test]
fn columns_of_the_near_ultraviolet_demo_agree_with_the_truth() {
    let dir = tempfile::tempdir().unwrap();
    let result = demo("nearuv.toml", dir.path());
    for (species, wanted) in truth("## near ultraviolet") {
        let rows = result["species"].as_array().unwrap();
        let row = rows.iter().find(|r| r["species"] == species.as_str());
        let row = row.unwrap_or_else(|| panic!("{species}"));
        let found = row["column_cm2"].as_f64().unwrap();
        let sigma = row["column_sigma_cm2"].as_f64().unwrap();
        // Made with the same g, so noise, Fraunhofer structure and the drawn errors of g are between.
        assert!((found - wanted).abs() < 2.0 * sigma, "{species} {found:e}");
        assert!((found / wanted - 1.0).abs() < 0.1, "{species} {found:e}");
    }
    let readme = std::fs::read_to_string(root().join("demo-spectra/README.md")).unwrap();
    let said = readme.split("log N(Ni I)/N(Fe I) = ").nth(1).unwrap();
    let wanted: f64 = said
        .split_whitespace()
        .next()
        .unwrap()
        .trim_end_matches(',')
        .replace('−', "-")
        .parse()
        .unwrap();
    let ratio = &result["ratios"][0];
    let log = ratio["log10_median"].as_f64().unwrap();
    let half =
        0.5 * (ratio["log10_high68"].as_f64().unwrap() - ratio["log10_low68"].as_f64().unwrap());
    assert!(
        (log - wanted).abs() < f64::min(0.05, 2.0 * half),
        "{log} ± {half}"
    );
    let beside = ratio["beside"].as_array().unwrap();
    assert!(beside.iter().any(|b| b["what"] == "solar photosphere"));
    for file in ["lines.csv", "excitation.svg", "excitation-narrow.svg"] {
        assert!(dir.path().join(file).is_file(), "{file}");
    }
}

#[test]
fn a_resolved_plan_gives_the_same_result_to_the_bit() {
    let dir = tempfile::tempdir().unwrap();
    let (first, second) = (dir.path().join("first"), dir.path().join("second"));
    for plan in ["infrared.toml", "optical.toml", "nearuv.toml"] {
        demo(plan, &first);
        let resolved = first.join("plan.resolved.toml");
        let done = run(&[
            "measure",
            resolved.to_str().unwrap(),
            "--out",
            second.to_str().unwrap(),
        ]);
        assert!(done.status.success(), "{}", text(&done.stderr));
        for file in [
            "result.json",
            "bands.csv",
            "ratios.csv",
            "fit.csv",
            "plan.resolved.toml",
            "fit.svg",
        ] {
            let read = |folder: &Path| std::fs::read(folder.join(file)).unwrap();
            assert!(read(&first) == read(&second), "{plan}: {file} differs");
        }
    }
}

#[test]
fn seed_and_draws_are_overridden_and_written_down() {
    let dir = tempfile::tempdir().unwrap();
    let plan = root().join("demo-spectra/infrared.toml");
    let result = |seed: &str| {
        let out = dir.path().join(seed);
        let done = run(&[
            "measure",
            plan.to_str().unwrap(),
            "--out",
            out.to_str().unwrap(),
            "--seed",
            seed,
            "--draws",
            "3000",
        ]);
        assert!(done.status.success());
        let resolved = std::fs::read_to_string(out.join("plan.resolved.toml")).unwrap();
        assert!(resolved.contains("count = 3000") && resolved.contains(&format!("seed = {seed}")));
        std::fs::read_to_string(out.join("ratios.csv")).unwrap()
    };
    assert_ne!(result("5"), result("6"));
}

#[test]
fn csv_stands_alone_on_stdout() {
    let dir = tempfile::tempdir().unwrap();
    let plan = root().join("demo-spectra/optical.toml");
    let out = dir.path().join("out");
    for arguments in [
        vec![
            "measure",
            plan.to_str().unwrap(),
            "--out",
            out.to_str().unwrap(),
            "--csv",
        ],
        vec!["bands", "--csv"],
    ] {
        let done = run(&arguments);
        assert!(done.status.success());
        let mut table = csv::Reader::from_reader(done.stdout.as_slice());
        let columns = table.headers().unwrap().len();
        assert!(columns > 5);
        let rows: Vec<_> = table.records().map(|r| r.unwrap()).collect();
        assert!(rows.len() > 5);
    }
}

#[test]
fn check_writes_nothing() {
    let dir = tempfile::tempdir().unwrap();
    let plan = root().join("demo-spectra/infrared.toml");
    let out = dir.path().join("out");
    let done = run(&[
        "measure",
        plan.to_str().unwrap(),
        "--check",
        "--out",
        out.to_str().unwrap(),
    ]);
    assert!(done.status.success());
    assert!(text(&done.stderr).contains("the plan is sound"));
    assert!(!out.exists());
}

#[test]
fn usage_errors_end_with_two() {
    assert_eq!(run(&["measure"]).status.code(), Some(2));
    assert_eq!(
        run(&["measure", "no-such-plan.toml"]).status.code(),
        Some(2)
    );
    assert_eq!(run(&["no-such-command"]).status.code(), Some(2));
}

#[test]
fn the_committed_demo_is_what_the_generator_makes() {
    let dir = tempfile::tempdir().unwrap();
    let program: PathBuf = Path::new(env!("CARGO_BIN_EXE_comagauge")).into();
    let example = program.with_file_name("examples").join("make_demo");
    let done = Command::new(example)
        .arg(dir.path())
        .status()
        .expect("built beside the tests");
    assert!(done.success());
    for file in ["infrared.csv", "optical.txt", "nearuv.txt"] {
        let read = |p: PathBuf| std::fs::read_to_string(p).unwrap();
        let (made, kept) = (
            read(dir.path().join(file)),
            read(root().join("demo-spectra").join(file)),
        );
        assert!(made == kept, "{file}: run `cargo run --example make_demo`");
    }
}
