//! Efficiencies at one place and velocity.

use super::Subject;
use crate::atomic::{InfraredBand, LevelSystem, LineKind};
use crate::coma::equilibrium::{
    BandG, Conditions, Equilibrium, LineG, SolarField, infrared_g, spread,
};
use crate::ground::{Caveat, Result, air_from_vacuum_aa};
use std::sync::Arc;

/// The efficiency of one line, or of one band.
#[derive(Clone, Debug)]
pub struct EfficiencyRow {
    /// Name of a band (`0-0`, `nu3`); empty for a line.
    pub band: String,
    /// Wavelength in standard air, Å: of the line, of the band origin, or the mean of a band's lines
    /// weighted by their photons.
    pub wavelength_air_aa: f64,
    /// The same in vacuum, Å.
    pub wavelength_vacuum_aa: f64,
    /// Energy of the lower level, cm⁻¹; `None` for a band out of many levels.
    pub lower_cm1: Option<f64>,
    /// Energy of the upper level, cm⁻¹; `None` for a band out of many levels.
    pub upper_cm1: Option<f64>,
    /// Photons per second and atom or molecule.
    pub g_photons_s: f64,
    /// erg s⁻¹ per atom or molecule.
    pub g_erg_s: f64,
    /// Relative standard deviation.
    pub relative_sigma: f64,
    /// Where the transition probability or band strength comes from.
    pub source: Arc<str>,
}

/// What the rows are and how their errors are found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Detail {
    /// Least g as a fraction of the brightest line's (photons).
    pub threshold: f64,
    /// Sums over bands instead of lines, where the species has bands.
    pub bands: bool,
    /// Number of draws by which errors are followed through the equilibrium; 0 takes the errors of
    /// the line's own A and sunlight only.
    pub draws: usize,
    /// Seed of the draws.
    pub seed: u64,
}

/// Efficiencies of a species.
#[derive(Clone, Debug)]
pub struct EfficiencyTable {
    /// Brightest first.
    pub rows: Vec<EfficiencyRow>,
    /// How many lines or bands fell below the threshold.
    pub fainter: usize,
    /// Time to reach equilibrium, s; `None` where no equilibrium was solved.
    pub relaxation_s: Option<f64>,
    /// What to know about these numbers.
    pub caveats: Vec<Caveat>,
}

/// Computes the efficiencies of all lines, or bands, of a species.
///
/// # Errors
/// Impossible conditions, too few draws.
pub fn efficiencies(
    subject: &Subject,
    field: &SolarField,
    at: &Conditions,
    detail: &Detail,
) -> Result<EfficiencyTable> {
    let mut table = match subject {
        Subject::Atom(system) => level_rows(
            system,
            field,
            at,
            &Detail {
                bands: false,
                ..*detail
            },
        )?,
        Subject::Bands(system) => level_rows(system, field, at, detail)?,
        Subject::Infrared(bands) => infrared_rows(bands, field, at)?,
    };
    table
        .rows
        .sort_by(|a, b| b.g_photons_s.total_cmp(&a.g_photons_s));
    let least = detail.threshold * table.rows.first().map_or(0.0, |r| r.g_photons_s);
    let all = table.rows.len();
    table
        .rows
        .retain(|r| r.g_photons_s > 0.0 && r.g_photons_s >= least);
    table.fainter = all - table.rows.len();
    Ok(table)
}

/// The vibrational numbers of the bands of a system, upper and lower.
pub(super) fn bands_of(system: &LevelSystem) -> Vec<(u8, u8)> {
    let mut bands: Vec<(u8, u8)> = system
        .lines()
        .iter()
        .filter_map(|l| match l.kind {
            LineKind::Band { upper_v, lower_v } => Some((upper_v, lower_v)),
            _ => None,
        })
        .collect();
    bands.sort_unstable();
    bands.dedup();
    bands
}

/// Lines that are meant to be shown: not those that only carry the populations of a molecule.
pub(super) fn shown(kind: LineKind) -> bool {
    !matches!(kind, LineKind::Pump | LineKind::Rovibrational)
}

fn level_rows(
    system: &LevelSystem,
    field: &SolarField,
    at: &Conditions,
    detail: &Detail,
) -> Result<EfficiencyTable> {
    let solved = Equilibrium::solve(system, field, at)?;
    let rows = if detail.bands {
        bands_of(system)
            .into_iter()
            .filter_map(|band| band_row(&solved, band))
            .collect()
    } else {
        let errors = line_errors(system, field, at, &solved, detail)?;
        let lines = solved.lines().iter().filter(|l| shown(l.kind));
        lines.map(|l| line_row(l, errors[l.line])).collect()
    };
    Ok(EfficiencyTable {
        rows,
        fainter: 0,
        relaxation_s: Some(solved.relaxation_s()),
        caveats: solved.caveats().to_vec(),
    })
}

/// Relative errors of all lines. What a simplified system brings in is not drawn and is added here.
fn line_errors(
    system: &LevelSystem,
    field: &SolarField,
    at: &Conditions,
    solved: &Equilibrium,
    detail: &Detail,
) -> Result<Vec<f64>> {
    if detail.draws == 0 {
        return Ok(solved.lines().iter().map(|l| l.relative_sigma).collect());
    }
    let drawn = spread(system, field, at, detail.draws, detail.seed)?;
    let sigma = |i: usize| drawn.relative_sigma(i).hypot(system.model_sigma());
    Ok((0..system.lines().len()).map(sigma).collect())
}

fn line_row(line: &LineG, relative_sigma: f64) -> EfficiencyRow {
    EfficiencyRow {
        band: String::new(),
        wavelength_air_aa: line.wavelength_air_aa,
        wavelength_vacuum_aa: line.wavelength_vacuum_aa,
        lower_cm1: Some(line.lower_cm1),
        upper_cm1: Some(line.upper_cm1),
        g_photons_s: line.g_photons_s,
        g_erg_s: line.g_erg_s,
        relative_sigma,
        source: Arc::clone(&line.source),
    }
}

fn band_row(solved: &Equilibrium, (upper, lower): (u8, u8)) -> Option<EfficiencyRow> {
    let kind = LineKind::Band {
        upper_v: upper,
        lower_v: lower,
    };
    let sum = solved.band(upper, lower)?;
    let lines = || solved.lines().iter().filter(|l| l.kind == kind);
    let moment: f64 = lines()
        .map(|l| l.g_photons_s * l.wavelength_vacuum_aa)
        .sum();
    let source = Arc::clone(&lines().next()?.source);
    Some(whole_band(
        format!("{upper}-{lower}"),
        moment / sum.g_photons_s,
        sum,
        source,
    ))
}

fn whole_band(band: String, vacuum_aa: f64, g: BandG, source: Arc<str>) -> EfficiencyRow {
    EfficiencyRow {
        band,
        wavelength_air_aa: air_from_vacuum_aa(vacuum_aa),
        wavelength_vacuum_aa: vacuum_aa,
        lower_cm1: None,
        upper_cm1: None,
        g_photons_s: g.g_photons_s,
        g_erg_s: g.g_erg_s,
        relative_sigma: g.relative_sigma,
        source,
    }
}

fn infrared_rows(
    bands: &[InfraredBand],
    field: &SolarField,
    at: &Conditions,
) -> Result<EfficiencyTable> {
    let mut caveats = vec![Caveat::Other {
        code: "no-solar-lines",
        text: format!(
            "{}: the infrared sunlight resolves no solar lines, so g does not follow the heliocentric velocity; it falls as 1/r_h²",
            bands[0].species
        ),
    }];
    let mut rows = Vec::new();
    for band in bands {
        let g = infrared_g(band, field, at)?;
        if band.how == "memory" {
            caveats.push(Caveat::FromMemory {
                what: format!("part of the data of {} {}", band.species, band.band),
                source: band.source.clone(),
            });
        }
        rows.push(EfficiencyRow {
            lower_cm1: Some(0.0),
            upper_cm1: Some(band.nu_cm1),
            ..whole_band(
                band.band.clone(),
                1.0e8 / band.nu_cm1,
                g,
                band.source.as_str().into(),
            )
        });
    }
    Ok(EfficiencyTable {
        rows,
        fainter: 0,
        relaxation_s: None,
        caveats,
    })
}
