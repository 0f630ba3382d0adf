//! Units and the meaning of errors: the plan first, then the words of the file, else an error.

use super::{ErrorKind, FitsLayout};
use crate::ground::{Error, FluxUnit, Medium, Result, WavelengthUnit};

/// A column or array of errors with what they are.
#[derive(Debug)]
pub(super) struct Errors {
    pub(super) values: Vec<f64>,
    pub(super) kind: ErrorKind,
    pub(super) unit: FluxUnit,
    pub(super) source: String,
}

/// A spectrum as it stands in the file.
#[derive(Debug)]
pub(super) struct Raw {
    pub(super) axis: Vec<f64>,
    pub(super) axis_words: String,
    pub(super) wavelength_unit: WavelengthUnit,
    pub(super) medium: Option<(Medium, String)>,
    pub(super) flux: Vec<f64>,
    pub(super) flux_unit: FluxUnit,
    pub(super) errors: Option<Errors>,
    pub(super) flags: Option<(Vec<bool>, String)>,
    pub(super) assumed: Vec<String>,
}

/// The unit of the axis: of the plan, else `said` by the word `place`.
pub(super) fn wavelength(
    layout: &FitsLayout,
    said: Option<&str>,
    place: &str,
    assumed: &mut Vec<String>,
) -> Result<WavelengthUnit> {
    if let Some(unit) = layout.wavelength_unit {
        if let Some(text) = said
            && !WavelengthUnit::parse(text).is_ok_and(|u| u.agrees_with(&unit))
        {
            assumed.push(format!(
                "wavelength unit {unit} as the plan says; {place} says {text}"
            ));
        }
        return Ok(unit);
    }
    let Some(text) = said else {
        return Err(Error::input(format!(
            "the file does not say the unit of the wavelengths ({place} is missing)"
        ))
        .remedy("add the plan key wavelength_unit, such as \"Angstrom\" or \"nm\""));
    };
    WavelengthUnit::parse(text).map_err(|e| {
        Error::input(format!("{place}: {}", e.message()))
            .remedy("say the unit of the wavelengths with the plan key wavelength_unit")
    })
}

/// The unit of the flux: of the plan, else `said` by the word `place`.
pub(super) fn flux(
    layout: &FitsLayout,
    said: Option<&str>,
    place: &str,
    assumed: &mut Vec<String>,
) -> Result<FluxUnit> {
    if let Some(unit) = layout.flux_unit {
        if let Some(text) = said
            && !FluxUnit::parse(text).is_ok_and(|u| u.agrees_with(&unit))
        {
            assumed.push(format!(
                "flux unit {unit} as the plan says; {place} says {text}"
            ));
        }
        return Ok(unit);
    }
    let Some(text) = said else {
        return Err(Error::input(format!(
            "the file does not say the unit of the flux ({place} is missing)"
        ))
        .remedy("add the plan key flux_unit, such as \"erg/s/cm2/Angstrom\""));
    };
    FluxUnit::parse(text).map_err(|e| {
        Error::input(format!("{place}: {}", e.message()))
            .remedy("if the flux is calibrated, say its unit with the plan key flux_unit")
    })
}

/// Reason given for a medium that neither plan nor file says.
pub(super) const MEDIUM_NOT_SAID: &str = "not said in the file, taken as such for now";

/// The medium of a length axis: of the plan, else of the file; other axes need none.
pub(super) fn medium(
    layout: &FitsLayout,
    unit: WavelengthUnit,
    said: &[(Medium, String)],
) -> Result<Option<(Medium, String)>> {
    if !matches!(unit, WavelengthUnit::Length { .. }) {
        return Ok(None);
    }
    if let Some(medium) = layout.medium {
        return Ok(Some((medium, "the plan".to_owned())));
    }
    if let Some((clash, other)) = said.iter().skip(1).find(|(m, _)| *m != said[0].0) {
        return Err(Error::input(format!(
            "the file contradicts itself: {} means {}, {other} means {clash}",
            said[0].1, said[0].0
        ))
        .remedy("say which with the plan key medium = \"air\" or \"vacuum\""));
    }
    match said.first() {
        Some(found) => Ok(Some(found.clone())),
        None if layout.medium_if_unsaid.is_some() => Ok(layout
            .medium_if_unsaid
            .map(|medium| (medium, MEDIUM_NOT_SAID.to_owned()))),
        None => Err(Error::input(
            "the file does not say whether its wavelengths are in air or in vacuum",
        )
        .remedy("add the plan key medium = \"air\" or \"vacuum\"")),
    }
}

/// What the errors are and in which unit: of the plan, else as their name and unit say together.
pub(super) fn errors(
    layout: &FitsLayout,
    by_name: Option<ErrorKind>,
    said: Option<&str>,
    flux: FluxUnit,
    place: &str,
    assumed: &mut Vec<String>,
) -> Result<(ErrorKind, FluxUnit)> {
    let own = said.and_then(|t| FluxUnit::parse(t).ok());
    let unclear = |why: String| {
        Error::input(why).remedy(
            "say what the errors are with the plan key error_is = \"sigma\", \"variance\" or \"inverse_variance\"",
        )
    };
    let Some(kind) = layout.error_is.or(by_name) else {
        return Err(unclear(format!(
            "neither the name nor the header of {place} says whether it holds errors or variances"
        )));
    };
    if layout.error_is.is_none() && said.is_some() {
        let fits = (kind == ErrorKind::Sigma) == own.is_some();
        if !fits {
            return Err(unclear(format!(
                "{place} is named like {} but its unit is {}",
                word(kind),
                said.unwrap_or_default()
            )));
        }
    }
    if kind == ErrorKind::Sigma
        && layout.flux_unit.is_none()
        && let Some(own) = own
    {
        return Ok((kind, own));
    }
    if kind != ErrorKind::Sigma {
        assumed.push(format!(
            "{place} holds {} in the unit of the flux, {}",
            word(kind),
            if kind == ErrorKind::Variance {
                "squared"
            } else {
                "to the power -2"
            }
        ));
    }
    Ok((kind, flux))
}

fn word(kind: ErrorKind) -> &'static str {
    match kind {
        ErrorKind::Sigma => "standard deviations",
        ErrorKind::Variance => "variances",
        ErrorKind::InverseVariance => "inverse variances",
    }
}
