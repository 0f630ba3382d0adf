//! All lines of an atom in the windows of a `[[lines]]` table, with efficiencies from the
//! statistical equilibrium.

use super::Checker;
use super::convert::range_aa;
use crate::analysis::{BandSettings, EfficiencyAtComet};
use crate::atomic;
use crate::coma::equilibrium::{Conditions, Equilibrium, LineG, SolarField};
use crate::fit::{BandModel, Form, Freedom, Limits, Structure};
use crate::frame::Geometry;
use crate::ground::constants::HC_ERG_AA;
use crate::ground::{Error, Result, Species};
use crate::plan::schema::LinesPlan;
use std::path::Path;

/// Lines nearer than this to one named in `without` are left out, Å.
const SAME_LINE_AA: f64 = 0.05;

impl Checker<'_> {
    /// One band per window of every `[[lines]]` table.
    pub(super) fn line_groups(&mut self, geometry: &Geometry) -> Result<Vec<BandSettings>> {
        if self.plan.lines.is_empty() {
            return Ok(Vec::new());
        }
        let dir = self.plan.tables.line_lists.as_deref().map(Path::new);
        let field = SolarField::sun(atomic::sun(dir)?);
        let at = Conditions {
            heliocentric_au: geometry.heliocentric_au,
            heliocentric_km_s: geometry.heliocentric_km_s,
            ..Conditions::UNIT
        };
        let plan = self.plan;
        let mut out = Vec::new();
        for (i, lines) in plan.lines.iter().enumerate() {
            let index = i.to_string();
            let species = Species::new(&lines.species);
            let system = atomic::atom(&species, dir)
                .map_err(|e| self.file.point(e, &["lines", &index, "species"]))?;
            let equilibrium = Equilibrium::solve(&system, &field, &at)?;
            self.caveats.extend(equilibrium.caveats().iter().cloned());
            out.extend(self.groups_of(lines, &species, equilibrium.lines(), &["lines", &index])?);
        }
        Ok(out)
    }

    fn groups_of(
        &mut self,
        lines: &LinesPlan,
        species: &Species,
        all: &[LineG],
        keys: &[&str],
    ) -> Result<Vec<BandSettings>> {
        let at = |key: &'static str| [keys[0], keys[1], key];
        let resolved = |s: &crate::plan::schema::SpectrumPlan| {
            s.resolving_power.is_some() || s.instrument_fwhm.is_some()
        };
        if !self.plan.spectrum.iter().all(resolved) {
            return Err(self.file.point(
                Error::plan(format!(
                    "the lines of {species} need the instrument's resolution"
                ))
                .remedy("add resolving_power or instrument_fwhm to the [[spectrum]] table"),
                keys,
            ));
        }
        let threshold = lines.threshold.unwrap_or(0.01);
        if !(0.0..1.0).contains(&threshold) {
            return Err(self.file.point(
                Error::plan(format!("threshold = {threshold} is outside 0 to 1")),
                &at("threshold"),
            ));
        }
        if lines.windows.is_empty() {
            return Err(self
                .file
                .point(Error::plan("windows is empty"), &at("windows")));
        }
        let (unit, medium) = self.axis_or(lines.unit.as_ref(), lines.medium.as_ref(), keys)?;
        let without: Vec<f64> = lines
            .without
            .iter()
            .map(|w| unit.vacuum_aa(*w, medium))
            .collect();
        let windows = lines
            .windows
            .iter()
            .map(|w| range_aa(*w, unit, medium).map_err(|e| self.file.point(e, &at("windows"))))
            .collect::<Result<Vec<_>>>()?;
        let inside = |l: &LineG, (low, high): (f64, f64)| {
            let x = l.wavelength_vacuum_aa;
            low < x && x < high && !without.iter().any(|w| (w - x).abs() < SAME_LINE_AA)
        };
        let strongest = all
            .iter()
            .filter(|l| windows.iter().any(|w| inside(l, *w)))
            .map(|l| l.g_erg_s)
            .fold(0.0, f64::max);
        windows
            .iter()
            .map(|window| {
                let chosen: Vec<&LineG> = all
                    .iter()
                    .filter(|l| {
                        inside(l, *window) && l.g_erg_s > 0.0 && l.g_erg_s >= threshold * strongest
                    })
                    .collect();
                if chosen.is_empty() {
                    return Err(self.file.point(
                        Error::plan(format!(
                            "{species}: no line above the threshold between {:.2} and {:.2} Å (vacuum)",
                            window.0, window.1
                        ))
                        .remedy("leave the window out or lower threshold"),
                        &at("windows"),
                    ));
                }
                group(species, *window, &chosen)
            })
            .collect()
    }
}

/// The lines of one window as one band: relative fluxes fixed by g, one column.
fn group(species: &Species, window_aa: (f64, f64), lines: &[&LineG]) -> Result<BandSettings> {
    let pairs: Vec<(f64, f64)> = lines
        .iter()
        .map(|l| (l.wavelength_vacuum_aa, l.g_erg_s))
        .collect();
    let (centre_aa, structure) = Structure::of_lines(&pairs)?;
    let g_erg_s: f64 = lines.iter().map(|l| l.g_erg_s).sum();
    let squares: f64 = lines
        .iter()
        .map(|l| (l.g_erg_s * l.relative_sigma).powi(2))
        .sum();
    let mut sources: Vec<&str> = lines.iter().map(|l| &*l.source).collect();
    sources.sort_unstable();
    sources.dedup();
    Ok(BandSettings {
        model: BandModel {
            id: format!("{species} {:.0}-{:.0}", window_aa.0, window_aa.1),
            centre_aa,
            fwhm_aa: Some(0.0),
            window_aa,
            centre: Freedom::Auto,
            width: Freedom::Held,
            structure,
            tie: None,
            form: Form::Lines,
            wings: false,
            extra: Freedom::Auto,
            limits: Limits::default(),
        },
        species: Some(species.clone()),
        efficiency: Some(EfficiencyAtComet {
            // Photons at the mean wavelength that carry the lines' energy.
            g_photons_s: g_erg_s * centre_aa / HC_ERG_AA,
            relative_sigma: squares.sqrt() / g_erg_s,
            source: format!(
                "equilibrium of {} lines: {}",
                lines.len(),
                sources.join("; ")
            ),
        }),
        spectrum: None,
        opacity_cm2: None,
        structured_fwhm_aa: None,
    })
}
