//! Unit conversions against astropy (`tests/external/units/`).

use comagauge::ground::FluxUnit;
use std::path::Path;

/// Column names of the files and a spelling of the unit each stands for.
const COLUMNS: [(&str, &str); 15] = [
    ("erg_s_cm2_A", "erg s-1 cm-2 Angstrom-1"),
    ("W_m2_um", "W m-2 um-1"),
    ("W_m2_nm", "W/m2/nm"),
    ("Jy", "Jy"),
    ("mJy", "mJy"),
    ("erg_s_cm2_Hz", "erg/(s cm2 Hz)"),
    ("photon_s_cm2_A", "photon/s/cm2/Angstrom"),
    ("photon_s_m2_um", "ph s-1 m-2 micron-1"),
    ("photon_s_cm2_Hz", "photon/s/cm**2/Hz"),
    ("erg_s_cm2_A_arcsec2", "erg/s/cm2/A/arcsec2"),
    ("erg_s_cm2_A_sr", "erg s^-1 cm^-2 A^-1 sr^-1"),
    ("W_m2_um_sr", "W/m2/um/sr"),
    ("MJy_sr", "MJy/sr"),
    ("photon_s_m2_A_sr", "photon/s/m2/Angstrom/sr"),
    ("rayleigh_per_A", "R/Angstrom"),
];

fn check(file: &str, rows_wanted: usize) -> usize {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/external/units")
        .join(file);
    let mut table = csv::Reader::from_path(path).unwrap();
    let header = table.headers().unwrap().clone();
    let (mut rows, mut compared) = (0, 0);
    for row in table.records().map(|r| r.unwrap()) {
        rows += 1;
        let value: f64 = row[0].parse().unwrap();
        let vacuum_aa: f64 = row[2].parse().unwrap();
        let unit = FluxUnit::parse(&row[1]).unwrap_or_else(|e| panic!("{e}"));
        let cgs = unit.to_erg_s_cm2_aa(value, vacuum_aa);
        for (column, cell) in header.iter().zip(&row).skip(3) {
            let (_, spelling) = COLUMNS.iter().find(|c| c.0 == column).expect(column);
            let other = FluxUnit::parse(spelling).unwrap_or_else(|e| panic!("{e}"));
            let wanted: f64 = cell.parse().unwrap();
            let found = other.from_erg_s_cm2_aa(cgs, vacuum_aa);
            let off = if wanted == 0.0 {
                found.abs()
            } else {
                (found / wanted - 1.0).abs()
            };
            assert!(
                off < 1e-12,
                "{file}: {} {} in {column}: {found} {wanted}",
                &row[0],
                &row[1]
            );
            let back = other.to_erg_s_cm2_aa(wanted, vacuum_aa);
            assert!((back - cgs).abs() <= 1e-12 * cgs.abs(), "{file}: {column}");
            compared += 1;
        }
    }
    assert_eq!(rows, rows_wanted, "{file}");
    compared
}

#[test]
fn flux_densities() {
    assert_eq!(check("flux_density.csv", 21), 189);
}

#[test]
fn brightnesses() {
    assert_eq!(check("brightness.csv", 7), 42);
}

#[test]
fn line_fluxes_are_refused_as_densities() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/external/units/line_flux.csv");
    let mut rows = 0;
    for row in csv::Reader::from_path(path).unwrap().records() {
        let e = FluxUnit::parse(&row.unwrap()[1]).unwrap_err();
        assert!(e.to_string().contains("line flux"), "{e}");
        rows += 1;
    }
    assert_eq!(rows, 5);
}
