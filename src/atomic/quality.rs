//! Errors of transition probabilities by quality letter, and their sources.

use super::bundle::{Table, table};
use crate::ground::Result;
use serde::Deserialize;
use std::path::Path;
use std::sync::Arc;

#[derive(Deserialize)]
struct QualityRow {
    quality: char,
    sigma_ln_strong: f64,
    sigma_ln_weak: f64,
}

#[derive(Deserialize)]
struct SourceRow {
    species: String,
    quality: char,
    source: String,
}

/// log gf at and above which a line counts as strong, and at and below which as weak.
const STRONG_LOG10_GF: f64 = -1.0;
const WEAK_LOG10_GF: f64 = -3.0;

/// The letters of one species.
pub(super) struct Letters(Vec<Letter>);

struct Letter {
    quality: char,
    strong: f64,
    weak: f64,
    source: Arc<str>,
}

impl Letters {
    /// Reads `quality.csv` and `sources.csv` for the species with this file stem.
    pub fn load(stem: &str, dir: Option<&Path>) -> Result<Self> {
        let table_of_errors = table(dir, "atoms/quality.csv")?;
        let errors = table_of_errors.rows::<QualityRow>()?;
        for (line, row) in &errors {
            check_sigma(&table_of_errors, *line, row.sigma_ln_strong)?;
            check_sigma(&table_of_errors, *line, row.sigma_ln_weak)?;
        }
        let table_of_sources = table(dir, "atoms/sources.csv")?;
        let mut letters = Vec::new();
        for (line, row) in table_of_sources.rows::<SourceRow>()? {
            if row.species != stem {
                continue;
            }
            let found = errors.iter().find(|(_, e)| e.quality == row.quality);
            let Some((_, error)) = found else {
                return Err(table_of_sources
                    .refuse(
                        line,
                        format!("quality letter {:?} is not known", row.quality),
                    )
                    .remedy("use a letter of quality.csv, or add it there"));
            };
            letters.push(Letter {
                quality: row.quality,
                strong: error.sigma_ln_strong,
                weak: error.sigma_ln_weak,
                source: row.source.into(),
            });
        }
        Ok(Self(letters))
    }

    /// σ(ln gf) and source of a line; `None` when the letter has no source for this species.
    pub fn of(&self, quality: char, log10_gf: f64) -> Option<(f64, Arc<str>)> {
        let letter = self.0.iter().find(|l| l.quality == quality)?;
        let weakness = (STRONG_LOG10_GF - log10_gf) / (STRONG_LOG10_GF - WEAK_LOG10_GF);
        let sigma = letter.strong + (letter.weak - letter.strong) * weakness.clamp(0.0, 1.0);
        Some((sigma, Arc::clone(&letter.source)))
    }
}

fn check_sigma(table: &Table, line: usize, sigma: f64) -> Result<()> {
    if (0.0..=3.0).contains(&sigma) {
        return Ok(());
    }
    Err(table
        .refuse(line, format!("error {sigma} of ln gf is not from 0 to 3"))
        .remedy("give the standard deviation of the natural logarithm, 0.1 for 10 %"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn weak_semi_empirical_lines_are_worse() {
        let letters = Letters::load("fe_i", None).unwrap();
        let sigma = |log10_gf| letters.of('K', log10_gf).unwrap().0;
        assert!(sigma(0.0) == sigma(-1.0) && sigma(-2.0) > sigma(-1.0));
        assert!(sigma(-3.0) == sigma(-6.0) && sigma(-3.0) > sigma(-2.0));
        assert!(letters.of('x', 0.0).is_none());
    }
}
