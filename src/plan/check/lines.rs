//! All lines of an atom in the windows of a `[[lines]]` table, with efficiencies from the
//! statistical equilibrium.

use super::Checker;
use super::convert::range_aa;
use crate::analysis::{BandSettings, EfficiencyAtComet};
use crate::atomic::{self, LineKind};
use crate::by_line::LineSet;
use crate::coma::equilibrium::{Conditions, Equilibrium, LineG, SolarField};
use crate::fit::{BandModel, Form, Freedom, Limits, Structure};
use crate::frame::Geometry;
use crate::ground::constants::HC_ERG_AA;
use crate::ground::{Error, Medium, Result, Species, WavelengthUnit};
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
            let system = if species.as_str() == "CN" {
                atomic::cn_violet(dir)
            } else {
                atomic::atom(&species, dir)
            }
            .map_err(|e| self.file.point(e, &["lines", &index, "species"]))?;
            let equilibrium = Equilibrium::solve(&system, &field, &at)?;
            self.caveats.extend(equilibrium.caveats().iter().cloned());
            let transit_s = self.transit_s(geometry)?;
            self.caveats.extend(equilibrium.slow_for(transit_s));
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
        let axis = PlanAxis { unit, medium };
        let windows = lines
            .windows
            .iter()
            .map(|w| range_aa(*w, unit, medium).map_err(|e| self.file.point(e, &at("windows"))))
            .collect::<Result<Vec<_>>>()?;
        let without = lines
            .without
            .iter()
            .map(|w| {
                left_out(*w, axis, all, &windows)
                    .map_err(|why| self.file.point(why, &at("without")))
            })
            .collect::<Result<Vec<_>>>()?;
        let faintest = threshold * strongest(all, &windows);
        let robust = lines.robust.unwrap_or(false);
        if robust && all.iter().any(|l| matches!(l.kind, LineKind::Band { .. })) {
            return Err(self.file.point(
                Error::plan(format!(
                    "robust = true is for atoms: the errors of the lines of {species} are common, and no mean of them is better than one"
                ))
                .remedy("remove it; lines.csv names lines that disagree, and without leaves them out"),
                &at("robust"),
            ));
        }
        let mut out = Vec::new();
        for window in &windows {
            let bright: Vec<&LineG> = all
                .iter()
                .filter(|l| shines_in(l, *window) && l.g_erg_s >= faintest)
                .collect();
            let kept: Vec<&LineG> = bright
                .iter()
                .copied()
                .filter(|l| !is_named(l, &without))
                .collect();
            if bright.is_empty() {
                return Err(self.file.point(
                    Error::plan(format!(
                        "{species}: no line above the threshold between {:.2} and {:.2} Å (vacuum)",
                        window.0, window.1
                    ))
                    .remedy("leave the window out or lower threshold"),
                    &at("windows"),
                ));
            }
            // A window whose only lines are to be left out goes with them.
            if !kept.is_empty() {
                out.push(group(species, *window, &kept, axis, robust)?);
            }
        }
        if out.is_empty() {
            return Err(self.file.point(
                Error::plan(format!("{species}: without leaves no line to measure")),
                &at("without"),
            ));
        }
        Ok(out)
    }
}

/// A line of the species, with light of its own, inside a window.
fn shines_in(line: &LineG, (low, high): (f64, f64)) -> bool {
    let x = line.wavelength_vacuum_aa;
    let seen = !matches!(line.kind, LineKind::Pump | LineKind::Rovibrational);
    seen && line.g_erg_s > 0.0 && low < x && x < high
}

fn is_named(line: &LineG, without_aa: &[f64]) -> bool {
    let off = |w: &f64| (w - line.wavelength_vacuum_aa).abs();
    without_aa.iter().any(|w| off(w) < SAME_LINE_AA)
}

/// Power of the strongest line in the windows, whether it is left out or not: leaving it out must not
/// bring in fainter ones.
fn strongest(all: &[LineG], windows: &[(f64, f64)]) -> f64 {
    all.iter()
        .filter(|l| windows.iter().any(|w| shines_in(l, *w)))
        .map(|l| l.g_erg_s)
        .fold(0.0, f64::max)
}

/// Unit and medium in which a `[[lines]]` table gives wavelengths.
#[derive(Clone, Copy)]
struct PlanAxis {
    unit: WavelengthUnit,
    medium: Medium,
}

/// Vacuum wavelength of an entry of `without`, which must be that of a line in one of the windows.
fn left_out(
    named: f64,
    axis: PlanAxis,
    all: &[LineG],
    windows: &[(f64, f64)],
) -> std::result::Result<f64, Error> {
    let wanted = axis.unit.vacuum_aa(named, axis.medium);
    let off = |l: &LineG| (l.wavelength_vacuum_aa - wanted).abs();
    let nearest = all
        .iter()
        .filter(|l| windows.iter().any(|w| shines_in(l, *w)))
        .min_by(|a, b| off(a).total_cmp(&off(b)));
    match nearest {
        Some(line) if off(line) < SAME_LINE_AA => Ok(wanted),
        Some(line) => {
            let other = axis
                .unit
                .from_vacuum_aa(line.wavelength_vacuum_aa, axis.medium);
            Err(Error::plan(format!(
                "without = {named} matches no line in the windows within {SAME_LINE_AA} Å"
            ))
            .remedy(format!(
                "the nearest line is at {other:.3}; copy wavelengths from a caveat or from lines.csv, and mind unit and medium"
            )))
        }
        None => Err(Error::plan(format!(
            "without = {named} matches no line: the windows hold none"
        ))),
    }
}

/// The lines of one window as one band: relative fluxes fixed by g, one column.
fn group(
    species: &Species,
    window_aa: (f64, f64),
    lines: &[&LineG],
    axis: PlanAxis,
    robust: bool,
) -> Result<BandSettings> {
    let pairs: Vec<(f64, f64)> = lines
        .iter()
        .map(|l| (l.wavelength_vacuum_aa, l.g_erg_s))
        .collect();
    let (centre_aa, structure) = Structure::of_lines(&pairs)?;
    let g_erg_s: f64 = lines.iter().map(|l| l.g_erg_s).sum();
    // Errors of atomic lines are independent, those of the lines of one molecular band common.
    let molecular = lines
        .iter()
        .any(|l| matches!(l.kind, LineKind::Band { .. }));
    let sigma: f64 = if molecular {
        lines.iter().map(|l| l.g_erg_s * l.relative_sigma).sum()
    } else {
        let squares = lines.iter().map(|l| (l.g_erg_s * l.relative_sigma).powi(2));
        squares.sum::<f64>().sqrt()
    };
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
            relative_sigma: sigma / g_erg_s,
            source: format!(
                "equilibrium of {} lines: {}",
                lines.len(),
                sources.join("; ")
            ),
        }),
        spectrum: None,
        opacity_cm2: None,
        structured_fwhm_aa: None,
        lines: Some(LineSet {
            lines: lines.iter().map(|l| (*l).clone()).collect(),
            in_plan: lines
                .iter()
                .map(|l| {
                    axis.unit
                        .from_vacuum_aa(l.wavelength_vacuum_aa, axis.medium)
                })
                .collect(),
            robust,
            g_is_exact: false,
        }),
    })
}
