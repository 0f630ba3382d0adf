//! Labels that stand in rows above what they name, moved apart so that none covers another.

use super::canvas::{Anchor, Canvas, Point, Type};
use super::style::{LABEL_PT, Stroke};
use super::text::{elide, width_pt};

/// Least blank between two labels of one row, pt.
const GAP_PT: f64 = 5.0;
/// Height of a row of level labels with the line sample under it, pt.
const ROW_PT: f64 = 11.5;
/// Height in which leaders bend from the label to the place it names, pt.
const BEND_PT: f64 = 7.0;
/// Blank above the labels, pt.
const TOP_PT: f64 = 4.0;
/// Labels are shortened to this, pt.
const LONGEST_PT: f64 = 80.0;
/// A level row is good enough when no label is moved by more than this, pt.
const GOOD_SHIFT_PT: f64 = 22.0;
/// Smaller type for crowded rows, pt.
const SMALL_PT: f64 = 6.0;

/// A way to set the labels.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Mode {
    rows: usize,
    upright: bool,
    size_pt: f64,
}

const MODES: [Mode; 5] = [
    mode(1, false, LABEL_PT),
    mode(2, false, LABEL_PT),
    mode(1, true, LABEL_PT),
    mode(2, true, LABEL_PT),
    mode(2, true, SMALL_PT),
];

const fn mode(rows: usize, upright: bool, size_pt: f64) -> Mode {
    Mode {
        rows,
        upright,
        size_pt,
    }
}

/// A label that has found its place.
#[derive(Clone, Debug)]
struct Placed {
    /// Index in the caller's list.
    index: usize,
    text: String,
    /// Page abscissa of what it names.
    named_x: f64,
    /// Page abscissa of its middle.
    x: f64,
    row: usize,
}

/// Where the labels go.
#[derive(Clone, Debug)]
pub(super) struct Plan {
    mode: Mode,
    row_pt: f64,
    placed: Vec<Placed>,
    /// How many labels found no room; the last of the caller's list.
    pub unplaced: usize,
    /// Height of rows and bends together, pt; nothing to label needs none.
    pub height_pt: f64,
}

/// Finds places for labels over the given page abscissae, between `left` and `right`.
pub(super) fn plan(named: &[(f64, &str)], left: f64, right: f64) -> Plan {
    let mut count = named.len();
    loop {
        if let Some(plan) = plan_all(&named[..count], left, right) {
            let unplaced = named.len() - count;
            return Plan { unplaced, ..plan };
        }
        count -= 1;
    }
}

fn plan_all(named: &[(f64, &str)], left: f64, right: f64) -> Option<Plan> {
    let mut best: Option<(f64, Plan)> = None;
    for mode in MODES {
        if mode.upright && best.is_some() {
            break;
        }
        let Some(placed) = place(named, mode, left, right) else {
            continue;
        };
        let shift = |p: &Placed| (p.x - p.named_x).abs();
        let worst = placed.iter().map(shift).fold(0.0, f64::max);
        if best.as_ref().is_none_or(|(least, _)| worst < *least) {
            best = Some((worst, finish(placed, mode)));
        }
        if worst <= GOOD_SHIFT_PT {
            break;
        }
    }
    best.map(|(_, plan)| plan)
}

fn finish(placed: Vec<Placed>, mode: Mode) -> Plan {
    let widths = placed
        .iter()
        .map(|p| width_pt(&p.text, mode.size_pt, false));
    let row_pt = if mode.upright {
        widths.fold(0.0, f64::max) + GAP_PT
    } else {
        ROW_PT
    };
    let height_pt = if placed.is_empty() {
        0.0
    } else {
        TOP_PT + mode.rows as f64 * row_pt + BEND_PT
    };
    Plan {
        mode,
        row_pt,
        placed,
        unplaced: 0,
        height_pt,
    }
}

fn place(named: &[(f64, &str)], mode: Mode, left: f64, right: f64) -> Option<Vec<Placed>> {
    let mut order: Vec<usize> = (0..named.len()).collect();
    order.sort_by(|&a, &b| named[a].0.total_cmp(&named[b].0));
    let text = |i: usize| elide(named[i].1.trim(), mode.size_pt, false, LONGEST_PT);
    let half: Vec<f64> = order
        .iter()
        .map(|&i| {
            if mode.upright {
                0.5 * mode.size_pt
            } else {
                0.5 * width_pt(&text(i), mode.size_pt, false)
            }
        })
        .collect();
    let gap = if mode.upright { 1.0 } else { GAP_PT };
    let apart = |i: usize| match mode.rows {
        1 => half[i] + half[i + 1] + gap,
        // In two rows the leaders of the upper one pass between the labels of the lower one.
        _ => half[i].max(half[i + 1]) + gap / 2.0,
    };
    let centres: Vec<f64> = order.iter().map(|&i| named[i].0).collect();
    let places = spread(&centres, &half, &apart, left + 1.0, right - 1.0)?;
    let placed = |(k, &index): (usize, &usize)| Placed {
        index,
        text: text(index),
        named_x: named[index].0,
        x: places[k],
        row: (k + 1) % mode.rows,
    };
    Some(order.iter().enumerate().map(placed).collect())
}

/// Moves sorted `centres` as little as possible (least squares) so that neighbours are `apart(i)`
/// from each other and item `i` with its half width lies between `left` and `right`. Subtracting the
/// least distances turns this into isotonic regression, solved by pooling adjacent violators.
pub(super) fn spread(
    centres: &[f64],
    half: &[f64],
    apart: &dyn Fn(usize) -> f64,
    left: f64,
    right: f64,
) -> Option<Vec<f64>> {
    let mut offset = vec![0.0; centres.len()];
    for i in 1..centres.len() {
        offset[i] = offset[i - 1] + apart(i - 1);
    }
    let (mut lo, mut hi) = (f64::NEG_INFINITY, f64::INFINITY);
    for i in 0..centres.len() {
        lo = lo.max(left + half[i] - offset[i]);
        hi = hi.min(right - half[i] - offset[i]);
    }
    if lo > hi {
        return None;
    }
    let mut pools: Vec<(f64, usize)> = Vec::new();
    for (c, o) in centres.iter().zip(&offset) {
        pools.push((c - o, 1));
        while let [.., (a, n), (b, m)] = pools[..] {
            if a <= b {
                break;
            }
            pools.truncate(pools.len() - 2);
            pools.push(((a * n as f64 + b * m as f64) / (n + m) as f64, n + m));
        }
    }
    let level = pools
        .iter()
        .flat_map(|&(v, n)| std::iter::repeat_n(v.clamp(lo, hi), n));
    Some(level.zip(offset).map(|(v, o)| v + o).collect())
}

impl Plan {
    /// Draws the labels from `top` downwards, each with a leader to (`named_x`, `foot(index)`) in its
    /// line style and, under level labels, a sample of that style.
    pub(super) fn draw(
        &self,
        canvas: &mut Canvas,
        top: f64,
        foot: &dyn Fn(usize) -> f64,
        style: &dyn Fn(usize) -> Option<Stroke>,
    ) {
        let bend_top = top + self.height_pt - BEND_PT;
        for p in &self.placed {
            let row_top = top + TOP_PT + self.row_pt * p.row as f64;
            let row_end = row_top + self.row_pt;
            let under = if self.mode.upright { 1.0 } else { 2.5 };
            let start = (p.x, row_end - under);
            let sample = style(p.index);
            self.label(canvas, p, row_top, sample);
            let leader = match sample {
                Some(s) => Stroke::solid(s.colour, 0.5),
                None => Stroke::solid(super::style::MIDDLE, 0.35),
            };
            let bend_end = bend_top + BEND_PT - 1.0;
            let foot = foot(p.index).max(bend_end);
            let chain: [Point; 4] = [
                start,
                (p.x, bend_top),
                (p.named_x, bend_end),
                (p.named_x, foot),
            ];
            canvas.path(&chain, leader);
        }
    }

    fn label(&self, canvas: &mut Canvas, p: &Placed, row_top: f64, sample: Option<Stroke>) {
        if self.mode.upright {
            let foot = (p.x, row_top + self.row_pt - GAP_PT);
            let how = Type::new(self.mode.size_pt, Anchor::Start).upright();
            canvas.text(&p.text, foot, how);
            return;
        }
        let how = Type::new(self.mode.size_pt, Anchor::Middle);
        canvas.text(&p.text, (p.x, row_top + 4.0), how);
        if let Some(stroke) = sample {
            let half = 0.5 * width_pt(&p.text, self.mode.size_pt, false);
            let y = row_top + ROW_PT - 2.5;
            canvas.path(&[(p.x - half, y), (p.x + half, y)], stroke);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn spreading_keeps_distances_bounds_and_the_mean() {
        let centres = [10.0, 10.0, 10.0, 80.0];
        let half = [5.0; 4];
        let x = spread(&centres, &half, &|_| 10.0, -100.0, 100.0).expect("room");
        assert_eq!(x, [0.0, 10.0, 20.0, 80.0]);
        let x = spread(&centres, &half, &|_| 10.0, 0.0, 100.0).expect("room");
        assert_eq!(x, [5.0, 15.0, 25.0, 80.0]);
        assert!(spread(&centres, &half, &|_| 10.0, 0.0, 39.0).is_none());
        assert_eq!(spread(&[], &[], &|_| 1.0, 0.0, 1.0), Some(vec![]));
    }

    #[test]
    fn crowds_turn_upright_and_then_count_who_is_left_out() {
        let few = [(50.0, "CO₂"), (52.0, "CO"), (54.0, "H₂O")];
        let plan_few = plan(&few, 0.0, 200.0);
        assert!(!plan_few.mode.upright && plan_few.unplaced == 0);
        let crowd: Vec<(f64, &str)> = (0..100).map(|i| (f64::from(i), "C₂ Swan")).collect();
        let plan_crowd = plan(&crowd, 0.0, 200.0);
        assert!(plan_crowd.mode.upright && plan_crowd.unplaced > 0);
        assert_eq!(plan_crowd.placed.len() + plan_crowd.unplaced, 100);
        assert_eq!(plan(&[], 0.0, 10.0).height_pt, 0.0);
    }
}
