//! What an analysis yields.

use super::settings::EfficiencyAtComet;
use crate::by_line::ByLine;
use crate::dust::DustResult;
use crate::fit::{BandFit, SpectrumFit};
use crate::ground::{Caveat, Measured, Species};
use crate::ratio::Ratio;
use crate::standing::{Entry, Standing};

/// One band of the result.
#[derive(Clone, Debug)]
pub struct BandResult {
    /// The fit.
    pub fit: BandFit,
    /// Its species.
    pub species: Option<Species>,
    /// Index of the spectrum.
    pub spectrum: usize,
    /// g at the comet.
    pub efficiency: Option<EfficiencyAtComet>,
    /// Mean column density in the aperture; the error is the fit's alone.
    pub column_cm2: Option<Measured>,
}

/// One species of the result.
#[derive(Clone, Debug)]
pub struct SpeciesResult {
    /// The species.
    pub species: Species,
    /// Molecules in the aperture with the full error.
    pub molecules: Measured,
    /// Mean column density, cm⁻², with the full error.
    pub column_cm2: Measured,
    /// Production rate with the full error, where the coma model is known.
    pub production_per_s: Option<Measured>,
    /// Whether the fluxes detect it.
    pub detected: bool,
}

/// A ratio and its standing.
#[derive(Clone, Debug)]
pub struct RatioResult {
    /// The ratio.
    pub ratio: Ratio,
    /// The comets it was compared with, one entry each.
    pub known: Vec<Entry>,
    /// Its place among them.
    pub standing: Option<Standing>,
}

/// Everything that the analysis yields.
#[derive(Clone, Debug)]
pub struct Analysis {
    /// Projected area of the aperture, cm².
    pub aperture_cm2: f64,
    /// One fit per spectrum that has bands, with the index of the spectrum.
    pub fits: Vec<(usize, SpectrumFit)>,
    /// Bands in the order asked for.
    pub bands: Vec<BandResult>,
    /// The dust, where the continuum tells of it.
    pub dust: Vec<DustResult>,
    /// Species of `[[lines]]` tables line by line.
    pub by_line: Vec<ByLine>,
    /// Species in the order of their first band.
    pub species: Vec<SpeciesResult>,
    /// Ratios in the order asked for.
    pub ratios: Vec<RatioResult>,
    /// All doubts.
    pub caveats: Vec<Caveat>,
}
