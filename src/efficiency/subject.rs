//! A name on the command line as something whose efficiencies can be computed.

use crate::atomic::{InfraredBand, LevelSystem, atom, bundled_atoms, cn_violet, infrared_bands};
use crate::ground::{Error, Result, Species, did_you_mean};
use std::path::Path;

/// The molecule treated level by level.
const CN: &str = "CN";

/// A species with what its efficiencies are made from.
pub enum Subject {
    /// An atom or ion: levels and lines.
    Atom(LevelSystem),
    /// CN with its violet bands: levels, lines and bands.
    Bands(LevelSystem),
    /// Infrared fundamentals of a molecule, each with its strength.
    Infrared(Vec<InfraredBand>),
}

impl Subject {
    /// Finds the species among the atoms (bundled, or in `atoms/` of the folder), CN and the molecules
    /// with infrared fundamentals.
    ///
    /// # Errors
    /// A species that is none of these, with the nearest name and the whole list; a bad table.
    pub fn load(name: &str, dir: Option<&Path>) -> Result<Self> {
        let species = Species::new(name);
        if species.as_str() == CN {
            return cn_violet(dir).map(Self::Bands);
        }
        let mut bands = infrared_bands(dir)?;
        bands.retain(|b| b.species == species);
        if !bands.is_empty() {
            return Ok(Self::Infrared(bands));
        }
        let known = known_species(dir)?;
        let own = dir.is_some_and(|d| {
            let stem = species.as_str().to_lowercase().replace(' ', "_");
            let word = |c: char| c.is_ascii_alphanumeric() || c == '_';
            stem.chars().all(word) && d.join(format!("atoms/{stem}_levels.csv")).is_file()
        });
        if own || known.contains(&species) {
            return atom(&species, dir).map(Self::Atom);
        }
        let names: Vec<&str> = known.iter().map(Species::as_str).collect();
        let guess = did_you_mean(species.as_str(), names.iter().copied())
            .map_or_else(String::new, |n| format!("did you mean {n:?}? "));
        Err(Error::plan(format!(
            "there is nothing to compute efficiencies of {:?} from",
            species.as_str()
        ))
        .remedy(format!("{guess}use one of {}", names.join(", "))))
    }

    /// Its name.
    pub fn species(&self) -> &Species {
        match self {
            Self::Atom(system) | Self::Bands(system) => system.species(),
            Self::Infrared(bands) => &bands[0].species,
        }
    }
}

/// Every species that [`Subject::load`] knows without files of one's own.
///
/// # Errors
/// An unreadable table of infrared bands.
pub fn known_species(dir: Option<&Path>) -> Result<Vec<Species>> {
    let mut known = bundled_atoms();
    known.push(Species::new(CN));
    for band in infrared_bands(dir)? {
        if !known.contains(&band.species) {
            known.push(band.species);
        }
    }
    Ok(known)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_known_species_loads_under_its_name() {
        for species in known_species(None).unwrap() {
            let subject = Subject::load(species.as_str(), None).unwrap();
            assert_eq!(*subject.species(), species);
        }
    }

    #[test]
    fn unknown_species_get_a_guess_and_the_list() {
        for (typed, meant) in [("FeI", "Fe I"), ("Ni 1", "Ni I"), ("H20", "H2O")] {
            let text = Subject::load(typed, None).err().unwrap().to_string();
            assert!(text.contains(&format!("did you mean {meant:?}?")), "{text}");
            assert!(text.contains("Ca II") && text.contains("H2O"), "{text}");
        }
        let text = Subject::load("../x", None).err().unwrap().to_string();
        assert!(text.contains("use one of"), "{text}");
    }
}
