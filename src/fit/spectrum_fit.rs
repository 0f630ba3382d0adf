//! One spectrum's fit: bands sorted into windows, each window fitted, results in cgs.

use super::form::Form;
use super::group::FittedGroup;
use super::pick::Group;
use super::results::{BandFit, SpectrumFit};
use super::settings::FitSettings;
use super::solver::Solver;
use crate::frame::RestSpectrum;
use crate::ground::{Error, Result};
use nalgebra::DMatrix;

/// Fits all bands of the settings to a spectrum. Bands whose windows overlap are fitted together.
///
/// # Errors
/// Impossible settings, a band outside the spectrum, too few samples, or bands that the data cannot
/// tell apart.
pub fn fit_spectrum(spectrum: &RestSpectrum, settings: &FitSettings) -> Result<SpectrumFit> {
    settings.check()?;
    let groups = group_bands(spectrum, settings)?;
    let count = settings.bands.len();
    let mut out = SpectrumFit {
        label: spectrum.label().to_owned(),
        windows: Vec::new(),
        bands: Vec::new(),
        flux_covariance: DMatrix::zeros(count, count),
        sided: vec![None; count],
        sampled: Vec::new(),
        caveats: Vec::new(),
    };
    if let Some(carrier) = &settings.continuum.carrier {
        out.caveats.extend(carrier.caveats().iter().cloned());
    }
    let mut found: Vec<Option<BandFit>> = vec![None; count];
    let mut solver = Solver::default();
    for group in &groups {
        let fitted = FittedGroup::new(spectrum, settings, group, &mut solver)?;
        fitted.report(&mut out, &mut found);
    }
    out.bands = found
        .into_iter()
        .map(|b| b.expect("invariant: every band is in a group"))
        .collect();
    Ok(out)
}

fn group_bands(spectrum: &RestSpectrum, settings: &FitSettings) -> Result<Vec<Group>> {
    let x = spectrum.wavelength_aa();
    let (first, last) = (x[0], x[x.len() - 1]);
    let mut order: Vec<usize> = (0..settings.bands.len()).collect();
    order.sort_by(|a, b| {
        settings.bands[*a]
            .window_aa
            .0
            .total_cmp(&settings.bands[*b].window_aa.0)
    });
    let mut groups: Vec<Group> = Vec::new();
    for b in order {
        let band = &settings.bands[b];
        if band.centre_aa <= first || band.centre_aa >= last {
            return Err(Error::input(format!(
                "band {} at {:.1} Å lies outside {}, which covers {first:.1} to {last:.1} Å",
                band.id,
                band.centre_aa,
                spectrum.label()
            ))
            .remedy("leave the band out or check the wavelength unit and medium"));
        }
        let (low, high) = if settings.continuum.whole {
            (first, last)
        } else {
            (band.window_aa.0.max(first), band.window_aa.1.min(last))
        };
        let joins = groups.last().is_some_and(|g| g.window_aa.1 > low);
        if !joins {
            groups.push(Group {
                window_aa: (low, high),
                bands: Vec::new(),
                integrals: Vec::new(),
            });
        }
        let group = groups.last_mut().expect("invariant: pushed above");
        group.window_aa.1 = group.window_aa.1.max(high);
        match band.form {
            Form::Integral { .. } => group.integrals.push(b),
            _ => group.bands.push(b),
        }
    }
    Ok(groups)
}
