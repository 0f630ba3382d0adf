//! Curves that belong to the settings: transmissions, profiles, instrumental widths, stars.

use super::Checker;
use crate::ground::{Error, FluxUnit, Medium, Result, WavelengthUnit};
use crate::plan::schema::StarPlan;
use crate::spectrum::{
    Column, FitsLayout, Layout, Spectrum, TextLayout, looks_like_fits, read_spectrum,
};
use std::path::{Path, PathBuf};

/// Wavelengths as read (vacuum Å) and values.
pub(super) struct Curve {
    pub wavelength_aa: Vec<f64>,
    pub value: Vec<f64>,
}

impl Checker<'_> {
    /// Reads the first two columns of a text file, wavelength in the given unit and a plain number; errors
    /// name the file and its line.
    pub(super) fn curve(
        &mut self,
        name: &str,
        (unit, medium): (WavelengthUnit, Medium),
    ) -> Result<Curve> {
        let path = Path::new(name);
        // Cgs per Å is the unit inside, so that the numbers come through as they are.
        let plain = FluxUnit::parse("erg/s/cm2/Angstrom").expect("invariant: a known unit");
        let layout = if looks_like_fits(path) {
            Layout::Fits(FitsLayout {
                wavelength_unit: Some(unit),
                medium: Some(medium),
                flux_unit: Some(plain),
                ..FitsLayout::default()
            })
        } else {
            let mut layout = TextLayout::new(unit, medium, plain);
            layout.wavelength = Some(Column::Number(1));
            layout.flux = Some(Column::Number(2));
            Layout::Text(layout)
        };
        let (read, _) = read_spectrum(path, &layout)?;
        self.curves.push(PathBuf::from(path));
        Ok(Curve::of(&read))
    }

    /// The star that stands for the Sun, moved to rest.
    pub(super) fn star(&mut self, plan: &StarPlan) -> Result<Curve> {
        let keys = ["continuum", "star"];
        let (unit, medium) =
            self.axis_or(plan.wavelength_unit.as_ref(), plan.medium.as_ref(), &keys)?;
        let mut curve = self.curve(&plan.file, (unit, medium))?;
        let velocity = plan.velocity_km_s.unwrap_or(0.0);
        if !(-2000.0..=2000.0).contains(&velocity) {
            return Err(self.file.point(
                Error::plan(format!(
                    "velocity_km_s = {velocity} is outside -2000 to 2000"
                )),
                &["continuum", "star", "velocity_km_s"],
            ));
        }
        let beta = velocity / crate::ground::constants::LIGHT_KM_S;
        for w in &mut curve.wavelength_aa {
            *w /= ((1.0 + beta) / (1.0 - beta)).sqrt();
        }
        Ok(curve)
    }
}

impl Curve {
    fn of(read: &Spectrum) -> Self {
        let good = |i: &usize| read.good()[*i];
        let at: Vec<usize> = (0..read.len()).filter(good).collect();
        Self {
            wavelength_aa: at.iter().map(|i| read.wavelength_aa()[*i]).collect(),
            value: at.iter().map(|i| read.flux_erg_s_cm2_aa()[*i]).collect(),
        }
    }
}
