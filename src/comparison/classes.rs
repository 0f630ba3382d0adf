//! Dynamical classes against each other, and the carbon-chain classes.

use super::entries::{Selection, entries};
use crate::ground::Species;
use crate::ratio::Basis;
use crate::standing::{
    AndersonDarling, Censored, ClassShape, Entry, Known, Mixture, TwoSample, Weighting,
    anderson_darling, mean_membership, one_vote_each, two_sample,
};
use crate::tables::{PopulationRow, Statistic, Tables};

/// The two classes compared.
const CLASSES: (&str, &str) = ("JFC", "OCC");
/// Fewest comets of a class for a test.
const FEWEST: usize = 3;

/// Jupiter-family against Oort-cloud comets.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ClassTest {
    /// Comets of the first class (JFC) and limits among them.
    pub first: (usize, usize),
    /// Comets of the second class (OCC) and limits among them.
    pub second: (usize, usize),
    /// Log-rank test.
    pub log_rank: TwoSample,
    /// Peto–Prentice test, the less sensitive to unlike limits.
    pub peto_prentice: TwoSample,
    /// Anderson–Darling test, without limits only.
    pub anderson: Option<AndersonDarling>,
}

/// Tests the classes on entries with one vote each; `None` where a class has too few comets.
pub fn class_test(known: &[Entry], seed: u64) -> Option<ClassTest> {
    let of = |class: &str| -> Vec<Censored> {
        let these = known.iter().filter(|e| e.class == class);
        these.map(Entry::censored).collect()
    };
    let (a, b) = (of(CLASSES.0), of(CLASSES.1));
    if a.len() < FEWEST || b.len() < FEWEST {
        return None;
    }
    let limits = |s: &[Censored]| s.iter().filter(|e| e.known != Known::Value).count();
    let values = |s: &[Censored]| -> Vec<f64> { s.iter().map(|e| e.value).collect() };
    let anderson = if limits(&a) + limits(&b) == 0 {
        anderson_darling(&[&values(&a), &values(&b)], seed)
    } else {
        None
    };
    Some(ClassTest {
        first: (a.len(), limits(&a)),
        second: (b.len(), limits(&b)),
        log_rank: two_sample(&a, &b, Weighting::LogRank)?,
        peto_prentice: two_sample(&a, &b, Weighting::PetoPrentice)?,
        anderson,
    })
}

/// Carbon-chain class of a C2/CN ratio.
#[derive(Clone, Debug)]
pub struct Membership {
    /// Published boundary, log10 C2/CN; depleted below.
    pub boundary_dex: f64,
    /// Source key of the boundary.
    pub source: String,
    /// Whether the boundary was recalled rather than read.
    pub from_memory: bool,
    /// Probability of being below the boundary given the comet's error alone.
    pub below_boundary: f64,
    /// Classes fitted to the comparison comets, and the probability of the depleted class; only where
    /// there are enough comets and the boundary parts the classes.
    pub fitted: Option<(Mixture, f64)>,
    /// Probability of the depleted class with the classes as published (means, scatters, share), where both
    /// are in the tables.
    pub published: Option<f64>,
}

/// Membership of a C2/CN ratio given as log10 draws; `None` for other ratios or without a
/// published boundary in the tables. Class shapes published with means and scatters start the fit.
pub fn carbon_membership(
    tables: &Tables,
    of: &Species,
    to: &Species,
    log10_draws: &[f64],
) -> Option<Membership> {
    if of.as_str() != "C2" || to.as_str() != "CN" || log10_draws.is_empty() {
        return None;
    }
    let boundary = published(tables, of, to, Statistic::Threshold, "depleted")?;
    let below = log10_draws.iter().filter(|y| **y < boundary.value).count();
    // The published share of depleted comets; equal shares without it.
    let depleted =
        published(tables, of, to, Statistic::Fraction, "restricted").map_or(0.5, |p| p.value);
    let shape = |word: &str| {
        let row = published(tables, of, to, Statistic::Mean, word)?;
        Some(ClassShape {
            mean_dex: row.value,
            sigma_dex: row.sigma?,
            share: if word == "typical" {
                1.0 - depleted
            } else {
                depleted
            },
        })
    };
    let shapes = shape("typical").zip(shape("depleted"));
    let as_published = shapes.and_then(|(high, low)| {
        let m = Mixture {
            high,
            low,
            log_likelihood: f64::NAN,
            comets: 0,
        };
        mean_membership(&m, log10_draws)
    });
    let fitted = shapes.and_then(|(high, low)| {
        let all = entries(tables, of, to, Basis::Production, &Selection::default());
        let sample: Vec<(f64, Known)> = one_vote_each(&all, super::run::RULE_WITHOUT_DISTANCE)
            .iter()
            .map(|e| (e.value.log10(), e.known))
            .collect();
        let mixture = Mixture::fit(&sample, [high, low])?;
        // Two groups on one side of the boundary are not the two classes.
        let parted =
            mixture.low.mean_dex < boundary.value && boundary.value < mixture.high.mean_dex;
        if !parted {
            return None;
        }
        Some((mixture, mean_membership(&mixture, log10_draws)?))
    });
    Some(Membership {
        boundary_dex: boundary.value,
        source: boundary.provenance.source.clone(),
        from_memory: boundary.provenance.how.is_memory(),
        below_boundary: below as f64 / log10_draws.len() as f64,
        fitted,
        published: as_published,
    })
}

fn published<'t>(
    tables: &'t Tables,
    of: &Species,
    to: &Species,
    statistic: Statistic,
    word: &str,
) -> Option<&'t PopulationRow> {
    tables.populations().iter().find(|p| {
        p.statistic == statistic
            && p.log10
            && p.of.as_ref() == Some(of)
            && p.to.as_ref() == Some(to)
            && p.group.contains(word)
    })
}
