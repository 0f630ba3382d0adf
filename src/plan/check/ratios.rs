//! Ratios of the plan and the published ones to compare them with.

use super::Checker;
use crate::analysis::{BandSettings, RatioSettings};
use crate::ground::{Error, Result, Species, did_you_mean};
use crate::ratio::Basis;
use crate::standing::{Entry, Known};
use crate::tables::{Confidence, Kind};

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
        let known = self.known(&of, &to, basis);
        Ok(RatioSettings {
            of,
            to,
            basis,
            known,
        })
    }

    /// Published measurements of the same ratio on the same footing; rows of low confidence stay
    /// out.
    fn known(&self, of: &Species, to: &Species, basis: Basis) -> Vec<Entry> {
        let same_basis = |row: &crate::tables::ComparisonRow| match basis {
            Basis::Production => row.basis == crate::tables::Basis::Production,
            Basis::Column => row.basis == crate::tables::Basis::Column,
        };
        let linear = |row: &crate::tables::ComparisonRow, v: f64| {
            if row.log10 { 10f64.powf(v) } else { v }
        };
        self.tables
            .comparison()
            .iter()
            .filter(|r| {
                r.of == *of && r.to == *to && same_basis(r) && r.confidence >= Confidence::Medium
            })
            .map(|r| {
                let value = linear(r, r.value);
                let errors = r.err_minus.zip(r.err_plus).map(|(minus, plus)| {
                    (
                        value - linear(r, r.value - minus),
                        linear(r, r.value + plus) - value,
                    )
                });
                Entry {
                    comet: r.comet.clone(),
                    class: r.class.as_str().to_owned(),
                    value,
                    errors,
                    known: match r.kind {
                        Kind::Value => Known::Value,
                        Kind::Upper => Known::Upper,
                        Kind::Lower => Known::Lower,
                    },
                    heliocentric_au: r.r_h_au,
                }
            })
            .collect()
    }
}
