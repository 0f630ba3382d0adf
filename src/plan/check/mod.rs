//! From a plan to checked settings: every value judged, every default filled in, every number of
//! the line lists looked up.

mod bands;
mod coma;
mod convert;
mod efficiency;
mod ratios;
mod simulate;

use crate::analysis::{Settings, SpectrumSettings};
use crate::fit::{FitSettings, Sampling};
use crate::forward::SceneSettings;
use crate::frame::{Frame, Geometry};
use crate::ground::{Caveat, Error, FluxUnit, Medium, Result, WavelengthUnit};
use crate::plan::document::PlanFile;
use crate::plan::resolve::defaults;
use crate::plan::schema::Plan;
use crate::ratio::DrawSettings;
use crate::spectrum::TextLayout;
use crate::tables::{Band, Tables};
use convert::{aperture, columns, file_name, number_in, range_aa, resolution};
use std::collections::BTreeMap;
use std::path::PathBuf;

/// A checked plan: settings for the analysis, and for each spectrum where and how to read it.
pub struct Checked {
    /// For the analysis.
    pub settings: Settings,
    /// Paths of the spectra and their layouts.
    pub files: Vec<(PathBuf, TextLayout)>,
    /// What to simulate, where the plan says.
    pub scene: Option<SceneSettings>,
    /// The plan with all defaults filled in and paths made absolute.
    pub resolved: Plan,
}

/// Checks a plan against the tables.
///
/// # Errors
/// The first value that makes no sense, with the plan's line, the allowed range and a remedy.
pub fn check(file: &PlanFile, tables: &Tables) -> Result<Checked> {
    let plan = defaults(&file.plan, file.folder());
    let mut checker = Checker {
        file,
        plan: &plan,
        tables,
        caveats: Vec::new(),
        sources: BTreeMap::new(),
    };
    let settings = checker.settings()?;
    let files = checker.files()?;
    let scene = checker.scene(&settings)?;
    Ok(Checked {
        settings,
        files,
        scene,
        resolved: plan,
    })
}

/// Identifiers of the line lists' bands whose centre lies between two vacuum wavelengths, Å.
pub fn default_bands_in(tables: &Tables, low_aa: f64, high_aa: f64) -> Vec<&Band> {
    tables
        .bands()
        .iter()
        .filter(|b| low_aa < b.centre_aa && b.centre_aa < high_aa)
        .collect()
}

struct Checker<'a> {
    file: &'a PlanFile,
    plan: &'a Plan,
    tables: &'a Tables,
    caveats: Vec<Caveat>,
    sources: BTreeMap<String, String>,
}

impl Checker<'_> {
    fn settings(&mut self) -> Result<Settings> {
        let c = &self.plan.comet;
        let geometry = Geometry::new(
            c.heliocentric_au,
            c.heliocentric_km_s,
            c.observer_au,
            c.observer_km_s,
        )
        .map_err(|e| self.point_at_value(e, &["comet"]))?;
        if c.label.trim().is_empty() {
            return Err(self.file.point(
                Error::plan("the comet's label is empty"),
                &["comet", "label"],
            ));
        }
        let aperture =
            aperture(&self.plan.aperture).map_err(|e| self.file.point(e, &["aperture"]))?;
        let spectra = self.spectra()?;
        let bands = self.bands(&geometry)?;
        let ratios = self.ratios(&bands)?;
        let species = self.species(&bands, &ratios, &geometry)?;
        let coma = &self.plan.coma;
        let speed_sigma = number_in(
            "speed_sigma",
            coma.speed_sigma.expect("invariant: default filled in"),
            0.0,
            1.0,
            "give a relative error such as 0.1",
        )
        .map_err(|e| self.file.point(e, &["coma", "speed_sigma"]))?;
        let draws = DrawSettings {
            count: self.plan.draws.count.expect("invariant: default filled in"),
            seed: self.plan.draws.seed.expect("invariant: default filled in"),
        }
        .checked()
        .map_err(|e| self.file.point(e, &["draws", "count"]))?;
        let mut seen = Vec::new();
        self.caveats.retain(|c| {
            let fresh = !seen.contains(c);
            if fresh {
                seen.push(c.clone());
            }
            fresh
        });
        Ok(Settings {
            label: c.label.clone(),
            date: c.date.clone(),
            geometry,
            aperture,
            spectra,
            bands,
            species,
            ratios,
            speed_sigma,
            draws,
            detection_sigma: self.detection_sigma()?,
            caveats: std::mem::take(&mut self.caveats),
            sources: std::mem::take(&mut self.sources).into_iter().collect(),
        })
    }

    /// Points at the key that the error's own message starts with, inside a table.
    fn point_at_value(&self, error: Error, table: &[&str]) -> Error {
        let word = error
            .message()
            .split([' ', '='])
            .next()
            .unwrap_or_default()
            .to_owned();
        let mut keys = table.to_vec();
        keys.push(&word);
        self.file.point(error, &keys)
    }

    fn detection_sigma(&self) -> Result<f64> {
        number_in(
            "detection_sigma",
            self.plan
                .measure
                .detection_sigma
                .expect("invariant: default filled in"),
            0.5,
            20.0,
            "3 is common practice",
        )
        .map_err(|e| self.file.point(e, &["measure", "detection_sigma"]))
    }

    fn axis(&self, i: usize) -> Result<(WavelengthUnit, Medium)> {
        let s = &self.plan.spectrum[i];
        let at = i.to_string();
        let unit = WavelengthUnit::parse(&s.wavelength_unit)
            .map_err(|e| self.file.point(e, &["spectrum", &at, "wavelength_unit"]))?;
        let medium = match (&s.medium, &unit) {
            (Some(text), _) => {
                Medium::parse(text).map_err(|e| self.file.point(e, &["spectrum", &at, "medium"]))?
            }
            (None, WavelengthUnit::Length { .. }) => {
                return Err(self.file.point(
                    Error::plan("the key medium is missing: wavelengths can be in vacuum or air")
                        .remedy("add medium = \"vacuum\" or medium = \"air\""),
                    &["spectrum", &at, "wavelength_unit"],
                ));
            }
            (None, _) => Medium::Vacuum,
        };
        Ok((unit, medium))
    }

    /// Unit and medium of lengths elsewhere in the plan: their own, or the first spectrum's.
    fn axis_or(
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
        let unit = match unit {
            Some(text) => WavelengthUnit::parse(text).map_err(|e| point(e, "unit"))?,
            None => first.0,
        };
        let medium = match medium {
            Some(text) => Medium::parse(text).map_err(|e| point(e, "medium"))?,
            None => first.1,
        };
        Ok((unit, medium))
    }

    fn spectra(&mut self) -> Result<Vec<SpectrumSettings>> {
        if self.plan.spectrum.is_empty() {
            return Err(self.file.point(
                Error::plan("the plan names no spectrum").remedy("add a [[spectrum]] table"),
                &["spectrum"],
            ));
        }
        let continuum = self.continuum()?;
        (0..self.plan.spectrum.len())
            .map(|i| self.spectrum(i, &continuum))
            .collect()
    }

    fn spectrum(&mut self, i: usize, continuum: &FitSettings) -> Result<SpectrumSettings> {
        let s = &self.plan.spectrum[i];
        let at = i.to_string();
        let point = |e: Error, key: &str| self.file.point(e, &["spectrum", &at, key]);
        let (unit, _) = self.axis(i)?;
        let mut fit = continuum.clone();
        fit.resolution =
            resolution(s, unit).map_err(|e| self.point_at_value(e, &["spectrum", &at]))?;
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
        let frame = match s.frame.as_deref() {
            None | Some("observer") => Frame::Observer,
            Some("comet") => Frame::Comet,
            Some(other) => {
                return Err(point(
                    Error::plan(format!(
                        "frame {other:?} is neither \"observer\" nor \"comet\""
                    )),
                    "frame",
                ));
            }
        };
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

    fn continuum(&self) -> Result<FitSettings> {
        let c = &self.plan.continuum;
        let (unit, medium) = self.axis_or(c.unit.as_ref(), c.medium.as_ref(), &["continuum"])?;
        let mut fit = FitSettings::new(Vec::new());
        fit.continuum_order = c.order;
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

    fn files(&self) -> Result<Vec<(PathBuf, TextLayout)>> {
        self.plan
            .spectrum
            .iter()
            .enumerate()
            .map(|(i, s)| {
                let at = i.to_string();
                let (unit, medium) = self.axis(i)?;
                let flux = FluxUnit::parse(&s.flux_unit)
                    .map_err(|e| self.file.point(e, &["spectrum", &at, "flux_unit"]))?;
                let mut layout = TextLayout::new(unit, medium, flux);
                columns(&s.columns, &mut layout)
                    .map_err(|e| self.file.point(e, &["spectrum", &at, "columns"]))?;
                Ok((PathBuf::from(&s.file), layout))
            })
            .collect()
    }
}
