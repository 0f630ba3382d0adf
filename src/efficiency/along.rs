//! Efficiencies along a range of velocities or distances.

use super::Subject;
use super::table::{bands_of, shown};
use crate::atomic::{InfraredBand, LevelSystem};
use crate::coma::equilibrium::{Conditions, Equilibrium, SolarField, infrared_g};
use crate::ground::Result;
use crate::ground::constants::HC_ERG_AA;
use rayon::prelude::*;

/// g of one line or band at every place.
#[derive(Clone, Debug)]
pub struct Series {
    /// Name of a band; empty for a line.
    pub band: String,
    /// Vacuum wavelength, Å; for a band without a single one, that of its mean photon.
    pub wavelength_vacuum_aa: f64,
    /// Photons per second and atom or molecule, in the order of the places.
    pub g_photons_s: Vec<f64>,
    /// erg s⁻¹ per atom or molecule.
    pub g_erg_s: Vec<f64>,
}

impl Series {
    /// Largest g along the range.
    pub fn peak_photons_s(&self) -> f64 {
        self.g_photons_s.iter().copied().fold(0.0, f64::max)
    }
}

/// The brightest lines or bands along a range.
#[derive(Clone, Debug)]
pub struct Along {
    /// Brightest first, by the largest g along the range.
    pub series: Vec<Series>,
    /// How many other lines or bands there are.
    pub fainter: usize,
}

/// Solves at every place, shared out over the processor's cores, and keeps the `most` brightest lines
/// of an atom, or bands of a molecule, that somewhere reach `threshold` of the brightest.
///
/// # Errors
/// Impossible conditions.
pub fn along(
    subject: &Subject,
    field: &SolarField,
    places: &[Conditions],
    threshold: f64,
    most: usize,
) -> Result<Along> {
    let mut series = match subject {
        Subject::Atom(system) => lines(system, field, places)?,
        Subject::Bands(system) => bands(system, field, places)?,
        Subject::Infrared(bands) => infrared(bands, field, places)?,
    };
    series.sort_by(|a, b| b.peak_photons_s().total_cmp(&a.peak_photons_s()));
    let least = threshold * series.first().map_or(0.0, Series::peak_photons_s);
    let all = series.len();
    series.retain(|s| s.peak_photons_s() > 0.0 && s.peak_photons_s() >= least);
    series.truncate(most);
    let fainter = all - series.len();
    Ok(Along { series, fainter })
}

fn solve<T: Send>(
    system: &LevelSystem,
    field: &SolarField,
    places: &[Conditions],
    take: impl Fn(&Equilibrium) -> T + Sync,
) -> Result<Vec<T>> {
    places
        .par_iter()
        .map(|at| Equilibrium::solve(system, field, at).map(|e| take(&e)))
        .collect()
}

fn lines(system: &LevelSystem, field: &SolarField, places: &[Conditions]) -> Result<Vec<Series>> {
    let g = solve(system, field, places, |e| {
        e.lines().iter().map(|l| l.g_photons_s).collect::<Vec<_>>()
    })?;
    let series = system.lines().iter().enumerate();
    Ok(series
        .filter(|(_, l)| shown(l.kind))
        .map(|(i, l)| {
            let g_photons_s: Vec<f64> = g.iter().map(|at| at[i]).collect();
            let erg = HC_ERG_AA / l.wavelength_vacuum_aa;
            Series {
                band: String::new(),
                wavelength_vacuum_aa: l.wavelength_vacuum_aa,
                g_erg_s: g_photons_s.iter().map(|g| g * erg).collect(),
                g_photons_s,
            }
        })
        .collect())
}

fn bands(system: &LevelSystem, field: &SolarField, places: &[Conditions]) -> Result<Vec<Series>> {
    let names = bands_of(system);
    let g = solve(system, field, places, |e| {
        names
            .iter()
            .map(|(upper, lower)| {
                e.band(*upper, *lower)
                    .map_or((0.0, 0.0), |b| (b.g_photons_s, b.g_erg_s))
            })
            .collect::<Vec<_>>()
    })?;
    let column = |i: usize| g.iter().map(move |at| at[i]);
    Ok(names
        .iter()
        .enumerate()
        .map(|(i, (upper, lower))| {
            let (g_photons_s, g_erg_s): (Vec<f64>, Vec<f64>) = column(i).unzip();
            let (photons, erg): (f64, f64) = (g_photons_s.iter().sum(), g_erg_s.iter().sum());
            Series {
                band: format!("{upper}-{lower}"),
                wavelength_vacuum_aa: HC_ERG_AA * photons / erg,
                g_photons_s,
                g_erg_s,
            }
        })
        .filter(|s| s.wavelength_vacuum_aa.is_finite())
        .collect())
}

fn infrared(
    bands: &[InfraredBand],
    field: &SolarField,
    places: &[Conditions],
) -> Result<Vec<Series>> {
    bands
        .iter()
        .map(|band| {
            let g = places
                .iter()
                .map(|at| infrared_g(band, field, at))
                .collect::<Result<Vec<_>>>()?;
            Ok(Series {
                band: band.band.clone(),
                wavelength_vacuum_aa: 1.0e8 / band.nu_cm1,
                g_photons_s: g.iter().map(|g| g.g_photons_s).collect(),
                g_erg_s: g.iter().map(|g| g.g_erg_s).collect(),
            })
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::atomic::sun;

    #[test]
    fn bands_and_lines_agree_with_single_solutions() {
        let field = SolarField::sun(sun(None).unwrap());
        let place = |v: f64, r: f64| Conditions {
            heliocentric_au: r,
            heliocentric_km_s: v,
            ..Conditions::UNIT
        };
        let places = [place(-20.0, 1.0), place(15.0, 2.0)];
        let sodium = Subject::load("Na I", None).unwrap();
        let found = along(&sodium, &field, &places, 0.1, 6).unwrap();
        assert_eq!(found.series.len(), 2, "D1 and D2 outshine the rest");
        let Subject::Atom(system) = &sodium else {
            panic!("an atom")
        };
        for (k, at) in places.iter().enumerate() {
            let g = Equilibrium::solve(system, &field, at).unwrap();
            let brightest = g.brightest(1)[0].g_photons_s;
            let most = found.series.iter().map(|s| s.g_photons_s[k]);
            assert_eq!(most.fold(0.0, f64::max), brightest);
        }
        let carbon_dioxide = Subject::load("CO2", None).unwrap();
        let found = along(&carbon_dioxide, &field, &places, 0.0, 6).unwrap();
        let g = &found.series[0].g_photons_s;
        // Inverse square, but for the smooth solar slope between the two Doppler shifts.
        assert!((g[0] / g[1] - 4.0).abs() < 0.01, "{g:?}");
    }
}
