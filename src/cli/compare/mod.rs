//! `comagauge compare`: results or a number among published ratios.

mod add;
mod arguments;
mod read_back;

use super::output;
use crate::comparison::{Likeness, RatioComparison, Subject, compare, like, rederive};
use crate::figures::Width;
use crate::ground::{Caveat, Result};
use crate::report;
use crate::tables::Tables;
use clap::Args;
use std::path::PathBuf;

/// Seed of the draws behind percentiles and permutations: the same input gives the same output.
const SEED: u64 = 1;

/// Arguments of `compare`.
#[derive(Args)]
#[command(after_long_help = EXAMPLE)]
pub(super) struct Compare {
    /// Files result.json written by measure, or one number (with --of and --to).
    #[arg(
        value_name = "RESULT.json|VALUE",
        required_unless_present = "check_set"
    )]
    inputs: Vec<String>,
    /// Numerator of VALUE, for example CO2.
    #[arg(long, value_name = "SPECIES")]
    of: Option<String>,
    /// Denominator of VALUE, for example H2O.
    #[arg(long, value_name = "SPECIES")]
    to: Option<String>,
    /// Error of VALUE (one standard deviation).
    #[arg(long, value_name = "S", conflicts_with_all = ["low", "high"])]
    sigma: Option<f64>,
    /// Lower end of the 68 % interval of VALUE.
    #[arg(long, value_name = "L", requires = "high")]
    low: Option<f64>,
    /// Upper end of the 68 % interval of VALUE.
    #[arg(long, value_name = "H", requires = "low")]
    high: Option<f64>,
    /// VALUE is a limit: upper or lower.
    #[arg(long, value_name = "KIND", value_parser = ["upper", "lower"], conflicts_with_all = ["sigma", "low"])]
    limit: Option<String>,
    /// Heliocentric distance of VALUE, au.
    #[arg(long, value_name = "AU")]
    distance: Option<f64>,
    /// Name of the comet of VALUE; published rows of this comet do not take part.
    #[arg(long, value_name = "NAME", default_value = "this comet")]
    label: String,
    /// Only comets of this class: JFC, HTC, OCC, Centaur, MBC, other.
    #[arg(long, value_name = "CLASS")]
    class: Option<String>,
    /// Only measurements within these heliocentric distances, au, for example 0.8..2.5.
    #[arg(long, value_name = "LOW..HIGH")]
    rh: Option<String>,
    /// Only measurements whose method contains this text.
    #[arg(long, value_name = "TEXT")]
    method: Option<String>,
    /// Basis of VALUE.
    #[arg(long, value_name = "BASIS", value_parser = ["production", "column"], default_value = "production")]
    basis: String,
    /// Folder of the comparison set to use instead of the built-in one.
    #[arg(long, value_name = "DIR")]
    comparison: Option<PathBuf>,
    /// Folder for figures and tables; none are written without it.
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Print the table as CSV.
    #[arg(long)]
    csv: bool,
    /// Append the ratios as rows to this file, in the format of measurements.csv; their source key
    /// is the comet's name, to be added to sources.csv.
    #[arg(long, value_name = "FILE")]
    add: Option<PathBuf>,
    /// Dynamical class of the comet in the rows of --add.
    #[arg(long, value_name = "CLASS", default_value = "other")]
    add_class: String,
    /// Print published medians and fractions beside those derived from the set, and stop.
    #[arg(long)]
    check_set: bool,
}

const EXAMPLE: &str = "\
Examples:

  comagauge compare night1-results/result.json night2-results/result.json
  comagauge compare 0.24 --of CO2 --to H2O --sigma 0.02 --distance 1.4 --rh 0..2.5
  comagauge compare --check-set
";

impl Compare {
    pub(super) fn run(self) -> Result<()> {
        let tables = Tables::load(None, self.comparison.as_deref())?;
        if self.check_set {
            return output::print(&report::check_set_table(&rederive(&tables)));
        }
        let selection = self.selection()?;
        let subjects = self.subjects()?;
        let (found, refused) = compare_all(&tables, &subjects, &selection)?;
        let likeness: Vec<(String, Likeness)> = labels(&subjects)
            .into_iter()
            .map(|l| {
                let own: Vec<Subject> = subjects.iter().filter(|s| s.label == l).cloned().collect();
                let likeness = like(&tables, &own, &selection);
                (l, likeness)
            })
            .collect();
        let table = report::comparison_csv(&found);
        let text = report::comparison_text(&found, &likeness, &refused, &tables);
        if let Some(folder) = &self.out {
            write(folder, &found, &table, &text)?;
        }
        if let Some(file) = &self.add {
            let added = add::append(file, &subjects, &self.add_class)?;
            output::complain(&format!("{added} rows added to {}", file.display()));
        }
        output::print(if self.csv { &table } else { &text })?;
        if let Some(folder) = &self.out {
            output::complain(&format!("results in {}", folder.display()));
        }
        Ok(())
    }
}

/// Comets in the order of their first appearance.
fn labels(subjects: &[Subject]) -> Vec<String> {
    let mut out: Vec<String> = Vec::new();
    for s in subjects {
        if !out.contains(&s.label) {
            out.push(s.label.clone());
        }
    }
    out
}

/// Every ratio of every comet once. Ratios without published counterpart become caveats, unless
/// none has any.
fn compare_all(
    tables: &Tables,
    subjects: &[Subject],
    selection: &crate::comparison::Selection,
) -> Result<(Vec<RatioComparison>, Vec<Caveat>)> {
    let same = |a: &Subject, b: &Subject| {
        a.label == b.label && a.of == b.of && a.to == b.to && a.basis == b.basis
    };
    let (mut found, mut refused, mut last) = (Vec::new(), Vec::new(), None);
    for (i, s) in subjects.iter().enumerate() {
        if subjects[..i].iter().any(|o| same(o, s)) {
            continue;
        }
        let dates: Vec<Subject> = subjects.iter().filter(|o| same(o, s)).cloned().collect();
        match compare(tables, &dates, selection, SEED) {
            Ok(c) => found.push(c),
            Err(e) => {
                refused.push(Caveat::Other {
                    code: "nothing-to-compare",
                    text: e.message().to_owned(),
                });
                last = Some(e);
            }
        }
    }
    match last {
        Some(error) if found.is_empty() => Err(error),
        _ => Ok((found, refused)),
    }
}

fn write(
    folder: &std::path::Path,
    found: &[RatioComparison],
    table: &str,
    text: &str,
) -> Result<()> {
    let mut files = vec![
        ("compare.csv", table.as_bytes().to_vec()),
        ("compare.txt", text.as_bytes().to_vec()),
    ];
    for (width, standing, distance) in [
        (
            Width::Double,
            "compare-standing.svg",
            "compare-distance.svg",
        ),
        (
            Width::Single,
            "compare-standing-narrow.svg",
            "compare-distance-narrow.svg",
        ),
    ] {
        let svg = report::comparison_standing_figure(found, width)?;
        files.push((standing, svg.into_bytes()));
        if let Some(svg) = report::comparison_distance_figure(found, width)? {
            files.push((distance, svg.into_bytes()));
        }
    }
    report::write_all(folder, &files)
}
