//! Efficiencies as figures.

use super::request::Places;
use crate::coma::equilibrium::Conditions;
use crate::efficiency::{Along, EfficiencyTable, Subject};
use crate::figures::{
    Curve, CurveFigure, Position, QuicklookFigure, Scale, VerticalMark, Width, quicklook_svg,
    range_svg,
};
use crate::ground::{Result, air_from_vacuum_aa};

/// Wavelengths beyond this are shown in µm.
const MICRON_FROM_AA: f64 = 10_000.0;
const Y_UNIT: &str = "photons s⁻¹";

/// g against velocity or distance.
pub(super) fn curves(subject: &Subject, found: &Along, places: &Places) -> Result<String> {
    let Places::Range(range) = places else {
        return Ok(String::new());
    };
    let one = &range.places[0];
    let species = subject.species().pretty();
    let (x, x_label, title) = if range.of_distance {
        (
            range.places.iter().map(|p| p.heliocentric_au).collect(),
            "Heliocentric distance (au)",
            format!(
                "{species}, heliocentric velocity {} km s⁻¹",
                signed(one.heliocentric_km_s)
            ),
        )
    } else {
        (
            range.places.iter().map(|p| p.heliocentric_km_s).collect(),
            "Heliocentric velocity (km s⁻¹)",
            format!("{species}, {} au from the Sun", one.heliocentric_au),
        )
    };
    let x: Vec<f64> = x;
    let positive = found
        .series
        .iter()
        .all(|s| s.g_photons_s.iter().all(|g| *g > 0.0));
    let log = range.of_distance && positive;
    let curves = found.series.iter().map(|s| Curve {
        label: label(&s.band, s.wavelength_vacuum_aa),
        x: x.clone(),
        y: s.g_photons_s.clone(),
    });
    let figure = CurveFigure {
        title,
        x_label: x_label.to_owned(),
        y_quantity: "Fluorescence efficiency g".to_owned(),
        y_unit: Y_UNIT.to_owned(),
        x_scale: if log { Scale::Log } else { Scale::Linear },
        y_scale: if log { Scale::Log } else { Scale::Linear },
        curves: curves.collect(),
        marks: range
            .marked
            .map(|x| VerticalMark {
                x,
                label: "as given".to_owned(),
            })
            .into_iter()
            .collect(),
        x_ticks: Vec::new(),
    };
    range_svg(&figure, Width::Double)
}

/// A number with a true minus sign.
fn signed(v: f64) -> String {
    v.to_string().replace('-', "−")
}

fn label(band: &str, vacuum_aa: f64) -> String {
    if vacuum_aa > MICRON_FROM_AA {
        return format!("{band} {:.2} µm", vacuum_aa / 1e4);
    }
    let air = air_from_vacuum_aa(vacuum_aa);
    if band.is_empty() {
        format!("{air:.2} Å")
    } else {
        format!("{band} {air:.0} Å")
    }
}

/// g of every line as a stick at its wavelength; infrared lines only where there are no others, since
/// a few of them would press the rest together.
pub(super) fn sticks(
    subject: &Subject,
    table: &EfficiencyTable,
    at: &Conditions,
) -> Result<String> {
    let micron = table
        .rows
        .iter()
        .all(|r| r.wavelength_vacuum_aa > MICRON_FROM_AA);
    let place = |vacuum_aa: f64, air_aa: f64| if micron { vacuum_aa / 1e4 } else { air_aa };
    let shown = || {
        let rows = table.rows.iter();
        rows.filter(|r| micron || r.wavelength_vacuum_aa <= MICRON_FROM_AA)
    };
    let mut rows: Vec<(f64, f64)> = shown()
        .map(|r| {
            (
                place(r.wavelength_vacuum_aa, r.wavelength_air_aa),
                r.g_photons_s,
            )
        })
        .collect();
    rows.sort_by(|a, b| a.0.total_cmp(&b.0));
    let edges = rows.first().zip(rows.last()).map(|(a, b)| (a.0, b.0));
    let (low, high) = edges.unwrap_or((0.0, 1.0));
    let margin = (0.03 * (high - low)).max(1e-3 * high);
    let mut x = vec![low - margin];
    let mut y = vec![0.0];
    for (w, g) in rows {
        x.extend([w, w, w]);
        y.extend([0.0, g, 0.0]);
    }
    x.push(high + margin);
    y.push(0.0);
    let positions = shown().map(|r| Position {
        x: place(r.wavelength_vacuum_aa, r.wavelength_air_aa),
        label: label(&r.band, r.wavelength_vacuum_aa),
    });
    let figure = QuicklookFigure {
        title: format!(
            "{}, {} au from the Sun, {} km s⁻¹",
            subject.species().pretty(),
            at.heliocentric_au,
            signed(at.heliocentric_km_s)
        ),
        x_label: if micron {
            "Rest wavelength in vacuum (µm)".to_owned()
        } else {
            "Rest wavelength in air (Å)".to_owned()
        },
        y_quantity: "Fluorescence efficiency g".to_owned(),
        y_unit: Y_UNIT.to_owned(),
        x,
        y,
        positions: positions.take(30).collect(),
    };
    quicklook_svg(&figure, Width::Double)
}
