//! Dates and time scales.
//!
//! UTC → TAI → TT → TDB by the published algorithms of the IAU's Standards of Fundamental Astronomy
//! as carried by `sofars`; TDB − TT by the series of Fairhead & Bretagnon 1990, A&A 229, 240, at
//! the geocentre.

use crate::ground::{Error, Result};
use sofars::{cal, ts};

/// First and last calendar year that is read.
const YEARS: std::ops::RangeInclusive<i32> = 1600..=2400;
/// First and last Julian date that is read: 1600-01-01 and 2401-01-01.
const JULIAN_DATES: std::ops::RangeInclusive<f64> = 2_305_447.5..=2_598_007.5;
/// 1960-01-01, when UTC begins.
const UTC_BEGINS_JD: f64 = 2_436_934.5;
const SECONDS_PER_DAY: f64 = 86_400.0;

/// A time scale.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Scale {
    /// Coordinated universal time, which clocks and headers show.
    Utc,
    /// International atomic time.
    Tai,
    /// Terrestrial time, in which times of perihelion are often published.
    Tt,
    /// Barycentric dynamical time, in which orbits are computed.
    Tdb,
}

/// A moment, kept as Julian dates of two parts in TT and TDB.
///
/// Leap seconds are known up to the last one announced (TAI − UTC = 37 s since 2017); later dates
/// assume no further one, so that a future UTC date may be off by a second or so.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Instant {
    tt: (f64, f64),
    tdb: (f64, f64),
}

impl Instant {
    /// Reads a date.
    ///
    /// Forms: `2031-03-14`, `2031-03-14.52`, `2031-03-14T05:12:30.5` (also with a blank for the T and
    /// without seconds), `JD 2462940.5`, `MJD 62940.0`, or a plain Julian date. A scale may follow
    /// (`UTC`, `TAI`, `TT`, `TDB`, or `Z`), otherwise `default` holds. Julian dates in UTC on the day
    /// of a leap second count that day as 86 401 s, as in SOFA.
    ///
    /// # Errors
    /// Text of another form, days or times that do not exist, years outside 1600–2400, and UTC
    /// before 1960 are refused.
    pub fn parse(text: &str, default: Scale) -> Result<Self> {
        let (body, scale) = split_scale(text.trim(), default);
        let upper = body.to_ascii_uppercase();
        let two_part = if let Some(number) = upper.strip_prefix("MJD") {
            julian(number.trim(), text).map(|(day, part)| (day + 2_400_000.5, part))
        } else if let Some(number) = upper.strip_prefix("JD") {
            julian(number.trim(), text)
        } else if body.contains('-') || body.contains(':') {
            calendar(&upper, scale, text)
        } else {
            julian(&upper, text)
        }?;
        Self::from_jd(two_part.0, two_part.1, scale)
    }

    /// From a Julian date in two parts (their sum counts) in a scale.
    ///
    /// # Errors
    /// Dates outside 1600–2400, and UTC before 1960, are refused.
    pub fn from_jd(day: f64, part: f64, scale: Scale) -> Result<Self> {
        if !JULIAN_DATES.contains(&(day + part)) {
            return Err(Error::plan(format!(
                "Julian date {} is outside {} to {} (years 1600 to 2400)",
                day + part,
                JULIAN_DATES.start(),
                JULIAN_DATES.end()
            ))
            .remedy("a modified Julian date is written MJD 60000.5"));
        }
        if scale == Scale::Utc && day + part < UTC_BEGINS_JD {
            return Err(
                Error::plan(format!("JD {} is before 1960, when UTC begins", day + part))
                    .remedy("give the date in TT or TDB, for example 1950-03-02.31 TT"),
            );
        }
        let known = "invariant: the date was checked to lie in 1600 to 2400";
        let date = (day, part);
        let tt = match scale {
            Scale::Utc => {
                let tai = ts::utctai(date.0, date.1).expect(known);
                ts::taitt(tai.0, tai.1).expect(known)
            }
            Scale::Tai => ts::taitt(date.0, date.1).expect(known),
            Scale::Tt => date,
            Scale::Tdb => ts::tdbtt(date.0, date.1, tdb_minus_tt_s(date)).expect(known),
        };
        let tdb = match scale {
            Scale::Tdb => date,
            _ => ts::tttdb(tt.0, tt.1, tdb_minus_tt_s(tt)).expect(known),
        };
        Ok(Self { tt, tdb })
    }

    /// The moment `seconds` later, for example half an exposure.
    ///
    /// # Errors
    /// As [`Instant::from_jd`].
    pub fn later_s(&self, seconds: f64) -> Result<Self> {
        Self::from_jd(self.tt.0, self.tt.1 + seconds / SECONDS_PER_DAY, Scale::Tt)
    }

    /// The middle of an exposure that began at this moment.
    ///
    /// # Errors
    /// An exposure that is negative or longer than 30 days.
    pub fn mid_exposure(&self, exposure_s: f64) -> Result<Self> {
        if !(0.0..=30.0 * SECONDS_PER_DAY).contains(&exposure_s) {
            return Err(Error::plan(format!(
                "exposure_s = {exposure_s} is outside 0 to {} s",
                30.0 * SECONDS_PER_DAY
            )));
        }
        self.later_s(0.5 * exposure_s)
    }

    /// Julian date in a scale, good to about 40 µs. UTC before 1960 is given as TAI.
    pub fn jd(&self, scale: Scale) -> f64 {
        let (day, part) = self.two_part(scale);
        day + part
    }

    /// Julian date in a scale, in two parts that keep nanoseconds.
    pub fn two_part(&self, scale: Scale) -> (f64, f64) {
        let known = "invariant: the date was checked to lie in 1600 to 2400";
        let tai = || ts::tttai(self.tt.0, self.tt.1).expect(known);
        match scale {
            Scale::Utc => {
                let tai = tai();
                ts::taiutc(tai.0, tai.1).unwrap_or(tai)
            }
            Scale::Tai => tai(),
            Scale::Tt => self.tt,
            Scale::Tdb => self.tdb,
        }
    }

    /// The date in UTC as `2031-04-17T05:12:30.123`, rounded to milliseconds.
    pub fn utc_text(&self) -> String {
        let (day, part) = self.two_part(Scale::Utc);
        match ts::d2dtf("UTC", 3, day, part) {
            Ok((year, month, day, [h, m, s, ms])) => {
                format!("{year:04}-{month:02}-{day:02}T{h:02}:{m:02}:{s:02}.{ms:03}")
            }
            Err(_) => format!("JD {:.6}", day + part),
        }
    }

    /// TDB days since a Julian date in two parts.
    pub fn days_since_tdb(&self, day: f64, part: f64) -> f64 {
        (self.tdb.0 - day) + (self.tdb.1 - part)
    }
}

/// TDB − TT at the geocentre, s.
fn tdb_minus_tt_s(date: (f64, f64)) -> f64 {
    ts::dtdb(date.0, date.1, 0.0, 0.0, 0.0, 0.0)
}

fn split_scale(text: &str, default: Scale) -> (&str, Scale) {
    for (suffix, scale) in [
        ("UTC", Scale::Utc),
        ("UT", Scale::Utc),
        ("Z", Scale::Utc),
        ("TAI", Scale::Tai),
        ("TT", Scale::Tt),
        ("TDB", Scale::Tdb),
    ] {
        let cut = text.len().saturating_sub(suffix.len());
        if text.is_char_boundary(cut) && text[cut..].eq_ignore_ascii_case(suffix) {
            return (text[..cut].trim_end(), scale);
        }
    }
    (text, default)
}

fn malformed(text: &str) -> Error {
    Error::plan(format!("{text:?} is not a date")).remedy(
        "write 2031-03-14, 2031-03-14.52, 2031-03-14T05:12:30, JD 2462940.5 or MJD 62940.0; TT or TDB may follow",
    )
}

/// Digits with at most one point; the whole and the fraction apart, to keep every digit.
fn decimal(number: &str, text: &str) -> Result<(f64, f64)> {
    let (whole, fraction) = number.split_once('.').unwrap_or((number, ""));
    let digits = |s: &str| s.bytes().all(|b| b.is_ascii_digit());
    if whole.is_empty() || !digits(whole) || !digits(fraction) {
        return Err(malformed(text));
    }
    let bad = |_| malformed(text);
    Ok((
        whole.parse().map_err(bad)?,
        format!("0.{fraction}0").parse().map_err(bad)?,
    ))
}

fn julian(number: &str, text: &str) -> Result<(f64, f64)> {
    decimal(number, text)
}

fn calendar(body: &str, scale: Scale, text: &str) -> Result<(f64, f64)> {
    let (date, clock) = match body.split_once(['T', ' ']) {
        Some((date, clock)) => (date, Some(clock.trim())),
        None => (body, None),
    };
    let fields: Vec<&str> = date.split('-').collect();
    let &[year, month, day] = fields.as_slice() else {
        return Err(malformed(text));
    };
    let (year, month) = (whole(year, text)?, whole(month, text)?);
    let (day, fraction) = decimal(day, text)?;
    if !YEARS.contains(&year) {
        return Err(Error::plan(format!(
            "year {year} in {text:?} is outside {} to {}",
            YEARS.start(),
            YEARS.end()
        )));
    }
    // Above 99 no such day exists, and the cast stays exact.
    let day = day.min(99.0) as i32;
    let (zero, midnight) = cal::cal2jd(year, month, day)
        .map_err(|_| Error::plan(format!("{text:?}: there is no such day in the calendar")))?;
    match clock {
        None => Ok((zero + midnight, fraction)),
        Some(_) if fraction != 0.0 => Err(malformed(text)),
        Some(clock) => time_of_day((year, month, day), clock, scale, text),
    }
}

fn whole(field: &str, text: &str) -> Result<i32> {
    if field.is_empty() || !field.bytes().all(|b| b.is_ascii_digit()) {
        return Err(malformed(text));
    }
    field.parse().map_err(|_| malformed(text))
}

fn time_of_day(date: (i32, i32, i32), clock: &str, scale: Scale, text: &str) -> Result<(f64, f64)> {
    let fields: Vec<&str> = clock.split(':').collect();
    let (hour, minute, second) = match fields.as_slice() {
        [h, m] => (whole(h, text)?, whole(m, text)?, 0.0),
        [h, m, s] => {
            let (s, part) = decimal(s, text)?;
            (whole(h, text)?, whole(m, text)?, s + part)
        }
        _ => return Err(malformed(text)),
    };
    let none = || {
        Error::plan(format!("{text:?}: there is no such time of day"))
            .remedy("hours 0-23, minutes 0-59, seconds below 60 (a leap second only at 23:59:60 UTC of its day)")
    };
    let name = if scale == Scale::Utc { "UTC" } else { "" };
    let (day, part) =
        ts::dtf2d(name, date.0, date.1, date.2, hour, minute, second).map_err(|_| none())?;
    // A second of 60 or more is let through by the library; only a leap second stays below one day.
    if part >= 1.0 || (second >= 60.0 && (hour, minute) != (23, 59)) {
        return Err(none());
    }
    Ok((day, part))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn jd(text: &str) -> f64 {
        Instant::parse(text, Scale::Tdb).unwrap().jd(Scale::Tdb)
    }

    #[test]
    fn the_same_moment_in_every_form() {
        for text in [
            "2000-01-01T12:00:00",
            "2000-01-01 12:00",
            "2000-1-1.5",
            "JD 2451545.0",
            "jd2451545",
            "2451545.0",
            "MJD 51544.5",
            "2000-01-01.5 TDB",
        ] {
            assert_eq!(jd(text), 2_451_545.0, "{text}");
        }
    }

    #[test]
    fn refuses_what_is_not_a_date() {
        for text in [
            "",
            "tomorrow",
            "2031-02-29",
            "2031-13-01",
            "2031-03-14T24:00",
            "2031-03-14T05:60",
            "2031-03-14T05:12:60",
            "2031-03-14T23:59:60",
            "2031-03-14.5T05:00",
            "2031-03",
            "-2031-03-14",
            "2031-03-1e5",
            "1599-12-31",
            "2401-06-01",
            "JD 60000.5",
            "JD",
            "NaN",
            "é",
            "1950-01-01 UTC",
            "99999999999999-01-01",
        ] {
            let error = Instant::parse(text, Scale::Tdb).unwrap_err();
            assert_eq!(error.exit_code(), 2, "{text}");
        }
        assert!(
            Instant::parse("1599-12-31", Scale::Tdb)
                .unwrap_err()
                .message()
                .contains("1600")
        );
    }

    #[test]
    fn later_counts_seconds_across_a_leap_second() {
        let start = Instant::parse("2016-12-31T23:59:00", Scale::Utc).unwrap();
        let after = Instant::parse("2017-01-01T00:00:00", Scale::Utc).unwrap();
        let stepped = start.later_s(61.0).unwrap();
        assert!((stepped.jd(Scale::Tt) - after.jd(Scale::Tt)).abs() < 1e-9);
        assert!(start.later_s(f64::NAN).is_err());
        assert_eq!(start.mid_exposure(122.0).unwrap(), stepped);
        assert!(start.mid_exposure(-1.0).is_err());
    }
}
