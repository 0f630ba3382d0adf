//! The ratios of a kit among known comets: one comparison per ratio, all dates of a comet together.

use super::study::Study;
use crate::comparison::{RatioComparison, Selection, Subject, compare};
use crate::tables::Tables;

/// Seed of the draws behind comparisons, as in `compare`.
const SEED: u64 = 1;

/// Comparisons of every ratio of every comet that has published counterparts.
pub(super) fn places(studies: &[Study]) -> Vec<RatioComparison> {
    let Some(tables) = studies.first().map(|s| &s.tables) else {
        return Vec::new();
    };
    let subjects: Vec<Subject> = studies.iter().flat_map(Study::subjects).collect();
    let mut out: Vec<RatioComparison> = Vec::new();
    for s in &subjects {
        let known = out
            .iter()
            .any(|c| c.label == s.label && c.of == s.of && c.to == s.to && c.basis == s.basis);
        if !known && let Some(found) = place(tables, &subjects, s) {
            out.push(found);
        }
    }
    // Comets in the order of their results, the ratios of one together.
    let order = |c: &RatioComparison| studies.iter().position(|s| s.settings.label == c.label);
    out.sort_by_key(order);
    out
}

fn place(tables: &Tables, all: &[Subject], s: &Subject) -> Option<RatioComparison> {
    let same =
        |o: &&Subject| o.label == s.label && o.of == s.of && o.to == s.to && o.basis == s.basis;
    let dates: Vec<Subject> = all.iter().filter(same).cloned().collect();
    // A refusal means that nothing published is left to compare with.
    compare(tables, &dates, &Selection::default(), SEED).ok()
}
