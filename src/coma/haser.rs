//! The model of Haser (1957, Bulletin de l'Académie royale de Belgique 43, 740): molecules leave
//! the nucleus (parents) or a decaying parent (daughters) radially at one constant speed.
//!
//! With x = ρ/γ the number of molecules within a circle of radius ρ around the nucleus is
//! M = (Q/v) γ h(x), h(x) = 1 − x K₁(x) + x Ki₁(x), for a parent of scale length γ. A daughter is
//! the divided difference of γ h(ρ/γ) between the two lengths times γ_d; because
//! d[γ h(ρ/γ)]/dγ = 1 − x K₁(x), it is written here as an integral of a positive function over
//! ln γ, which has no cancellation for equal lengths nor for small circles.

use super::quadrature::integrate;
use super::special::{bessel_k0, bessel_k0_tail, one_minus_x_k1};
use crate::frame::{Aperture, km_per_arcsec};
use std::f64::consts::TAU;

/// Scale lengths of one species at the comet.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lengths {
    /// Scale length of the parent, km; of the species itself when it leaves the nucleus directly.
    pub parent_km: f64,
    /// Scale length of the observed daughter, km; `None` for a species that leaves the nucleus.
    pub daughter_km: Option<f64>,
}

/// The aperture projected to the comet, km.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum ApertureKm {
    /// A circle centred on the nucleus.
    Circle {
        /// Radius, km.
        radius_km: f64,
    },
    /// A ring centred on the nucleus.
    Annulus {
        /// Inner radius, km.
        inner_km: f64,
        /// Outer radius, km.
        outer_km: f64,
    },
    /// A rectangle; the nucleus is the origin.
    Rectangle {
        /// Lower and upper edge in x, km.
        x_km: (f64, f64),
        /// Lower and upper edge in y, km.
        y_km: (f64, f64),
    },
}

impl ApertureKm {
    /// Projects an aperture to the comet's distance from the observer, au.
    pub fn at(aperture: &Aperture, observer_au: f64) -> Self {
        let km = km_per_arcsec(observer_au);
        match *aperture {
            Aperture::Circle { radius_arcsec } => Self::Circle {
                radius_km: radius_arcsec * km,
            },
            Aperture::Slit {
                width_arcsec,
                length_arcsec,
                offset_across_arcsec,
                offset_along_arcsec,
            } => {
                let edges = |size: f64, offset: f64| {
                    ((offset - 0.5 * size) * km, (offset + 0.5 * size) * km)
                };
                Self::Rectangle {
                    x_km: edges(width_arcsec, offset_across_arcsec),
                    y_km: edges(length_arcsec, offset_along_arcsec),
                }
            }
        }
    }
}

impl ApertureKm {
    /// Radius in km of the centred circle that takes in as much of a coma ∝ 1/ρ as this aperture does:
    /// its own radius for a circle, (1/2π) ∮ r(θ) dθ along the edge of a rectangle.
    pub fn equivalent_radius_km(&self) -> f64 {
        match *self {
            Self::Circle { radius_km } => radius_km,
            Self::Annulus { inner_km, outer_km } => outer_km - inner_km,
            Self::Rectangle { x_km, y_km } => {
                let content = |r: f64| r;
                (edge(y_km.1, x_km, &content) - edge(y_km.0, x_km, &content)
                    + edge(x_km.1, y_km, &content)
                    - edge(x_km.0, y_km, &content))
                    / TAU
            }
        }
    }
}

/// Column density N v/Q in km⁻¹ at a projected distance ρ > 0 in km; N = Q/v × this.
pub fn column_km(lengths: &Lengths, rho_km: f64) -> f64 {
    let parent = lengths.parent_km;
    let tail_at = |gamma: f64| bessel_k0_tail(rho_km / gamma);
    let tail = match lengths.daughter_km {
        None => tail_at(parent),
        Some(daughter) if (parent / daughter).ln().abs() > 2.0 => {
            (tail_at(parent) - tail_at(daughter)) * daughter / (parent - daughter)
        }
        Some(daughter) => {
            // Panels narrow enough for exp(−x) when the smallest x is large.
            let panel = (4.0 * parent.max(daughter) / rho_km).min(1.0);
            daughter
                * mean_over_lengths(parent, daughter, panel, |gamma| {
                    let x = rho_km / gamma;
                    if x > 700.0 {
                        0.0
                    } else {
                        x * bessel_k0(x) / gamma
                    }
                })
        }
    };
    tail / (TAU * rho_km)
}

/// Molecules in the aperture times v/Q, in km; M = Q/v × this.
///
/// Circles and rings in closed form up to one smooth integral; rectangles by the integral
/// (1/2π) ∮ M(r(θ)) dθ along the edge, where M(r) is the content of the circle of radius r.
pub fn molecules_km(lengths: &Lengths, aperture: &ApertureKm) -> f64 {
    match *aperture {
        ApertureKm::Circle { radius_km } => circle(lengths, radius_km),
        ApertureKm::Annulus { inner_km, outer_km } => {
            circle(lengths, outer_km) - circle(lengths, inner_km)
        }
        ApertureKm::Rectangle { x_km, y_km } => {
            let content = |r: f64| circle(lengths, r);
            (edge(y_km.1, x_km, &content) - edge(y_km.0, x_km, &content)
                + edge(x_km.1, y_km, &content)
                - edge(x_km.0, y_km, &content))
                / TAU
        }
    }
}

fn circle(lengths: &Lengths, radius_km: f64) -> f64 {
    let parent = lengths.parent_km;
    match lengths.daughter_km {
        None => {
            let x = radius_km / parent;
            parent
                * (one_minus_x_k1(x)
                    + if x > 700.0 {
                        0.0
                    } else {
                        x * bessel_k0_tail(x)
                    })
        }
        Some(daughter) => {
            daughter
                * mean_over_lengths(parent, daughter, 1.0, |gamma| {
                    one_minus_x_k1(radius_km / gamma)
                })
        }
    }
}

/// Mean of f over γ between the two lengths, integrated in ln γ.
fn mean_over_lengths(parent_km: f64, daughter_km: f64, panel: f64, f: impl Fn(f64) -> f64) -> f64 {
    let span = (parent_km / daughter_km).ln();
    if span == 0.0 {
        return f(daughter_km);
    }
    integrate(0.0, span, panel, |u| {
        let stretch = u.exp();
        f(daughter_km * stretch) * stretch
    }) / span.exp_m1()
}

/// ∫ M(r) dθ along an edge at signed perpendicular distance d from the nucleus. With s = d sinh t
/// along the edge, dθ = dt/cosh t, and the integrand stays smooth however near the nucleus is.
fn edge(distance: f64, ends: (f64, f64), content: &impl Fn(f64) -> f64) -> f64 {
    let d = distance.abs();
    if d == 0.0 {
        return 0.0;
    }
    let at = |s: f64| (s / d).asinh();
    let angle = integrate(at(ends.0), at(ends.1), 0.8, |t| {
        let cosh = t.cosh();
        content(d * cosh) / cosh
    });
    angle * distance.signum()
}
