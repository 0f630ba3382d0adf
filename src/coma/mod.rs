//! Floor 5: from band flux to production rate.
//!
//! Imports ground, frame and atomic.

mod afrho;
pub mod equilibrium;
mod haser;
mod molecules;
mod opacity;
mod quadrature;
mod residence;
mod special;

pub use afrho::afrho_cm;
pub use haser::{ApertureKm, Lengths, column_km, molecules_km};
pub use molecules::molecules_per_flux;
pub use opacity::{line_centre_opacity_cm2, strongest_line_fraction};
pub use residence::ResidenceGrid;
pub use special::{bessel_k0, bessel_k0_tail, bessel_k1};
