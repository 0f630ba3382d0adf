//! Floor 7: the whole way from spectra to standings, on checked settings.
//!
//! Imports floors 0–6. Reads no file and prints nothing; what it returns is all that the edges see.

mod results;
mod settings;

pub use results::{Analysis, BandResult, RatioResult, SpeciesResult};
pub use settings::{
    BandSettings, Beside, ComaSettings, EfficiencyAtComet, RatioSettings, Settings,
    SpeciesSettings, SpectrumSettings,
};

use crate::by_line::{self, ByLine};
use crate::coma::{ApertureKm, ResidenceGrid, molecules_per_flux};
use crate::dust::dust;
use crate::fit::{BandFit, Features, SpectrumFit, features, fit_spectrum};
use crate::frame::to_rest_within;
use crate::ground::{Caveat, Error, Measured, Result, Species};
use crate::ratio::{
    BandShare, Draws, FluxBlock, Lifetimes, SpeciesPlan, disagreement, draw, ratio,
};
use crate::spectrum::Spectrum;
use crate::standing::{Entry, Estimated, VoteRule, one_vote_each, place};

/// Fewer comets than this draw a caveat.
const THIN_COMPARISON: usize = 10;
/// Optical depth from which the linear conversion is doubted.
const DOUBTFUL_TAU: f64 = 0.3;

/// Runs the analysis.
///
/// # Errors
/// A band that no spectrum covers, a fit without an answer, a ratio without a coma model.
pub fn analyse(spectra: &[Spectrum], settings: &Settings) -> Result<Analysis> {
    let mut caveats = settings.caveats.clone();
    let home = assign_bands(spectra, settings)?;
    let fits = fit_all(spectra, settings, &home, &mut caveats)?;
    let aperture_cm2 = settings.aperture.area_cm2(settings.geometry.observer_au);
    let bands = band_results(settings, &fits, &home, aperture_cm2, &mut caveats);
    note_disagreement(settings, &bands, &mut caveats);
    let dust = dust(settings, &fits, &mut caveats);
    let features = line_features(settings, &fits, &home)?;
    let by_line = lines(
        settings,
        (&fits, &features),
        &home,
        aperture_cm2,
        &mut caveats,
    );
    let plans = species_plans(settings, &fits, &home, &by_line);
    let blocks = flux_blocks(settings, &fits, &features);
    if plans.is_empty() {
        return Ok(Analysis {
            aperture_cm2,
            fits,
            bands,
            dust,
            by_line,
            species: vec![],
            ratios: vec![],
            caveats,
        });
    }
    let draws = draw(&blocks, &plans, settings.speed_sigma, settings.draws)?;
    let species = species_results(settings, &draws, aperture_cm2);
    let ratios = settings
        .ratios
        .iter()
        .map(|r| ratio_result(r, settings, &draws, &mut caveats))
        .collect::<Result<Vec<_>>>()?;
    Ok(Analysis {
        aperture_cm2,
        fits,
        bands,
        dust,
        by_line,
        species,
        ratios,
        caveats,
    })
}

/// The spectrum each band is measured in.
fn assign_bands(spectra: &[Spectrum], settings: &Settings) -> Result<Vec<usize>> {
    let covers = |s: &Spectrum, centre: f64| {
        let x = s.wavelength_aa();
        x[0] < centre && centre < x[x.len() - 1]
    };
    settings
        .bands
        .iter()
        .map(|band| {
            if let Some(i) = band.spectrum {
                return Ok(i);
            }
            let centre = band.model.centre_aa;
            spectra
                .iter()
                .position(|s| covers(s, centre))
                .ok_or_else(|| {
                    let ranges: Vec<String> = spectra
                        .iter()
                        .map(|s| {
                            let x = s.wavelength_aa();
                            format!(
                                "{} covers {:.1} to {:.1} Å",
                                s.label(),
                                x[0],
                                x[x.len() - 1]
                            )
                        })
                        .collect();
                    Error::input(format!(
                        "band {} at {centre:.1} Å (vacuum) lies in none of the spectra: {}",
                        band.model.id,
                        ranges.join("; ")
                    ))
                    .remedy("leave the band out, or check wavelength_unit and medium")
                })
        })
        .collect()
}

fn fit_all(
    spectra: &[Spectrum],
    settings: &Settings,
    home: &[usize],
    caveats: &mut Vec<Caveat>,
) -> Result<Vec<(usize, SpectrumFit)>> {
    let mut fits = Vec::new();
    for (i, (spectrum, how)) in spectra.iter().zip(&settings.spectra).enumerate() {
        let (nan, flagged) = spectrum.left_out();
        if nan + flagged > 0 {
            caveats.push(Caveat::SamplesLeftOut {
                spectrum: spectrum.label().to_owned(),
                not_a_number: nan,
                flagged,
            });
        }
        let mut fit_settings = how.fit.clone();
        fit_settings.bands = bands_of(settings, home, i)
            .map(|b| b.model.clone())
            .collect();
        if fit_settings.bands.is_empty() {
            caveats.push(Caveat::Other {
                code: "spectrum-unused",
                text: format!("{}: none of the bands lies in it", spectrum.label()),
            });
            continue;
        }
        let windows = fit_settings.bands.iter().map(|b| b.window_aa);
        let range = windows.fold((f64::INFINITY, 0.0), |(low, high): (f64, f64), w| {
            (low.min(w.0), high.max(w.1))
        });
        let (geometry, aperture) = (&settings.geometry, &settings.aperture);
        let rest = to_rest_within(spectrum, how.frame, geometry, aperture, range);
        let fit = fit_spectrum(&rest, &fit_settings)?;
        caveats.extend(fit.caveats.iter().cloned());
        fits.push((i, fit));
    }
    Ok(fits)
}

fn bands_of<'a>(
    settings: &'a Settings,
    home: &'a [usize],
    spectrum: usize,
) -> impl Iterator<Item = &'a BandSettings> {
    settings
        .bands
        .iter()
        .zip(home)
        .filter(move |(_, h)| **h == spectrum)
        .map(|(b, _)| b)
}

/// Position of a band's fit: (index among the fits, index in that fit).
fn find_fit(
    settings: &Settings,
    fits: &[(usize, SpectrumFit)],
    home: &[usize],
    band: usize,
) -> (usize, usize) {
    let at = fits
        .iter()
        .position(|(i, _)| *i == home[band])
        .expect("invariant: a spectrum with bands was fitted");
    let within = (0..band).filter(|b| home[*b] == home[band]).count();
    debug_assert_eq!(fits[at].1.bands[within].id, settings.bands[band].model.id);
    (at, within)
}

fn band_results(
    settings: &Settings,
    fits: &[(usize, SpectrumFit)],
    home: &[usize],
    aperture_cm2: f64,
    caveats: &mut Vec<Caveat>,
) -> Vec<BandResult> {
    let mut out = Vec::new();
    for (b, band) in settings.bands.iter().enumerate() {
        let (at, within) = find_fit(settings, fits, home, b);
        let fit = fits[at].1.bands[within].clone();
        let column_cm2 = band.efficiency.as_ref().map(|g| {
            let per_flux = molecules_per_flux(
                g.g_photons_s,
                band.model.centre_aa,
                settings.geometry.observer_au,
            ) / aperture_cm2;
            let flux = fit.flux_erg_s_cm2;
            Measured::new(flux.value * per_flux, flux.sigma * per_flux)
        });
        note_band(band, &fit, column_cm2, caveats);
        out.push(BandResult {
            species: band.species.clone(),
            spectrum: home[b],
            efficiency: band.efficiency.clone(),
            column_cm2,
            fit,
        });
    }
    out
}

/// Bands of one species whose columns differ by more than fit and g allow.
fn note_disagreement(settings: &Settings, bands: &[BandResult], caveats: &mut Vec<Caveat>) {
    for species in settings.species.iter().map(|s| &s.species) {
        let own: Vec<(&BandResult, (f64, f64))> = bands
            .iter()
            .filter(|b| b.species.as_ref() == Some(species))
            .filter_map(|b| {
                let (column, g) = (b.column_cm2?, b.efficiency.as_ref()?);
                let sigma = column.sigma.hypot(g.relative_sigma * column.value);
                Some((b, (column.value, sigma)))
            })
            .collect();
        let columns: Vec<(f64, f64)> = own.iter().map(|(_, c)| *c).collect();
        if let Some(found) = disagreement(&columns) {
            caveats.push(Caveat::Other {
                code: "bands-disagree",
                text: format!(
                    "{species}: its {} bands disagree (reduced chi-square {:.1}); farthest is {} at {:+.1} σ from the others: a blend or a wrong g; leave it out or doubt the error bar",
                    own.len(),
                    found.reduced_chi2,
                    own[found.worst].0.fit.id,
                    found.pull
                ),
            });
        }
    }
}

fn note_band(
    band: &BandSettings,
    fit: &BandFit,
    column_cm2: Option<Measured>,
    caveats: &mut Vec<Caveat>,
) {
    if let (Some(opacity), Some(column)) = (band.opacity_cm2, column_cm2) {
        let tau = opacity * column.value;
        if fit.detected && tau > DOUBTFUL_TAU {
            caveats.push(Caveat::OpticalDepth {
                band: fit.id.clone(),
                tau,
            });
        }
    }
    if let Some(intrinsic) = band.structured_fwhm_aa
        && fit.detected
        && fit.fwhm_aa < 1.5 * intrinsic
        && fit.flux_erg_s_cm2.signal_to_noise() > 10.0
    {
        caveats.push(Caveat::GaussianForStructured {
            band: fit.id.clone(),
        });
    }
}

/// The lines of `[[lines]]` bands measured one by one, for every fit.
fn line_features(
    settings: &Settings,
    fits: &[(usize, SpectrumFit)],
    home: &[usize],
) -> Result<Vec<Features>> {
    let mut wanted = vec![Vec::new(); fits.len()];
    for b in (0..settings.bands.len()).filter(|b| settings.bands[*b].lines.is_some()) {
        let (at, within) = find_fit(settings, fits, home, b);
        wanted[at].push(within);
    }
    fits.iter()
        .zip(&wanted)
        .map(|((i, fit), wanted)| features(fit, wanted, settings.spectra[*i].fit.sampling))
        .collect()
}

fn lines(
    settings: &Settings,
    (fits, features): (&[(usize, SpectrumFit)], &[Features]),
    home: &[usize],
    aperture_cm2: f64,
    caveats: &mut Vec<Caveat>,
) -> Vec<ByLine> {
    let groups: Vec<by_line::Group<'_>> = settings
        .bands
        .iter()
        .enumerate()
        .filter_map(|(b, band)| {
            let (set, species) = (band.lines.as_ref()?, band.species.as_ref()?);
            let (at, within) = find_fit(settings, fits, home, b);
            Some(by_line::Group {
                block: at,
                band: within,
                id: &band.model.id,
                species,
                set,
            })
        })
        .collect();
    let observer_au = settings.geometry.observer_au;
    by_line::measure(&groups, features, observer_au, aperture_cm2, caveats)
}

fn species_plans(
    settings: &Settings,
    fits: &[(usize, SpectrumFit)],
    home: &[usize],
    by_line: &[ByLine],
) -> Vec<SpeciesPlan> {
    let km = ApertureKm::at(&settings.aperture, settings.geometry.observer_au);
    settings
        .species
        .iter()
        .map(|s| {
            let bands = settings
                .bands
                .iter()
                .enumerate()
                .filter(|(_, b)| b.species.as_ref() == Some(&s.species))
                .filter_map(|(b, band)| {
                    let g = band.efficiency.as_ref()?;
                    let (block, within) = find_fit(settings, fits, home, b);
                    Some(BandShare {
                        block,
                        band: within,
                        molecules_per_flux: molecules_per_flux(
                            g.g_photons_s,
                            band.model.centre_aa,
                            settings.geometry.observer_au,
                        ),
                        g_sigma: g.relative_sigma,
                    })
                })
                .collect();
            let lifetimes = s
                .coma
                .as_ref()
                .map(|c| lifetimes(c, &km, settings.speed_sigma));
            let lines = by_line.iter().find(|l| l.species == s.species);
            let robust = lines.filter(|l| l.robust);
            SpeciesPlan {
                species: s.species.clone(),
                bands: robust.map_or(bands, |l| line_shares(l, fits)),
                weights: robust.map(|l| l.shares.iter().map(|s| s.weight).collect()),
                error_factor: lines.map_or(1.0, |l| l.error_factor),
                lifetimes,
            }
        })
        .filter(|p: &SpeciesPlan| !p.bands.is_empty())
        .collect()
}

/// The features of a robust column; they follow the bands in the block of fluxes.
fn line_shares(lines: &ByLine, fits: &[(usize, SpectrumFit)]) -> Vec<BandShare> {
    lines
        .shares
        .iter()
        .map(|s| BandShare {
            block: s.block,
            band: fits[s.block].1.bands.len() + s.feature,
            molecules_per_flux: s.molecules_per_flux,
            g_sigma: s.g_sigma,
        })
        .collect()
}

/// Draws reach this many sigma from the centre; the grid spans them.
const GRID_REACH_SIGMA: f64 = 4.5;

fn lifetimes(coma: &ComaSettings, km: &ApertureKm, speed_sigma: f64) -> Lifetimes {
    let follow = if coma.lengths_follow_speed {
        speed_sigma
    } else {
        0.0
    };
    let span = GRID_REACH_SIGMA * coma.length_sigma.hypot(follow);
    Lifetimes {
        grid: ResidenceGrid::new(&coma.lengths, km, span),
        lengths: coma.lengths,
        parent_sigma: coma.length_sigma,
        daughter_sigma: coma.length_sigma,
        speed_km_s: coma.speed_km_s,
        lengths_follow_speed: coma.lengths_follow_speed,
    }
}

/// Fluxes of the bands, then, where a species wants its robust column, those of the features. The
/// covariance between features and whole bands is left out: no species uses both.
fn flux_blocks(
    settings: &Settings,
    fits: &[(usize, SpectrumFit)],
    features: &[Features],
) -> Vec<FluxBlock> {
    let robust = settings
        .bands
        .iter()
        .any(|b| b.lines.as_ref().is_some_and(|l| l.robust));
    fits.iter()
        .zip(features)
        .map(|((i, fit), features)| {
            let list = if robust {
                features.list.as_slice()
            } else {
                &[]
            };
            let (n, m) = (fit.bands.len(), list.len());
            let mut covariance = fit.flux_covariance.clone().resize(n + m, n + m, 0.0);
            if robust {
                covariance
                    .view_mut((n, n), (m, m))
                    .copy_from(&features.covariance);
            }
            let bands = fit.bands.iter().map(|b| b.flux_erg_s_cm2.value);
            FluxBlock {
                flux_erg_s_cm2: bands
                    .chain(list.iter().map(|f| f.flux_erg_s_cm2.value))
                    .collect(),
                covariance,
                calibration_sigma: settings.spectra[*i].calibration_sigma,
                sided: fit.sided.clone(),
                sampled: fit.sampled.clone(),
            }
        })
        .collect()
}

fn species_results(settings: &Settings, draws: &Draws, aperture_cm2: f64) -> Vec<SpeciesResult> {
    (0..draws.species.len())
        .map(|c| {
            let best = draws.molecules[c];
            let sigma = spread(draws.molecule_draws.column(c).iter().copied());
            let open = draws.production_per_s[c].is_nan();
            SpeciesResult {
                species: draws.species[c].clone(),
                molecules: Measured::new(best.value, sigma),
                column_cm2: Measured::new(best.value / aperture_cm2, sigma / aperture_cm2),
                production_per_s: (!open).then(|| {
                    Measured::new(draws.production_per_s[c], spread(draws.production_draws(c)))
                }),
                detected: best.signal_to_noise() >= settings.detection_sigma,
            }
        })
        .collect()
}

/// Half the width of the 68.3 % interval of draws, which a rare wild draw does not move.
fn spread(draws: impl Iterator<Item = f64>) -> f64 {
    crate::ratio::Interval::of(draws).map_or(f64::NAN, |i| i.half_width68())
}

fn ratio_result(
    wanted: &RatioSettings,
    settings: &Settings,
    draws: &Draws,
    caveats: &mut Vec<Caveat>,
) -> Result<RatioResult> {
    let column = |s: &Species| {
        draws.column(s).ok_or_else(|| {
            Error::plan(format!(
                "{s} has no band with a known g, so no ratio can be formed"
            ))
            .remedy("give g_photons_s in a [[band]] table")
        })
    };
    let (of, to) = (column(&wanted.of)?, column(&wanted.to)?);
    let found = ratio(draws, of, to, wanted.basis, settings.detection_sigma);
    let rule = VoteRule::NearestDistance(settings.geometry.heliocentric_au);
    let known = one_vote_each(&wanted.known, rule);
    let sample: Vec<_> = known.iter().map(Entry::censored).collect();
    let name = format!("{}/{}", wanted.of, wanted.to);
    let standing = Estimated::of(&sample).and_then(|estimated| {
        let median = found.interval?.median;
        Some(place(&estimated, median, &found.draws, settings.draws.seed))
    });
    if standing.is_some_and(|s| s.comets < THIN_COMPARISON) {
        caveats.push(Caveat::ThinComparison {
            ratio: name,
            comets: known.len(),
        });
    }
    Ok(RatioResult {
        ratio: found,
        known,
        standing,
    })
}
