//! One result with everything behind it.

use super::stamp::Origin;
use crate::analysis::{Analysis, Settings};
use crate::comparison::{Subject, SubjectValue};
use crate::ratio::RatioKind;
use crate::tables::Tables;

/// A result of `measure`, computed again from its plan and spectra.
pub struct Study {
    /// What was found.
    pub analysis: Analysis,
    /// With which settings.
    pub settings: Settings,
    /// The tables in use.
    pub tables: Tables,
    /// What it rests on.
    pub origin: Origin,
}

impl Study {
    /// Comet and date, for headings.
    pub(super) fn heading(&self) -> String {
        match &self.settings.date {
            Some(date) => format!("{}, {date}", self.settings.label),
            None => self.settings.label.clone(),
        }
    }

    /// The ratios with a positive value or limit, for comparisons.
    pub(super) fn subjects(&self) -> Vec<Subject> {
        let positive = |v: f64| (v > 0.0 && v.is_finite()).then_some(v);
        let ratios = self.analysis.ratios.iter().filter_map(|r| {
            let ratio = &r.ratio;
            let value = match ratio.kind {
                RatioKind::Value => {
                    let i = ratio.interval?;
                    SubjectValue::Measured {
                        median: positive(i.median)?,
                        low: i.low68,
                        high: positive(i.high68)?,
                    }
                }
                RatioKind::Upper => SubjectValue::Upper(positive(ratio.limit?)?),
                RatioKind::Lower => SubjectValue::Lower(positive(ratio.limit?)?),
                RatioKind::Unconstrained => return None,
            };
            Some(Subject {
                label: self.settings.label.clone(),
                date: self.settings.date.clone().unwrap_or_default(),
                of: ratio.of.clone(),
                to: ratio.to.clone(),
                basis: ratio.basis,
                r_h_au: Some(self.settings.geometry.heliocentric_au),
                value,
            })
        });
        ratios.collect()
    }
}
