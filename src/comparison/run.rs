//! One ratio of one comet against the published ones.

use super::classes::{ClassTest, Membership, carbon_membership, class_test};
use super::entries::{Selection, entries};
use super::subject::{Subject, SubjectValue, series};
use crate::ground::{Caveat, Error, Result, Species};
use crate::ratio::Basis;
use crate::standing::{
    BandStep, Censored, Entry, Estimated, Known, Standing, Tail, Trend, TrendPoint, VoteRule,
    fit_trend, one_vote_each, place, tail,
};
use crate::tables::{Statistic, Tables};

/// Below this number of comets the standing is doubtful.
const THIN: usize = 10;
/// Distance nearest to which a comet's rows speak when this comet's distance is not known, au.
const NO_DISTANCE_AU: f64 = 1.0;
/// The vote rule then.
pub(super) const RULE_WITHOUT_DISTANCE: VoteRule = VoteRule::NearestDistance(NO_DISTANCE_AU);
/// Scatter between dates, in mean errors of a date, from which a series is called variable.
const VARIABLE: f64 = 1.0;
/// Quantity of the freezing distance in the tables.
const FREEZING: &str = "water-freezing distance (au)";

/// Dependence on heliocentric distance.
#[derive(Clone, Debug)]
pub struct DistanceTrend {
    /// The fitted line, where there are enough values.
    pub trend: Option<Trend>,
    /// This comet's distance from the line, in standard deviations (intrinsic scatter, own error and
    /// error of the line together).
    pub off_sigma: Option<f64>,
    /// Distances within which water stops subliming freely, au, where the denominator is water.
    pub freezing_au: Option<(f64, f64)>,
}

/// A ratio among known comets.
#[derive(Clone, Debug)]
pub struct RatioComparison {
    /// The comet.
    pub label: String,
    /// Numerator.
    pub of: Species,
    /// Denominator.
    pub to: Species,
    /// Production rates or columns.
    pub basis: Basis,
    /// Dates of the series, as given.
    pub dates: Vec<Subject>,
    /// The value that stands for the comet.
    pub value: SubjectValue,
    /// Its distance, au.
    pub r_h_au: Option<f64>,
    /// Known comets, one vote each.
    pub known: Vec<Entry>,
    /// Selected rows before voting, for the figure against distance.
    pub rows: Vec<Entry>,
    /// Distribution of the known comets with its band; empty when no entry is a value.
    pub band: Vec<BandStep>,
    /// Median of the known comets, where reached.
    pub population_median: Option<f64>,
    /// Place of a measured value.
    pub standing: Option<Standing>,
    /// The place without the selection, when there is one.
    pub without_selection: Option<Standing>,
    /// Comets above the value or limit.
    pub tail: Tail,
    /// Jupiter-family against Oort-cloud comets.
    pub classes: Option<ClassTest>,
    /// Dependence on distance.
    pub distance: DistanceTrend,
    /// Carbon-chain class, for C2/CN.
    pub carbon: Option<Membership>,
    /// Doubts.
    pub caveats: Vec<Caveat>,
}

/// Compares the dates of one ratio of one comet; rows of the comet itself do not take part.
///
/// # Errors
/// No date; no published measurement of the ratio left by the selection.
pub fn compare(
    tables: &Tables,
    dates: &[Subject],
    selection: &Selection,
    seed: u64,
) -> Result<RatioComparison> {
    let views: Vec<&Subject> = dates.iter().collect();
    let (Some(first), Some((value, r_h_au, scatter))) = (dates.first(), series(&views)) else {
        return Err(Error::plan("nothing to compare"));
    };
    let others = |selection: &Selection| {
        let mut all = entries(tables, &first.of, &first.to, first.basis, selection);
        all.retain(|e| e.comet != first.label);
        all
    };
    let rows = others(selection);
    if rows.is_empty() {
        return Err(nothing_known(tables, first, selection));
    }
    let rule = r_h_au.map_or(RULE_WITHOUT_DISTANCE, VoteRule::NearestDistance);
    let known = one_vote_each(&rows, rule);
    let sample: Vec<Censored> = known.iter().map(Entry::censored).collect();
    let estimated = Estimated::of(&sample);
    let log10_draws = value.log10_draws(seed);
    let standing = estimated.as_ref().and_then(|e| stand(e, &value, seed));
    let without_selection = (!selection.is_all())
        .then(|| {
            let all = one_vote_each(&others(&Selection::default()), rule);
            let sample: Vec<Censored> = all.iter().map(Entry::censored).collect();
            stand(&Estimated::of(&sample)?, &value, seed)
        })
        .flatten();
    let mut out = RatioComparison {
        label: first.label.clone(),
        of: first.of.clone(),
        to: first.to.clone(),
        basis: first.basis,
        dates: dates.to_vec(),
        r_h_au,
        tail: tail(&sample, value.main()),
        classes: class_test(&known, seed),
        distance: distance(tables, first, &rows, &value, r_h_au),
        carbon: carbon_membership(tables, &first.of, &first.to, &log10_draws),
        band: estimated.as_ref().map_or_else(Vec::new, Estimated::band),
        population_median: estimated
            .as_ref()
            .and_then(|e| e.distribution().quantile(0.5)),
        value,
        known,
        rows,
        standing,
        without_selection,
        caveats: Vec::new(),
    };
    out.caveats = caveats(&out, scatter);
    Ok(out)
}

fn stand(estimated: &Estimated, value: &SubjectValue, seed: u64) -> Option<Standing> {
    value.log10()?;
    let draws: Vec<f64> = value
        .log10_draws(seed)
        .into_iter()
        .map(|y| 10f64.powf(y))
        .collect();
    Some(place(estimated, value.main(), &draws, seed))
}

fn nothing_known(tables: &Tables, subject: &Subject, selection: &Selection) -> Error {
    let mut known: Vec<String> = tables
        .comparison()
        .iter()
        .map(|r| format!("{}/{}", r.of, r.to))
        .collect();
    known.sort();
    known.dedup();
    let basis = match subject.basis {
        Basis::Production => "production",
        Basis::Column => "column",
    };
    let error = Error::plan(format!(
        "no published {}/{} ({basis} basis){} to compare with",
        subject.of,
        subject.to,
        if selection.is_all() {
            ""
        } else {
            " in the selection"
        }
    ));
    if selection.is_all() {
        error.remedy(format!(
            "ratios in the comparison set: {}",
            known.join(", ")
        ))
    } else {
        error.remedy("widen --class, --rh or --method")
    }
}

fn distance(
    tables: &Tables,
    subject: &Subject,
    rows: &[Entry],
    value: &SubjectValue,
    r_h_au: Option<f64>,
) -> DistanceTrend {
    // One comet, one vote at its own best row; rows without distance cannot take part.
    let placed: Vec<Entry> = rows
        .iter()
        .filter(|e| e.heliocentric_au.is_some())
        .cloned()
        .collect();
    let points: Vec<TrendPoint> = one_vote_each(&placed, RULE_WITHOUT_DISTANCE)
        .iter()
        .filter_map(|e| {
            Some(TrendPoint {
                x: e.heliocentric_au?.log10(),
                y: e.value.log10(),
                sigma_dex: error_dex(e),
                known: e.known,
            })
        })
        .collect();
    let trend = fit_trend(&points).ok();
    let off_sigma = trend.zip(r_h_au).and_then(|(t, r)| {
        let (centre, ..) = value.log10()?;
        let x = r.log10();
        let size = t.scatter.hypot(value.sigma_dex()).hypot(t.sigma_at(x));
        (size > 0.0).then(|| (centre - t.at(x)) / size)
    });
    DistanceTrend {
        trend,
        off_sigma,
        freezing_au: (subject.to.as_str() == "H2O")
            .then(|| freezing(tables))
            .flatten(),
    }
}

/// Mean of the published errors, dex.
fn error_dex(entry: &Entry) -> f64 {
    let (Some((minus, plus)), Known::Value) = (entry.errors, entry.known) else {
        return 0.0;
    };
    0.5 * (minus + plus) / entry.value / std::f64::consts::LN_10
}

fn freezing(tables: &Tables) -> Option<(f64, f64)> {
    let row = |statistic| {
        let mut rows = tables.populations().iter();
        rows.find(|p| p.statistic == statistic && p.quantity == FREEZING)
            .map(|p| p.value)
    };
    row(Statistic::RangeLow).zip(row(Statistic::RangeHigh))
}

fn caveats(c: &RatioComparison, scatter_dex: f64) -> Vec<Caveat> {
    let mut out = Vec::new();
    let name = format!("{}/{}", c.of, c.to);
    let other = |code, text| Caveat::Other { code, text };
    if c.known.len() < THIN {
        out.push(Caveat::ThinComparison {
            ratio: name.clone(),
            comets: c.known.len(),
        });
    }
    if let (Some(with), Some(without)) = (c.standing, c.without_selection) {
        let error = 0.5 * (with.percentile_high - with.percentile_low);
        if (with.percentile - without.percentile).abs() > error {
            out.push(other(
                "selection-decides",
                format!(
                    "{name}: the selection decides the answer: percentile {:.0} of {} comets with it, {:.0} of {} without it",
                    with.percentile, with.comets, without.percentile, without.comets
                ),
            ));
        }
    }
    if let (Some((near, far)), Some(r)) = (c.distance.freezing_au, c.r_h_au)
        && r > near
    {
        out.push(other(
            "water-freezes",
            format!(
                "{name}: at {r:.2} au water no longer sublimes freely (beyond about {near}–{far} au, common practice); the ratio is high for that reason alone, compare within --rh"
            ),
        ));
    }
    let sigmas: Vec<f64> = c.dates.iter().map(|d| d.value.sigma_dex()).collect();
    let typical = sigmas.iter().sum::<f64>() / sigmas.len().max(1) as f64;
    if scatter_dex > VARIABLE * typical && scatter_dex > 0.0 {
        out.push(other(
            "series-varies",
            format!(
                "{name}: the dates differ by more than their errors (scatter {scatter_dex:.2} dex); the mean hides this"
            ),
        ));
    }
    out
}
