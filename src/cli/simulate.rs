//! `comagauge simulate`: read, check, make a spectrum, say what it can show.

use super::measure::load_tables;
use super::output;
use crate::figures::Width;
use crate::forward::{SceneSettings, expect};
use crate::ground::{Error, Result};
use crate::plan::{Checked, check, read_plan};
use crate::report;
use crate::spectrum::Layout;
use clap::Args;
use std::path::{Path, PathBuf};

/// Arguments of `simulate`.
#[derive(Args)]
#[command(after_long_help = EXAMPLE)]
pub(super) struct Simulate {
    /// The plan file (TOML) with a [simulate] table.
    plan: PathBuf,
    /// The spectrum to write; the figure goes beside it (default: beside the plan, named after it).
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,
    /// Exposure of the spectrum in s (default: the plan's exposure_s).
    #[arg(long, value_name = "SECONDS")]
    exposure: Option<f64>,
    /// Exposures of the table in s (default: 0.1, 0.3, 1, 3 and 10 times the plan's exposure_s).
    #[arg(long, value_name = "S,S,…", value_delimiter = ',')]
    times: Vec<f64>,
    /// Seed of the noise, instead of the plan's.
    #[arg(long)]
    seed: Option<u64>,
    /// Print the table as CSV.
    #[arg(long)]
    csv: bool,
}

const EXAMPLE: &str = "\
The table in the plan, in the units of the first spectrum:

  [simulate]
  range = [2.4, 5.0]
  samples_per_fwhm = 2.2
  [simulate.production]
  H2O = 2.0e28
  CO2 = 3.4e27
  [simulate.continuum]
  flux_density = 1.0e-13
  at = 3.5
  slope_per_1000_aa = 0.004
  [simulate.noise]
  relative = 0.006
  floor = 4.0e-18
  exposure_s = 3600
";

/// Multiples of the reference exposure in the table.
const DEFAULT_TIMES: [f64; 5] = [0.1, 0.3, 1.0, 3.0, 10.0];

impl Simulate {
    pub(super) fn run(self) -> Result<()> {
        let file = read_plan(&self.plan)?;
        let tables = load_tables(&file)?;
        let mut checked = check(&file, &tables)?;
        let Some(scene) = checked.scene.clone() else {
            return Err(Error::plan("the plan has no [simulate] table")
                .in_file(&self.plan)
                .remedy("`comagauge simulate --help` shows one"));
        };
        let clean = [scene.clean_spectrum(&checked.settings, scene.noise.exposure_s)?];
        checked.settle_light(&clean)?;
        let settings = &checked.settings;
        let times = self.times(&scene)?;
        let exposure_s = self.exposure.unwrap_or(scene.noise.exposure_s);
        positive("exposure", exposure_s)?;
        let seed = self.seed.unwrap_or(settings.draws.seed);
        let csv = spectrum_csv(&scene, &checked, exposure_s, seed)?;
        let expected = expect(&scene, settings, &times)?;
        let target = self.out.clone().unwrap_or_else(|| default_file(&self.plan));
        let figure = report::expected_figure(&expected, settings, Width::Double)?;
        let svg = target.with_extension("svg");
        let mut files = vec![(name_of(&target)?, csv.into_bytes())];
        if let Some(figure) = figure {
            files.push((name_of(&svg)?, figure.into_bytes()));
        }
        let folder = match target.parent() {
            Some(p) if !p.as_os_str().is_empty() => p,
            _ => Path::new("."),
        };
        report::write_all(folder, &files)?;
        output::print(&if self.csv {
            report::expected_csv(&expected)
        } else {
            report::expected_table(&expected, settings)
        })?;
        output::complain(&format!("spectrum in {}", target.display()));
        Ok(())
    }

    fn times(&self, scene: &SceneSettings) -> Result<Vec<f64>> {
        if self.times.is_empty() {
            return Ok(DEFAULT_TIMES.map(|t| t * scene.noise.exposure_s).to_vec());
        }
        let mut times = self.times.clone();
        times.sort_by(f64::total_cmp);
        times.iter().try_for_each(|t| positive("times", *t))?;
        Ok(times)
    }
}

fn positive(name: &str, seconds: f64) -> Result<()> {
    if (1e-6..=1e9).contains(&seconds) {
        return Ok(());
    }
    Err(
        Error::plan(format!("{name} = {seconds} is outside 1e-6 to 1e9 s"))
            .remedy("give exposures in seconds"),
    )
}

/// The spectrum in the units and under the column names that the plan's first spectrum declares, so
/// that the plan reads it.
fn spectrum_csv(
    scene: &SceneSettings,
    checked: &Checked,
    exposure_s: f64,
    seed: u64,
) -> Result<String> {
    let settings = &checked.settings;
    let Layout::Text(layout) = &checked.files[0].1 else {
        return Err(Error::plan("the first spectrum of the plan is a FITS file")
            .remedy("name a text file there; simulated spectra are written as text"));
    };
    let samples = scene.samples(settings, exposure_s, Some(seed))?;
    let area = if layout.flux_unit.per_area() {
        settings.aperture.area_arcsec2()
    } else {
        1.0
    };
    let units = &checked.resolved.spectrum[0];
    let what = format!(
        "Simulated {}, {exposure_s} s, seed {seed}; wavelength in {} ({}), flux density and error in {}",
        settings.label.replace(['\n', '\r'], " "),
        units.wavelength_unit.as_deref().unwrap_or_default(),
        layout.medium,
        units.flux_unit.as_deref().unwrap_or_default()
    );
    report::simulated_csv(&samples, layout, area, &what)
}

fn name_of(path: &Path) -> Result<&str> {
    path.file_name().and_then(|n| n.to_str()).ok_or_else(|| {
        Error::plan(format!("{} is not the name of a file", path.display()))
            .remedy("give --out a file name such as night1.csv")
    })
}

/// The default file: `night1.toml` gives `night1-simulated.csv`.
fn default_file(plan: &Path) -> PathBuf {
    let stem = plan
        .file_stem()
        .map_or_else(|| "plan".into(), |s| s.to_string_lossy().into_owned());
    plan.with_file_name(format!("{stem}-simulated.csv"))
}
