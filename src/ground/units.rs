//! Units of wavelength and flux density, converted once on the way in.
//!
//! Flux densities become erg s⁻¹ cm⁻² Å⁻¹ (surface brightness: the same per arcsec²), spectral axes
//! become vacuum Å. F_λ = F_ν c/λ² = F_k/λ² and, for photons, F_λ = N_λ hc/λ. Unit strings follow the
//! grammar of FITS and VOUnits (see `grammar`).

mod grammar;
mod symbols;

use super::constants::{HC_ERG_AA, LIGHT_AA_S, PLANCK_ERG_S};
use super::{Error, Result, air_from_vacuum_aa, vacuum_from_air_aa};
use std::fmt;
use symbols::{ANGLE, COUNT, LENGTH, MAGNITUDE, MASS, PHOTON, PIXEL, Quantity, TIME};

/// The medium in which wavelengths are quoted.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Medium {
    /// Wavelengths in vacuum.
    Vacuum,
    /// Wavelengths in standard air.
    Air,
}

impl Medium {
    /// Reads `vacuum` or `air`.
    ///
    /// # Errors
    /// Any other word.
    pub fn parse(text: &str) -> Result<Self> {
        match text.trim().to_ascii_lowercase().as_str() {
            "vacuum" => Ok(Self::Vacuum),
            "air" => Ok(Self::Air),
            _ => Err(Error::plan(format!(
                "medium {text:?} is neither \"vacuum\" nor \"air\""
            ))),
        }
    }
}

impl fmt::Display for Medium {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Vacuum => "vacuum",
            Self::Air => "air",
        })
    }
}

/// Unit of a spectral axis.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum WavelengthUnit {
    /// A wavelength: how many Å one unit is.
    Length {
        /// Å per unit.
        aa: f64,
    },
    /// A wavenumber: how many cm⁻¹ one unit is. Always vacuum.
    Wavenumber {
        /// cm⁻¹ per unit.
        per_cm: f64,
    },
    /// A frequency: how many Hz one unit is. Photon energies are frequencies times h.
    Frequency {
        /// Hz per unit.
        hz: f64,
    },
}

const SPECTRAL_UNITS: &str = "use a length (Angstrom, nm, um, m), a wavenumber (cm-1), a frequency (Hz, GHz, THz) or a photon energy (eV)";

impl WavelengthUnit {
    /// Reads a unit of length, wavenumber, frequency or photon energy: `Å`, `Angstrom`, `nm`, `um`,
    /// `micron`, `m`, `10**-10 m`, `cm-1`, `1/cm`, `GHz`, `eV` …
    ///
    /// # Errors
    /// Anything else, naming what is accepted.
    pub fn parse(text: &str) -> Result<Self> {
        let unit = grammar::parse(text).map_err(|e| e.remedy(SPECTRAL_UNITS))?;
        let [mass, length, time, ..] = unit.powers;
        let rest = unit.powers[ANGLE..].iter().all(|p| *p == 0);
        match (mass, length, time) {
            (0, 1, 0) if rest => Ok(Self::Length { aa: unit.factor(8) }),
            (0, -1, 0) if rest => Ok(Self::Wavenumber {
                per_cm: unit.factor(0),
            }),
            (0, 0, -1) if rest => Ok(Self::Frequency { hz: unit.factor(0) }),
            (1, 2, -2) if rest => Ok(Self::Frequency {
                hz: unit.factor(0) / PLANCK_ERG_S,
            }),
            (0, 1, -1) if rest => Err(Error::plan(format!("{text:?} is a velocity")).remedy(
                format!("convert it with the rest wavelength; {SPECTRAL_UNITS}"),
            )),
            _ => Err(
                Error::plan(format!("{text:?} is not a unit of a spectral axis"))
                    .remedy(SPECTRAL_UNITS),
            ),
        }
    }

    /// Vacuum wavelength in Å of a value on this axis; the medium matters for lengths only.
    pub fn vacuum_aa(&self, value: f64, medium: Medium) -> f64 {
        match *self {
            Self::Length { aa } => match medium {
                Medium::Vacuum => value * aa,
                Medium::Air => vacuum_from_air_aa(value * aa),
            },
            Self::Wavenumber { per_cm } => 1.0e8 / (value * per_cm),
            Self::Frequency { hz } => LIGHT_AA_S / (value * hz),
        }
    }

    /// The value on this axis of a vacuum wavelength in Å; inverse of [`WavelengthUnit::vacuum_aa`].
    pub fn from_vacuum_aa(&self, vacuum_aa: f64, medium: Medium) -> f64 {
        match *self {
            Self::Length { aa } => match medium {
                Medium::Vacuum => vacuum_aa / aa,
                Medium::Air => air_from_vacuum_aa(vacuum_aa) / aa,
            },
            Self::Wavenumber { per_cm } => 1.0e8 / (vacuum_aa * per_cm),
            Self::Frequency { hz } => LIGHT_AA_S / (vacuum_aa * hz),
        }
    }

    /// True when both are the same unit up to rounding.
    pub fn agrees_with(&self, other: &Self) -> bool {
        match (*self, *other) {
            (Self::Length { aa: a }, Self::Length { aa: b })
            | (Self::Wavenumber { per_cm: a }, Self::Wavenumber { per_cm: b })
            | (Self::Frequency { hz: a }, Self::Frequency { hz: b }) => same(a, b),
            _ => false,
        }
    }
}

fn same(a: f64, b: f64) -> bool {
    (a - b).abs() <= 1.0e-9 * a.abs()
}

/// Canonical text, which [`WavelengthUnit::parse`] reads back.
impl fmt::Display for WavelengthUnit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (value, names): (f64, &[(f64, &str)]) = match *self {
            Self::Length { aa } => (
                aa,
                &[
                    (1.0, "Angstrom"),
                    (10.0, "nm"),
                    (1e4, "um"),
                    (1e7, "mm"),
                    (1e8, "cm"),
                    (1e10, "m"),
                ],
            ),
            Self::Wavenumber { per_cm } => (per_cm, &[(1.0, "cm-1"), (0.01, "m-1")]),
            Self::Frequency { hz } => (
                hz,
                &[(1.0, "Hz"), (1e6, "MHz"), (1e9, "GHz"), (1e12, "THz")],
            ),
        };
        match names.iter().find(|(n, _)| same(*n, value)) {
            Some((_, name)) => f.write_str(name),
            None => write!(f, "{value:e} {}", names[0].1),
        }
    }
}

/// What a flux density is counted per.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Per {
    Angstrom,
    Hertz,
    Wavenumber,
}

/// Unit of a flux density or surface brightness.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FluxUnit {
    /// One unit in erg (or photons) s⁻¹ cm⁻² per Å, Hz or cm⁻¹, and per arcsec² if `per_area`.
    factor: f64,
    per: Per,
    photons: bool,
    per_area: bool,
}

const FLUX_UNITS: &str = "use erg/s/cm2/Angstrom, W/m2/um, W/m2/nm, Jy, mJy, erg/s/cm2/Hz or photon/s/cm2/Angstrom, with a factor such as 1e-17 if need be, or one of these per arcsec2 or sr (MJy/sr)";

impl FluxUnit {
    /// Reads a unit such as `erg/s/cm2/Angstrom`, `10**-16 erg/s/cm2/Angstrom`, `W m-2 um-1`, `Jy`,
    /// `mJy/arcsec2`, `MJy/sr`, `photon/s/cm2/Angstrom`.
    ///
    /// # Errors
    /// A string that is no unit, a line flux, counts, magnitudes, or any other quantity.
    pub fn parse(text: &str) -> Result<Self> {
        let unit = grammar::parse(text).map_err(|e| e.remedy(FLUX_UNITS))?;
        Self::from_quantity(&unit).ok_or_else(|| not_a_density(text, &unit))
    }

    fn from_quantity(unit: &Quantity) -> Option<Self> {
        let [mass, length, time, angle, photons, ..] = unit.powers;
        let strange = unit.powers[COUNT..].iter().any(|p| *p != 0);
        let (per, shift, photons) = match (photons, mass, length, time) {
            (0, 1, -1, -3) => (Per::Angstrom, -8, false),
            (0, 1, 0, -2) => (Per::Hertz, 0, false),
            (0, 1, 1, -3) => (Per::Wavenumber, 0, false),
            (1, 0, -3, -1) => (Per::Angstrom, -8, true),
            (1, 0, -2, 0) => (Per::Hertz, 0, true),
            (1, 0, -1, -1) => (Per::Wavenumber, 0, true),
            _ => return None,
        };
        if strange || !(angle == 0 || angle == -2) {
            return None;
        }
        Some(Self {
            factor: unit.factor(shift),
            per,
            photons,
            per_area: angle == -2,
        })
    }

    /// erg s⁻¹ cm⁻² Å⁻¹ (per arcsec² for a surface brightness) of a value at a vacuum wavelength.
    pub fn to_erg_s_cm2_aa(&self, value: f64, vacuum_aa: f64) -> f64 {
        value * self.erg_s_cm2_aa_per_unit(vacuum_aa)
    }

    /// The value in this unit of a flux density in erg s⁻¹ cm⁻² Å⁻¹ (per arcsec² for a surface
    /// brightness); inverse of [`FluxUnit::to_erg_s_cm2_aa`].
    pub fn from_erg_s_cm2_aa(&self, erg_s_cm2_aa: f64, vacuum_aa: f64) -> f64 {
        erg_s_cm2_aa / self.erg_s_cm2_aa_per_unit(vacuum_aa)
    }

    fn erg_s_cm2_aa_per_unit(&self, vacuum_aa: f64) -> f64 {
        let energy = if self.photons {
            HC_ERG_AA / vacuum_aa
        } else {
            1.0
        };
        let width = match self.per {
            Per::Angstrom => 1.0,
            Per::Hertz => LIGHT_AA_S / (vacuum_aa * vacuum_aa),
            Per::Wavenumber => 1.0e8 / (vacuum_aa * vacuum_aa),
        };
        self.factor * energy * width
    }

    /// True for a surface brightness, which is then per arcsec².
    pub fn per_area(&self) -> bool {
        self.per_area
    }

    /// True when both are the same unit up to rounding.
    pub fn agrees_with(&self, other: &Self) -> bool {
        same(self.factor, other.factor)
            && (self.per, self.photons, self.per_area) == (other.per, other.photons, other.per_area)
    }
}

/// Canonical text, which [`FluxUnit::parse`] reads back.
impl fmt::Display for FluxUnit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let jansky = self.per == Per::Hertz && !self.photons;
        let factor = if jansky {
            self.factor * 1e23
        } else {
            self.factor
        };
        if !same(factor, 1.0) {
            write!(f, "{factor:e} ")?;
        }
        if jansky {
            f.write_str("Jy")?;
        } else {
            f.write_str(if self.photons { "photon" } else { "erg" })?;
            f.write_str(match self.per {
                Per::Angstrom => "/s/cm2/Angstrom",
                Per::Hertz => "/s/cm2/Hz",
                Per::Wavenumber => "/s/cm2/cm-1",
            })?;
        }
        f.write_str(if self.per_area { "/arcsec2" } else { "" })
    }
}

/// Says what a unit is when it is not a flux density.
fn not_a_density(text: &str, unit: &Quantity) -> Error {
    let p = &unit.powers;
    let energy = (p[MASS], p[LENGTH], p[TIME], p[PHOTON]);
    if p[COUNT] != 0 {
        return Error::plan(format!(
            "{text:?} counts detector events; it is not flux calibrated"
        ))
        .remedy("calibrate the spectrum in flux first");
    }
    if p[PIXEL] != 0 {
        return Error::plan(format!(
            "{text:?} is per pixel, spaxel or beam, whose size is not known"
        ))
        .remedy(format!(
            "convert to per arcsec2, or state the unit without it; {FLUX_UNITS}"
        ));
    }
    if p[MAGNITUDE] != 0 {
        return Error::plan(format!("{text:?} is logarithmic")).remedy(FLUX_UNITS);
    }
    if matches!(energy, (1, 0, -3, 0) | (0, -2, -1, 1)) {
        return Error::plan(format!("{text:?} is a line flux, not a flux density")).remedy(
            format!("a spectrum is per wavelength or frequency; {FLUX_UNITS}"),
        );
    }
    let error = Error::plan(format!("{text:?} is not a flux density"));
    match one_solidus(text) {
        Some(meant) => error.remedy(format!(
            "a solidus divides by the one unit after it only; write {meant:?} if that is meant"
        )),
        None => error.remedy(FLUX_UNITS),
    }
}

/// For `erg/s cm2 A`: the string with everything after its solidus in parentheses, when that is a
/// flux density.
fn one_solidus(text: &str) -> Option<String> {
    let (top, bottom) = text.split_once('/')?;
    let meant = format!("{}/({})", top.trim(), bottom.trim());
    let unit = grammar::parse(&meant).ok()?;
    FluxUnit::from_quantity(&unit).map(|_| meant)
}

/// The candidate most like a mistyped name, when one is close enough to be worth suggesting.
pub fn did_you_mean<'a>(typed: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let folded = typed.to_lowercase();
    known
        .into_iter()
        .map(|k| (strsim::jaro_winkler(&folded, &k.to_lowercase()), k))
        .filter(|(score, _)| *score > 0.78)
        .max_by(|a, b| a.0.total_cmp(&b.0))
        .map(|(_, k)| k)
}

#[cfg(test)]
mod tests;
