//! Published rows as entries of a comparison, selected by class, distance and method.

use crate::ground::Species;
use crate::ratio::Basis;
use crate::standing::{Entry, Known};
use crate::tables::{ComparisonRow, Confidence, Kind, Tables};

/// Which published rows take part; the default takes all.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Selection {
    /// Only comets of this dynamical class (the word of the tables, for example `JFC`).
    pub class: Option<String>,
    /// Only rows within these heliocentric distances, au; rows without a distance stay out.
    pub r_h_au: Option<(f64, f64)>,
    /// Only rows whose method contains this text, whatever the case.
    pub method: Option<String>,
}

impl Selection {
    /// Whether anything is left out.
    pub fn is_all(&self) -> bool {
        *self == Self::default()
    }

    fn takes(&self, row: &ComparisonRow) -> bool {
        let class = self
            .class
            .as_deref()
            .is_none_or(|c| c == row.class.as_str());
        let distance = self
            .r_h_au
            .is_none_or(|(low, high)| row.r_h_au.is_some_and(|r| (low..=high).contains(&r)));
        let method = self
            .method
            .as_deref()
            .is_none_or(|m| row.method.to_lowercase().contains(&m.to_lowercase()));
        class && distance && method
    }
}

/// Published rows of a ratio on the same footing; rows of low confidence stay out.
pub fn rows_of<'t>(
    tables: &'t Tables,
    of: &Species,
    to: &Species,
    basis: Basis,
) -> impl Iterator<Item = &'t ComparisonRow> {
    let (of, to) = (of.clone(), to.clone());
    let wanted = match basis {
        Basis::Production => crate::tables::Basis::Production,
        Basis::Column => crate::tables::Basis::Column,
    };
    tables.comparison().iter().filter(move |r| {
        r.of == of && r.to == to && r.basis == wanted && r.confidence >= Confidence::Medium
    })
}

/// The selected rows of a ratio as entries, linear.
pub fn entries(
    tables: &Tables,
    of: &Species,
    to: &Species,
    basis: Basis,
    selection: &Selection,
) -> Vec<Entry> {
    rows_of(tables, of, to, basis)
        .filter(|r| selection.takes(r))
        .map(entry)
        .collect()
}

fn entry(row: &ComparisonRow) -> Entry {
    let linear = |v: f64| if row.log10 { 10f64.powf(v) } else { v };
    let value = linear(row.value);
    let errors = row.err_minus.zip(row.err_plus);
    Entry {
        comet: row.comet.clone(),
        class: row.class.as_str().to_owned(),
        value,
        errors: errors.map(|(minus, plus)| {
            (
                value - linear(row.value - minus),
                linear(row.value + plus) - value,
            )
        }),
        known: match row.kind {
            Kind::Value => Known::Value,
            Kind::Upper => Known::Upper,
            Kind::Lower => Known::Lower,
        },
        heliocentric_au: row.r_h_au,
    }
}
