//! Floor 8, an edge: the plan file (TOML) and how it becomes checked settings.
//!
//! May import every floor. A [`Plan`] never travels below this floor: each floor has its own small
//! settings struct. Nothing here reads a spectrum
//! to be measured, only curves that belong to the settings.

mod check;
mod document;
mod resolve;
mod schema;
mod schema_bands;
mod schema_light;
mod schema_simulate;

pub use check::{Checked, check, instant, orbit, site};
pub use document::{PlanFile, read_plan};
pub use resolve::to_toml;
pub use schema::{
    AperturePlan, BandPlan, ColumnPlan, ColumnsPlan, ComaPlan, CometPlan, ContinuumPlan, DatePlan,
    DrawsPlan, LifetimePlan, LinesPlan, MeasurePlan, OrbitPlan, Plan, SimulateContinuumPlan,
    SimulateNoisePlan, SimulatePlan, SitePlan, SpectrumPlan, StarPlan, StatePlan, TablesPlan,
    ThermalPlan, TransmissionPlan,
};
