//! Where a table's text comes from: the user's folder, else the binary.

use crate::ground::{Error, Result};
use flate2::read::MultiGzDecoder;
use serde::de::DeserializeOwned;
use std::io::Read;
use std::path::{Path, PathBuf};

/// Largest text a packed table may unfold to: a guard against a wrong or hostile file.
const CAP_BYTES: u64 = 64 << 20;

macro_rules! bundled {
    ($($name:literal),* $(,)?) => {
        &[$(($name, include_bytes!(concat!("../../line-lists/", $name)).as_slice())),*]
    };
}

const BUNDLED: &[(&str, &[u8])] = bundled![
    "atlas/comet_lines.csv.gz",
    "atoms/quality.csv",
    "atoms/sources.csv",
    "atoms/ca_i_levels.csv",
    "atoms/ca_i_lines.csv",
    "atoms/ca_ii_levels.csv",
    "atoms/ca_ii_lines.csv",
    "atoms/co_i_levels.csv",
    "atoms/co_i_lines.csv",
    "atoms/cr_i_levels.csv",
    "atoms/cr_i_lines.csv",
    "atoms/cu_i_levels.csv",
    "atoms/cu_i_lines.csv",
    "atoms/fe_i_levels.csv",
    "atoms/fe_i_lines.csv",
    "atoms/k_i_levels.csv",
    "atoms/k_i_lines.csv",
    "atoms/li_i_levels.csv",
    "atoms/li_i_lines.csv",
    "atoms/mg_i_levels.csv",
    "atoms/mg_i_lines.csv",
    "atoms/mn_i_levels.csv",
    "atoms/mn_i_lines.csv",
    "atoms/na_i_levels.csv",
    "atoms/na_i_lines.csv",
    "atoms/ni_i_levels.csv",
    "atoms/ni_i_lines.csv",
    "atoms/o_i_levels.csv",
    "atoms/o_i_lines.csv",
    "atoms/ti_i_levels.csv",
    "atoms/ti_i_lines.csv",
    "atoms/v_i_levels.csv",
    "atoms/v_i_lines.csv",
    "molecules/cn_ground_state.csv",
    "molecules/cn_red_bands.csv",
    "molecules/cn_violet_lines.csv",
    "molecules/h2o_2p7um_lines.csv",
    "molecules/infrared_bands.csv",
    "molecules/rotational_constants.csv",
    "solar/astm_e490.csv",
    "solar/pieces.csv",
    "solar/sao2010.csv.gz",
    "solar/tsis1_hsrs.csv.gz",
];

/// A table's text and the name to use in messages.
pub(super) struct Table {
    pub path: PathBuf,
    pub text: String,
}

/// Stems of the bundled species, `fe_i` and so on.
pub(super) fn atom_stems() -> impl Iterator<Item = &'static str> {
    BUNDLED
        .iter()
        .filter_map(|(name, _)| name.strip_prefix("atoms/")?.strip_suffix("_levels.csv"))
}

/// Reads `name` (with `/`, ending in `.csv`) from the folder if it is there, plain or with `.gz`
/// added, else from the binary.
pub(super) fn table(dir: Option<&Path>, name: &str) -> Result<Table> {
    let packed = format!("{name}.gz");
    if let Some(dir) = dir {
        if !dir.is_dir() {
            return Err(Error::table(format!(
                "the folder of line lists {} does not exist",
                dir.display()
            ))
            .remedy("correct the path, or leave it out to use the bundled tables"));
        }
        for candidate in [name, &packed] {
            let path = dir.join(candidate);
            if path.is_file() {
                let bytes =
                    std::fs::read(&path).map_err(|e| Error::io("cannot read", &path, &e))?;
                return unpack(path, &bytes);
            }
        }
    }
    let found = BUNDLED.iter().find(|(n, _)| *n == name || *n == packed);
    match found {
        Some((n, bytes)) => unpack(Path::new("line-lists").join(n), bytes),
        None => Err(Error::table(format!("there is no table {name}"))
            .remedy("put the file into the folder of line lists")),
    }
}

fn unpack(path: PathBuf, bytes: &[u8]) -> Result<Table> {
    let mut text = String::new();
    let outcome = if path.extension().is_some_and(|e| e == "gz") {
        MultiGzDecoder::new(bytes)
            .take(CAP_BYTES)
            .read_to_string(&mut text)
    } else {
        bytes.take(CAP_BYTES).read_to_string(&mut text)
    };
    outcome.map_err(|e| Error::table(format!("not a readable table: {e}")).in_file(&path))?;
    Ok(Table { path, text })
}

impl Table {
    /// Typed rows with their one-based line numbers; lines that begin with `#` are comments.
    pub fn rows<T: DeserializeOwned>(&self) -> Result<Vec<(usize, T)>> {
        let mut reader = csv::ReaderBuilder::new()
            .comment(Some(b'#'))
            .trim(csv::Trim::All)
            .from_reader(self.text.as_bytes());
        let headers = reader.headers().map_err(|e| self.csv_error(&e))?.clone();
        let mut rows = Vec::new();
        for record in reader.records() {
            let record = record.map_err(|e| self.csv_error(&e))?;
            let line = record
                .position()
                .map_or(0, |p| usize::try_from(p.line()).unwrap_or(0));
            let row = record
                .deserialize(Some(&headers))
                .map_err(|e| self.csv_error(&e))?;
            rows.push((line, row));
        }
        Ok(rows)
    }

    /// A refusal of one line of this table.
    pub fn refuse(&self, line: usize, message: impl Into<String>) -> Error {
        Error::table(message).in_file(&self.path).at_line(line)
    }

    fn csv_error(&self, cause: &csv::Error) -> Error {
        let error = Error::table(format!("cannot read this table: {cause}")).in_file(&self.path);
        match cause
            .position()
            .and_then(|p| usize::try_from(p.line()).ok())
        {
            Some(line) => error.at_line(line),
            None => error,
        }
        .remedy("compare the columns with the README.md beside the bundled table")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_folder_comes_first_and_errors_name_the_line() {
        let dir = tempfile::tempdir().unwrap();
        std::fs::create_dir(dir.path().join("atoms")).unwrap();
        let path = dir.path().join("atoms/quality.csv");
        std::fs::write(&path, "# a\n# b\na,b\n1,2\n3,x\n").unwrap();
        let table = table(Some(dir.path()), "atoms/quality.csv").unwrap();
        let error = table.rows::<(f64, f64)>().unwrap_err();
        assert_eq!(error.line(), Some(5));
        assert!(error.to_string().contains("quality.csv"), "{error}");
    }

    #[test]
    fn missing_tables_and_folders_are_refused() {
        assert!(table(None, "atoms/xx_i_levels.csv").is_err());
        let error = table(Some(Path::new("no-such-folder")), "atoms/quality.csv");
        assert!(error.is_err());
    }

    #[test]
    fn a_damaged_packed_table_is_refused() {
        let error = unpack(PathBuf::from("a.csv.gz"), b"not gzip")
            .err()
            .unwrap();
        assert!(error.to_string().contains("a.csv.gz"), "{error}");
    }
}
