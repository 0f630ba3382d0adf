//! Provenance of a result in the form that every file of the kit carries.

use crate::report::Input;
use serde::{Deserialize, Serialize};

/// What a result rests on.
#[derive(Clone, Debug, Serialize, Deserialize, PartialEq)]
pub struct Origin {
    /// Path of `result.json`.
    pub result: String,
    /// SHA-256 of `plan.resolved.toml`, hexadecimal.
    pub plan_sha256: String,
    /// The spectra.
    pub inputs: Vec<Hashed>,
    /// Seed of the draws.
    pub seed: u64,
    /// Number of draws.
    pub draws: usize,
}

/// A file with its hash.
#[derive(Clone, Debug, Serialize, Deserialize, PartialEq, Eq)]
pub struct Hashed {
    /// Path or name.
    pub path: String,
    /// SHA-256 of its bytes, hexadecimal.
    pub sha256: String,
}

impl From<&Input> for Hashed {
    fn from(input: &Input) -> Self {
        Self {
            path: input.path.clone(),
            sha256: input.sha256.clone(),
        }
    }
}

/// Program version and the origins of all results of a kit.
#[derive(Clone, Debug)]
pub(super) struct Stamp {
    origins: Vec<Origin>,
}

impl Stamp {
    /// Name and version of the program.
    pub(super) const PROGRAM: &'static str = concat!("comagauge ", env!("CARGO_PKG_VERSION"));

    pub(super) fn new(origins: impl IntoIterator<Item = Origin>) -> Self {
        Self {
            origins: origins.into_iter().collect(),
        }
    }

    /// Pairs of key and value, for headers.
    pub(super) fn pairs(&self) -> Vec<(String, String)> {
        let mut out = vec![("program".to_owned(), Self::PROGRAM.to_owned())];
        for o in &self.origins {
            out.push(("plan_sha256".to_owned(), o.plan_sha256.clone()));
            for i in &o.inputs {
                let name = format!("{} sha256 {}", file_name(&i.path), i.sha256);
                out.push(("input".to_owned(), name));
            }
            out.push(("seed".to_owned(), o.seed.to_string()));
            out.push(("draws".to_owned(), o.draws.to_string()));
        }
        out
    }

    /// All in one line.
    pub(super) fn line(&self) -> String {
        let words = self.pairs().into_iter().map(|(key, value)| {
            if key == "program" {
                value
            } else {
                format!("{key} {value}")
            }
        });
        words.collect::<Vec<_>>().join("; ")
    }

    /// One comment line per pair.
    pub(super) fn comment(&self, lead: &str) -> String {
        let line = |(key, value): (String, String)| format!("{lead} {key}: {value}\n");
        self.pairs().into_iter().map(line).collect()
    }
}

/// The last part of a path, of either kind of separator.
pub(super) fn file_name(path: &str) -> &str {
    path.rsplit(['/', '\\']).next().unwrap_or(path)
}
