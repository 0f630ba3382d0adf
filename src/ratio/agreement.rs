//! Whether the bands of one species agree on its column.

/// Bands of a species that disagree by more than their errors.
#[derive(Clone, Debug, PartialEq)]
pub struct Disagreement {
    /// χ² of the columns about their weighted mean over the degrees of freedom.
    pub reduced_chi2: f64,
    /// The band farthest from the mean of the others, in σ.
    pub worst: usize,
    /// How far, σ, positive when its column is larger.
    pub pull: f64,
}

/// Reduced χ² from which columns are said to disagree: 1 % chance for two degrees of freedom, less for
/// more.
const DISAGREE: f64 = 4.6;

/// Judges columns with their full errors (fit and g); `None` for fewer than three or when they agree.
pub fn disagreement(columns: &[(f64, f64)]) -> Option<Disagreement> {
    if columns.len() < 3 || columns.iter().any(|(v, s)| !v.is_finite() || *s <= 0.0) {
        return None;
    }
    let mean_of = |skip: Option<usize>| {
        let kept = columns.iter().enumerate().filter(|(i, _)| Some(*i) != skip);
        let (mut top, mut bottom) = (0.0, 0.0);
        for (_, (value, sigma)) in kept {
            top += value / (sigma * sigma);
            bottom += 1.0 / (sigma * sigma);
        }
        (top / bottom, 1.0 / bottom)
    };
    let (mean, _) = mean_of(None);
    let chi2: f64 = columns.iter().map(|(v, s)| ((v - mean) / s).powi(2)).sum();
    let reduced_chi2 = chi2 / (columns.len() - 1) as f64;
    if reduced_chi2 < DISAGREE {
        return None;
    }
    let pulls = columns.iter().enumerate().map(|(i, (value, sigma))| {
        let (others, variance) = mean_of(Some(i));
        (i, (value - others) / (sigma * sigma + variance).sqrt())
    });
    let (worst, pull) = pulls.max_by(|a, b| a.1.abs().total_cmp(&b.1.abs()))?;
    Some(Disagreement {
        reduced_chi2,
        worst,
        pull,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_odd_one_is_named() {
        assert_eq!(disagreement(&[(1.0, 0.1), (1.1, 0.1), (0.95, 0.1)]), None);
        assert_eq!(disagreement(&[(1.0, 0.1), (9.0, 0.1)]), None);
        let found = disagreement(&[(1.0, 0.1), (1.1, 0.1), (2.0, 0.1), (0.9, 0.1)]).unwrap();
        assert_eq!(found.worst, 2);
        // The others' mean is 1.0 with an error of 0.1/√3.
        assert!((found.pull - 1.0 / (0.01_f64 + 0.01 / 3.0).sqrt()).abs() < 1e-12);
    }
}
