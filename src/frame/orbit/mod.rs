//! Where a comet was and how fast it moved, from orbital elements or a state vector and a date.
//!
//! Two-body motion about the Sun, the Earth from a published series, light time iterated. May import
//! floor 0 and [`super::Geometry`]. Never reads a file and never adds planetary perturbations: the days
//! between the elements' epoch and the observation come back with the result, so that a caller can warn.
//!
//! ```
//! use comagauge::frame::orbit::{Elements, Instant, Scale, observe};
//! let orbit = Elements {
//!     perihelion_au: 0.9,
//!     eccentricity: 0.99,
//!     inclination_deg: 40.0,
//!     node_deg: 120.0,
//!     argument_deg: 75.0,
//!     perihelion_time_jd_tdb: 2_463_000.5,
//!     epoch_jd_tdb: Some(2_463_000.5),
//! }
//! .orbit()?;
//! let when = Instant::parse("2031-03-14T05:12:30", Scale::Utc)?;
//! let sky = observe(&orbit, &when, None)?;
//! let geometry = sky.geometry();
//! # assert!(geometry.heliocentric_au > 0.9);
//! # Ok::<(), comagauge::ground::Error>(())
//! ```

mod elements;
mod kepler;
mod observe;
#[cfg(test)]
mod properties;
mod site;
mod state;
mod stumpff;
mod time;

pub use elements::{Elements, OBLIQUITY_J2000_ARCSEC};
pub use kepler::{Conic, GAUSS_K, Perifocal};
pub use observe::{Sky, earth_heliocentric, observe, observe_same_instant};
pub use site::Site;
pub use state::{Axes, Orbit, State, StateVector};
pub use time::{Instant, Scale};
