//! Floor 8, an edge: an [`Analysis`](crate::analysis::Analysis) as JSON, CSV and a table for people.
//!
//! Imports floors 0–7. Returns strings; only [`write_all`] touches the disk, by writing beside the
//! target and renaming, so that an interrupted run leaves no half file.

mod alternatives;
mod comparison_figures;
mod comparison_table;
mod comparison_text;
mod completeness;
mod csv_files;
mod json;
mod lines;
mod pictures;
mod rehearsal;
mod simulated;
mod table;
mod write;

pub use alternatives::{
    alternatives_csv, alternatives_figure, alternatives_json, alternatives_table,
};
pub use comparison_figures::{comparison_distance_figure, comparison_standing_figure};
pub use comparison_table::{check_set_table, comparison_csv};
pub use comparison_text::comparison_text;
pub use completeness::{completeness_csv, completeness_figure, completeness_table};
pub use csv_files::{bands_csv, fit_csv, ratios_csv, species_csv, summary_csv};
pub use json::{Input, result_json};
pub use lines::{excitation_figure, lines_csv};
pub use pictures::{fit_figure, standing_figure};
pub use rehearsal::{rehearsal_csv, rehearsal_figure, rehearsal_table};
pub use simulated::{expected_csv, expected_figure, expected_table, simulated_csv};
pub use table::summary_table;
pub use write::write_all;

/// A number in a table: `None` and non-finite values become an empty cell.
fn cell(value: impl Into<Option<f64>>) -> String {
    match value.into() {
        Some(v) if v.is_finite() => shortest(v),
        _ => String::new(),
    }
}

/// Shortest text that reads back to the same number, in exponent form where that is shorter.
pub(crate) fn shortest(v: f64) -> String {
    let plain = format!("{v}");
    let exponent = format!("{v:e}");
    if exponent.len() < plain.len() {
        exponent
    } else {
        plain
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cells_round_trip_and_never_say_nan() {
        assert_eq!(cell(f64::NAN), "");
        assert_eq!(cell(None), "");
        for v in [1.5e-17, 0.1, 12345.0, -2.0e30] {
            assert_eq!(cell(v).parse::<f64>().expect("a number"), v);
        }
    }
}
