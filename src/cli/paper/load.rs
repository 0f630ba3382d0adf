//! A result with everything behind it, computed again from the plan and the spectra beside it.

use super::super::measure::{hash, load_tables, read_spectra};
use crate::analysis::analyse;
use crate::ground::{Error, Result};
use crate::paper::{Hashed, Origin, Study, drift};
use crate::plan::{PlanFile, check, read_plan};
use crate::report::{self, Input};
use serde::Deserialize;
use serde_json::Value;
use std::path::{Path, PathBuf};

/// Name of the plan that `measure` writes beside `result.json`.
const PLAN: &str = "plan.resolved.toml";
/// Most differences that a message lists.
const MOST_LISTED: usize = 8;

/// What is needed of a `result.json` before everything is computed again.
#[derive(Deserialize)]
struct Recorded {
    program: String,
    inputs: Vec<Hashed>,
}

/// A study together with what its `result.json` says.
pub(super) struct Loaded {
    pub study: Study,
    /// The text of `result.json` on disk.
    pub recorded: String,
    /// The text that the data give now.
    pub computed: String,
    /// Program that made the file on disk.
    pub program: String,
    /// Inputs whose bytes differ from those of the result.
    pub changed: Vec<String>,
}

/// Reads a result, and computes it again.
///
/// # Errors
/// The file is no result; its plan or a spectrum is missing; the analysis refuses.
pub(super) fn load(path: &Path) -> Result<Loaded> {
    let recorded = std::fs::read_to_string(path).map_err(|e| Error::io("cannot read", path, &e))?;
    let head = head(path, &recorded)?;
    let folder = path.parent().unwrap_or(Path::new(""));
    let plan_path = folder.join(PLAN);
    if !plan_path.is_file() {
        return Err(Error::input(format!(
            "the plan behind this result is missing: {}",
            plan_path.display()
        ))
        .in_file(path)
        .remedy(format!(
            "keep {PLAN} beside result.json, or run comagauge measure again"
        )));
    }
    let plan_sha256 = hash(&plan_path)?.sha256;
    let mut file = read_plan(&plan_path)?;
    find_spectra(&mut file, folder)?;
    let tables = load_tables(&file)?;
    let mut checked = check(&file, &tables)?;
    let inputs: Vec<Input> = checked
        .files
        .iter()
        .map(|(path, _)| path)
        .chain(&checked.curves)
        .map(|path| hash(path))
        .collect::<Result<Vec<_>>>()?;
    let changed = changed(&head.inputs, &inputs);
    let (mut spectra, understood) = read_spectra(&checked.files)?;
    checked.settle(&file, &understood, &mut spectra)?;
    let settings = checked.settings;
    let analysis = analyse(&spectra, &settings)?;
    let computed = report::result_json(&analysis, &settings, &inputs);
    let origin = Origin {
        result: absolute(path),
        plan_sha256,
        inputs: inputs.iter().map(Hashed::from).collect(),
        seed: settings.draws.seed,
        draws: settings.draws.count,
    };
    Ok(Loaded {
        study: Study {
            analysis,
            settings,
            tables,
            origin,
        },
        recorded,
        computed,
        program: head.program,
        changed,
    })
}

fn head(path: &Path, text: &str) -> Result<Recorded> {
    let foreign = |why: String, line: Option<usize>| {
        let error = Error::input(format!("not a result of comagauge measure: {why}"))
            .in_file(path)
            .remedy("give the file result.json of a folder that comagauge measure wrote");
        match line {
            Some(line) => error.at_line(line),
            None => error,
        }
    };
    let head: Recorded =
        serde_json::from_str(text).map_err(|e| foreign(e.to_string(), Some(e.line())))?;
    if !head.program.starts_with("comagauge ") {
        return Err(foreign(
            format!("it was written by {:?}", head.program),
            None,
        ));
    }
    Ok(head)
}

/// Spectra that are no longer where the plan says are looked for beside the result, so that a folder
/// can be handed on together with its spectra; their hashes decide whether they are the same.
fn find_spectra(file: &mut PlanFile, folder: &Path) -> Result<()> {
    let base = file.folder().to_owned();
    for spectrum in &mut file.plan.spectrum {
        let stated = base.join(&spectrum.file);
        if stated.exists() {
            continue;
        }
        let name = stated.file_name().map(PathBuf::from).unwrap_or_default();
        let nearby = [folder.join(&name), folder.join("..").join(&name)];
        match nearby.iter().find(|p| p.is_file()) {
            Some(found) => spectrum.file = absolute(found),
            None => {
                return Err(Error::input(format!(
                    "the spectrum {} is gone, and there is no {} beside the result",
                    stated.display(),
                    name.display()
                ))
                .remedy("put the spectrum back, or a copy of it beside result.json"));
            }
        }
    }
    Ok(())
}

fn absolute(path: &Path) -> String {
    let absolute = std::path::absolute(path).unwrap_or_else(|_| path.to_owned());
    absolute.to_string_lossy().into_owned()
}

fn changed(recorded: &[Hashed], now: &[Input]) -> Vec<String> {
    let mut out: Vec<String> = recorded
        .iter()
        .zip(now)
        .filter(|(old, new)| old.sha256 != new.sha256)
        .map(|(old, new)| format!("{}: sha256 was {}, is {}", new.path, old.sha256, new.sha256))
        .collect();
    if recorded.len() != now.len() {
        out.push(format!(
            "the result names {} spectra, its plan {}",
            recorded.len(),
            now.len()
        ));
    }
    out
}

/// The study of a result for a kit with its numbers, refused when the data no longer give the result.
///
/// # Errors
/// As [`load`], and numbers of the result that no longer follow from the data.
pub(super) fn current(path: &Path) -> Result<(Study, Value)> {
    let loaded = load(path)?;
    let parse = |text: &str| {
        serde_json::from_str::<Value>(text).map_err(|e| {
            Error::input(format!("not JSON: {e}"))
                .in_file(path)
                .at_line(e.line())
        })
    };
    let computed = parse(&loaded.computed)?;
    let mut differences = loaded.changed;
    differences.extend(drift(&parse(&loaded.recorded)?, &computed));
    if differences.is_empty() {
        return Ok((loaded.study, computed));
    }
    let more = differences.len().saturating_sub(MOST_LISTED);
    differences.truncate(MOST_LISTED);
    if more > 0 {
        differences.push(format!("and {more} more"));
    }
    let this = format!("comagauge {}", env!("CARGO_PKG_VERSION"));
    let by = if loaded.program == this {
        String::new()
    } else {
        format!(" (made by {}; this is {this})", loaded.program)
    };
    Err(Error::input(format!(
        "the plan and spectra no longer give this result{by}:\n  {}",
        differences.join("\n  ")
    ))
    .in_file(path)
    .remedy("run comagauge measure again, then comagauge paper"))
}
