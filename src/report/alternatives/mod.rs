//! Alternatives as tables for people, CSV, JSON and a figure.

mod csv;
mod json;
mod picture;
mod text;

pub use csv::alternatives_csv;
pub use json::alternatives_json;
pub use picture::alternatives_figure;
pub use text::alternatives_table;

use crate::ratio::RatioKind;

fn kind_word(kind: RatioKind) -> &'static str {
    match kind {
        RatioKind::Value => "value",
        RatioKind::Upper => "upper",
        RatioKind::Lower => "lower",
        RatioKind::Unconstrained => "unconstrained",
    }
}
