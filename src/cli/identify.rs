//! `comagauge identify`.

mod figure;
mod input;
mod text;

use super::output;
use crate::atomic::sun;
use crate::coma::equilibrium::SolarField;
use crate::ground::{Error, Result};
use crate::identify::{Catalogue, Found, Identification, PeakSettings, find_peaks, identify};
use crate::report::write_all;
use clap::Args;
use input::{Job, Task};
use std::path::PathBuf;

/// Arguments of `identify`.
#[derive(Args)]
#[command(after_long_help = EXAMPLE)]
pub(super) struct Identify {
    /// A plan (.toml), or a spectrum (text or FITS).
    #[arg(value_name = "SPECTRUM|PLAN")]
    input: PathBuf,
    /// Least signal-to-noise of a peak.
    #[arg(long, default_value_t = 5.0)]
    sigma: f64,
    /// Leave out predicted lines fainter than this fraction of the brightest of their species.
    #[arg(long, value_name = "FRACTION", default_value_t = 0.01)]
    threshold: f64,
    /// Folder for the results (default: beside the input, named after it).
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Print as CSV.
    #[arg(long)]
    csv: bool,
    /// Folder of line lists to use instead of the built-in ones.
    #[arg(long, value_name = "DIR")]
    line_lists: Option<PathBuf>,
    #[command(flatten)]
    bare: Bare,
}

/// For a spectrum without a plan; the same words as in a plan.
#[derive(Args)]
#[command(next_help_heading = "For a spectrum without a plan")]
struct Bare {
    /// Unit of the spectral axis: Angstrom, nm, um, cm-1, Hz …
    #[arg(long, value_name = "UNIT")]
    wavelength_unit: Option<String>,
    /// Medium of the wavelengths: vacuum or air.
    #[arg(long, value_name = "MEDIUM")]
    medium: Option<String>,
    /// Unit of the flux density, for example "erg/s/cm2/Angstrom".
    #[arg(long, value_name = "UNIT")]
    flux_unit: Option<String>,
    /// λ/FWHM of the instrument (default: estimated from the strong lines).
    #[arg(long, value_name = "R")]
    resolving_power: Option<f64>,
    /// Velocity of the comet from the observer, km/s.
    #[arg(
        long,
        value_name = "KM_S",
        allow_hyphen_values = true,
        default_value_t = 0.0
    )]
    observer_km_s: f64,
}

const EXAMPLE: &str = "\
Examples:

  comagauge identify night1.toml --sigma 4
  comagauge identify comet.csv --wavelength-unit nm --medium air --flux-unit W/m2/nm
";

impl Identify {
    pub(super) fn run(self) -> Result<()> {
        if !(0.0..=1.0).contains(&self.threshold) {
            return Err(
                Error::plan(format!("--threshold {} is outside 0 to 1", self.threshold))
                    .remedy("give a fraction such as 0.01"),
            );
        }
        let job = Job::read(&self)?;
        let catalogue = self.catalogue(&job)?;
        let mut lines = Vec::new();
        for task in &job.tasks {
            let settings = PeakSettings {
                sigma: self.sigma,
                resolution: task.resolution.clone(),
            };
            let found = find_peaks(&task.spectrum, &settings)?;
            let named = identify(&found.peaks, &catalogue);
            lines.push((task, found, named));
        }
        self.write(&job, &lines)
    }

    fn catalogue(&self, job: &Job) -> Result<Catalogue> {
        let dir = job.line_lists.as_deref();
        let field = SolarField::sun(sun(dir)?);
        Ok(Catalogue::joined([
            Catalogue::atlas(dir)?,
            Catalogue::atoms(dir, &field, &job.at, self.threshold)?,
            Catalogue::cn(dir, &field, &job.at, self.threshold)?,
        ]))
    }

    fn write(&self, job: &Job, results: &[(&Task, Found, Vec<Identification>)]) -> Result<()> {
        let mut csv = text::CSV_HEAD.to_owned();
        let mut table = String::new();
        let mut files = Vec::new();
        for (i, (task, found, named)) in results.iter().enumerate() {
            let label = task.spectrum.label();
            csv.push_str(&text::csv(label, named));
            table.push_str(&text::table(label, named));
            let name = if i == 0 {
                "identify.svg".to_owned()
            } else {
                format!("identify-{}.svg", i + 1)
            };
            files.push((name, figure::figure(task, named)?.into_bytes()));
            for caveat in found
                .caveats
                .iter()
                .chain(&text::doubts(label, found, named))
            {
                output::complain(&format!("note: {caveat}"));
            }
        }
        files.push(("identify.csv".to_owned(), csv.clone().into_bytes()));
        let files: Vec<(&str, Vec<u8>)> =
            files.iter().map(|(n, b)| (n.as_str(), b.clone())).collect();
        write_all(&job.folder, &files)?;
        output::complain(&job.about);
        output::complain(text::SOURCES);
        output::print(if self.csv { &csv } else { &table })?;
        output::complain(&format!("results in {}", job.folder.display()));
        Ok(())
    }
}
