//! The checked spectrum, and the columns of numbers it is made from.

use crate::ground::{Error, Result};

/// A one-dimensional spectrum, checked on construction: strictly increasing positive vacuum
/// wavelengths, finite fluxes and positive finite errors at every good sample.
#[derive(Clone, Debug)]
pub struct Spectrum {
    label: String,
    wavelength_aa: Vec<f64>,
    flux_erg_s_cm2_aa: Vec<f64>,
    sigma_erg_s_cm2_aa: Option<Vec<f64>>,
    good: Vec<bool>,
    per_arcsec2: bool,
}

/// One sample as a reader found it; `line` is where, for messages (line or row, one-based).
#[derive(Clone, Copy, Debug)]
pub struct Sample {
    /// Vacuum wavelength, Å.
    pub wavelength_aa: f64,
    /// Flux density, erg s⁻¹ cm⁻² Å⁻¹ (per arcsec² for surface brightness); may be NaN.
    pub flux_erg_s_cm2_aa: f64,
    /// Its standard deviation, same unit; `None` when the file has none; NaN marks a bad sample.
    pub sigma_erg_s_cm2_aa: Option<f64>,
    /// True when a mask or quality column marks the sample as bad.
    pub flagged: bool,
    /// One-based line or row in the file.
    pub line: usize,
}

/// Where each sample stood in its file, stored as runs of consecutive lines so that a long file
/// costs nothing extra.
#[derive(Clone, Debug, Default)]
pub struct LineNumbers {
    /// (index of the first sample of the run, its one-based line).
    runs: Vec<(usize, usize)>,
    len: usize,
}

impl LineNumbers {
    /// Adds the line of the next sample.
    pub fn push(&mut self, line: usize) {
        let continues = self
            .runs
            .last()
            .is_some_and(|(index, first)| first + (self.len - index) == line);
        if !continues {
            self.runs.push((self.len, line));
        }
        self.len += 1;
    }

    /// The one-based line of a sample, or `None` when nothing was recorded for it.
    pub fn get(&self, index: usize) -> Option<usize> {
        if index >= self.len {
            return None;
        }
        let run = self.runs.partition_point(|(start, _)| *start <= index);
        let (start, first) = self.runs.get(run.checked_sub(1)?)?;
        Some(first + (index - start))
    }
}

/// The samples of a spectrum as columns of equal length, in file order.
#[derive(Clone, Debug, Default)]
pub struct Columns {
    /// Vacuum wavelengths, Å.
    pub wavelength_aa: Vec<f64>,
    /// Flux densities, erg s⁻¹ cm⁻² Å⁻¹ (per arcsec² for surface brightness); NaN marks a bad sample.
    pub flux_erg_s_cm2_aa: Vec<f64>,
    /// Standard deviations, same unit, when the file has them; NaN marks a bad sample.
    pub sigma_erg_s_cm2_aa: Option<Vec<f64>>,
    /// True where a mask or quality column marks the sample as bad; empty when there is none.
    pub flagged: Vec<bool>,
    /// Line or row of each sample, for messages.
    pub lines: LineNumbers,
}

impl Spectrum {
    /// Checks the samples and builds the spectrum; see [`Spectrum::from_columns`], which needs less
    /// memory.
    ///
    /// # Errors
    /// Names the first offending line and value.
    pub fn new(label: &str, samples: Vec<Sample>, per_arcsec2: bool) -> Result<Self> {
        let has_sigma = samples.iter().any(|s| s.sigma_erg_s_cm2_aa.is_some());
        let mut lines = LineNumbers::default();
        samples.iter().for_each(|s| lines.push(s.line));
        let columns = Columns {
            wavelength_aa: samples.iter().map(|s| s.wavelength_aa).collect(),
            flux_erg_s_cm2_aa: samples.iter().map(|s| s.flux_erg_s_cm2_aa).collect(),
            sigma_erg_s_cm2_aa: has_sigma.then(|| {
                let sigma = |s: &Sample| s.sigma_erg_s_cm2_aa.unwrap_or(f64::NAN);
                samples.iter().map(sigma).collect()
            }),
            flagged: samples.iter().map(|s| s.flagged).collect(),
            lines,
        };
        Self::from_columns(label, columns, per_arcsec2)
    }

    /// Checks the columns and builds the spectrum. Descending axes are reversed; anything else out
    /// of order, doubled, not positive, or an error that is zero or negative at a sample that would
    /// be used is refused with its line. A sample whose flux or error is not finite is kept and
    /// marked bad; at such a sample, and at a flagged one, the error may be anything.
    ///
    /// # Errors
    /// Names the first offending line and value.
    pub fn from_columns(label: &str, mut columns: Columns, per_arcsec2: bool) -> Result<Self> {
        let n = columns.wavelength_aa.len();
        if n == 0 {
            return Err(Error::input("no samples found")
                .remedy("check the column names or numbers and the comment sign"));
        }
        columns.check_lengths()?;
        let reversed = columns.wavelength_aa[0] > columns.wavelength_aa[n - 1];
        if reversed {
            columns.reverse();
        }
        let lines = std::mem::take(&mut columns.lines);
        let line_of = |i: usize| lines.get(if reversed { n - 1 - i } else { i });
        check_axis(&columns.wavelength_aa, line_of)?;
        let good = columns.good(line_of)?;
        if !good.iter().any(|g| *g) {
            return Err(Error::input(format!(
                "none of the {n} samples is usable: every flux is not a number or flagged"
            ))
            .remedy("check the flux column and the mask column"));
        }
        Ok(Self {
            label: label.to_owned(),
            wavelength_aa: columns.wavelength_aa,
            flux_erg_s_cm2_aa: columns.flux_erg_s_cm2_aa,
            sigma_erg_s_cm2_aa: columns.sigma_erg_s_cm2_aa,
            good,
            per_arcsec2,
        })
    }

    /// Divides sample by sample; those below `floor` are flagged. Returns how many were.
    pub(super) fn divide_samples(&mut self, through: &[f64], floor: f64) -> usize {
        let mut below = 0;
        for (i, t) in through.iter().enumerate() {
            if *t < floor {
                below += usize::from(self.good[i]);
                self.good[i] = false;
                continue;
            }
            self.flux_erg_s_cm2_aa[i] /= t;
            if let Some(sigma) = &mut self.sigma_erg_s_cm2_aa {
                sigma[i] /= t;
            }
        }
        below
    }

    /// Name for messages, usually the file name.
    pub fn label(&self) -> &str {
        &self.label
    }

    /// Number of samples, good or not.
    pub fn len(&self) -> usize {
        self.wavelength_aa.len()
    }

    /// Always false: construction refuses empty spectra.
    pub fn is_empty(&self) -> bool {
        self.wavelength_aa.is_empty()
    }

    /// Vacuum wavelengths, Å, strictly increasing.
    pub fn wavelength_aa(&self) -> &[f64] {
        &self.wavelength_aa
    }

    /// Flux densities, erg s⁻¹ cm⁻² Å⁻¹, per arcsec² if [`Spectrum::per_arcsec2`].
    pub fn flux_erg_s_cm2_aa(&self) -> &[f64] {
        &self.flux_erg_s_cm2_aa
    }

    /// Standard deviations in the flux unit, if the file had them.
    pub fn sigma_erg_s_cm2_aa(&self) -> Option<&[f64]> {
        self.sigma_erg_s_cm2_aa.as_deref()
    }

    /// Which samples may be used.
    pub fn good(&self) -> &[bool] {
        &self.good
    }

    /// True for a surface brightness.
    pub fn per_arcsec2(&self) -> bool {
        self.per_arcsec2
    }

    /// Counts of samples left out: (not a number, flagged but a number).
    pub fn left_out(&self) -> (usize, usize) {
        let nan = self
            .flux_erg_s_cm2_aa
            .iter()
            .enumerate()
            .filter(|(i, f)| {
                !f.is_finite()
                    || self
                        .sigma_erg_s_cm2_aa
                        .as_ref()
                        .is_some_and(|s| !s[*i].is_finite())
            })
            .count();
        let bad = self.good.iter().filter(|g| !**g).count();
        (nan, bad - nan)
    }
}

impl Columns {
    fn check_lengths(&self) -> Result<()> {
        let n = self.wavelength_aa.len();
        let others = [
            ("flux", self.flux_erg_s_cm2_aa.len()),
            (
                "error",
                self.sigma_erg_s_cm2_aa.as_ref().map_or(n, Vec::len),
            ),
            (
                "mask",
                if self.flagged.is_empty() {
                    n
                } else {
                    self.flagged.len()
                },
            ),
        ];
        for (what, len) in others {
            if len != n {
                return Err(
                    Error::input(format!("{n} wavelengths but {len} {what} values"))
                        .remedy("give columns of equal length"),
                );
            }
        }
        Ok(())
    }

    fn reverse(&mut self) {
        self.wavelength_aa.reverse();
        self.flux_erg_s_cm2_aa.reverse();
        if let Some(sigma) = &mut self.sigma_erg_s_cm2_aa {
            sigma.reverse();
        }
        self.flagged.reverse();
    }

    /// Which samples may be used; refuses an error that is not positive at one that would be.
    fn good(&self, line_of: impl Fn(usize) -> Option<usize>) -> Result<Vec<bool>> {
        let mut good = Vec::with_capacity(self.wavelength_aa.len());
        for (i, flux) in self.flux_erg_s_cm2_aa.iter().enumerate() {
            let flagged = self.flagged.get(i).copied().unwrap_or(false);
            let sigma = self.sigma_erg_s_cm2_aa.as_ref().map(|s| s[i]);
            let numbers = flux.is_finite() && sigma.is_none_or(f64::is_finite);
            let used = numbers && !flagged;
            if used && sigma.is_some_and(|s| s <= 0.0) {
                let error = Error::input(format!(
                    "the error {:e} of a used sample is not positive",
                    sigma.unwrap_or(0.0)
                ))
                .remedy("give a positive error, or mark the sample in a mask column");
                return Err(placed(error, line_of(i)));
            }
            good.push(used);
        }
        Ok(good)
    }
}

fn placed(error: Error, line: Option<usize>) -> Error {
    match line {
        Some(line) => error.at_line(line),
        None => error,
    }
}

fn check_axis(wavelength_aa: &[f64], line_of: impl Fn(usize) -> Option<usize>) -> Result<()> {
    for (i, w) in wavelength_aa.iter().enumerate() {
        if !(w.is_finite() && *w > 0.0) {
            let error = Error::input(format!("wavelength {w} Å is not a positive number"))
                .remedy("remove the sample or correct the wavelength column and its unit");
            return Err(placed(error, line_of(i)));
        }
    }
    for (i, pair) in wavelength_aa.windows(2).enumerate() {
        let (a, b) = (pair[0], pair[1]);
        let line = line_of(i).max(line_of(i + 1));
        if a == b {
            let error = Error::input(format!("wavelength {b} Å appears twice"))
                .remedy("remove the doubled sample, or give each echelle order as its own file");
            return Err(placed(error, line));
        }
        if a > b {
            let error = Error::input(format!("wavelengths are not in order: {a} Å next to {b} Å"))
                .remedy("sort the file by wavelength");
            return Err(placed(error, line));
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sample(wavelength_aa: f64, flux: f64, sigma: f64, flagged: bool, line: usize) -> Sample {
        Sample {
            wavelength_aa,
            flux_erg_s_cm2_aa: flux,
            sigma_erg_s_cm2_aa: Some(sigma),
            flagged,
            line,
        }
    }

    #[test]
    fn line_numbers_in_runs() {
        let mut lines = LineNumbers::default();
        let given = [3, 4, 5, 9, 10, 2];
        given.iter().for_each(|l| lines.push(*l));
        assert_eq!(lines.runs.len(), 3);
        let back: Vec<_> = (0..7).map(|i| lines.get(i)).collect();
        assert_eq!(back[..6], given.map(Some));
        assert_eq!(back[6], None);
    }

    #[test]
    fn zero_error_refused_only_where_used() {
        let ok = vec![
            sample(1.0, 1.0, 0.0, true, 1),
            sample(2.0, f64::NAN, -1.0, false, 2),
            sample(3.0, 1.0, 1.0, false, 3),
        ];
        let s = Spectrum::new("x", ok.clone(), false).unwrap();
        assert_eq!(s.good(), [false, false, true]);
        let mut bad = ok;
        bad[2].sigma_erg_s_cm2_aa = Some(0.0);
        let e = Spectrum::new("x", bad, false).unwrap_err();
        assert_eq!(e.line(), Some(3));
    }

    #[test]
    fn reversed_axis_keeps_its_lines() {
        let down = vec![
            sample(3.0, 1.0, 1.0, false, 11),
            sample(2.0, 2.0, -1.0, false, 12),
            sample(1.0, 3.0, 1.0, false, 13),
        ];
        let e = Spectrum::new("x", down, false).unwrap_err();
        assert_eq!(e.line(), Some(12));
    }

    #[test]
    fn axis_refusals_name_the_line() {
        for (axis, line, word) in [
            ([1.0, 3.0, 2.0, 4.0], 3, "order"),
            ([1.0, 2.0, 2.0, 4.0], 3, "twice"),
            ([1.0, 2.0, f64::NAN, 4.0], 3, "positive"),
            ([0.0, 2.0, 3.0, 4.0], 1, "positive"),
        ] {
            let samples = (0..4)
                .map(|i| sample(axis[i], 1.0, 1.0, false, i + 1))
                .collect();
            let e = Spectrum::new("x", samples, false).unwrap_err();
            assert_eq!(e.line(), Some(line), "{axis:?}");
            assert!(e.message().contains(word), "{e}");
        }
    }
}
