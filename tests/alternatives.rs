//! `measure --alternatives` as a user runs it, on the demos and on plans that make it hard.

use serde_json::Value;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn demo(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("demo-spectra")
        .join(name)
}

fn measure(plan: &Path, out: &Path, more: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .arg("measure")
        .arg(plan)
        .arg("--out")
        .arg(out)
        .args(more)
        .output()
        .expect("the program")
}

fn good(output: &Output) -> String {
    let errors = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(output.status.success(), "{errors}");
    String::from_utf8(output.stdout.clone()).expect("UTF-8")
}

fn json(folder: &Path, name: &str) -> Value {
    let text = std::fs::read_to_string(folder.join(name)).expect(name);
    serde_json::from_str(&text).expect("JSON")
}

fn choice<'a>(document: &'a Value, name: &str) -> &'a Value {
    let mut all = document["choices"].as_array().expect("choices").iter();
    all.find(|c| c["choice"] == name)
        .unwrap_or_else(|| panic!("no {name} in {document:#}"))
}

/// A demo's plan with changes, beside a copy of its spectrum; `lines` replaces the spectrum's rows.
fn changed(folder: &Path, name: &str, changes: &[(&str, &str)]) -> PathBuf {
    let mut text = std::fs::read_to_string(demo(name)).expect("the demo");
    for (from, to) in changes {
        assert!(text.contains(from), "{from}");
        text = text.replace(from, to);
    }
    for spectrum in ["infrared.csv", "optical.txt"] {
        std::fs::copy(demo(spectrum), folder.join(spectrum)).expect("a copy");
    }
    let plan = folder.join("plan.toml");
    std::fs::write(&plan, text).expect("a plan");
    plan
}

#[test]
fn result_json_is_the_same_with_and_without() {
    for plan in ["infrared.toml", "optical.toml"] {
        let dir = tempfile::tempdir().unwrap();
        let (with, without) = (dir.path().join("with"), dir.path().join("without"));
        good(&measure(&demo(plan), &with, &["--alternatives"]));
        good(&measure(&demo(plan), &without, &[]));
        for name in ["result.json", "ratios.csv", "fit.svg"] {
            let read = |folder: &Path| std::fs::read(folder.join(name)).expect(name);
            assert_eq!(read(&with), read(&without), "{plan} {name}");
        }
        for name in ["alternatives.csv", "alternatives.json", "alternatives.svg"] {
            assert!(with.join(name).exists() && !without.join(name).exists());
        }
    }
}

#[test]
fn demos_need_every_band_and_no_other_order() {
    for (plan, windows) in [("infrared.toml", 3), ("optical.toml", 5)] {
        let dir = tempfile::tempdir().unwrap();
        let text = good(&measure(&demo(plan), dir.path(), &["--alternatives"]));
        let found = json(dir.path(), "alternatives.json");
        let planned = choice(&found, "as planned");
        let number = |c: &Value, key: &str| c[key].as_f64().unwrap_or_else(|| panic!("{key}: {c}"));
        let base = json(dir.path(), "result.json");
        let bands: Vec<&str> = base["bands"]
            .as_array()
            .unwrap()
            .iter()
            .map(|b| b["id"].as_str().unwrap())
            .collect();
        // Every demo band was put there and is detected.
        for band in bands {
            let without = choice(&found, &format!("without {band}"));
            assert!(number(without, "f_p") < 1e-3, "{without}");
            assert!(number(without, "aicc_difference") > 10.0, "{without}");
            assert!(number(without, "chi2") > number(planned, "chi2"));
        }
        let up = choice(&found, "continuum order +1");
        assert!(
            number(up, "f_p") > 0.01 && number(up, "bic_difference") > 0.0,
            "{up}"
        );
        assert_eq!(base["fits"].as_array().unwrap().len(), windows);
        // A band alone in its window may be left unused; a worse continuum may not be chosen.
        let down = choice(&found, "continuum order -1");
        let worse = number(down, "aicc_difference") > 10.0;
        assert_eq!(down["ruled_out"].as_bool(), Some(worse), "{down}");
        let narrower = choice(&found, "windows 20 % narrower");
        assert!(narrower["aicc_difference"].is_null() && narrower["f_p"].is_null());
        assert!(number(narrower, "samples") < number(planned, "samples"));
        for words in ["continuum order -1", "farthest", "F-test p", "of it noise"] {
            assert!(text.contains(words), "{words}");
        }
        // The planned medians are those of the result.
        for (i, ratio) in base["ratios"].as_array().unwrap().iter().enumerate() {
            assert_eq!(planned["ratios"][i]["median"], ratio["median"]);
            assert_eq!(planned["ratios"][i]["shift_sigma"], 0.0);
        }
    }
}

#[test]
fn nested_fits_never_get_worse_with_more_parameters() {
    let dir = tempfile::tempdir().unwrap();
    good(&measure(
        &demo("optical.toml"),
        dir.path(),
        &["--alternatives"],
    ));
    let found = json(dir.path(), "alternatives.json");
    for c in found["choices"].as_array().unwrap() {
        if let Some(f) = c["f"].as_f64() {
            assert!(f > -1e-6, "{c}");
        }
    }
}

#[test]
fn the_result_does_not_depend_on_threads() {
    let dir = tempfile::tempdir().unwrap();
    let run = |threads: &str| {
        let folder = dir.path().join(threads);
        let output = Command::new(env!("CARGO_BIN_EXE_comagauge"))
            .args(["measure", "--alternatives", "--out"])
            .arg(&folder)
            .arg(demo("infrared.toml"))
            .env("RAYON_NUM_THREADS", threads)
            .output()
            .unwrap();
        good(&output);
        std::fs::read(folder.join("alternatives.csv")).unwrap()
    };
    assert_eq!(run("1"), run("3"));
}

#[test]
fn a_listed_band_that_the_plan_forgot_is_asked_for_but_not_added() {
    let dir = tempfile::tempdir().unwrap();
    // CN with a window that holds C3 too, and C3 not in the plan.
    let changes = [
        (", \"C3-4050\"", ""),
        ("\"C3/CN\", ", ""),
        (
            "[measure]",
            "[[band]]\nid = \"CN-3883\"\nwindow = [3800, 4200]\nunit = \"Angstrom\"\nmedium = \"air\"\n\n[measure]",
        ),
    ];
    let plan = changed(dir.path(), "optical.toml", &changes);
    let out = dir.path().join("out");
    good(&measure(&plan, &out, &["--alternatives"]));
    let found = json(&out, "alternatives.json");
    let with = choice(&found, "with C3-4050 too");
    assert!(with["f_p"].as_f64().unwrap() < 1e-10, "{with}");
    assert!(with["aicc_difference"].as_f64().unwrap() < -100.0, "{with}");
    let base = json(&out, "result.json");
    let bands = base["bands"].as_array().unwrap();
    assert!(bands.iter().all(|b| b["id"] != "C3-4050"));
}

#[test]
fn a_blend_is_measured_with_and_without_each_component() {
    let dir = tempfile::tempdir().unwrap();
    // A second band where the demo has nothing, in the window of CO2.
    let changes = [
        (
            "[measure]",
            "[[band]]\nid = \"nothing\"\ncentre = 4.36\nwindow = [4.10, 4.42]\nfwhm = 0.02\nunit = \"um\"\nmedium = \"vacuum\"\n\n[measure]",
        ),
        ("\"CO-4.67um\"]", "\"CO-4.67um\", \"nothing\"]"),
    ];
    let plan = changed(dir.path(), "infrared.toml", &changes);
    let out = dir.path().join("out");
    good(&measure(&plan, &out, &["--alternatives"]));
    let found = json(&out, "alternatives.json");
    let without = choice(&found, "without nothing");
    assert!(without["f_p"].as_f64().unwrap() > 0.01, "{without}");
    assert!(
        without["bic_difference"].as_f64().unwrap() < 0.0,
        "{without}"
    );
    // No ratio needs it, so all stay; all but CO/CO2 and CO2/H2O stay without CO2.
    let ratios = without["ratios"].as_array().unwrap();
    assert!(ratios.iter().all(|r| !r.is_null()), "{without}");
    let no_co2 = choice(&found, "without CO2-4.26um");
    let there: Vec<bool> = no_co2["ratios"]
        .as_array()
        .unwrap()
        .iter()
        .map(|r| !r.is_null())
        .collect();
    assert_eq!(there, [false, true, false]);
    assert!(no_co2["f_p"].as_f64().unwrap() < 1e-10, "{no_co2}");
    // In a blend a missing component spoils its neighbour; alone in a window it does not.
    assert_eq!(no_co2["ruled_out"], true);
    let no_co = choice(&found, "without CO-4.67um");
    assert_eq!(no_co["ruled_out"], false);
    assert_eq!(no_co["ratios"][0]["shift_sigma"], 0.0);
}

#[test]
fn errors_that_are_estimated_still_allow_a_choice() {
    let dir = tempfile::tempdir().unwrap();
    let plan = changed(dir.path(), "infrared.toml", &[]);
    let file = dir.path().join("infrared.csv");
    let text = std::fs::read_to_string(&file).unwrap();
    // Without the last column, the errors.
    let cut = |l: &str| match l.starts_with('#') {
        true => l.to_owned(),
        false => l.rsplit_once(',').map_or(l, |p| p.0).to_owned(),
    };
    let lines: Vec<String> = text.lines().map(cut).collect();
    std::fs::write(&file, lines.join("\n")).unwrap();
    let out = dir.path().join("out");
    let shown = good(&measure(&plan, &out, &["--alternatives"]));
    assert!(shown.contains("errors-estimated"), "{shown}");
    let found = json(&out, "alternatives.json");
    let without = choice(&found, "without CO2-4.26um");
    assert!(without["f_p"].as_f64().unwrap() < 1e-10, "{without}");
    assert!(
        without["aicc_difference"].as_f64().unwrap() > 50.0,
        "{without}"
    );
    let up = choice(&found, "continuum order +1");
    assert!(up["f_p"].as_f64().unwrap() > 0.001, "{up}");
}

#[test]
fn hard_plans_give_rows_with_reasons() {
    let dir = tempfile::tempdir().unwrap();
    // One band, no ratio: nothing is left without it, and there is nothing to draw.
    let one = [
        (
            "\"H2O-2.7um\", \"CO2-4.26um\", \"CO-4.67um\"",
            "\"CO2-4.26um\"",
        ),
        ("ratios = [\"CO2/H2O\", \"CO/H2O\", \"CO/CO2\"]", ""),
    ];
    let plan = changed(dir.path(), "infrared.toml", &one);
    let out = dir.path().join("one");
    good(&measure(&plan, &out, &["--alternatives"]));
    let found = json(&out, "alternatives.json");
    let without = choice(&found, "without CO2-4.26um");
    assert!(without["f_p"].as_f64().unwrap() < 1e-10, "{without}");
    assert!(!out.join("alternatives.svg").exists());
    // A window with hardly more samples than parameters: the higher order and the narrower window
    // cannot be fitted.
    let tight = [(
        "[measure]",
        "[[band]]\nid = \"CO2-4.26um\"\nwindow = [4.20, 4.33]\nunit = \"um\"\nmedium = \"vacuum\"\n\n[continuum]\norder = 7\n\n[measure]",
    )];
    let plan = changed(dir.path(), "infrared.toml", &tight);
    let out = dir.path().join("tight");
    let shown = good(&measure(&plan, &out, &["--alternatives"]));
    let found = json(&out, "alternatives.json");
    let narrower = choice(&found, "windows 20 % narrower");
    let why = narrower["failure"].as_str().expect("a reason");
    assert!(why.contains("usable samples"), "{why}");
    assert!(
        shown.contains("windows 20 % narrower: no result:"),
        "{shown}"
    );
}

#[test]
fn order_zero_does_not_go_lower() {
    let dir = tempfile::tempdir().unwrap();
    let flat = [("[measure]", "[continuum]\norder = 0\n\n[measure]")];
    let plan = changed(dir.path(), "infrared.toml", &flat);
    let out = dir.path().join("out");
    good(&measure(&plan, &out, &["--alternatives"]));
    let found = json(&out, "alternatives.json");
    let all = found["choices"].as_array().unwrap();
    assert!(all.iter().all(|c| c["choice"] != "continuum order -1"));
    // The demo's continuum is not flat.
    let up = choice(&found, "continuum order +1");
    assert!(up["f_p"].as_f64().unwrap() < 1e-3, "{up}");
    let spread = &found["spreads"][0];
    assert!(spread["range_dex"].as_f64().unwrap() > 0.0, "{spread}");
}

#[test]
fn an_envelope_is_compared_with_one_gaussian() {
    let dir = tempfile::tempdir().unwrap();
    let envelope = [(
        "[measure]",
        "[[band]]\nid = \"CO2-4.26um\"\nshape = \"envelope\"\ntemperature_k = 70.0\n\n[measure]",
    )];
    let plan = changed(dir.path(), "infrared.toml", &envelope);
    let out = dir.path().join("out");
    good(&measure(&plan, &out, &["--alternatives"]));
    let found = json(&out, "alternatives.json");
    let single = choice(&found, "one Gaussian per band");
    assert!(single["aicc_difference"].is_f64(), "{single}");
    // Neither shape contains the other.
    assert!(single["f_p"].is_null(), "{single}");
    // The demo's bands are Gaussians: both shapes give the same flux to a few per cent.
    let shift = |c: &Value| c["ratios"][0]["median"].as_f64().expect("a median");
    let change = shift(single) / shift(choice(&found, "as planned"));
    assert!((change - 1.0).abs() < 0.1, "{change}");
}

#[test]
fn of_many_bands_only_the_strongest_are_left_out() {
    let dir = tempfile::tempdir().unwrap();
    let mut bands = String::new();
    let mut names = String::new();
    for i in 0..45 {
        let centre = 4250 + 15 * i;
        bands.push_str(&format!(
            "[[band]]\nid = \"line {i}\"\ncentre = {centre}\nwindow = [{}, {}]\nfwhm = 2.0\n\
             unit = \"Angstrom\"\nmedium = \"air\"\n\n",
            centre - 7,
            centre + 7
        ));
        names.push_str(&format!(", \"line {i}\""));
    }
    let changes = [
        ("\"C2-4737\", \"C2-5165\"", "\"C2-5165\""),
        ("[\"C2/CN\", \"C3/CN\"", "[\"C3/CN\""),
        ("\"C2-5165\"]", &format!("\"C2-5165\"{names}]")),
        ("[measure]", &format!("{bands}[measure]")),
    ];
    let plan = changed(dir.path(), "optical.toml", &changes);
    let out = dir.path().join("out");
    let text = good(&measure(&plan, &out, &["--alternatives"]));
    let found = json(&out, "alternatives.json");
    let all = found["choices"].as_array().unwrap();
    let without = all
        .iter()
        .filter(|c| c["choice"].as_str().unwrap().starts_with("without"));
    assert_eq!(without.count(), 40);
    choice(&found, "without CN-3883");
    assert!(text.contains("only the 40 strongest of 50 bands"), "{text}");
}
