//! From the command line to subjects and a selection.

use super::Compare;
use super::read_back::read_result;
use crate::comparison::{Selection, Subject, SubjectValue};
use crate::ground::{Error, Result, Species, did_you_mean};
use crate::ratio::Basis;
use crate::tables::DynamicalClass;
use std::path::Path;

impl Compare {
    pub(super) fn selection(&self) -> Result<Selection> {
        for (option, class) in [
            ("--class", self.class.as_deref()),
            ("--add-class", Some(self.add_class.as_str())),
        ] {
            if let Some(class) = class {
                known_class(option, class)?;
            }
        }
        Ok(Selection {
            class: self.class.clone(),
            r_h_au: self.rh.as_deref().map(range).transpose()?,
            method: self.method.clone(),
        })
    }

    pub(super) fn subjects(&self) -> Result<Vec<Subject>> {
        if let [only] = self.inputs.as_slice()
            && let Ok(value) = only.parse::<f64>()
        {
            return Ok(vec![self.number(value)?]);
        }
        if self.of.is_some() || self.to.is_some() {
            return Err(
                Error::plan(format!("{:?} is not one number", self.inputs.join(" "))).remedy(
                    "--of and --to go with one number; result files name their ratios themselves",
                ),
            );
        }
        let mut out = Vec::new();
        for file in &self.inputs {
            out.extend(read_result(Path::new(file))?);
        }
        if out.is_empty() {
            return Err(
                Error::input("the results hold no ratio with a value or a limit")
                    .remedy("ask for ratios in the plan, [measure] ratios = [\"CO2/H2O\"]"),
            );
        }
        Ok(out)
    }

    fn number(&self, value: f64) -> Result<Subject> {
        let (Some(of), Some(to)) = (&self.of, &self.to) else {
            return Err(
                Error::plan(format!("the number {value} needs --of and --to"))
                    .remedy("for example --of CO2 --to H2O"),
            );
        };
        let positive = |name: &str, v: f64| {
            if v > 0.0 && v.is_finite() {
                Ok(v)
            } else {
                Err(Error::plan(format!("{name} {v} is not a positive number")))
            }
        };
        positive("the ratio", value)?;
        let (low, high) = match (self.sigma, self.low.zip(self.high)) {
            (Some(s), _) => {
                positive("--sigma", s)?;
                (value - s, value + s)
            }
            (None, Some(pair)) => pair,
            (None, None) => (value, value),
        };
        if !(low <= value && value <= high && high.is_finite()) {
            return Err(Error::plan(format!(
                "the interval {low} to {high} does not hold the ratio {value}"
            ))
            .remedy("--low is at most the ratio, --high at least"));
        }
        if let Some(r) = self.distance {
            positive("--distance", r)?;
        }
        Ok(Subject {
            label: self.label.clone(),
            date: String::new(),
            of: Species::new(of),
            to: Species::new(to),
            basis: if self.basis == "column" {
                Basis::Column
            } else {
                Basis::Production
            },
            r_h_au: self.distance,
            value: match self.limit.as_deref() {
                Some("upper") => SubjectValue::Upper(value),
                Some(_) => SubjectValue::Lower(value),
                None => SubjectValue::Measured {
                    median: value,
                    low,
                    high,
                },
            },
        })
    }
}

fn known_class(option: &str, class: &str) -> Result<()> {
    let words: Vec<&str> = DynamicalClass::words().collect();
    if words.contains(&class) {
        return Ok(());
    }
    let mut remedy = format!("classes: {}", words.join(", "));
    if let Some(near) = did_you_mean(class, words.iter().copied()) {
        remedy = format!("did you mean {near}? {remedy}");
    }
    Err(Error::plan(format!("{option} {class:?} is not known")).remedy(remedy))
}

/// `0.8..2.5`; either end can be left out.
fn range(text: &str) -> Result<(f64, f64)> {
    let fail = || {
        Error::plan(format!("--rh {text:?} is not a range of distances"))
            .remedy("write two distances in au, for example 0.8..2.5, ..2.5 or 2.5..")
    };
    let (low, high) = text.split_once("..").ok_or_else(fail)?;
    let end = |s: &str, open: f64| match s.trim() {
        "" => Ok(open),
        s => s.parse::<f64>().map_err(|_| fail()),
    };
    let (low, high) = (end(low, 0.0)?, end(high, f64::INFINITY)?);
    if low >= 0.0 && low < high {
        Ok((low, high))
    } else {
        Err(fail())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges() {
        assert_eq!(range("0.8..2.5").expect("a range"), (0.8, 2.5));
        assert_eq!(range("..2").expect("a range"), (0.0, 2.0));
        assert_eq!(range("2..").expect("a range").1, f64::INFINITY);
        for bad in ["2", "3..2", "a..b", "-1..2", "NaN..2"] {
            assert!(range(bad).is_err(), "{bad}");
        }
    }
}
