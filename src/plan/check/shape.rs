//! Shapes of bands other than one Gaussian.

use super::Checker;
use super::convert::number_in;
use crate::atomic::RotationalBand;
use crate::fit::Structure;
use crate::frame::Geometry;
use crate::ground::{Caveat, Error, Result};
use crate::plan::schema::BandPlan;

/// Centre and lines of an envelope, Å.
pub(super) type Envelope = (f64, Structure);

impl Checker<'_> {
    /// The rotational lines of a band, when the plan asks for its envelope.
    pub(super) fn envelope(
        &mut self,
        id: &str,
        own: &BandPlan,
        geometry: &Geometry,
        keys: &[&str],
    ) -> Result<Option<Envelope>> {
        let at = |key: &'static str| [keys[0], keys[1], key];
        match own.shape.as_deref() {
            None | Some("gaussian") => {
                if own.temperature_k.is_some() {
                    return Err(self.file.point(
                        Error::plan(format!(
                            "band {id}: temperature_k goes with shape = \"envelope\""
                        )),
                        &at("temperature_k"),
                    ));
                }
                return Ok(None);
            }
            Some("envelope") => {}
            Some(other) => {
                return Err(self.file.point(
                    Error::plan(format!(
                        "shape {other:?} is neither \"gaussian\" nor \"envelope\""
                    )),
                    &at("shape"),
                ));
            }
        }
        let resolved = |s: &crate::plan::schema::SpectrumPlan| {
            s.resolving_power.is_some() || s.instrument_fwhm.is_some()
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
        let dir = self
            .plan
            .tables
            .line_lists
            .as_deref()
            .map(std::path::Path::new);
        let Some(band) = RotationalBand::load(id, dir)? else {
            return Err(self.file.point(
                Error::plan(format!("band {id}: no rotational lines are known for it"))
                    .remedy("envelopes are known for H2O-2.7um, HCN-3.02um, CO2-4.26um, CO-4.67um, OCS-4.85um and CN-3883"),
                &at("shape"),
            ));
        };
        let temperature_k = own
            .temperature_k
            .unwrap_or_else(|| (70.0 / geometry.heliocentric_au).clamp(10.0, 300.0));
        let (low, high) = RotationalBand::TEMPERATURES_K;
        number_in(
            "temperature_k",
            temperature_k,
            low,
            high,
            "comae have about 10 to 150 K",
        )
        .map_err(|e| self.file.point(e, &at("temperature_k")))?;
        if own.temperature_k.is_none() {
            self.caveats.push(Caveat::Other {
                code: "temperature-assumed",
                text: format!(
                    "{id}: rotational temperature {temperature_k:.0} K assumed for its envelope; set temperature_k if it is known"
                ),
            });
        }
        self.caveats.extend(band.caveats().iter().cloned());
        let lines: Vec<(f64, f64)> = band
            .lines(temperature_k)?
            .iter()
            .map(|l| (l.vacuum_aa, l.share))
            .collect();
        Structure::of_lines(&lines).map(Some)
    }
}
