//! The methods paragraph, from the settings and numbers of the analysis itself.

mod compared;
mod rates;
mod render;

pub(super) use render::{latex, markdown};

use super::bib::References;
use super::latex::harmless;
use super::rounding::number;
use super::study::Study;
use crate::fit::{Resolution, Uncertainty};
use crate::frame::{Aperture, Frame, km_per_arcsec};

use compared::comparison;
use rates::rates;

/// A paragraph with its heading, citations marked; plain Unicode.
pub(super) struct Paragraph {
    /// Heading.
    pub title: String,
    /// Text.
    pub text: String,
}

/// All paragraphs of one result.
pub(super) fn methods(s: &Study, refs: &mut References) -> Vec<Paragraph> {
    let mut out = vec![
        paragraph("Observation", observation(s)),
        paragraph("Band fluxes", fluxes(s)),
        paragraph("Column densities and production rates", rates(s, refs)),
        paragraph("Uncertainties", uncertainties(s)),
    ];
    if s.analysis.ratios.iter().any(|r| !r.known.is_empty()) {
        out.push(paragraph("Comparison", comparison(s, refs)));
    }
    out
}

fn paragraph(title: &str, text: String) -> Paragraph {
    Paragraph {
        title: title.to_owned(),
        text,
    }
}

/// `a, b and c`.
pub(super) fn list(items: &[String]) -> String {
    match items {
        [] => String::new(),
        [one] => one.clone(),
        [most @ .., last] => format!("{} and {last}", most.join(", ")),
    }
}

fn signed(v: f64) -> String {
    format!("{v:+}").replace('-', "−")
}

fn per_cent(share: f64) -> String {
    let text = format!("{:.1}", 100.0 * share);
    format!("{} %", text.strip_suffix(".0").unwrap_or(&text))
}

fn observation(s: &Study) -> String {
    let g = &s.settings.geometry;
    let km = km_per_arcsec(g.observer_au);
    let aperture = match s.settings.aperture {
        Aperture::Circle { radius_arcsec } => format!(
            "a circle of {radius_arcsec}″ radius, {} km at the comet",
            number(radius_arcsec * km)
        ),
        Aperture::Slit {
            width_arcsec,
            length_arcsec,
            offset_across_arcsec,
            offset_along_arcsec,
        } => {
            let offset = if offset_across_arcsec == 0.0 && offset_along_arcsec == 0.0 {
                "centred on the nucleus".to_owned()
            } else {
                format!(
                    "its centre {offset_across_arcsec}″ across and {offset_along_arcsec}″ along it from the nucleus"
                )
            };
            format!(
                "a rectangle of {width_arcsec}″ × {length_arcsec}″, {} km × {} km at the comet, {offset}",
                number(width_arcsec * km),
                number(length_arcsec * km)
            )
        }
    };
    let orbit = if s.settings.sky.is_some() {
        " These numbers follow from its orbit."
    } else {
        ""
    };
    format!(
        "{} was at a heliocentric distance of {} au (rate {} km s⁻¹) and {} au from the observer (rate {} km s⁻¹).{orbit} The flux is that within {aperture}. {}",
        harmless(&s.heading()),
        g.heliocentric_au,
        signed(g.heliocentric_km_s),
        g.observer_au,
        signed(g.observer_km_s),
        frames(s)
    )
}

fn frames(s: &Study) -> String {
    let shift = |f: &Frame| match f {
        Frame::Observer => format!(
            "shifted by the observer-centred velocity of {} km s⁻¹",
            signed(s.settings.geometry.observer_km_s)
        ),
        Frame::Comet => "given in the rest frame of the comet".to_owned(),
        Frame::Shifted { velocity_km_s } => {
            format!("shifted by {} km s⁻¹", signed(*velocity_km_s))
        }
    };
    let mut kinds: Vec<String> = s.settings.spectra.iter().map(|t| shift(&t.frame)).collect();
    kinds.dedup();
    format!(
        "Wavelengths are vacuum ones in the rest frame of the comet ({}).",
        list(&kinds)
    )
}

fn fluxes(s: &Study) -> String {
    let windows = windows(s);
    let resolution = s
        .settings
        .spectra
        .first()
        .and_then(|t| t.fit.resolution.as_ref());
    let instrument = match resolution {
        Some(Resolution::ResolvingPower(r)) => {
            format!(" The intrinsic widths were widened by the instrument (λ/FWHM = {r}).")
        }
        Some(Resolution::FwhmAa(fwhm)) => {
            format!(" The intrinsic widths were widened by the instrument (FWHM {fwhm} Å).")
        }
        Some(Resolution::Table(_)) => {
            " The intrinsic widths were widened by the instrument's tabulated profile.".to_owned()
        }
        None => String::new(),
    };
    let shape = if s
        .settings
        .bands
        .iter()
        .any(|b| b.model.structure.lines().len() > 1)
    {
        "Gaussians (where a band has lines of its own, sums of Gaussians at their places)"
    } else {
        "Gaussians"
    };
    let free = s
        .settings
        .spectra
        .first()
        .map_or(10.0, |t| t.fit.free_shape_sigma);
    format!(
        "Bands were modelled as {shape} on {}, together by weighted least squares in {}.{instrument} Centres and widths were fitted from a signal-to-noise ratio of {free} and held below. A band counts as detected from {} times its error; below, limits are one-sided at 99.7 %.",
        continuum(s),
        windows,
        s.settings.detection_sigma
    ) + &outliers(s)
}

/// More windows than this are summarised.
const MANY_WINDOWS: usize = 8;

/// The windows one by one, or what they have in common when there are many.
fn windows(s: &Study) -> String {
    let all: Vec<_> = s
        .analysis
        .fits
        .iter()
        .flat_map(|(_, fit)| &fit.windows)
        .collect();
    if all.len() > MANY_WINDOWS {
        let reduced = all.iter().map(|w| w.chi2 / w.dof as f64);
        let (low, high) = reduced.fold((f64::INFINITY, 0.0_f64), |(a, b), v| (a.min(v), b.max(v)));
        let orders = all.iter().map(|w| w.continuum_order);
        let (first, last) = (all[0].window_aa.0, all[all.len() - 1].window_aa.1);
        return format!(
            "{} windows within {} (continuum of order {} at most, χ²/ν between {low:.2} and {high:.2})",
            all.len(),
            range((first, last)),
            orders.max().unwrap_or(0)
        );
    }
    let each: Vec<String> = all
        .iter()
        .map(|w| {
            format!(
                "{} (continuum of order {}, χ²/ν = {:.1}/{}{})",
                range(w.window_aa),
                w.continuum_order,
                w.chi2,
                w.dof,
                if w.errors_estimated {
                    ", errors estimated from the scatter"
                } else {
                    ""
                }
            )
        })
        .collect();
    format!("the windows {}", list(&each))
}

/// What lies under the bands.
fn continuum(s: &Study) -> String {
    let Some(fit) = s.settings.spectra.first().map(|t| &t.fit) else {
        return "a continuum".to_owned();
    };
    let scattered = match &fit.continuum.carrier {
        None => "a Chebyshev polynomial for the continuum".to_owned(),
        Some(carrier) => format!(
            "{} (shifted by the heliocentric velocity, at the resolution of the instrument) times a Chebyshev polynomial for the dust's reflectance",
            carrier.label()
        ),
    };
    match fit.continuum.thermal {
        None => scattered,
        Some(t) => format!(
            "{scattered} plus a Planck function of free scale ({} {:.0} K)",
            if t.free {
                "fitted temperature, begun at"
            } else {
                "temperature"
            },
            t.temperature_k
        ),
    }
}

/// Samples dropped and errors not taken from the covariance.
fn outliers(s: &Study) -> String {
    let Some(fit) = s.settings.spectra.first().map(|t| &t.fit) else {
        return String::new();
    };
    let clipped = fit.clip_sigma.map_or_else(String::new, |k| {
        format!(" Samples farther than {k} times their error from the fit were dropped, at most three in a row.")
    });
    let scaled = if fit.scale_errors {
        " Given errors were scaled to a reduced χ² of one."
    } else {
        ""
    };
    let from = match fit.uncertainty {
        Uncertainty::Covariance => "",
        Uncertainty::Profile => {
            " Errors of the fluxes are those where χ², minimised over all else, has risen by one."
        }
        Uncertainty::ResidualBootstrap => {
            " Errors of the fluxes come from refits with residuals drawn anew."
        }
        Uncertainty::PairBootstrap => {
            " Errors of the fluxes come from refits with samples drawn anew."
        }
        Uncertainty::Walkers => {
            " Errors of the fluxes come from an ensemble of walkers with stretch moves (Goodman & Weare 2010)."
        }
    };
    format!("{clipped}{scaled}{from}")
}

fn range((low, high): (f64, f64)) -> String {
    if low >= 10_000.0 {
        format!("{:.3}–{:.3} µm", low / 1e4, high / 1e4)
    } else {
        format!("{low:.0}–{high:.0} Å")
    }
}

fn uncertainties(s: &Study) -> String {
    let mut calibration: Vec<String> = s
        .settings
        .spectra
        .iter()
        .map(|t| per_cent(t.calibration_sigma))
        .collect();
    calibration.dedup();
    let mut lengths: Vec<String> = s
        .settings
        .species
        .iter()
        .filter_map(|t| t.coma.as_ref())
        .map(|c| per_cent(c.length_sigma))
        .collect();
    lengths.sort();
    lengths.dedup();
    let coma = if lengths.is_empty() {
        String::new()
    } else {
        format!(
            ", scale lengths ({}) and the expansion speed common to all species ({})",
            list(&lengths),
            per_cent(s.settings.speed_sigma)
        )
    };
    format!(
        "Errors come from {} random draws (seed {}) shared by all species, so that what two species have in common cancels in their ratio: band fluxes from a normal distribution with the full covariance of the fit, and log-normal factors for the flux calibration ({}), the efficiencies{coma}. Ratios are medians with 68.3 % intervals; limits of ratios are one-sided at 99.7 %.",
        s.settings.draws.count,
        s.settings.draws.seed,
        list(&calibration)
    )
}
