//! Published statistics of the comparison set, derived again from its rows.

use super::entries::{Selection, entries};
use super::run::RULE_WITHOUT_DISTANCE;
use crate::ground::Species;
use crate::ratio::Basis;
use crate::standing::{Censored, Distribution, Known, one_vote_each};
use crate::tables::{ComparisonRow, DynamicalClass, Kind, PopulationRow, Statistic, Tables};
use std::collections::BTreeMap;

/// Distance inside which water sublimes freely; medians of the compilation are given inside it and
/// at any distance, au (common practice).
const FREE_AU: f64 = 2.5;

/// A published number beside what the rows give.
#[derive(Clone, Debug, PartialEq)]
pub struct Rederived {
    /// What it is.
    pub what: String,
    /// Published number.
    pub published: f64,
    /// Its published error.
    pub sigma: Option<f64>,
    /// Source key.
    pub source: String,
    /// Derived numbers: how, number, comets. Empty when the set holds no rows for it.
    pub found: Vec<(String, f64, usize)>,
}

/// Derives every published median and fraction again for which the set holds rows.
///
/// Medians: of rows compiled in the same source, one vote per comet (median of its detections),
/// inside 2.5 au and at any distance, and the product-limit median with limits. Fractions: CO2 > CO
/// among comets of the family that have both; carbon-chain depletion from all C2/CN rows.
pub fn rederive(tables: &Tables) -> Vec<Rederived> {
    let rows = tables.populations().iter();
    rows.filter_map(|p| {
        let found = match p.statistic {
            Statistic::Median => medians(tables, p),
            Statistic::Fraction => fractions(tables, p),
            _ => return None,
        };
        Some(Rederived {
            what: format!("{}, {}", p.quantity, p.group),
            published: p.value,
            sigma: p.sigma,
            source: p.provenance.source.clone(),
            found,
        })
    })
    .filter(|r| !r.found.is_empty())
    .collect()
}

fn compiled<'t>(
    tables: &'t Tables,
    source: &str,
    of: &Species,
    to: &Species,
) -> Vec<&'t ComparisonRow> {
    let of_source = |r: &&ComparisonRow| {
        r.compiled_in.as_deref() == Some(source) || r.provenance.source == source
    };
    let rows = tables.comparison().iter().filter(of_source);
    rows.filter(|r| r.of == *of && r.to == *to).collect()
}

/// One vote per comet: the median of its rows.
fn per_comet<'t>(rows: impl Iterator<Item = &'t ComparisonRow>) -> BTreeMap<&'t str, f64> {
    let mut all: BTreeMap<&str, Vec<f64>> = BTreeMap::new();
    for row in rows {
        all.entry(&row.comet).or_default().push(row.value);
    }
    all.into_iter()
        .filter_map(|(comet, v)| Some((comet, median(v)?)))
        .collect()
}

fn median(mut values: Vec<f64>) -> Option<f64> {
    values.sort_by(f64::total_cmp);
    (!values.is_empty()).then(|| crate::ratio::quantile(&values, 0.5))
}

fn medians(tables: &Tables, p: &PopulationRow) -> Vec<(String, f64, usize)> {
    let (Some(of), Some(to)) = (&p.of, &p.to) else {
        return Vec::new();
    };
    let rows = compiled(tables, &p.provenance.source, of, to);
    let values = || rows.iter().copied().filter(|r| r.kind == Kind::Value);
    let near = per_comet(values().filter(|r| r.r_h_au.is_some_and(|d| d < FREE_AU)));
    let all = per_comet(values());
    let mut out = Vec::new();
    for (how, comets) in [
        (format!("detections inside {FREE_AU} au"), near),
        ("detections at any distance".to_owned(), all),
    ] {
        let count = comets.len();
        if let Some(m) = median(comets.into_values().collect()) {
            out.push((how, m, count));
        }
    }
    out.extend(with_limits(&rows));
    out
}

/// Product-limit median, limits included: a comet's detections speak before its limits.
fn with_limits(rows: &[&ComparisonRow]) -> Option<(String, f64, usize)> {
    let seen = per_comet(rows.iter().copied().filter(|r| r.kind == Kind::Value));
    let mut sample: Vec<Censored> = seen
        .values()
        .map(|v| Censored {
            value: *v,
            known: Known::Value,
        })
        .collect();
    let mut limits: BTreeMap<&str, f64> = BTreeMap::new();
    for r in rows.iter().filter(|r| r.kind == Kind::Upper) {
        let least = limits.entry(&r.comet).or_insert(r.value);
        *least = least.min(r.value);
    }
    let unseen = limits
        .iter()
        .filter(|(comet, _)| !seen.contains_key(**comet));
    sample.extend(unseen.map(|(_, v)| Censored {
        value: *v,
        known: Known::Upper,
    }));
    let m = Distribution::estimate(&sample)?.quantile(0.5)?;
    Some(("with limits, any distance".to_owned(), m, sample.len()))
}

fn fractions(tables: &Tables, p: &PopulationRow) -> Vec<(String, f64, usize)> {
    let (Some(of), Some(to)) = (&p.of, &p.to) else {
        return Vec::new();
    };
    let family = p.group.contains("Jupiter-family");
    let long = p.group.contains("long-period");
    if of.as_str() == "C2" && to.as_str() == "CN" {
        return depleted(tables, p, family, long).into_iter().collect();
    }
    let water = Species::new("H2O");
    let of_family = |species: &Species| {
        let rows = compiled(tables, &p.provenance.source, species, &water);
        let in_family = |r: &&ComparisonRow| !family || r.class == DynamicalClass::JupiterFamily;
        per_comet(rows.into_iter().filter(in_family))
    };
    let (a, b) = (of_family(of), of_family(to));
    let both: Vec<(f64, f64)> = a
        .iter()
        .filter_map(|(c, v)| Some((*v, *b.get(c)?)))
        .collect();
    let more = both.iter().filter(|(v, w)| v > w).count();
    if both.is_empty() {
        return Vec::new();
    }
    let how = format!("{more} of {}; a limit counts as its value", both.len());
    vec![(how, more as f64 / both.len() as f64, both.len())]
}

/// Share of comets below the published C2/CN boundary, from all rows of the set.
fn depleted(
    tables: &Tables,
    p: &PopulationRow,
    family: bool,
    long: bool,
) -> Option<(String, f64, usize)> {
    let (of, to) = (p.of.as_ref()?, p.to.as_ref()?);
    let boundary = tables.populations().iter().find(|q| {
        q.statistic == Statistic::Threshold
            && q.of.as_ref() == Some(of)
            && q.to.as_ref() == Some(to)
    })?;
    let all = entries(tables, of, to, Basis::Production, &Selection::default());
    let mut comets = one_vote_each(&all, RULE_WITHOUT_DISTANCE);
    comets.retain(|e| (!family || e.class == "JFC") && (!long || e.class == "OCC"));
    let below = comets
        .iter()
        .filter(|e| e.value.log10() < boundary.value)
        .count();
    (!comets.is_empty()).then(|| {
        let how = format!(
            "{below} of {} below {} in this set, which favours unusual comets",
            comets.len(),
            boundary.value
        );
        (how, below as f64 / comets.len() as f64, comets.len())
    })
}
