//! Distribution of a quantity known by values and limits.
//!
//! With values and upper limits only this is the Kaplan & Meier (1958) product-limit estimator on
//! the reversed axis, P(X ≤ v) = Π_{v_j > v} (1 − d_j/n_j), d_j values at v_j and n_j values and
//! limits at or below v_j; an upper limit at the same place as a value counts as below it, a lower
//! limit as above it. With lower limits too it is the self-consistent estimator of Turnbull 1974 (J. Am. Stat. Assoc. 69, 169),
//! found by iteration and equal to the product limit when there are no lower limits.

/// How an entry is known.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Known {
    /// A value.
    Value,
    /// An upper limit: the truth is at or below.
    Upper,
    /// A lower limit: the truth is at or above.
    Lower,
}

/// One entry of a censored sample.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Censored {
    /// Value or limit.
    pub value: f64,
    /// Which of them.
    pub known: Known,
}

/// A step function P(X ≤ v).
#[derive(Clone, Debug)]
pub struct Distribution {
    /// Places of the steps, increasing: the distinct values.
    points: Vec<f64>,
    /// P(X ≤ point) for each.
    at_or_below: Vec<f64>,
    /// Probability below the lowest value, left there by upper limits under it.
    below_all: f64,
    entries: usize,
}

const MOST_ROUNDS: usize = 20_000;

impl Distribution {
    /// Estimates the distribution; `None` when no entry is a value.
    pub fn estimate(sample: &[Censored]) -> Option<Self> {
        let mut points: Vec<f64> = sample
            .iter()
            .filter(|e| e.known == Known::Value)
            .map(|e| e.value)
            .collect();
        points.sort_by(f64::total_cmp);
        points.dedup();
        if points.is_empty() {
            return None;
        }
        if sample.iter().any(|e| e.known == Known::Lower) {
            Some(self_consistent(sample, points))
        } else {
            Some(product_limit(sample, points))
        }
    }

    /// P(X ≤ v).
    pub fn at_or_below(&self, v: f64) -> f64 {
        let i = self.points.partition_point(|p| *p <= v);
        if i == 0 {
            self.below_all
        } else {
            self.at_or_below[i - 1]
        }
    }

    /// P(X < v).
    pub fn below(&self, v: f64) -> f64 {
        let i = self.points.partition_point(|p| *p < v);
        if i == 0 {
            self.below_all
        } else {
            self.at_or_below[i - 1]
        }
    }

    /// Smallest value v with P(X ≤ v) ≥ p; `None` when p is not reached.
    pub fn quantile(&self, p: f64) -> Option<f64> {
        self.at_or_below
            .iter()
            .position(|q| *q >= p - 1e-12)
            .map(|i| self.points[i])
    }

    /// Number of entries, values and limits.
    pub fn entries(&self) -> usize {
        self.entries
    }

    /// The steps: (value, P(X ≤ value)).
    pub fn steps(&self) -> impl Iterator<Item = (f64, f64)> + '_ {
        self.points
            .iter()
            .copied()
            .zip(self.at_or_below.iter().copied())
    }
}

fn product_limit(sample: &[Censored], points: Vec<f64>) -> Distribution {
    let mut at_or_below = vec![1.0; points.len()];
    let mut running = 1.0;
    for i in (0..points.len()).rev() {
        at_or_below[i] = running;
        let here = |e: &&Censored| e.known == Known::Value && e.value == points[i];
        let values = sample.iter().filter(here).count() as f64;
        let at_risk = sample.iter().filter(|e| e.value <= points[i]).count() as f64;
        running *= 1.0 - values / at_risk;
    }
    Distribution {
        points,
        at_or_below,
        below_all: running,
        entries: sample.len(),
    }
}

fn self_consistent(sample: &[Censored], points: Vec<f64>) -> Distribution {
    // One extra cell below all values and one above take what limits beyond the values force there.
    let cells = points.len() + 2;
    let allowed: Vec<(usize, usize)> = sample
        .iter()
        .map(|e| match e.known {
            Known::Value => {
                let i = 1 + points.partition_point(|p| *p < e.value);
                (i, i + 1)
            }
            Known::Upper => (0, 1 + points.partition_point(|p| *p < e.value)),
            Known::Lower => (1 + points.partition_point(|p| *p <= e.value), cells),
        })
        .collect();
    let mut mass = vec![1.0 / cells as f64; cells];
    for _ in 0..MOST_ROUNDS {
        let mut next = vec![0.0; cells];
        for (low, high) in &allowed {
            let total: f64 = mass[*low..*high].iter().sum();
            for i in *low..*high {
                next[i] += mass[i] / total / sample.len() as f64;
            }
        }
        let moved: f64 = next.iter().zip(&mass).map(|(a, b)| (a - b).abs()).sum();
        mass = next;
        if moved < 1e-13 {
            break;
        }
    }
    let mut sum = mass[0];
    let at_or_below = mass[1..=points.len()]
        .iter()
        .map(|m| {
            sum += m;
            sum
        })
        .collect();
    Distribution {
        points,
        at_or_below,
        below_all: mass[0],
        entries: sample.len(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn values(v: &[f64]) -> Vec<Censored> {
        v.iter()
            .map(|v| Censored {
                value: *v,
                known: Known::Value,
            })
            .collect()
    }

    #[test]
    fn without_limits_it_is_the_plain_fraction() {
        let d = Distribution::estimate(&values(&[1.0, 2.0, 2.0, 5.0])).expect("values");
        assert!((d.at_or_below(2.0) - 0.75).abs() < 1e-15);
        assert!((d.below(2.0) - 0.25).abs() < 1e-15);
        assert!((d.at_or_below(0.5)).abs() < 1e-15 && (d.at_or_below(9.0) - 1.0).abs() < 1e-15);
        assert_eq!(d.quantile(0.5), Some(2.0));
    }

    #[test]
    fn iteration_and_product_limit_agree() {
        let mut sample = values(&[1.0, 2.0, 3.0, 4.0]);
        sample.push(Censored {
            value: 2.5,
            known: Known::Upper,
        });
        sample.push(Censored {
            value: 3.0,
            known: Known::Upper,
        });
        let product = Distribution::estimate(&sample).expect("values");
        let points = product.points.clone();
        let iterated = self_consistent(&sample, points);
        for v in [0.5, 1.0, 2.0, 3.0, 4.0] {
            let (a, b) = (product.at_or_below(v), iterated.at_or_below(v));
            assert!((a - b).abs() < 1e-6, "{v}: {a} {b}");
        }
    }

    #[test]
    fn only_limits_give_no_distribution() {
        assert!(
            Distribution::estimate(&[Censored {
                value: 1.0,
                known: Known::Upper
            }])
            .is_none()
        );
    }
}
