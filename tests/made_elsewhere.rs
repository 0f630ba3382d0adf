//! Fluxes of bands with rotational structure, on Fraunhofer lines, with cosmic-ray hits: spectra made by
//! an independent script (`tests/external/made_spectra/`), measured as a user does.

use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::process::Command;

type Row = HashMap<String, String>;

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/external/made_spectra")
}

fn rows(text: &str) -> Vec<Row> {
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(text.as_bytes());
    reader.deserialize().map(|r| r.expect("a row")).collect()
}

/// Measures one of the spectra; returns band rows and the caveats' codes.
fn measure(name: &str, more: &str) -> (Vec<Row>, String) {
    let dir = tempfile::tempdir().expect("a folder");
    let spectrum = folder().join(format!("{name}.csv"));
    let plan = format!(
        r#"
[comet]
label = "C/2031 A1"
heliocentric_au = 1.0
heliocentric_km_s = -25.0
observer_au = 1.0
observer_km_s = 0.0
[aperture]
radius_arcsec = 2.0
[[spectrum]]
file = {spectrum:?}
wavelength_unit = "Angstrom"
medium = "vacuum"
flux_unit = "erg/s/cm2/Angstrom"
frame = "comet"
resolving_power = 1000
calibration_sigma = 0.05
{more}
"#
    );
    std::fs::write(dir.path().join("plan.toml"), plan).expect("a plan");
    let out = dir.path().join("out");
    let done = Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .args(["measure", "--csv", "--out"])
        .arg(&out)
        .arg(dir.path().join("plan.toml"))
        .output()
        .expect("it runs");
    let errors = String::from_utf8_lossy(&done.stderr).into_owned();
    assert!(done.status.success(), "{errors}");
    let table = rows(&String::from_utf8(done.stdout).expect("UTF-8"));
    let result = std::fs::read_to_string(out.join("result.json")).expect("a result");
    (
        table.into_iter().filter(|r| r["row"] == "band").collect(),
        result,
    )
}

fn number(row: &Row, key: &str) -> f64 {
    row[key]
        .parse()
        .unwrap_or_else(|_| panic!("{key}: {row:?}"))
}

fn truth(name: &str) -> f64 {
    let text = std::fs::read_to_string(folder().join("truth.csv")).expect("the truth");
    let all = rows(&text);
    let row = all.iter().find(|r| r["spectrum"] == name).expect("a row");
    number(row, "flux")
}

const CO: &str = "
[measure]
bands = [\"CO-4.67um\"]
clip_sigma = 5
[[band]]
id = \"CO-4.67um\"
shape = \"envelope\"
temperature_is = \"free\"
unit = \"Angstrom\"
window = [45000, 48900]
";

const CN: &str = "
[measure]
bands = [\"CN-3883\"]
clip_sigma = 5
[continuum]
kind = \"sunlight\"
[[band]]
id = \"CN-3883\"
shape = \"envelope\"
temperature_is = \"free\"
window = [3800, 3960]
";

#[test]
fn fluxes_within_two_per_cent() {
    for (name, plan) in [("co", CO), ("cn", CN)] {
        let (bands, result) = measure(name, plan);
        let (flux, snr) = (
            number(&bands[0], "flux_erg_s_cm2"),
            number(&bands[0], "signal_to_noise"),
        );
        let off = flux / truth(name) - 1.0;
        println!("{name}: {:+.2} %, S/N {snr:.0}", 100.0 * off);
        assert!(snr > 50.0, "{bands:?}");
        assert!(off.abs() < 0.02, "{name}: {off}");
        let pull = (flux - truth(name)) / number(&bands[0], "flux_sigma_erg_s_cm2");
        assert!(pull.abs() < 4.0, "{name}: {pull} sigma from the truth");
        assert!(result.contains("samples-clipped"), "{result}");
        assert!(!result.contains("poor-fit"), "{result}");
    }
}

/// Without clipping the hits are seen and named; one Gaussian on the structure is warned of.
#[test]
fn what_is_left_out_is_warned_of() {
    let (_, result) = measure("co", &CO.replace("clip_sigma = 5\n", ""));
    assert!(result.contains("\"spikes\""), "{result}");
    let gaussian = "
[measure]
bands = [\"CN-3883\"]
clip_sigma = 5
[continuum]
kind = \"sunlight\"
";
    let (_, result) = measure("cn", gaussian);
    assert!(result.contains("gaussian-for-structured"), "{result}");
    // A polynomial under Fraunhofer lines cannot fit.
    let plain = CN.replace("kind = \"sunlight\"", "order = 3");
    let (bands, result) = measure("cn", &plain);
    let off = number(&bands[0], "flux_erg_s_cm2") / truth("cn") - 1.0;
    println!("cn on a polynomial: {:+.2} %", 100.0 * off);
    assert!(result.contains("poor-fit"), "{result}");
}
