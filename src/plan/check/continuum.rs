//! Continuum settings of the plan.

use super::Checker;
use super::convert::{number_in, range_aa};
use crate::fit::{FitSettings, Uncertainty};
use crate::frame::Geometry;
use crate::ground::{Error, Result};

impl Checker<'_> {
    pub(super) fn continuum(&self, geometry: &Geometry) -> Result<FitSettings> {
        let c = &self.plan.continuum;
        let mut fit = FitSettings::new(Vec::new());
        fit.continuum.order = c.order;
        if c.order.is_some_and(|o| o > 12) {
            return Err(self.file.point(
                Error::plan(format!(
                    "order = {} is outside 0 to 12",
                    c.order.unwrap_or_default()
                )),
                &["continuum", "order"],
            ));
        }
        fit.continuum.whole = match c.over.as_deref() {
            None | Some("windows") => false,
            Some("spectrum") => true,
            Some(other) => {
                return Err(self.file.point(
                    Error::plan(format!(
                        "over {other:?} is neither \"windows\" nor \"spectrum\""
                    )),
                    &["continuum", "over"],
                ));
            }
        };
        fit.continuum.thermal = self.thermal(geometry.heliocentric_au)?;
        self.robustness(&mut fit)?;
        let ranges = |list: &[[f64; 2]], key: &str| {
            if list.is_empty() {
                return Ok(Vec::new());
            }
            let (unit, medium) =
                self.axis_or(c.unit.as_ref(), c.medium.as_ref(), &["continuum"])?;
            list.iter()
                .map(|r| {
                    range_aa(*r, unit, medium).map_err(|e| self.file.point(e, &["continuum", key]))
                })
                .collect::<Result<Vec<_>>>()
        };
        fit.continuum_ranges_aa = ranges(&c.ranges, "ranges")?;
        fit.excluded_aa = ranges(&c.exclude, "exclude")?;
        fit.detection_sigma = self.detection_sigma()?;
        fit.free_shape_sigma = number_in(
            "free_shape_sigma",
            self.plan
                .measure
                .free_shape_sigma
                .expect("invariant: default filled in"),
            3.0,
            1e6,
            "17 keeps weak bands unbiased",
        )
        .map_err(|e| self.file.point(e, &["measure", "free_shape_sigma"]))?;
        Ok(fit)
    }

    /// Clipping, scaling, and where errors come from.
    fn robustness(&self, fit: &mut FitSettings) -> Result<()> {
        let m = &self.plan.measure;
        let point = |e: Error, key: &str| self.file.point(e, &["measure", key]);
        if let Some(clip) = m.clip_sigma {
            let clip = number_in("clip_sigma", clip, 2.5, 100.0, "5 is usual")
                .map_err(|e| point(e, "clip_sigma"))?;
            fit.clip_sigma = Some(clip);
        }
        fit.scale_errors = m.scale_errors.unwrap_or(false);
        fit.seed = self.plan.draws.seed.expect("invariant: default filled in");
        fit.uncertainty = match m.errors_from.as_deref() {
            None | Some("covariance") => Uncertainty::Covariance,
            Some("profile") => Uncertainty::Profile,
            Some("residual bootstrap") => Uncertainty::ResidualBootstrap,
            Some("pair bootstrap") => Uncertainty::PairBootstrap,
            Some("walkers") => Uncertainty::Walkers,
            Some(other) => {
                return Err(point(
                    Error::plan(format!("errors_from {other:?} is not known")).remedy(
                        "one of \"covariance\", \"profile\", \"residual bootstrap\", \"pair bootstrap\", \"walkers\"",
                    ),
                    "errors_from",
                ));
            }
        };
        Ok(())
    }
}
