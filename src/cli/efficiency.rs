//! `comagauge efficiency`.

mod figure;
mod request;
mod text;

use super::output;
use crate::atomic::sun;
use crate::coma::equilibrium::SolarField;
use crate::efficiency::{Subject, along, efficiencies};
use crate::ground::Result;
use crate::report::write_all;
use clap::Args;
use request::{Places, Request};
use std::path::{Path, PathBuf};

/// Arguments of `efficiency`.
#[derive(Args)]
#[command(after_long_help = EXAMPLE)]
pub(super) struct Efficiency {
    /// An atom or ion such as "Fe I", "Ni I", "Na I", or CN, CO2, CO, H2O.
    species: String,
    /// Distance from the Sun, au.
    #[arg(long, value_name = "AU", required_unless_present = "rh_range")]
    rh: Option<f64>,
    /// Velocity from the Sun, km/s, positive when receding.
    #[arg(
        long,
        value_name = "KM_S",
        allow_hyphen_values = true,
        required_unless_present = "range"
    )]
    rdot: Option<f64>,
    /// Follow g over a range of --rdot, for example -60..60.
    #[arg(
        long,
        value_name = "LOW..HIGH",
        allow_hyphen_values = true,
        conflicts_with = "rh_range"
    )]
    range: Option<String>,
    /// Follow g over a range of --rh, for example 0.5..5.
    #[arg(long, value_name = "LOW..HIGH")]
    rh_range: Option<String>,
    /// Number of places in a range.
    #[arg(long, value_name = "N", default_value_t = 121)]
    points: usize,
    /// Leave out lines fainter than this fraction of the brightest (photons).
    #[arg(long, value_name = "FRACTION", default_value_t = 0.01)]
    threshold: f64,
    /// Number of lines or bands followed over a range.
    #[arg(long, value_name = "N", default_value_t = 6)]
    most: usize,
    /// Show the bands of CN instead of their lines.
    #[arg(long)]
    bands: bool,
    /// Draws by which the errors of all transition probabilities and of the sunlight are followed
    /// through the equilibrium; 0 takes those of the line alone.
    #[arg(long, value_name = "N", default_value_t = 32)]
    draws: usize,
    /// Seed of the draws.
    #[arg(long, default_value_t = 1)]
    seed: u64,
    /// Write a figure, and the numbers beside it as .csv.
    #[arg(long, value_name = "FILE.svg")]
    out: Option<PathBuf>,
    /// Folder of line lists to use instead of the built-in ones.
    #[arg(long, value_name = "DIR")]
    line_lists: Option<PathBuf>,
    /// Print as CSV.
    #[arg(long)]
    csv: bool,
}

const EXAMPLE: &str = "\
Examples:

  comagauge efficiency \"Ni I\" --rh 3.1 --rdot -12
  comagauge efficiency CN --rh 1.2 --rdot -7 --bands
  comagauge efficiency \"Na I\" --rh 1 --range -60..60 --out sodium.svg
  comagauge efficiency \"Fe I\" --rdot 0 --rh-range 0.5..5 --csv
";

impl Efficiency {
    pub(super) fn run(self) -> Result<()> {
        let request = Request::check(&self)?;
        let dir = self.line_lists.as_deref();
        let subject = Subject::load(&self.species, dir)?;
        let field = SolarField::sun(sun(dir)?);
        match &request.places {
            Places::One(_) => self.one(&request, &subject, &field),
            Places::Range(_) => self.range(&request, &subject, &field),
        }
    }

    fn one(&self, request: &Request, subject: &Subject, field: &SolarField) -> Result<()> {
        let at = request.places.first();
        let table = efficiencies(subject, field, &at, &request.detail)?;
        let csv = text::table_csv(subject, &table);
        if let Some(path) = &self.out {
            let svg = figure::sticks(subject, &table, &at)?;
            save(path, svg, &csv)?;
        }
        for caveat in &table.caveats {
            output::complain(&format!("note: {caveat}"));
        }
        output::complain(&text::about(subject, &table, &at, &request.detail));
        output::print(&if self.csv {
            csv
        } else {
            text::table_text(subject, &table)
        })
    }

    fn range(&self, request: &Request, subject: &Subject, field: &SolarField) -> Result<()> {
        let places = request.places.all();
        let found = along(
            subject,
            field,
            &places,
            request.detail.threshold,
            request.most,
        )?;
        let csv = text::range_csv(subject, &found, &places);
        if let Some(path) = &self.out {
            let svg = figure::curves(subject, &found, &request.places)?;
            save(path, svg, &csv)?;
        }
        let one = efficiencies(subject, field, &places[0], &request::first_estimate())?;
        for caveat in &one.caveats {
            output::complain(&format!("note: {caveat}"));
        }
        for source in text::sources(&one) {
            output::complain(&format!("source: {source}"));
        }
        output::print(&if self.csv {
            csv
        } else {
            text::range_text(subject, &found, &request.places)
        })
    }
}

fn save(path: &Path, svg: String, csv: &str) -> Result<()> {
    let folder = match path.parent() {
        Some(p) if !p.as_os_str().is_empty() => p,
        _ => Path::new("."),
    };
    let name = |p: &Path| p.file_name().map(|n| n.to_string_lossy().into_owned());
    let (svg_name, csv_name) = (name(path), name(&path.with_extension("csv")));
    let files = [svg_name.unwrap_or_default(), csv_name.unwrap_or_default()];
    write_all(
        folder,
        &[
            (&files[0], svg.into_bytes()),
            (&files[1], csv.as_bytes().to_vec()),
        ],
    )?;
    output::complain(&format!(
        "{} and {} in {}",
        files[0],
        files[1],
        folder.display()
    ));
    Ok(())
}
