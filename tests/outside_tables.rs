//! Published statistics and efficiencies, computed again from the rows they rest on.
//!
//! The published numbers are read from `comparison-set/populations.csv` and
//! `line-lists/efficiencies.csv`, which hold them with their sources. Run with `--nocapture` to
//! see the figures side by side.

use comagauge::ground::{Species, constants::LIGHT_CM_S};
use comagauge::tables::{
    ComparisonRow, DynamicalClass, How, Kind, PopulationRow, Statistic, Tables,
};
use std::collections::BTreeMap;
use std::f64::consts::PI;

const COMPILATION: &str = "harringtonpinto2022";

fn published<'t>(t: &'t Tables, statistic: Statistic, of: &str, to: &str) -> &'t PopulationRow {
    let (of, to) = (Species::new(of), Species::new(to));
    t.populations()
        .iter()
        .find(|p| {
            p.provenance.source == COMPILATION
                && p.statistic == statistic
                && p.of.as_ref() == Some(&of)
                && p.to.as_ref() == Some(&to)
        })
        .expect("the published statistic is in populations.csv")
}

fn compiled<'t>(t: &'t Tables, of: &str) -> Vec<&'t ComparisonRow> {
    let (of, to) = (Species::new(of), Species::new("H2O"));
    t.comparison()
        .iter()
        .filter(|r| r.compiled_in.as_deref() == Some(COMPILATION) && r.of == of && r.to == to)
        .collect()
}

fn median(mut values: Vec<f64>) -> f64 {
    values.sort_by(f64::total_cmp);
    let n = values.len();
    0.5 * (values[(n - 1) / 2] + values[n / 2])
}

/// One vote per comet: the median of each comet's rows.
fn per_comet<'t>(rows: impl Iterator<Item = &'t ComparisonRow>) -> BTreeMap<&'t str, f64> {
    let mut all: BTreeMap<&str, Vec<f64>> = BTreeMap::new();
    for row in rows {
        all.entry(&row.comet).or_default().push(row.value);
    }
    all.into_iter()
        .map(|(comet, v)| (comet, median(v)))
        .collect()
}

/// Medians of detections, one vote per comet, inside 2.5 au where water sublimes freely.
///
/// Found: CO2/H2O 0.140 (23 comets) beside 0.12 ± 0.02, CO/H2O 0.030 (31) beside 0.03 ± 0.01.
/// Without the distance cut: 0.150 (29) and 0.042 (35); the plain median of all rows inside
/// 2.5 au is 0.120 and 0.045. The text at hand states neither the paper's weighting nor its
/// treatment of limits and distance, and each of them moves the median as much as the difference;
/// upper limits are left out here, which lifts both medians. Hence two published sigmas, which hold
/// with and without the distance cut.
#[test]
fn medians_of_the_2022_compilation() {
    let t = Tables::bundled();
    for of in ["CO2", "CO"] {
        let paper = published(&t, Statistic::Median, of, "H2O");
        let rows = compiled(&t, of);
        let values = || rows.iter().copied().filter(|r| r.kind == Kind::Value);
        let inside = || values().filter(|r| r.r_h_au.is_some_and(|r_h| r_h < 2.5));
        let near = per_comet(inside());
        let all = per_comet(values());
        let found = median(near.values().copied().collect());
        let anywhere = median(all.values().copied().collect());
        let sigma = paper.sigma.expect("the paper gives an error");
        println!(
            "{of}/H2O: published {} ± {sigma}; found {found:.3} ({} comets inside 2.5 au), \
             {:.3} ({} comets at any distance), {:.3} (rows inside 2.5 au)",
            paper.value,
            near.len(),
            anywhere,
            all.len(),
            median(inside().map(|r| r.value).collect()),
        );
        for m in [found, anywhere] {
            assert!((m - paper.value).abs() <= 2.0 * sigma, "{of}: {m}");
        }
    }
}

/// Eight of nine Jupiter-family comets have more CO2 than CO; a limit on CO counts as its value.
#[test]
fn jupiter_family_comets_with_more_co2_than_co() {
    let t = Tables::bundled();
    let of_family = |of| {
        let rows = compiled(&t, of).into_iter();
        per_comet(rows.filter(|r| r.class == DynamicalClass::JupiterFamily))
    };
    let (co2, co) = (of_family("CO2"), of_family("CO"));
    let both: Vec<_> = co2
        .iter()
        .filter_map(|(comet, v)| co.get(comet).map(|w| (v, w)))
        .collect();
    let more = both.iter().filter(|(a, b)| a > b).count();
    let paper = published(&t, Statistic::Fraction, "CO2", "CO");
    let fraction = more as f64 / both.len() as f64;
    println!(
        "CO2 > CO: published {}, found {more} of {}",
        paper.value,
        both.len()
    );
    assert_eq!(Some(both.len()), paper.comets);
    assert!((fraction - paper.value).abs() < 1e-3, "{fraction}");
}

/// Band strength for molecules in the ground vibrational state, cm: S = A / (8 π c ν̃²).
fn cold_strength_cm(t: &Tables, species: &Species, band: &str, wavenumber_cm1: f64) -> f64 {
    let a = t.strength(species, band, "vibrational Einstein A").unwrap();
    a.value / (8.0 * PI * LIGHT_CM_S * wavenumber_cm1 * wavenumber_cm1)
}

/// g = S Φ recomputed from the tables equals the derived rows, and lies near the published ones.
///
/// CO2 and CO lie within 10 % of both published values (recalled, not read). CH4 and H2O are not
/// asserted against theirs, which are rough memories of values for other sets of bands.
#[test]
fn derived_efficiencies_beside_published_ones() {
    let t = Tables::bundled();
    for (id, species, band, origin_band, close) in [
        ("CO2-4.26um", "CO2", "nu3", "nu3 (00011)", true),
        ("CO-4.67um", "CO", "v1-0", "v1-0", true),
        ("CH4-3.31um", "CH4", "nu3", "nu3", false),
        ("H2O-2.7um", "H2O", "nu3", "nu3", false),
    ] {
        let s = Species::new(species);
        let origin = t.strength(&s, origin_band, "band origin").unwrap().value;
        let strength_cm = if close {
            cold_strength_cm(&t, &s, band, origin)
        } else {
            t.strength(&s, band, "strength").unwrap().per_molecule()
        };
        let g = strength_cm * t.solar().photon_flux_per_cm1(origin).unwrap();
        for e in t.efficiencies_of(id) {
            let ratio = g / e.g_photons_s;
            println!(
                "{id}: S Φ = {g:.3e}, {} ({}) {:.3e}, ratio {ratio:.3}",
                e.provenance.source,
                e.provenance.how.as_str(),
                e.g_photons_s
            );
            let tolerance = match e.provenance.how {
                How::Derived => 0.005,
                _ if close => 0.1,
                _ => continue,
            };
            assert!((ratio - 1.0).abs() < tolerance, "{id} {ratio}");
        }
    }
}

/// The CO lines summed from the line list agree with the band's Einstein A to the part of the
/// band that lies outside the list's range.
#[test]
fn summed_co_lines_agree_with_the_einstein_coefficient() {
    let t = Tables::bundled();
    let co = Species::new("CO");
    let origin = t.strength(&co, "v1-0", "band origin").unwrap().value;
    let cold = cold_strength_cm(&t, &co, "v1-0", origin);
    let summed = t.strength(&co, "v1-0", "strength").unwrap().per_molecule();
    println!("CO: summed lines over A {:.4}", summed / cold);
    assert!((summed / cold - 1.0).abs() < 0.03);
}
