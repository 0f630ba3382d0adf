//! Sunlight, stars, thermal emission and transmissions of the plan.

use super::Checker;
use super::convert::number_in;
use super::curves::Curve;
use crate::analysis::Settings;
use crate::atomic::{SolarSpectrum, sun};
use crate::fit::{Carrier, Resolution, Thermal, grey_temperature_k};
use crate::ground::constants::LIGHT_KM_S;
use crate::ground::{Caveat, Error, Result};
use crate::spectrum::Spectrum;
use std::path::Path;
use std::sync::Arc;

/// Light that is not the gas's own, read but not yet brought to a spectrum.
pub(super) struct Light {
    kind: Kind,
    /// One per spectrum: transmission and floor.
    transmissions: Vec<Option<(Curve, f64)>>,
}

enum Kind {
    Polynomial,
    Sunlight(SolarSpectrum),
    Star { label: String, curve: Curve },
}

impl Checker<'_> {
    pub(super) fn light(&mut self) -> Result<Light> {
        let c = &self.plan.continuum;
        let point = |e: Error, key: &str| self.file.point(e, &["continuum", key]);
        let kind = match (c.kind.as_deref(), &c.star) {
            (None | Some("polynomial"), None) => Kind::Polynomial,
            (Some("sunlight"), None) => {
                let dir = self.plan.tables.line_lists.as_deref().map(Path::new);
                Kind::Sunlight(sun(dir)?)
            }
            (None | Some("star"), Some(star)) => Kind::Star {
                label: super::convert::file_name(&star.file),
                curve: self.star(star)?,
            },
            (Some("star"), None) => {
                return Err(point(
                    Error::plan("kind = \"star\" needs the star's spectrum")
                        .remedy("add a table [continuum.star] with its file"),
                    "kind",
                ));
            }
            (Some(kind @ ("polynomial" | "sunlight")), Some(_)) => {
                return Err(point(
                    Error::plan(format!("kind = \"{kind}\" does not use a star"))
                        .remedy("remove [continuum.star], or set kind = \"star\""),
                    "star",
                ));
            }
            (Some(other), _) => {
                return Err(point(
                    Error::plan(format!("continuum kind {other:?} is not known"))
                        .remedy("one of \"polynomial\", \"sunlight\", \"star\""),
                    "kind",
                ));
            }
        };
        if !matches!(kind, Kind::Sunlight(_)) && !c.afrho_at.is_empty() {
            return Err(point(
                Error::plan("afrho_at needs kind = \"sunlight\": A(θ)fρ compares with the Sun"),
                "afrho_at",
            ));
        }
        let transmissions = (0..self.plan.spectrum.len())
            .map(|i| self.transmission(i))
            .collect::<Result<Vec<_>>>()?;
        Ok(Light {
            kind,
            transmissions,
        })
    }

    /// Wavelengths at which A(θ)fρ is wanted, vacuum Å.
    pub(super) fn afrho_at_aa(&self) -> Result<Vec<f64>> {
        let c = &self.plan.continuum;
        if c.afrho_at.is_empty() {
            return Ok(Vec::new());
        }
        let (unit, medium) = self.axis_or(c.unit.as_ref(), c.medium.as_ref(), &["continuum"])?;
        if let Some(bad) = c.afrho_at.iter().find(|w| !(**w > 0.0 && w.is_finite())) {
            return Err(self.file.point(
                Error::plan(format!("afrho_at: {bad} is not a wavelength")),
                &["continuum", "afrho_at"],
            ));
        }
        Ok(c.afrho_at
            .iter()
            .map(|w| unit.vacuum_aa(*w, medium))
            .collect())
    }

    fn transmission(&mut self, i: usize) -> Result<Option<(Curve, f64)>> {
        let Some(plan) = &self.plan.spectrum[i].transmission else {
            return Ok(None);
        };
        let at = i.to_string();
        let keys = ["spectrum", at.as_str(), "transmission"];
        let point = |e: Error| self.file.point(e, &keys);
        let floor = number_in(
            "floor",
            plan.floor.unwrap_or(0.1),
            1e-6,
            1.0,
            "samples below this transmission are left out",
        )
        .map_err(point)?;
        let s = &self.plan.spectrum[i];
        let axis = self.axis_or(s.wavelength_unit.as_ref(), s.medium.as_ref(), &keys)?;
        let curve = self.curve(&plan.file, axis)?;
        if let Some(bad) = curve.value.iter().find(|v| !(-0.05..=1.5).contains(*v)) {
            return Err(self.file.point(
                Error::input(format!(
                    "{}: transmission {bad} is outside 0 to 1",
                    plan.file
                ))
                .remedy("give fractions, not per cent"),
                &keys,
            ));
        }
        Ok(Some((curve, floor)))
    }

    /// The thermal term of the continuum.
    pub(super) fn thermal(&self, heliocentric_au: f64) -> Result<Option<Thermal>> {
        let Some(plan) = &self.plan.continuum.thermal else {
            return Ok(None);
        };
        let keys = |key: &'static str| ["continuum", "thermal", key];
        if plan.temperature_k.is_some() && plan.factor.is_some() {
            return Err(self.file.point(
                Error::plan("temperature_k and factor are both given").remedy("keep one of them"),
                &keys("factor"),
            ));
        }
        let factor = number_in(
            "factor",
            plan.factor.unwrap_or(1.0),
            0.3,
            5.0,
            "grains are 1 to 1.3 times as warm as a grey body",
        )
        .map_err(|e| self.file.point(e, &keys("factor")))?;
        let temperature_k = plan
            .temperature_k
            .unwrap_or(factor * grey_temperature_k(heliocentric_au));
        number_in(
            "temperature_k",
            temperature_k,
            30.0,
            3000.0,
            "the temperature of the dust in kelvin",
        )
        .map_err(|e| self.file.point(e, &keys("temperature_k")))?;
        Ok(Some(Thermal {
            temperature_k,
            free: plan.fitted.unwrap_or(false),
        }))
    }
}

impl Light {
    /// Divides transmissions out.
    pub(super) fn divide(&self, settings: &mut Settings, spectra: &mut [Spectrum]) -> Result<()> {
        for (i, spectrum) in spectra.iter_mut().enumerate() {
            if let Some((curve, floor)) = &self.transmissions[i] {
                let left_out = spectrum.divide(&curve.wavelength_aa, &curve.value, *floor)?;
                settings.caveats.push(Caveat::Other {
                    code: "transmission-divided",
                    text: format!(
                        "{}: divided by a transmission curve, whose own errors are not known; {left_out} samples below {floor} left out",
                        spectrum.label()
                    ),
                });
            }
        }
        Ok(())
    }

    /// Gives each spectrum its carrier.
    pub(super) fn settle(&self, settings: &mut Settings, spectra: &[Spectrum]) -> Result<()> {
        for (i, spectrum) in spectra.iter().enumerate() {
            let x = spectrum.wavelength_aa();
            // Frames move wavelengths by less than this part.
            let slack = 1.0 + 3000.0 / LIGHT_KM_S;
            let whole = (x[0] / slack, x[x.len() - 1] * slack);
            let windows = settings.bands.iter().map(|b| b.model.window_aa);
            let used = windows
                .filter(|w| w.1 > whole.0 && w.0 < whole.1)
                .fold((f64::INFINITY, 0.0_f64), |r, w| {
                    (r.0.min(w.0), r.1.max(w.1))
                });
            let fit = &settings.spectra[i].fit;
            let range = if fit.continuum.whole {
                whole
            } else {
                (used.0.max(whole.0), used.1.min(whole.1))
            };
            if range.0 < range.1 {
                let label = spectrum.label().to_owned();
                let resolution = fit.resolution.clone();
                let velocity = settings.geometry.heliocentric_km_s;
                let carrier = self.carrier(range, resolution.as_ref(), velocity, &label)?;
                settings.spectra[i].fit.continuum.carrier = carrier;
            }
        }
        Ok(())
    }

    /// What the continuum's polynomial multiplies over a range of rest wavelengths, Å.
    pub(super) fn carrier(
        &self,
        range_aa: (f64, f64),
        resolution: Option<&Resolution>,
        heliocentric_km_s: f64,
        label: &str,
    ) -> Result<Option<Arc<Carrier>>> {
        let found = match &self.kind {
            Kind::Polynomial => return Ok(None),
            Kind::Sunlight(sun) => {
                let resolution = resolution.ok_or_else(|| {
                    Error::plan(format!(
                        "{label}: a continuum of sunlight needs the instrument's resolution"
                    ))
                    .remedy("add resolving_power or instrument_fwhm to its [[spectrum]] table")
                })?;
                Carrier::sunlight(sun, range_aa, resolution, heliocentric_km_s)?
            }
            Kind::Star { label, curve } => {
                Carrier::from_samples(label, &curve.wavelength_aa, &curve.value, heliocentric_km_s)?
            }
        };
        Ok(Some(Arc::new(found)))
    }
}
