//! Floor 2: from a file to a checked [`Spectrum`] in vacuum Å and cgs.
//!
//! Imports floor 0 only. Never guesses a unit and never repairs a sample silently.

mod checked;
mod fits;
mod text;

pub use checked::{Columns, LineNumbers, Sample, Spectrum};
pub use fits::{
    ErrorKind, FitsLayout, FitsSpectrum, Part, PartFacts, Understood, looks_like_fits, read_fits,
};
pub use text::{Column, TextLayout, parse_text, read_text};
