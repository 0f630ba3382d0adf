//! Rotational structure of bands against published lines, and its conservation laws.

use comagauge::atomic::{RotationalBand, ShapeLine, rotational_lines};
use comagauge::tables::Tables;
use proptest::prelude::*;
use serde::Deserialize;
use serde::de::DeserializeOwned;
use std::sync::LazyLock;

const BANDS: [&str; 6] = [
    "CO2-4.26um",
    "CO-4.67um",
    "HCN-3.02um",
    "OCS-4.85um",
    "H2O-2.7um",
    "CN-3883",
];

fn external<T: DeserializeOwned>(name: &str) -> Vec<T> {
    let path = format!(
        "{}/tests/external/hitran/{name}",
        env!("CARGO_MANIFEST_DIR")
    );
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(path)
        .unwrap();
    reader.deserialize().map(|r| r.unwrap()).collect()
}

#[derive(Deserialize)]
struct Line {
    nu_cm1: f64,
    #[serde(rename = "S296_cm")]
    strength_cm: f64,
    iso: Option<u8>,
    vu: Option<u8>,
    vl: Option<u8>,
}

fn load(id: &str) -> RotationalBand {
    RotationalBand::load(id, None).unwrap().unwrap()
}

/// Main isotopologue, fundamental.
fn hitran(name: &str) -> Vec<Line> {
    let mut lines: Vec<Line> = external(name);
    lines.retain(|l| l.iso.is_none_or(|i| i == 1) && l.vu.is_none_or(|v| v == 1));
    lines.retain(|l| l.vl.is_none_or(|v| v == 0));
    lines
}

/// The line next to a wavenumber.
fn nearest(lines: &[ShapeLine], nu_cm1: f64) -> ShapeLine {
    let off = |l: &ShapeLine| (1e8 / l.vacuum_aa - nu_cm1).abs();
    *lines
        .iter()
        .min_by(|a, b| off(a).total_cmp(&off(b)))
        .unwrap()
}

const LISTS: [(&str, &str, usize); 2] = [
    ("CO-4.67um", "co_v10_hitran.csv", 88),
    ("CO2-4.26um", "co2_nu3_rbranch_hitran.csv", 40),
];

#[test]
fn lines_are_where_hitran_has_them() {
    for (id, file, count) in LISTS {
        let lines = hitran(file);
        assert_eq!(lines.len(), count);
        let computed = load(id).absorption(296.0).unwrap();
        // The 1st, 3rd, 5th … rows served to fit the constants.
        let off = |l: &Line| (1e8 / nearest(&computed, l.nu_cm1).vacuum_aa - l.nu_cm1).abs();
        let worst = lines.iter().skip(1).step_by(2).map(off).fold(0.0, f64::max);
        println!("{id}: {} lines, worst {worst:.1e} cm-1", count / 2);
        assert!(worst < 0.02, "{id}: {worst}");
    }
}

#[derive(Deserialize)]
struct Standard {
    value: f64,
    unit: String,
}

#[test]
fn carbon_monoxide_meets_the_frequency_standards() {
    let standards: Vec<Standard> = external("co_frequency_standards.csv");
    assert_eq!(standards.len(), 8);
    let computed = load("CO-4.67um").absorption(296.0).unwrap();
    for standard in standards {
        assert_eq!(standard.unit, "cm-1");
        let found = 1e8 / nearest(&computed, standard.value).vacuum_aa;
        let off = (found - standard.value).abs();
        println!("{}: off by {off:.1e} cm-1", standard.value);
        assert!(off < 0.001, "{} {off}", standard.value);
    }
}

#[test]
fn absorption_strengths_are_those_of_hitran() {
    for (id, file, _) in LISTS {
        let lines = hitran(file);
        let computed = load(id).absorption(296.0).unwrap();
        let mine: Vec<f64> = lines
            .iter()
            .map(|l| nearest(&computed, l.nu_cm1).share)
            .collect();
        let theirs_sum: f64 = lines.iter().map(|l| l.strength_cm).sum();
        let mine_sum: f64 = mine.iter().sum();
        let off = |(l, m): (&Line, &f64)| (m / mine_sum * theirs_sum / l.strength_cm - 1.0).abs();
        let worst = lines.iter().zip(&mine).map(off).fold(0.0, f64::max);
        println!(
            "{id}: {} strengths, worst {:.2} %",
            lines.len(),
            100.0 * worst
        );
        assert!(worst < 0.03, "{id}: {worst}");
    }
}

#[test]
fn the_mean_wavelength_lies_in_the_band_s_window() {
    let tables = Tables::load(None, None).unwrap();
    for id in BANDS {
        let band = tables.band(id).unwrap();
        for temperature_k in [2.0, 20.0, 70.0, 300.0, 1000.0] {
            let lines = rotational_lines(id, temperature_k, None).unwrap().unwrap();
            let mean: f64 = lines.iter().map(|l| l.share * l.vacuum_aa).sum();
            let inside: f64 = lines
                .iter()
                .filter(|l| (band.window_aa.0..=band.window_aa.1).contains(&l.vacuum_aa))
                .map(|l| l.share)
                .sum();
            println!(
                "{id} {temperature_k} K: {} lines, mean {mean:.2} Å, in window {inside:.4}",
                lines.len()
            );
            assert!(band.window_aa.0 < mean && mean < band.window_aa.1, "{id}");
            assert!(temperature_k > 100.0 || inside > 0.98, "{id}: {inside}");
        }
    }
}

#[test]
fn carbon_dioxide_is_quick() {
    let band = load("CO2-4.26um");
    let start = std::time::Instant::now();
    let mut lines = 0;
    for step in 0..1000_u32 {
        lines += band.lines(20.0 + f64::from(step) * 0.2).unwrap().len();
    }
    let each_ms = start.elapsed().as_secs_f64();
    println!("{each_ms:.4} ms a call, {} lines", lines / 1000);
    // Twenty times what was measured, for slow and busy machines.
    assert!(each_ms < 0.2, "{each_ms} ms");
}

static LOADED: LazyLock<Vec<RotationalBand>> =
    LazyLock::new(|| BANDS.iter().map(|id| load(id)).collect());

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::default() })]
    #[test]
    fn shares_are_a_partition(which in 0..BANDS.len(), temperature_k in 2.0..1000.0_f64) {
        let band = &LOADED[which];
        for lines in [band.lines(temperature_k).unwrap(), band.absorption(temperature_k).unwrap()] {
            let sum: f64 = lines.iter().map(|l| l.share).sum();
            prop_assert!((sum - 1.0).abs() < 1e-12, "{sum}");
            prop_assert!(lines.iter().all(|l| l.share >= 0.0 && l.vacuum_aa > 0.0));
            prop_assert!(lines.is_sorted_by(|a, b| a.vacuum_aa <= b.vacuum_aa));
        }
        let least = band.lines(temperature_k).unwrap().iter().map(|l| l.share).fold(1.0, f64::min);
        prop_assert!(least >= 1e-5, "{least}");
    }
}
