//! Floor 7: injection and recovery on the user's own data. The fitted model is taken as the truth,
//! fresh noise is drawn, and the whole analysis is repeated.
//!
//! Imports floors 0–6 and the analysis. Reads no file and prints nothing; never changes how a trial is
//! analysed, apart from errors that the trials do not vary.

mod completeness;
mod share;
mod tally;
mod trial;
mod truth;

pub use completeness::{Completeness, CompletenessStep, FLUX_STEPS, completeness, injectable};
pub use share::Share;
pub use tally::{Quantity, Recovered};

use crate::analysis::Settings;
use crate::ground::{Error, Result};
use crate::spectrum::Spectrum;
use rayon::prelude::*;
use tally::tally;
use trial::Trial;
use truth::Scene;

/// Where the noise of a trial comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Noise {
    /// Normal, independent from sample to sample, with the errors that the fit used.
    Gaussian,
    /// Residuals of the fit over their errors, drawn with replacement from the same window and
    /// multiplied by √(n/dof) for what the fit absorbed.
    Residuals,
}

/// What to rehearse.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Rehearsal {
    /// Number of trials, 10 to 1 million.
    pub trials: usize,
    /// Seed; trial k has a generator of its own made from seed and k.
    pub seed: u64,
    /// Random draws behind the ratios of one trial.
    pub draws: usize,
    /// Source of the noise.
    pub noise: Noise,
    /// Keep the errors of g, calibration, scale lengths and speed. The trials do not vary these, so
    /// intervals that hold them cover too much; without them the intervals are those of noise alone.
    pub full: bool,
}

/// What the trials say.
#[derive(Clone, Debug)]
pub struct Rehearsed {
    /// As asked for.
    pub how: Rehearsal,
    /// Band fluxes in the order of the plan, then ratios.
    pub rows: Vec<Recovered>,
    /// Trials whose analysis gave no answer; they count nowhere else.
    pub failed: usize,
    /// Why the first of them failed.
    pub first_failure: Option<String>,
}

fn check(how: Rehearsal) -> Result<()> {
    if (10..=1_000_000).contains(&how.trials) {
        return Ok(());
    }
    Err(
        Error::plan(format!("trials = {} is outside 10 to 1000000", how.trials))
            .remedy("1000 trials give a coverage to ±1.5 %"),
    )
}

/// Repeats the analysis on spectra that hold the fitted model and fresh noise. `tick` is called after
/// every trial, from any thread. The result does not depend on the number of threads.
///
/// # Errors
/// A number of trials out of range, spectra that cannot be analysed, or no trial with an answer.
pub fn rehearse(
    spectra: &[Spectrum],
    settings: &Settings,
    how: Rehearsal,
    tick: &(dyn Fn() + Sync),
) -> Result<Rehearsed> {
    check(how)?;
    let scene = Scene::new(spectra, settings, how)?;
    let outcomes: Vec<Result<Trial>> = (0..how.trials)
        .into_par_iter()
        .map(|k| {
            let outcome = scene.trial(how, k as u64);
            tick();
            outcome
        })
        .collect();
    let mut trials = Vec::with_capacity(outcomes.len());
    let (mut failed, mut first_failure) = (0, None);
    for outcome in outcomes {
        match outcome {
            Ok(trial) => trials.push(trial),
            Err(error) => {
                failed += 1;
                first_failure.get_or_insert_with(|| error.message().to_owned());
            }
        }
    }
    if trials.is_empty() {
        let why = first_failure.unwrap_or_default();
        return Err(Error::compute(format!("no trial gave an answer: {why}")));
    }
    Ok(Rehearsed {
        how,
        rows: tally(&scene, &trials),
        failed,
        first_failure,
    })
}
