//! `comagauge bands`.

use super::output;
use crate::ground::{Result, air_from_vacuum_aa};
use crate::tables::Tables;
use clap::Args;
use std::path::PathBuf;

/// Arguments of `bands`.
#[derive(Args)]
pub(super) struct Bands {
    /// Only bands of this species.
    #[arg(long)]
    species: Option<String>,
    /// Folder of line lists to use instead of the built-in ones.
    #[arg(long, value_name = "DIR")]
    line_lists: Option<PathBuf>,
    /// Print as CSV.
    #[arg(long)]
    csv: bool,
}

impl Bands {
    pub(super) fn run(self) -> Result<()> {
        let tables = Tables::load(self.line_lists.as_deref(), None)?;
        let mut out = if self.csv {
            "id,species,centre_vacuum_aa,centre_air_aa,fwhm_aa,g_photons_s,g_relative_sigma,g_source\n".to_owned()
        } else {
            format!(
                "{:14} {:8} {:>12} {:>10} {:>12} {:>7}  {}\n",
                "band",
                "species",
                "vacuum Å",
                "width Å",
                "g photons/s",
                "error",
                "source of g (1 au)"
            )
        };
        for band in tables.bands() {
            if self
                .species
                .as_deref()
                .is_some_and(|s| s != band.species.as_str())
            {
                continue;
            }
            let g = tables.default_efficiency(&band.id);
            let source = g.map_or_else(String::new, |g| {
                let text = tables
                    .source(&g.provenance.source)
                    .map_or("", |s| s.reference.as_str());
                let memory = if g.provenance.how.is_memory() {
                    " (from memory)"
                } else {
                    ""
                };
                format!("{text}{memory}")
            });
            let number = |v: Option<f64>| v.map_or_else(String::new, |v| format!("{v:.4e}"));
            if self.csv {
                out.push_str(&format!(
                    "{},{},{},{},{},{},{},\"{}\"\n",
                    band.id,
                    band.species,
                    band.centre_aa,
                    air_from_vacuum_aa(band.centre_aa),
                    band.fwhm_aa,
                    number(g.map(|g| g.g_photons_s)),
                    g.map_or_else(String::new, |g| g.relative_sigma.to_string()),
                    source.replace('"', "\"\"")
                ));
            } else {
                out.push_str(&format!(
                    "{:14} {:8} {:12.2} {:10.1} {:>12} {:>7}  {}\n",
                    band.id,
                    band.species.as_str(),
                    band.centre_aa,
                    band.fwhm_aa,
                    g.map_or_else(|| "–".to_owned(), |g| format!("{:.3e}", g.g_photons_s)),
                    g.map_or_else(String::new, |g| format!(
                        "{:.0} %",
                        100.0 * g.relative_sigma
                    )),
                    source
                ));
            }
        }
        output::print(&out)
    }
}
