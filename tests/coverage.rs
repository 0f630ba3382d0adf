//! Coverage of the quoted intervals in the regimes of `tests/coverage/`: `simulate` makes a spectrum,
//! `rehearse` injects its fit again and again. The outside truth is the binomial law.

use std::collections::HashMap;
use std::path::Path;
use std::process::Command;

const TRIALS: f64 = 600.0;
/// Bounds in binomial standard deviations: with 20 numbers, one run in 800 fails by chance.
const REACH: f64 = 4.0;

fn run(arguments: &[&str]) -> String {
    let output = Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .args(arguments)
        .output()
        .expect("it runs");
    let errors = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(output.status.success(), "{arguments:?}: {errors}");
    String::from_utf8(output.stdout).expect("UTF-8")
}

fn covers(plan: &str) {
    let dir = tempfile::tempdir().expect("a folder");
    let source = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/coverage");
    let target = dir.path().join(plan);
    std::fs::copy(source.join(plan), &target).expect("a copy");
    let target = target.to_str().expect("a path");
    run(&["simulate", target]);
    let out = dir.path().join("out");
    let (trials, out) = (TRIALS.to_string(), out.to_str().expect("a path"));
    let text = run(&[
        "rehearse", target, "--trials", &trials, "--out", out, "--csv",
    ]);
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(text.as_bytes());
    let mut count = 0;
    for row in reader.deserialize::<HashMap<String, String>>() {
        let row = row.expect("a row");
        let number = |key: &str| -> f64 {
            row[key]
                .parse()
                .unwrap_or_else(|_| panic!("{key}: {row:?}"))
        };
        for (key, nominal) in [("coverage68", 0.683), ("coverage95", 0.954)] {
            let share = number(key);
            let sigma = f64::sqrt(nominal * (1.0 - nominal) / TRIALS);
            println!("{plan} {} {key} {share:.3}", row["name"]);
            assert!(
                (share - nominal).abs() < REACH * sigma,
                "{plan} {key}: {row:?}"
            );
        }
        let bias = number("bias_over_sigma");
        assert!(bias.abs() < 0.1 + REACH / TRIALS.sqrt(), "{plan}: {row:?}");
        count += 1;
    }
    assert!(count > 0, "{text}");
}

#[test]
fn weak_band() {
    covers("weak.toml");
}

#[test]
fn band_of_middling_strength() {
    covers("medium.toml");
}

#[test]
fn strong_band() {
    covers("strong.toml");
}

#[test]
fn blended_pair() {
    covers("blend.toml");
}

#[test]
fn envelope_of_carbon_dioxide() {
    covers("envelope.toml");
}

#[test]
fn violet_band_on_sunlight() {
    covers("sunlight.toml");
}
