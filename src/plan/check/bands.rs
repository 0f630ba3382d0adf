//! Bands of the plan: identifiers looked up, own bands judged.

use super::Checker;
use super::convert::{range_aa, width_aa};
use crate::analysis::BandSettings;
use crate::coma::{line_centre_opacity_cm2, strongest_line_fraction};
use crate::fit::{BandModel, Form, Freedom, Limits, Structure};
use crate::frame::Geometry;
use crate::ground::{Error, Result, Species, did_you_mean};
use crate::plan::schema::BandPlan;
use crate::tables::Band;

impl Checker<'_> {
    pub(super) fn bands(&mut self, geometry: &Geometry) -> Result<Vec<BandSettings>> {
        let wanted = &self.plan.measure.bands;
        if wanted.is_empty() && self.plan.lines.is_empty() {
            return Err(self.file.point(
                Error::plan("bands is empty: nothing to measure").remedy(
                    "name bands of the line lists (`comagauge bands`) or of [[band]] tables",
                ),
                &["measure", "bands"],
            ));
        }
        for (i, id) in wanted.iter().enumerate() {
            if wanted[..i].contains(id) {
                return Err(self.file.point(
                    Error::plan(format!("band {id} is named twice")),
                    &["measure", "bands"],
                ));
            }
        }
        for (i, custom) in self.plan.band.iter().enumerate() {
            let at = i.to_string();
            if self.plan.band[..i].iter().any(|b| b.id == custom.id) {
                return Err(self.file.point(
                    Error::plan(format!("two [[band]] tables have the id {}", custom.id)),
                    &["band", &at, "id"],
                ));
            }
            if !wanted.contains(&custom.id) {
                return Err(self.file.point(
                    Error::plan(format!(
                        "the [[band]] {} is not among the bands to measure",
                        custom.id
                    ))
                    .remedy("add its id to bands in [measure], or remove the table"),
                    &["band", &at, "id"],
                ));
            }
        }
        let mut out = wanted
            .iter()
            .map(|id| self.band(id, geometry))
            .collect::<Result<Vec<_>>>()?;
        out.extend(self.line_groups(geometry)?);
        Ok(out)
    }

    fn band(&mut self, id: &str, geometry: &Geometry) -> Result<BandSettings> {
        let custom = self.plan.band.iter().position(|b| b.id == id);
        let listed = self.tables.bands().iter().find(|b| b.id == id);
        let (index, empty) = (custom.unwrap_or_default().to_string(), BandPlan::default());
        let keys = ["band", index.as_str()];
        let own = custom.map_or(&empty, |i| &self.plan.band[i]);
        if custom.is_none() && listed.is_none() {
            return Err(self.unknown_band(id));
        }
        let mut model = self.band_model(id, own, listed, &keys)?;
        let enveloped = self.shape(&mut model, own, geometry, &keys)?;
        let species = own
            .species
            .as_deref()
            .map(Species::new)
            .or_else(|| listed.map(|b| b.species.clone()));
        let efficiency = self.efficiency(own, listed, geometry, &model, &keys)?;
        if let Some(i) = own.spectrum
            && !(1..=self.plan.spectrum.len()).contains(&i)
        {
            return Err(self.file.point(
                Error::plan(format!(
                    "spectrum = {i} is outside 1 to {}, the number of spectra",
                    self.plan.spectrum.len()
                )),
                &["band", &index, "spectrum"],
            ));
        }
        Ok(BandSettings {
            opacity_cm2: listed.and_then(|b| self.opacity_cm2(b, geometry)),
            structured_fwhm_aa: listed
                .filter(|b| b.structured && !enveloped)
                .map(|b| b.fwhm_aa),
            spectrum: own.spectrum.map(|i| i - 1),
            model,
            species,
            efficiency,
            lines: None,
        })
    }

    /// Line-centre opacity of the strongest line of a parallel band of a linear molecule: rotational
    /// temperature 60 K r_h⁻¹ between 10 and 150 K, lines as wide as the expansion is fast (common
    /// practice; good to a factor of about two, which is enough to warn).
    fn opacity_cm2(&self, band: &Band, geometry: &Geometry) -> Option<f64> {
        let constant = |quantity: &str| {
            self.tables
                .strengths()
                .iter()
                .find(|s| s.species == band.species && s.band == "ground" && s.quantity == quantity)
                .map(|s| s.value)
        };
        let linear = ["CO", "CO2", "HCN", "OCS"].contains(&band.species.as_str());
        let b_cm1 = constant("B lower").filter(|_| linear)?;
        let strength = self.tables.strengths().iter().find(|s| {
            s.species == band.species
                && s.quantity == "strength"
                && (s.band.starts_with("nu3") || s.band.starts_with("v1-0"))
        })?;
        let law = self
            .tables
            .speed_law(crate::plan::resolve::DEFAULT_SPEED_LAW)
            .ok()?;
        let temperature_k = (60.0 / geometry.heliocentric_au).clamp(10.0, 150.0);
        let share = strongest_line_fraction(b_cm1, temperature_k, band.species.as_str() == "CO2");
        Some(line_centre_opacity_cm2(
            strength.per_molecule() * share,
            1e8 / band.centre_aa,
            law.at_km_s(geometry.heliocentric_au),
        ))
    }

    fn unknown_band(&self, id: &str) -> Error {
        let known: Vec<&str> = self
            .tables
            .bands()
            .iter()
            .map(|b| b.id.as_str())
            .chain(self.plan.band.iter().map(|b| b.id.as_str()))
            .collect();
        let mut remedy = format!(
            "known bands: {}; or describe it in a [[band]] table",
            known.join(", ")
        );
        if let Some(near) = did_you_mean(id, known.iter().copied()) {
            remedy = format!("did you mean {near}? {remedy}");
        }
        self.file.point(
            Error::plan(format!("the band {id} is not known")).remedy(remedy),
            &["measure", "bands"],
        )
    }

    fn band_model(
        &self,
        id: &str,
        own: &BandPlan,
        listed: Option<&Band>,
        keys: &[&str],
    ) -> Result<BandModel> {
        // Asked only where a length is given: the unit may be known to the file alone.
        let axis = || self.axis_or(own.unit.as_ref(), own.medium.as_ref(), keys);
        let needed = |name: &str| {
            self.file.point(
                Error::plan(format!(
                    "band {id} is not in the line lists and has no {name}"
                ))
                .remedy(format!("add {name} to its [[band]] table")),
                keys,
            )
        };
        let centre_aa = match (own.centre, listed) {
            (Some(c), _) => {
                let (unit, medium) = axis()?;
                unit.vacuum_aa(c, medium)
            }
            (None, Some(b)) => b.centre_aa,
            (None, None) => match own.rough_centre() {
                Some(c) => {
                    let (unit, medium) = axis()?;
                    unit.vacuum_aa(c, medium)
                }
                None => return Err(needed("centre")),
            },
        };
        let fwhm_aa = match (own.fwhm, listed) {
            (Some(w), _) => Some(width_aa(w, own.centre, centre_aa, axis()?.0)),
            (None, Some(b)) => Some(b.fwhm_aa),
            (None, None) => None,
        };
        let window_aa = match (own.window, listed) {
            (Some(w), _) => {
                let (unit, medium) = axis()?;
                range_aa(w, unit, medium)
                    .map_err(|e| self.file.point(e, &[keys[0], keys[1], "window"]))?
            }
            (None, Some(b)) => b.window_aa,
            (None, None) => return Err(needed("window")),
        };
        if !(window_aa.0 < centre_aa && centre_aa < window_aa.1) {
            return Err(self.file.point(
                Error::plan(format!(
                    "band {id}: its centre {centre_aa:.2} Å is not inside its window {:.2} to {:.2} Å (vacuum)",
                    window_aa.0, window_aa.1
                ))
                .remedy("check centre, window, unit and medium"),
                keys,
            ));
        }
        Ok(BandModel {
            id: id.to_owned(),
            centre_aa,
            fwhm_aa,
            window_aa,
            centre: own.centre_is.unwrap_or(Freedom::Auto),
            width: own.width_is.unwrap_or(Freedom::Auto),
            structure: Structure::single(),
            tie: own.tie.clone(),
            form: Form::Lines,
            wings: false,
            extra: Freedom::Auto,
            limits: Limits::default(),
        })
    }
}
