//! Ratios of the plan and the published ones to compare them with.

use super::Checker;
use crate::analysis::{BandSettings, Beside, RatioSettings};
use crate::comparison::{Selection, entries};
use crate::ground::{Error, Result, Species, did_you_mean};
use crate::ratio::Basis;
use crate::tables::{Confidence, Statistic};

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
        let beside = self.beside(&of, &to, basis);
        Ok(RatioSettings {
            of,
            to,
            basis,
            known,
            beside,
        })
    }

    /// Published means of comets of the same ratio, and the Sun's for a ratio of elements.
    fn beside(&mut self, of: &Species, to: &Species, basis: Basis) -> Vec<Beside> {
        let mut out = Vec::new();
        let same_basis = |b: crate::tables::Basis| {
            (b == crate::tables::Basis::Column) == (basis == Basis::Column)
        };
        let tables = self.tables;
        for p in tables.populations() {
            let same = p.of.as_ref() == Some(of) && p.to.as_ref() == Some(to);
            if !(same && p.statistic == Statistic::Mean && p.basis.is_some_and(same_basis)) {
                continue;
            }
            let (log10, log10_sigma) = if p.log10 {
                (p.value, p.sigma)
            } else {
                (
                    p.value.log10(),
                    p.sigma.map(|s| s / p.value / std::f64::consts::LN_10),
                )
            };
            out.push(Beside {
                what: format!("mean of {}", p.group),
                log10,
                log10_sigma,
                source: self.cite(&p.provenance.source),
                from_memory: p.provenance.how.is_memory(),
            });
        }
        let element = |s: &Species| s.as_str().split(' ').next().unwrap_or_default().to_owned();
        if !(of.as_str().ends_with(" I") && to.as_str().ends_with(" I")) {
            return out;
        }
        let (of, to) = (element(of), element(to));
        let sun = tables
            .solar_abundances()
            .iter()
            .find(|a| a.element == of && a.relative_to == to && a.confidence == Confidence::High);
        if let Some(a) = sun {
            out.push(Beside {
                what: a.set.clone(),
                log10: a.log10_ratio(),
                log10_sigma: a.sigma,
                source: self.cite(&a.provenance.source),
                from_memory: a.provenance.how.is_memory(),
            });
        }
        out
    }
}
