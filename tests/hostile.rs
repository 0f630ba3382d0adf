//! Hostile inputs: every folder of `tests/cases` holds a plan, a spectrum and what must be said.
//!
//! `expected` begins with `exit CODE`; each further line must appear in the message. Nothing may be
//! written and nothing may panic.

use std::collections::BTreeSet;
use std::path::Path;
use std::process::Command;

fn names(folder: &Path) -> BTreeSet<String> {
    std::fs::read_dir(folder)
        .unwrap()
        .map(|e| e.unwrap().file_name().into_string().unwrap())
        .collect()
}

fn replay(case: &Path) -> Result<(), String> {
    let dir = tempfile::tempdir().unwrap();
    for name in names(case) {
        std::fs::copy(case.join(&name), dir.path().join(&name)).unwrap();
    }
    let before = names(dir.path());
    let done = Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .args(["measure", "plan.toml"])
        .current_dir(dir.path())
        .output()
        .unwrap();
    let said = String::from_utf8_lossy(&done.stderr).into_owned();
    let expected = std::fs::read_to_string(case.join("expected")).unwrap();
    let mut lines = expected.lines();
    let code = lines
        .next()
        .and_then(|l| l.strip_prefix("exit "))
        .unwrap()
        .parse()
        .ok();
    if done.status.code() != code {
        return Err(format!(
            "exit {:?}, not {code:?}: {said}",
            done.status.code()
        ));
    }
    if said.contains("panicked") || !said.starts_with("error: ") || !done.stdout.is_empty() {
        return Err(format!("not a clear error: {said}"));
    }
    for wanted in lines.filter(|l| !l.is_empty()) {
        if !said.contains(wanted) {
            return Err(format!("{wanted:?} is not said: {said}"));
        }
    }
    if names(dir.path()) != before {
        return Err(format!("files appeared: {:?}", names(dir.path())));
    }
    if std::env::var_os("SHOW").is_some() {
        println!("== {}\n{said}", case.file_name().unwrap().to_string_lossy());
    }
    Ok(())
}

#[test]
fn every_case_ends_in_a_clear_error() {
    let cases = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases");
    let mut failures = Vec::new();
    let all = names(&cases);
    for name in &all {
        if let Err(why) = replay(&cases.join(name)) {
            failures.push(format!("{name}: {why}"));
        }
    }
    assert!(failures.is_empty(), "{}", failures.join("\n"));
    assert!(all.len() >= 30);
}
