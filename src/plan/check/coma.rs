//! Scale lengths and speeds of the measured species.

use super::Checker;
use super::convert::number_in;
use crate::analysis::{BandSettings, ComaSettings, RatioSettings, SpeciesSettings};
use crate::coma::Lengths;
use crate::frame::Geometry;
use crate::ground::{Caveat, Error, Result, Species};
use crate::ratio::Basis;

impl Checker<'_> {
    pub(super) fn species(
        &mut self,
        bands: &[BandSettings],
        ratios: &[RatioSettings],
        geometry: &Geometry,
    ) -> Result<Vec<SpeciesSettings>> {
        let mut out: Vec<SpeciesSettings> = Vec::new();
        for band in bands.iter().filter(|b| b.efficiency.is_some()) {
            let Some(species) = &band.species else {
                continue;
            };
            if out.iter().any(|s| s.species == *species) {
                continue;
            }
            let coma = self.coma(species, geometry)?;
            let needed = ratios
                .iter()
                .any(|r| r.basis == Basis::Production && (r.of == *species || r.to == *species));
            if coma.is_none() && needed {
                return Err(self.file.point(
                    Error::plan(format!("no scale length or photo rate is known for {species}, so it has no production rate"))
                        .remedy("add a [[lifetime]] table for it, or set basis = \"column\""),
                    &["measure", "ratios"],
                ));
            }
            out.push(SpeciesSettings {
                species: species.clone(),
                coma,
            });
        }
        self.check_lifetimes(bands)?;
        Ok(out)
    }

    fn check_lifetimes(&self, bands: &[BandSettings]) -> Result<()> {
        for (i, own) in self.plan.lifetime.iter().enumerate() {
            let at = i.to_string();
            let species = Species::new(&own.species);
            if !bands.iter().any(|b| b.species.as_ref() == Some(&species)) {
                return Err(self.file.point(
                    Error::plan(format!(
                        "the [[lifetime]] of {species} belongs to no measured band"
                    ))
                    .remedy("correct the species or remove the table"),
                    &["lifetime", &at, "species"],
                ));
            }
            for (name, value) in [
                ("parent_km", Some(own.parent_km)),
                ("daughter_km", own.daughter_km),
            ] {
                if let Some(v) = value {
                    number_in(name, v, 1.0, 1e10, "scale lengths are in km at 1 au")
                        .map_err(|e| self.file.point(e, &["lifetime", &at, name]))?;
                }
            }
            number_in(
                "sigma",
                own.sigma.unwrap_or(0.0),
                0.0,
                2.0,
                "give a relative error such as 0.2",
            )
            .map_err(|e| self.file.point(e, &["lifetime", &at, "sigma"]))?;
        }
        Ok(())
    }

    pub(super) fn parent_speed(&mut self, geometry: &Geometry) -> Result<(f64, String)> {
        let coma = &self.plan.coma;
        if let Some(v) = coma.speed_km_s {
            if coma.speed_law.is_some() {
                return Err(self.file.point(
                    Error::plan("both speed_km_s and speed_law are given")
                        .remedy("keep one of them"),
                    &["coma", "speed_km_s"],
                ));
            }
            number_in(
                "speed_km_s",
                v,
                0.01,
                100.0,
                "gas leaves comets at about 0.3 to 2 km/s",
            )
            .map_err(|e| self.file.point(e, &["coma", "speed_km_s"]))?;
            return Ok((v, "speed given in the plan".to_owned()));
        }
        let name = coma
            .speed_law
            .as_deref()
            .unwrap_or(crate::plan::resolve::DEFAULT_SPEED_LAW);
        let law = self
            .tables
            .speed_law(name)
            .map_err(|e| self.file.point(e, &["coma", "speed_law"]))?;
        let speed = law.at_km_s(geometry.heliocentric_au);
        let key = law.provenance.source.clone();
        Ok((speed, self.cite(&key)))
    }

    /// Scale lengths of a species: the plan's own, else the named Haser set, else the photo rate of
    /// a parent with the expansion speed.
    fn coma(&mut self, species: &Species, geometry: &Geometry) -> Result<Option<ComaSettings>> {
        let r_h = geometry.heliocentric_au;
        let (speed_km_s, speed_source) = self.parent_speed(geometry)?;
        let plan = self.plan;
        if let Some(sigma) = plan.coma.length_sigma {
            number_in(
                "length_sigma",
                sigma,
                0.0,
                2.0,
                "give a relative error such as 0.2",
            )
            .map_err(|e| self.file.point(e, &["coma", "length_sigma"]))?;
        }
        let sigma_or = |own: f64| plan.coma.length_sigma.unwrap_or(own);
        if let Some(own) = plan
            .lifetime
            .iter()
            .find(|l| Species::new(&l.species) == *species)
        {
            let stretch = r_h.powf(own.rh_power.unwrap_or(2.0));
            return Ok(Some(ComaSettings {
                lengths: Lengths {
                    parent_km: own.parent_km * stretch,
                    daughter_km: own.daughter_km.map(|d| d * stretch),
                },
                length_sigma: own.sigma.or(plan.coma.length_sigma).unwrap_or(0.0),
                speed_km_s: own.speed_km_s.unwrap_or(speed_km_s),
                lengths_follow_speed: false,
                source: "lengths given in the plan".to_owned(),
            }));
        }
        let set = plan
            .coma
            .length_set
            .as_deref()
            .expect("invariant: default filled in");
        if !self.tables.length_sets().contains(&set) {
            let sets = self.tables.length_sets();
            return Err(self.file.point(
                Error::plan(format!("the set of scale lengths {set:?} is not known"))
                    .remedy(format!("known sets: {}", sets.join(", "))),
                &["coma", "length_set"],
            ));
        }
        if let Some(row) = self.tables.scale_lengths(set, species).cloned() {
            if row.provenance.how.is_memory() {
                let source = self.cite(&row.provenance.source);
                self.caveats.push(Caveat::FromMemory {
                    what: format!("scale lengths of {species}"),
                    source,
                });
            }
            let (parent_km, daughter_km) = row.at_km(r_h);
            return Ok(Some(ComaSettings {
                lengths: Lengths {
                    parent_km,
                    daughter_km: Some(daughter_km),
                },
                length_sigma: sigma_or(row.relative_sigma),
                speed_km_s: row.speed_km_s,
                lengths_follow_speed: false,
                source: self.cite(&row.provenance.source),
            }));
        }
        let Some(rate) = self.tables.photo_rate(species).cloned() else {
            return Ok(None);
        };
        let per_s = match plan.coma.sun.as_deref() {
            Some("quiet") => rate.quiet_per_s,
            Some("active") => rate.active_per_s,
            other => {
                return Err(self.file.point(
                    Error::plan(format!(
                        "sun {:?} is neither \"quiet\" nor \"active\"",
                        other.unwrap_or_default()
                    )),
                    &["coma", "sun"],
                ));
            }
        };
        let rate_source = self.cite(&rate.provenance.source);
        Ok(Some(ComaSettings {
            lengths: Lengths {
                parent_km: speed_km_s * r_h * r_h / per_s,
                daughter_km: None,
            },
            length_sigma: sigma_or(rate.relative_sigma),
            speed_km_s,
            lengths_follow_speed: true,
            source: format!("{rate_source}; {speed_source}"),
        }))
    }
}
