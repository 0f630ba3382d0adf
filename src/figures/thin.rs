//! Fewer marks for many samples without losing the extremes.

/// Indices of at most `2 × bins` samples: all when there are not more, otherwise the lowest and the
/// highest finite `y` in each of `bins` equal runs of the given order.
pub(super) fn extremes(y: &[f64], bins: usize) -> Vec<usize> {
    if y.len() <= 2 * bins {
        return (0..y.len()).filter(|&i| y[i].is_finite()).collect();
    }
    let mut kept = Vec::with_capacity(2 * bins);
    for bin in 0..bins {
        let run = bin * y.len() / bins..(bin + 1) * y.len() / bins;
        let finite = || run.clone().filter(|&i| y[i].is_finite());
        let low = finite().min_by(|&a, &b| y[a].total_cmp(&y[b]));
        let high = finite().max_by(|&a, &b| y[a].total_cmp(&y[b]));
        let (Some(low), Some(high)) = (low, high) else {
            continue;
        };
        kept.push(low.min(high));
        if low != high {
            kept.push(low.max(high));
        }
    }
    kept
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_single_spike_survives() {
        let mut y = vec![0.0; 5000];
        y[1234] = 7.0;
        y[4000] = f64::NAN;
        let kept = extremes(&y, 250);
        assert!(kept.len() <= 500 && kept.contains(&1234) && !kept.contains(&4000));
        assert!(kept.is_sorted());
        assert_eq!(extremes(&[1.0, f64::NAN, 2.0], 5), [0, 2]);
    }
}
