//! Units of wavelength and flux density, converted once on the way in.
//!
//! Flux densities become erg s⁻¹ cm⁻² Å⁻¹ (surface brightness: the same per arcsec²), spectral axes
//! become vacuum Å. F_λ = F_ν c/λ².

use super::constants::{ARCSEC2_PER_SR, LIGHT_AA_S};
use super::{Error, Result, vacuum_from_air_aa};

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
    /// A frequency: how many Hz one unit is.
    Frequency {
        /// Hz per unit.
        hz: f64,
    },
}

impl WavelengthUnit {
    /// Reads a unit name: `Å`, `Angstrom`, `nm`, `um`, `µm`, `m`, `cm-1`, `Hz`, `GHz` …
    pub fn parse(text: &str) -> Result<Self> {
        let t = text.trim();
        Ok(match t {
            "Å" | "A" | "AA" | "Angstrom" | "angstrom" | "Angstroms" | "angstroms" => {
                Self::Length { aa: 1.0 }
            }
            "nm" => Self::Length { aa: 10.0 },
            "um" | "µm" | "μm" | "micron" | "microns" => Self::Length { aa: 1.0e4 },
            "mm" => Self::Length { aa: 1.0e7 },
            "m" => Self::Length { aa: 1.0e10 },
            "cm-1" | "cm^-1" | "1/cm" | "cm**-1" => Self::Wavenumber { per_cm: 1.0 },
            "Hz" => Self::Frequency { hz: 1.0 },
            "GHz" => Self::Frequency { hz: 1.0e9 },
            "THz" => Self::Frequency { hz: 1.0e12 },
            _ => {
                let known = ["Angstrom", "nm", "um", "m", "cm-1", "Hz", "GHz", "THz"];
                return Err(
                    Error::plan(format!("wavelength unit {text:?} is not known"))
                        .remedy(format!("use one of {}", known.join(", "))),
                );
            }
        })
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
}

/// Unit of a flux density or surface brightness.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FluxUnit {
    /// cgs value of one unit: erg s⁻¹ cm⁻² Å⁻¹, or erg s⁻¹ cm⁻² Hz⁻¹ when `per_hz`.
    factor: f64,
    per_hz: bool,
    per_area: bool,
}

impl FluxUnit {
    /// Reads a unit such as `erg/s/cm2/Angstrom`, `W m-2 um-1`, `Jy`, `mJy/arcsec2`, `MJy/sr`.
    pub fn parse(text: &str) -> Result<Self> {
        let flat: String = text
            .replace("Å", "Angstrom")
            .replace(['µ', 'μ'], "u")
            .chars()
            .filter(|c| !c.is_whitespace() && !"^*.".contains(*c))
            .collect();
        let (body, per_area, area_factor) = split_area(&flat);
        let (factor, per_hz) = match body.as_str() {
            "erg/s/cm2/Angstrom"
            | "erg/s/cm2/A"
            | "ergs-1cm-2Angstrom-1"
            | "ergs-1cm-2A-1"
            | "erg/cm2/s/A"
            | "erg/cm2/s/Angstrom"
            | "ergcm-2s-1A-1"
            | "ergcm-2s-1Angstrom-1" => (1.0, false),
            "Wm-2um-1" | "W/m2/um" => (0.1, false),
            "Wm-2nm-1" | "W/m2/nm" => (100.0, false),
            "Jy" => (1.0e-23, true),
            "mJy" => (1.0e-26, true),
            "uJy" => (1.0e-29, true),
            "MJy" => (1.0e-17, true),
            "erg/s/cm2/Hz" | "ergs-1cm-2Hz-1" => (1.0, true),
            "Wm-2Hz-1" | "W/m2/Hz" => (1.0e3, true),
            _ => {
                return Err(Error::plan(format!("flux unit {text:?} is not known")).remedy(
                    "use erg/s/cm2/Angstrom, W/m2/um, W/m2/nm, Jy, mJy, erg/s/cm2/Hz, or one of these per arcsec2 or sr",
                ));
            }
        };
        Ok(Self {
            factor: factor * area_factor,
            per_hz,
            per_area,
        })
    }

    /// erg s⁻¹ cm⁻² Å⁻¹ (per arcsec² for a surface brightness) of a value at a vacuum wavelength.
    pub fn to_erg_s_cm2_aa(&self, value: f64, vacuum_aa: f64) -> f64 {
        let density = value * self.factor;
        if self.per_hz {
            density * LIGHT_AA_S / (vacuum_aa * vacuum_aa)
        } else {
            density
        }
    }

    /// True for a surface brightness, which is then per arcsec².
    pub fn per_area(&self) -> bool {
        self.per_area
    }
}

fn split_area(flat: &str) -> (String, bool, f64) {
    for (suffix, factor) in [
        ("/arcsec2", 1.0),
        ("arcsec-2", 1.0),
        ("/sr", 1.0 / ARCSEC2_PER_SR),
        ("sr-1", 1.0 / ARCSEC2_PER_SR),
    ] {
        if let Some(body) = flat.strip_suffix(suffix) {
            return (body.to_owned(), true, factor);
        }
    }
    (flat.to_owned(), false, 1.0)
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
