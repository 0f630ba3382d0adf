//! Distances and rates read from a table of dates, interpolated to the middle of an exposure.

use super::Geometry;
use super::orbit::{Instant, Scale};
use crate::ground::constants::AU_KM;
use crate::ground::{Error, Result, did_you_mean};
use std::path::Path;

const SECONDS_PER_DAY: f64 = 86_400.0;
const KM_S_PER_AU_D: f64 = AU_KM / SECONDS_PER_DAY;
/// Allowance for the Earth's rotation in rates of a site on the ground, and for conventions, km s⁻¹.
const RATE_SLACK_KM_S: f64 = 1.0;

/// A table of heliocentric and observer distances against time.
///
/// Between rows a distance with rates follows the cubic through both values and both rates (Hermite),
/// one without rates the cubic through the four nearest rows; rates are the derivative of that cubic.
/// Nothing is extrapolated.
#[derive(Clone, Debug, PartialEq)]
pub struct Ephemeris {
    first: Instant,
    days: Vec<f64>,
    heliocentric: Track,
    observer: Track,
}

/// One distance against time.
#[derive(Clone, Debug, PartialEq)]
struct Track {
    distance_au: Vec<f64>,
    rate_au_d: Option<Vec<f64>>,
    /// Half a unit of the last printed digit of the coarsest distance, au.
    rounding_au: f64,
}

/// Where the columns are.
struct Columns {
    time: usize,
    heliocentric_au: usize,
    heliocentric_km_s: Option<usize>,
    observer_au: usize,
    observer_km_s: Option<usize>,
}

impl Ephemeris {
    /// Reads comma-separated text with a header line.
    ///
    /// Columns, in any order: `time` (as [`Instant::parse`], UTC unless the cell says TT or TDB),
    /// `heliocentric_au`, `observer_au`, and where known `heliocentric_km_s` and `observer_km_s`
    /// (positive when receding). Other columns are left alone. Lines that begin with `#` are comments.
    /// `file` is named in errors only.
    ///
    /// # Errors
    /// A missing column, a cell that cannot be read, times that do not increase, too few rows (two, or
    /// four for a distance without rates), and rates that contradict the distances (wrong sign or
    /// unit) are refused with the line.
    pub fn from_csv(text: &str, file: &Path) -> Result<Self> {
        read(text).map_err(|e| e.in_file(file))
    }

    /// Interpolates to a moment.
    ///
    /// # Errors
    /// A moment outside the table, or a result [`Geometry`] refuses.
    pub fn at(&self, when: &Instant) -> Result<Geometry> {
        let (day, part) = self.first.two_part(Scale::Tdb);
        let days = when.days_since_tdb(day, part);
        let last = *self.days.last().expect("invariant: at least two rows");
        if !(0.0..=last).contains(&days) {
            let first_jd = self.first.jd(Scale::Utc);
            return Err(Error::input(format!(
                "JD {:.5} is outside the ephemeris, {first_jd:.5} to {:.5} (UTC)",
                when.jd(Scale::Utc),
                first_jd + last
            ))
            .remedy("extend the table to both sides of the exposure: it is never extrapolated"));
        }
        let (heliocentric_au, heliocentric_au_d) = self.heliocentric.at(&self.days, days);
        let (observer_au, observer_au_d) = self.observer.at(&self.days, days);
        Geometry::new(
            heliocentric_au,
            heliocentric_au_d * KM_S_PER_AU_D,
            observer_au,
            observer_au_d * KM_S_PER_AU_D,
        )
    }

    /// Number of rows.
    pub fn rows(&self) -> usize {
        self.days.len()
    }

    /// Whether the table gave rates: of the heliocentric distance, and of the observer's.
    pub fn has_rates(&self) -> (bool, bool) {
        (
            self.heliocentric.rate_au_d.is_some(),
            self.observer.rate_au_d.is_some(),
        )
    }
}

fn read(text: &str) -> Result<Ephemeris> {
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .trim(csv::Trim::All)
        .from_reader(text.trim_start_matches('\u{feff}').as_bytes());
    let header = reader.headers().map_err(|e| malformed(&e))?.clone();
    let columns = Columns::find(&header)?;
    let mut instants: Vec<Instant> = Vec::new();
    let mut lines = Vec::new();
    let mut heliocentric = Track::new(columns.heliocentric_km_s.is_some());
    let mut observer = Track::new(columns.observer_km_s.is_some());
    for record in reader.records() {
        let record = record.map_err(|e| malformed(&e))?;
        let line = record
            .position()
            .map_or(0, |p| usize::try_from(p.line()).unwrap_or(usize::MAX));
        let mut take = || -> Result<()> {
            let when = Instant::parse(&record[columns.time], Scale::Utc)
                .map_err(|e| Error::input(e.message()))?;
            if let Some(before) = instants.last()
                && !is_after(&when, before)
            {
                return Err(Error::input("the time is not later than in the row before")
                    .remedy("sort the table by time and remove repeated rows"));
            }
            instants.push(when);
            heliocentric.push(&record, columns.heliocentric_au, columns.heliocentric_km_s)?;
            observer.push(&record, columns.observer_au, columns.observer_km_s)
        };
        take().map_err(|e| e.at_line(line))?;
        lines.push(line);
    }
    let Some(&first) = instants.first() else {
        return Err(Error::input("the ephemeris has no rows"));
    };
    let (day, part) = first.two_part(Scale::Tdb);
    let days: Vec<f64> = instants
        .iter()
        .map(|when| when.days_since_tdb(day, part))
        .collect();
    heliocentric.check("heliocentric", &days, &lines)?;
    observer.check("observer", &days, &lines)?;
    Ok(Ephemeris {
        first,
        days,
        heliocentric,
        observer,
    })
}

fn is_after(when: &Instant, before: &Instant) -> bool {
    let (day, part) = before.two_part(Scale::Tdb);
    when.days_since_tdb(day, part) > 0.0
}

fn malformed(cause: &csv::Error) -> Error {
    let error = Error::input(format!("the table cannot be read: {cause}"));
    match cause.position() {
        Some(p) => error.at_line(usize::try_from(p.line()).unwrap_or(usize::MAX)),
        None => error,
    }
}

impl Columns {
    fn find(header: &csv::StringRecord) -> Result<Self> {
        let place = |name: &str| -> Result<Option<usize>> {
            let mut found = header.iter().enumerate().filter(|(_, cell)| *cell == name);
            let first = found.next().map(|(i, _)| i);
            if found.next().is_some() {
                return Err(Error::input(format!("column {name:?} occurs twice")));
            }
            Ok(first)
        };
        let needed = |name: &str| {
            place(name)?.ok_or_else(|| {
                let error = Error::input(format!("column {name:?} is missing"));
                match did_you_mean(name, header.iter()) {
                    Some(cell) => error.remedy(format!("is it the column {cell:?}? Rename it")),
                    None => error.remedy("the columns are time, heliocentric_au, observer_au and, where known, heliocentric_km_s and observer_km_s"),
                }
            })
        };
        Ok(Self {
            time: needed("time")?,
            heliocentric_au: needed("heliocentric_au")?,
            heliocentric_km_s: place("heliocentric_km_s")?,
            observer_au: needed("observer_au")?,
            observer_km_s: place("observer_km_s")?,
        })
    }
}

/// A number within limits.
fn cell(text: &str, low: f64, high: f64, what: &str) -> Result<f64> {
    let value: f64 = text
        .parse()
        .map_err(|_| Error::input(format!("{what} {text:?} is not a number")))?;
    if !(low..=high).contains(&value) {
        return Err(Error::input(format!(
            "{what} {value} is outside {low} to {high}"
        )));
    }
    Ok(value)
}

impl Track {
    fn new(with_rates: bool) -> Self {
        Self {
            distance_au: Vec::new(),
            rate_au_d: with_rates.then(Vec::new),
            rounding_au: 0.0,
        }
    }

    fn push(
        &mut self,
        record: &csv::StringRecord,
        distance: usize,
        rate: Option<usize>,
    ) -> Result<()> {
        let text = &record[distance];
        self.distance_au
            .push(cell(text, 0.0005, 1000.0, "distance (au)")?);
        let decimals = match text.split_once('.') {
            Some((_, fraction)) => fraction.bytes().take_while(u8::is_ascii_digit).count(),
            None => 0,
        };
        let unit = 0.1_f64.powi(i32::try_from(decimals).unwrap_or(i32::MAX));
        self.rounding_au = self.rounding_au.max(0.5 * unit);
        if let (Some(rates), Some(column)) = (&mut self.rate_au_d, rate) {
            let km_s = cell(&record[column], -700.0, 700.0, "rate (km/s)")?;
            rates.push(km_s / KM_S_PER_AU_D);
        }
        Ok(())
    }

    /// Enough rows, and rates that fit the distances: between two rows the mean rate must lie as near
    /// to the mean of the two given rates as the rates of the four nearest rows spread, with the
    /// rounding of the printed distances and 1 km/s allowed on top.
    fn check(&self, name: &str, days: &[f64], lines: &[usize]) -> Result<()> {
        let needed = if self.rate_au_d.is_some() { 2 } else { 4 };
        if days.len() < needed {
            return Err(Error::input(format!(
                "{} row(s) are too few to interpolate {name}_au: {needed} are needed",
                days.len()
            ))
            .remedy(format!("add rows, or the column {name}_km_s")));
        }
        let Some(rates) = &self.rate_au_d else {
            return Ok(());
        };
        for i in 0..days.len() - 1 {
            let step_d = days[i + 1] - days[i];
            let mean = (self.distance_au[i + 1] - self.distance_au[i]) / step_d;
            let near = &rates[i.saturating_sub(1)..(i + 3).min(rates.len())];
            let (low, high) = near
                .iter()
                .fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), r| {
                    (l.min(*r), h.max(*r))
                });
            let given = 0.5 * (rates[i] + rates[i + 1]);
            let allowed =
                RATE_SLACK_KM_S / KM_S_PER_AU_D + (high - low) + 2.0 * self.rounding_au / step_d;
            if (mean - given).abs() > allowed {
                return Err(Error::input(format!(
                    "{name}_au changes by {:.2} km/s from this row to the next, but {name}_km_s says {:.2} km/s",
                    mean * KM_S_PER_AU_D,
                    given * KM_S_PER_AU_D
                ))
                .at_line(lines[i])
                .remedy("rates are in km/s, positive when receding; check sign and unit"));
            }
        }
        Ok(())
    }

    /// Distance (au) and rate (au/d) at a time inside the table.
    fn at(&self, days: &[f64], t: f64) -> (f64, f64) {
        let right = days.partition_point(|d| *d < t).clamp(1, days.len() - 1);
        let left = right - 1;
        match &self.rate_au_d {
            Some(rates) => hermite(
                t - days[left],
                days[right] - days[left],
                (self.distance_au[left], rates[left]),
                (self.distance_au[right], rates[right]),
            ),
            None => {
                let start = left.saturating_sub(1).min(days.len() - 4);
                cubic(
                    &days[start..start + 4],
                    &self.distance_au[start..start + 4],
                    t,
                )
            }
        }
    }
}

/// The cubic through two values and two derivatives, and its derivative, at `t` past the first of two
/// points a `step` apart.
fn hermite(t: f64, step: f64, left: (f64, f64), right: (f64, f64)) -> (f64, f64) {
    let s = t / step;
    let slope = (right.0 - left.0) / step;
    // left + t·(rate + s·(a + s·b)), with a and b set by the right end.
    let b = left.1 + right.1 - 2.0 * slope;
    let a = slope - left.1 - b;
    (
        left.0 + t * (left.1 + s * (a + s * b)),
        left.1 + s * (2.0 * a + 3.0 * s * b),
    )
}

/// The cubic through four points, and its derivative, by divided differences.
fn cubic(x: &[f64], y: &[f64], t: f64) -> (f64, f64) {
    let mut d = [y[0], y[1], y[2], y[3]];
    for order in 1..4 {
        for i in (order..4).rev() {
            d[i] = (d[i] - d[i - 1]) / (x[i] - x[i - order]);
        }
    }
    let (mut value, mut slope) = (d[3], 0.0);
    for i in (0..3).rev() {
        slope = slope * (t - x[i]) + value;
        value = value * (t - x[i]) + d[i];
    }
    (value, slope)
}

#[cfg(test)]
mod tests;
