//! What an equilibrium gives.

use crate::atomic::LineKind;
use std::sync::Arc;

/// Fluorescence efficiency of one line.
#[derive(Clone, Debug)]
pub struct LineG {
    /// Index of the line in the level system.
    pub line: usize,
    /// Wavelength in standard air, Å (equal to vacuum below 2000 Å).
    pub wavelength_air_aa: f64,
    /// Vacuum wavelength, Å.
    pub wavelength_vacuum_aa: f64,
    /// Energy of the lower level, cm⁻¹.
    pub lower_cm1: f64,
    /// Energy of the upper level, cm⁻¹.
    pub upper_cm1: f64,
    /// What the line is.
    pub kind: LineKind,
    /// Spontaneous emissions per second and atom (of the species as a whole): x_u A_ul.
    pub g_photons_s: f64,
    /// The same as power, erg s⁻¹ per atom.
    pub g_erg_s: f64,
    /// Relative standard deviation: A of the line and sunlight at the line in quadrature. A first
    /// estimate; [`spread`](super::spread) follows the errors of all lines through the equilibrium.
    pub relative_sigma: f64,
    /// Where A comes from.
    pub source: Arc<str>,
}

/// Sum over the lines of one molecular band.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BandG {
    /// Photons per second and molecule.
    pub g_photons_s: f64,
    /// erg s⁻¹ per molecule.
    pub g_erg_s: f64,
    /// Relative standard deviation; the lines of a band are taken as wrong together.
    pub relative_sigma: f64,
}

/// A level left out of the equilibrium.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Dropped {
    /// Index of the level.
    pub level: usize,
    /// True when atoms can fall into it and not come back; false when nothing feeds it.
    pub trap: bool,
}
