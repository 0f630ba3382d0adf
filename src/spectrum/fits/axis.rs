//! The spectral axis of an image: linear, logarithmic or tabulated.
//!
//! With p the pixel counted from 1 (Greisen et al. 2006, A&A 446, 747; FITS standard 4.0, section 8):
//! linear x = CRVAL + (p − CRPIX)·CDELT; `-LOG` x = CRVAL·exp((p − CRPIX)·CDELT/CRVAL); the older
//! DC-FLAG = 1 x = 10^(CRVAL + (p − CRPIX)·CDELT). CD takes the place of PC·CDELT where it is given.

use super::FitsLayout;
use super::units;
use super::words::Words;
use crate::ground::{Error, Medium, Result, WavelengthUnit};

/// How pixels become values.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Law {
    Linear,
    Log,
    Log10,
    Table,
}

/// A spectral axis, ready to evaluate.
#[derive(Clone, Debug)]
pub(super) struct Axis {
    law: Law,
    crval: f64,
    crpix: f64,
    step: f64,
    pub(super) unit: WavelengthUnit,
    pub(super) medium: Option<(Medium, String)>,
    pub(super) words: String,
}

/// A spectral type code of the standard.
struct Code {
    name: &'static str,
    si_unit: &'static str,
    medium: Option<Medium>,
}

const CODES: [Code; 4] = [
    Code {
        name: "WAVE",
        si_unit: "m",
        medium: Some(Medium::Vacuum),
    },
    Code {
        name: "AWAV",
        si_unit: "m",
        medium: Some(Medium::Air),
    },
    Code {
        name: "FREQ",
        si_unit: "Hz",
        medium: None,
    },
    Code {
        name: "WAVN",
        si_unit: "m-1",
        medium: None,
    },
];
const REFUSED: [&str; 6] = ["ENER", "VELO", "VRAD", "VOPT", "ZOPT", "BETA"];
/// Types written before the standard had any: the unit and the medium must be said otherwise.
const LEGACY: [&str; 6] = ["", "LINEAR", "LAMBDA", "WAVELENGTH", "WAVELEN", "ANGSTROM"];
/// Vacuum wavelengths, Å, that a unit filled in by the standard may lead to.
const PLAUSIBLE_AA: std::ops::Range<f64> = 1.0..1e10;

/// What the CTYPE of an axis says.
enum Kind {
    Standard(&'static Code, Law),
    Legacy,
    Not(String),
}

fn kind(ctype: &str) -> Kind {
    let upper = ctype.trim().to_ascii_uppercase();
    if LEGACY.contains(&upper.as_str()) {
        return Kind::Legacy;
    }
    let (code, rest) = upper.split_at_checked(4).unwrap_or((&upper, ""));
    let algorithm = rest.trim_matches('-');
    if let Some(known) = CODES.iter().find(|c| c.name == code)
        && (rest.is_empty() || rest.starts_with('-'))
    {
        return match algorithm {
            "" => Kind::Standard(known, Law::Linear),
            "LOG" => Kind::Standard(known, Law::Log),
            "TAB" => Kind::Standard(known, Law::Table),
            _ => Kind::Not(format!(
                "the algorithm {algorithm} of a dispersed axis is not read"
            )),
        };
    }
    if REFUSED.contains(&code) {
        return Kind::Not("an axis of energy or velocity is not read".to_owned());
    }
    Kind::Not("this is no spectral axis".to_owned())
}

fn key(name: &str, axis: usize) -> String {
    format!("{name}{axis}")
}

/// True when the words of an axis can be those of a spectrum; `axis` counts from 1.
pub(super) fn may_be_spectral(words: Words, axis: usize) -> bool {
    match kind(words.text(&key("CTYPE", axis)).unwrap_or_default()) {
        Kind::Standard(..) => true,
        Kind::Legacy => words
            .own
            .contains(key("CRVAL", axis).as_str())
            .unwrap_or(false),
        // Refused later, with its reason, when nothing else reads as a spectrum.
        Kind::Not(_) => {
            let ctype = words.text(&key("CTYPE", axis)).unwrap_or_default();
            let known = |c: &str| ctype.to_ascii_uppercase().starts_with(c);
            REFUSED.iter().any(|c| known(c)) || CODES.iter().any(|c| known(c.name))
        }
    }
}

impl Axis {
    /// Reads the words of an axis; `axis` counts from 1.
    pub(super) fn read(
        words: Words,
        axis: usize,
        layout: &FitsLayout,
        assumed: &mut Vec<String>,
    ) -> Result<Self> {
        let ctype = words.text(&key("CTYPE", axis)).unwrap_or_default();
        let (code, mut law) = match kind(ctype) {
            Kind::Standard(code, law) => (Some(code), law),
            Kind::Legacy => (None, Law::Linear),
            Kind::Not(why) => {
                return Err(Error::input(format!("CTYPE{axis} = {ctype:?}: {why}")).remedy(
                    "rebin the spectrum to a linear or logarithmic axis of wavelength, wavenumber or frequency",
                ));
            }
        };
        if code.is_none() && words.number("DC-FLAG")? == Some(1.0) {
            law = Law::Log10;
        }
        let (crval, crpix, step) = if law == Law::Table {
            (0.0, 0.0, 0.0)
        } else {
            scale(words, axis, assumed)?
        };
        let (unit, by_standard) = unit(words, axis, code, law, layout, assumed)?;
        let mut said = Vec::new();
        if let Some(medium) = code.and_then(|c| c.medium) {
            said.push((medium, format!("CTYPE{axis} = {ctype}")));
        }
        said.extend(words.medium()?);
        let found = Self {
            law,
            crval,
            crpix,
            step,
            unit,
            medium: units::medium(layout, unit, &said)?,
            words: describe(axis, ctype, law, crval, crpix, step),
        };
        if by_standard && law != Law::Table {
            found.check_plausible(axis)?;
        }
        Ok(found)
    }

    pub(super) fn is_table(&self) -> bool {
        self.law == Law::Table
    }

    /// The value at a pixel counted from 1, in the unit of the axis.
    pub(super) fn value(&self, pixel: f64) -> f64 {
        let along = (pixel - self.crpix) * self.step;
        match self.law {
            Law::Linear | Law::Table => self.crval + along,
            Law::Log => self.crval * (along / self.crval).exp(),
            Law::Log10 => 10_f64.powf(self.crval + along),
        }
    }

    /// Many files mean Å but write no unit, for which the standard says m.
    fn check_plausible(&self, axis: usize) -> Result<()> {
        let aa = self.unit.vacuum_aa(self.value(1.0), Medium::Vacuum).abs();
        if PLAUSIBLE_AA.contains(&aa) {
            return Ok(());
        }
        Err(Error::input(format!(
            "CUNIT{axis} is missing; by the standard CRVAL{axis} = {} would be in {}, which is no spectrum",
            self.crval, self.unit
        ))
        .remedy("say the unit with the plan key wavelength_unit"))
    }
}

/// CRVAL, CRPIX and the step per pixel.
fn scale(words: Words, axis: usize, assumed: &mut Vec<String>) -> Result<(f64, f64, f64)> {
    let need = |name: &str| {
        words.number(&key(name, axis))?.ok_or_else(|| {
            Error::input(format!("the axis has no {name}{axis}"))
                .remedy("complete the header, or write wavelengths into a table column")
        })
    };
    let crval = need("CRVAL")?;
    let crpix = match words.number(&key("CRPIX", axis))? {
        Some(crpix) => crpix,
        None => {
            assumed.push(format!("CRPIX{axis} is missing: 0, as the standard says"));
            0.0
        }
    };
    let step = match words.number(&format!("CD{axis}_{axis}"))? {
        Some(cd) => cd,
        None => need("CDELT")? * words.number(&format!("PC{axis}_{axis}"))?.unwrap_or(1.0),
    };
    if step == 0.0 {
        return Err(Error::input(format!("the step of axis {axis} is 0"))
            .remedy("correct CDELT or CD in the header"));
    }
    Ok((crval, crpix, step))
}

/// The unit of the axis, and whether it was filled in by the standard.
fn unit(
    words: Words,
    axis: usize,
    code: Option<&Code>,
    law: Law,
    layout: &FitsLayout,
    assumed: &mut Vec<String>,
) -> Result<(WavelengthUnit, bool)> {
    let place = key("CUNIT", axis);
    let said = words.text(&place);
    match (code, said) {
        // The FITS reader scales tabulated values to the unit of the standard.
        (Some(code), _) if law == Law::Table => Ok((WavelengthUnit::parse(code.si_unit)?, false)),
        (Some(code), None) if layout.wavelength_unit.is_none() => {
            assumed.push(format!(
                "{place} is missing: {}, as the standard says",
                code.si_unit
            ));
            Ok((WavelengthUnit::parse(code.si_unit)?, true))
        }
        (None, None) => {
            let wat = key("WAT", axis) + "_001";
            let unit = words
                .text(&wat)
                .and_then(|w| w.split_whitespace().find_map(|t| t.strip_prefix("units=")));
            Ok((units::wavelength(layout, unit, &place, assumed)?, false))
        }
        _ => Ok((units::wavelength(layout, said, &place, assumed)?, false)),
    }
}

fn describe(axis: usize, ctype: &str, law: Law, crval: f64, crpix: f64, step: f64) -> String {
    let named = if ctype.is_empty() { "no CTYPE" } else { ctype };
    let scale = format!("{crval} at pixel {crpix}, step {step}");
    match law {
        Law::Linear => format!("axis {axis} ({named}), linear: {scale}"),
        Law::Log => format!("axis {axis} ({named}), natural logarithmic: {scale} there"),
        Law::Log10 => format!("axis {axis} ({named}), decimal logarithm linear: {scale}"),
        Law::Table => format!("axis {axis} ({named}), tabulated"),
    }
}
