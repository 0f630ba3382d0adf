//! From the numbers as they stand in a file to the checked spectrum, in place.

use super::units::{Errors, Raw};
use super::{ErrorKind, Understood};
use crate::ground::{Medium, Result};
use crate::spectrum::{Columns, LineNumbers, Spectrum};

/// Converts to vacuum Å and cgs, notes what was understood and checks the spectrum.
pub(super) fn finish(label: &str, raw: Raw, understood: &mut Understood) -> Result<Spectrum> {
    let Raw {
        mut axis,
        wavelength_unit,
        medium,
        mut flux,
        flux_unit,
        errors,
        flags,
        ..
    } = raw;
    let (flags, flag_source) = flags.map_or((Vec::new(), None), |(f, s)| (f, Some(s)));
    understood.axis = raw.axis_words;
    understood.wavelength_unit = wavelength_unit.to_string();
    understood.flux_unit = flux_unit.to_string();
    understood.errors = errors.as_ref().map(|e| e.source.clone());
    understood.flags = flag_source;
    understood.assumed.extend(raw.assumed);
    let in_air = medium.as_ref().map_or(Medium::Vacuum, |(m, _)| *m);
    understood.medium = medium;
    for value in &mut axis {
        *value = wavelength_unit.vacuum_aa(*value, in_air);
    }
    for (value, aa) in flux.iter_mut().zip(&axis) {
        *value = flux_unit.to_erg_s_cm2_aa(*value, *aa);
    }
    let mut flagged = flags;
    let sigma = errors.map(|e| sigma(e, &axis, &mut flagged, understood));
    let mut lines = LineNumbers::default();
    (1..=axis.len()).for_each(|row| lines.push(row));
    let columns = Columns {
        wavelength_aa: axis,
        flux_erg_s_cm2_aa: flux,
        sigma_erg_s_cm2_aa: sigma,
        flagged,
        lines,
    };
    Spectrum::from_columns(label, columns, flux_unit.per_area())
}

/// Standard deviations in cgs. A sample whose error is exactly 0, or inverse variance 0, carries no
/// data by the usage of FITS products: it is flagged, and the count is noted. A negative error keeps
/// its sign, for the check of the spectrum to refuse.
fn sigma(
    errors: Errors,
    wavelength_aa: &[f64],
    flagged: &mut Vec<bool>,
    understood: &mut Understood,
) -> Vec<f64> {
    let Errors {
        mut values,
        kind,
        unit,
        source,
    } = errors;
    let mut zeros = 0_usize;
    for (i, value) in values.iter_mut().enumerate() {
        if *value == 0.0 {
            zeros += 1;
            if flagged.is_empty() {
                flagged.resize(wavelength_aa.len(), false);
            }
            if let Some(flag) = flagged.get_mut(i) {
                *flag = true;
            }
            *value = f64::NAN;
            continue;
        }
        let root = value.abs().sqrt();
        let in_unit = match kind {
            ErrorKind::Sigma => *value,
            ErrorKind::Variance => root.copysign(*value),
            ErrorKind::InverseVariance => root.recip().copysign(*value),
        };
        let aa = wavelength_aa.get(i).copied().unwrap_or(f64::NAN);
        *value = unit.to_erg_s_cm2_aa(in_unit, aa);
    }
    if zeros > 0 {
        understood.assumed.push(format!(
            "samples where {source} is 0 hold no data and are left out: {zeros}"
        ));
    }
    values
}
