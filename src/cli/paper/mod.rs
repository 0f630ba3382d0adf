//! `comagauge paper`: results → a folder with everything for a draft.

mod load;
mod verify;

use super::output;
use crate::ground::Result;
use crate::paper::{PROVENANCE, Provenance, kit};
use crate::report;
use clap::Args;
use std::path::{Path, PathBuf};

/// Arguments of `paper`.
#[derive(Args)]
#[command(after_long_help = AFTER)]
pub(super) struct Paper {
    /// Files result.json written by measure; several dates of a comet are shown together.
    #[arg(value_name = "RESULT.json", required_unless_present = "verify")]
    results: Vec<PathBuf>,
    /// Folder for the kit (default: paper, beside the first result).
    #[arg(long, value_name = "DIR", conflicts_with = "verify")]
    out: Option<PathBuf>,
    /// Compute everything in this kit again from the plans and spectra, and say whether its numbers
    /// still follow from them (exit code 1 if not). RESULT.json are needed only if they were moved.
    #[arg(long, value_name = "DIR")]
    verify: Option<PathBuf>,
}

const AFTER: &str = "\
The kit:

  fit, standing, posterior, profile, distance-…, plane   figures as .pdf (fonts embedded), .png
                     (300 dpi) and .svg; two columns wide, and one column wide with -narrow
  bands, species, ratios   tables as .tex (tabular), -deluxe.tex (deluxetable) and .ecsv
  methods.md, methods.tex, sources.bib   the methods from the numbers in use, with their references
  draft.tex          one page to write on: pdflatex, bibtex, pdflatex, pdflatex
  report.html        one page for any reader, opens without network
  provenance.json    versions, hashes, seeds and numbers, for --verify

The analysis is run again from plan.resolved.toml beside each result.json (milliseconds, the same to
the bit), so the spectra must still be where the plan says, or beside result.json. A kit is refused
when they no longer give the numbers in result.json.

Examples:

  comagauge paper night1-results/result.json
  comagauge paper night1-results/result.json night2-results/result.json --out paper
  comagauge paper --verify paper
";

impl Paper {
    pub(super) fn run(self) -> Result<()> {
        if let Some(folder) = &self.verify {
            return output::print(&verify::verify(folder, &self.results)?);
        }
        let mut studies = Vec::new();
        let mut results = Vec::new();
        for path in &self.results {
            let (study, numbers) = load::current(path)?;
            results.push((study.origin.clone(), numbers));
            studies.push(study);
        }
        let mut files = kit(&studies)?;
        let record = Provenance::new(results, &files);
        files.push((PROVENANCE.to_owned(), record.json().into_bytes()));
        let folder = self.folder();
        let files: Vec<(&str, Vec<u8>)> = files
            .iter()
            .map(|(name, bytes)| (name.as_str(), bytes.clone()))
            .collect();
        report::write_all(&folder, &files)?;
        let page = folder.join("report.html");
        output::print(&format!(
            "{} files in {}; to read: {}; to write on: {}\n",
            files.len(),
            folder.display(),
            page.display(),
            folder.join("draft.tex").display()
        ))
    }

    fn folder(&self) -> PathBuf {
        let beside = || {
            let first = self.results.first();
            let parent = first.and_then(|p| p.parent()).unwrap_or(Path::new(""));
            parent.join("paper")
        };
        self.out.clone().unwrap_or_else(beside)
    }
}
