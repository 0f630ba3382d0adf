use super::*;

fn layout() -> TextLayout {
    TextLayout::new(
        WavelengthUnit::parse("Angstrom").unwrap(),
        Medium::Vacuum,
        FluxUnit::parse("erg/s/cm2/Angstrom").unwrap(),
    )
}

fn ok(text: &str) -> Spectrum {
    parse_text("t.txt", text.as_bytes(), &layout()).unwrap_or_else(|e| panic!("{text:?}: {e}"))
}

fn refused(text: &[u8], words: &[&str]) {
    let e = parse_text("t.txt", text, &layout()).expect_err("must be refused");
    let shown = e.to_string();
    for w in words {
        assert!(shown.contains(w), "{w:?} not in {shown}");
    }
    assert!(shown.contains("t.txt"), "{shown}");
}

#[test]
fn every_delimiter_gives_the_same() {
    for d in [",", ";", "\t", " ", "   ", ", ", " \t "] {
        for end in ["\n", "\r\n", "  \n"] {
            let rows = [["5000", "1.5D-16", "2e-17"], ["5001", "nan", "--"]];
            let text: String = rows.iter().map(|r| r.join(d) + end).collect();
            let s = ok(&format!("\u{feff}# a comment\n{text}"));
            assert_eq!(s.wavelength_aa(), [5000.0, 5001.0], "{d:?} {end:?}");
            assert_eq!(s.flux_erg_s_cm2_aa()[0], 1.5e-16);
            assert_eq!(s.sigma_erg_s_cm2_aa().unwrap()[0], 2e-17);
            assert_eq!(s.good(), [true, false]);
            assert_eq!(s.left_out(), (1, 0));
        }
    }
}

#[test]
fn empty_cells_are_missing_values() {
    let s = ok("wave,flux,err\n1,,3\n2,4,\n3,5,6");
    assert_eq!(s.good(), [false, false, true]);
}

#[test]
fn header_names_pick_columns_in_any_order() {
    for header in [
        "err_flux,flux,pixel_mask,Wavelength",
        "# prose, not names\n# sigma,Flux Density,quality,wave\n#",
        "\"error\",\"flux\",\"mask\",\"lambda\"",
        "err [cgs],flux [cgs],flag,wl [A]\ncgs,cgs,,Angstrom",
    ] {
        let s = ok(&format!(
            "{header}\n0.1,7,0,500\n0,8,4,501\n0.3,9,0.0,502\n"
        ));
        assert_eq!(s.wavelength_aa(), [500.0, 501.0, 502.0], "{header}");
        assert_eq!(s.flux_erg_s_cm2_aa(), [7.0, 8.0, 9.0]);
        assert_eq!(s.good(), [true, false, true]);
        assert_eq!(s.left_out(), (0, 1));
    }
}

#[test]
fn comment_header_with_units_in_brackets() {
    let s = ok("# wave [vac. A]  continuum (any) flux [erg / s cm2 A]\n500 9 1\n501 9 2\n");
    assert_eq!(s.flux_erg_s_cm2_aa(), [1.0, 2.0]);
    assert!(s.sigma_erg_s_cm2_aa().is_none());
}

#[test]
fn trailing_delimiter_quotes_inline_comment_latin1() {
    let s = ok("wave,flux\n500,1,\n\"501\",\"2\",\n");
    assert_eq!(s.flux_erg_s_cm2_aa(), [1.0, 2.0]);
    let s = ok("500,1,\n501,2,\n");
    assert!(s.sigma_erg_s_cm2_aa().is_none());
    let s = ok("500 1 # cosmic ray\n// note\n% note\n! note\n501 2\n");
    assert_eq!(s.len(), 2);
    let s = parse_text("t", b"# \xc5ngstr\xf6m\n500 1\n501 2\n", &layout()).unwrap();
    assert_eq!(s.len(), 2);
}

#[test]
fn units_and_medium_are_applied_once() {
    let mut l = layout();
    l.wavelength_unit = WavelengthUnit::parse("cm-1").unwrap();
    l.flux_unit = FluxUnit::parse("W/m2/um").unwrap();
    let s = parse_text("t", b"1000 1 1\n20000 2 1\n", &l).unwrap();
    assert_eq!(s.wavelength_aa(), [5000.0, 100_000.0]);
    assert!((s.flux_erg_s_cm2_aa()[0] - 0.2).abs() < 1e-12);
    let mut l = layout();
    l.medium = Medium::Air;
    let s = parse_text("t", b"5000 1\n", &l).unwrap();
    assert!(s.wavelength_aa()[0] > 5001.3 && s.wavelength_aa()[0] < 5001.5);
}

#[test]
fn chosen_columns_and_their_refusals() {
    let text = b"# w f e\n500 1 0\n501 2 9\n";
    let mut l = layout();
    l.wavelength = Some(Column::Name("w".into()));
    l.flux = Some(Column::Number(2));
    let s = parse_text("t", text, &l).unwrap();
    assert!(s.sigma_erg_s_cm2_aa().is_none());
    l.error = Some(Column::Number(4));
    let e = parse_text("t", text, &l).unwrap_err().to_string();
    assert!(e.contains("error column 4") && e.contains("w, f, e"), "{e}");
    l.error = Some(Column::Name("flx".into()));
    let e = parse_text("t", b"wav,flux,x\n1,2,3\n", &l)
        .unwrap_err()
        .to_string();
    assert!(e.contains("\"w\" is not there"), "{e}");
    l.wavelength = Some(Column::Name("WAV".into()));
    let e = parse_text("t", b"wav,flux,x\n1,2,3\n", &l)
        .unwrap_err()
        .to_string();
    assert!(
        e.contains("did you mean \"flux\"?") && e.contains("wav, flux, x"),
        "{e}"
    );
    let e = parse_text("t", b"1,2,3\n", &l).unwrap_err().to_string();
    assert!(e.contains("no header names"), "{e}");
}

#[test]
fn mask_words() {
    let text = b"wave flux mask\n500 1 good\n501 2 bad\n";
    let mut l = layout();
    let e = parse_text("t", text, &l).unwrap_err();
    assert_eq!(e.line(), Some(2));
    l.mask_good = vec!["good".into()];
    assert_eq!(parse_text("t", text, &l).unwrap().good(), [true, false]);
}

#[test]
fn refusals_name_line_cell_and_remedy() {
    refused(b"", &["empty"]);
    refused(b"# only\n\n", &["only comments"]);
    refused(b"wave flux\n", &["header but no numbers"]);
    refused(b"500 1\n501 x2\n", &["\"x2\"", "t.txt:2", "^^", "nan"]);
    refused(b"500 1\n501\n", &["1 cells", "t.txt:2"]);
    refused(b"500 1\n-- 3\n", &["wavelength", "missing", "t.txt:2"]);
    refused(b"500 1\n-5 3\n", &["positive", "t.txt:2"]);
    refused(b"500 1\n502 3\n\n501 3\n503 1\n", &["order", "t.txt:4"]);
    refused(b"500 1\n500 3\n", &["twice", "t.txt:2"]);
    refused(b"500 1 1\n501 1 0\n", &["error 0", "t.txt:2"]);
    refused(b"500 nan\n501 nan\n", &["none of the 2"]);
    refused(b"3883,5 1,2e-16\n", &["decimal comma", "t.txt:1", "point"]);
    refused(b"3883;5\n3884,5;6\n", &["decimal comma", "t.txt:2"]);
    refused(b"wave,flux\n3883,5,1,2\n", &["2 names", "4 cells", "comma"]);
    refused(b"a,b\n1,2\n", &["plainly the wavelength", "a, b"]);
    refused(b"500\n501\n", &["no flux"]);
    refused(b"once upon\na time\nthere was\n", &["t.txt:3", "there was"]);
    refused(
        b"wave,flux\nnm,erg/s/cm2/Angstrom\n1,2\n",
        &["\"nm\"", "t.txt:2"],
    );
    refused(b"SIMPLE  =   T", &["FITS"]);
    refused(b"\x1f\x8b\x08", &["gzip"]);
    refused(b"\xff\xfe1\0", &["UTF-16"]);
    refused(b"\x7fELF\x01\x00\x02", &["not a text file"]);
    refused(b"500 1\r501 2\r", &["carriage returns"]);
    refused(&[b'1'; 70_000], &["longer than"]);
}

#[test]
fn files_that_are_none() {
    let folder = tempfile::tempdir().unwrap();
    let e = read_text(folder.path(), &layout()).unwrap_err().to_string();
    assert!(e.contains("folder"), "{e}");
    let e = read_text(&folder.path().join("no.txt"), &layout()).unwrap_err();
    assert!(e.to_string().contains("cannot read"), "{e}");
    let path = folder.path().join("yes.txt");
    std::fs::write(&path, "500 1\n501 2\n").unwrap();
    assert_eq!(read_text(&path, &layout()).unwrap().label(), "yes.txt");
}
