//! Constants, Doppler shifts and air–vacuum conversion against outside tables.

use comagauge::frame::{Aperture, Frame, Geometry, to_rest};
use comagauge::ground::constants as c;
use comagauge::ground::{air_from_vacuum_aa, vacuum_from_air_aa};
use comagauge::spectrum::{Sample, Spectrum};
use std::path::Path;

fn rows(file: &str) -> Vec<csv::StringRecord> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/external")
        .join(file);
    csv::Reader::from_path(path)
        .unwrap()
        .records()
        .map(|r| r.unwrap())
        .collect()
}

#[test]
fn constants() {
    let table = rows("physics/constants.csv");
    let outside = |name: &str| {
        let row = table
            .iter()
            .find(|r| &r[0] == name)
            .unwrap_or_else(|| panic!("{name}"));
        row[2].parse::<f64>().unwrap()
    };
    let pairs = [
        (c::LIGHT_KM_S * 1e3, outside("speed of light in vacuum")),
        (c::LIGHT_CM_S * 1e-2, outside("speed of light in vacuum")),
        (c::LIGHT_AA_S * 1e-10, outside("speed of light in vacuum")),
        (c::PLANCK_ERG_S * 1e-7, outside("Planck constant")),
        (c::BOLTZMANN_ERG_K * 1e-7, outside("Boltzmann constant")),
        (c::HC_ERG_AA, outside("hc (erg Angstrom)")),
        (c::AU_KM * 1e3, outside("astronomical unit")),
        (
            c::GM_SUN_KM3_S2 * 1e9,
            outside("nominal solar mass parameter"),
        ),
        (c::ATOMIC_MASS_G * 1e-3, outside("atomic mass constant")),
        (1.0 / c::ARCSEC2_PER_SR, outside("square arcsecond")),
    ];
    for (i, (ours, theirs)) in pairs.into_iter().enumerate() {
        assert!(
            (ours / theirs - 1.0).abs() < 1e-9,
            "pair {i}: {ours} {theirs}"
        );
    }
}

#[test]
fn doppler() {
    let geometry = Geometry::new(1.0, 0.0, 1.0, 0.0).unwrap();
    let aperture = Aperture::Circle { radius_arcsec: 1.0 };
    for row in rows("physics/doppler.csv") {
        let v: Vec<f64> = row.iter().map(|x| x.parse().unwrap()).collect();
        let (rest_aa, velocity_km_s, shifted_aa) = (v[0], v[1], v[2]);
        let sample = |wavelength_aa: f64| Sample {
            wavelength_aa,
            flux_erg_s_cm2_aa: 1.0,
            sigma_erg_s_cm2_aa: None,
            flagged: false,
            line: 1,
        };
        let samples = vec![sample(shifted_aa), sample(2.0 * shifted_aa)];
        let spectrum = Spectrum::new("shifted", samples, false).unwrap();
        let rest = to_rest(
            &spectrum,
            Frame::Shifted { velocity_km_s },
            &geometry,
            &aperture,
        );
        assert!(
            (rest.wavelength_aa()[0] / rest_aa - 1.0).abs() < 1e-11,
            "{row:?}"
        );
    }
}

#[test]
fn vacuum_to_air() {
    let table = rows("wavelengths/vac_to_air_formulas.csv");
    assert_eq!(table.len(), 33);
    for row in table {
        let vacuum: f64 = row[0].parse().unwrap();
        let ciddor: f64 = row[1].parse().unwrap();
        let found = air_from_vacuum_aa(vacuum);
        assert!((found - ciddor).abs() < 1e-9, "{vacuum}: {found} {ciddor}");
    }
}

#[test]
fn air_to_vacuum() {
    let table = rows("wavelengths/air_to_vac_exact_inverse.csv");
    assert_eq!(table.len(), 32);
    for row in table {
        let air: f64 = row[0].parse().unwrap();
        let wanted: f64 = row[1].parse().unwrap();
        let found = vacuum_from_air_aa(air);
        assert!((found - wanted).abs() < 1e-9, "{air}: {found} {wanted}");
    }
}

#[test]
fn printed_pairs() {
    let table = rows("wavelengths/published_pairs_morton2003.csv");
    assert_eq!(table.len(), 1240);
    let mut worst = 0.0_f64;
    for row in table {
        let air: f64 = row[1].parse().unwrap();
        let vacuum: f64 = row[2].parse().unwrap();
        worst = worst.max((air_from_vacuum_aa(vacuum) - air).abs());
    }
    println!("largest difference from 1240 printed pairs: {worst:.5} Å");
    // Another formula was used in print; the two differ by up to half a milliångström.
    assert!(worst < 6e-4);
}
