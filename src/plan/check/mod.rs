//! From a plan to checked settings: every value judged, every default filled in, every number of
//! the line lists looked up.

mod bands;
mod coma;
mod continuum;
mod convert;
mod curves;
mod efficiency;
mod geometry;
mod lifetimes;
mod light;
mod lines;
mod ratios;
mod shape;
mod simulate;
mod spectra;

pub use geometry::{instant, orbit, site};

use crate::analysis::Settings;
use crate::forward::SceneSettings;
use crate::ground::{Caveat, Error, Result};
use crate::plan::document::PlanFile;
use crate::plan::resolve::defaults;
use crate::plan::schema::Plan;
use crate::ratio::DrawSettings;
use crate::spectrum::{Layout, Spectrum, Understood};
use crate::tables::Tables;
use convert::{aperture, number_in};
use geometry::date_text;
use light::Light;
use std::collections::BTreeMap;
use std::path::PathBuf;

/// A checked plan: settings for the analysis, and for each spectrum where and how to read it.
pub struct Checked {
    /// For the analysis.
    pub settings: Settings,
    /// Paths of the spectra and their layouts.
    pub files: Vec<(PathBuf, Layout)>,
    /// What to simulate, where the plan says.
    pub scene: Option<SceneSettings>,
    /// Files of curves that belong to the settings.
    pub curves: Vec<PathBuf>,
    light: Light,
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
        curves: Vec::new(),
    };
    let light = checker.light()?;
    let settings = checker.settings()?;
    let files = checker.files()?;
    let scene = checker.scene(&settings, &light)?;
    Ok(Checked {
        settings,
        files,
        scene,
        curves: std::mem::take(&mut checker.curves),
        light,
        resolved: plan,
    })
}

impl Checked {
    /// Everything that can be settled only once the spectra are read: frames that the files name,
    /// transmissions divided out, sunlight brought to each spectrum's resolution.
    ///
    /// # Errors
    /// A frame in which the velocity of the comet is not known; a curve that does not cover its spectrum.
    pub fn settle(
        &mut self,
        file: &PlanFile,
        read: &[Option<Understood>],
        spectra: &mut [Spectrum],
    ) -> Result<()> {
        self.settle_frames(file, read)?;
        self.light.divide(&mut self.settings, spectra)?;
        self.settle_light(spectra)
    }

    /// Sunlight brought to the resolution of each spectrum.
    ///
    /// # Errors
    /// A spectrum whose resolution is not known, or a curve that does not cover it.
    pub fn settle_light(&mut self, spectra: &[Spectrum]) -> Result<()> {
        self.light.settle(&mut self.settings, spectra)
    }

    /// Sets the frames that the files themselves name (SPECSYS) where the plan is silent.
    ///
    /// # Errors
    /// A frame in which the comet's velocity is not known.
    fn settle_frames(&mut self, file: &PlanFile, read: &[Option<Understood>]) -> Result<()> {
        for (i, understood) in read.iter().enumerate() {
            let plan = &self.resolved.spectrum[i];
            let said = understood.as_ref().and_then(|u| {
                let word = u.frame.iter().find(|(key, _)| key == "SPECSYS");
                word.map(|(_, value)| value.clone())
            });
            if let (None, Some(word)) = (&plan.frame, said) {
                let frame = spectra::frame(&word, plan, self.settings.sky.as_ref())
                    .map_err(|e| file.point(e, &["spectrum", &i.to_string(), "file"]))?;
                self.settings.spectra[i].frame = frame;
            }
        }
        Ok(())
    }
}

struct Checker<'a> {
    file: &'a PlanFile,
    plan: &'a Plan,
    tables: &'a Tables,
    caveats: Vec<Caveat>,
    sources: BTreeMap<String, String>,
    curves: Vec<PathBuf>,
}

impl Checker<'_> {
    fn settings(&mut self) -> Result<Settings> {
        let c = &self.plan.comet;
        let (geometry, sky) = self.geometry()?;
        if c.label.trim().is_empty() {
            return Err(self.file.point(
                Error::plan("the comet's label is empty"),
                &["comet", "label"],
            ));
        }
        let aperture =
            aperture(&self.plan.aperture).map_err(|e| self.file.point(e, &["aperture"]))?;
        let spectra = self.spectra(&geometry, sky.as_ref())?;
        let bands = self.bands(&geometry)?;
        let ratios = self.ratios(&bands)?;
        let species = self.species(&bands, &ratios, &geometry)?;
        self.note_lifetimes(&bands, &ratios, &geometry)?;
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
            date: c.date.as_ref().map(date_text),
            sky,
            geometry,
            aperture,
            spectra,
            bands,
            species,
            ratios,
            speed_sigma,
            draws,
            detection_sigma: self.detection_sigma()?,
            afrho_at_aa: self.afrho_at_aa()?,
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
}
