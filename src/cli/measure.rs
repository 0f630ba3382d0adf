//! `comagauge measure`: read, override, check, run, write.

use super::{alternatives, output};
use crate::analysis::{Analysis, Settings, analyse};
use crate::figures::Width;
use crate::ground::{Error, Result};
use crate::plan::{Plan, PlanFile, check, read_plan, to_toml};
use crate::report::{self, Input};
use crate::spectrum::{Layout, Spectrum, Understood, read_spectrum};
use crate::tables::Tables;
use clap::Args;
use sha2::{Digest, Sha256};
use std::io::{BufRead, BufReader};
use std::path::{Path, PathBuf};

/// Arguments of `measure`.
#[derive(Args)]
#[command(after_long_help = EXAMPLE)]
pub(super) struct Measure {
    /// The plan file (TOML).
    plan: PathBuf,
    /// Folder for the results (default: beside the plan, named after it).
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Seed of the random draws, instead of the plan's.
    #[arg(long)]
    seed: Option<u64>,
    /// Number of random draws, instead of the plan's.
    #[arg(long, value_name = "N")]
    draws: Option<usize>,
    /// Folder of line lists to use instead of the built-in ones.
    #[arg(long, value_name = "DIR")]
    line_lists: Option<PathBuf>,
    /// Folder of the comparison set to use instead of the built-in one.
    #[arg(long, value_name = "DIR")]
    comparison: Option<PathBuf>,
    /// Stop after checking the plan and the spectra; write nothing.
    #[arg(long)]
    check: bool,
    /// Print the summary as CSV.
    #[arg(long)]
    csv: bool,
    /// Repeat the analysis with other continuum orders, windows, shapes and bands, and say how far
    /// each ratio moves; writes alternatives.csv, .json and .svg beside the results.
    #[arg(long)]
    alternatives: bool,
}

const EXAMPLE: &str = "\
A small plan:

  [comet]
  label = \"C/2031 A1\"
  heliocentric_au = 1.42
  heliocentric_km_s = -11.3
  observer_au = 0.87
  observer_km_s = -24.9

  [aperture]
  radius_arcsec = 2.0

  [[spectrum]]
  file = \"spectrum.csv\"
  wavelength_unit = \"um\"
  medium = \"vacuum\"
  flux_unit = \"W/m2/um\"
  resolving_power = 150

  [measure]
  bands = [\"H2O-2.7um\", \"CO2-4.26um\", \"CO-4.67um\"]
  ratios = [\"CO2/H2O\", \"CO/H2O\"]
";

impl Measure {
    pub(super) fn run(self) -> Result<()> {
        let mut file = read_plan(&self.plan)?;
        self.override_plan(&mut file.plan);
        let tables = load_tables(&file)?;
        let mut checked = check(&file, &tables)?;
        let (mut spectra, understood) = read_spectra(&checked.files)?;
        checked.settle(&file, &understood, &mut spectra)?;
        if self.check {
            let bands = checked.settings.bands.len();
            output::complain(&format!(
                "the plan is sound: {} spectra, {bands} bands, {} ratios",
                spectra.len(),
                checked.settings.ratios.len()
            ));
            return Ok(());
        }
        let inputs = checked
            .files
            .iter()
            .map(|(path, _)| path)
            .chain(&checked.curves)
            .map(|path| hash(path))
            .collect::<Result<Vec<_>>>()?;
        let analysis = analyse(&spectra, &checked.settings)?;
        let folder = self
            .out
            .clone()
            .unwrap_or_else(|| default_folder(&self.plan));
        write(
            &folder,
            &analysis,
            &checked.settings,
            &inputs,
            &checked.resolved,
        )?;
        output::print(&if self.csv {
            report::summary_csv(&analysis)
        } else {
            report::summary_table(&analysis, &checked.settings)
        })?;
        if self.alternatives {
            let extra = alternatives::listed_in_windows(&mut file, &tables, &analysis);
            let settings = &checked.settings;
            let table = alternatives::run(&folder, &spectra, settings, &analysis, &extra)?;
            if !self.csv {
                output::print(&format!("\n{table}"))?;
            }
        }
        output::complain(&format!("results in {}", folder.display()));
        Ok(())
    }

    fn override_plan(&self, plan: &mut Plan) {
        let here = |p: &Path| {
            std::path::absolute(p)
                .unwrap_or_else(|_| p.to_owned())
                .to_string_lossy()
                .into_owned()
        };
        if let Some(seed) = self.seed {
            plan.draws.seed = Some(seed);
        }
        if let Some(count) = self.draws {
            plan.draws.count = Some(count);
        }
        if let Some(dir) = &self.line_lists {
            plan.tables.line_lists = Some(here(dir));
        }
        if let Some(dir) = &self.comparison {
            plan.tables.comparison = Some(here(dir));
        }
    }
}

pub(super) fn load_tables(file: &PlanFile) -> Result<Tables> {
    let place = |name: &Option<String>| name.as_ref().map(|n| file.folder().join(n));
    let (lists, comparison) = (
        place(&file.plan.tables.line_lists),
        place(&file.plan.tables.comparison),
    );
    Tables::load(lists.as_deref(), comparison.as_deref())
}

pub(super) fn read_spectra(
    files: &[(PathBuf, Layout)],
) -> Result<(Vec<Spectrum>, Vec<Option<Understood>>)> {
    let read = files
        .iter()
        .map(|(path, layout)| read_spectrum(path, layout))
        .collect::<Result<Vec<_>>>()?;
    Ok(read.into_iter().unzip())
}

/// The default folder: `night1.toml` gives `night1-results`.
fn default_folder(plan: &Path) -> PathBuf {
    let stem = plan
        .file_stem()
        .map_or_else(|| "plan".into(), |s| s.to_string_lossy().into_owned());
    plan.with_file_name(format!("{stem}-results"))
}

pub(super) fn hash(path: &Path) -> Result<Input> {
    let fail = |e| Error::io("cannot read", path, &e);
    let mut file = BufReader::with_capacity(1 << 16, std::fs::File::open(path).map_err(fail)?);
    let mut hasher = Sha256::new();
    loop {
        let block = file.fill_buf().map_err(fail)?;
        if block.is_empty() {
            break;
        }
        hasher.update(block);
        let read = block.len();
        file.consume(read);
    }
    let sha256 = hasher
        .finalize()
        .iter()
        .map(|b| format!("{b:02x}"))
        .collect();
    Ok(Input {
        path: path.to_string_lossy().into_owned(),
        sha256,
    })
}

fn write(
    folder: &Path,
    analysis: &Analysis,
    settings: &Settings,
    inputs: &[Input],
    resolved: &Plan,
) -> Result<()> {
    let mut files = vec![
        (
            "result.json",
            report::result_json(analysis, settings, inputs).into_bytes(),
        ),
        ("bands.csv", report::bands_csv(analysis).into_bytes()),
        ("species.csv", report::species_csv(analysis).into_bytes()),
        ("ratios.csv", report::ratios_csv(analysis).into_bytes()),
        ("fit.csv", report::fit_csv(analysis).into_bytes()),
        ("plan.resolved.toml", to_toml(resolved)?.into_bytes()),
    ];
    if !analysis.by_line.is_empty() {
        files.push(("lines.csv", report::lines_csv(analysis).into_bytes()));
    }
    for (width, fit, standing, excitation) in [
        (Width::Double, "fit.svg", "standing.svg", "excitation.svg"),
        (
            Width::Single,
            "fit-narrow.svg",
            "standing-narrow.svg",
            "excitation-narrow.svg",
        ),
    ] {
        if let Some(svg) = report::excitation_figure(analysis, settings, width)? {
            files.push((excitation, svg.into_bytes()));
        }
        let svg = report::fit_figure(analysis, settings, width)?;
        files.push((fit, svg.into_bytes()));
        if let Some(svg) = report::standing_figure(analysis, settings, width)? {
            files.push((standing, svg.into_bytes()));
        }
    }
    report::write_all(folder, &files)
}
