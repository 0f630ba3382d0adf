//! Floor 7: the analysis repeated with other choices: continuum order, windows, shapes, bands. Says
//! which choice the data prefer and how much each ratio depends on it.
//!
//! Imports floors 0–6 and the analysis. Reads no file and prints nothing; never puts an alternative in
//! the place of what the plan asks for.

mod criteria;
mod summary;
mod variants;
mod views;

pub use criteria::{FTest, Quality};
pub use summary::{RatioSpread, Shift};
pub use variants::{Choice, MOST_REMOVALS};

use crate::analysis::{Analysis, BandSettings, RatioSettings, Settings, analyse};
use crate::ground::{Caveat, Measured, Result, Species};
use crate::ratio::{Interval, Ratio, RatioKind};
use crate::spectrum::Spectrum;
use rayon::prelude::*;
use variants::{Variant, lean, noise_alone, pinned, variants};
use views::{View, compare, total, views};

/// One choice and what comes of it.
#[derive(Clone, Debug)]
pub struct Row {
    /// What is done differently.
    pub choice: Choice,
    /// χ², degrees of freedom and the rest, all windows together.
    pub quality: Option<Quality>,
    /// AICc minus that of the plan; `None` when the samples are not the same.
    pub aicc_difference: Option<f64>,
    /// BIC minus that of the plan; `None` when the samples are not the same.
    pub bic_difference: Option<f64>,
    /// The larger of this model and the plan's against the smaller, where one contains the other.
    pub f_test: Option<FTest>,
    /// True when the fit is the plan's own, because the choice changes nothing.
    pub same_fit: bool,
    /// Whether the data rule the choice out, by [`RULED_OUT_AICC`]. Never where the samples differ
    /// from the plan's, nor where a window is left unused together with its only band.
    pub ruled_out: bool,
    /// The ratios in the order of the plan; `None` where this choice gives none.
    pub ratios: Vec<Option<Found>>,
    /// Why there is no result.
    pub failure: Option<String>,
}

/// An AICc this much worse than the plan's, on the same samples, rules a choice out: such models
/// have "essentially no support" (Burnham & Anderson 2002, Model Selection and Multimodel
/// Inference, section 2.6; from memory).
pub const RULED_OUT_AICC: f64 = 10.0;

/// A ratio under one choice.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Found {
    /// Value, limit, or neither.
    pub kind: RatioKind,
    /// Median and intervals, for a value.
    pub interval: Option<Interval>,
    /// One-sided 99.7 % limit, for a limit.
    pub limit: Option<f64>,
    /// log10 of the median over the plan's median, in units of the plan's error bar in log10.
    pub shift_sigma: Option<f64>,
    /// True when no flux that the ratio stands on has changed.
    pub unchanged: bool,
}

/// All choices.
#[derive(Clone, Debug)]
pub struct Alternatives {
    /// The plan first, then its alternatives.
    pub rows: Vec<Row>,
    /// How far each ratio moves, in the order of the plan.
    pub spreads: Vec<RatioSpread>,
    /// Doubts.
    pub caveats: Vec<Caveat>,
    /// Bands that were not left out one by one because there are too many.
    pub not_left_out: usize,
}

/// Number of analyses that [`alternatives`] runs, for a progress bar.
pub fn count(settings: &Settings, base: &Analysis, extra: &[BandSettings]) -> usize {
    variants(&lean(settings, base), base, extra).len()
}

/// Repeats the analysis with every alternative choice. `base` is the analysis of the same spectra and
/// settings; `extra` holds bands to add one by one where a window covers them. `tick` is called after
/// every alternative, from any thread. An alternative that fails becomes a row with its reason.
///
/// # Errors
/// The plan's own analysis fails.
pub fn alternatives(
    spectra: &[Spectrum],
    settings: &Settings,
    base: &Analysis,
    extra: &[BandSettings],
    tick: &(dyn Fn() + Sync),
) -> Result<Alternatives> {
    let lean = lean(settings, base);
    let noise = analyse(spectra, &noise_alone(&lean))?;
    let base_views = views(base, None);
    let planned = Row {
        ratios: found(settings, base, base),
        quality: total(&base_views),
        ..Row::empty(Choice::Planned, settings.ratios.len())
    };
    let others: Vec<Row> = variants(&lean, base, extra)
        .into_par_iter()
        .map(|variant| {
            let row = row(spectra, settings, base, &base_views, &variant);
            tick();
            row
        })
        .collect();
    let rows: Vec<Row> = std::iter::once(planned).chain(others).collect();
    let noise = found(settings, &noise, &noise);
    let spreads = summary::spreads(&settings.ratios, &rows, &noise);
    let mut caveats = summary::caveats(&settings.ratios, &rows, &spreads);
    let not_left_out = settings.bands.len().saturating_sub(MOST_REMOVALS);
    if not_left_out > 0 {
        caveats.push(Caveat::Other {
            code: "bands-not-left-out",
            text: format!(
                "only the {MOST_REMOVALS} strongest of {} bands were left out one by one",
                settings.bands.len()
            ),
        });
    }
    Ok(Alternatives {
        rows,
        spreads,
        caveats,
        not_left_out,
    })
}

impl Row {
    fn empty(choice: Choice, ratios: usize) -> Self {
        Self {
            choice,
            quality: None,
            aicc_difference: None,
            bic_difference: None,
            f_test: None,
            same_fit: false,
            ruled_out: false,
            ratios: vec![None; ratios],
            failure: None,
        }
    }
}

fn row(
    spectra: &[Spectrum],
    settings: &Settings,
    base: &Analysis,
    base_views: &[View],
    variant: &Variant,
) -> Row {
    let empty = Row::empty(variant.choice.clone(), settings.ratios.len());
    let analysis = match analyse(spectra, &variant.settings) {
        Ok(analysis) => analysis,
        Err(error) => {
            return Row {
                failure: Some(error.message().to_owned()),
                ..empty
            };
        }
    };
    let views = views(&analysis, Some(base));
    let compared = compare(base_views, &views);
    Row {
        quality: total(&views),
        aicc_difference: compared.and_then(|c| c.aicc),
        bic_difference: compared.and_then(|c| c.bic),
        f_test: compared
            .and_then(|c| c.f_test)
            .or_else(|| pinned_test(spectra, base, base_views, variant)),
        same_fit: compared.is_some_and(|c| c.same),
        ruled_out: windows(&analysis) == windows(base)
            && compared
                .and_then(|c| c.aicc)
                .is_some_and(|d| d > RULED_OUT_AICC),
        ratios: found(settings, &analysis, base),
        ..empty
    }
}

fn windows(analysis: &Analysis) -> usize {
    analysis.fits.iter().map(|(_, f)| f.windows.len()).sum()
}

/// The F-test of a continuum order where a higher or lower order changed which shapes are fitted:
/// with those of the plan the models contain one another.
fn pinned_test(
    spectra: &[Spectrum],
    base: &Analysis,
    base_views: &[View],
    variant: &Variant,
) -> Option<FTest> {
    if !matches!(variant.choice, Choice::Order(_)) {
        return None;
    }
    let analysis = analyse(spectra, &pinned(&variant.settings, base)).ok()?;
    compare(base_views, &views(&analysis, Some(base)))?.f_test
}

/// The plan's ratios as another analysis gives them.
fn found(settings: &Settings, analysis: &Analysis, base: &Analysis) -> Vec<Option<Found>> {
    let of = |analysis: &Analysis, wanted: &RatioSettings| -> Option<Found> {
        let is = |r: &Ratio| (&r.of, &r.to, r.basis) == (&wanted.of, &wanted.to, wanted.basis);
        let mut ratios = analysis.ratios.iter().map(|r| &r.ratio);
        ratios.find(|r| is(r)).map(|r| Found {
            kind: r.kind,
            interval: r.interval,
            limit: r.limit,
            shift_sigma: None,
            unchanged: false,
        })
    };
    let shifted = |wanted| {
        let mut found = of(analysis, wanted)?;
        let planned = of(base, wanted);
        if let Some(planned) = planned
            && same_fluxes(&fluxes(analysis, wanted), &fluxes(base, wanted))
        {
            // Other random draws would give a little other numbers.
            found = planned;
            found.unchanged = true;
        }
        found.shift_sigma = planned.and_then(|p| shift(&p, &found));
        Some(found)
    };
    settings.ratios.iter().map(shifted).collect()
}

/// The fluxes that a ratio stands on: identifier, value and error.
fn fluxes<'a>(analysis: &'a Analysis, ratio: &RatioSettings) -> Vec<(&'a str, Measured)> {
    let stands = |s: &Species| *s == ratio.of || *s == ratio.to;
    analysis
        .bands
        .iter()
        .filter(|b| b.efficiency.is_some() && b.species.as_ref().is_some_and(stands))
        .map(|b| (b.fit.id.as_str(), b.fit.flux_erg_s_cm2))
        .collect()
}

fn same_fluxes(a: &[(&str, Measured)], b: &[(&str, Measured)]) -> bool {
    let near = |x: f64, y: f64, sigma: f64| (x - y).abs() <= 1e-6 * sigma;
    let same = |((i, x), (j, y)): (&(&str, Measured), &(&str, Measured))| {
        i == j && near(x.value, y.value, x.sigma) && near(x.sigma, y.sigma, x.sigma)
    };
    a.len() == b.len() && a.iter().zip(b).all(same)
}

fn shift(planned: &Found, found: &Found) -> Option<f64> {
    let shift = found.log10_median()? - planned.log10_median()?;
    Some(shift / planned.error_bar_dex()?)
}

impl Found {
    /// log10 of the median of a positive value.
    pub fn log10_median(&self) -> Option<f64> {
        let median = self.interval?.median;
        (median > 0.0).then(|| median.log10())
    }

    /// Half the width of the 68.3 % interval in log10; `None` when the interval reaches zero.
    pub fn error_bar_dex(&self) -> Option<f64> {
        let i = self.interval?;
        let half = 0.5 * (i.high68 / i.low68).log10();
        (i.low68 > 0.0 && half > 0.0).then_some(half)
    }
}
