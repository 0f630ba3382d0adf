use super::*;

#[test]
fn spectral_units() {
    for (text, value, aa) in [
        ("Å", 5000.0, 5000.0),
        ("nm", 500.0, 5000.0),
        ("µm", 0.5, 5000.0),
        ("microns", 0.5, 5000.0),
        ("10**-10 m", 5000.0, 5000.0),
        ("cm-1", 20_000.0, 5000.0),
        ("1/cm", 20_000.0, 5000.0),
        ("m-1", 2.0e6, 5000.0),
        ("THz", 599.584_916, 5000.0),
    ] {
        let unit = WavelengthUnit::parse(text).unwrap();
        let found = unit.vacuum_aa(value, Medium::Vacuum);
        assert!((found / aa - 1.0).abs() < 1e-12, "{text}: {found}");
        let back = unit.from_vacuum_aa(found, Medium::Vacuum);
        assert!((back / value - 1.0).abs() < 1e-12, "{text}: {back}");
        let again = WavelengthUnit::parse(&unit.to_string()).unwrap();
        assert!(again.agrees_with(&unit), "{text} {unit}");
    }
    assert_eq!(
        WavelengthUnit::parse("um").unwrap(),
        WavelengthUnit::Length { aa: 1.0e4 }
    );
    let nm = WavelengthUnit::parse("nm").unwrap();
    let air = nm.from_vacuum_aa(nm.vacuum_aa(500.0, Medium::Air), Medium::Air);
    assert!((air - 500.0).abs() < 1e-9);
}

#[test]
fn spectral_refusals() {
    for (text, word) in [
        ("km/s", "velocity"),
        ("Jy", "not a unit of a spectral axis"),
        ("furlong", "known"),
        ("pixel", "spectral axis"),
        ("", "missing"),
    ] {
        let e = WavelengthUnit::parse(text).unwrap_err();
        assert!(e.to_string().contains(word), "{e}");
        assert!(e.to_string().contains("Angstrom"), "{e}");
        assert_eq!(e.exit_code(), 2);
    }
}

#[test]
fn decimal_factors_are_exact() {
    for (text, factor) in [
        ("erg/s/cm2/Angstrom", 1.0),
        ("1E-17 erg/s/cm^2/Ang", 1.0e-17),
        ("10**-16 erg/s/cm2/Angstrom", 1.0e-16),
        ("W m-2 um-1", 0.1),
        ("W/m2/nm", 100.0),
        ("mJy", 1.0e-26),
        ("Jy/arcsec**2", 1.0e-23),
        ("erg/s/cm3", 1.0e-8),
    ] {
        let unit = FluxUnit::parse(text).unwrap();
        assert_eq!(unit.factor, factor, "{text}");
        let again = FluxUnit::parse(&unit.to_string()).unwrap();
        assert!(again.agrees_with(&unit), "{text} {unit}");
    }
    assert_eq!(
        FluxUnit::parse("MJy/sr")
            .unwrap()
            .to_string()
            .split(' ')
            .next_back(),
        Some("Jy/arcsec2")
    );
    assert_eq!(
        FluxUnit::parse("W/m2/um").unwrap().to_string(),
        "1e-1 erg/s/cm2/Angstrom"
    );
}

#[test]
fn per_wavenumber() {
    let unit = FluxUnit::parse("erg/s/cm2/cm-1").unwrap();
    // One unit over 1 cm⁻¹ at 5000 Å spreads over λ² · 1 cm⁻¹ = 0.25 Å.
    assert!((unit.to_erg_s_cm2_aa(1.0, 5000.0) - 4.0).abs() < 1e-12);
    assert_eq!(unit.to_string(), "erg/s/cm2/cm-1");
}

#[test]
fn flux_refusals() {
    for (text, word) in [
        ("erg/s/cm2", "line flux"),
        ("W m-2", "line flux"),
        ("photon/s/cm2", "line flux"),
        ("counts/s", "not flux calibrated"),
        ("DN", "not flux calibrated"),
        ("mag", "logarithmic"),
        ("Jy/beam", "beam"),
        ("1E-17 erg/s/cm^2/Ang/spaxel", "spaxel"),
        ("erg/s cm2 A", "\"erg/(s cm2 A)\""),
        ("erg/s", "not a flux density"),
        ("Jy/arcsec", "not a flux density"),
        ("Angstrom", "not a flux density"),
    ] {
        let e = FluxUnit::parse(text).unwrap_err();
        assert!(e.to_string().contains(word), "{text}: {e}");
        assert_eq!(e.exit_code(), 2);
    }
}
