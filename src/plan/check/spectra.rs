//! Spectra of the plan: how to read each, its frame, resolution and errors.

use super::Checker;
use super::convert::{columns, file_name, fits_columns, number_in, resolution};
use crate::analysis::SpectrumSettings;
use crate::fit::{FitSettings, Resolution, Sampling};
use crate::frame::orbit::Sky;
use crate::frame::{Frame, Geometry};
use crate::ground::{Caveat, Error, FluxUnit, Medium, Result, WavelengthUnit};
use crate::plan::schema::{ColumnPlan, SpectrumPlan};
use crate::spectrum::{ErrorKind, FitsLayout, Layout, Part, TextLayout, looks_like_fits};
use std::path::{Path, PathBuf};

/// The frames a plan or the keyword SPECSYS can name.
const FRAMES: [(&str, &str); 5] = [
    ("observer", "TOPOCENT"),
    ("comet", "SOURCE"),
    ("geocentric", "GEOCENTR"),
    ("heliocentric", "HELIOCEN"),
    ("barycentric", "BARYCENT"),
];

/// A frame by its word in the plan or in the header.
///
/// # Errors
/// An unknown word, or a frame in which the comet's velocity is not known.
pub(super) fn frame(word: &str, plan: &SpectrumPlan, sky: Option<&Sky>) -> Result<Frame> {
    let upper = word.trim().to_ascii_uppercase();
    let known = FRAMES
        .iter()
        .find(|(own, fits)| *own == word || *fits == upper);
    let Some((name, _)) = known else {
        let words: Vec<&str> = FRAMES.iter().map(|f| f.0).collect();
        return Err(Error::plan(format!(
            "the frame {word:?} of the wavelengths is not known"
        ))
        .remedy(format!("set frame to one of {}", words.join(", "))));
    };
    let computed = match *name {
        "observer" => return Ok(Frame::Observer),
        "comet" => return Ok(Frame::Comet),
        "geocentric" => sky.map(|s| s.sight_geocentric_km_s),
        "heliocentric" => sky.map(|s| s.sight_heliocentric_km_s),
        _ => sky.map(|s| s.sight_barycentric_km_s),
    };
    let velocity_km_s = plan.frame_velocity_km_s.or(computed).ok_or_else(|| {
        Error::plan(format!(
            "the wavelengths are in the {name} frame, and the comet's velocity in it is not known"
        ))
        .remedy("give a date with [comet.orbit], or frame_velocity_km_s in the [[spectrum]] table")
    })?;
    number_in(
        "frame_velocity_km_s",
        velocity_km_s,
        -700.0,
        700.0,
        "a velocity in km/s, positive when receding",
    )?;
    Ok(Frame::Shifted { velocity_km_s })
}

impl Checker<'_> {
    /// Unit and medium of the spectral axis as far as the plan says them.
    fn axis(&self, i: usize) -> Result<(Option<WavelengthUnit>, Option<Medium>)> {
        let s = &self.plan.spectrum[i];
        let at = i.to_string();
        let unit = match &s.wavelength_unit {
            Some(text) => Some(
                WavelengthUnit::parse(text)
                    .map_err(|e| self.file.point(e, &["spectrum", &at, "wavelength_unit"]))?,
            ),
            None => None,
        };
        let medium = match (&s.medium, &unit) {
            (Some(text), _) => Some(
                Medium::parse(text)
                    .map_err(|e| self.file.point(e, &["spectrum", &at, "medium"]))?,
            ),
            (None, Some(WavelengthUnit::Length { .. }) | None) => None,
            (None, Some(_)) => Some(Medium::Vacuum),
        };
        Ok((unit, medium))
    }

    /// Unit and medium of lengths elsewhere in the plan: their own, or the first spectrum's.
    pub(super) fn axis_or(
        &self,
        unit: Option<&String>,
        medium: Option<&String>,
        keys: &[&str],
    ) -> Result<(WavelengthUnit, Medium)> {
        let point = |e: Error, key: &str| {
            let mut keys = keys.to_vec();
            keys.push(key);
            self.file.point(e, &keys)
        };
        let first = self.axis(0)?;
        let own_unit = match unit {
            Some(text) => Some(WavelengthUnit::parse(text).map_err(|e| point(e, "unit"))?),
            None => first.0,
        };
        let own_medium = match medium {
            Some(text) => Some(Medium::parse(text).map_err(|e| point(e, "medium"))?),
            None => first.1,
        };
        let missing = |name: &str| {
            self.file.point(
                Error::plan(format!(
                    "the {name} of the lengths given here is not known: the first spectrum's is in its file only"
                ))
                .remedy(format!("add {name} = … to this table")),
                keys,
            )
        };
        let unit = own_unit.ok_or_else(|| missing("unit"))?;
        let medium = match unit {
            WavelengthUnit::Length { .. } => own_medium.ok_or_else(|| missing("medium"))?,
            _ => Medium::Vacuum,
        };
        Ok((unit, medium))
    }

    pub(super) fn spectra(
        &mut self,
        geometry: &Geometry,
        sky: Option<&Sky>,
    ) -> Result<Vec<SpectrumSettings>> {
        if self.plan.spectrum.is_empty() {
            return Err(self.file.point(
                Error::plan("the plan names no spectrum").remedy("add a [[spectrum]] table"),
                &["spectrum"],
            ));
        }
        let continuum = self.continuum(geometry)?;
        (0..self.plan.spectrum.len())
            .map(|i| self.spectrum(i, &continuum, sky))
            .collect()
    }

    fn spectrum(
        &mut self,
        i: usize,
        continuum: &FitSettings,
        sky: Option<&Sky>,
    ) -> Result<SpectrumSettings> {
        let s = &self.plan.spectrum[i];
        let at = i.to_string();
        let (unit, _) = self.axis(i)?;
        let mut fit = continuum.clone();
        fit.resolution =
            resolution(s, unit).map_err(|e| self.point_at_value(e, &["spectrum", &at]))?;
        if let Some(name) = s.instrument_fwhm_file.clone() {
            fit.resolution = Some(self.instrument_table(i, &name)?);
        }
        let s = &self.plan.spectrum[i];
        let point = |e: Error, key: &str| self.file.point(e, &["spectrum", &at, key]);
        fit.sampling = match s.sampling.as_deref() {
            None | Some("centre") => Sampling::Centre,
            Some("pixel") => Sampling::Pixel,
            Some(other) => {
                return Err(point(
                    Error::plan(format!(
                        "sampling {other:?} is neither \"centre\" nor \"pixel\""
                    )),
                    "sampling",
                ));
            }
        };
        let word = s.frame.as_deref().unwrap_or("observer");
        let frame = frame(word, s, sky).map_err(|e| point(e, "frame"))?;
        let calibration_sigma = s.calibration_sigma.unwrap_or(0.0);
        number_in(
            "calibration_sigma",
            calibration_sigma,
            0.0,
            1.0,
            "give a relative error such as 0.05",
        )
        .map_err(|e| point(e, "calibration_sigma"))?;
        if s.calibration_sigma.is_none() {
            self.caveats.push(Caveat::Other {
                code: "no-calibration-error",
                text: format!(
                    "{}: no calibration_sigma given; fluxes and production rates carry no calibration error",
                    file_name(&s.file)
                ),
            });
        }
        Ok(SpectrumSettings {
            frame,
            fit,
            calibration_sigma,
        })
    }

    /// Instrumental widths against wavelength.
    fn instrument_table(&mut self, i: usize, name: &str) -> Result<Resolution> {
        let at = i.to_string();
        let keys = ["spectrum", at.as_str(), "instrument_fwhm_file"];
        let s = &self.plan.spectrum[i];
        if s.resolving_power.is_some() || s.instrument_fwhm.is_some() {
            return Err(self.file.point(
                Error::plan("the resolution is given twice")
                    .remedy("keep one of resolving_power, instrument_fwhm, instrument_fwhm_file"),
                &keys,
            ));
        }
        let axis = self.axis_or(s.wavelength_unit.as_ref(), s.medium.as_ref(), &keys)?;
        let WavelengthUnit::Length { aa } = axis.0 else {
            return Err(self.file.point(
                Error::plan("instrument_fwhm_file needs a wavelength_unit that is a length"),
                &keys,
            ));
        };
        let curve = self.curve(name, axis)?;
        if let Some(bad) = curve.value.iter().find(|w| !(**w > 0.0 && w.is_finite())) {
            return Err(self.file.point(
                Error::input(format!("{name}: the width {bad} is not positive")),
                &keys,
            ));
        }
        let widths = curve.value.iter().map(|w| w * aa);
        Ok(Resolution::Table(
            curve.wavelength_aa.iter().copied().zip(widths).collect(),
        ))
    }

    pub(super) fn files(&self) -> Result<Vec<(PathBuf, Layout)>> {
        (0..self.plan.spectrum.len())
            .map(|i| {
                let path = PathBuf::from(&self.plan.spectrum[i].file);
                let layout = if looks_like_fits(&path) {
                    Layout::Fits(self.fits_layout(i)?)
                } else {
                    Layout::Text(self.text_layout(i, &path)?)
                };
                Ok((path, layout))
            })
            .collect()
    }

    pub(super) fn flux_unit(&self, i: usize) -> Result<Option<FluxUnit>> {
        let at = i.to_string();
        match &self.plan.spectrum[i].flux_unit {
            Some(text) => FluxUnit::parse(text)
                .map(Some)
                .map_err(|e| self.file.point(e, &["spectrum", &at, "flux_unit"])),
            None => Ok(None),
        }
    }

    fn text_layout(&self, i: usize, path: &Path) -> Result<TextLayout> {
        let s = &self.plan.spectrum[i];
        let at = i.to_string();
        let missing = |key: &str, remedy: &str| {
            self.file.point(
                Error::plan(format!(
                    "the key {key} is missing, and a text file does not say it"
                ))
                .remedy(remedy),
                &["spectrum", &at],
            )
        };
        for (key, given) in [
            ("part", s.part.is_some()),
            ("row", s.row.is_some()),
            ("error_is", s.error_is.is_some()),
        ] {
            if given && path.exists() {
                let error = Error::plan(format!(
                    "{key} is for FITS files, and {} is not one",
                    s.file
                ));
                return Err(self.file.point(error, &["spectrum", &at, key]));
            }
        }
        let (unit, medium) = self.axis(i)?;
        let unit = unit.ok_or_else(|| {
            missing(
                "wavelength_unit",
                "add wavelength_unit = \"Angstrom\", \"nm\", \"um\" …",
            )
        })?;
        let medium = medium.ok_or_else(|| {
            self.file.point(
                Error::plan("the key medium is missing: wavelengths can be in vacuum or air")
                    .remedy("add medium = \"vacuum\" or medium = \"air\""),
                &["spectrum", &at, "wavelength_unit"],
            )
        })?;
        let flux = self.flux_unit(i)?.ok_or_else(|| {
            missing(
                "flux_unit",
                "add flux_unit = \"erg/s/cm2/Angstrom\", \"W/m2/um\", \"Jy\" …",
            )
        })?;
        let mut layout = TextLayout::new(unit, medium, flux);
        columns(&s.columns, &mut layout)
            .map_err(|e| self.file.point(e, &["spectrum", &at, "columns"]))?;
        Ok(layout)
    }

    fn fits_layout(&self, i: usize) -> Result<FitsLayout> {
        let s = &self.plan.spectrum[i];
        let at = i.to_string();
        let point = |e: Error, key: &str| self.file.point(e, &["spectrum", &at, key]);
        let (wavelength_unit, medium) = self.axis(i)?;
        let error_is = match s.error_is.as_deref() {
            None => None,
            Some("sigma") => Some(ErrorKind::Sigma),
            Some("variance") => Some(ErrorKind::Variance),
            Some("inverse variance") => Some(ErrorKind::InverseVariance),
            Some(other) => {
                return Err(point(
                    Error::plan(format!("error_is {other:?} is not known"))
                        .remedy("one of \"sigma\", \"variance\", \"inverse variance\""),
                    "error_is",
                ));
            }
        };
        if s.row == Some(0) {
            return Err(point(Error::plan("row 0: rows are counted from 1"), "row"));
        }
        let mut layout = FitsLayout {
            part: s.part.as_ref().map(|p| match p {
                ColumnPlan::Number(n) => Part::Number(*n),
                ColumnPlan::Name(name) => Part::Name(name.clone()),
            }),
            row: s.row,
            wavelength_unit,
            medium,
            flux_unit: self.flux_unit(i)?,
            error_is,
            ..FitsLayout::default()
        };
        fits_columns(&s.columns, &mut layout).map_err(|e| point(e, "columns"))?;
        Ok(layout)
    }
}
