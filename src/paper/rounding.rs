//! Values and errors rounded for print.
//!
//! The rule of the Particle Data Group (Review of Particle Physics, introduction; wording from memory,
//! outcome checked against an independent library in `tests/external/rounding`): when
//! the three leading digits of the error lie between 100 and 354, two digits are kept; between 355 and
//! 949, one; from 950 on the error is rounded up to 1000 and two digits are kept. The value is rounded
//! to the last digit of its error. Of two unequal errors the smaller decides, so that neither loses
//! digits (a choice made here).

use crate::ratio::Interval;

/// Values with an exponent outside this range are written with a power of ten.
const PLAIN_EXPONENTS: std::ops::RangeInclusive<i32> = -3..=4;
/// Digits of a number without an error.
const BARE_DIGITS: i32 = 3;

/// A value with its errors, rounded; all three multiply 10^`exponent`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Rounded {
    /// The value.
    pub value: String,
    /// Downward and upward error; equal for a symmetric one, `None` for a bare number.
    pub errors: Option<(String, String)>,
    /// Power of ten.
    pub exponent: i32,
}

/// Decimals to keep for an error; negative to round before the point.
pub(super) fn decimals(sigma: f64) -> i32 {
    let exponent = exponent_of(sigma);
    let leading = sigma / 10f64.powi(exponent) * 100.0;
    // Exactly 354 must not slip over the edge by a rounding error of the division.
    if leading < 354.5 - 1e-9 {
        1 - exponent
    } else {
        -exponent
    }
}

fn exponent_of(v: f64) -> i32 {
    let e = v.abs().log10().floor() as i32;
    // log10 can be off by one at powers of ten.
    let mantissa = v.abs() / 10f64.powi(e);
    e + i32::from(mantissa >= 10.0) - i32::from(mantissa < 1.0)
}

/// Fixed notation with this many decimals; negative ones give zeros before the point.
pub(super) fn fixed(v: f64, decimals: i32) -> String {
    if decimals >= 0 {
        let text = format!("{v:.*}", decimals as usize);
        let zero = text.chars().all(|c| matches!(c, '-' | '0' | '.'));
        return if zero {
            text.trim_start_matches('-').to_owned()
        } else {
            text
        };
    }
    let step = 10f64.powi(-decimals);
    format!("{:.0}", (v / step).round() * step)
}

/// A value with its downward and upward error.
pub(super) fn rounded(value: f64, minus: f64, plus: f64) -> Rounded {
    let usable = |s: f64| s.is_finite() && s > 0.0;
    if !value.is_finite() || !usable(minus) || !usable(plus) {
        return bare(value);
    }
    let decimals = decimals(minus.min(plus));
    // The larger of value and error sets the power of ten, so that neither needs leading digits.
    let size = value.abs().max(minus.max(plus));
    let mut exponent = exponent_of(size);
    if PLAIN_EXPONENTS.contains(&exponent) && decimals >= 0 {
        exponent = 0;
    }
    let keep = (decimals + exponent).max(0);
    let scaled = |v: f64| fixed(v / 10f64.powi(exponent), keep);
    Rounded {
        value: scaled(value),
        errors: Some((scaled(minus), scaled(plus))),
        exponent,
    }
}

/// A number without error to three digits.
pub(super) fn bare(value: f64) -> Rounded {
    if !value.is_finite() || value == 0.0 {
        let value = if value == 0.0 { "0" } else { "–" };
        return Rounded {
            value: value.to_owned(),
            errors: None,
            exponent: 0,
        };
    }
    let exponent = exponent_of(value);
    let plain = PLAIN_EXPONENTS.contains(&exponent);
    let (shown, power) = if plain {
        (BARE_DIGITS - 1 - exponent, 0)
    } else {
        (BARE_DIGITS - 1, exponent)
    };
    Rounded {
        value: fixed(value / 10f64.powi(power), shown),
        errors: None,
        exponent: power,
    }
}

/// A number with a fixed count of decimals.
pub(super) fn plain_number(value: f64, decimals: i32) -> Rounded {
    Rounded {
        value: fixed(value, decimals),
        errors: None,
        exponent: 0,
    }
}

/// Decimals that the narrower side of an interval deserves.
pub(super) fn decimals_of_interval(i: &Interval) -> i32 {
    let error = (i.high68 - i.median).min(i.median - i.low68);
    if error.is_finite() && error > 0.0 {
        decimals(error).clamp(0, 12)
    } else {
        BARE_DIGITS
    }
}

/// Median with the interval in parentheses: `0.158 (0.126–0.196)`.
pub(super) fn interval_text(i: &Interval) -> String {
    let decimals = decimals_of_interval(i);
    let text = |v: f64| fixed(v, decimals);
    format!("{} ({}–{})", text(i.median), text(i.low68), text(i.high68))
}

/// The number in running text: `3.42 × 10²⁷`.
pub(super) fn number(value: f64) -> String {
    let r = bare(value);
    with_power(&r.value.replace('-', "−"), r.exponent)
}

/// Adds ` × 10ⁿ` where the exponent is not zero.
pub(super) fn with_power(mantissa: &str, exponent: i32) -> String {
    if exponent == 0 {
        mantissa.to_owned()
    } else {
        format!("{mantissa} × 10{}", superscript(exponent))
    }
}

/// An integer in raised digits.
pub(super) fn superscript(n: i32) -> String {
    n.to_string()
        .chars()
        .map(|c| match c {
            '-' => '⁻',
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            digit => {
                let d = digit.to_digit(10).expect("invariant: a decimal digit");
                char::from_u32(0x2070 + d).expect("invariant: a superscript digit")
            }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// One row per case: value, error, and both as an independent library prints them.
    const EXTERNAL: &str = include_str!("../../tests/external/rounding/pdg_uncertainties.csv");

    #[test]
    fn the_rule_agrees_with_an_independent_library() {
        let mut seen = 0;
        for line in EXTERNAL.lines().filter(|l| !l.starts_with('#')).skip(1) {
            let cells: Vec<&str> = line.split(',').collect();
            let (value, sigma): (f64, f64) = (
                cells[0].parse().expect("a value"),
                cells[1].parse().expect("an error"),
            );
            let d = decimals(sigma);
            // A value that rounds to zero has no sign here.
            let zero = cells[2].chars().all(|c| "-0.".contains(c));
            let expected = if zero {
                cells[2].trim_start_matches('-')
            } else {
                cells[2]
            };
            assert_eq!(fixed(value, d), expected, "{line}");
            assert_eq!(fixed(sigma, d), cells[3], "{line}");
            seen += 1;
        }
        assert!(seen > 100, "{seen}");
    }

    #[test]
    fn powers_of_ten_and_unequal_errors() {
        let r = rounded(3.424e27, 4.586e26, 4.586e26);
        assert_eq!((r.value.as_str(), r.exponent), ("3.4", 27));
        assert_eq!(r.errors, Some(("0.5".to_owned(), "0.5".to_owned())));
        let r = rounded(0.1575, 0.0315, 0.0386);
        assert_eq!(r.value, "0.158");
        assert_eq!(r.errors, Some(("0.032".to_owned(), "0.039".to_owned())));
        assert_eq!(rounded(1.0, f64::NAN, 0.1).errors, None);
        assert_eq!(number(1.2345e-17), "1.23 × 10⁻¹⁷");
        assert_eq!(number(26735.0), "26700");
        assert_eq!(fixed(-0.001, 1), "0.0");
        assert_eq!(bare(f64::NAN).value, "–");
    }
}
