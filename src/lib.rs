//! Abundance ratios of comets from reduced spectra.
//!
//! A spectrum walks through the floors once, upwards; no floor imports a higher one:
//!
//! ```text
//! plan.toml ──► plan ─► analysis ────────────────────────────────────► report, figures
//! spectrum  ──► spectrum ─► frame ─► fit ─► coma ─► ratio ─► standing
//! line-lists ─► tables ──────────────┴───────┴───────┴────────┘
//! ```
//!
//! Inside, wavelengths are vacuum Å and fluxes are cgs (erg s⁻¹ cm⁻²); units are converted once, in
//! the readers. Every dimensional field carries its unit as a suffix.

pub mod alternatives;
pub mod analysis;
pub mod atomic;
pub mod by_line;
pub mod cli;
pub mod coma;
pub mod comparison;
pub mod dust;
pub mod efficiency;
pub mod figures;
pub mod fit;
pub mod forward;
pub mod frame;
pub mod ground;
pub mod identify;
pub mod paper;
pub mod plan;
pub mod ratio;
pub mod rehearse;
pub mod report;
pub mod spectrum;
pub mod standing;
pub mod tables;
