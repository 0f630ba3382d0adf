//! Columns of single lines and of the species.

use super::combine::{Column, Mean, plain_mean, robust_mean};
use crate::atomic::LineKind;
use crate::coma::equilibrium::LineG;
use crate::coma::molecules_per_flux;
use crate::fit::{Feature, Features};
use crate::ground::constants::HC_ERG_AA;
use crate::ground::{Caveat, Measured, Species};
use std::sync::Arc;

/// Light of anything else under a line, over the line's own, from which it counts as a blend.
const BLEND: f64 = 0.3;
/// Pull, in units of the lines' own scatter, beyond which a line is discordant.
const DISCORDANT: f64 = 4.0;
/// Fewest features whose scatter says something about their errors.
const FEWEST: usize = 3;

/// The lines a band consists of, in the order of the fit's structure.
#[derive(Clone, Debug)]
pub struct LineSet {
    /// Their efficiencies at the comet.
    pub lines: Arc<[LineG]>,
    /// The same wavelengths as the plan would write them.
    pub in_plan: Arc<[f64]>,
    /// Whether the species' column is the robust mean of its lines.
    pub robust: bool,
    /// True where errors of g weigh the lines but are not drawn: in rehearsals, whose trials share g.
    pub g_is_exact: bool,
}

/// One band with its lines, ready to be measured line by line.
#[derive(Clone, Copy, Debug)]
pub struct Group<'a> {
    /// Index of the fit.
    pub block: usize,
    /// Index of the band in that fit.
    pub band: usize,
    /// Identifier of the band.
    pub id: &'a str,
    /// Its species.
    pub species: &'a Species,
    /// Its lines.
    pub set: &'a LineSet,
}

/// One line of the table.
#[derive(Clone, Debug)]
pub struct LineResult {
    /// Identifier of the band it was fitted in.
    pub band: String,
    /// The line and its efficiency.
    pub line: LineG,
    /// Its wavelength in the unit and medium of the plan's table.
    pub in_plan: f64,
    /// Number of the feature, from 0 within the species; lines of one feature share their measurement.
    pub feature: usize,
    /// Flux in the data, erg s⁻¹ cm⁻²: the feature's, shared out by g.
    pub flux_erg_s_cm2: Measured,
    /// Flux expected from the lines' robust mean column.
    pub model_erg_s_cm2: f64,
    /// (data − model) over the error of both, that of g among them.
    pub pull: f64,
    /// Column density from this line alone, cm⁻², with errors of flux and g.
    pub column_cm2: Measured,
    /// Light of everything else under the line, over its own in the model.
    pub others: f64,
    /// True when that is more than 0.3.
    pub blend: bool,
    /// True when its feature is free of foreign light, or no feature of the species is, so that it
    /// counts in the means.
    pub counts: bool,
    /// True when it does not belong to the common column.
    pub discordant: bool,
    /// Weight of its feature in the robust mean.
    pub weight: f64,
}

/// One feature's contribution to a robust column.
#[derive(Clone, Copy, Debug)]
pub struct Share {
    /// Index of the fit.
    pub block: usize,
    /// Index among the features of that fit.
    pub feature: usize,
    /// Molecules in the aperture per unit flux, cm² s erg⁻¹.
    pub molecules_per_flux: f64,
    /// Relative error of g.
    pub g_sigma: f64,
    /// Weight; they sum to one.
    pub weight: f64,
}

/// A species line by line.
#[derive(Clone, Debug)]
pub struct ByLine {
    /// The species.
    pub species: Species,
    /// Its lines in order of wavelength.
    pub lines: Vec<LineResult>,
    /// Number of features in the means.
    pub features: usize,
    /// Mean column weighted by the inverse squares of the errors, cm⁻².
    pub mean_cm2: Measured,
    /// χ² about that mean over the degrees of freedom.
    pub reduced_chi2: f64,
    /// Robust mean column, cm⁻².
    pub robust_cm2: Measured,
    /// χ² about the robust mean over the degrees of freedom, corrected for the weights.
    pub robust_reduced_chi2: f64,
    /// True when the species' column is the robust mean.
    pub robust: bool,
    /// Factor ≥ 1 by which the scatter enlarges the error of the species' column.
    pub error_factor: f64,
    /// The features of the robust column.
    pub shares: Vec<Share>,
}

/// A feature of one species with all that is needed to judge it.
struct Judged<'a> {
    group: &'a Group<'a>,
    place: usize,
    feature: &'a Feature,
    column: Column,
    molecules_per_flux: f64,
    blend: bool,
}

/// Judges the lines of every species. `features` holds those of every fit, `observer_au` and
/// `aperture_cm2` turn fluxes into columns.
pub fn measure(
    groups: &[Group<'_>],
    features: &[Features],
    observer_au: f64,
    aperture_cm2: f64,
    caveats: &mut Vec<Caveat>,
) -> Vec<ByLine> {
    let mut species: Vec<&Species> = Vec::new();
    for g in groups {
        if !species.contains(&g.species) {
            species.push(g.species);
        }
    }
    species
        .into_iter()
        .map(|s| {
            let own: Vec<&Group<'_>> = groups.iter().filter(|g| g.species == s).collect();
            let judged = judge(&own, features, observer_au, aperture_cm2);
            let found = one_species(s, &judged, aperture_cm2);
            super::doubts::note(&found, caveats);
            found
        })
        .collect()
}

fn judge<'a>(
    groups: &[&'a Group<'a>],
    features: &'a [Features],
    observer_au: f64,
    aperture_cm2: f64,
) -> Vec<Judged<'a>> {
    let mut out = Vec::new();
    for group in groups {
        let list = features[group.block].list.iter().enumerate();
        for (place, feature) in list.filter(|(_, f)| f.band == group.band) {
            let lines = || feature.lines.iter().map(|l| &group.set.lines[*l]);
            let g_erg_s: f64 = lines().map(|l| l.g_erg_s).sum();
            let squares: f64 = lines()
                .map(|l| (l.g_erg_s * l.relative_sigma).powi(2))
                .sum();
            let aa = lines().next().map_or(1.0, |l| l.wavelength_vacuum_aa);
            let molecules = molecules_per_flux(g_erg_s * aa / HC_ERG_AA, aa, observer_au);
            let flux = feature.flux_erg_s_cm2;
            out.push(Judged {
                group,
                place,
                feature,
                column: Column {
                    value: flux.value * molecules / aperture_cm2,
                    flux_sigma: flux.sigma * molecules / aperture_cm2,
                    g_relative_sigma: squares.sqrt() / g_erg_s,
                },
                molecules_per_flux: molecules,
                blend: foreign(feature, group) > BLEND,
            });
        }
    }
    out
}

/// Light under a feature's strongest line that is not the feature's, over the feature's.
fn foreign(feature: &Feature, group: &Group<'_>) -> f64 {
    // Everything under the strongest line but itself, less what its companions give at most.
    let g = |l: usize| group.set.lines[l].g_erg_s;
    let first = feature.lines[0];
    let companions: f64 = feature.lines[1..].iter().map(|l| g(*l) / g(first)).sum();
    (feature.others[0] - companions).max(0.0) / (1.0 + companions)
}

fn one_species(species: &Species, judged: &[Judged<'_>], aperture_cm2: f64) -> ByLine {
    let clean: Vec<usize> = (0..judged.len()).filter(|j| !judged[*j].blend).collect();
    let used: Vec<usize> = if clean.is_empty() {
        (0..judged.len()).collect()
    } else {
        clean
    };
    let columns: Vec<Column> = used.iter().map(|j| judged[*j].column).collect();
    let (mut plain, mut robust) = (plain_mean(&columns), robust_mean(&columns));
    if judged.iter().any(|j| is_molecular(j.group)) {
        for mean in [&mut plain, &mut robust] {
            widen(mean, &columns);
        }
    }
    let is_robust = judged.iter().any(|j| j.group.set.robust);
    let chi2 = if is_robust {
        robust.reduced_chi2
    } else {
        plain.reduced_chi2
    };
    let enough = used.len() >= FEWEST;
    let weight_of = |j: usize| {
        let at = used.iter().position(|u| *u == j);
        at.map_or(0.0, |at| robust.weights[at])
    };
    let mut lines: Vec<LineResult> = (0..judged.len())
        .flat_map(|j| {
            let counts = used.contains(&j);
            let standing = Standing {
                counts,
                may_judge: enough && counts,
                weight: weight_of(j),
            };
            table_lines(j, &judged[j], &robust, &standing, aperture_cm2)
        })
        .collect();
    lines.sort_by(|a, b| {
        a.line
            .wavelength_vacuum_aa
            .total_cmp(&b.line.wavelength_vacuum_aa)
    });
    let shares = used.iter().zip(&robust.weights).map(|(j, weight)| Share {
        block: judged[*j].group.block,
        feature: judged[*j].place,
        molecules_per_flux: judged[*j].molecules_per_flux,
        g_sigma: if judged[*j].group.set.g_is_exact {
            0.0
        } else {
            judged[*j].column.g_relative_sigma
        },
        weight: *weight,
    });
    ByLine {
        species: species.clone(),
        features: used.len(),
        shares: shares.filter(|s| s.weight > 0.0).collect(),
        lines,
        mean_cm2: plain.column,
        reduced_chi2: plain.reduced_chi2,
        robust_cm2: robust.column,
        robust_reduced_chi2: robust.reduced_chi2,
        robust: is_robust,
        error_factor: if enough { chi2.max(1.0).sqrt() } else { 1.0 },
    }
}

fn is_molecular(group: &Group<'_>) -> bool {
    let band = |l: &LineG| matches!(l.kind, LineKind::Band { .. });
    group.set.lines.iter().any(band)
}

/// Lines of a molecular band are wrong together: their mean is no better known than one of them.
fn widen(mean: &mut Mean, columns: &[Column]) {
    let weighted = columns.iter().zip(&mean.weights);
    let common: f64 = weighted.map(|(c, w)| w * c.g_relative_sigma).sum();
    let column = &mut mean.column;
    column.sigma = column.sigma.hypot(common * column.value.abs());
}

/// What a feature means for the species.
struct Standing {
    counts: bool,
    may_judge: bool,
    weight: f64,
}

/// The lines of one feature: they share its flux by g and its column.
fn table_lines(
    number: usize,
    judged: &Judged<'_>,
    robust: &Mean,
    standing: &Standing,
    aperture_cm2: f64,
) -> Vec<LineResult> {
    let (feature, set) = (judged.feature, judged.group.set);
    let common = robust.column.value;
    let sigma = judged.column.sigma(common);
    let pull = (judged.column.value - common) / sigma;
    let g_sum: f64 = feature.lines.iter().map(|l| set.lines[*l].g_erg_s).sum();
    let expected = common * aperture_cm2 / judged.molecules_per_flux;
    feature
        .lines
        .iter()
        .zip(&feature.others)
        .map(|(&l, &others)| {
            let share = set.lines[l].g_erg_s / g_sum;
            let flux = feature.flux_erg_s_cm2;
            LineResult {
                band: judged.group.id.to_owned(),
                line: set.lines[l].clone(),
                in_plan: set.in_plan[l],
                feature: number,
                flux_erg_s_cm2: Measured::new(flux.value * share, flux.sigma * share),
                model_erg_s_cm2: expected * share,
                pull,
                column_cm2: Measured::new(judged.column.value, sigma),
                others,
                blend: judged.blend || others > BLEND,
                counts: standing.counts,
                discordant: standing.may_judge && pull.abs() > DISCORDANT * robust.scale,
                weight: standing.weight,
            }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use nalgebra::DMatrix;

    fn line(aa: f64, g_erg_s: f64) -> LineG {
        LineG {
            line: 0,
            wavelength_air_aa: aa - 1.0,
            wavelength_vacuum_aa: aa,
            lower_cm1: 0.0,
            upper_cm1: 1e8 / aa,
            kind: LineKind::Allowed,
            g_photons_s: g_erg_s * aa / HC_ERG_AA,
            g_erg_s,
            relative_sigma: 0.05,
            source: Arc::from("test"),
        }
    }

    /// Five lines of a band at ten widths from each other, the fourth three times too bright.
    fn found(robust: bool) -> (ByLine, Vec<Caveat>) {
        let g = [1e-15, 2e-15, 3e-15, 1e-15, 2e-15];
        let set = LineSet {
            lines: (0..5).map(|i| line(3600.0 + i as f64, g[i])).collect(),
            in_plan: (0..5).map(|i| 3599.0 + i as f64).collect(),
            robust,
            g_is_exact: false,
        };
        let species = Species::new("Fe I");
        let group = Group {
            block: 0,
            band: 0,
            id: "Fe I 3600",
            species: &species,
            set: &set,
        };
        let flux = |i: usize| g[i] * if i == 3 { 3.0 } else { 1.0 };
        let list = (0..5).map(|i| Feature {
            band: 0,
            lines: vec![i],
            share: g[i] / 9e-15,
            flux_erg_s_cm2: Measured::new(flux(i), 0.02 * g[i]),
            others: vec![0.0],
        });
        let features = [Features {
            list: list.collect(),
            covariance: DMatrix::identity(5, 5),
        }];
        let mut caveats = Vec::new();
        let mut all = measure(&[group], &features, 1.0, 1.0, &mut caveats);
        (all.remove(0), caveats)
    }

    #[test]
    fn the_wrong_line_is_named_and_weighs_nothing() {
        let (found, caveats) = found(true);
        let wrong: Vec<bool> = found.lines.iter().map(|l| l.discordant).collect();
        assert_eq!(wrong, [false, false, false, true, false]);
        assert_eq!(found.shares.len(), 4);
        assert_eq!(found.error_factor, 1.0);
        assert!((found.lines[3].column_cm2.value / found.robust_cm2.value - 3.0).abs() < 1e-9);
        let text = caveats[0].to_string();
        assert!(text.contains("without = [3602.00]"), "{text}");
    }

    #[test]
    fn without_the_robust_mean_the_scatter_enlarges_the_error() {
        let (found, caveats) = found(false);
        assert!(found.error_factor > 3.0 && found.mean_cm2.value > found.robust_cm2.value);
        assert!(caveats.iter().any(|c| c.code() == "line-scatter"));
        assert!(caveats.iter().any(|c| c.code() == "line-discordant"));
    }
}
