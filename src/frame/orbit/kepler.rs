//! Motion along a conic section, of any eccentricity, by one formula.

use super::stumpff::stumpff;
use crate::ground::constants::AU_KM;
use crate::ground::{Error, Result};
use std::f64::consts::{PI, TAU};

/// Gaussian gravitational constant k, au^1.5 d⁻¹ (IAU 1976 system of constants, a defining value).
/// Published orbits of comets are computed with GM = k², so k² is used here rather than the nominal
/// solar mass parameter; the two differ by 3·10⁻¹⁰ of the value.
pub const GAUSS_K: f64 = 0.017_202_098_95;

/// km s⁻¹ in one au per day.
pub(super) const KM_S_PER_AU_D: f64 = AU_KM / 86_400.0;

/// Shape and size of an orbit about the Sun.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Conic {
    perihelion_au: f64,
    eccentricity: f64,
    inverse_axis_per_au: f64,
}

/// Position and velocity in the plane of the orbit, x towards the perihelion, y along the motion there.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Perifocal {
    /// x, au.
    pub x_au: f64,
    /// y, au.
    pub y_au: f64,
    /// Velocity along x, au d⁻¹.
    pub vx_au_d: f64,
    /// Velocity along y, au d⁻¹.
    pub vy_au_d: f64,
    /// Distance from the Sun, au.
    pub distance_au: f64,
    /// Its rate, au d⁻¹.
    pub rate_au_d: f64,
    /// Universal anomaly χ, au^½: eccentric anomaly times √a, hyperbolic anomaly times √|a|,
    /// √(2q)·tan(ν/2) on a parabola.
    pub universal_anomaly_sqrt_au: f64,
}

impl Perifocal {
    /// True anomaly, rad, −π to π.
    pub fn true_anomaly_rad(&self) -> f64 {
        self.y_au.atan2(self.x_au)
    }
}

impl Conic {
    /// From perihelion distance q and eccentricity e.
    ///
    /// # Errors
    /// q must be positive and at most 1000 au, e must not be negative or above 10⁶.
    pub fn new(perihelion_au: f64, eccentricity: f64) -> Result<Self> {
        let conic = Self {
            perihelion_au,
            eccentricity,
            inverse_axis_per_au: (1.0 - eccentricity) / perihelion_au,
        };
        conic.checked()
    }

    /// From perihelion distance q and reciprocal semi-major axis 1/a (negative for a hyperbola),
    /// e = 1 − q/a. Keeps more digits than e does when e is close to 1.
    ///
    /// # Errors
    /// As [`Conic::new`].
    pub fn from_inverse_axis(perihelion_au: f64, inverse_axis_per_au: f64) -> Result<Self> {
        let conic = Self {
            perihelion_au,
            eccentricity: 1.0 - perihelion_au * inverse_axis_per_au,
            inverse_axis_per_au,
        };
        conic.checked()
    }

    /// All three known apart, each with its own rounding.
    pub(super) fn from_parts(q_au: f64, e: f64, inverse_axis_per_au: f64) -> Result<Self> {
        let conic = Self {
            perihelion_au: q_au,
            eccentricity: e,
            inverse_axis_per_au,
        };
        conic.checked()
    }

    fn checked(self) -> Result<Self> {
        let q = self.perihelion_au;
        if !(q > 0.0 && q <= 1000.0) {
            return Err(Error::plan(format!(
                "perihelion distance {q} au is not above 0 and at most 1000 au"
            )));
        }
        let e = self.eccentricity;
        if !(0.0..=1.0e6).contains(&e) {
            return Err(Error::plan(format!(
                "eccentricity {e} is outside 0 to 1000000"
            )));
        }
        if !self.inverse_axis_per_au.is_finite() {
            return Err(Error::plan(format!(
                "perihelion distance {q} au with eccentricity {e} gives no finite orbital energy"
            )));
        }
        Ok(self)
    }

    /// Perihelion distance q, au.
    pub fn perihelion_au(&self) -> f64 {
        self.perihelion_au
    }

    /// Eccentricity e.
    pub fn eccentricity(&self) -> f64 {
        self.eccentricity
    }

    /// 1/a, au⁻¹.
    pub fn inverse_axis_per_au(&self) -> f64 {
        self.inverse_axis_per_au
    }

    /// Period 2π/(k·a^−1.5), days; none for a parabola or hyperbola.
    pub fn period_d(&self) -> Option<f64> {
        let alpha = self.inverse_axis_per_au;
        let period = TAU / (GAUSS_K * alpha * alpha.sqrt());
        (alpha > 0.0 && period.is_finite()).then_some(period)
    }

    /// Speed at infinite distance k/√|a|, km s⁻¹; none for an ellipse.
    pub fn v_infinity_km_s(&self) -> Option<f64> {
        let squared = -self.inverse_axis_per_au;
        (squared >= 0.0).then(|| GAUSS_K * squared.sqrt() * KM_S_PER_AU_D)
    }

    /// Days after perihelion at a universal anomaly: k·t = qχ + e·χ³·c₃(χ²/a).
    pub(super) fn days_at(&self, chi: f64) -> f64 {
        let c = stumpff(self.inverse_axis_per_au * chi * chi);
        (self.perihelion_au * chi + self.eccentricity * chi.powi(3) * c[3]) / GAUSS_K
    }

    /// Position and velocity a number of days after perihelion.
    ///
    /// With χ the root of k·t = qχ + e·χ³·c₃(χ²/a): r = q + e·χ²c₂, x = q − χ²c₂,
    /// y = χc₁·√(q(1+e)), and dr/dt = k·e·χc₁/r. One formula for ellipse, parabola and hyperbola, with
    /// no subtraction that loses digits when e is near 1 (universal variables: Danby 1988,
    /// Fundamentals of Celestial Mechanics, §6.9; from memory, started at perihelion here).
    pub fn at(&self, days: f64) -> Perifocal {
        let (q, e) = (self.perihelion_au, self.eccentricity);
        let chi = self.universal_anomaly(days);
        let [c0, c1, c2, _] = stumpff(self.inverse_axis_per_au * chi * chi);
        let (first, second) = (chi * c1, chi * chi * c2);
        let distance_au = q + e * second;
        let side = (q * (1.0 + e)).sqrt();
        let speed = GAUSS_K / distance_au;
        Perifocal {
            x_au: q - second,
            y_au: side * first,
            vx_au_d: -speed * first,
            vy_au_d: speed * side * c0,
            distance_au,
            rate_au_d: speed * e * first,
            universal_anomaly_sqrt_au: chi,
        }
    }

    /// Root χ of k·t = qχ + e·χ³·c₃(χ²/a). The left side is convex within half a turn, so that
    /// Newton's steps from an upper bound go down to the root and never past it.
    fn universal_anomaly(&self, days: f64) -> f64 {
        let (q, e, alpha) = (
            self.perihelion_au,
            self.eccentricity,
            self.inverse_axis_per_au,
        );
        let days = match self.period_d() {
            Some(period) => nearest_turn(days, period),
            None => days,
        };
        let goal = GAUSS_K * days.abs();
        let mut chi = self.upper_bound(goal);
        for _ in 0..100 {
            let c = stumpff(alpha * chi * chi);
            let square = chi * chi;
            let miss = q * chi + e * square * chi * c[3] - goal;
            let step = miss / (q + e * square * c[2]);
            chi -= step;
            // Rounding alone makes a step negative.
            if step <= 2.0 * f64::EPSILON * chi.abs() {
                break;
            }
        }
        chi.copysign(days)
    }

    /// A χ at or above the root, and within a small factor of it.
    fn upper_bound(&self, goal: f64) -> f64 {
        let (q, e, alpha) = (
            self.perihelion_au,
            self.eccentricity,
            self.inverse_axis_per_au,
        );
        let linear = goal / q;
        if alpha > 0.0 {
            // c₃ ≥ 1/π² up to half a turn.
            return linear
                .min((PI * PI * goal / e).cbrt())
                .min(PI / alpha.sqrt());
        }
        let mut chi = linear.min((6.0 * goal / e).cbrt());
        if alpha < 0.0 {
            // e·sinh H = M + H: an upper bound of H on the right gives a better one on the left.
            let root = (-alpha).sqrt();
            let mean = goal * root * -alpha;
            for _ in 0..3 {
                let better = ((mean + chi * root) / e).asinh() / root;
                if better.is_finite() {
                    chi = chi.min(better);
                }
            }
        }
        chi
    }
}

/// Days from the nearest perihelion; the remainder is exact.
fn nearest_turn(days: f64, period: f64) -> f64 {
    let rest = days % period;
    if rest.abs() > 0.5 * period {
        rest - period.copysign(rest)
    } else {
        rest
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn refuses_impossible_shapes() {
        for (q, e) in [
            (0.0, 0.5),
            (-1.0, 0.5),
            (f64::NAN, 0.5),
            (1001.0, 0.5),
            (1.0, -0.1),
            (1.0, f64::NAN),
            (1.0, f64::INFINITY),
            (f64::MIN_POSITIVE, 1.0e6),
        ] {
            assert!(Conic::new(q, e).is_err(), "{q} {e}");
        }
        assert!(Conic::from_inverse_axis(2.0, 1.0).is_err());
    }

    #[test]
    fn a_circle_goes_round_evenly() {
        let circle = Conic::new(1.0, 0.0).unwrap();
        let period = circle.period_d().unwrap();
        for turns in [0.1, 0.49, 0.5, 3.3, -7.75] {
            let p = circle.at(turns * period);
            let angle = TAU * turns;
            assert!((p.x_au - angle.cos()).abs() < 1e-13, "{turns}");
            assert!((p.y_au - angle.sin()).abs() < 1e-13, "{turns}");
        }
    }

    #[test]
    fn speed_at_infinity() {
        // v∞ = k·√((e − 1)/q): what a strongly hyperbolic visitor arrives with.
        let fast = Conic::new(1.36, 6.0).unwrap().v_infinity_km_s().unwrap();
        assert!((57.0..58.0).contains(&fast), "{fast}");
        let far = Conic::new(1.36, 6.0).unwrap().at(-3.0e6);
        let speed = (far.vx_au_d.hypot(far.vy_au_d)) * KM_S_PER_AU_D;
        assert!((speed / fast - 1.0).abs() < 1e-5);
        assert_eq!(Conic::new(1.0, 1.0).unwrap().v_infinity_km_s(), Some(0.0));
        assert_eq!(Conic::new(1.0, 0.9).unwrap().v_infinity_km_s(), None);
    }

    #[test]
    fn extremes_stay_finite_and_solve_the_equation() {
        for q in [1e-9, 1.0, 1000.0] {
            for e in [0.0, 1e-12, 1.0 - 1e-15, 1.0, 1.0 + 1e-15, 5.0, 1e6] {
                for days in [0.0, 1e-9, -1.0, 1e4, 1e9] {
                    let conic = Conic::new(q, e).unwrap();
                    let p = conic.at(days);
                    assert!(
                        p.distance_au >= q && p.distance_au.is_finite(),
                        "{q} {e} {days}"
                    );
                    let back = conic.days_at(p.universal_anomaly_sqrt_au);
                    let days = conic.period_d().map_or(days, |p| nearest_turn(days, p));
                    assert!(
                        (back - days).abs() <= 1e-14 * days.abs(),
                        "{q} {e} {days} {back}"
                    );
                }
            }
        }
    }
}
