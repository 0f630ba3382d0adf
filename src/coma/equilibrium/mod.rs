//! Fluorescence efficiencies (g-factors) of gas in sunlight, by statistical equilibrium.
//!
//! Imports floors 0 and 1. Optically thin, no collisions, steady state. Never hides a level: what is
//! dropped, and what holds population without a way down, is reported.
//!
//! ```
//! use comagauge::atomic;
//! use comagauge::coma::equilibrium::{Conditions, Equilibrium, SolarField};
//! use comagauge::ground::Species;
//!
//! let sodium = atomic::atom(&Species::new("Na I"), None)?;
//! let field = SolarField::sun(atomic::sun(None)?);
//! let at = Conditions { heliocentric_au: 1.0, heliocentric_km_s: -20.0, width_km_s: 0.0 };
//! let equilibrium = Equilibrium::solve(&sodium, &field, &at)?;
//! let d2 = equilibrium.brightest(1)[0];
//! assert!((d2.wavelength_air_aa - 5889.95).abs() < 0.01 && d2.g_photons_s > 1.0);
//! # Ok::<(), comagauge::ground::Error>(())
//! ```

mod chain;
mod doubts;
mod draws;
mod field;
mod infrared;
mod network;
mod result;
mod solve;
mod swings;

pub use draws::{Spread, spread};
pub use field::{Conditions, SolarField};
pub use infrared::infrared_g;
pub use result::{BandG, Dropped, LineG};
pub use solve::Equilibrium;
pub use swings::swings_curve;
