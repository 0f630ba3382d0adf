//! `rehearse` and `simulate` as a user runs them, and the forward model against the analysis.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn demo(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("demo-spectra")
        .join(name)
}

fn command(arguments: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_comagauge"));
    command.args(arguments);
    command
}

fn good(output: &Output) -> String {
    let errors = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(output.status.success(), "{errors}");
    String::from_utf8(output.stdout.clone()).expect("UTF-8")
}

/// Rows of a CSV text by column name.
fn rows(text: &str) -> Vec<std::collections::HashMap<String, String>> {
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(text.as_bytes());
    reader.deserialize().map(|r| r.expect("a row")).collect()
}

fn number(row: &std::collections::HashMap<String, String>, key: &str) -> f64 {
    row[key]
        .parse()
        .unwrap_or_else(|_| panic!("{key}: {row:?}"))
}

fn rehearse(plan: &str, out: &Path, threads: &str, more: &[&str]) -> String {
    let plan = demo(plan);
    let mut arguments = vec!["rehearse", plan.to_str().unwrap(), "--csv"];
    arguments.extend(["--out", out.to_str().unwrap()]);
    arguments.extend(more);
    let mut command = command(&arguments);
    good(&command.env("RAYON_NUM_THREADS", threads).output().unwrap())
}

#[test]
fn the_robust_ratio_of_lines_is_covered() {
    let dir = tempfile::tempdir().unwrap();
    let text = rehearse("nearuv.toml", dir.path(), "2", &["--trials", "200"]);
    let all = rows(&text);
    let row = all.iter().find(|r| r["name"] == "Ni I/Fe I").unwrap();
    let (bias, error) = (
        number(row, "bias_over_sigma"),
        number(row, "bias_over_sigma_error"),
    );
    assert!(bias.abs() < 3.5 * error + 0.1, "{row:?}");
    // Three and a half binomial errors of 200 trials.
    assert!((0.56..0.81).contains(&number(row, "coverage68")), "{row:?}");
    assert!((number(row, "pull_scatter") - 1.0).abs() < 0.2, "{row:?}");
}

#[test]
fn coverage_and_bias_of_the_infrared_demo() {
    let dir = tempfile::tempdir().unwrap();
    for noise in [
        &["--trials", "300"][..],
        &["--trials", "300", "--residuals"],
    ] {
        let text = rehearse("infrared.toml", dir.path(), "2", noise);
        let all = rows(&text);
        assert_eq!(all.len(), 6, "{text}");
        for row in all
            .iter()
            .filter(|r| r["quantity"] == "flux" || r["name"] == "CO2/H2O")
        {
            let error = number(row, "bias_over_sigma_error");
            let bias = number(row, "bias_over_sigma");
            assert!(
                bias.abs() < 3.5 * error && error < 0.08,
                "{noise:?} {row:?}"
            );
            // Three and a half binomial errors of 300 trials, a little more where residuals, whose
            // scatter is not exactly one, are drawn.
            assert!((0.56..0.80).contains(&number(row, "coverage68")), "{row:?}");
            assert!(number(row, "coverage95") > 0.89, "{row:?}");
        }
    }
    let svg = std::fs::read_to_string(dir.path().join("rehearse.svg")).unwrap();
    for name in ["CO2-4.26um", "CO2/H2O", "coverage (%)"] {
        assert!(svg.contains(name), "{name}");
    }
}

#[test]
fn the_result_depends_on_the_seed_and_not_on_threads() {
    let dir = tempfile::tempdir().unwrap();
    let run = |threads, seed| {
        let more = ["--trials", "20", "--seed", seed];
        rehearse("infrared.toml", dir.path(), threads, &more)
    };
    let one = run("1", "4");
    assert_eq!(one, run("3", "4"));
    assert_ne!(one, run("3", "5"));
}

#[test]
fn full_intervals_are_wider_and_say_so() {
    let dir = tempfile::tempdir().unwrap();
    let width = |more: &[&str]| {
        let text = rehearse("infrared.toml", dir.path(), "2", more);
        let row = rows(&text).into_iter().find(|r| r["name"] == "CO2/H2O");
        let row = row.expect("the ratio");
        (number(&row, "typical_sigma"), row["interval_holds"].clone())
    };
    let noise = width(&["--trials", "20"]);
    let full = width(&["--trials", "20", "--full"]);
    assert!(full.0 > 1.3 * noise.0, "{noise:?} {full:?}");
    assert_eq!((noise.1.as_str(), full.1.as_str()), ("noise", "everything"));
}

#[test]
fn impossible_numbers_are_refused() {
    let plan = demo("infrared.toml");
    let refused = command(&["rehearse", plan.to_str().unwrap(), "--trials", "3"]);
    let output = { refused }.output().unwrap();
    let text = String::from_utf8_lossy(&output.stderr).into_owned();
    assert_eq!(output.status.code(), Some(2), "{text}");
    assert!(
        text.contains("trials = 3 is outside 10 to 1000000"),
        "{text}"
    );
    let output = command(&["simulate", plan.to_str().unwrap()])
        .output()
        .unwrap();
    assert_eq!(output.status.code(), Some(2));
    assert!(String::from_utf8_lossy(&output.stderr).contains("no [simulate] table"));
}

/// The infrared demo's plan with a scene and the spectrum's file beside it.
fn scene(folder: &Path, co: &str) -> PathBuf {
    let text = std::fs::read_to_string(demo("infrared.toml")).unwrap();
    let text = format!(
        "{text}\n[simulate]\nrange = [2.4, 5.0]\nsamples_per_fwhm = 2.2\n\
         [simulate.production]\nH2O = 2.0e28\nCO2 = 3.4e27\nCO = {co}\n\
         [simulate.continuum]\nflux_density = 1.0e-13\nat = 3.5\n\
         [simulate.noise]\nrelative = 0.006\nfloor = 4.0e-18\nexposure_s = 1000\n"
    );
    let plan = folder.join("plan.toml");
    std::fs::write(&plan, text).unwrap();
    plan
}

fn simulate(plan: &Path, more: &[&str]) -> String {
    let out = plan.with_file_name("infrared.csv");
    let mut arguments = vec!["simulate", plan.to_str().unwrap(), "--csv"];
    arguments.extend(["--out", out.to_str().unwrap()]);
    arguments.extend(more);
    good(&command(&arguments).output().unwrap())
}

#[test]
fn what_is_simulated_is_measured_again() {
    let dir = tempfile::tempdir().unwrap();
    let plan = scene(dir.path(), "1.6e27");
    // Long enough that noise is small against the width of the test.
    simulate(&plan, &["--exposure", "1e9"]);
    let out = dir.path().join("results");
    let arguments = [
        "measure",
        plan.to_str().unwrap(),
        "--out",
        out.to_str().unwrap(),
    ];
    good(&command(&arguments).output().unwrap());
    let text = std::fs::read_to_string(out.join("result.json")).unwrap();
    let result: serde_json::Value = serde_json::from_str(&text).unwrap();
    for (species, wanted) in [("H2O", 2.0e28), ("CO2", 3.4e27), ("CO", 1.6e27)] {
        let list = result["species"].as_array().unwrap();
        let row = list.iter().find(|r| r["species"] == species).unwrap();
        let found = row["production_per_s"].as_f64().unwrap();
        assert!((found / wanted - 1.0).abs() < 0.02, "{species}: {found:e}");
    }
    assert!(dir.path().join("infrared.svg").exists());
}

#[test]
fn the_faintest_ratio_is_just_detected() {
    let dir = tempfile::tempdir().unwrap();
    let plan = scene(dir.path(), "0.0");
    let before = rows(&simulate(&plan, &["--times", "1000,4000"]));
    let faintest = |time: f64| {
        let row = before
            .iter()
            .find(|r| number(r, "exposure_s") == time && r["name"] == "CO/H2O");
        number(row.expect("the ratio"), "faintest_ratio")
    };
    // Errors fall with the root of the exposure.
    let gain = faintest(1000.0) / faintest(4000.0);
    assert!((gain - 2.0).abs() < 0.02, "{gain}");
    let rate = format!("{:e}", faintest(1000.0) * 2.0e28);
    let after = rows(&simulate(&scene(dir.path(), &rate), &["--times", "1000"]));
    let row = after.iter().find(|r| r["name"] == "CO-4.67um");
    let snr = number(row.expect("the band"), "signal_to_noise");
    // The band's own light adds a little noise.
    assert!((2.9..3.01).contains(&snr), "{snr}");
}
