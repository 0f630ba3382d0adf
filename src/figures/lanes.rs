//! Comparison comets in lanes: which lane each takes, and where its name stands.

use super::panel::Panel;
use super::standing::{Bounds, ComparisonComet, ComparisonValue, StandingRow};
use super::text::{elide, width_pt};

/// Rows with at most so many comets print their names.
const NAMED: usize = 8;
/// Distance of lanes, pt: without and with names.
const LANE_PT: (f64, f64) = (4.8, 8.2);
/// Most height for all lanes together, pt.
const LANES_PT: f64 = 90.0;
/// Radius of a comet's mark, pt.
pub(super) const MARK_PT: f64 = 1.7;
/// Length of a limit's arrow, pt.
pub(super) const ARROW_PT: f64 = 8.0;
/// Type size of a comet's name, pt.
pub(super) const NAME_TYPE_PT: f64 = 6.5;

/// Comets of a row shared out among lanes.
#[derive(Clone, Debug)]
pub(super) struct Lanes {
    /// The lane of each comet, counted from the top.
    pub of_comet: Vec<usize>,
    /// Distance of the lanes, pt.
    pub pitch_pt: f64,
    /// Height of all lanes, pt.
    pub height_pt: f64,
    /// So many comets that error bars cross marks.
    pub crowded: bool,
}

impl Lanes {
    /// Shares the comets out. Bars keep clear of each other where that takes little room, otherwise
    /// only the marks do.
    pub(super) fn new(data: &StandingRow, strip: &Panel) -> Self {
        let pitch = if named(data) { LANE_PT.1 } else { LANE_PT.0 };
        let (mut of_comet, mut used) = pack(&spans(data, strip, true));
        let crowded = !named(data) && used as f64 * pitch > LANES_PT;
        if crowded {
            (of_comet, used) = pack(&spans(data, strip, false));
        }
        let pitch_pt = pitch.min(LANES_PT / used.max(1) as f64);
        Self {
            of_comet,
            pitch_pt,
            height_pt: pitch_pt * used as f64,
            crowded,
        }
    }
}

/// What each comet covers with its name.
fn spans(data: &StandingRow, strip: &Panel, with_bar: bool) -> Vec<(f64, f64)> {
    let span = |c: &ComparisonComet| {
        let (low, high) = extent(strip, c, with_bar);
        if !named(data) {
            return (low, high);
        }
        let (from, name) = name_place(strip, c);
        let to = from + width_pt(&name, NAME_TYPE_PT, false);
        (low.min(from), high.max(to))
    };
    data.comets.iter().map(span).collect()
}

/// Whether the comets of a row are few enough to be named.
pub(super) fn named(data: &StandingRow) -> bool {
    data.comets.len() <= NAMED
}

/// Ends of a bar on the page; an end that is not a number stays at the mark.
pub(super) fn ends(strip: &Panel, bar: Bounds, x: f64) -> (f64, f64) {
    let place = |v: f64| if v.is_nan() { x } else { strip.px_inside(v) };
    (place(bar.low).min(x), place(bar.high).max(x))
}

/// Where a comet's name starts, right of its bar or left of it where there is more room, and as much
/// of the name as fits.
pub(super) fn name_place(strip: &Panel, comet: &ComparisonComet) -> (f64, String) {
    let (low, high) = extent(strip, comet, true);
    let (before, after) = (
        low - 2.0 - strip.left - 2.0,
        strip.right() - 2.0 - high - 2.0,
    );
    let whole = width_pt(comet.name.trim(), NAME_TYPE_PT, false);
    let room = if whole <= after {
        after
    } else {
        before.max(after)
    };
    let name = elide(comet.name.trim(), NAME_TYPE_PT, false, room);
    if whole <= after || after >= before {
        return (high + 2.0, name);
    }
    (low - 2.0 - width_pt(&name, NAME_TYPE_PT, false), name)
}

/// What a comet covers along its lane, pt.
fn extent(strip: &Panel, comet: &ComparisonComet, with_bar: bool) -> (f64, f64) {
    let x = strip.px_inside(comet.value.main());
    let r = 1.4 * MARK_PT;
    match comet.value {
        ComparisonValue::Measured { bar, .. } if with_bar => {
            let (a, b) = ends(strip, bar, x);
            (a.min(x - r), b.max(x + r))
        }
        ComparisonValue::Measured { .. } => (x - r, x + r),
        ComparisonValue::UpperLimit(_) => (x - ARROW_PT, x + r),
        ComparisonValue::LowerLimit(_) => (x - r, x + ARROW_PT),
    }
}

/// Puts intervals into as few lanes as possible so that none touch.
fn pack(spans: &[(f64, f64)]) -> (Vec<usize>, usize) {
    let mut order: Vec<usize> = (0..spans.len()).collect();
    order.sort_by(|&a, &b| spans[a].0.total_cmp(&spans[b].0));
    let mut taken_to: Vec<f64> = Vec::new();
    let mut lanes = vec![0; spans.len()];
    for i in order {
        let free = taken_to.iter().position(|&to| to + 1.0 < spans[i].0);
        let lane = free.unwrap_or_else(|| {
            taken_to.push(0.0);
            taken_to.len() - 1
        });
        taken_to[lane] = spans[i].1;
        lanes[i] = lane;
    }
    (lanes, taken_to.len())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn intervals_share_lanes_only_when_apart() {
        let (lanes, used) = pack(&[(0.0, 10.0), (5.0, 8.0), (12.0, 20.0), (30.0, 31.0)]);
        assert_eq!((lanes, used), (vec![0, 1, 0, 0], 2));
        assert_eq!(pack(&[]), (vec![], 0));
    }
}
