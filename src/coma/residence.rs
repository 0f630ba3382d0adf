//! Residence times for many draws of the scale lengths.

use super::haser::{ApertureKm, Lengths, molecules_km};

/// M v/Q of one species and aperture, tabulated over its scale lengths.
///
/// ln(M v/Q) is interpolated between Chebyshev points of ln γ within ± `span` of the central
/// lengths (relative error below 1e-5, checked by a test); draws outside are computed directly.
#[derive(Clone, Debug)]
pub struct ResidenceGrid {
    centre: Lengths,
    aperture: ApertureKm,
    span: f64,
    nodes: Vec<f64>,
    weights: Vec<f64>,
    /// ln(M v/Q), parent index slowest.
    values: Vec<f64>,
}

impl ResidenceGrid {
    /// Tabulates around `lengths`; `span` is the reach in natural logarithm of each length.
    pub fn new(lengths: &Lengths, aperture: &ApertureKm, span: f64) -> Self {
        let span = span.clamp(0.0, 6.0);
        let count = if span == 0.0 {
            1
        } else {
            10 + (4.0 * span).ceil() as usize
        };
        let nodes: Vec<f64> = (0..count)
            .map(|k| span * (std::f64::consts::PI * (k as f64 + 0.5) / count as f64).cos())
            .collect();
        // Barycentric weights of Chebyshev points of the first kind.
        let weights = (0..count)
            .map(|k| {
                let sign = if k % 2 == 0 { 1.0 } else { -1.0 };
                sign * (std::f64::consts::PI * (k as f64 + 0.5) / count as f64).sin()
            })
            .collect();
        let at = |parent: f64, daughter: f64| {
            let moved = Lengths {
                parent_km: lengths.parent_km * parent.exp(),
                daughter_km: lengths.daughter_km.map(|d| d * daughter.exp()),
            };
            molecules_km(&moved, aperture).ln()
        };
        let values = match lengths.daughter_km {
            None => nodes.iter().map(|p| at(*p, 0.0)).collect(),
            Some(_) => nodes
                .iter()
                .flat_map(|p| nodes.iter().map(move |d| (*p, *d)))
                .map(|(p, d)| at(p, d))
                .collect(),
        };
        Self {
            centre: *lengths,
            aperture: *aperture,
            span,
            nodes,
            weights,
            values,
        }
    }

    /// Residence time M/Q in s for drawn lengths and a speed in km s⁻¹.
    pub fn residence_s(&self, lengths: &Lengths, speed_km_s: f64) -> f64 {
        let parent = (lengths.parent_km / self.centre.parent_km).ln();
        let daughter = match (lengths.daughter_km, self.centre.daughter_km) {
            (Some(a), Some(b)) => (a / b).ln(),
            _ => 0.0,
        };
        let log = if parent.abs() > self.span || daughter.abs() > self.span {
            molecules_km(lengths, &self.aperture).ln()
        } else if self.centre.daughter_km.is_none() {
            self.along(parent, |i| self.values[i])
        } else {
            let n = self.nodes.len();
            self.along(parent, |i| self.along(daughter, |j| self.values[i * n + j]))
        };
        log.exp() / speed_km_s
    }

    fn along(&self, at: f64, value: impl Fn(usize) -> f64) -> f64 {
        let (mut top, mut bottom) = (0.0, 0.0);
        for (i, (node, weight)) in self.nodes.iter().zip(&self.weights).enumerate() {
            let apart = at - node;
            if apart == 0.0 {
                return value(i);
            }
            let w = weight / apart;
            top += w * value(i);
            bottom += w;
        }
        top / bottom
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn interpolation_agrees_with_the_integral() {
        let lengths = Lengths {
            parent_km: 2.2e4,
            daughter_km: Some(6.6e4),
        };
        let parent = Lengths {
            parent_km: 8e4,
            daughter_km: None,
        };
        let apertures = [
            ApertureKm::Circle { radius_km: 3000.0 },
            ApertureKm::Circle {
                radius_km: 90_000.0,
            },
            ApertureKm::Rectangle {
                x_km: (-500.0, 900.0),
                y_km: (-20_000.0, 22_000.0),
            },
        ];
        for aperture in apertures {
            for (centre, span) in [
                (lengths, 1.0),
                (lengths, 2.3),
                (parent, 1.0),
                (lengths, 0.0),
            ] {
                let grid = ResidenceGrid::new(&centre, &aperture, span);
                for (a, b) in [
                    (0.0, 0.0),
                    (0.31, -0.77),
                    (-0.9, 0.4),
                    (0.93, 0.93),
                    (1.4, -1.2),
                ] {
                    let moved = Lengths {
                        parent_km: centre.parent_km * f64::exp(a),
                        daughter_km: centre.daughter_km.map(|d| d * f64::exp(b)),
                    };
                    let found = grid.residence_s(&moved, 0.7) * 0.7;
                    let wanted = molecules_km(&moved, &aperture);
                    assert!(
                        (found / wanted - 1.0).abs() < 1e-6,
                        "{aperture:?} {span} {a} {b}"
                    );
                }
            }
        }
    }
}
