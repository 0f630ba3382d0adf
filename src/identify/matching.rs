//! Peaks and the lines they can be.

use super::catalogue::{Catalogue, CatalogueLine};
use super::peaks::Peak;
use crate::ground::Species;

/// Error of a catalogue's wavelengths, Å, common to all: that of the atlas.
const CATALOGUE_AA: f64 = 0.03;
/// Farthest candidate, in standard deviations of peak and catalogue together.
pub const MATCH_SIGMA: f64 = 3.0;
/// Range around a peak in which the density of named lines is counted, Å to each side.
const AROUND_AA: f64 = 10.0;

/// A line that a peak can be.
#[derive(Clone, Debug)]
pub struct Candidate {
    /// The line.
    pub line: CatalogueLine,
    /// Peak minus line, Å.
    pub offset_aa: f64,
    /// The same in standard deviations.
    pub offset_sigma: f64,
}

impl Candidate {
    /// d²/2 − ln s, d the distance in standard deviations and s the predicted strength relative to the
    /// species' brightest line (1 for lines seen in a comet): the smaller the better.
    fn cost(&self) -> f64 {
        0.5 * self.offset_sigma * self.offset_sigma - self.line.relative.ln()
    }
}

/// A peak with its candidates.
#[derive(Clone, Debug)]
pub struct Identification {
    /// The peak.
    pub peak: Peak,
    /// Best first; lines without a name come last.
    pub candidates: Vec<Candidate>,
    /// Probability that at least one named line lies within reach of a place chosen blindly here.
    pub chance: f64,
}

impl Identification {
    /// The best candidate with a name.
    pub fn best(&self) -> Option<&Candidate> {
        self.candidates.first().filter(|c| c.line.species.is_some())
    }

    /// The species of the best candidate.
    pub fn species(&self) -> Option<&Species> {
        self.best()?.line.species.as_ref()
    }
}

/// Gives every peak the catalogue's lines within three standard deviations, the peak's error and
/// 0.03 Å for the catalogue taken in quadrature.
pub fn identify(peaks: &[Peak], catalogue: &Catalogue) -> Vec<Identification> {
    peaks.iter().map(|p| one(p, catalogue)).collect()
}

fn one(peak: &Peak, catalogue: &Catalogue) -> Identification {
    let at = peak.wavelength_vacuum_aa;
    let sigma = peak.sigma_aa.hypot(CATALOGUE_AA);
    let reach = MATCH_SIGMA * sigma;
    let mut candidates: Vec<Candidate> = catalogue
        .between(at - reach, at + reach)
        .iter()
        .map(|line| Candidate {
            line: line.clone(),
            offset_aa: at - line.wavelength_vacuum_aa,
            offset_sigma: (at - line.wavelength_vacuum_aa) / sigma,
        })
        .collect();
    candidates.sort_by(|a, b| {
        let unnamed = |c: &Candidate| c.line.species.is_none();
        unnamed(a)
            .cmp(&unnamed(b))
            .then(a.cost().total_cmp(&b.cost()))
    });
    let around = catalogue.between(at - AROUND_AA, at + AROUND_AA);
    let named = around.iter().filter(|l| l.species.is_some()).count() as f64;
    let expected = named / (2.0 * AROUND_AA) * 2.0 * reach;
    Identification {
        peak: peak.clone(),
        candidates,
        chance: -(-expected).exp_m1(),
    }
}
