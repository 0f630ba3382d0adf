//! Stationary populations of a Markov chain in continuous time, without a single subtraction.
//!
//! State reduction of Grassmann, Taksar & Heyman 1985, Operations Research 33, 1107: states are
//! eliminated one by one, the rates that passed through them being handed on to the others. Only
//! sums, products and quotients of positive numbers occur, so every population has full relative
//! accuracy however small it is, and none can come out negative.
//! Departs from the paper: rates instead of probabilities, and zeros are skipped, which makes the
//! many high levels with few lines cheap when they are eliminated first.

/// A chain after elimination of all states but the first.
pub(super) struct Chain {
    states: usize,
    /// Row-major; above the diagonal the share of the flow out of column k that came from row i,
    /// below it the rates from row k to the states that were still there when k was eliminated.
    rates: Vec<f64>,
    /// Total rate out of each state to those before it.
    out: Vec<f64>,
    stationary: Vec<f64>,
}

impl Chain {
    /// Eliminates the states of a row-major matrix of rates from row to column (diagonal ignored).
    /// Every state must reach every other one. `None` when a state has no way on, which by then can
    /// only be underflow of the rates.
    pub fn reduce(states: usize, mut rates: Vec<f64>) -> Option<Self> {
        let mut out = vec![0.0; states];
        let mut targets = Vec::with_capacity(states);
        for k in (1..states).rev() {
            let (before, row) = rates.split_at_mut(k * states);
            let row = &row[..k];
            targets.clear();
            targets.extend(
                row.iter()
                    .enumerate()
                    .filter(|(_, r)| **r > 0.0)
                    .map(|(j, _)| j),
            );
            out[k] = row.iter().sum();
            if !(out[k] > 0.0 && out[k].is_finite()) {
                return None;
            }
            let dense = 2 * targets.len() > k;
            for from in before.chunks_exact_mut(states) {
                if from[k] == 0.0 {
                    continue;
                }
                let share = from[k] / out[k];
                from[k] = share;
                if dense {
                    for (f, r) in from[..k].iter_mut().zip(row) {
                        *f += share * r;
                    }
                } else {
                    for &j in &targets {
                        from[j] += share * row[j];
                    }
                }
            }
        }
        let mut chain = Self {
            states,
            rates,
            out,
            stationary: Vec::new(),
        };
        let mut stationary = chain.back(&vec![0.0; states], 1.0);
        let total: f64 = stationary.iter().sum();
        stationary.iter_mut().for_each(|x| *x /= total);
        chain.stationary = stationary;
        Some(chain)
    }

    /// x_0 = `first`, x_k = Σ_{i<k} x_i share_ik + source_k.
    fn back(&self, source: &[f64], first: f64) -> Vec<f64> {
        let mut x = vec![0.0; self.states];
        if self.states > 0 {
            x[0] = first;
        }
        // Row by row (contiguous): x_i is final when its row is reached.
        for i in 0..self.states {
            x[i] += source[i];
            let xi = x[i];
            let row = &self.rates[i * self.states..(i + 1) * self.states];
            for (xk, share) in x[i + 1..].iter_mut().zip(&row[i + 1..]) {
                *xk += xi * share;
            }
        }
        x
    }

    /// Stationary populations, summing to one.
    pub fn stationary(&self) -> &[f64] {
        &self.stationary
    }

    /// Mean time to forget a start in the first state: ‖∫(p(t) − π) dt‖₁ / ‖p(0) − π‖₁. For two
    /// states this is exactly one over the sum of the rates; with more it weighs every mode of decay
    /// by the population it moves, so that a slow mode that moves none does not count.
    pub fn relaxation(&self) -> f64 {
        let mut rest: Vec<f64> = self.stationary.iter().map(|p| -p).collect();
        let Some(first) = rest.first_mut() else {
            return 0.0;
        };
        // 1 − π_0 as a sum: no cancellation when nearly everything is in the first state.
        *first = self.stationary[1..].iter().sum();
        let norm: f64 = rest.iter().map(|d| d.abs()).sum();
        if norm == 0.0 {
            return 0.0;
        }
        // y Q = −d: eliminate as above, then substitute back and take out the stationary part.
        for k in (1..self.states).rev() {
            let carried = rest[k] / self.out[k];
            let row = &self.rates[k * self.states..k * self.states + k];
            for (d, r) in rest.iter_mut().zip(row) {
                *d += carried * r;
            }
            rest[k] = carried;
        }
        rest[0] = 0.0;
        let mut deviation = self.back(&rest, 0.0);
        let total: f64 = deviation.iter().sum();
        for (y, p) in deviation.iter_mut().zip(&self.stationary) {
            *y -= total * p;
        }
        deviation.iter().map(|y| y.abs()).sum::<f64>() / norm
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use nalgebra::{DMatrix, DVector};
    use proptest::prelude::*;

    #[test]
    fn two_states_are_exact() {
        let chain = Chain::reduce(2, vec![0.0, 3.0, 5.0, 0.0]).unwrap();
        assert!((chain.stationary()[0] - 0.625).abs() < 1e-15);
        assert!((chain.relaxation() - 0.125).abs() < 1e-15);
    }

    #[test]
    fn small_populations_keep_their_digits() {
        // 0 ⇄ 1 ⇄ 2 with rates 1e-30 up and 1 down: populations 1, 1e-30, 1e-60.
        let rates = vec![0.0, 1e-30, 0.0, 1.0, 0.0, 1e-30, 0.0, 1.0, 0.0];
        let chain = Chain::reduce(3, rates).unwrap();
        assert!((chain.stationary()[2] / 1e-60 - 1.0).abs() < 1e-14);
    }

    #[test]
    fn a_state_without_a_way_on_is_noticed() {
        assert!(Chain::reduce(2, vec![0.0, 1.0, 0.0, 0.0]).is_none());
    }

    fn dense(n: usize) -> impl Strategy<Value = Vec<f64>> {
        prop::collection::vec(prop_oneof![Just(0.0), 1e-3..1e3], n * n).prop_map(
            move |mut rates| {
                for i in 0..n {
                    rates[i * n + (i + 1) % n] += 0.1; // a ring: everything reaches everything
                    rates[i * n + i] = 0.0;
                }
                rates
            },
        )
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(64))]
        #[test]
        fn agrees_with_lu_and_with_the_deviation_matrix(rates in dense(7)) {
            let n = 7;
            let chain = Chain::reduce(n, rates.clone()).unwrap();
            let mut generator = DMatrix::from_row_slice(n, n, &rates);
            for i in 0..n {
                generator[(i, i)] = -rates[i * n..(i + 1) * n].iter().sum::<f64>();
            }
            // x Q = 0 with the first equation replaced by Σx = 1.
            let mut system = generator.transpose();
            system.row_mut(0).fill(1.0);
            let lu = system.lu();
            let mut right = DVector::zeros(n);
            right[0] = 1.0;
            let pi = lu.solve(&right).unwrap();
            for i in 0..n {
                prop_assert!((chain.stationary()[i] - pi[i]).abs() < 1e-9);
            }
            // y Q = −(e0 − π) with Σy = 0.
            let mut right = pi.clone();
            right[0] = 0.0; // the sum
            let y = lu.solve(&right).unwrap();
            let start: f64 = 1.0 - pi[0] + pi.iter().skip(1).sum::<f64>();
            let expected = y.iter().map(|v| v.abs()).sum::<f64>() / start;
            prop_assert!((chain.relaxation() / expected - 1.0).abs() < 1e-6);
        }
    }
}
