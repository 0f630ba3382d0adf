//! One comet, one vote: several measurements of a comet are not independent.

use super::distribution::{Censored, Known};

/// One published measurement of a ratio.
#[derive(Clone, Debug)]
pub struct Entry {
    /// The comet.
    pub comet: String,
    /// Dynamical class, for figures.
    pub class: String,
    /// Ratio or limit, linear.
    pub value: f64,
    /// Lower and upper error, if published.
    pub errors: Option<(f64, f64)>,
    /// Value or limit.
    pub known: Known,
    /// Heliocentric distance, au.
    pub heliocentric_au: Option<f64>,
}

impl Entry {
    /// The entry without its errors.
    pub fn censored(&self) -> Censored {
        Censored {
            value: self.value,
            known: self.known,
        }
    }
}

/// Which measurement speaks for a comet.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum VoteRule {
    /// Values before limits, then the heliocentric distance nearest (in log) to this one, au.
    NearestDistance(f64),
}

/// Keeps one entry per comet by the rule, in the order of the comets' first appearance.
pub fn one_vote_each(entries: &[Entry], rule: VoteRule) -> Vec<Entry> {
    let VoteRule::NearestDistance(here_au) = rule;
    let far = |e: &Entry| {
        e.heliocentric_au
            .map_or(f64::INFINITY, |r| (r / here_au).ln().abs())
    };
    let rank = |e: &Entry| (e.known != Known::Value, far(e));
    let mut chosen: Vec<Entry> = Vec::new();
    for entry in entries {
        match chosen.iter_mut().find(|c| c.comet == entry.comet) {
            Some(present) => {
                let (new, old) = (rank(entry), rank(present));
                if !new.0 & old.0 || (new.0 == old.0 && new.1 < old.1) {
                    *present = entry.clone();
                }
            }
            None => chosen.push(entry.clone()),
        }
    }
    chosen
}

#[cfg(test)]
mod tests {
    use super::*;

    fn entry(comet: &str, value: f64, known: Known, r: Option<f64>) -> Entry {
        Entry {
            comet: comet.to_owned(),
            class: String::new(),
            value,
            errors: None,
            known,
            heliocentric_au: r,
        }
    }

    #[test]
    fn values_first_then_the_nearest() {
        let chosen = one_vote_each(
            &[
                entry("a", 0.1, Known::Upper, Some(1.0)),
                entry("a", 0.2, Known::Value, Some(3.0)),
                entry("a", 0.3, Known::Value, Some(1.3)),
                entry("b", 0.4, Known::Upper, None),
            ],
            VoteRule::NearestDistance(1.0),
        );
        assert_eq!(
            chosen.iter().map(|e| e.value).collect::<Vec<_>>(),
            [0.3, 0.4]
        );
    }
}
