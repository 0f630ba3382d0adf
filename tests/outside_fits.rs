//! FITS files written by astropy, and real ones, against what astropy reads in them
//! (`tests/external/fits/`, `tests/external/real/`); damaged files are refused.

use comagauge::ground::{FluxUnit, Medium, WavelengthUnit, air_from_vacuum_aa};
use comagauge::spectrum::{
    Column, ErrorKind, FitsLayout, FitsSpectrum, Part, Spectrum, looks_like_fits, read_fits,
};
use serde_json::Value;
use std::path::{Path, PathBuf};

fn folder(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/external")
        .join(name)
}

fn close(found: f64, wanted: f64, relative: f64, what: &str) {
    let same = (found - wanted).abs() <= relative * wanted.abs();
    assert!(
        same || (found.is_nan() && wanted.is_nan()),
        "{what}: {found} instead of {wanted}"
    );
}

/// A row of `expected.csv`.
struct Sample {
    wavelength_aa: f64,
    flux: f64,
    sigma: f64,
    flagged: bool,
}

fn expected() -> Vec<(String, Sample)> {
    let mut table = csv::Reader::from_path(folder("fits/expected.csv")).unwrap();
    table
        .records()
        .map(|r| {
            let r = r.unwrap();
            let number = |i: usize| r[i].parse().unwrap_or(f64::NAN);
            let sample = Sample {
                wavelength_aa: number(1),
                flux: number(2),
                sigma: number(3),
                flagged: &r[4] == "1",
            };
            (r[0].to_owned(), sample)
        })
        .collect()
}

fn cases() -> serde_json::Map<String, Value> {
    let text = std::fs::read_to_string(folder("fits/expected.json")).unwrap();
    serde_json::from_str(&text).unwrap()
}

fn layout_of(case: &Value) -> FitsLayout {
    let text = |k: &str| case.get(k).and_then(Value::as_str);
    FitsLayout {
        row: case.get("row").map(|r| r.as_u64().unwrap() as usize),
        wavelength_unit: text("say_unit").map(|u| WavelengthUnit::parse(u).unwrap()),
        medium: text("say_medium").map(|m| Medium::parse(m).unwrap()),
        ..FitsLayout::default()
    }
}

fn in_medium(vacuum_aa: f64, case: &Value) -> f64 {
    if case.get("medium").and_then(Value::as_str) == Some("air") {
        air_from_vacuum_aa(vacuum_aa)
    } else {
        vacuum_aa
    }
}

fn compare(name: &str, case: &Value, s: &Spectrum, rows: &[&Sample]) {
    let unit = FluxUnit::parse(case["unit"].as_str().unwrap()).unwrap();
    assert_eq!(s.len(), rows.len(), "{name}");
    for (i, row) in rows.iter().enumerate() {
        let what = format!("{name} sample {i}");
        let aa = s.wavelength_aa()[i];
        close(in_medium(aa, case), row.wavelength_aa, 1e-9, &what);
        let flux = unit.from_erg_s_cm2_aa(s.flux_erg_s_cm2_aa()[i], aa);
        close(flux, row.flux, 1e-6, &what);
        let usable = !row.flagged && row.flux.is_finite();
        assert_eq!(s.good()[i], usable, "{what} usable");
        match s.sigma_erg_s_cm2_aa() {
            Some(sigma) if usable => {
                close(unit.from_erg_s_cm2_aa(sigma[i], aa), row.sigma, 1e-6, &what);
            }
            Some(_) => {}
            None => assert!(row.sigma.is_nan(), "{what} has an error"),
        }
    }
}

#[test]
fn reads_what_astropy_reads() {
    let expected = expected();
    for (name, case) in cases() {
        let path = folder("fits").join(case["file"].as_str().unwrap());
        assert!(looks_like_fits(&path), "{name}");
        let read = read_fits(&path, &layout_of(&case)).unwrap_or_else(|e| panic!("{name}: {e}"));
        let rows: Vec<&Sample> = expected
            .iter()
            .filter(|(n, _)| *n == name)
            .map(|(_, s)| s)
            .collect();
        assert!(rows.len() >= 40, "{name}: {} rows", rows.len());
        compare(&name, &case, &read.spectrum, &rows);
        assert!(!read.understood.axis.is_empty());
        assert_eq!(
            read.spectrum.per_arcsec2(),
            case["unit"].as_str().unwrap().ends_with("/sr")
        );
    }
}

/// The plan key each file needs, when nothing is said beside it.
#[test]
fn says_which_key_is_missing() {
    for (name, key) in [
        ("legacy_linear", "wavelength_unit"),
        ("vector", "medium"),
        ("telescope", "medium"),
        ("row_of_2d", "row"),
        ("many", "row"),
    ] {
        let path = folder("fits").join(format!("{name}.fits"));
        let text = read_fits(&path, &FitsLayout::default())
            .unwrap_err()
            .to_string();
        assert!(text.contains(key) && text.contains(name), "{name}: {text}");
    }
}

fn reading(name: &str) -> Vec<f64> {
    let mut table = csv::Reader::from_path(folder("real/readings.csv")).unwrap();
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

/// Against count, wavelengths at both ends and the middle, flux and error there, fluxes that are no
/// numbers, median and largest flux. The table has eight digits.
fn compare_real(name: &str, read: &FitsSpectrum, unit: &str, in_air: bool) {
    let (s, row) = (&read.spectrum, reading(name));
    let unit = FluxUnit::parse(unit).unwrap();
    let (w, n) = (s.wavelength_aa(), s.len());
    assert_eq!(n as f64, row[0], "{name}");
    for (i, wanted) in [(0, row[1]), (n - 1, row[2]), (n / 2, row[3])] {
        let found = if in_air {
            air_from_vacuum_aa(w[i])
        } else {
            w[i]
        };
        close(found, wanted, 6e-8, name);
    }
    let of = |column: &[f64], i: usize| unit.from_erg_s_cm2_aa(column[i], w[i]);
    let flux: Vec<f64> = (0..n).map(|i| of(s.flux_erg_s_cm2_aa(), i)).collect();
    close(flux[n / 2], row[4], 1e-6, name);
    let sigma = s.sigma_erg_s_cm2_aa().expect("errors");
    close(of(sigma, n / 2), row[5], 1e-6, name);
    let mut finite: Vec<f64> = flux.iter().copied().filter(|f| f.is_finite()).collect();
    assert_eq!((n - finite.len()) as f64, row[6], "{name}");
    finite.sort_by(f64::total_cmp);
    let m = finite.len();
    close(
        0.5 * (finite[(m - 1) / 2] + finite[m / 2]),
        row[7],
        1e-6,
        name,
    );
    close(finite[m - 1], row[8], 1e-6, name);
}

#[test]
fn survey_table_of_log_wavelength() {
    let path = folder("real/sdss_dr18_0358-51818-0504.fits");
    let read = read_fits(&path, &FitsLayout::default()).unwrap();
    compare_real("sdss", &read, "1e-17 erg/s/cm2/Angstrom", false);
    assert_eq!(read.understood.part, 1);
    assert!(read.understood.flags.as_ref().unwrap().contains("and_mask"));
}

#[test]
fn space_telescope_table() {
    let path = folder("real")
        .join("hlsp_ceers_jwst_nirspec_nirspec10-001027_comb-mgrat_v0.7_x1d-masked.fits.gz");
    let layout = FitsLayout {
        medium: Some(Medium::Vacuum),
        ..FitsLayout::default()
    };
    let read = read_fits(&path, &layout).unwrap();
    compare_real("jwst_x1d", &read, "Jy", false);
    assert!(!read.spectrum.per_arcsec2());
    assert!(read.understood.date.iter().any(|(k, _)| k == "DATE-OBS"));
}

#[test]
fn linear_image_with_unnamed_variance() {
    let path = folder("real/image1d_with_variance.fits");
    let e = read_fits(&path, &FitsLayout::default()).unwrap_err();
    assert!(e.to_string().contains("plan key part"), "{e}");
    let layout = FitsLayout {
        part: Some(Part::Number(0)),
        error: Some(Column::Number(1)),
        error_is: Some(ErrorKind::Variance),
        medium: Some(Medium::Air),
        ..FitsLayout::default()
    };
    let read = read_fits(&path, &layout).unwrap();
    compare_real("image1d", &read, "erg/s/cm2/Angstrom", true);
}

/// Writes changed bytes and reads them; a panic fails the test, and so does an error without words.
fn try_bytes(bytes: &[u8], layout: &FitsLayout) -> Option<String> {
    let file = tempfile::NamedTempFile::new().unwrap();
    std::fs::write(file.path(), bytes).unwrap();
    let e = read_fits(file.path(), layout).err()?;
    assert!(!e.message().is_empty());
    Some(e.to_string())
}

fn with_card(good: &[u8], card: &str, from: usize) -> Vec<u8> {
    let key = &card[..8];
    let at = (from..good.len())
        .step_by(80)
        .find(|i| &good[*i..*i + 8] == key.as_bytes())
        .expect("the card");
    let mut bytes = good.to_vec();
    bytes[at..at + 80].copy_from_slice(format!("{card:80}").as_bytes());
    bytes
}

#[test]
fn damaged_headers_are_refused() {
    let image = std::fs::read(folder("fits/lin_wave.fits")).unwrap();
    let table = std::fs::read(folder("fits/rows.fits")).unwrap();
    let layout = FitsLayout::default();
    let refused = |bytes: &[u8], word: &str| {
        let text = try_bytes(bytes, &layout).expect("refused");
        assert!(text.contains(word), "{text}");
    };
    for (card, word) in [
        ("NAXIS   =           1000000000", "NAXIS"),
        ("NAXIS   =                   -1", "NAXIS"),
        ("NAXIS1  =           1000000000", "8000000000 bytes"),
        ("NAXIS1  =  9223372036854775807", "header"),
        ("NAXIS1  =                    0", "no part"),
        ("BITPIX  =                   17", "header"),
        ("CDELT1  =                  0.0", "step"),
        ("CRVAL1  = 'here    '", "CRVAL1"),
        ("CUNIT1  = 'fathom  '", "wavelength_unit"),
        ("BUNIT   = 'adu     '", "flux_unit"),
        ("CTYPE1  = 'VELO    '", "velocity"),
        ("CTYPE1  = 'ENER    '", "energy"),
        ("CTYPE1  = 'WAVE-F2W'", "F2W"),
        ("CTYPE1  = 'RA---TAN'", "no part"),
    ] {
        refused(&with_card(&image, card, 0), word);
    }
    for (card, word) in [
        ("PCOUNT  =                   -5", "PCOUNT"),
        ("PCOUNT  =        8000000000000", "bytes"),
        ("NAXIS2  =           1000000000", "bytes"),
        ("TFIELDS =                   99", "no part"),
        ("TFIELDS =                   -1", "no part"),
        ("TFORM2  = '999999999E'", "no part"),
        ("TTYPE1  = 'nothing '", "no part"),
    ] {
        refused(&with_card(&table, card, 2880), word);
    }
    refused(&image[..2880 + 100], "the file ends after 100");
    refused(b"SIMPLE  =                    T", "header");
    refused(b"", "not a FITS file");
    refused(b"wavelength,flux\n1,2\n", "not a FITS file");
}

#[test]
fn damaged_gzip_is_refused() {
    let good = std::fs::read(folder("fits/nan_gz.fits.gz")).unwrap();
    let layout = FitsLayout::default();
    let text = try_bytes(&good[..good.len() / 2], &layout).expect("refused");
    assert!(text.contains("inflate"), "{text}");
}

/// Deterministic small damage everywhere: read or refused, never a panic.
#[test]
fn survives_mutations() {
    let mut seed = 12_345_u64;
    let mut next = move |below: usize| {
        seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1);
        (seed >> 33) as usize % below
    };
    let mut refused = 0;
    for (_, case) in cases() {
        let good = std::fs::read(folder("fits").join(case["file"].as_str().unwrap())).unwrap();
        let layout = layout_of(&case);
        for round in 0..60 {
            let mut bytes = good.clone();
            for _ in 0..=next(4) {
                let at = next(bytes.len());
                bytes[at] = match round % 3 {
                    0 => b'0' + next(10) as u8,
                    1 => next(256) as u8,
                    _ => b"-.E'/= 9"[next(8)],
                };
            }
            if round % 5 == 0 {
                bytes.truncate(next(bytes.len()));
            }
            refused += usize::from(try_bytes(&bytes, &layout).is_some());
        }
    }
    assert!(refused > 400, "{refused}");
}
