//! The part of `comagauge measure` that repeats the analysis with other choices.

use crate::alternatives::{Alternatives, alternatives, count};
use crate::analysis::{Analysis, BandSettings, Settings};
use crate::figures::Width;
use crate::ground::Result;
use crate::plan::{PlanFile, check};
use crate::report;
use crate::spectrum::Spectrum;
use crate::tables::Tables;
use indicatif::{ProgressBar, ProgressStyle};
use std::path::Path;

/// At most this many listed bands are added one by one.
const MOST_ADDITIONS: usize = 20;

/// Runs the alternatives, writes their files into the folder of the results and returns the table.
pub(super) fn run(
    folder: &Path,
    spectra: &[Spectrum],
    settings: &Settings,
    base: &Analysis,
    extra: &[BandSettings],
) -> Result<String> {
    let bar = progress(count(settings, base, extra));
    let found = alternatives(spectra, settings, base, extra, &|| bar.inc(1));
    bar.finish_and_clear();
    let found = found?;
    report::write_all(folder, &files(&found, settings)?)?;
    Ok(report::alternatives_table(&found, settings))
}

fn files(found: &Alternatives, settings: &Settings) -> Result<Vec<(&'static str, Vec<u8>)>> {
    let mut files = vec![
        (
            "alternatives.csv",
            report::alternatives_csv(found, settings).into_bytes(),
        ),
        (
            "alternatives.json",
            report::alternatives_json(found, settings).into_bytes(),
        ),
    ];
    for (width, name) in [
        (Width::Double, "alternatives.svg"),
        (Width::Single, "alternatives-narrow.svg"),
    ] {
        if let Some(svg) = report::alternatives_figure(found, settings, width)? {
            files.push((name, svg.into_bytes()));
        }
    }
    Ok(files)
}

/// Bands of the line lists that lie inside a fitted window and are not in the plan, as they would be
/// if the plan named them. A band that the plan could not name is left out.
pub(super) fn listed_in_windows(
    file: &mut PlanFile,
    tables: &Tables,
    base: &Analysis,
) -> Vec<BandSettings> {
    let inside = |centre_aa: f64| {
        let mut windows = base.fits.iter().flat_map(|(_, fit)| &fit.windows);
        windows.any(|w| w.window_aa.0 < centre_aa && centre_aa < w.window_aa.1)
    };
    let named = |id: &str| base.bands.iter().any(|b| b.fit.id == id);
    let missing: Vec<String> = tables
        .bands()
        .iter()
        .filter(|b| inside(b.centre_aa) && !named(&b.id))
        .map(|b| b.id.clone())
        .take(MOST_ADDITIONS)
        .collect();
    let mut out = Vec::new();
    for id in missing {
        file.plan.measure.bands.push(id.clone());
        let checked = check(file, tables);
        file.plan.measure.bands.pop();
        let bands = checked.map_or_else(|_| Vec::new(), |c| c.settings.bands);
        out.extend(bands.into_iter().find(|b| b.model.id == id));
    }
    out
}

/// A bar on stderr, silent when that is not a terminal.
fn progress(count: usize) -> ProgressBar {
    let style = ProgressStyle::with_template("{bar:40} {pos}/{len} alternatives, {eta} left")
        .expect("invariant: the template is sound");
    ProgressBar::new(count as u64).with_style(style)
}
