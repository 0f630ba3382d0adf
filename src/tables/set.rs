//! All tables together.

use super::bands::Band;
use super::coma_lengths::{ScaleLengths, SpeedLaw};
use super::comparison::ComparisonRow;
use super::efficiencies::Efficiency;
use super::files::Folder;
use super::photo::{PhotoBranch, PhotoRate};
use super::populations::{PopulationRow, SolarAbundance};
use super::provenance::{Source, Sources};
use super::sheet::Sheet;
use super::solar::SolarIrradiance;
use super::strengths::Strength;
use crate::ground::{Error, Result, Species, did_you_mean};
use std::collections::BTreeMap;
use std::path::Path;

/// Every table, read and checked.
#[derive(Clone, Debug)]
pub struct Tables {
    sources: BTreeMap<String, Source>,
    bands: Vec<Band>,
    efficiencies: Vec<Efficiency>,
    scale_lengths: Vec<ScaleLengths>,
    speed_laws: Vec<SpeedLaw>,
    photo_rates: Vec<PhotoRate>,
    photo_branches: Vec<PhotoBranch>,
    strengths: Vec<Strength>,
    solar: SolarIrradiance,
    comparison: Vec<ComparisonRow>,
    populations: Vec<PopulationRow>,
    solar_abundances: Vec<SolarAbundance>,
}

fn open(folder: &Folder, file: &str, columns: &[&'static str]) -> Result<Sheet> {
    let (path, text) = folder.text(file)?;
    Sheet::parse(&path, &text, columns)
}

/// Two folders may share a key only for the same work.
fn merge(lists: Sources, comparison: Sources) -> Result<BTreeMap<String, Source>> {
    let mut all = lists.into_map();
    for (key, source) in comparison.into_map() {
        if let Some(other) = all.insert(key.clone(), source.clone())
            && other.reference != source.reference
        {
            return Err(Error::table(format!(
                "source key {key:?} stands for {:?} in the line lists and for {:?} in the comparison set",
                other.reference, source.reference
            ))
            .remedy("give one of the two another key"));
        }
    }
    Ok(all)
}

impl Tables {
    /// The tables embedded in the binary.
    pub fn bundled() -> Self {
        Self::load(None, None).expect("invariant: the bundled tables pass every check")
    }

    /// The bundled tables, with either folder replaced.
    ///
    /// A replacing folder must hold every file of the folder it replaces. Errors name file, line,
    /// column, value and what is allowed.
    pub fn load(line_lists: Option<&Path>, comparison: Option<&Path>) -> Result<Self> {
        let lists = Folder::line_lists(line_lists);
        let comets = Folder::comparison(comparison);
        lists.check_complete()?;
        comets.check_complete()?;
        let s = Sources::read(&open(&lists, "sources.csv", Sources::COLUMNS)?)?;
        let c = Sources::read(&open(&comets, "sources.csv", Sources::COLUMNS)?)?;
        let list = |file, columns| open(&lists, file, columns);
        let comet = |file, columns| open(&comets, file, columns);
        let bands = Band::read_all(&list("bands.csv", Band::COLUMNS)?, &s)?;
        let efficiencies = list("efficiencies.csv", Efficiency::COLUMNS)?;
        Ok(Self {
            efficiencies: Efficiency::read_all(&efficiencies, &s, &bands)?,
            bands,
            scale_lengths: ScaleLengths::read_all(
                &list("scale_lengths.csv", ScaleLengths::COLUMNS)?,
                &s,
            )?,
            speed_laws: SpeedLaw::read_all(&list("speed_laws.csv", SpeedLaw::COLUMNS)?, &s)?,
            photo_rates: PhotoRate::read_all(&list("photo_rates.csv", PhotoRate::COLUMNS)?, &s)?,
            photo_branches: PhotoBranch::read_all(
                &list("photo_branches.csv", PhotoBranch::COLUMNS)?,
                &s,
            )?,
            strengths: Strength::read_all(&list("band_strengths.csv", Strength::COLUMNS)?, &s)?,
            solar: SolarIrradiance::read(&list("solar_e490.csv", SolarIrradiance::COLUMNS)?)?,
            comparison: ComparisonRow::read_all(
                &comet("measurements.csv", ComparisonRow::COLUMNS)?,
                &c,
            )?,
            populations: PopulationRow::read_all(
                &comet("populations.csv", PopulationRow::COLUMNS)?,
                &c,
            )?,
            solar_abundances: SolarAbundance::read_all(
                &comet("solar_ratios.csv", SolarAbundance::COLUMNS)?,
                &c,
            )?,
            sources: merge(s, c)?,
        })
    }

    /// All bands, in the order of the file.
    pub fn bands(&self) -> &[Band] {
        &self.bands
    }

    /// The band with an identifier.
    pub fn band(&self, id: &str) -> Result<&Band> {
        let ids = || self.bands.iter().map(|b| b.id.as_str());
        self.bands
            .iter()
            .find(|b| b.id == id)
            .ok_or_else(|| unknown("band", id, ids().collect()))
    }

    /// All published efficiencies of a band, in the order of the file.
    pub fn efficiencies_of(&self, band: &str) -> Vec<&Efficiency> {
        self.efficiencies
            .iter()
            .filter(|e| e.band == band)
            .collect()
    }

    /// The efficiency used when the plan names none; `None` for bands without any.
    pub fn default_efficiency(&self, band: &str) -> Option<&Efficiency> {
        self.efficiencies
            .iter()
            .find(|e| e.band == band && e.default)
    }

    /// Scale lengths of a species in a set.
    pub fn scale_lengths(&self, set: &str, species: &Species) -> Option<&ScaleLengths> {
        self.scale_lengths
            .iter()
            .find(|s| s.set == set && s.species == *species)
    }

    /// Names of the scale-length sets, in the order of the file.
    pub fn length_sets(&self) -> Vec<&str> {
        let mut names = Vec::new();
        for s in &self.scale_lengths {
            if !names.contains(&s.set.as_str()) {
                names.push(s.set.as_str());
            }
        }
        names
    }

    /// The default total photo-destruction rate of a species.
    pub fn photo_rate(&self, species: &Species) -> Option<&PhotoRate> {
        self.photo_rates
            .iter()
            .find(|p| p.species == *species && p.default)
    }

    /// All published photo-destruction rates of a species.
    pub fn photo_rates_of(&self, species: &Species) -> Vec<&PhotoRate> {
        let of_species = |p: &&PhotoRate| p.species == *species;
        self.photo_rates.iter().filter(of_species).collect()
    }

    /// All photo-destruction branches.
    pub fn photo_branches(&self) -> &[PhotoBranch] {
        &self.photo_branches
    }

    /// The speed law with a name.
    pub fn speed_law(&self, name: &str) -> Result<&SpeedLaw> {
        let names = || self.speed_laws.iter().map(|s| s.name.as_str());
        self.speed_laws
            .iter()
            .find(|s| s.name == name)
            .ok_or_else(|| unknown("speed law", name, names().collect()))
    }

    /// All speed laws.
    pub fn speed_laws(&self) -> &[SpeedLaw] {
        &self.speed_laws
    }

    /// All spectroscopic quantities.
    pub fn strengths(&self) -> &[Strength] {
        &self.strengths
    }

    /// The first row of a quantity, for example (`CO`, `v1-0`, `strength`).
    pub fn strength(&self, species: &Species, band: &str, quantity: &str) -> Option<&Strength> {
        self.strengths
            .iter()
            .find(|s| s.species == *species && s.band == band && s.quantity == quantity)
    }

    /// The solar spectrum.
    pub fn solar(&self) -> &SolarIrradiance {
        &self.solar
    }

    /// The source with a key, from either folder.
    pub fn source(&self, key: &str) -> Option<&Source> {
        self.sources.get(key)
    }

    /// The measured ratios of comets.
    pub fn comparison(&self) -> &[ComparisonRow] {
        &self.comparison
    }

    /// The published statistics of comet populations.
    pub fn populations(&self) -> &[PopulationRow] {
        &self.populations
    }

    /// Solar and meteoritic abundances.
    pub fn solar_abundances(&self) -> &[SolarAbundance] {
        &self.solar_abundances
    }
}

fn unknown(what: &str, typed: &str, known: Vec<&str>) -> Error {
    let hint = did_you_mean(typed, known.iter().copied())
        .map(|near| format!("; did you mean {near:?}?"))
        .unwrap_or_default();
    Error::plan(format!("{what} {typed:?} is not in the line lists{hint}"))
        .remedy(format!("known are {}", known.join(", ")))
}

#[cfg(test)]
#[path = "set_tests.rs"]
mod tests;
