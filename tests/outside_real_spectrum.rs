//! A real observation through the program: a survey spectrum with errors and mask, its lines as
//! bands of one's own, against fits by two general-purpose libraries (`tests/external/real/`).

use std::path::Path;
use std::process::Command;

const PLAN: &str = r#"
[comet]
label = "galaxy spaxel"
heliocentric_au = 1.0
heliocentric_km_s = 0.0
observer_au = 1.0
observer_km_s = 0.0

[aperture]
radius_arcsec = 1.0

[[spectrum]]
file = "SPECTRUM"
wavelength_unit = "Angstrom"
medium = "vacuum"
flux_unit = "erg/s/cm2/Angstrom"
frame = "comet"
calibration_sigma = 0.0
[spectrum.columns]
wavelength = "wave"
flux = "flux"
error = "err_flux"
mask = "pixel_mask"

[continuum]
order = 1

[measure]
bands = [BANDS]
ratios = []
"#;

struct Line {
    window: (f64, f64),
    /// (value, error) of area, centre and Gaussian σ.
    numbers: [(f64, f64); 3],
}

fn outside() -> Vec<Line> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/external/real/gaussian_fits.csv");
    let mut table = csv::Reader::from_path(path).unwrap();
    table
        .records()
        .map(|row| {
            let row = row.unwrap();
            let number = |i: usize| row[i].parse::<f64>().unwrap();
            Line {
                window: (number(2), number(3)),
                numbers: [
                    (number(7), number(8)),
                    (number(9), number(10)),
                    (number(11), number(12)),
                ],
            }
        })
        .collect()
}

#[test]
fn areas_centres_widths_and_errors() {
    let lines = outside();
    assert_eq!(lines.len(), 3);
    let ids: Vec<String> = (0..lines.len()).map(|i| format!("\"line{i}\"")).collect();
    let spectrum =
        Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/external/real/SHOC579_MANGA38-35.txt");
    let mut plan = PLAN
        .replace("SPECTRUM", spectrum.to_str().unwrap())
        .replace("BANDS", &ids.join(", "));
    for (i, line) in lines.iter().enumerate() {
        // Start two ångströms off, so that the fit has something to do.
        plan.push_str(&format!(
            "\n[[band]]\nid = \"line{i}\"\ncentre = {}\nfwhm = 5.0\nwindow = [{}, {}]\ncentre_is = \"free\"\nwidth_is = \"free\"\n",
            line.numbers[1].0 + 2.0,
            line.window.0,
            line.window.1
        ));
    }
    let dir = tempfile::tempdir().unwrap();
    let file = dir.path().join("plan.toml");
    std::fs::write(&file, plan).unwrap();
    let done = Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .arg("measure")
        .arg(&file)
        .output()
        .unwrap();
    assert!(
        done.status.success(),
        "{}",
        String::from_utf8_lossy(&done.stderr)
    );
    let bands = dir.path().join("plan-results/bands.csv");
    let mut table = csv::Reader::from_path(bands).unwrap();
    let head = table.headers().unwrap().clone();
    let mut worst = 0.0_f64;
    for (row, line) in table.records().map(|r| r.unwrap()).zip(&lines) {
        let cell = |name: &str| {
            row[head.iter().position(|h| h == name).unwrap()]
                .parse::<f64>()
                .unwrap()
        };
        let per_sigma = (8.0 * 2f64.ln()).sqrt();
        let found = [
            (cell("flux_erg_s_cm2"), cell("flux_sigma_erg_s_cm2")),
            (cell("centre_aa"), cell("centre_sigma_aa")),
            (
                cell("fwhm_aa") / per_sigma,
                cell("fwhm_sigma_aa") / per_sigma,
            ),
        ];
        for (ours, theirs) in found.iter().zip(&line.numbers) {
            for (a, b) in [(ours.0, theirs.0), (ours.1, theirs.1)] {
                let off = (a / b - 1.0).abs();
                worst = worst.max(off);
                assert!(off < 2e-3, "{a:e} {b:e} in {row:?}");
            }
        }
    }
    println!("worst relative difference from the libraries' fits: {worst:.1e}");
}
