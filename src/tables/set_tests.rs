//! Look-ups and refusals: what a user who replaces a folder gets to see.

use super::*;
use crate::ground::ErrorKind;
use std::fs;
use tempfile::TempDir;

/// A copy of the bundled line lists (or comparison set) with one edit in one file.
fn edited(folder: &str, file: &str, from: &str, to: &str) -> TempDir {
    let dir = TempDir::new().unwrap();
    let origin = Path::new(env!("CARGO_MANIFEST_DIR")).join(folder);
    for entry in fs::read_dir(origin).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            continue;
        }
        let mut text = fs::read_to_string(&path).unwrap();
        if path.ends_with(file) {
            assert!(text.contains(from), "{file} holds no {from:?}");
            text = text.replacen(from, to, 1);
        }
        fs::write(dir.path().join(path.file_name().unwrap()), text).unwrap();
    }
    dir
}

fn refused_lists(file: &str, from: &str, to: &str) -> String {
    let dir = edited("line-lists", file, from, to);
    let e = Tables::load(Some(dir.path()), None).unwrap_err();
    assert_eq!(e.kind(), ErrorKind::Table);
    e.to_string()
}

fn refused_comets(from: &str, to: &str) -> String {
    let dir = edited("comparison-set", "measurements.csv", from, to);
    let e = Tables::load(None, Some(dir.path())).unwrap_err();
    assert!(e.line().is_some(), "{e}");
    e.to_string()
}

fn holds(text: &str, words: &[&str]) {
    for word in words {
        assert!(text.contains(word), "no {word:?} in {text}");
    }
}

#[test]
fn look_ups() {
    let t = Tables::bundled();
    let band = t.band("CO2-4.26um").unwrap();
    assert!(band.infrared() && band.structured);
    assert!(band.window_aa.0 < band.centre_aa && band.centre_aa < band.window_aa.1);
    assert!(!t.band("CN-3883").unwrap().infrared());
    let e = t.band("CO2-4.26").unwrap_err();
    assert_eq!(e.exit_code(), 2);
    holds(&e.to_string(), &["did you mean \"CO2-4.26um\"", "C2-5165"]);
    let e = t.speed_law("parents").unwrap_err().to_string();
    holds(&e, &["parents-0.85", "haser-1"]);
    assert_eq!(t.length_sets(), ["ahearn1995", "cochran1985"]);
    let cn = Species::new("CN");
    assert!(t.scale_lengths("ahearn1995", &cn).is_some());
    assert!(t.scale_lengths("ahearn1995", &Species::new("CH")).is_none());
    assert_eq!(
        t.photo_rate(&Species::new("OH")).unwrap().variant,
        "theoretical"
    );
    assert_eq!(t.photo_rates_of(&Species::new("OH")).len(), 2);
    assert!(t.default_efficiency("OI-6300").is_none());
    assert!(t.source("schleicher2010").is_some() && t.source("x").is_none());
}

#[test]
fn air_wavelengths_become_vacuum_and_energies_photons() {
    let t = Tables::bundled();
    let red = t.band("OI-6300").unwrap();
    assert!(
        (red.centre_aa - 6300.304 - 1.742).abs() < 0.005,
        "{}",
        red.centre_aa
    );
    assert_eq!(red.fwhm_aa, 0.0);
    let cn = t.default_efficiency("CN-3883").unwrap();
    let photon_erg = crate::ground::constants::HC_ERG_AA / t.band("CN-3883").unwrap().centre_aa;
    assert!(cn.given_erg && (cn.g_photons_s * photon_erg / 3.35e-13 - 1.0).abs() < 1e-12);
    assert!((cn.g_at_photons_s(2.0) / cn.g_photons_s - 0.25).abs() < 1e-12);
}

#[test]
fn a_replacing_folder_must_be_complete() {
    let dir = edited("line-lists", "bands.csv", "#", "#");
    fs::remove_file(dir.path().join("speed_laws.csv")).unwrap();
    let e = Tables::load(Some(dir.path()), None)
        .unwrap_err()
        .to_string();
    holds(&e, &["lacks speed_laws.csv", "copy the missing ones"]);
    let e = Tables::load(None, Some(Path::new("no-such-folder"))).unwrap_err();
    holds(&e.to_string(), &["no-such-folder", "measurements.csv"]);
}

#[test]
fn an_own_row_is_taken() {
    let row = "\nNH2-6330,NH2,\"(0,8,0)\",6330,Angstrom,air,40,6290,6370,true,common-practice,common practice,\nCH-4315";
    let dir = edited("line-lists", "bands.csv", "\nCH-4315", row);
    let t = Tables::load(Some(dir.path()), None).unwrap();
    assert_eq!(t.band("NH2-6330").unwrap().species, Species::new("NH2"));
}

/// The indented example rows of a folder's README, with the source they name, are accepted.
#[test]
fn the_rows_shown_in_the_readmes_are_accepted() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let example = |folder: &str, n: usize| {
        let text = fs::read_to_string(root.join(folder).join("README.md")).unwrap();
        let rows = text.lines().filter_map(|l| l.strip_prefix("    "));
        rows.map(str::to_owned).nth(n).expect("an example row")
    };
    let append = |dir: &TempDir, file: &str, row: &str| {
        let path = dir.path().join(file);
        let text = fs::read_to_string(&path).unwrap();
        fs::write(path, format!("{text}{row}\n")).unwrap();
    };
    let lists = edited("line-lists", "bands.csv", "#", "#");
    append(&lists, "sources.csv", "me2030,\"Me 2030, private\",");
    append(&lists, "bands.csv", &example("line-lists", 0));
    append(&lists, "efficiencies.csv", &example("line-lists", 1));
    let comets = edited("comparison-set", "sources.csv", "#", "#");
    append(&comets, "sources.csv", "me2031,Me 2031,");
    append(&comets, "measurements.csv", &example("comparison-set", 0));
    let t = Tables::load(Some(lists.path()), Some(comets.path())).unwrap();
    assert_eq!(
        t.default_efficiency("NH2-6330").unwrap().provenance.source,
        "me2030"
    );
    assert_eq!(t.comparison().last().unwrap().err_plus, Some(0.03));
}

#[test]
fn bad_line_lists_are_refused() {
    let e = refused_lists("bands.csv", "4.2589,um", "4.2589,mm");
    holds(&e, &["bands.csv:", "\"mm\"", "um, Angstrom"]);
    let e = refused_lists("bands.csv", "4.2589,um", "4.9,um");
    holds(&e, &["does not lie inside the window"]);
    let e = refused_lists("bands.csv", "CO-4.67um,", "CO2-4.26um,");
    holds(&e, &["\"CO2-4.26um\" is given twice"]);
    let e = refused_lists("bands.csv", "brooke2014", "broke2014");
    holds(
        &e,
        &["no source has the key", "did you mean \"brooke2014\""],
    );
    let e = refused_lists("bands.csv", "brooke2014", "");
    holds(&e, &["column \"source\" is empty"]);
    let e = refused_lists("efficiencies.csv", "CN-3883,3.35e-13", "CN-388,3.35e-13");
    holds(&e, &["efficiencies.csv:", "not in bands.csv"]);
    let e = refused_lists(
        "efficiencies.csv",
        "true,true,schleicher2010",
        "true,false,schleicher2010",
    );
    holds(&e, &["CN-3883", "marked default"]);
    let e = refused_lists(
        "efficiencies.csv",
        "schleicher2010,read",
        "schleicher2010,red",
    );
    holds(&e, &["did you mean \"read\"", "common practice"]);
    let e = refused_lists(
        "scale_lengths.csv",
        "ahearn1995,CN,13000",
        "ahearn1995,CN,-13000",
    );
    holds(&e, &["scale_lengths.csv:", "-13000 lies outside"]);
    let e = refused_lists("photo_rates.csv", "0.2,false", "0.2,true");
    holds(&e, &["no single default photo rate"]);
    let e = refused_lists("solar_e490.csv", "\n120.5,", "\n119.5,");
    holds(&e, &["does not exceed the row before"]);
}

#[test]
fn bad_comparison_rows_are_refused() {
    holds(
        &refused_comets("0.04,0.005,0.005", "0.04,0.005,"),
        &["only one of err_minus"],
    );
    holds(
        &refused_comets("0.04,0.005,0.005,value", "0.04,0.005,0.005,upper"),
        &["no errors"],
    );
    holds(
        &refused_comets("0.04,0.005,0.005", "4%,0.005,0.005"),
        &["\"4%\" is not a number"],
    );
    holds(&refused_comets(",HTC,", ",HFC,"), &["JFC, HTC, OCC"]);
    holds(
        &refused_comets("harringtonpinto2022", "pinto"),
        &["\"compiled_in\""],
    );
}

#[test]
fn one_key_cannot_stand_for_two_works() {
    let dir = edited(
        "line-lists",
        "sources.csv",
        "Icarus 118, 223\"",
        "Icarus 119, 1\"",
    );
    let e = Tables::load(Some(dir.path()), None)
        .unwrap_err()
        .to_string();
    holds(&e, &["\"ahearn1995\" stands for"]);
}
