//! Ratios out of a `result.json`.

use crate::comparison::{Subject, SubjectValue};
use crate::ground::{Error, Result, Species};
use crate::ratio::Basis;
use serde::Deserialize;
use std::path::Path;

#[derive(Deserialize)]
struct Document {
    comet: String,
    date: Option<String>,
    geometry: Geometry,
    ratios: Vec<Ratio>,
}

#[derive(Deserialize)]
struct Geometry {
    heliocentric_au: f64,
}

#[derive(Deserialize)]
struct Ratio {
    of: String,
    to: String,
    basis: Basis,
    kind: String,
    median: Option<f64>,
    low68: Option<f64>,
    high68: Option<f64>,
    limit: Option<f64>,
}

/// Ratios with a value or a limit, in the order of the file; unconstrained ones say nothing.
///
/// # Errors
/// Unreadable file; not a result of `measure`.
pub(super) fn read_result(path: &Path) -> Result<Vec<Subject>> {
    let text = std::fs::read_to_string(path).map_err(|e| Error::io("cannot read", path, &e))?;
    let document: Document = serde_json::from_str(&text).map_err(|e| {
        Error::input(format!("not a result of comagauge measure: {e}"))
            .in_file(path)
            .at_line(e.line())
            .remedy("give result.json files, or one number with --of and --to")
    })?;
    let positive = |v: Option<f64>| v.filter(|v| *v > 0.0 && v.is_finite());
    let subject = |r: &Ratio| {
        let value = match r.kind.as_str() {
            "value" => SubjectValue::Measured {
                median: positive(r.median)?,
                low: r.low68?,
                high: positive(r.high68)?,
            },
            "upper" => SubjectValue::Upper(positive(r.limit)?),
            "lower" => SubjectValue::Lower(positive(r.limit)?),
            _ => return None,
        };
        Some(Subject {
            label: document.comet.clone(),
            date: document.date.clone().unwrap_or_default(),
            of: Species::new(&r.of),
            to: Species::new(&r.to),
            basis: r.basis,
            r_h_au: Some(document.geometry.heliocentric_au),
            value,
        })
    };
    Ok(document.ratios.iter().filter_map(subject).collect())
}
