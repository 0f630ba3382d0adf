//! `comagauge paper`: results → a folder with everything for a draft.

mod load;

use super::output;
use crate::ground::Result;
use crate::paper::kit;
use crate::report;
use clap::Args;
use std::path::PathBuf;

/// Arguments of `paper`.
#[derive(Args)]
pub(super) struct Paper {
    /// Files result.json written by measure.
    #[arg(value_name = "RESULT.json")]
    results: Vec<PathBuf>,
    /// Folder for the kit (default: paper, beside the first result).
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
}

impl Paper {
    pub(super) fn run(self) -> Result<()> {
        let studies = self
            .results
            .iter()
            .map(|p| load::study(p))
            .collect::<Result<Vec<_>>>()?;
        let files = kit(&studies)?;
        let folder = self.out.unwrap_or_else(|| PathBuf::from("paper"));
        let files: Vec<(&str, Vec<u8>)> = files
            .iter()
            .map(|(name, bytes)| (name.as_str(), bytes.clone()))
            .collect();
        report::write_all(&folder, &files)?;
        output::complain(&format!("{} files in {}", files.len(), folder.display()));
        Ok(())
    }
}
