//! The bundled numbers against each other: sums, ratios and derivations that their notes claim.

use super::*;
use crate::ground::Species;
use crate::ground::constants::{FWHM_PER_SIGMA, HC_OVER_K_CM_K};
use std::collections::HashMap;

#[test]
fn a_memory_row_is_default_only_where_nothing_was_read() {
    let t = Tables::bundled();
    for band in t.bands() {
        let rows = t.efficiencies_of(&band.id);
        if let Some(default) = t.default_efficiency(&band.id)
            && default.provenance.how.is_memory()
        {
            let read = rows.iter().any(|e| e.provenance.how == How::Read);
            assert!(!read, "{} has a read value", band.id);
        }
        assert!(rows.iter().all(|e| e.rh_power == -2.0), "{}", band.id);
    }
}

#[test]
fn every_line_is_sharp_and_every_window_holds_the_band() {
    for band in Tables::bundled().bands() {
        let (low, high) = band.window_aa;
        let half = 0.5 * band.fwhm_aa;
        assert!(
            low < band.centre_aa - half && band.centre_aa + half < high,
            "{}",
            band.id
        );
        assert_eq!(band.structured, band.fwhm_aa > 0.0, "{}", band.id);
    }
}

#[test]
fn branches_sum_to_the_total_rate() {
    let t = Tables::bundled();
    let mut sums: HashMap<(Species, String), (f64, f64)> = HashMap::new();
    for b in t.photo_branches() {
        let sum = sums
            .entry((b.species.clone(), b.variant.clone()))
            .or_default();
        sum.0 += b.quiet_per_s;
        sum.1 += b.active_per_s;
        assert_eq!(
            b.kind == BranchKind::Ionisation,
            b.products.ends_with("+ e"),
            "{}",
            b.products
        );
    }
    assert!(sums.len() > 20);
    for ((species, variant), (quiet, active)) in sums {
        let rates = t.photo_rates_of(&species);
        let total = rates.iter().find(|p| p.variant == variant).unwrap();
        // The totals carry four digits, the branches three.
        for (sum, whole) in [(quiet, total.quiet_per_s), (active, total.active_per_s)] {
            assert!(
                (sum / whole - 1.0).abs() < 2e-3,
                "{species} {variant}: {sum:e} {whole:e}"
            );
        }
    }
}

#[test]
fn the_active_sun_destroys_faster() {
    let t = Tables::bundled();
    for b in t.photo_branches() {
        for p in t.photo_rates_of(&b.species) {
            assert!(p.quiet_per_s <= p.active_per_s, "{}", p.species);
        }
    }
}

/// Mean and FWHM (µm) of the P and R emission lines of a linear molecule, upper levels at 70 K.
fn linear_band_um(t: &Tables, species: &str, band: &str, odd_only: bool) -> (f64, f64) {
    let s = Species::new(species);
    let get = |b: &str, q: &str| t.strength(&s, b, q).map(|r| r.value);
    let (origin, upper) = (
        get(band, "band origin").unwrap(),
        get(band, "B upper").unwrap(),
    );
    let lower = get(band, "B lower")
        .or_else(|| get("ground", "B lower"))
        .unwrap();
    let (mut n, mut sum, mut sum2) = (0.0, 0.0, 0.0);
    for j in (0..150).filter(|j| !odd_only || j % 2 == 1) {
        let j = f64::from(j);
        let term = upper * j * (j + 1.0);
        let population = (-HC_OVER_K_CM_K * term / 70.0).exp();
        for (below, factor) in [(j + 1.0, j + 1.0), (j - 1.0, j)] {
            if below < 0.0 {
                continue;
            }
            let nu = origin + term - lower * below * (below + 1.0);
            let (weight, um) = (population * factor * nu.powi(3), 1.0e4 / nu);
            n += weight;
            sum += weight * um;
            sum2 += weight * um * um;
        }
    }
    let mean = sum / n;
    (mean, FWHM_PER_SIGMA * (sum2 / n - mean * mean).sqrt())
}

#[test]
fn derived_centres_and_widths_follow_from_the_rotational_constants() {
    let t = Tables::bundled();
    for (id, species, band, odd) in [
        ("CO-4.67um", "CO", "v1-0", false),
        ("CO2-4.26um", "CO2", "nu3 (00011)", true),
        ("HCN-3.02um", "HCN", "nu3", false),
        ("OCS-4.85um", "OCS", "nu3", false),
    ] {
        let row = t.band(id).unwrap();
        let (centre, fwhm) = linear_band_um(&t, species, band, odd);
        assert!(
            (row.centre_aa / 1.0e4 - centre).abs() < 2e-4,
            "{id} {centre}"
        );
        assert!(
            (row.fwhm_aa / 1.0e4 / fwhm - 1.0).abs() < 0.01,
            "{id} {fwhm}"
        );
        assert_eq!(row.provenance.how, How::Derived);
    }
}

/// The logarithms after "printed log Q:" in a note.
fn printed(note: &str) -> HashMap<String, f64> {
    let Some((_, rest)) = note.split_once("printed log Q: ") else {
        return HashMap::new();
    };
    let words: Vec<&str> = rest.split(';').next().unwrap().split_whitespace().collect();
    let pairs = words.chunks_exact(2);
    pairs
        .map(|p| (p[0].replace("log", ""), p[1].parse().unwrap()))
        .collect()
}

#[test]
fn ratios_agree_with_the_rates_their_notes_give() {
    let t = Tables::bundled();
    let (mut from_logs, mut from_rates) = (0, 0);
    for row in t.comparison() {
        let note = &row.provenance.note;
        let q = printed(note);
        if let (Some(a), Some(b)) = (q.get(row.of.as_str()), q.get(row.to.as_str())) {
            from_logs += 1;
            assert!(row.log10 && (a - b - row.value).abs() < 1e-6, "{row:?}");
        }
        if let Some((_, rest)) = note.split_once("tabulated Qs give ") {
            from_rates += 1;
            let ratio: f64 = rest.split(',').next().unwrap().parse().unwrap();
            assert!(
                (ratio - row.value).abs() <= row.err_plus.unwrap(),
                "{row:?}"
            );
        }
        if note.contains("INCONSISTENT") {
            assert_eq!(row.confidence, Confidence::Check);
        }
    }
    assert!(from_logs > 40 && from_rates > 5, "{from_logs} {from_rates}");
}

#[test]
fn only_comets_bound_to_the_sun_are_compared() {
    for row in Tables::bundled().comparison() {
        let (designation, _) = row.comet.split_once('/').expect("a designation");
        let numbered = designation.split('-').next().unwrap().strip_suffix('P');
        let periodic = numbered.is_some_and(|n| n.parse::<u32>().is_ok());
        assert!(
            periodic || ["C", "P"].contains(&designation),
            "{}",
            row.comet
        );
    }
}

#[test]
fn solar_nickel_over_iron_is_the_difference_of_the_two_rows() {
    let t = Tables::bundled();
    let dex = |element: &str, source: &str| {
        let found = t.solar_abundances().iter().find(|a| {
            a.element == element && a.relative_to == "H" && a.provenance.source == source
        });
        found.unwrap().log10_ratio()
    };
    let mut seen = 0;
    for a in t
        .solar_abundances()
        .iter()
        .filter(|a| a.scale == AbundanceScale::Dex)
    {
        let source = &a.provenance.source;
        let difference = dex("Ni", source) - dex("Fe", source);
        assert!((a.log10_ratio() - difference).abs() < 1e-9, "{source}");
        seen += 1;
    }
    assert_eq!(seen, 2);
}

#[test]
fn the_solar_table_integrates_to_the_constant_of_its_standard() {
    let t = Tables::bundled();
    let (low, high) = t.solar().range_aa();
    let steps = 200_000;
    let grid = (high / low).ln() / f64::from(steps);
    let sum: f64 = (0..steps)
        .map(|i| {
            let aa = low * ((f64::from(i) + 0.5) * grid).exp();
            t.solar().irradiance_erg_s_cm2_aa(aa).unwrap() * aa * grid
        })
        .sum();
    // 1366.1 W m⁻² is the standard's own figure; 1 W m⁻² = 1000 erg s⁻¹ cm⁻².
    assert!((sum / 1000.0 / 1366.1 - 1.0).abs() < 1e-3, "{sum}");
    assert!(t.solar().irradiance_erg_s_cm2_aa(low - 1.0).is_none());
    assert!(t.solar().irradiance_erg_s_cm2_aa(high).is_some());
    assert!(t.solar().irradiance_erg_s_cm2_aa(high * 1.01).is_none());
    assert!(t.solar().photon_flux_per_cm1(f64::NAN).is_none());
}
