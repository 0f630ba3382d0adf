//! Known comets most like this one.

use super::entries::{Selection, entries};
use super::subject::{Subject, SubjectValue, series};
use crate::ratio::Basis;
use crate::standing::{Known, LogRatio, Neighbour, Profile, VoteRule, nearest, one_vote_each};
use crate::tables::Tables;
use std::collections::BTreeMap;

/// Names in the list.
const NAMED: usize = 5;

/// The nearest comets over the ratios of this comet.
#[derive(Clone, Debug, PartialEq)]
pub struct Likeness {
    /// Ratios that entered, for example `CO2/H2O`.
    pub ratios: Vec<String>,
    /// Nearest comets, nearest first.
    pub nearest: Vec<Neighbour>,
    /// This comet's ratios.
    pub this: Profile,
    /// Those of the known comets.
    pub comets: BTreeMap<String, Profile>,
}

/// Finds the comets most like the one described by `subjects` (all of one comet).
pub fn like(tables: &Tables, subjects: &[Subject], selection: &Selection) -> Likeness {
    let mut this = Profile::new();
    let mut comets: BTreeMap<String, Profile> = BTreeMap::new();
    for s in subjects {
        let name = format!("{}/{}", s.of, s.to);
        if this.contains_key(&name) {
            continue;
        }
        let same = |o: &&Subject| o.of == s.of && o.to == s.to && o.basis == s.basis;
        let dates: Vec<&Subject> = subjects.iter().filter(same).collect();
        let Some((value, r_h_au, _)) = series(&dates) else {
            continue;
        };
        let known = match value {
            SubjectValue::Measured { .. } => Known::Value,
            SubjectValue::Upper(_) => Known::Upper,
            SubjectValue::Lower(_) => Known::Lower,
        };
        let (log10, sigma_dex) = (value.main().log10(), value.sigma_dex());
        this.insert(
            name.clone(),
            LogRatio {
                log10,
                sigma_dex,
                known,
            },
        );
        let rule = VoteRule::NearestDistance(r_h_au.unwrap_or(1.0));
        for e in one_vote_each(&rows(tables, s, s.basis, selection), rule) {
            let ratio = LogRatio {
                log10: e.value.log10(),
                sigma_dex: 0.0,
                known: e.known,
            };
            comets
                .entry(e.comet)
                .or_default()
                .insert(name.clone(), ratio);
        }
    }
    let mut found = nearest(&this, &comets);
    found.truncate(NAMED);
    Likeness {
        ratios: this.keys().cloned().collect(),
        nearest: found,
        this,
        comets,
    }
}

fn rows(
    tables: &Tables,
    s: &Subject,
    basis: Basis,
    selection: &Selection,
) -> Vec<crate::standing::Entry> {
    let mut all = entries(tables, &s.of, &s.to, basis, selection);
    all.retain(|e| e.comet != s.label);
    all
}
