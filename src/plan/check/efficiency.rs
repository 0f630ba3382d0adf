//! Fluorescence efficiencies and their sources.

use super::Checker;
use super::convert::number_in;
use crate::analysis::EfficiencyAtComet;
use crate::fit::BandModel;
use crate::frame::Geometry;
use crate::ground::{Caveat, Error, Result, constants};
use crate::plan::schema::BandPlan;
use crate::tables::Band;

impl Checker<'_> {
    pub(super) fn efficiency(
        &mut self,
        own: &BandPlan,
        listed: Option<&Band>,
        geometry: &Geometry,
        model: &BandModel,
        keys: &[&str],
    ) -> Result<Option<EfficiencyAtComet>> {
        let photon_erg = constants::HC_ERG_AA / model.centre_aa;
        let given = match (own.g_photons_s, own.g_erg_s) {
            (Some(_), Some(_)) => {
                return Err(self.file.point(
                    Error::plan(format!(
                        "band {}: both g_photons_s and g_erg_s are given",
                        own.id
                    ))
                    .remedy("keep one of them"),
                    keys,
                ));
            }
            (Some(g), None) => Some(g),
            (None, Some(g)) => Some(g / photon_erg),
            (None, None) => None,
        };
        if let Some(sigma) = own.g_sigma {
            number_in(
                "g_sigma",
                sigma,
                0.0,
                2.0,
                "give a relative error such as 0.1",
            )
            .map_err(|e| self.file.point(e, &[keys[0], keys[1], "g_sigma"]))?;
        }
        if let Some(g) = given {
            if !(g > 0.0 && g < 1e6) {
                return Err(self.file.point(
                    Error::plan(format!(
                        "band {}: g = {g} photons/s is not in 0 to 1e6",
                        own.id
                    )),
                    keys,
                ));
            }
            let source = own
                .g_source
                .clone()
                .unwrap_or_else(|| "given in the plan".to_owned());
            return Ok(Some(EfficiencyAtComet {
                g_photons_s: g * geometry.heliocentric_au.powi(-2),
                relative_sigma: own.g_sigma.unwrap_or(0.0),
                source,
            }));
        }
        let Some(default) = listed.and_then(|b| self.tables.default_efficiency(&b.id)) else {
            return Ok(None);
        };
        let source = self.cite(&default.provenance.source);
        self.note_efficiency(&model.id, default);
        Ok(Some(EfficiencyAtComet {
            g_photons_s: default.g_at_photons_s(geometry.heliocentric_au),
            relative_sigma: own.g_sigma.unwrap_or(default.relative_sigma),
            source,
        }))
    }

    fn note_efficiency(&mut self, id: &str, default: &crate::tables::Efficiency) {
        if default.provenance.how.is_memory() {
            let source = self.cite(&default.provenance.source);
            self.caveats.push(Caveat::FromMemory {
                what: format!("g of {id}"),
                source,
            });
        }
        if default.velocity_dependent {
            self.caveats.push(Caveat::SwingsIgnored {
                band: id.to_owned(),
            });
        }
        let all: Vec<f64> = self
            .tables
            .efficiencies_of(id)
            .iter()
            .map(|e| e.g_photons_s)
            .collect();
        let low = all.iter().copied().fold(f64::INFINITY, f64::min);
        let high = all.iter().copied().fold(0.0, f64::max);
        if all.len() > 1 && high / low > 1.05 {
            self.caveats.push(Caveat::SourcesDisagree {
                what: format!("g of {id}"),
                factor: high / low,
            });
        }
    }

    /// Notes a source as used and returns its reference.
    pub(super) fn cite(&mut self, key: &str) -> String {
        let text = self
            .tables
            .source(key)
            .map_or_else(|| key.to_owned(), |s| s.reference.clone());
        self.sources.insert(key.to_owned(), text.clone());
        text
    }
}
