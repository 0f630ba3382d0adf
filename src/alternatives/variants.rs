//! The choices one could have made instead, each as settings of its own.

use crate::analysis::{Analysis, BandSettings, RatioSettings, Settings};
use crate::fit::{BandModel, Form, Freedom, Structure};
use crate::ground::Species;
use crate::ground::constants::FWHM_PER_SIGMA;
use std::fmt;

/// Windows are made narrower and wider by this fraction.
const WINDOW_CHANGE: f64 = 0.2;
/// At most this many bands are left out one by one, the strongest first.
pub const MOST_REMOVALS: usize = 40;

/// What a variant does differently; `Display` says it in words.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Choice {
    /// Nothing: the plan as it is.
    Planned,
    /// Continuum order changed by so much in every window.
    Order(i32),
    /// A plain polynomial instead of sunlight or a star.
    PlainContinuum,
    /// Windows narrower by a fifth, about the band's centre.
    WindowsNarrower,
    /// Windows wider by a fifth, about the band's centre.
    WindowsWider,
    /// Every centre held at its expected place.
    CentresHeld,
    /// The centre of every detected band fitted.
    CentresFitted,
    /// Every width held at its expected value.
    WidthsHeld,
    /// The width of every detected band fitted.
    WidthsFitted,
    /// Every envelope of lines replaced by one Gaussian as wide.
    SingleGaussians,
    /// One band left out.
    Without(String),
    /// One band more.
    With(String),
}

impl fmt::Display for Choice {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Planned => f.write_str("as planned"),
            Self::Order(by) => write!(f, "continuum order {by:+}"),
            Self::PlainContinuum => f.write_str("plain polynomial"),
            Self::WindowsNarrower => f.write_str("windows 20 % narrower"),
            Self::WindowsWider => f.write_str("windows 20 % wider"),
            Self::CentresHeld => f.write_str("centres held"),
            Self::CentresFitted => f.write_str("centres fitted"),
            Self::WidthsHeld => f.write_str("widths held"),
            Self::WidthsFitted => f.write_str("widths fitted"),
            Self::SingleGaussians => f.write_str("one Gaussian per band"),
            Self::Without(band) => write!(f, "without {band}"),
            Self::With(band) => write!(f, "with {band} too"),
        }
    }
}

/// A choice and the settings that carry it out.
#[derive(Clone, Debug)]
pub(super) struct Variant {
    pub choice: Choice,
    pub settings: Settings,
}

/// The plan without what cannot change a fit or a ratio, every band kept in its spectrum.
pub(super) fn lean(settings: &Settings, base: &Analysis) -> Settings {
    let mut out = settings.clone();
    out.caveats.clear();
    out.sources.clear();
    out.ratios.iter_mut().for_each(|r| r.known.clear());
    for (band, found) in out.bands.iter_mut().zip(&base.bands) {
        band.spectrum = Some(found.spectrum);
    }
    out
}

/// The settings without the errors that a better fit could not make smaller: calibration, g, scale
/// lengths and speed.
pub(super) fn noise_alone(settings: &Settings) -> Settings {
    let mut out = settings.clone();
    out.speed_sigma = 0.0;
    for spectrum in &mut out.spectra {
        spectrum.calibration_sigma = 0.0;
    }
    for g in out.bands.iter_mut().filter_map(|b| b.efficiency.as_mut()) {
        g.relative_sigma = 0.0;
    }
    for coma in out.species.iter_mut().filter_map(|s| s.coma.as_mut()) {
        coma.length_sigma = 0.0;
    }
    out
}

/// All variants of lean settings that differ from them, in the order of the table.
pub(super) fn variants(
    settings: &Settings,
    base: &Analysis,
    extra: &[BandSettings],
) -> Vec<Variant> {
    let mut out = Vec::new();
    let mut add = |choice: Choice, changed: Option<Settings>| {
        out.extend(changed.map(|settings| Variant { choice, settings }));
    };
    for by in [-1, 1] {
        add(Choice::Order(by), order(settings, base, by));
    }
    add(Choice::PlainContinuum, plain_continuum(settings));
    for (choice, factor) in [
        (Choice::WindowsNarrower, 1.0 - WINDOW_CHANGE),
        (Choice::WindowsWider, 1.0 + WINDOW_CHANGE),
    ] {
        let changed = bands_changed(settings, |_, band| {
            let (low, high) = band.window_aa;
            let about = |edge: f64| band.centre_aa + factor * (edge - band.centre_aa);
            band.window_aa = (about(low).max(f64::MIN_POSITIVE), about(high));
        });
        add(choice, Some(changed));
    }
    let detected = |b: usize| base.bands[b].fit.detected;
    let free = |b: usize, freedom: &mut Freedom| {
        if detected(b) {
            *freedom = Freedom::Free;
        }
    };
    let held = |freedom: &mut Freedom| *freedom = Freedom::Held;
    let all = bands_changed(settings, |_, band| held(&mut band.centre));
    add(Choice::CentresHeld, differing(settings, all));
    let all = bands_changed(settings, |b, band| free(b, &mut band.centre));
    add(Choice::CentresFitted, differing(settings, all));
    let all = bands_changed(settings, |_, band| held(&mut band.width));
    add(Choice::WidthsHeld, differing(settings, all));
    let all = bands_changed(settings, |b, band| free(b, &mut band.width));
    add(Choice::WidthsFitted, differing(settings, all));
    add(Choice::SingleGaussians, single_gaussians(settings));
    for b in strongest(base) {
        let choice = Choice::Without(settings.bands[b].model.id.clone());
        add(choice, Some(without(settings, base, b)));
    }
    for band in extra {
        let choice = Choice::With(band.model.id.clone());
        add(choice, with(settings, base, band));
    }
    out
}

fn bands_changed(settings: &Settings, change: impl Fn(usize, &mut BandModel)) -> Settings {
    let mut out = settings.clone();
    for (b, band) in out.bands.iter_mut().enumerate() {
        change(b, &mut band.model);
    }
    out
}

/// The settings with every shape fitted or held as the plan's own fit did it, so that models which
/// differ in nothing else contain one another.
pub(super) fn pinned(settings: &Settings, base: &Analysis) -> Settings {
    let freedom = |fitted: bool| {
        if fitted { Freedom::Free } else { Freedom::Held }
    };
    bands_changed(settings, |b, band| {
        let fit = &base.bands[b].fit;
        band.centre = freedom(fit.centre_sigma_aa.is_some());
        band.width = freedom(fit.fwhm_sigma_aa.is_some());
    })
}

/// The changed settings, if the freedom of any band changed.
fn differing(before: &Settings, after: Settings) -> Option<Settings> {
    let freedom = |s: &Settings| -> Vec<(Freedom, Freedom)> {
        let pair = |b: &BandSettings| (b.model.centre, b.model.width);
        s.bands.iter().map(pair).collect()
    };
    (freedom(before) != freedom(&after)).then_some(after)
}

/// Every order moved by `by`; `None` when all are 0 and should go lower.
fn order(settings: &Settings, base: &Analysis, by: i32) -> Option<Settings> {
    let windows = || base.fits.iter().flat_map(|(_, fit)| &fit.windows);
    if windows().all(|w| w.continuum_order == 0) && by < 0 {
        return None;
    }
    let mut out = settings.clone();
    for spectrum in &mut out.spectra {
        spectrum.fit.continuum.order_shift += by;
    }
    Some(out)
}

/// No carrier under the polynomials; `None` where there is none.
fn plain_continuum(settings: &Settings) -> Option<Settings> {
    let mut out = settings.clone();
    let mut changed = false;
    for spectrum in &mut out.spectra {
        changed |= spectrum.fit.continuum.carrier.take().is_some();
    }
    changed.then_some(out)
}

/// Envelopes replaced by Gaussians of the same variance; `None` without any envelope.
fn single_gaussians(settings: &Settings) -> Option<Settings> {
    let single = |band: &BandSettings| band.model.structure.is_single();
    if settings.bands.iter().all(single) {
        return None;
    }
    Some(bands_changed(settings, |_, band| {
        if !band.structure.is_single() {
            band.fwhm_aa = Some(FWHM_PER_SIGMA * band.structure.spread() * band.centre_aa);
            band.structure = Structure::single();
            band.form = Form::Lines;
        }
    }))
}

/// The bands to leave out one by one: all, or the strongest when there are many; in plan order.
fn strongest(base: &Analysis) -> Vec<usize> {
    let strength = |b: &usize| base.bands[*b].fit.flux_erg_s_cm2.signal_to_noise().abs();
    let mut order: Vec<usize> = (0..base.bands.len()).collect();
    order.sort_by(|a, b| strength(b).total_cmp(&strength(a)));
    order.truncate(MOST_REMOVALS);
    order.sort_unstable();
    order
}

/// One band left out. The others of its window keep the window; ratios that stand on the band alone
/// are left out with it.
fn without(settings: &Settings, base: &Analysis, b: usize) -> Settings {
    let mut out = settings.clone();
    let gone = &base.bands[b];
    let window = window_of(base, b);
    let neighbour = (0..base.bands.len()).find(|&c| {
        let other = &base.bands[c];
        c != b && (other.spectrum, other.fit.window) == (gone.spectrum, gone.fit.window)
    });
    if let Some(c) = neighbour {
        out.bands[c].model.window_aa = window;
    }
    out.bands.remove(b);
    let known: Vec<Species> = out.bands.iter().filter_map(with_efficiency).collect();
    let stands = |r: &RatioSettings| known.contains(&r.of) && known.contains(&r.to);
    out.ratios.retain(stands);
    out
}

/// One band more, inside the window that holds its centre; `None` when none does.
fn with(settings: &Settings, base: &Analysis, band: &BandSettings) -> Option<Settings> {
    let centre = band.model.centre_aa;
    let b = (0..base.bands.len()).find(|&b| {
        let (low, high) = window_of(base, b);
        low < centre && centre < high
    })?;
    let mut band = band.clone();
    band.model.window_aa = window_of(base, b);
    band.spectrum = Some(base.bands[b].spectrum);
    let mut out = settings.clone();
    out.bands.push(band);
    Some(out)
}

fn window_of(base: &Analysis, b: usize) -> (f64, f64) {
    let band = &base.bands[b];
    let fit = base.fits.iter().find(|(i, _)| *i == band.spectrum);
    let (_, fit) = fit.expect("invariant: a spectrum with bands was fitted");
    fit.windows[band.fit.window].window_aa
}

/// The species that a band can stand for in a ratio.
fn with_efficiency(band: &BandSettings) -> Option<Species> {
    band.efficiency.as_ref().and(band.species.clone())
}
