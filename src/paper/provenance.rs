//! `provenance.json`: what a kit rests on and what it holds, and whether that is still so.

use super::KitFile;
use super::stamp::{Hashed, Origin, Stamp};
use serde::{Deserialize, Serialize};
use serde_json::Value;
use sha2::{Digest, Sha256};

/// Name of the file.
pub const PROVENANCE: &str = "provenance.json";
/// Files that an author writes on; edits there are said, not blamed.
const TO_EDIT: [&str; 4] = ["draft.tex", "methods.tex", "methods.md", "sources.bib"];
/// Differences below this, relative, come from another machine's arithmetic.
const SAME: f64 = 1e-9;

/// The record of a kit.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct Provenance {
    /// Name and version of the program.
    pub program: String,
    /// The results.
    pub results: Vec<Recorded>,
    /// The files of the kit.
    pub files: Vec<Hashed>,
}

/// One result with its numbers.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct Recorded {
    /// What it rests on.
    #[serde(flatten)]
    pub origin: Origin,
    /// `result.json` as computed when the kit was made.
    pub numbers: Value,
}

/// SHA-256 of bytes, hexadecimal.
pub fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes)
        .iter()
        .map(|b| format!("{b:02x}"))
        .collect()
}

impl Provenance {
    /// Records a kit: its results with their `result.json` texts, and its files.
    pub fn new(results: Vec<(Origin, Value)>, files: &[KitFile]) -> Self {
        Self {
            program: Stamp::PROGRAM.to_owned(),
            results: results
                .into_iter()
                .map(|(origin, numbers)| Recorded { origin, numbers })
                .collect(),
            files: files
                .iter()
                .map(|(name, bytes)| Hashed {
                    path: name.clone(),
                    sha256: sha256(bytes),
                })
                .collect(),
        }
    }

    /// The file's text.
    pub fn json(&self) -> String {
        let text = serde_json::to_string_pretty(self);
        text.expect("invariant: the record has string keys only") + "\n"
    }

    /// Whether the program that made the kit is this one.
    pub fn same_program(&self) -> bool {
        self.program == Stamp::PROGRAM
    }
}

/// Whether a file is the author's to edit.
pub fn is_to_edit(name: &str) -> bool {
    TO_EDIT.contains(&name)
}

/// What differs between two results, in words, ratios first; paths of files do not count.
pub fn drift(before: &Value, now: &Value) -> Vec<String> {
    let mut out = Vec::new();
    walk(before, now, "", &mut out);
    let rank = |text: &String| {
        let part = text.split([' ', ':']).next().unwrap_or_default();
        ["ratios", "species", "bands"]
            .iter()
            .position(|p| *p == part)
            .unwrap_or(3)
    };
    out.sort_by_key(rank);
    out
}

fn walk(before: &Value, now: &Value, place: &str, out: &mut Vec<String>) {
    match (before, now) {
        (Value::Object(a), Value::Object(b)) => {
            for (key, old) in a {
                let here = join(place, key);
                match b.get(key) {
                    // Where a file lies is no property of the result; its hash is checked apart.
                    Some(_) if matches!(here.as_str(), "inputs" | "program") => {}
                    Some(new) => walk(old, new, &here, out),
                    None => out.push(format!("{here} is gone")),
                }
            }
            let fresh = b.keys().filter(|k| !a.contains_key(*k));
            out.extend(fresh.map(|k| format!("{} is new", join(place, k))));
        }
        (Value::Array(a), Value::Array(b)) => {
            if a.len() != b.len() {
                out.push(format!(
                    "{place}: {} entries then, {} now",
                    a.len(),
                    b.len()
                ));
            }
            for (i, (old, new)) in a.iter().zip(b).enumerate() {
                walk(old, new, &format!("{place} {}", title(old, i)), out);
            }
        }
        (Value::Number(a), Value::Number(b)) => {
            let (x, y) = (
                a.as_f64().unwrap_or(f64::NAN),
                b.as_f64().unwrap_or(f64::NAN),
            );
            if x != y && (x - y).abs() > SAME * x.abs().max(y.abs()) {
                out.push(format!("{place} was {a}, is {b}"));
            }
        }
        _ if before != now => out.push(format!("{place} was {before}, is {now}")),
        _ => {}
    }
}

fn join(place: &str, key: &str) -> String {
    if place.is_empty() {
        key.to_owned()
    } else {
        format!("{place} {key}")
    }
}

/// What a list entry is about, for messages: its identifier, or its number.
fn title(entry: &Value, index: usize) -> String {
    let text = |key: &str| entry.get(key).and_then(Value::as_str);
    if let (Some(of), Some(to)) = (text("of"), text("to")) {
        return format!("{of}/{to}");
    }
    let named = ["id", "species", "key"].iter().find_map(|k| text(k));
    named.map_or_else(|| (index + 1).to_string(), str::to_owned)
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    #[test]
    fn differences_are_named() {
        let a = json!({"inputs": [{"path": "a"}], "ratios": [{"of": "CO2", "to": "H2O", "median": 0.1, "low": 2.0}]});
        let mut b = a.clone();
        b["inputs"][0]["path"] = json!("elsewhere");
        b["ratios"][0]["low"] = json!(2.0 + 1e-12);
        assert!(drift(&a, &b).is_empty());
        b["ratios"][0]["median"] = json!(0.2);
        assert_eq!(drift(&a, &b), ["ratios CO2/H2O median was 0.1, is 0.2"]);
        b["ratios"] = json!([]);
        assert_eq!(drift(&a, &b), ["ratios: 1 entries then, 0 now"]);
    }
}
