//! Ratios of the plan and the published ones to compare them with.

use super::Checker;
use crate::analysis::{BandSettings, RatioSettings};
use crate::comparison::{Selection, entries};
use crate::ground::{Error, Result, Species, did_you_mean};
use crate::ratio::Basis;

impl Checker<'_> {
    pub(super) fn ratios(&mut self, bands: &[BandSettings]) -> Result<Vec<RatioSettings>> {
        let basis = match self.plan.measure.basis.as_deref() {
            Some("production") => Basis::Production,
            Some("column") => Basis::Column,
            other => {
                return Err(self.file.point(
                    Error::plan(format!(
                        "basis {:?} is neither \"production\" nor \"column\"",
                        other.unwrap_or_default()
                    )),
                    &["measure", "basis"],
                ));
            }
        };
        let plan = self.plan;
        plan.measure
            .ratios
            .iter()
            .map(|text| self.one_ratio(text, basis, bands))
            .collect()
    }

    fn one_ratio(
        &mut self,
        text: &str,
        basis: Basis,
        bands: &[BandSettings],
    ) -> Result<RatioSettings> {
        let point = |e: Error| self.file.point(e, &["measure", "ratios"]);
        let Some((of, to)) = text.split_once('/') else {
            return Err(point(Error::plan(format!(
                "ratio {text:?} is not of the form \"CO2/H2O\""
            ))));
        };
        let (of, to) = (Species::new(of), Species::new(to));
        if of == to {
            return Err(point(Error::plan(format!(
                "ratio {text} compares a species with itself"
            ))));
        }
        for species in [&of, &to] {
            let mut with: Vec<&str> = bands
                .iter()
                .filter_map(|b| b.species.as_ref())
                .map(Species::as_str)
                .collect();
            with.dedup();
            let own = bands.iter().filter(|b| b.species.as_ref() == Some(species));
            if own.clone().next().is_none() {
                let mut remedy = format!(
                    "measured species: {}; add a band of {species} to bands",
                    with.join(", ")
                );
                if let Some(near) = did_you_mean(species.as_str(), with.iter().copied()) {
                    remedy = format!("did you mean {near}? {remedy}");
                }
                return Err(point(
                    Error::plan(format!("ratio {text}: no band of {species} is measured"))
                        .remedy(remedy),
                ));
            }
            if own.clone().all(|b| b.efficiency.is_none()) {
                return Err(point(
                    Error::plan(format!(
                        "ratio {text}: no g is known for the bands of {species}"
                    ))
                    .remedy("give g_photons_s or g_erg_s in a [[band]] table"),
                ));
            }
        }
        let known = entries(self.tables, &of, &to, basis, &Selection::default());
        Ok(RatioSettings {
            of,
            to,
            basis,
            known,
        })
    }
}
