//! `comagauge prepare`: from a spectrum to a starter plan with named blanks.

use super::output;
use super::reading::Reading;
use crate::figures::{Position, QuicklookFigure, Width, quicklook_svg};
use crate::frame::orbit::{Instant, Scale};
use crate::ground::{Error, Result};
use crate::report::write_all;
use crate::spectrum::{Spectrum, Understood};
use crate::tables::{Band, Tables};
use clap::Args;
use std::fmt::Write;
use std::path::{Path, PathBuf};

/// Arguments of `prepare`.
#[derive(Args)]
pub(super) struct Prepare {
    /// The spectra (FITS, or text with the flags below).
    #[arg(required = true)]
    spectra: Vec<PathBuf>,
    /// The plan to write (default: beside the first spectrum, named after it).
    #[arg(long, value_name = "FILE.toml")]
    plan: Option<PathBuf>,
    /// Resolving power λ/FWHM, for the expected widths and the plan.
    #[arg(long, value_name = "R")]
    resolving_power: Option<f64>,
    /// Overwrite files that exist.
    #[arg(long)]
    force: bool,
    #[command(flatten)]
    reading: Reading,
    /// Print the list of bands as CSV.
    #[arg(long)]
    csv: bool,
}

/// One spectrum as read.
struct Read {
    path: PathBuf,
    spectrum: Spectrum,
    understood: Option<Understood>,
}

/// A band inside a spectrum.
struct Found<'a> {
    band: &'a Band,
    spectrum: usize,
    has_g: bool,
    /// Expected width with the instrument's, Å.
    fwhm_aa: f64,
    /// Too near to a band already chosen to be told apart at this resolution.
    hidden_by: Option<&'a str>,
}

impl Prepare {
    pub(super) fn run(self) -> Result<()> {
        if let Some(r) = self.resolving_power
            && !(5.0..=5e6).contains(&r)
        {
            return Err(Error::plan(format!(
                "--resolving-power {r} is outside 5 to 5e6"
            )));
        }
        let plan = self
            .plan
            .clone()
            .unwrap_or_else(|| beside(&self.spectra[0]));
        let folder = plan
            .parent()
            .filter(|p| !p.as_os_str().is_empty())
            .unwrap_or(Path::new("."))
            .to_owned();
        let name = plan
            .file_name()
            .and_then(|n| n.to_str())
            .ok_or_else(|| Error::plan("--plan names no file"))?
            .to_owned();
        for target in [&plan, &folder.join("quicklook.svg")] {
            if target.exists() && !self.force {
                return Err(Error::plan(format!("{} exists", target.display()))
                    .remedy("choose another name with --plan, or overwrite with --force"));
            }
        }
        let read = self
            .spectra
            .iter()
            .map(|path| {
                let (spectrum, understood) = self.reading.read(path)?;
                Ok(Read {
                    path: path.clone(),
                    spectrum,
                    understood,
                })
            })
            .collect::<Result<Vec<_>>>()?;
        let tables = Tables::bundled();
        let found = self.bands(&read, &tables);
        let text = self.plan_text(&read, &found, &tables, &folder);
        let svg = quicklook(&read, &found)?;
        write_all(
            &folder,
            &[
                (name.as_str(), text.into_bytes()),
                ("quicklook.svg", svg.into_bytes()),
            ],
        )?;
        output::print(&if self.csv { csv(&found) } else { table(&found) })?;
        output::complain(&format!(
            "plan in {}, picture in {}; fill in the blanks (\"?\"), then: comagauge measure {}",
            plan.display(),
            folder.join("quicklook.svg").display(),
            plan.display()
        ));
        Ok(())
    }

    fn bands<'a>(&self, read: &[Read], tables: &'a Tables) -> Vec<Found<'a>> {
        let mut found: Vec<Found<'a>> = Vec::new();
        for band in tables.bands() {
            let (low, high) = band.window_aa;
            let inside = |s: &Spectrum| {
                let x = s.wavelength_aa();
                // Shifts by the comet's motion stay below 0.1 %.
                x[0] < band.centre_aa - 0.6 * (band.centre_aa - low)
                    && x[x.len() - 1] > band.centre_aa + 0.6 * (high - band.centre_aa)
            };
            let Some(spectrum) = read.iter().position(|r| inside(&r.spectrum)) else {
                continue;
            };
            let fwhm_aa = band
                .fwhm_aa
                .hypot(self.instrument_aa(&read[spectrum].spectrum, band));
            let has_g = tables.default_efficiency(&band.id).is_some();
            let hidden_by = found
                .iter()
                .filter(|f| f.has_g && f.hidden_by.is_none() && has_g)
                .find(|f| (f.band.centre_aa - band.centre_aa).abs() < 0.6 * fwhm_aa.max(f.fwhm_aa))
                .map(|f| f.band.id.as_str());
            found.push(Found {
                band,
                spectrum,
                has_g,
                fwhm_aa,
                hidden_by,
            });
        }
        found
    }

    /// The instrument's width at a band: as given, else 2.2 samples (common practice).
    fn instrument_aa(&self, spectrum: &Spectrum, band: &Band) -> f64 {
        if let Some(r) = self.resolving_power {
            return band.centre_aa / r;
        }
        let x = spectrum.wavelength_aa();
        let i = x
            .partition_point(|w| *w < band.centre_aa)
            .clamp(1, x.len() - 1);
        2.2 * (x[i] - x[i - 1])
    }

    fn plan_text(
        &self,
        read: &[Read],
        found: &[Found<'_>],
        tables: &Tables,
        folder: &Path,
    ) -> String {
        let mut out = String::from(
            "# Starter plan. Values \"?\" are blanks that only the observer can fill in.\n\n[comet]\n",
        );
        let object = read
            .iter()
            .find_map(|r| r.understood.as_ref()?.object.clone());
        let label = object.filter(|o| !o.trim().is_empty());
        push(
            &mut out,
            &format!(
                "label = {}",
                label.map_or_else(|| "\"?\"".to_owned(), |l| quoted(&l))
            ),
            "name for tables and figures",
        );
        match read
            .iter()
            .find_map(|r| mid_exposure(r.understood.as_ref()?))
        {
            Some(date) => push(
                &mut out,
                &format!("date = \"{date}\""),
                "UTC, middle of the exposure, from the header",
            ),
            None => push(
                &mut out,
                "# date = \"2031-04-17T05:12\"",
                "UTC, middle of the exposure",
            ),
        }
        out.push_str(GEOMETRY);
        out.push_str("\n[aperture]\nradius_arcsec = \"?\"  # or diameter_arcsec, or width_arcsec and length_arcsec of a slit\n");
        for r in read {
            self.spectrum_text(r, folder, &mut out);
        }
        let chosen: Vec<&Found<'_>> = found
            .iter()
            .filter(|f| f.has_g && f.hidden_by.is_none())
            .collect();
        if chosen.is_empty() {
            out.push_str(&own_band(&read[0].spectrum));
            return out;
        }
        out.push_str("\n[measure]\nbands = [\n");
        for f in found {
            let note = match (f.has_g, f.hidden_by) {
                (false, _) => format!("{}; no g known", f.band.transition),
                (true, Some(other)) => {
                    format!("{}; not to be told from {other}", f.band.transition)
                }
                (true, None) => f.band.transition.clone(),
            };
            let mark = if f.has_g && f.hidden_by.is_none() {
                "  "
            } else {
                "  # "
            };
            writeln!(out, "{mark}{},  # {note}", quoted(&f.band.id)).expect("invariant: memory");
        }
        out.push_str("]\nratios = [");
        let ratios: Vec<String> = ratios(&chosen, tables).iter().map(|r| quoted(r)).collect();
        out.push_str(&ratios.join(", "));
        out.push_str("]\n");
        out
    }

    fn spectrum_text(&self, r: &Read, folder: &Path, out: &mut String) {
        let flags = &self.reading;
        out.push_str("\n[[spectrum]]\n");
        push(
            out,
            &format!("file = {}", quoted(&from_folder(&r.path, folder))),
            "",
        );
        if let Some(part) = &flags.part {
            let word = if part.parse::<usize>().is_ok() {
                part.clone()
            } else {
                quoted(part)
            };
            push(out, &format!("part = {word}"), "");
        }
        if let Some(row) = flags.row {
            push(out, &format!("row = {row}"), "");
        }
        let said = r.understood.as_ref();
        let unit = said.map(|u| format!("the file says {}", u.wavelength_unit));
        keyed(
            out,
            "wavelength_unit",
            flags.wavelength_unit.as_deref(),
            unit,
        );
        let medium = said
            .and_then(|u| u.medium.as_ref())
            .map(|(m, why)| format!("{m}: {why}"));
        if said.is_some_and(Understood::medium_is_open) && flags.medium.is_none() {
            push(
                out,
                "medium = \"?\"",
                "the file does not say: vacuum or air",
            );
        } else {
            keyed(out, "medium", flags.medium.as_deref(), medium);
        }
        let flux = said.map(|u| format!("the file says {}", u.flux_unit));
        keyed(out, "flux_unit", flags.flux_unit.as_deref(), flux);
        if let Some(kind) = flags.error_is {
            push(out, &format!("error_is = \"{}\"", kind.in_plan()), "");
        }
        let columns: Vec<String> = [
            ("wavelength", &flags.wavelength_column),
            ("flux", &flags.flux_column),
            ("error", &flags.error_column),
            ("mask", &flags.mask_column),
        ]
        .into_iter()
        .filter_map(|(key, value)| {
            let v = value.as_ref()?;
            let word = if v.parse::<usize>().is_ok() {
                v.clone()
            } else {
                quoted(v)
            };
            Some(format!("{key} = {word}"))
        })
        .collect();
        if !columns.is_empty() {
            push(out, &format!("columns = {{ {} }}", columns.join(", ")), "");
        }
        let power = self
            .resolving_power
            .map_or_else(|| "\"?\"".to_owned(), |r| r.to_string());
        push(
            out,
            &format!("resolving_power = {power}"),
            "λ/FWHM of the instrument",
        );
        if let Some((key, value)) = said.and_then(|u| u.frame.first()) {
            push(
                out,
                "# frame = \"observer\"",
                &format!("the file says {key} = {value}"),
            );
        }
        push(
            out,
            "# calibration_sigma = 0.05",
            "relative error of the flux calibration",
        );
    }
}

const GEOMETRY: &str = "\
heliocentric_au = \"?\"    # r_h, au
heliocentric_km_s = \"?\"  # its rate, km/s, positive when receding
observer_au = \"?\"        # Δ, au
observer_km_s = \"?\"      # its rate, km/s, positive when receding
# Instead of these four, with a date, orbital elements (ecliptic J2000):
# [comet.orbit]
# perihelion_au = 0.98
# eccentricity = 1.0
# inclination_deg = 62.0
# node_deg = 203.0
# argument_deg = 118.0
# perihelion_time = \"2031-07-02.4\"
# epoch = \"2031-06-01\"
";

/// A band of the user's own over the whole range, where the line lists have none to offer.
fn own_band(spectrum: &Spectrum) -> String {
    let x = spectrum.wavelength_aa();
    let (low, high) = (x[0], x[x.len() - 1]);
    format!(
        "\n[measure]\nbands = [\"my-line\"]\nratios = []\n\n# No band of the line lists with a known g lies inside: a line of your own.\n[[band]]\nid = \"my-line\"\nunit = \"Angstrom\"\nmedium = \"vacuum\"\ncentre = {:.3}  # replace by the line's rest wavelength\nfwhm = 0.0\nwindow = [{low:.3}, {high:.3}]\n# species = \"…\", g_photons_s = … for molecules and ratios\n",
        0.5 * (low + high)
    )
}

fn push(out: &mut String, text: &str, comment: &str) {
    out.push_str(text);
    if !comment.is_empty() {
        out.push_str("  # ");
        out.push_str(&comment.replace(['\n', '\r'], " "));
    }
    out.push('\n');
}

/// A key as given by a flag; else a comment with what the file says.
fn keyed(out: &mut String, key: &str, flag: Option<&str>, said: Option<String>) {
    match (flag, said) {
        (Some(value), _) => push(out, &format!("{key} = {}", quoted(value)), ""),
        (None, Some(said)) => push(
            out,
            &format!("# {key}: {}", said.replace(['\n', '\r'], " ")),
            "",
        ),
        (None, None) => {}
    }
}

fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}

fn beside(spectrum: &Path) -> PathBuf {
    let stem = spectrum
        .file_stem()
        .map_or_else(|| "plan".into(), |s| s.to_string_lossy().into_owned());
    let stem = stem.strip_suffix(".fits").unwrap_or(&stem).to_owned();
    spectrum.with_file_name(format!("{stem}.toml"))
}

/// A path that the plan's folder can follow.
fn from_folder(path: &Path, folder: &Path) -> String {
    let absolute = |p: &Path| std::path::absolute(p).unwrap_or_else(|_| p.to_owned());
    let (path, folder) = (absolute(path), absolute(folder));
    path.strip_prefix(&folder)
        .unwrap_or(&path)
        .to_string_lossy()
        .into_owned()
}

/// Middle of the exposure from the header, when date and exposure can be read.
fn mid_exposure(u: &Understood) -> Option<String> {
    let word = |list: &[(String, String)], key: &str| {
        list.iter()
            .find(|(k, _)| k == key)
            .map(|(_, v)| v.trim().trim_matches('\'').trim().to_owned())
    };
    let middle = word(&u.date, "DATE-AVG").and_then(|d| Instant::parse(&d, Scale::Utc).ok());
    if let Some(middle) = middle {
        return Some(middle.utc_text());
    }
    let start = word(&u.date, "DATE-OBS")
        .or_else(|| word(&u.date, "DATE-BEG"))
        .and_then(|d| Instant::parse(&d, Scale::Utc).ok())
        .or_else(|| {
            let mjd = word(&u.date, "MJD-OBS")?;
            Instant::parse(&format!("MJD {mjd}"), Scale::Utc).ok()
        })?;
    let exposure = u
        .exposure
        .iter()
        .find_map(|(_, v)| v.trim().parse::<f64>().ok());
    match exposure {
        Some(seconds) => start.mid_exposure(seconds).ok().map(|m| m.utc_text()),
        None => Some(start.utc_text()),
    }
}

/// Ratios to water, else OH, else CN, of the species whose production rate can be formed.
fn ratios(chosen: &[&Found<'_>], tables: &Tables) -> Vec<String> {
    let mut species: Vec<&crate::ground::Species> = Vec::new();
    for f in chosen {
        let s = &f.band.species;
        let known =
            tables.scale_lengths("ahearn1995", s).is_some() || tables.photo_rate(s).is_some();
        if known && !species.contains(&s) {
            species.push(s);
        }
    }
    let reference = ["H2O", "OH", "CN"]
        .iter()
        .find_map(|r| species.iter().find(|s| s.as_str() == *r).copied());
    let Some(reference) = reference else {
        return Vec::new();
    };
    species
        .iter()
        .filter(|s| **s != reference)
        .map(|s| format!("{s}/{reference}"))
        .collect()
}

fn quicklook(read: &[Read], found: &[Found<'_>]) -> Result<String> {
    let first = &read[0];
    let x = first.spectrum.wavelength_aa();
    let micron = x[0] > 9000.0;
    let (unit, aa) = if micron { ("µm", 1e4) } else { ("Å", 1.0) };
    let (places, values) = thinned(&first.spectrum, aa);
    let figure = QuicklookFigure {
        title: first.spectrum.label().to_owned(),
        x_label: format!("Wavelength in vacuum ({unit})"),
        y_quantity: "Flux density".to_owned(),
        y_unit: if first.spectrum.per_arcsec2() {
            "erg s⁻¹ cm⁻² Å⁻¹ arcsec⁻²".to_owned()
        } else {
            "erg s⁻¹ cm⁻² Å⁻¹".to_owned()
        },
        x: places,
        y: values,
        positions: found
            .iter()
            .filter(|f| f.spectrum == 0)
            .map(|f| Position {
                x: f.band.centre_aa / aa,
                label: f.band.species.pretty(),
            })
            .collect(),
    };
    quicklook_svg(&figure, Width::Double)
}

/// Samples for the picture: all of a short spectrum, the extremes of equal stretches of a long one.
fn thinned(spectrum: &Spectrum, aa: f64) -> (Vec<f64>, Vec<f64>) {
    const STRETCHES: usize = 8000;
    let (x, flux, good) = (
        spectrum.wavelength_aa(),
        spectrum.flux_erg_s_cm2_aa(),
        spectrum.good(),
    );
    let value = |i: usize| if good[i] { flux[i] } else { f64::NAN };
    let kept: Vec<usize> = if x.len() <= 2 * STRETCHES {
        (0..x.len()).collect()
    } else {
        let long = x.len().div_ceil(STRETCHES);
        (0..x.len())
            .step_by(long)
            .flat_map(|start| {
                let stretch = || (start..(start + long).min(x.len())).filter(|i| good[*i]);
                let least = stretch().min_by(|a, b| flux[*a].total_cmp(&flux[*b]));
                let most = stretch().max_by(|a, b| flux[*a].total_cmp(&flux[*b]));
                let mut both: Vec<usize> = least.into_iter().chain(most).collect();
                both.sort_unstable();
                both.dedup();
                both
            })
            .collect()
    };
    kept.into_iter().map(|i| (x[i] / aa, value(i))).unzip()
}

fn table(found: &[Found<'_>]) -> String {
    if found.is_empty() {
        return "no band of the line lists lies inside\n".to_owned();
    }
    let mut out = format!(
        "{:14} {:8} {:>12} {:>11}  {}\n",
        "band", "species", "vacuum Å", "width Å", "remark"
    );
    for f in found {
        let remark = match (f.has_g, f.hidden_by) {
            (false, _) => "no g known".to_owned(),
            (true, Some(other)) => format!("not to be told from {other} at this resolution"),
            (true, None) => String::new(),
        };
        let line = format!(
            "{:14} {:8} {:12.2} {:11.2}  {remark}",
            f.band.id,
            f.band.species.as_str(),
            f.band.centre_aa,
            f.fwhm_aa
        );
        out.push_str(line.trim_end());
        out.push('\n');
    }
    out
}

fn csv(found: &[Found<'_>]) -> String {
    let mut out = String::from("band,species,centre_vacuum_aa,expected_fwhm_aa,spectrum,has_g\n");
    for f in found {
        writeln!(
            out,
            "{},{},{},{},{},{}",
            f.band.id,
            f.band.species,
            f.band.centre_aa,
            f.fwhm_aa,
            f.spectrum + 1,
            f.has_g
        )
        .expect("invariant: writing to memory");
    }
    out
}
