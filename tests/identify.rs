//! Names of lines: on the positions of a published atlas, and through the program as a user runs it.

use comagauge::atomic::{line_atlas, sun};
use comagauge::coma::equilibrium::{Conditions, SolarField};
use comagauge::fit::Resolution;
use comagauge::frame::{Aperture, Frame, Geometry, RestSpectrum, to_rest};
use comagauge::ground::{air_from_vacuum_aa, vacuum_from_air_aa};
use comagauge::identify::{Catalogue, Identification, PeakSettings, find_peaks, identify};
use comagauge::spectrum::{Columns, Spectrum};
use rand::{RngExt, SeedableRng};
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::io::Read;
use std::path::Path;
use std::process::{Command, Output};

const RESOLVING_POWER: f64 = 60_000.0;
const SAMPLES_PER_FWHM: f64 = 3.0;
/// Height of the faintest and of the brightest line over the noise of a sample.
const HEIGHTS: (f64, f64) = (10.0, 300.0);

struct Printed {
    vacuum_aa: f64,
    /// `Unid` where the atlas has no name.
    species: String,
    system: String,
}

/// The atlas as published, without the rows whose two positions disagree.
fn printed() -> Vec<Printed> {
    let path = concat!(
        env!("CARGO_MANIFEST_DIR"),
        "/tests/external/atlas/devico_122P_line_atlas.tab.gz"
    );
    let mut text = String::new();
    flate2::read::GzDecoder::new(std::fs::File::open(path).unwrap())
        .read_to_string(&mut text)
        .unwrap();
    let mut rows: Vec<Printed> = text
        .lines()
        .filter_map(|line| {
            let vacuum_aa = vacuum_from_air_aa(line[..10].trim().parse().unwrap());
            let wavenumber_cm1: f64 = line[10..21].trim().parse().unwrap();
            let sound = (1e8 / wavenumber_cm1 - vacuum_aa).abs() <= 0.03;
            sound.then(|| Printed {
                vacuum_aa,
                species: line[21..28].trim().to_owned(),
                system: line[28..34].trim().to_owned(),
            })
        })
        .collect();
    rows.sort_by(|a, b| a.vacuum_aa.total_cmp(&b.vacuum_aa));
    rows
}

/// The atlas's names as the program writes them.
fn our_name(printed: &str) -> &str {
    match printed {
        "Halph" => "H I",
        "[O I]" => "O I",
        other => other,
    }
}

fn rest(label: &str, columns: Columns) -> RestSpectrum {
    let spectrum = Spectrum::from_columns(label, columns, false).unwrap();
    let geometry = Geometry::new(1.0, 0.0, 1.0, 0.0).unwrap();
    let aperture = Aperture::Circle { radius_arcsec: 1.0 };
    to_rest(&spectrum, Frame::Comet, &geometry, &aperture)
}

/// A flat continuum, noise, and a Gaussian of the instrument's width and a random height at each
/// position.
fn synthetic(lines_aa: &[f64]) -> RestSpectrum {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(122);
    let (first, last) = (lines_aa[0] - 5.0, lines_aa[lines_aa.len() - 1] + 5.0);
    let step = 1.0 / (RESOLVING_POWER * SAMPLES_PER_FWHM);
    let count = ((last / first).ln() / step) as usize;
    let place = |i: usize| first * (i as f64 * step).exp();
    let mut columns = Columns {
        wavelength_aa: (0..count).map(place).collect(),
        flux_erg_s_cm2_aa: vec![0.0; count],
        sigma_erg_s_cm2_aa: Some(vec![1e-17; count]),
        ..Columns::default()
    };
    for flux in &mut columns.flux_erg_s_cm2_aa {
        let noise: f64 = StandardNormal.sample(&mut random);
        *flux = 1e-17 * (20.0 + noise);
    }
    for line in lines_aa {
        let sd = line / RESOLVING_POWER / 2.354_820_045;
        let height = HEIGHTS.0 * (HEIGHTS.1 / HEIGHTS.0).powf(random.random::<f64>());
        let middle = ((line / first).ln() / step) as usize;
        for i in middle.saturating_sub(10)..(middle + 11).min(count) {
            let t = (columns.wavelength_aa[i] - line) / sd;
            columns.flux_erg_s_cm2_aa[i] += 1e-17 * height * (-0.5 * t * t).exp();
        }
    }
    rest("synthetic", columns)
}

/// Whether no line of another species lies within three resolution widths.
fn isolated(rows: &[Printed], i: usize) -> bool {
    let reach = 3.0 * rows[i].vacuum_aa / RESOLVING_POWER;
    let other = |r: &Printed| r.species != rows[i].species;
    let near = |r: &&Printed| (r.vacuum_aa - rows[i].vacuum_aa).abs() <= reach;
    !rows[..i].iter().rev().take_while(near).any(other)
        && !rows[i + 1..].iter().take_while(near).any(other)
}

/// Whether no other line at all lies within two resolution widths, so that a line ten times fainter
/// than its neighbour still makes a peak of its own.
fn resolved(rows: &[Printed], i: usize) -> bool {
    let reach = 2.0 * rows[i].vacuum_aa / RESOLVING_POWER;
    let off = |k: usize| (rows[k].vacuum_aa - rows[i].vacuum_aa).abs();
    (i == 0 || off(i - 1) > reach) && (i + 1 == rows.len() || off(i + 1) > reach)
}

/// The identification of the peak nearest to a line, within so many resolution widths.
fn at(found: &[Identification], vacuum_aa: f64, widths: f64) -> Option<&Identification> {
    let next = found.partition_point(|f| f.peak.wavelength_vacuum_aa < vacuum_aa);
    let off = |f: &Identification| (f.peak.wavelength_vacuum_aa - vacuum_aa).abs();
    found[next.saturating_sub(1)..(next + 1).min(found.len())]
        .iter()
        .filter(|f| off(f) < widths * vacuum_aa / RESOLVING_POWER)
        .min_by(|a, b| off(a).total_cmp(&off(b)))
}

/// Lines of the rows chosen, with a peak, named right.
fn tally<'a>(
    rows: impl Iterator<Item = &'a Printed>,
    found: &[Identification],
    widths: f64,
) -> (usize, usize, usize) {
    let mut counts = (0, 0, 0);
    for row in rows {
        counts.0 += 1;
        if let Some(id) = at(found, row.vacuum_aa, widths) {
            counts.1 += 1;
            let name = id.species().map(|s| s.as_str());
            counts.2 += usize::from(name == Some(our_name(&row.species)));
        }
    }
    counts
}

#[test]
fn isolated_lines_of_the_atlas_are_named_right() {
    let rows = printed();
    let positions: Vec<f64> = rows.iter().map(|r| r.vacuum_aa).collect();
    let spectrum = synthetic(&positions);
    let settings = PeakSettings {
        sigma: 5.0,
        resolution: Some(Resolution::ResolvingPower(RESOLVING_POWER)),
    };
    let peaks = find_peaks(&spectrum, &settings).unwrap();
    let field = SolarField::sun(sun(None).unwrap());
    let unit = Conditions::UNIT;
    let others = Catalogue::joined([
        Catalogue::atoms(None, &field, &unit, 0.01).unwrap(),
        // Every tabulated line, however faint: the comet of the atlas was nearer the Sun.
        Catalogue::cn(None, &field, &unit, 0.0).unwrap(),
    ]);
    let all = Catalogue::joined([Catalogue::atlas(None).unwrap(), others.clone()]);
    let alone: Vec<usize> = (0..rows.len()).filter(|i| isolated(&rows, *i)).collect();
    let with_name: Vec<usize> = alone
        .iter()
        .copied()
        .filter(|i| rows[*i].species != "Unid")
        .collect();
    let named = || with_name.iter().map(|i| &rows[*i]);
    let clear = || {
        let clear = with_name.iter().filter(|i| resolved(&rows, **i));
        clear.map(|i| &rows[*i])
    };
    let violet = || named().filter(|r| r.species == "CN" && r.system == "B-X");
    let with_atlas = identify(&peaks.peaks, &all);

    println!("{} peaks above 5 sigma", peaks.peaks.len());
    let own = tell(
        "isolated, by a peak within 1 width",
        named(),
        &with_atlas,
        1.0,
    );
    let merged = tell(
        "isolated, by the peak within 3 widths",
        named(),
        &with_atlas,
        3.0,
    );
    let apart = tell("isolated and resolved", clear(), &with_atlas, 1.0);
    assert!(own.0 > 2000 && apart.0 > 1000);
    assert!(share(own.2, own.1) >= 98.0, "of those with a peak");
    assert!(share(apart.2, apart.0) >= 98.0, "of all that are resolved");
    assert!(
        share(merged.2, merged.0) >= 98.0,
        "of all, blends by their peak"
    );

    let open = alone.iter().filter(|i| rows[**i].species == "Unid");
    let open = open.filter_map(|i| at(&with_atlas, rows[*i].vacuum_aa, 1.0));
    let open: Vec<&Identification> = open.collect();
    let given = open.iter().filter(|i| i.best().is_some()).count();
    println!(
        "{} isolated lines without a name in the atlas: {given} get one here ({:.1} %)",
        open.len(),
        share(given, open.len())
    );
    let blind: f64 = with_atlas.iter().map(|i| i.chance).sum();
    println!(
        "a blindly chosen place would get a name in {:.1} % of cases",
        100.0 * blind / with_atlas.len() as f64
    );

    // The spectrum was made at the atlas's own positions, so the above tests the search and the
    // matching, not the catalogue. Without the atlas only violet CN and the atoms can be named at all.
    let without = identify(&peaks.peaks, &others);
    tell("without the atlas, isolated", named(), &without, 1.0);
    let cn = tell(
        "without the atlas, isolated CN B-X",
        violet(),
        &without,
        1.0,
    );
    assert!(cn.1 > 20 && share(cn.2, cn.1) >= 90.0);
}

fn share(part: usize, whole: usize) -> f64 {
    100.0 * part as f64 / whole as f64
}

/// Counts and prints.
fn tell<'a>(
    what: &str,
    rows: impl Iterator<Item = &'a Printed>,
    found: &[Identification],
    widths: f64,
) -> (usize, usize, usize) {
    let (lines, seen, right) = tally(rows, found, widths);
    println!(
        "{what}: {lines} lines, {seen} with a peak, {right} named right: {:.2} % of all, {:.2} % of those with a peak",
        share(right, lines),
        share(right, seen)
    );
    (lines, seen, right)
}

#[test]
fn the_bundled_table_is_the_published_one() {
    let sound: Vec<_> = line_atlas(None).unwrap();
    let mut ours: Vec<(f64, String)> = sound
        .iter()
        .filter(|l| !l.doubtful)
        .map(|l| {
            let name = l.species.as_ref().map_or("Unid", |s| s.as_str());
            (l.wavelength_vacuum_aa, name.to_owned())
        })
        .collect();
    ours.sort_by(|a, b| a.0.total_cmp(&b.0));
    let published = printed();
    assert_eq!(ours.len(), published.len());
    for (o, p) in ours.iter().zip(&published) {
        assert!((o.0 - p.vacuum_aa).abs() < 1e-6, "{o:?}");
    }
    let count = |name: &str| ours.iter().filter(|o| o.1 == name).count();
    for name in ["C2", "C3", "CN", "NH2", "H2O+", "Halph", "[O I]", "Unid"] {
        let there = published.iter().filter(|p| p.species == name).count();
        assert_eq!(count(our_name(name)), there, "{name}");
    }
}

#[test]
fn centroids_scatter_as_their_errors_say() {
    let positions: Vec<f64> = (0..400).map(|i| 5000.0 + 1.37 * f64::from(i)).collect();
    let spectrum = synthetic(&positions);
    let settings = PeakSettings {
        sigma: 5.0,
        resolution: None,
    };
    let found = find_peaks(&spectrum, &settings).unwrap();
    let Resolution::ResolvingPower(power) = found.resolution else {
        panic!("a resolving power")
    };
    assert!((power / RESOLVING_POWER - 1.0).abs() < 0.1, "{power}");
    assert_eq!(found.peaks.len(), positions.len());
    let pulls = found.peaks.iter().zip(&positions);
    let squares: f64 = pulls
        .map(|(p, x)| ((p.wavelength_vacuum_aa - x) / p.sigma_aa).powi(2))
        .sum();
    let rms = (squares / positions.len() as f64).sqrt();
    println!("rms pull of 400 centroids {rms:.3}");
    assert!((0.8..1.2).contains(&rms), "{rms}");
}

fn run(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .args(arguments)
        .output()
        .expect("the program starts")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("UTF-8")
}

/// Sodium D and three lines that nobody has a name for, receding at 30 km/s.
fn sodium_csv(path: &Path) {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(3);
    let stretch = 1.0 + 30.0 / 299_792.458;
    let lines = [5889.951, 5895.924, 5860.0, 5871.5, 5907.3].map(vacuum_from_air_aa);
    let mut out = "wavelength,flux,error\n".to_owned();
    for i in 0..3000 {
        let x = vacuum_from_air_aa(5850.0) + 0.025 * f64::from(i);
        let noise: f64 = StandardNormal.sample(&mut random);
        let mut y = 10.0 + noise;
        for line in lines {
            let t = (x - line * stretch) / 0.045;
            y += 40.0 * (-0.5 * t * t).exp();
        }
        out.push_str(&format!("{},{y},1\n", air_from_vacuum_aa(x)));
    }
    std::fs::write(path, out).unwrap();
}

#[test]
fn a_bare_spectrum_is_named_and_drawn() {
    let dir = tempfile::tempdir().unwrap();
    let spectrum = dir.path().join("sodium.csv");
    sodium_csv(&spectrum);
    let out = dir.path().join("lines");
    let mut arguments = vec![
        "identify",
        spectrum.to_str().unwrap(),
        "--wavelength-unit",
        "Angstrom",
        "--medium",
        "air",
        "--flux-unit",
        "1e-17 erg/s/cm2/Angstrom",
        "--out",
        out.to_str().unwrap(),
        "--csv",
    ];
    let named = |arguments: &[&str]| {
        let done = run(arguments);
        assert!(done.status.success(), "{}", text(&done.stderr));
        assert!(text(&done.stderr).contains("1 au from the Sun and 0 km/s"));
        let csv = text(&done.stdout);
        // D1 has a weak C2 line of the atlas beside it: being a candidate is what can be asked.
        csv.lines().filter(|l| l.contains(",Na I,")).count()
    };
    assert_eq!(named(&arguments), 0, "the shift is not known");
    arguments.extend(["--observer-km-s", "30"]);
    assert_eq!(named(&arguments), 2);
    let svg = std::fs::read_to_string(out.join("identify.svg")).unwrap();
    assert!(
        svg.contains("Na I 5890.0") || svg.contains("Na I 5889.9"),
        "labels"
    );
    assert!(out.join("identify.csv").is_file());
    let refused = run(&arguments[..2]);
    assert_eq!(refused.status.code(), Some(2));
    assert!(text(&refused.stderr).contains("--wavelength-unit"));
}

#[test]
fn a_plan_brings_its_own_units_and_velocity() {
    let dir = tempfile::tempdir().unwrap();
    let plan = concat!(env!("CARGO_MANIFEST_DIR"), "/demo-spectra/optical.toml");
    let out = dir.path().join("lines");
    let out = out.to_str().unwrap();
    let done = run(&["identify", plan, "--out", out]);
    assert!(done.status.success(), "{}", text(&done.stderr));
    let notes = text(&done.stderr);
    assert!(notes.contains("-17.9 km/s from the observer"), "{notes}");
    assert!(notes.contains("holds many lines"), "{notes}");
    for wrong in [
        &["--medium", "air"][..],
        &["--sigma", "0"],
        &["--threshold", "2"],
    ] {
        let mut arguments = vec!["identify", plan, "--out", out];
        arguments.extend(wrong);
        assert_eq!(run(&arguments).status.code(), Some(2), "{wrong:?}");
    }
}
