//! The scene of `simulate`.

use super::Checker;
use super::convert::{number_in, range_aa};
use super::light::Light;
use crate::analysis::Settings;
use crate::forward::{Noise, SceneContinuum, SceneSettings};
use crate::ground::{Error, Result, Species};
use crate::plan::schema::SimulatePlan;

impl Checker<'_> {
    /// Judges `[simulate]`, where the plan has it. Its values are in the units of the first spectrum.
    pub(super) fn scene(
        &self,
        settings: &Settings,
        light: &Light,
    ) -> Result<Option<SceneSettings>> {
        let Some(plan) = &self.plan.simulate else {
            return Ok(None);
        };
        let point = |e: Error, key: &str| self.file.point(e, &["simulate", key]);
        let (unit, medium) = self.axis_or(None, None, &["simulate"])?;
        let range = range_aa(plan.range, unit, medium).map_err(|e| point(e, "range"))?;
        let resolution = settings.spectra[0].fit.resolution.clone().ok_or_else(|| {
            point(
                Error::plan("a simulation needs the resolution of the first spectrum")
                    .remedy("add resolving_power or instrument_fwhm to its [[spectrum]] table"),
                "range",
            )
        })?;
        let samples = plan.samples_per_fwhm.unwrap_or(2.5);
        let samples_per_fwhm =
            number_in("samples_per_fwhm", samples, 0.5, 100.0, "2 to 3 is usual")
                .map_err(|e| point(e, "samples_per_fwhm"))?;
        let count = samples_per_fwhm * (range.1 - range.0) / resolution.fwhm_aa(range.0);
        if !(10.0..=1e6).contains(&count) {
            return Err(point(
                Error::plan(format!(
                    "the range holds {count:.0} samples, not 10 to 1000000"
                ))
                .remedy("widen or narrow the range"),
                "range",
            ));
        }
        let (mut continuum, noise) = self.scene_light(plan, settings)?;
        // Frames move wavelengths by less than one per cent.
        let wide = (
            0.99 * range.0.min(continuum.at_aa),
            1.01 * range.1.max(continuum.at_aa),
        );
        let velocity = settings.geometry.heliocentric_km_s;
        let label = "the simulated spectrum";
        continuum.carrier = light.carrier(wide, Some(&resolution), velocity, label)?;
        Ok(Some(SceneSettings {
            production_per_s: self.production(plan)?,
            continuum,
            noise,
            range_aa: range,
            samples_per_fwhm,
            resolution,
        }))
    }

    fn production(&self, plan: &SimulatePlan) -> Result<Vec<(Species, f64)>> {
        plan.production
            .iter()
            .map(|(species, rate)| {
                let rate = number_in(
                    species,
                    *rate,
                    0.0,
                    1e36,
                    "production rates are in molecules per second",
                )
                .map_err(|e| self.file.point(e, &["simulate", "production", species]))?;
                Ok((Species::new(species), rate))
            })
            .collect()
    }

    /// Continuum and noise in cgs, of everything inside the aperture.
    fn scene_light(
        &self,
        plan: &SimulatePlan,
        settings: &Settings,
    ) -> Result<(SceneContinuum, Noise)> {
        let judged = |table: &str, key: &str, value: f64, low: f64, high: f64| {
            number_in(key, value, low, high, "a finite number in this range")
                .map_err(|e| self.file.point(e, &["simulate", table, key]))
        };
        let (unit, medium) = self.axis_or(None, None, &["simulate"])?;
        let flux = self.flux_unit(0)?.ok_or_else(|| {
            self.file.point(
                Error::plan("a simulation needs the flux unit of the first spectrum")
                    .remedy("add flux_unit to its [[spectrum]] table"),
                &["simulate"],
            )
        })?;
        let area = if flux.per_area() {
            settings.aperture.area_arcsec2()
        } else {
            1.0
        };
        let (c, n) = (&plan.continuum, &plan.noise);
        let at = judged("continuum", "at", c.at, 1e-12, 1e30)?;
        let at_aa = unit.vacuum_aa(at, medium);
        let cgs = |value: f64| flux.to_erg_s_cm2_aa(value, at_aa) * area;
        let density = judged("continuum", "flux_density", c.flux_density, 0.0, 1e30)?;
        let slope = c.slope_per_1000_aa.unwrap_or(0.0);
        let thermal = self.thermal(settings.geometry.heliocentric_au)?;
        let warm = c.thermal_flux_density.unwrap_or(0.0);
        let warm = judged("continuum", "thermal_flux_density", warm, 0.0, 1e30)?;
        if warm > 0.0 && thermal.is_none() {
            return Err(self.file.point(
                Error::plan("thermal_flux_density needs a temperature")
                    .remedy("add a table [continuum.thermal]"),
                &["simulate", "continuum", "thermal_flux_density"],
            ));
        }
        let continuum = SceneContinuum {
            flux_erg_s_cm2_aa: cgs(density),
            at_aa,
            slope_per_1000_aa: judged("continuum", "slope_per_1000_aa", slope, -10.0, 10.0)?,
            carrier: None,
            thermal: thermal.map(|t| (cgs(warm), t.temperature_k)),
        };
        let floor = judged("noise", "floor", n.floor, f64::MIN_POSITIVE, 1e30)?;
        let relative = n.relative.unwrap_or(0.0);
        let noise = Noise {
            relative: judged("noise", "relative", relative, 0.0, 10.0)?,
            floor_erg_s_cm2_aa: cgs(floor),
            exposure_s: judged("noise", "exposure_s", n.exposure_s, 1e-6, 1e9)?,
        };
        Ok((continuum, noise))
    }
}
