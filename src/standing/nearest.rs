//! Known comets most like this one over several ratios at once.
//!
//! Distance over the ratios both have: the root mean square of Δlog10 / s, each term cut at
//! [`MOST_PER_RATIO`] so that one discrepant ratio cannot decide alone, s² = S² + σ², S the robust
//! scatter (1.4826 × median absolute deviation) of that ratio among the comets and σ the error of
//! this comet's ratio. A limit counts only as far as it is violated.

use super::distribution::Known;
use std::collections::BTreeMap;

/// Largest contribution of one ratio, in scatters.
const MOST_PER_RATIO: f64 = 4.0;
/// Least scatter of a ratio, dex; keeps a few like comets from making a ratio decisive.
const LEAST_SCATTER_DEX: f64 = 0.1;

/// One ratio of a comet, log10.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LogRatio {
    /// log10 of the ratio or limit.
    pub log10: f64,
    /// Its error, dex; 0 where not known.
    pub sigma_dex: f64,
    /// Value or limit.
    pub known: Known,
}

/// Ratios of a comet by name.
pub type Profile = BTreeMap<String, LogRatio>;

/// A known comet and how far it is.
#[derive(Clone, Debug, PartialEq)]
pub struct Neighbour {
    /// The comet.
    pub comet: String,
    /// Distance in scatters.
    pub distance: f64,
    /// Ratios both comets have.
    pub shared: usize,
}

/// Robust scatter of each ratio among the comets, dex.
pub fn scatters(comets: &BTreeMap<String, Profile>) -> BTreeMap<String, f64> {
    let mut columns: BTreeMap<String, Vec<f64>> = BTreeMap::new();
    for (name, ratio) in comets.values().flatten() {
        if ratio.known == Known::Value {
            columns.entry(name.clone()).or_default().push(ratio.log10);
        }
    }
    let robust = |values: Vec<f64>| {
        let centre = median(values.clone());
        let off = median(values.iter().map(|v| (v - centre).abs()).collect());
        (1.4826 * off).max(LEAST_SCATTER_DEX)
    };
    columns.into_iter().map(|(k, v)| (k, robust(v))).collect()
}

fn median(mut values: Vec<f64>) -> f64 {
    values.sort_by(f64::total_cmp);
    crate::ratio::quantile(&values, 0.5)
}

/// Known comets by distance. Comets that share all of this comet's ratios come first, then those
/// that share fewer: a small distance over one ratio says little.
pub fn nearest(this: &Profile, comets: &BTreeMap<String, Profile>) -> Vec<Neighbour> {
    let scatter = scatters(comets);
    let mut out: Vec<Neighbour> = comets
        .iter()
        .filter_map(|(comet, profile)| {
            let terms: Vec<f64> = this
                .iter()
                .filter_map(|(name, a)| {
                    let size = *scatter.get(name)?;
                    Some(term(a, profile.get(name)?, size))
                })
                .collect();
            let sum: f64 = terms.iter().map(|t| t * t).sum();
            (!terms.is_empty()).then(|| Neighbour {
                comet: comet.clone(),
                distance: (sum / terms.len() as f64).sqrt(),
                shared: terms.len(),
            })
        })
        .collect();
    out.sort_by(|a, b| {
        let by_distance = a.distance.total_cmp(&b.distance);
        b.shared.cmp(&a.shared).then(by_distance)
    });
    out
}

fn term(a: &LogRatio, b: &LogRatio, scatter_dex: f64) -> f64 {
    let size = scatter_dex.hypot(a.sigma_dex);
    let difference = a.log10 - b.log10;
    // Possible differences a − b given what each is known by.
    let down = a.known == Known::Upper || b.known == Known::Lower;
    let up = a.known == Known::Lower || b.known == Known::Upper;
    let left = match (down, up) {
        (true, true) => 0.0,
        (true, false) => difference.min(0.0),
        (false, true) => difference.max(0.0),
        (false, false) => difference,
    };
    (left.abs() / size).min(MOST_PER_RATIO)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn value(log10: f64) -> LogRatio {
        LogRatio {
            log10,
            sigma_dex: 0.0,
            known: Known::Value,
        }
    }

    fn profile(entries: &[(&str, LogRatio)]) -> Profile {
        entries.iter().map(|(k, v)| ((*k).to_owned(), *v)).collect()
    }

    #[test]
    fn the_twin_is_nearest_and_limits_count_only_when_violated() {
        let this = profile(&[("x", value(-1.0)), ("y", value(-2.0))]);
        let upper = |log10| LogRatio {
            known: Known::Upper,
            ..value(log10)
        };
        let comets: BTreeMap<String, Profile> = [
            ("twin", profile(&[("x", value(-1.0)), ("y", value(-2.0))])),
            ("far", profile(&[("x", value(-0.2)), ("y", value(-3.0))])),
            (
                "allowed",
                profile(&[("x", value(-0.9)), ("y", upper(-1.5))]),
            ),
            (
                "violated",
                profile(&[("x", value(-0.9)), ("y", upper(-4.0))]),
            ),
            ("single", profile(&[("x", value(-1.0))])),
        ]
        .into_iter()
        .map(|(k, v)| (k.to_owned(), v))
        .collect();
        let order: Vec<String> = nearest(&this, &comets)
            .into_iter()
            .map(|n| n.comet)
            .collect();
        assert_eq!(order[..2], ["twin", "allowed"]);
        assert_eq!(order[4], "single");
    }
}
