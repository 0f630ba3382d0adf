//! `show`, `prepare` and `geometry` as a user runs them, against astropy-made files and independent
//! ephemerides.

use comagauge::ground::vacuum_from_air_aa;
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn external(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/external")
        .join(path)
}

fn run(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .args(arguments)
        .output()
        .unwrap()
}

fn said(output: &Output) -> String {
    String::from_utf8_lossy(&output.stderr).into_owned()
}

/// Flags that a case of `expected.json` needs.
fn flags(case: &serde_json::Value) -> Vec<String> {
    let mut out = Vec::new();
    for (key, flag) in [
        ("say_unit", "--wavelength-unit"),
        ("say_medium", "--medium"),
        ("row", "--row"),
    ] {
        if let Some(value) = case.get(key).filter(|v| !v.is_null()) {
            let text = value
                .as_str()
                .map_or_else(|| value.to_string(), str::to_owned);
            out.extend([flag.to_owned(), text]);
        }
    }
    out
}

fn cases() -> BTreeMap<String, serde_json::Value> {
    serde_json::from_str(&std::fs::read_to_string(external("fits/expected.json")).unwrap()).unwrap()
}

/// Fills every blank of a starter plan with a value that makes sense for most comets.
fn filled(plan: &str) -> String {
    plan.lines()
        .map(|l| {
            let key = l.split([' ', '=']).next().unwrap_or_default();
            let value = match key {
                "label" => "\"C/2031 A1\"",
                "heliocentric_au" => "1.5",
                "heliocentric_km_s" => "-12.0",
                "observer_au" => "0.9",
                "observer_km_s" => "7.0",
                "radius_arcsec" => "3.0",
                "resolving_power" => "1200",
                "medium" | "wavelength_medium" => "\"vacuum\"",
                _ => return l.to_owned(),
            };
            l.replacen("\"?\"", value, 1)
        })
        .collect::<Vec<_>>()
        .join("\n")
}

#[test]
fn every_fits_file_can_be_shown_prepared_and_checked() {
    let dir = tempfile::tempdir().unwrap();
    let expected: Vec<csv::StringRecord> = csv::Reader::from_path(external("fits/expected.csv"))
        .unwrap()
        .into_records()
        .map(|r| r.unwrap())
        .collect();
    let mut done = 0;
    for (name, case) in cases() {
        let file = external("fits").join(case["file"].as_str().unwrap());
        let flags = flags(&case);
        let mut show = vec!["show", file.to_str().unwrap(), "--csv"];
        show.extend(flags.iter().map(String::as_str));
        let shown = run(&show);
        assert!(shown.status.success(), "{name}: {}", said(&shown));
        let air = case["medium"] == "air";
        let wanted: Vec<[f64; 2]> = expected
            .iter()
            .filter(|r| r[0] == name)
            .map(|r| [r[1].parse().unwrap(), r[2].parse().unwrap_or(f64::NAN)])
            .collect();
        let found: Vec<csv::StringRecord> = csv::Reader::from_reader(shown.stdout.as_slice())
            .into_records()
            .map(|r| r.unwrap())
            .collect();
        assert_eq!(found.len(), wanted.len(), "{name}");
        for (row, [wavelength, flux]) in found.iter().zip(wanted) {
            let vacuum = if air {
                vacuum_from_air_aa(wavelength)
            } else {
                wavelength
            };
            let x: f64 = row[0].parse().unwrap();
            assert!((x / vacuum - 1.0).abs() < 1e-9, "{name}: {x} {vacuum}");
            // Fluxes of these files are compared in their own unit by tests/outside_fits.rs.
            assert_eq!(row[1].is_empty(), flux.is_nan(), "{name}");
        }

        let plan = dir.path().join(format!("{name}.toml"));
        let mut prepare = vec![
            "prepare",
            file.to_str().unwrap(),
            "--force",
            "--plan",
            plan.to_str().unwrap(),
        ];
        prepare.extend(flags.iter().map(String::as_str));
        let prepared = run(&prepare);
        assert!(prepared.status.success(), "{name}: {}", said(&prepared));
        let text = std::fs::read_to_string(&plan).unwrap();
        let refused = run(&["measure", plan.to_str().unwrap(), "--check"]);
        assert_eq!(refused.status.code(), Some(2), "{name}");
        assert!(
            said(&refused).contains("blanks to fill in"),
            "{name}: {}",
            said(&refused)
        );
        std::fs::write(&plan, filled(&text)).unwrap();
        let checked = run(&["measure", plan.to_str().unwrap(), "--check"]);
        assert!(
            checked.status.success(),
            "{name}: {}\n{}",
            said(&checked),
            filled(&text)
        );
        done += 1;
    }
    assert!(done >= 30, "{done}");
}

#[test]
fn nothing_is_overwritten_without_force() {
    let dir = tempfile::tempdir().unwrap();
    let plan = dir.path().join("a.toml");
    std::fs::write(&plan, "precious").unwrap();
    let file = external("fits/lin_wave.fits");
    let refused = run(&[
        "prepare",
        file.to_str().unwrap(),
        "--plan",
        plan.to_str().unwrap(),
    ]);
    assert_eq!(refused.status.code(), Some(2));
    assert!(said(&refused).contains("--force"));
    assert_eq!(std::fs::read_to_string(&plan).unwrap(), "precious");
}

#[test]
fn unreadable_files_are_refused_with_one() {
    let dir = tempfile::tempdir().unwrap();
    let file = dir.path().join("x.fits");
    std::fs::write(&file, b"SIMPLE  =                    T / and nothing else").unwrap();
    for path in [file.to_str().unwrap(), "no-such-file.fits"] {
        let refused = run(&["show", path]);
        assert_eq!(refused.status.code(), Some(1));
        assert!(said(&refused).starts_with("error: ") && refused.stdout.is_empty());
    }
}

#[test]
fn geometry_agrees_with_independent_ephemerides() {
    let mut table = csv::Reader::from_path(external("orbits/comet_geometry.csv")).unwrap();
    let head = table.headers().unwrap().clone();
    let mut worst = [0.0_f64; 5];
    let mut rows = 0;
    for row in table.records().map(|r| r.unwrap()) {
        let cell = |name: &str| row[head.iter().position(|h| h == name).unwrap()].to_owned();
        let shown = run(&[
            "geometry",
            "--csv",
            "--perihelion-au",
            &cell("q_au"),
            "--eccentricity",
            &cell("e"),
            "--inclination-deg",
            &cell("i_deg"),
            "--node-deg",
            &cell("node_deg"),
            "--argument-deg",
            &cell("argp_deg"),
            "--perihelion-time",
            &format!("JD {}", cell("Tp_jd_tdb")),
            "--date",
            &format!("JD {} TDB", cell("jd_tdb")),
        ]);
        assert!(shown.status.success(), "{}", said(&shown));
        let mut found = csv::Reader::from_reader(shown.stdout.as_slice());
        let names = found.headers().unwrap().clone();
        let values = found.records().next().unwrap().unwrap();
        for (k, (ours, theirs, limit)) in [
            ("heliocentric_au", "r_lt_au", 1e-5),
            ("observer_au", "delta_lt_au", 1e-5),
            ("heliocentric_km_s", "rdot_lt_km_s", 0.01),
            ("observer_km_s", "deltadot_lt_km_s", 0.01),
            ("phase_deg", "phase_lt_deg", 0.01),
        ]
        .into_iter()
        .enumerate()
        {
            let a: f64 = values[names.iter().position(|n| n == ours).unwrap()]
                .parse()
                .unwrap();
            let b: f64 = cell(theirs).parse().unwrap();
            worst[k] = worst[k].max((a - b).abs());
            assert!((a - b).abs() < limit, "{}: {ours} {a} {b}", cell("orbit"));
        }
        rows += 1;
    }
    assert!(rows > 20);
    println!("{rows} rows; worst r_h, Δ (au), rates (km/s), phase (°): {worst:?}");
}

#[test]
fn a_hyperbola_comes_in_fast() {
    // Common practice: e ≈ 6 with q ≈ 1.36 au means 57 to 58 km/s far from the Sun.
    let shown = run(&[
        "geometry",
        "--perihelion-au",
        "1.36",
        "--eccentricity",
        "6.1",
        "--inclination-deg",
        "60",
        "--node-deg",
        "20",
        "--argument-deg",
        "40",
        "--perihelion-time",
        "2031-06-01",
        "--date",
        "2031-05-01",
    ]);
    let text = said(&shown);
    let v: f64 = text
        .split("(v_inf) ")
        .nth(1)
        .and_then(|t| t.split(' ').next())
        .unwrap()
        .parse()
        .unwrap();
    assert!((57.0..58.0).contains(&v), "{text}");
}

#[test]
fn an_orbit_in_the_plan_replaces_the_four_numbers() {
    let dir = tempfile::tempdir().unwrap();
    let demo = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-spectra");
    std::fs::copy(demo.join("infrared.csv"), dir.path().join("infrared.csv")).unwrap();
    let plan = std::fs::read_to_string(demo.join("infrared.toml")).unwrap();
    let lines: Vec<&str> = plan
        .lines()
        .filter(|l| !l.starts_with("heliocentric") && !l.starts_with("observer"))
        .collect();
    let orbit = "\n[comet.orbit]\nperihelion_au = 1.1\neccentricity = 0.7\ninclination_deg = 12.0\nnode_deg = 80.0\nargument_deg = 200.0\nperihelion_time = \"2031-07-20\"\nepoch = \"2030-06-01\"\n";
    let file = dir.path().join("plan.toml");
    std::fs::write(&file, lines.join("\n") + orbit).unwrap();
    let done = run(&["measure", file.to_str().unwrap()]);
    assert!(done.status.success(), "{}", said(&done));
    let json = std::fs::read_to_string(dir.path().join("plan-results/result.json")).unwrap();
    let json: serde_json::Value = serde_json::from_str(&json).unwrap();
    let geometry = run(&["geometry", file.to_str().unwrap(), "--csv"]);
    let mut table = csv::Reader::from_reader(geometry.stdout.as_slice());
    let row = table.records().next().unwrap().unwrap();
    let r_h: f64 = row[2].parse().unwrap();
    assert!((json["geometry"]["heliocentric_au"].as_f64().unwrap() - r_h).abs() < 1e-9);
    let codes = json["caveats"].to_string();
    assert!(codes.contains("far-from-epoch"), "{codes}");
}

#[test]
fn schema_and_completions_come_from_the_same_definitions() {
    let schema: serde_json::Value = serde_json::from_slice(&run(&["schema"]).stdout).unwrap();
    for key in [
        "comet",
        "aperture",
        "spectrum",
        "measure",
        "band",
        "continuum",
        "coma",
    ] {
        assert!(schema["properties"].get(key).is_some(), "{key}");
    }
    for shell in ["bash", "zsh", "fish"] {
        let text = String::from_utf8(run(&["completions", shell]).stdout).unwrap();
        assert!(
            text.contains("measure") && text.contains("prepare"),
            "{shell}"
        );
    }
    let man = String::from_utf8(run(&["man"]).stdout).unwrap();
    assert!(man.contains(".TH") && man.contains("geometry"));
}
