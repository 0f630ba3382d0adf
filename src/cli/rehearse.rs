//! `comagauge rehearse`: read, override, check, repeat, write.

use super::measure::{load_tables, read_spectra};
use super::output;
use crate::figures::Width;
use crate::ground::Result;
use crate::plan::{check, read_plan};
use crate::ratio::DrawSettings;
use crate::rehearse::{FLUX_STEPS, Noise, Rehearsal, completeness, injectable, rehearse};
use crate::report;
use clap::Args;
use indicatif::{ProgressBar, ProgressStyle};
use std::path::{Path, PathBuf};

/// Arguments of `rehearse`.
#[derive(Args)]
pub(super) struct Rehearse {
    /// The plan file (TOML), as for `measure`.
    plan: PathBuf,
    /// Number of trials, 10 to 1000000.
    #[arg(long, value_name = "N", default_value_t = 1000)]
    trials: usize,
    /// Seed of the trials, instead of the plan's.
    #[arg(long)]
    seed: Option<u64>,
    /// Random draws behind the ratios of each trial.
    #[arg(long, value_name = "N", default_value_t = 1000)]
    draws: usize,
    /// Draw the noise from the residuals of the fit instead of normal noise with the given errors.
    #[arg(long)]
    residuals: bool,
    /// Keep the errors of g, calibration, scale lengths and speed in the intervals of ratios. The
    /// trials do not vary these, so such intervals cover too much.
    #[arg(long)]
    full: bool,
    /// Folder for rehearse.csv and rehearse.svg (default: beside the plan, named after it).
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Also inject every band at fluxes from 0 to 6 of its errors and count the detections: writes
    /// completeness.csv and completeness.svg.
    #[arg(long)]
    completeness: bool,
    /// Print the table as CSV.
    #[arg(long)]
    csv: bool,
}

impl Rehearse {
    pub(super) fn run(self) -> Result<()> {
        let file = read_plan(&self.plan)?;
        let tables = load_tables(&file)?;
        let mut checked = check(&file, &tables)?;
        let (mut spectra, understood) = read_spectra(&checked.files)?;
        checked.settle(&file, &understood, &mut spectra)?;
        let settings = &checked.settings;
        let seed = self.seed.unwrap_or(settings.draws.seed);
        let draws = DrawSettings {
            count: self.draws,
            seed,
        };
        let how = Rehearsal {
            trials: self.trials,
            seed,
            draws: draws.checked()?.count,
            noise: if self.residuals {
                Noise::Residuals
            } else {
                Noise::Gaussian
            },
            full: self.full,
        };
        let bar = progress(how.trials);
        let rehearsed = rehearse(&spectra, settings, how, &|| bar.inc(1));
        bar.finish_and_clear();
        let rehearsed = rehearsed?;
        let csv = report::rehearsal_csv(&rehearsed);
        let svg = report::rehearsal_figure(&rehearsed, &settings.label, Width::Double)?;
        let folder = self.out.unwrap_or_else(|| default_folder(&self.plan));
        let mut files = vec![
            ("rehearse.csv", csv.clone().into_bytes()),
            ("rehearse.svg", svg.into_bytes()),
        ];
        let mut more = String::new();
        if self.completeness {
            let steps = FLUX_STEPS.len() * injectable(settings);
            let bar = progress(how.trials * steps);
            let found = completeness(&spectra, settings, how, &|| bar.inc(1));
            bar.finish_and_clear();
            let found = found?;
            let figure = report::completeness_figure(&found, settings, Width::Double)?;
            files.push((
                "completeness.csv",
                report::completeness_csv(&found).into_bytes(),
            ));
            files.extend(figure.map(|f| ("completeness.svg", f.into_bytes())));
            more = report::completeness_table(&found, settings);
        }
        report::write_all(&folder, &files)?;
        output::print(&if self.csv {
            csv
        } else {
            report::rehearsal_table(&rehearsed, &settings.label) + &more
        })?;
        output::complain(&format!("results in {}", folder.display()));
        Ok(())
    }
}

/// A bar on stderr, silent when that is not a terminal.
fn progress(trials: usize) -> ProgressBar {
    let style = ProgressStyle::with_template("{bar:40} {pos}/{len} trials, {eta} left")
        .expect("invariant: the template is sound");
    ProgressBar::new(trials as u64).with_style(style)
}

/// The default folder: `night1.toml` gives `night1-rehearsal`.
fn default_folder(plan: &Path) -> PathBuf {
    let stem = plan
        .file_stem()
        .map_or_else(|| "plan".into(), |s| s.to_string_lossy().into_owned());
    plan.with_file_name(format!("{stem}-rehearsal"))
}
