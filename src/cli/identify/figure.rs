//! The spectrum with its names.

use super::input::Task;
use crate::figures::{Position, QuicklookFigure, Width, quicklook_svg};
use crate::ground::{Result, air_from_vacuum_aa};
use crate::identify::Identification;

/// Names beyond these would not find room anyway; the figure says how many are left out.
const MOST_NAMES: usize = 400;

/// The spectrum with the most significant peaks named; `?` stands over a peak without a name.
pub(super) fn figure(task: &Task, named: &[Identification]) -> Result<String> {
    let spectrum = &task.spectrum;
    let mut order: Vec<&Identification> = named.iter().collect();
    order.sort_by(|a, b| b.peak.significance.total_cmp(&a.peak.significance));
    let positions = order.into_iter().take(MOST_NAMES).map(|id| {
        let air = air_from_vacuum_aa(id.peak.wavelength_vacuum_aa);
        let name = id.species().map_or_else(|| "?".to_owned(), |s| s.pretty());
        Position {
            x: air,
            label: format!("{name} {air:.1}"),
        }
    });
    let good = spectrum.good().iter();
    let flux = spectrum.flux_erg_s_cm2_aa().iter().zip(good);
    let figure = QuicklookFigure {
        title: format!("{}: {} peaks", spectrum.label(), named.len()),
        x_label: "Rest wavelength in air (Å)".to_owned(),
        y_quantity: "Flux density".to_owned(),
        y_unit: "erg s⁻¹ cm⁻² Å⁻¹".to_owned(),
        x: spectrum
            .wavelength_aa()
            .iter()
            .map(|w| air_from_vacuum_aa(*w))
            .collect(),
        y: flux.map(|(f, g)| if *g { *f } else { f64::NAN }).collect(),
        positions: positions.collect(),
    };
    quicklook_svg(&figure, Width::Double)
}
