//! Single values of the plan in the program's units.

use crate::fit::Resolution;
use crate::frame::Aperture;
use crate::ground::{Error, Medium, Result, WavelengthUnit, constants};
use crate::plan::schema::{AperturePlan, ColumnPlan, ColumnsPlan, SpectrumPlan};
use crate::spectrum::{Column, FitsLayout, TextLayout};

pub(super) fn number_in(name: &str, value: f64, low: f64, high: f64, remedy: &str) -> Result<f64> {
    if (low..=high).contains(&value) {
        return Ok(value);
    }
    Err(Error::plan(format!("{name} = {value} is outside {low} to {high}")).remedy(remedy))
}

pub(super) fn file_name(path: &str) -> String {
    std::path::Path::new(path)
        .file_name()
        .map_or_else(|| path.to_owned(), |n| n.to_string_lossy().into_owned())
}

pub(super) fn aperture(plan: &AperturePlan) -> Result<Aperture> {
    let [across, along] = plan.offset_arcsec.unwrap_or([0.0, 0.0]);
    let found = match (
        plan.radius_arcsec,
        plan.diameter_arcsec,
        plan.width_arcsec,
        plan.length_arcsec,
    ) {
        (Some(radius_arcsec), None, None, None) => Aperture::Circle { radius_arcsec },
        (None, Some(diameter), None, None) => Aperture::Circle {
            radius_arcsec: 0.5 * diameter,
        },
        (None, None, Some(width_arcsec), Some(length_arcsec)) => Aperture::Slit {
            width_arcsec,
            length_arcsec,
            offset_across_arcsec: across,
            offset_along_arcsec: along,
        },
        _ => {
            return Err(Error::plan("the aperture is neither a circle nor a slit").remedy(
                "give radius_arcsec, or diameter_arcsec, or width_arcsec and length_arcsec, and nothing else",
            ));
        }
    };
    if plan.offset_arcsec.is_some() && matches!(found, Aperture::Circle { .. }) {
        return Err(Error::plan(
            "offset_arcsec goes with a slit; circles are centred on the nucleus",
        )
        .remedy("remove it, or describe a slit by width_arcsec and length_arcsec"));
    }
    found.checked()
}

pub(super) fn resolution(
    s: &SpectrumPlan,
    unit: Option<WavelengthUnit>,
) -> Result<Option<Resolution>> {
    match (s.resolving_power, s.instrument_fwhm) {
        (Some(_), Some(_)) => Err(Error::plan(
            "resolving_power and instrument_fwhm are both given",
        )
        .remedy("keep one of them")),
        (Some(r), None) => {
            number_in(
                "resolving_power",
                r,
                5.0,
                5e6,
                "the resolving power is λ/FWHM",
            )?;
            Ok(Some(Resolution::ResolvingPower(r)))
        }
        (None, Some(w)) => {
            let Some(WavelengthUnit::Length { aa }) = unit else {
                return Err(Error::plan(
                    "instrument_fwhm needs a wavelength_unit that is a length",
                )
                .remedy("give resolving_power instead"));
            };
            number_in(
                "instrument_fwhm",
                w * aa,
                1e-4,
                1e5,
                "a width in the wavelength unit; the range is in Å",
            )?;
            Ok(Some(Resolution::FwhmAa(w * aa)))
        }
        (None, None) => Ok(None),
    }
}

pub(super) fn range_aa(
    range: [f64; 2],
    unit: WavelengthUnit,
    medium: Medium,
) -> Result<(f64, f64)> {
    if !(range.iter().all(|v| v.is_finite() && *v > 0.0) && range[0] < range[1]) {
        return Err(Error::plan(format!(
            "the range {} to {} is not two positive increasing numbers",
            range[0], range[1]
        )));
    }
    let (a, b) = (
        unit.vacuum_aa(range[0], medium),
        unit.vacuum_aa(range[1], medium),
    );
    Ok((a.min(b), a.max(b)))
}

/// A width in the unit of the axis as a width in Å; for wavenumbers and frequencies at the centre.
pub(super) fn width_aa(
    width: f64,
    centre: Option<f64>,
    centre_aa: f64,
    unit: WavelengthUnit,
) -> f64 {
    match (unit, centre) {
        (WavelengthUnit::Length { aa }, _) => width * aa,
        (_, Some(c)) => width / c * centre_aa,
        (WavelengthUnit::Wavenumber { per_cm }, None) => {
            width * per_cm * centre_aa * centre_aa * 1e-8
        }
        (WavelengthUnit::Frequency { hz }, None) => {
            width * hz * centre_aa * centre_aa / constants::LIGHT_AA_S
        }
    }
}

fn column(plan: &ColumnPlan) -> Result<Column> {
    match plan {
        ColumnPlan::Number(0) => Err(Error::plan("column number 0: columns are counted from 1")),
        ColumnPlan::Number(n) => Ok(Column::Number(*n)),
        ColumnPlan::Name(name) => Ok(Column::Name(name.clone())),
    }
}

fn set(target: &mut Option<Column>, plan: Option<&ColumnPlan>) -> Result<()> {
    if let Some(plan) = plan {
        *target = Some(column(plan)?);
    }
    Ok(())
}

/// Columns of a text table.
pub(super) fn columns(plan: &ColumnsPlan, layout: &mut TextLayout) -> Result<()> {
    set(&mut layout.wavelength, plan.wavelength.as_ref())?;
    set(&mut layout.flux, plan.flux.as_ref())?;
    set(&mut layout.error, plan.error.as_ref())?;
    set(&mut layout.mask, plan.mask.as_ref())?;
    if let Some(good) = &plan.mask_good {
        layout.mask_good.clone_from(good);
    }
    Ok(())
}

/// Columns of a FITS table, or the parts that go with an image.
pub(super) fn fits_columns(plan: &ColumnsPlan, layout: &mut FitsLayout) -> Result<()> {
    set(&mut layout.wavelength, plan.wavelength.as_ref())?;
    set(&mut layout.flux, plan.flux.as_ref())?;
    // For images these are parts, counted from 0.
    let part = |c: &ColumnPlan| match c {
        ColumnPlan::Number(n) => Column::Number(*n),
        ColumnPlan::Name(name) => Column::Name(name.clone()),
    };
    layout.error = plan.error.as_ref().map(part);
    layout.mask = plan.mask.as_ref().map(part);
    if let Some(good) = &plan.mask_good {
        layout.mask_good.clone_from(good);
    }
    Ok(())
}
