//! Real spectra: what astropy and numpy read in them (`tests/external/real/`).

use comagauge::ground::{FluxUnit, Medium, WavelengthUnit};
use comagauge::spectrum::{Spectrum, TextLayout, read_text};
use std::path::{Path, PathBuf};

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/external/real")
}

/// The row of `readings.csv` for a spectrum, as numbers; NaN where it has none.
fn reading(name: &str) -> Vec<f64> {
    let mut table = csv::Reader::from_path(folder().join("readings.csv")).unwrap();
    let row = table
        .records()
        .map(|r| r.unwrap())
        .find(|r| &r[0] == name)
        .expect("a row of readings.csv");
    row.iter()
        .skip(1)
        .map(|c| c.parse().unwrap_or(f64::NAN))
        .collect()
}

fn close(found: f64, wanted: f64, relative: f64, what: &str) {
    let off = (found / wanted - 1.0).abs();
    assert!(off <= relative, "{what}: {found} instead of {wanted}");
}

/// Compares a spectrum with its row; `to_file` turns cgs per Å back into the unit of the file.
fn compare(s: &Spectrum, row: &[f64], to_file: impl Fn(f64, f64) -> f64) {
    let n = s.len();
    assert_eq!(n as f64, row[0]);
    let w = s.wavelength_aa();
    for (i, wanted) in [(0, row[1]), (n - 1, row[2]), (n / 2, row[3])] {
        close(w[i], wanted, 6e-8, "wavelength");
    }
    let flux: Vec<f64> = (0..n)
        .map(|i| to_file(s.flux_erg_s_cm2_aa()[i], w[i]))
        .collect();
    close(flux[n / 2], row[4], 1e-6, "flux");
    let sigma = s.sigma_erg_s_cm2_aa().expect("errors");
    close(to_file(sigma[n / 2], w[n / 2]), row[5], 1e-6, "error");
    let mut finite: Vec<f64> = flux.iter().copied().filter(|f| f.is_finite()).collect();
    assert_eq!((n - finite.len()) as f64, row[6]);
    finite.sort_by(f64::total_cmp);
    let m = finite.len();
    let median = 0.5 * (finite[(m - 1) / 2] + finite[m / 2]);
    close(median, row[7], 1e-6, "median flux");
    close(finite[m - 1], row[8], 1e-6, "largest flux");
}

#[test]
fn text_table_with_a_comment_header() {
    let layout = TextLayout::new(
        WavelengthUnit::parse("Angstrom").unwrap(),
        Medium::Vacuum,
        FluxUnit::parse("erg/s/cm2/Angstrom").unwrap(),
    );
    let s = read_text(&folder().join("SHOC579_MANGA38-35.txt"), &layout).unwrap();
    compare(&s, &reading("manga_text"), |f, _| f);
    // The one masked sample of the file is its last, whose error is nan.
    assert_eq!(s.left_out(), (1, 0));
    assert!(!s.good()[s.len() - 1]);
}
