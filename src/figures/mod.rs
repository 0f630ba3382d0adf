//! Floor 8, an edge: figures for print. Plain structs go in, SVG text comes out.
//!
//! May import `ground` only; whoever calls translates results into the structs here, in the units
//! that are to be shown. Never opens a file, never needs a system font or library: text is measured
//! with a table of advance widths kept beside the code.
//!
//! Every figure comes in the two widths of a journal page ([`Width`]); type is 7–8 pt at that size.
//! Series differ by dash pattern, marker shape and grey level as well as by colour.

mod alternatives;
mod axis;
mod canvas;
mod corner;
mod coverage;
mod curve;
mod density;
mod excitation;
mod fit;
mod fit_panel;
mod label;
mod lanes;
mod marker;
mod panel;
mod quicklook;
mod scatter;
mod standing;
mod standing_row;
mod style;
mod text;
mod thin;

pub use alternatives::{
    AlternativePanel, AlternativePoint, AlternativesFigure, Reach, alternatives_svg,
};
pub use axis::Scale;
pub use corner::{CornerFigure, CornerRatio, corner_svg};
pub use coverage::{CoverageFigure, CoveragePoint, CoverageRow, coverage_svg};
pub use curve::{Curve, CurveFigure, Tick, VerticalMark, range_svg};
pub use excitation::{ExcitationFigure, ExcitationPanel, ExcitationPoint, excitation_svg};
pub use fit::{FitBand, FitFigure, FitPanel, fit_svg};
pub use quicklook::{Position, QuicklookFigure, quicklook_svg};
pub use scatter::{ScatterFigure, ScatterPoint, scatter_svg};
pub use standing::{
    Bounds, ComparisonComet, ComparisonValue, StandingFigure, StandingRow, ThisComet, standing_svg,
};
pub use style::Width;
