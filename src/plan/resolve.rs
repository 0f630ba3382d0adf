//! The plan with every default written out, and its text.

use super::schema::Plan;
use crate::ground::{Error, Result};
use std::path::Path;

/// Expansion speed of parents unless the plan says otherwise.
pub(super) const DEFAULT_SPEED_LAW: &str = "parents-0.85";
const DEFAULT_LENGTH_SET: &str = "ahearn1995";

/// Fills in every default and makes file names absolute, so that the result no longer depends on
/// where the plan lies.
pub(super) fn defaults(plan: &Plan, folder: &Path) -> Plan {
    let mut out = plan.clone();
    let absolute = |name: &str| {
        let joined = folder.join(name);
        std::path::absolute(&joined)
            .unwrap_or(joined)
            .to_string_lossy()
            .into_owned()
    };
    for s in &mut out.spectrum {
        s.file = absolute(&s.file);
        s.sampling.get_or_insert_with(|| "centre".to_owned());
        for name in [
            s.instrument_fwhm_file.as_mut(),
            s.transmission.as_mut().map(|t| &mut t.file),
        ]
        .into_iter()
        .flatten()
        {
            *name = absolute(name);
        }
    }
    for name in out
        .band
        .iter_mut()
        .filter_map(|b| b.template.as_mut())
        .chain(out.continuum.star.as_mut().map(|s| &mut s.file))
    {
        *name = absolute(name);
    }
    out.measure
        .basis
        .get_or_insert_with(|| "production".to_owned());
    out.measure.detection_sigma.get_or_insert(3.0);
    out.measure.free_shape_sigma.get_or_insert(17.0);
    let coma = &mut out.coma;
    coma.length_set
        .get_or_insert_with(|| DEFAULT_LENGTH_SET.to_owned());
    if coma.speed_km_s.is_none() {
        coma.speed_law
            .get_or_insert_with(|| DEFAULT_SPEED_LAW.to_owned());
    }
    coma.speed_sigma.get_or_insert(0.1);
    coma.sun.get_or_insert_with(|| "quiet".to_owned());
    out.draws.count.get_or_insert(10_000);
    out.draws.seed.get_or_insert(1);
    if let Some(simulate) = &mut out.simulate {
        simulate.samples_per_fwhm.get_or_insert(2.5);
        simulate.continuum.slope_per_1000_aa.get_or_insert(0.0);
        simulate.noise.relative.get_or_insert(0.0);
    }
    for folder in [&mut out.tables.line_lists, &mut out.tables.comparison]
        .into_iter()
        .flatten()
    {
        *folder = absolute(folder);
    }
    out
}

/// The plan as TOML, with a heading that names the program's version.
///
/// # Errors
/// Never for a plan that was read from TOML.
pub fn to_toml(plan: &Plan) -> Result<String> {
    let body = toml::to_string(plan)
        .map_err(|e| Error::compute(format!("the plan cannot be written as TOML: {e}")))?;
    Ok(format!(
        "# Every setting of this run, defaults written out. comagauge {}.\n# Running it again gives the same result to the bit.\n\n{body}",
        env!("CARGO_PKG_VERSION")
    ))
}
