//! What is fuzzed: every reader of foreign bytes, and the plan.

use comagauge::frame::Ephemeris;
use comagauge::ground::{FluxUnit, Medium, WavelengthUnit};
use comagauge::plan::{PlanFile, check};
use comagauge::spectrum::{FitsLayout, TextLayout, looks_like_fits, parse_text, read_fits};
use comagauge::tables::Tables;
use std::path::Path;
use std::sync::OnceLock;

/// A target: its name and body.
pub type Target = (&'static str, fn(&[u8]));

/// All targets.
pub const TARGETS: [Target; 4] =
    [("plan", plan), ("text", text), ("fits", fits), ("ephemeris", ephemeris)];

/// A plan, read and checked against the bundled tables.
pub fn plan(data: &[u8]) {
    static TABLES: OnceLock<Tables> = OnceLock::new();
    if let Ok(text) = std::str::from_utf8(data)
        && let Ok(file) = PlanFile::parse(Path::new("plan.toml"), text.to_owned())
    {
        let _ = check(&file, TABLES.get_or_init(Tables::bundled));
    }
}

/// A text spectrum.
pub fn text(data: &[u8]) {
    let unit = WavelengthUnit::parse("Angstrom").expect("a unit");
    let flux = FluxUnit::parse("erg/s/cm2/Angstrom").expect("a unit");
    let _ = parse_text("fuzz", data, &TextLayout::new(unit, Medium::Air, flux));
}

/// A FITS file, by the file's own words and with everything said.
pub fn fits(data: &[u8]) {
    let Ok(dir) = tempfile::tempdir() else { return };
    let path = dir.path().join("fuzz.fits");
    if std::fs::write(&path, data).is_err() {
        return;
    }
    let _ = looks_like_fits(&path);
    let _ = read_fits(&path, &FitsLayout::default());
    let said = FitsLayout {
        row: Some(1),
        wavelength_unit: WavelengthUnit::parse("Angstrom").ok(),
        medium: Some(Medium::Vacuum),
        flux_unit: FluxUnit::parse("erg/s/cm2/Angstrom").ok(),
        ..FitsLayout::default()
    };
    let _ = read_fits(&path, &said);
}

/// An ephemeris table.
pub fn ephemeris(data: &[u8]) {
    if let Ok(text) = std::str::from_utf8(data) {
        let _ = Ephemeris::from_csv(text, Path::new("fuzz.csv"));
    }
}
