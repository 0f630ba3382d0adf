//! Errors of fitted fluxes, Planck radiance and the solar integral against general-purpose libraries and
//! published tables.

use comagauge::atomic::sun;
use comagauge::fit::{
    BandModel, FitSettings, Freedom, SpectrumFit, Uncertainty, fit_spectrum, planck_erg_s_cm2_sr_aa,
};
use comagauge::frame::{Aperture, Frame, Geometry, RestSpectrum, to_rest};
use comagauge::spectrum::{Sample, Spectrum};
use std::collections::HashMap;

type Row = HashMap<String, String>;

fn rows(name: &str) -> Vec<Row> {
    let path = format!("{}/tests/external/{name}", env!("CARGO_MANIFEST_DIR"));
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(&path)
        .unwrap_or_else(|e| panic!("{path}: {e}"));
    reader.deserialize().map(|r| r.expect("a row")).collect()
}

fn number(row: &Row, key: &str) -> f64 {
    row[key]
        .parse()
        .unwrap_or_else(|_| panic!("{key}: {row:?}"))
}

fn spectrum(case: &str) -> RestSpectrum {
    let samples = rows("fit_errors/spectra.csv")
        .iter()
        .filter(|r| r["case"] == case)
        .enumerate()
        .map(|(i, r)| Sample {
            wavelength_aa: number(r, "wavelength_aa"),
            flux_erg_s_cm2_aa: number(r, "flux"),
            sigma_erg_s_cm2_aa: Some(number(r, "sigma")),
            flagged: false,
            line: i + 1,
        })
        .collect();
    let geometry = Geometry::new(1.0, 0.0, 1.0, 0.0).expect("a geometry");
    let circle = Aperture::Circle { radius_arcsec: 1.0 };
    let checked = Spectrum::new(case, samples, false).expect("a spectrum");
    to_rest(&checked, Frame::Comet, &geometry, &circle)
}

/// The case fitted with free centres and widths from the places in the script's list.
fn fit(case: &str, centres: &[f64], uncertainty: Uncertainty) -> SpectrumFit {
    let bands = centres
        .iter()
        .map(|c| BandModel {
            centre: Freedom::Free,
            width: Freedom::Free,
            ..BandModel::gaussian(&format!("{c}"), *c, Some(9.0), (5000.0, 5100.0))
        })
        .collect();
    let mut settings = FitSettings::new(bands);
    settings.continuum.order = Some(1);
    settings.uncertainty = uncertainty;
    fit_spectrum(&spectrum(case), &settings).expect("a fit")
}

const CASES: [(&str, &[f64]); 2] = [("single", &[5050.0]), ("blend", &[5046.0, 5057.0])];

#[test]
fn covariance_and_profiles_of_fluxes() {
    let values = rows("fit_errors/values.csv");
    for (case, centres) in CASES {
        let plain = fit(case, centres, Uncertainty::Covariance);
        let profiled = fit(case, centres, Uncertainty::Profile);
        for row in values.iter().filter(|r| r["case"] == case) {
            let line: usize = row["line"].parse().expect("a line");
            let flux = plain.bands[line].flux_erg_s_cm2;
            assert!(
                (flux.value / number(row, "flux") - 1.0).abs() < 1e-4,
                "{row:?} {flux:?}"
            );
            // The outside derivatives are differences: good to a few 1e-5.
            let outside = number(row, "covariance_sigma");
            assert!(
                (flux.sigma / outside - 1.0).abs() < 1e-3,
                "{row:?} {flux:?}"
            );
            let (below, above) = profiled.sided[line].expect("sides");
            for (ours, theirs) in [
                (below, number(row, "profile_below")),
                (above, number(row, "profile_above")),
            ] {
                assert!((ours / theirs - 1.0).abs() < 2e-3, "{row:?} {ours}");
            }
        }
    }
}

/// Resampling and walkers know nothing of the curvature: their intervals agree with the profile's to
/// the noise of the resampling, here within a quarter.
#[test]
fn resampling_and_walkers_agree_with_the_profile() {
    let (case, centres) = CASES[1];
    let profiled = fit(case, centres, Uncertainty::Profile);
    for kind in [
        Uncertainty::ResidualBootstrap,
        Uncertainty::PairBootstrap,
        Uncertainty::Walkers,
    ] {
        let found = fit(case, centres, kind);
        assert!(!found.sampled.is_empty());
        for (b, p) in found.bands.iter().zip(&profiled.bands) {
            let ratio = b.flux_erg_s_cm2.sigma / p.flux_erg_s_cm2.sigma;
            println!("{kind:?} {}: error over the profile's {ratio:.3}", b.id);
            assert!((0.75..1.33).contains(&ratio), "{kind:?} {ratio}");
            let (low, high) = b.flux_interval_erg_s_cm2.expect("an interval");
            assert!(low < b.flux_erg_s_cm2.value && b.flux_erg_s_cm2.value < high);
        }
        let again = fit(case, centres, kind);
        assert_eq!(
            found.bands[0].flux_interval_erg_s_cm2, again.bands[0].flux_interval_erg_s_cm2,
            "the same seed gives the same interval"
        );
    }
}

#[test]
fn planck_radiance() {
    let all = rows("physics/planck.csv");
    assert!(all.len() >= 50);
    for row in all {
        let (k, aa) = (number(&row, "T_K"), number(&row, "lambda_A"));
        let theirs = number(&row, "B_lambda_erg_s_cm2_A_sr");
        let ours = planck_erg_s_cm2_sr_aa(aa, k);
        assert!((ours / theirs - 1.0).abs() < 1e-9, "{row:?} {ours}");
    }
}

/// The reference of the far ultraviolet and the infrared integrates to the constant that its own
/// standard states, read from the head of the table.
#[test]
fn solar_integral_of_the_standard() {
    let path = format!(
        "{}/line-lists/solar/astm_e490.csv",
        env!("CARGO_MANIFEST_DIR")
    );
    let text = std::fs::read_to_string(&path).expect("the table");
    let stated: f64 = text
        .split("(integral ")
        .nth(1)
        .and_then(|t| t.split_whitespace().next())
        .and_then(|t| t.parse().ok())
        .expect("the stated integral");
    let points: Vec<(f64, f64)> = rows("../../line-lists/solar/astm_e490.csv")
        .iter()
        .map(|r| {
            (
                number(r, "wavelength_vacuum_nm"),
                number(r, "irradiance_w_m2_nm"),
            )
        })
        .collect();
    let total: f64 = points
        .windows(2)
        .map(|w| 0.5 * (w[0].1 + w[1].1) * (w[1].0 - w[0].0))
        .sum();
    println!("{total:.2} W m-2 of {stated}");
    assert!((total / stated - 1.0).abs() < 1e-3, "{total} {stated}");
    // Beyond a micrometre the program's Sun is this table.
    let sun = sun(None).expect("the Sun");
    let (nm, value) = points[points.len() - 200];
    assert!(nm > 1001.0);
    let ours = sun.irradiance_erg_s_cm2_aa(10.0 * nm) / 100.0;
    assert!((ours / value - 1.0).abs() < 1e-9);
}
