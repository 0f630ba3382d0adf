//! Where most of a cloud of points lies: regions of highest density on a grid.

/// Cells along each side.
const CELLS: usize = 56;
/// Standard deviation of the smoothing, cells.
const SMOOTHING_CELLS: f64 = 2.2;
/// Reach of the smoothing, cells.
const REACH: usize = 7;

/// A smoothed two-dimensional histogram over the unit square.
pub(super) struct Density {
    /// Row-major, y slowest; sums to the share of points inside.
    cells: Vec<f64>,
    /// The same before smoothing.
    counted: Vec<f64>,
}

/// Part of a row of cells: ordinate range and abscissa range, 0–1.
pub(super) type Run = ((f64, f64), (f64, f64));

impl Density {
    /// Counts and smooths points given in fractions of the axes; points outside do not count.
    pub(super) fn of(points: impl IntoIterator<Item = (f64, f64)>) -> Self {
        let mut cells = vec![0.0; CELLS * CELLS];
        let mut count = 0_usize;
        for (x, y) in points {
            count += 1;
            if (0.0..1.0).contains(&x) && (0.0..1.0).contains(&y) {
                let (i, j) = ((x * CELLS as f64) as usize, (y * CELLS as f64) as usize);
                cells[j * CELLS + i] += 1.0;
            }
        }
        let size = count.max(1) as f64;
        cells.iter_mut().for_each(|c| *c /= size);
        let across = smoothed(&cells, 1);
        Self {
            cells: smoothed(&across, CELLS),
            counted: cells,
        }
    }

    /// The smoothed density above which this share of all points lies. Smoothing spreads a cloud; the
    /// points themselves are counted, so that the region holds the share it claims.
    pub(super) fn level(&self, share: f64) -> f64 {
        let mut order: Vec<usize> = (0..self.cells.len()).collect();
        order.sort_by(|a, b| self.cells[*b].total_cmp(&self.cells[*a]));
        let mut sum = 0.0;
        for n in order {
            sum += self.counted[n];
            if sum >= share {
                return self.cells[n];
            }
        }
        0.0
    }

    /// The cells at or above a level as runs along the rows.
    pub(super) fn runs(&self, level: f64) -> Vec<Run> {
        let at = |n: usize| n as f64 / CELLS as f64;
        let mut out = Vec::new();
        for j in 0..CELLS {
            let row = &self.cells[j * CELLS..(j + 1) * CELLS];
            let mut i = 0;
            while i < CELLS {
                let start = i;
                while i < CELLS && row[i] >= level && level > 0.0 {
                    i += 1;
                }
                if i > start {
                    out.push(((at(j), at(j + 1)), (at(start), at(i))));
                }
                i += 1;
            }
        }
        out
    }

    /// The outline of a level as straight pieces through the grid of cell centres.
    pub(super) fn outline(&self, level: f64) -> Vec<[(f64, f64); 2]> {
        let value = |i: usize, j: usize| self.cells[j * CELLS + i] - level;
        let place = |i: f64, j: f64| ((i + 0.5) / CELLS as f64, (j + 0.5) / CELLS as f64);
        let mut out = Vec::new();
        for j in 0..CELLS - 1 {
            for i in 0..CELLS - 1 {
                let corners = [(i, j), (i + 1, j), (i + 1, j + 1), (i, j + 1)];
                let mut cuts = Vec::new();
                for k in 0..4 {
                    let (a, b) = (corners[k], corners[(k + 1) % 4]);
                    let (va, vb) = (value(a.0, a.1), value(b.0, b.1));
                    if (va >= 0.0) != (vb >= 0.0) {
                        let f = va / (va - vb);
                        let between = |p: usize, q: usize| p as f64 + f * (q as f64 - p as f64);
                        cuts.push(place(between(a.0, b.0), between(a.1, b.1)));
                    }
                }
                out.extend(cuts.chunks_exact(2).map(|c| [c[0], c[1]]));
            }
        }
        out
    }
}

/// Gaussian smoothing along one direction; `step` is the distance of neighbours in the list. What
/// would fall off the edge stays at the edge.
fn smoothed(cells: &[f64], step: usize) -> Vec<f64> {
    let weight = |d: usize| (-0.5 * (d as f64 / SMOOTHING_CELLS).powi(2)).exp();
    let sum = weight(0) + 2.0 * (1..=REACH).map(weight).sum::<f64>();
    let mut out = vec![0.0; cells.len()];
    for (n, value) in cells.iter().enumerate().filter(|(_, v)| **v > 0.0) {
        let place = (n / step) % CELLS;
        for d in 0..=REACH {
            let share = value * weight(d) / sum;
            let back = place - d.min(place);
            let ahead = (place + d).min(CELLS - 1);
            out[n - (place - back) * step] += share;
            if d > 0 {
                out[n + (ahead - place) * step] += share;
            }
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn mass_is_kept_and_levels_hold_their_share() {
        // A regular cloud, denser towards the middle.
        let points: Vec<(f64, f64)> = (0..40_000)
            .map(|k| {
                let (a, r) = (f64::from(k) * 2.399_963, (f64::from(k) + 0.5) / 40_000.0);
                let r = 0.12 * (-2.0 * (1.0 - r).ln()).sqrt();
                (0.5 + r * a.cos(), 0.5 + r * a.sin())
            })
            .collect();
        let d = Density::of(points.iter().copied());
        assert!((d.cells.iter().sum::<f64>() - 1.0).abs() < 1e-3);
        let level = d.level(0.683);
        let inside = |p: &&(f64, f64)| {
            let runs = d.runs(level);
            let hit = |r: &Run| (r.0.0..r.0.1).contains(&p.1) && (r.1.0..r.1.1).contains(&p.0);
            runs.iter().any(hit)
        };
        let share = points.iter().step_by(40).filter(inside).count() as f64 / 1000.0;
        assert!((share - 0.683).abs() < 0.02, "{share}");
        // The 68.3 % region of a round normal cloud is a circle of 1.515 standard deviations.
        let size = |p: &(f64, f64)| (p.0 - 0.5).hypot(p.1 - 0.5);
        let line = d.outline(level);
        assert!(line.len() > 40);
        assert!(
            line.iter()
                .flatten()
                .all(|p| (size(p) - 0.182).abs() < 0.02)
        );
    }

    #[test]
    fn nothing_gives_nothing() {
        let d = Density::of([]);
        assert!(d.runs(d.level(0.9)).is_empty() && d.outline(d.level(0.9)).is_empty());
    }
}
