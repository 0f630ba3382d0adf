//! Results as rows of a `measurements.csv`.

use crate::comparison::{Subject, SubjectValue};
use crate::ground::{Error, Result};
use crate::ratio::Basis;
use crate::report;
use crate::tables::DynamicalClass;
use std::path::Path;

const HEADER: &str = "comet,of,to,basis,scale,value,err_minus,err_plus,kind,r_h_au,date,class,method,source,compiled_in,how,confidence,note";

/// Appends one row per ratio and date to a file, which is made with its heading if need be; the
/// whole file is replaced at once. Rows that are there already are left alone. Gives the number
/// added.
///
/// # Errors
/// Unreadable or unwritable file; another heading.
pub(super) fn append(file: &Path, subjects: &[Subject], class: &str) -> Result<usize> {
    let present = match std::fs::read_to_string(file) {
        Ok(text) => text,
        Err(e) if e.kind() == std::io::ErrorKind::NotFound => format!("{HEADER}\n"),
        Err(e) => return Err(Error::io("cannot read", file, &e)),
    };
    let heading = present
        .lines()
        .find(|l| !l.starts_with('#') && !l.trim().is_empty());
    if heading.map(str::trim) != Some(HEADER) {
        return Err(Error::table("the heading is not that of measurements.csv")
            .in_file(file)
            .remedy(format!("start the file with {HEADER}")));
    }
    let mut text = present.clone();
    if !text.ends_with('\n') {
        text.push('\n');
    }
    let mut added = 0;
    for s in subjects {
        let row = row(s, class)?;
        if !text.lines().any(|l| l == row) {
            text.push_str(&row);
            text.push('\n');
            added += 1;
        }
    }
    let (folder, name) = (file.parent(), file.file_name());
    let (Some(folder), Some(name)) = (folder, name.and_then(|n| n.to_str())) else {
        return Err(Error::plan(format!(
            "--add {} is not a file",
            file.display()
        )));
    };
    let folder = if folder.as_os_str().is_empty() {
        Path::new(".")
    } else {
        folder
    };
    report::write_all(folder, &[(name, text.into_bytes())])?;
    Ok(added)
}

/// One row; the source key is the label, to be added to `sources.csv`.
fn row(s: &Subject, class: &str) -> Result<String> {
    debug_assert!(DynamicalClass::words().any(|w| w == class));
    let (value, minus, plus, kind) = match s.value {
        SubjectValue::Measured { median, low, high } => (
            median,
            (median - low).to_string(),
            (high - median).to_string(),
            "value",
        ),
        SubjectValue::Upper(v) => (v, String::new(), String::new(), "upper"),
        SubjectValue::Lower(v) => (v, String::new(), String::new(), "lower"),
    };
    let basis = match s.basis {
        Basis::Production => "production",
        Basis::Column => "column",
    };
    let cells = [
        s.label.clone(),
        s.of.to_string(),
        s.to.to_string(),
        basis.into(),
        "ratio".into(),
        value.to_string(),
        minus,
        plus,
        kind.into(),
        s.r_h_au.map_or_else(String::new, |r| r.to_string()),
        s.date.clone(),
        class.into(),
        "spectroscopy".into(),
        s.label.clone(),
        String::new(),
        "derived".into(),
        "medium".into(),
        "added by comagauge compare".into(),
    ];
    let mut writer = csv::WriterBuilder::new()
        .terminator(csv::Terminator::Any(b'\n'))
        .from_writer(Vec::new());
    let failed = |e: String| Error::compute(format!("cannot write a CSV row: {e}"));
    writer
        .write_record(&cells)
        .map_err(|e| failed(e.to_string()))?;
    let bytes = writer.into_inner().map_err(|e| failed(e.to_string()))?;
    let text = String::from_utf8(bytes).map_err(|e| failed(e.to_string()))?;
    Ok(text.trim_end().to_owned())
}
