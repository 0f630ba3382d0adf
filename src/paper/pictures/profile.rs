//! Column density against distance from the nucleus, as the coma model has it.

use super::super::study::Study;
use crate::coma::{ApertureKm, column_km};
use crate::figures::{Curve, CurveFigure, Scale, VerticalMark};

/// Points of a curve.
const POINTS: usize = 160;
/// The range around the aperture, as a factor on either side.
const REACH: f64 = 40.0;
/// A curve ends where it has fallen below this share of its value at the inner end, times the
/// fall of an inverse law.
const FALLEN: f64 = 0.02;
/// km⁻² in cm⁻².
const CM2_PER_KM2: f64 = 1.0e10;

/// N(ρ) of each species with a production rate; `None` without any.
pub(super) fn profile(s: &Study) -> Option<CurveFigure> {
    let aperture = ApertureKm::at(&s.settings.aperture, s.settings.geometry.observer_au);
    let edges = edges(&aperture);
    let (low, high) = edges.iter().fold((f64::INFINITY, 0.0_f64), |(l, h), e| {
        (l.min(e.0), h.max(e.0))
    });
    let (from, to) = (low / REACH, high * REACH);
    let rho: Vec<f64> = (0..POINTS)
        .map(|i| from * (to / from).powf(i as f64 / (POINTS - 1) as f64))
        .collect();
    let curves: Vec<Curve> = s
        .analysis
        .species
        .iter()
        .filter_map(|result| {
            let q_per_s = result.production_per_s?.value;
            let mut all = s.settings.species.iter();
            let coma = all.find(|t| t.species == result.species)?.coma.as_ref()?;
            let usable = result.detected && q_per_s > 0.0;
            let column =
                |r: &f64| q_per_s / coma.speed_km_s * column_km(&coma.lengths, *r) / CM2_PER_KM2;
            let y: Vec<f64> = rho.iter().map(column).collect();
            let inverse = |i: usize| y[0] * rho[0] / rho[i];
            let visible = (0..POINTS).map(|i| {
                if y[i] > FALLEN * inverse(i) {
                    y[i]
                } else {
                    f64::NAN
                }
            });
            usable.then(|| Curve {
                label: result.species.pretty(),
                x: rho.clone(),
                y: visible.collect(),
            })
        })
        .collect();
    (!curves.is_empty()).then(|| CurveFigure {
        title: s.heading(),
        x_label: "Projected distance from the nucleus ρ (km)".to_owned(),
        y_quantity: "Column density N".to_owned(),
        y_unit: "cm⁻²".to_owned(),
        x_scale: Scale::Log,
        y_scale: Scale::Log,
        curves,
        marks: edges
            .into_iter()
            .map(|(x, label)| VerticalMark { x, label })
            .collect(),
        x_ticks: Vec::new(),
    })
}

/// Characteristic distances of the aperture with their names.
fn edges(aperture: &ApertureKm) -> Vec<(f64, String)> {
    match *aperture {
        ApertureKm::Circle { radius_km } => vec![(radius_km, "aperture radius".to_owned())],
        ApertureKm::Annulus { inner_km, outer_km } => vec![
            (inner_km, "inner radius".to_owned()),
            (outer_km, "outer radius".to_owned()),
        ],
        ApertureKm::Rectangle { x_km, y_km } => {
            let half = |(low, high): (f64, f64)| 0.5 * (high - low);
            vec![
                (half(x_km), "half width".to_owned()),
                (half(y_km), "half length".to_owned()),
            ]
        }
    }
}

/// What the figure shows.
pub(super) fn caption(s: &Study) -> String {
    format!(
        "Column density of each species of {} against projected distance from the nucleus, as the Haser model has it with the measured production rates. Vertical line: aperture. Only the mean within the aperture was measured; the shape of the curves is the model's.",
        s.heading()
    )
}
