//! Lines that a peak can be.

use crate::atomic::{LevelSystem, LineKind, atom, bundled_atoms, cn_violet, line_atlas};
use crate::coma::equilibrium::{Conditions, Equilibrium, SolarField};
use crate::ground::{Result, Species};
use rayon::prelude::*;
use std::path::Path;

/// Where a line of the catalogue comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Origin {
    /// Seen in a real comet.
    Atlas,
    /// An atom's or ion's line, as bright as statistical equilibrium makes it.
    Atom,
    /// A line of the CN violet bands, as bright as statistical equilibrium makes it.
    Cn,
}

impl Origin {
    /// One word for tables.
    pub fn as_str(self) -> &'static str {
        match self {
            Self::Atlas => "atlas",
            Self::Atom => "atoms",
            Self::Cn => "CN",
        }
    }
}

/// A line with a known or an open name.
#[derive(Clone, Debug)]
pub struct CatalogueLine {
    /// Vacuum wavelength in the comet's rest frame, Å.
    pub wavelength_vacuum_aa: f64,
    /// Who emits it; `None` for a line of the atlas without a name.
    pub species: Option<Species>,
    /// Transition, for people.
    pub transition: String,
    /// Predicted g, photons s⁻¹ per atom or molecule; `None` for the atlas, which has no strengths.
    pub g_photons_s: Option<f64>,
    /// g over that of the species' brightest line; 1 for the atlas.
    pub relative: f64,
    /// Where it comes from.
    pub origin: Origin,
}

/// Lines in order of wavelength.
#[derive(Clone, Debug, Default)]
pub struct Catalogue {
    lines: Vec<CatalogueLine>,
}

impl Catalogue {
    /// The lines of the atlas whose two positions agree.
    ///
    /// # Errors
    /// A bad table.
    pub fn atlas(dir: Option<&Path>) -> Result<Self> {
        let lines = line_atlas(dir)?
            .into_iter()
            .filter(|l| !l.doubtful)
            .map(|l| CatalogueLine {
                wavelength_vacuum_aa: l.wavelength_vacuum_aa,
                species: l.species,
                transition: l.transition,
                g_photons_s: None,
                relative: 1.0,
                origin: Origin::Atlas,
            });
        Ok(Self::of(lines.collect()))
    }

    /// The lines of all bundled atoms and ions that reach `least` of the brightest line of their
    /// species. How much of a species there is in the comet is not known and not used.
    ///
    /// # Errors
    /// A bad table or impossible conditions.
    pub fn atoms(
        dir: Option<&Path>,
        field: &SolarField,
        at: &Conditions,
        least: f64,
    ) -> Result<Self> {
        let found: Vec<Vec<CatalogueLine>> = bundled_atoms()
            .par_iter()
            .map(|species| solved(&atom(species, dir)?, field, at, least, Origin::Atom))
            .collect::<Result<_>>()?;
        Ok(Self::of(found.into_iter().flatten().collect()))
    }

    /// The lines of the CN violet bands that reach `least` of the brightest.
    ///
    /// # Errors
    /// A bad table or impossible conditions.
    pub fn cn(dir: Option<&Path>, field: &SolarField, at: &Conditions, least: f64) -> Result<Self> {
        Ok(Self::of(solved(
            &cn_violet(dir)?,
            field,
            at,
            least,
            Origin::Cn,
        )?))
    }

    /// All lines of several catalogues.
    pub fn joined(parts: impl IntoIterator<Item = Self>) -> Self {
        Self::of(parts.into_iter().flat_map(|c| c.lines).collect())
    }

    fn of(mut lines: Vec<CatalogueLine>) -> Self {
        lines.sort_by(|a, b| a.wavelength_vacuum_aa.total_cmp(&b.wavelength_vacuum_aa));
        Self { lines }
    }

    /// The lines, in order of wavelength.
    pub fn lines(&self) -> &[CatalogueLine] {
        &self.lines
    }

    /// The lines from `low_aa` to `high_aa`.
    pub fn between(&self, low_aa: f64, high_aa: f64) -> &[CatalogueLine] {
        let place = |aa: f64| self.lines.partition_point(|l| l.wavelength_vacuum_aa < aa);
        let (from, to) = (place(low_aa), place(high_aa));
        &self.lines[from..to.max(from)]
    }
}

fn solved(
    system: &LevelSystem,
    field: &SolarField,
    at: &Conditions,
    least: f64,
    origin: Origin,
) -> Result<Vec<CatalogueLine>> {
    let solution = Equilibrium::solve(system, field, at)?;
    let shown = |k: LineKind| !matches!(k, LineKind::Pump | LineKind::Rovibrational);
    let lines = || solution.lines().iter().filter(|l| shown(l.kind));
    let brightest = lines().map(|l| l.g_photons_s).fold(0.0, f64::max);
    let name = |l: &crate::coma::equilibrium::LineG| match l.kind {
        LineKind::Band { upper_v, lower_v } => format!("B-X {upper_v}-{lower_v}"),
        _ => format!("{:.0}–{:.0} cm⁻¹", l.lower_cm1, l.upper_cm1),
    };
    Ok(lines()
        .filter(|l| l.g_photons_s > 0.0 && l.g_photons_s >= least * brightest)
        .map(|l| CatalogueLine {
            wavelength_vacuum_aa: l.wavelength_vacuum_aa,
            species: Some(system.species().clone()),
            transition: name(l),
            g_photons_s: Some(l.g_photons_s),
            relative: l.g_photons_s / brightest,
            origin,
        })
        .collect())
}
