//! Continuum settings of the plan.

use super::Checker;
use super::convert::{number_in, range_aa};
use crate::fit::FitSettings;
use crate::ground::{Error, Result};

impl Checker<'_> {
    pub(super) fn continuum(&self) -> Result<FitSettings> {
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
            "10 keeps weak bands unbiased",
        )
        .map_err(|e| self.file.point(e, &["measure", "free_shape_sigma"]))?;
        Ok(fit)
    }
}
