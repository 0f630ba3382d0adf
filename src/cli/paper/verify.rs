//! `comagauge paper --verify DIR`: do the paper's numbers still follow from the data?

use super::load::{Loaded, load};
use crate::ground::{Error, Result};
use crate::paper::{PROVENANCE, Provenance, Study, drift, is_to_edit, kit, sha256};
use serde_json::Value;
use std::path::{Path, PathBuf};

/// Most differing numbers that are listed.
const MOST_LISTED: usize = 12;

/// What was found.
#[derive(Default)]
struct Verdict {
    /// Why the numbers do not follow.
    against: Vec<String>,
    /// What else is worth saying.
    remarks: Vec<String>,
    numbers: usize,
    inputs: usize,
}

/// Checks a kit; returns what to print when all is well. `elsewhere` replaces the recorded paths of the
/// results.
///
/// # Errors
/// No kit; numbers that no longer follow, with each difference.
pub(super) fn verify(folder: &Path, elsewhere: &[PathBuf]) -> Result<String> {
    let record = read(folder)?;
    let mut verdict = Verdict::default();
    let paths = paths(&record, elsewhere)?;
    let mut studies = Vec::new();
    for (recorded, path) in record.results.iter().zip(&paths) {
        match load(path) {
            Ok(loaded) => studies.extend(compare(&mut verdict, recorded, loaded)),
            Err(error) => verdict.against.push(format!("{error}")),
        }
    }
    files(&mut verdict, folder, &record, &studies)?;
    if !record.same_program() {
        verdict.remarks.push(format!(
            "the kit was made by {}, this is another version",
            record.program
        ));
    }
    conclude(folder, &verdict, record.files.len())
}

fn read(folder: &Path) -> Result<Provenance> {
    let path = folder.join(PROVENANCE);
    let hint = "give a folder that comagauge paper wrote";
    let text = std::fs::read_to_string(&path)
        .map_err(|e| Error::io("cannot read", &path, &e).remedy(hint))?;
    serde_json::from_str(&text).map_err(|e| {
        Error::input(format!("not the record of a kit: {e}"))
            .in_file(&path)
            .at_line(e.line())
            .remedy(hint)
    })
}

fn paths(record: &Provenance, elsewhere: &[PathBuf]) -> Result<Vec<PathBuf>> {
    if elsewhere.is_empty() {
        let recorded = record.results.iter();
        return Ok(recorded.map(|r| PathBuf::from(&r.origin.result)).collect());
    }
    if elsewhere.len() != record.results.len() {
        return Err(Error::plan(format!(
            "the kit holds {} results, {} were given",
            record.results.len(),
            elsewhere.len()
        ))
        .remedy("give all of them in the same order, or none"));
    }
    Ok(elsewhere.to_vec())
}

/// Compares hashes and numbers; gives the study back for the comparison of files.
fn compare(
    verdict: &mut Verdict,
    recorded: &crate::paper::Recorded,
    loaded: Loaded,
) -> Option<Study> {
    let now = &loaded.study.origin;
    for (old, new) in recorded.origin.inputs.iter().zip(&now.inputs) {
        verdict.inputs += 1;
        if old.sha256 != new.sha256 {
            verdict.against.push(format!(
                "{} has changed: sha256 was {}, is {}",
                new.path, old.sha256, new.sha256
            ));
        }
    }
    if recorded.origin.plan_sha256 != now.plan_sha256 {
        verdict.against.push(format!(
            "plan.resolved.toml beside {} has changed: sha256 was {}, is {}",
            now.result, recorded.origin.plan_sha256, now.plan_sha256
        ));
    }
    let computed: Value = serde_json::from_str(&loaded.computed).ok()?;
    verdict.numbers += count(&computed);
    let differences = drift(&recorded.numbers, &computed);
    let more = differences.len().saturating_sub(MOST_LISTED);
    verdict
        .against
        .extend(differences.into_iter().take(MOST_LISTED));
    if more > 0 {
        verdict.against.push(format!("and {more} more numbers"));
    }
    Some(loaded.study)
}

fn count(value: &Value) -> usize {
    match value {
        Value::Number(_) => 1,
        Value::Array(a) => a.iter().map(count).sum(),
        Value::Object(o) => o.values().map(count).sum(),
        _ => 0,
    }
}

/// The files on disk against the record, and against what the data give now.
fn files(
    verdict: &mut Verdict,
    folder: &Path,
    record: &Provenance,
    studies: &[Study],
) -> Result<()> {
    for file in &record.files {
        let edited = match std::fs::read(folder.join(&file.path)) {
            Ok(bytes) if sha256(&bytes) == file.sha256 => continue,
            Ok(_) => "was edited after the kit was made",
            Err(_) => "is missing",
        };
        let text = format!("{} {edited}", file.path);
        if is_to_edit(&file.path) {
            verdict.remarks.push(format!(
                "{text}: yours to write on, its numbers were not checked"
            ));
        } else {
            verdict.against.push(text);
        }
    }
    if studies.len() == record.results.len() && verdict.against.is_empty() && record.same_program()
    {
        // PDFs hold the same drawing with their objects in any order; their SVG speaks for them.
        for (name, bytes) in kit(studies)?.iter().filter(|f| !f.0.ends_with(".pdf")) {
            let written = record.files.iter().find(|f| f.path == *name);
            if written.is_none_or(|w| w.sha256 != sha256(bytes)) {
                verdict
                    .against
                    .push(format!("{name} does not follow from the data"));
            }
        }
    }
    Ok(())
}

fn conclude(folder: &Path, verdict: &Verdict, files: usize) -> Result<String> {
    let mut remarks = String::new();
    for r in &verdict.remarks {
        remarks.push_str(&format!("  note: {r}\n"));
    }
    let noun = if verdict.inputs == 1 { "file" } else { "files" };
    if verdict.against.is_empty() {
        return Ok(format!(
            "The numbers in {} follow from the data: {} input {noun} unchanged, {} numbers computed again and equal, {files} files checked.\n{remarks}",
            folder.display(),
            verdict.inputs,
            verdict.numbers
        ));
    }
    let list = verdict.against.join("\n  ");
    Err(Error::input(format!(
        "the numbers in {} do not follow from the data any more:\n  {list}{}{}",
        folder.display(),
        if remarks.is_empty() { "" } else { "\n" },
        remarks.trim_end()
    ))
    .remedy("run comagauge measure and comagauge paper again, or restore the files named"))
}
