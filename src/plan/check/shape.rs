//! Shapes of bands other than one Gaussian.

use super::Checker;
use super::convert::{number_in, range_aa, width_aa};
use crate::atomic::RotationalBand;
use crate::fit::{BandModel, Form, Freedom, Limits, Rotor, Structure, Template};
use crate::frame::Geometry;
use crate::ground::{Caveat, Error, Result};
use crate::plan::schema::BandPlan;
use std::path::Path;
use std::sync::Arc;

impl Checker<'_> {
    /// Gives the band the shape the plan asks for; true when its structure is then followed.
    pub(super) fn shape(
        &mut self,
        model: &mut BandModel,
        own: &BandPlan,
        geometry: &Geometry,
        keys: &[&str],
    ) -> Result<bool> {
        let shape = own.shape.as_deref().unwrap_or("gaussian");
        self.refuse_strangers(own, shape, keys)?;
        let followed = match shape {
            "gaussian" => {
                self.wings(model, own, keys)?;
                if !own.multiplet.is_empty() {
                    self.multiplet(model, own, keys)?;
                }
                false
            }
            "envelope" => {
                self.envelope(model, own, geometry, keys)?;
                true
            }
            "window" => {
                self.window(model, own, keys)?;
                true
            }
            "template" => {
                self.template(model, own, keys)?;
                true
            }
            other => {
                return Err(self.file.point(
                    Error::plan(format!("shape {other:?} is not known"))
                        .remedy("one of \"gaussian\", \"envelope\", \"window\", \"template\""),
                    &[keys[0], keys[1], "shape"],
                ));
            }
        };
        self.limits(model, own, keys)?;
        Ok(followed)
    }

    /// Keys that go with another shape.
    fn refuse_strangers(&self, own: &BandPlan, shape: &str, keys: &[&str]) -> Result<()> {
        let strangers = [
            ("temperature_k", own.temperature_k.is_some(), "envelope"),
            ("temperature_is", own.temperature_is.is_some(), "envelope"),
            (
                "temperature_range",
                own.temperature_range.is_some(),
                "envelope",
            ),
            ("between", own.between.is_some(), "window"),
            ("template", own.template.is_some(), "template"),
            ("multiplet", !own.multiplet.is_empty(), "gaussian"),
            ("wings_are", own.wings_are.is_some(), "gaussian"),
        ];
        for (key, given, with) in strangers {
            if given && shape != with {
                return Err(self.file.point(
                    Error::plan(format!(
                        "band {}: {key} goes with shape = \"{with}\"",
                        own.id
                    )),
                    &[keys[0], keys[1], key],
                ));
            }
        }
        Ok(())
    }

    fn wings(&self, model: &mut BandModel, own: &BandPlan, keys: &[&str]) -> Result<()> {
        let wanted = own.wings_are.unwrap_or(Freedom::Held);
        model.wings = wanted != Freedom::Held;
        model.extra = wanted;
        if model.wings && !own.multiplet.is_empty() {
            return Err(self.file.point(
                Error::plan(format!(
                    "band {}: wings are for single lines, not for a multiplet",
                    own.id
                )),
                &[keys[0], keys[1], "wings_are"],
            ));
        }
        Ok(())
    }

    fn multiplet(&self, model: &mut BandModel, own: &BandPlan, keys: &[&str]) -> Result<()> {
        let point = |e: Error| self.file.point(e, &[keys[0], keys[1], "multiplet"]);
        let (unit, medium) = self.axis_or(own.unit.as_ref(), own.medium.as_ref(), keys)?;
        let lines: Vec<(f64, f64)> = own
            .multiplet
            .iter()
            .map(|[w, share]| (unit.vacuum_aa(*w, medium), *share))
            .collect();
        let (centre_aa, structure) = Structure::of_lines(&lines).map_err(|_| {
            point(
                Error::plan(format!(
                    "band {}: its multiplet needs positive wavelengths and fluxes",
                    own.id
                ))
                .remedy("give pairs such as [5889.95, 2.0]"),
            )
        })?;
        let outside = |w: f64| w < model.window_aa.0 || w > model.window_aa.1;
        if let Some((w, _)) = lines.iter().find(|(w, _)| outside(*w)) {
            return Err(point(Error::plan(format!(
                "band {}: its line at {w:.2} Å (vacuum) lies outside its window {:.2} to {:.2} Å",
                own.id, model.window_aa.0, model.window_aa.1
            ))));
        }
        model.centre_aa = centre_aa;
        model.structure = structure;
        Ok(())
    }

    /// The rotational lines of a band.
    fn envelope(
        &mut self,
        model: &mut BandModel,
        own: &BandPlan,
        geometry: &Geometry,
        keys: &[&str],
    ) -> Result<()> {
        let at = |key: &'static str| [keys[0], keys[1], key];
        let id = model.id.clone();
        let resolved = |s: &crate::plan::schema::SpectrumPlan| {
            s.resolving_power.is_some()
                || s.instrument_fwhm.is_some()
                || s.instrument_fwhm_file.is_some()
        };
        if !self.plan.spectrum.iter().all(resolved) {
            return Err(self.file.point(
                Error::plan(format!(
                    "band {id}: an envelope needs the instrument's resolution"
                ))
                .remedy("add resolving_power or instrument_fwhm to the [[spectrum]] table"),
                &at("shape"),
            ));
        }
        let dir = self.plan.tables.line_lists.as_deref().map(Path::new);
        let Some(band) = RotationalBand::load(&id, dir)? else {
            return Err(self.file.point(
                Error::plan(format!("band {id}: no rotational lines are known for it"))
                    .remedy("envelopes are known for H2O-2.7um, HCN-3.02um, CO2-4.26um, CO-4.67um, OCS-4.85um and CN-3883"),
                &at("shape"),
            ));
        };
        let temperature_k = own
            .temperature_k
            .unwrap_or_else(|| (70.0 / geometry.heliocentric_au).clamp(10.0, 300.0));
        let free = own.temperature_is.unwrap_or(Freedom::Held) != Freedom::Held;
        let (low, high) = if free {
            Rotor::RANGE_K
        } else {
            RotationalBand::TEMPERATURES_K
        };
        number_in(
            "temperature_k",
            temperature_k,
            low,
            high,
            "comae have about 10 to 150 K",
        )
        .map_err(|e| self.file.point(e, &at("temperature_k")))?;
        if own.temperature_k.is_none() && !free {
            self.caveats.push(Caveat::Other {
                code: "temperature-assumed",
                text: format!(
                    "{id}: rotational temperature {temperature_k:.0} K assumed for its envelope; set temperature_k if it is known, or temperature_is = \"auto\" to fit it"
                ),
            });
        }
        self.caveats.extend(band.caveats().iter().cloned());
        let lines_at = |k: f64| -> Result<Vec<(f64, f64)>> {
            let lines = band.lines(k)?;
            Ok(lines.iter().map(|l| (l.vacuum_aa, l.share)).collect())
        };
        if free {
            let (centre_aa, structure, rotor) = Rotor::new(temperature_k, lines_at)?;
            (model.centre_aa, model.structure) = (centre_aa, structure);
            model.form = Form::Warm(Arc::new(rotor));
            model.extra = own.temperature_is.unwrap_or(Freedom::Auto);
        } else {
            (model.centre_aa, model.structure) = Structure::of_lines(&lines_at(temperature_k)?)?;
        }
        model.fwhm_aa = Some(0.0);
        model.width = own.width_is.unwrap_or(Freedom::Held);
        Ok(())
    }

    fn window(&self, model: &mut BandModel, own: &BandPlan, keys: &[&str]) -> Result<()> {
        let Some(between) = own.between else {
            return Err(self.file.point(
                Error::plan(format!(
                    "band {}: shape = \"window\" needs the limits of the integration",
                    own.id
                ))
                .remedy("add between = [from, to]"),
                &[keys[0], keys[1], "shape"],
            ));
        };
        let point = |e: Error| self.file.point(e, &[keys[0], keys[1], "between"]);
        let (unit, medium) = self.axis_or(own.unit.as_ref(), own.medium.as_ref(), keys)?;
        let limits_aa = range_aa(between, unit, medium).map_err(point)?;
        if limits_aa.0 <= model.window_aa.0 || limits_aa.1 >= model.window_aa.1 {
            return Err(point(
                Error::plan(format!(
                    "band {}: its limits {:.2} to {:.2} Å (vacuum) leave no continuum in its window {:.2} to {:.2} Å",
                    own.id, limits_aa.0, limits_aa.1, model.window_aa.0, model.window_aa.1
                ))
                .remedy("widen window on both sides of between"),
            ));
        }
        if !(limits_aa.0..=limits_aa.1).contains(&model.centre_aa) {
            model.centre_aa = 0.5 * (limits_aa.0 + limits_aa.1);
        }
        model.form = Form::Integral { limits_aa };
        Ok(())
    }

    fn template(&mut self, model: &mut BandModel, own: &BandPlan, keys: &[&str]) -> Result<()> {
        let at = [keys[0], keys[1], "template"];
        let Some(name) = own.template.clone() else {
            return Err(self.file.point(
                Error::plan(format!(
                    "band {}: shape = \"template\" needs a file",
                    own.id
                ))
                .remedy("add template = \"profile.txt\" with two columns"),
                &[keys[0], keys[1], "shape"],
            ));
        };
        let axis = self.axis_or(own.unit.as_ref(), own.medium.as_ref(), keys)?;
        let curve = self.curve(&name, axis)?;
        let (centre_aa, template) = Template::new(&name, &curve.wavelength_aa, &curve.value)
            .map_err(|e| self.file.point(e, &at))?;
        if !(model.window_aa.0..=model.window_aa.1).contains(&centre_aa) {
            return Err(self.file.point(
                Error::plan(format!(
                    "band {}: the middle of its template, {centre_aa:.2} Å (vacuum), lies outside its window {:.2} to {:.2} Å",
                    own.id, model.window_aa.0, model.window_aa.1
                )),
                &at,
            ));
        }
        model.centre_aa = centre_aa;
        model.fwhm_aa = Some(template.fwhm() * centre_aa);
        model.width = Freedom::Held;
        model.form = Form::Template(Arc::new(template));
        Ok(())
    }

    /// Limits of the user's for fitted parameters.
    fn limits(&self, model: &mut BandModel, own: &BandPlan, keys: &[&str]) -> Result<()> {
        let mut out = Limits::default();
        let refuse = |key: &str, text: String| {
            self.file.point(
                Error::plan(format!("band {}: {text}", own.id)),
                &[keys[0], keys[1], key],
            )
        };
        let ordered = |key: &str, r: [f64; 2]| {
            if r[0] < r[1] && r.iter().all(|v| v.is_finite()) {
                return Ok((r[0], r[1]));
            }
            Err(refuse(key, format!("{key} = {r:?} is not a range")))
        };
        let axis = || self.axis_or(own.unit.as_ref(), own.medium.as_ref(), keys);
        if let Some(range) = own.centre_range {
            ordered("centre_range", range)?;
            let (unit, medium) = axis()?;
            let found = range_aa(range, unit, medium)
                .map_err(|e| self.file.point(e, &[keys[0], keys[1], "centre_range"]))?;
            if !(found.0..=found.1).contains(&model.centre_aa) {
                let text = format!(
                    "its centre {:.2} Å (vacuum) is outside centre_range, {:.2} to {:.2} Å",
                    model.centre_aa, found.0, found.1
                );
                return Err(refuse("centre_range", text));
            }
            out.centre_aa = Some(found);
        }
        if let Some(range) = own.fwhm_range {
            let (low, high) = ordered("fwhm_range", range)?;
            let unit = axis()?.0;
            let aa = |w: f64| width_aa(w, own.centre, model.centre_aa, unit);
            if low <= 0.0 {
                return Err(refuse("fwhm_range", "widths are positive".to_owned()));
            }
            let found = (aa(low), aa(high));
            out.fwhm_aa = Some((found.0.min(found.1), found.0.max(found.1)));
        }
        if let Some(range) = own.flux_range {
            out.flux_erg_s_cm2 = Some(ordered("flux_range", range)?);
        }
        if let Some(range) = own.temperature_range {
            let (low, high) = ordered("temperature_range", range)?;
            let widest = Rotor::RANGE_K;
            let start = own.temperature_k.unwrap_or(0.5 * (low + high));
            if low < widest.0 || high > widest.1 || !(low..=high).contains(&start) {
                let text = format!(
                    "temperature_range must lie within {} to {} K and hold temperature_k",
                    widest.0, widest.1
                );
                return Err(refuse("temperature_range", text));
            }
            out.temperature_k = Some((low, high));
        }
        model.limits = out;
        Ok(())
    }
}
