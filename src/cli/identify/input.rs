//! What to look at: the spectra of a plan, or one spectrum with its units on the command line.

use super::Identify;
use crate::cli::measure::read_spectra;
use crate::coma::equilibrium::Conditions;
use crate::fit::Resolution;
use crate::frame::{Aperture, Frame, Geometry, RestSpectrum, to_rest};
use crate::ground::{Error, FluxUnit, Medium, Result, WavelengthUnit};
use crate::plan::{check, read_plan};
use crate::spectrum::{FitsLayout, Spectrum, TextLayout, looks_like_fits, read_fits, read_text};
use crate::tables::Tables;
use std::path::{Path, PathBuf};

/// One spectrum in the comet's rest frame.
pub(super) struct Task {
    pub spectrum: RestSpectrum,
    pub resolution: Option<Resolution>,
}

/// Everything that the search needs.
pub(super) struct Job {
    pub tasks: Vec<Task>,
    /// Where the predicted intensities hold.
    pub at: Conditions,
    pub folder: PathBuf,
    pub line_lists: Option<PathBuf>,
    /// One line that says what was assumed.
    pub about: String,
}

impl Job {
    pub fn read(given: &Identify) -> Result<Self> {
        let toml = given
            .input
            .extension()
            .is_some_and(|e| e.eq_ignore_ascii_case("toml"));
        if toml { planned(given) } else { bare(given) }
    }
}

fn folder(given: &Identify) -> PathBuf {
    given.out.clone().unwrap_or_else(|| {
        let stem = given
            .input
            .file_stem()
            .map_or_else(|| "spectrum".into(), |s| s.to_string_lossy().into_owned());
        given.input.with_file_name(format!("{stem}-lines"))
    })
}

fn planned(given: &Identify) -> Result<Job> {
    let flags = &given.bare;
    let out_of_place = flags.wavelength_unit.is_some()
        || flags.medium.is_some()
        || flags.flux_unit.is_some()
        || flags.resolving_power.is_some()
        || flags.observer_km_s != 0.0;
    if out_of_place {
        return Err(
            Error::plan("units, resolving power and velocity are given beside a plan")
                .remedy("write them into the plan"),
        );
    }
    let file = read_plan(&given.input)?;
    let place = |name: &Option<String>| name.as_ref().map(|n| file.folder().join(n));
    let line_lists = given
        .line_lists
        .clone()
        .or_else(|| place(&file.plan.tables.line_lists));
    let comparison = place(&file.plan.tables.comparison);
    let tables = Tables::load(line_lists.as_deref(), comparison.as_deref())?;
    let mut checked = check(&file, &tables)?;
    let (mut spectra, understood) = read_spectra(&checked.files)?;
    checked.settle(&file, &understood, &mut spectra)?;
    let settings = &checked.settings;
    let tasks = spectra
        .iter()
        .zip(&settings.spectra)
        .map(|(spectrum, how)| Task {
            spectrum: to_rest(spectrum, how.frame, &settings.geometry, &settings.aperture),
            resolution: how.fit.resolution.clone(),
        })
        .collect();
    let geometry = settings.geometry;
    Ok(Job {
        tasks,
        at: Conditions {
            heliocentric_au: geometry.heliocentric_au,
            heliocentric_km_s: geometry.heliocentric_km_s,
            ..Conditions::UNIT
        },
        folder: folder(given),
        line_lists,
        about: format!(
            "intensities predicted for {} au from the Sun and {:+} km/s; wavelengths in the comet's rest frame ({:+} km/s from the observer)",
            geometry.heliocentric_au, geometry.heliocentric_km_s, geometry.observer_km_s
        ),
    })
}

fn bare(given: &Identify) -> Result<Job> {
    let flags = &given.bare;
    let spectrum = read_bare(given)?;
    let geometry = Geometry::new(1.0, 0.0, 1.0, flags.observer_km_s)?;
    // The size of the aperture scales flux and noise alike and does not matter here.
    let aperture = Aperture::Circle { radius_arcsec: 1.0 }.checked()?;
    if let Some(r) = flags.resolving_power
        && !(5.0..=5e6).contains(&r)
    {
        return Err(
            Error::plan(format!("--resolving-power {r} is outside 5 to 5e6"))
                .remedy("the resolving power is λ/FWHM"),
        );
    }
    let task = Task {
        spectrum: to_rest(&spectrum, Frame::Observer, &geometry, &aperture),
        resolution: flags.resolving_power.map(Resolution::ResolvingPower),
    };
    Ok(Job {
        tasks: vec![task],
        at: Conditions::UNIT,
        folder: folder(given),
        line_lists: given.line_lists.clone(),
        about: format!(
            "no plan: intensities predicted for 1 au from the Sun and 0 km/s; wavelengths shifted by {:+} km/s",
            flags.observer_km_s
        ),
    })
}

fn read_bare(given: &Identify) -> Result<Spectrum> {
    let flags = &given.bare;
    let unit = flags.wavelength_unit.as_deref().map(WavelengthUnit::parse);
    let medium = flags.medium.as_deref().map(Medium::parse);
    let flux = flags.flux_unit.as_deref().map(FluxUnit::parse);
    let (unit, medium, flux) = (unit.transpose()?, medium.transpose()?, flux.transpose()?);
    let path: &Path = &given.input;
    if looks_like_fits(path) {
        let layout = FitsLayout {
            wavelength_unit: unit,
            medium,
            flux_unit: flux,
            ..FitsLayout::default()
        };
        return Ok(read_fits(path, &layout)?.spectrum);
    }
    let missing = |flag: &str, example: &str| {
        Error::plan(format!(
            "{flag} is missing: units and medium of {} are not guessed",
            path.display()
        ))
        .remedy(format!("add for example {flag} {example}"))
    };
    let unit = unit.ok_or_else(|| missing("--wavelength-unit", "Angstrom"))?;
    let medium = match (medium, unit) {
        (Some(m), _) => m,
        // Wavenumbers and frequencies are the same in any medium.
        (None, WavelengthUnit::Wavenumber { .. } | WavelengthUnit::Frequency { .. }) => {
            Medium::Vacuum
        }
        (None, WavelengthUnit::Length { .. }) => return Err(missing("--medium", "air")),
    };
    let flux = flux.ok_or_else(|| missing("--flux-unit", "erg/s/cm2/Angstrom"))?;
    read_text(path, &TextLayout::new(unit, medium, flux))
}
