//! Where the text of a table comes from: the binary or a folder that replaces it.

use crate::ground::{Error, Result};
use std::borrow::Cow;
use std::path::{Path, PathBuf};

/// One of the two folders of tables.
#[derive(Clone, Copy)]
pub(super) struct Folder<'a> {
    bundled: &'static [(&'static str, &'static str)],
    name: &'static str,
    replaced_by: Option<&'a Path>,
}

const LINE_LISTS: &[(&str, &str)] = &[
    ("sources.csv", include_str!("../../line-lists/sources.csv")),
    ("bands.csv", include_str!("../../line-lists/bands.csv")),
    (
        "efficiencies.csv",
        include_str!("../../line-lists/efficiencies.csv"),
    ),
    (
        "scale_lengths.csv",
        include_str!("../../line-lists/scale_lengths.csv"),
    ),
    (
        "speed_laws.csv",
        include_str!("../../line-lists/speed_laws.csv"),
    ),
    (
        "photo_rates.csv",
        include_str!("../../line-lists/photo_rates.csv"),
    ),
    (
        "photo_branches.csv",
        include_str!("../../line-lists/photo_branches.csv"),
    ),
    (
        "band_strengths.csv",
        include_str!("../../line-lists/band_strengths.csv"),
    ),
    (
        "solar_e490.csv",
        include_str!("../../line-lists/solar_e490.csv"),
    ),
];

const COMPARISON_SET: &[(&str, &str)] = &[
    (
        "sources.csv",
        include_str!("../../comparison-set/sources.csv"),
    ),
    (
        "measurements.csv",
        include_str!("../../comparison-set/measurements.csv"),
    ),
    (
        "populations.csv",
        include_str!("../../comparison-set/populations.csv"),
    ),
    (
        "solar_ratios.csv",
        include_str!("../../comparison-set/solar_ratios.csv"),
    ),
];

impl<'a> Folder<'a> {
    /// The line lists, or the folder that replaces them.
    pub(super) fn line_lists(replaced_by: Option<&'a Path>) -> Self {
        Self {
            bundled: LINE_LISTS,
            name: "line-lists",
            replaced_by,
        }
    }

    /// The comparison set, or the folder that replaces it.
    pub(super) fn comparison(replaced_by: Option<&'a Path>) -> Self {
        Self {
            bundled: COMPARISON_SET,
            name: "comparison-set",
            replaced_by,
        }
    }

    /// Refuses a replacing folder that is missing or lacks a file, naming all that are missing.
    pub(super) fn check_complete(&self) -> Result<()> {
        let Some(folder) = self.replaced_by else {
            return Ok(());
        };
        let missing: Vec<&str> = self
            .bundled
            .iter()
            .map(|(name, _)| *name)
            .filter(|name| !folder.join(name).is_file())
            .collect();
        if missing.is_empty() {
            return Ok(());
        }
        Err(Error::table(format!(
            "the folder {} cannot replace {}: it lacks {}",
            folder.display(),
            self.name,
            missing.join(", ")
        ))
        .in_file(folder)
        .remedy(format!(
            "a replacing folder holds all of {}; copy the missing ones from {}",
            self.bundled
                .iter()
                .map(|(name, _)| *name)
                .collect::<Vec<_>>()
                .join(", "),
            self.name
        )))
    }

    /// Path to name in messages and text of one file.
    pub(super) fn text(&self, file: &str) -> Result<(PathBuf, Cow<'static, str>)> {
        if let Some(folder) = self.replaced_by {
            let path = folder.join(file);
            let text = std::fs::read_to_string(&path)
                .map_err(|cause| Error::io("cannot read the table", &path, &cause))?;
            return Ok((path, Cow::Owned(text)));
        }
        let text = self
            .bundled
            .iter()
            .find(|(name, _)| *name == file)
            .expect("invariant: only files of the list are asked for")
            .1;
        Ok((Path::new(self.name).join(file), Cow::Borrowed(text)))
    }
}
