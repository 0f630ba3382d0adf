//! Measuring, shortening and breaking text; numbers as they are printed.

use std::collections::HashMap;
use std::sync::OnceLock;

/// Advance widths, see the head of the file for their source.
const ADVANCES: &str = include_str!("font/dejavu-sans-advances.csv");
/// Font units per em in [`ADVANCES`].
const UNITS_PER_EM: f64 = 2048.0;
/// Assumed advance of a character that the table lacks, in em.
const UNKNOWN_EM: f64 = 1.0;

fn advances() -> &'static HashMap<char, (f64, f64)> {
    static TABLE: OnceLock<HashMap<char, (f64, f64)>> = OnceLock::new();
    TABLE.get_or_init(|| ADVANCES.lines().skip(2).filter_map(advance).collect())
}

fn advance(line: &str) -> Option<(char, (f64, f64))> {
    let mut cells = line.split(',');
    let code = u32::from_str_radix(cells.next()?, 16).ok()?;
    let regular: f64 = cells.next()?.parse().ok()?;
    let bold: f64 = cells.next()?.parse().ok()?;
    let in_em = (regular / UNITS_PER_EM, bold / UNITS_PER_EM);
    Some((char::from_u32(code)?, in_em))
}

/// Width of a line of text in points, set in DejaVu Sans of `size_pt`. The fallback families are
/// narrower, so the estimate holds for them too.
pub(super) fn width_pt(text: &str, size_pt: f64, bold: bool) -> f64 {
    let table = advances();
    let em: f64 = text
        .chars()
        .map(|c| match table.get(&c) {
            Some(&(regular, heavy)) => {
                if bold {
                    heavy
                } else {
                    regular
                }
            }
            None => UNKNOWN_EM,
        })
        .sum();
    em * size_pt
}

/// Text that can stand in an SVG: line breaks and controls become blanks, runs of blanks are kept by
/// no-break spaces (a renderer would join them), outer blanks go.
pub(super) fn clean(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.trim().chars() {
        let c = if c.is_control() || c == '\u{FFFE}' || c == '\u{FFFF}' {
            ' '
        } else {
            c
        };
        let after_blank = out.ends_with(' ') || out.ends_with('\u{A0}');
        out.push(if c == ' ' && after_blank { '\u{A0}' } else { c });
    }
    out
}

/// The text, or as much of its beginning as fits into `room_pt` followed by an ellipsis.
pub(super) fn elide(text: &str, size_pt: f64, bold: bool, room_pt: f64) -> String {
    if width_pt(text, size_pt, bold) <= room_pt {
        return text.to_owned();
    }
    let mut kept: Vec<char> = text.chars().collect();
    while kept.pop().is_some() {
        let short: String = kept.iter().collect();
        let short = format!("{}…", short.trim_end());
        if width_pt(&short, size_pt, bold) <= room_pt {
            return short;
        }
    }
    String::new()
}

/// Breaks text at blanks into at most `most` lines of `room_pt`; what is left over is elided.
pub(super) fn wrap(text: &str, size_pt: f64, bold: bool, room_pt: f64, most: usize) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    for word in text.split_whitespace() {
        let longer = match lines.last() {
            Some(line) => format!("{line} {word}"),
            None => word.to_owned(),
        };
        let fits = width_pt(&longer, size_pt, bold) <= room_pt;
        match lines.last_mut() {
            Some(line) if fits => *line = longer,
            _ => lines.push(word.to_owned()),
        }
    }
    if lines.len() > most && most > 0 {
        let rest = lines.split_off(most - 1).join(" ");
        lines.push(rest);
    }
    for line in &mut lines {
        *line = elide(line, size_pt, bold, room_pt);
    }
    lines
}

/// A number with a fixed count of decimals and a true minus sign.
pub(super) fn number(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    match text.strip_prefix('-') {
        Some(digits) if digits.chars().any(|c| c.is_ascii_digit() && c != '0') => {
            format!("−{digits}")
        }
        Some(digits) => digits.to_owned(),
        None => text,
    }
}

/// `10⁻¹⁵` for −15.
pub(super) fn power_of_ten(exponent: i32) -> String {
    let digits = exponent.to_string();
    let raised = digits.chars().map(|c| match c {
        '-' => '⁻',
        '1' => '¹',
        '2' => '²',
        '3' => '³',
        digit => {
            let d = digit.to_digit(10).expect("invariant: a decimal digit");
            char::from_u32(0x2070 + d).expect("invariant: a superscript digit")
        }
    });
    format!("10{}", raised.collect::<String>())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn widths_follow_the_font_tables() {
        // The head of the table: "0" is 1303 and "A" 1401 units wide in the regular cut.
        assert!((width_pt("0", 2048.0, false) - 1303.0).abs() < 1e-9);
        assert!((width_pt("A", 2048.0, false) - 1401.0).abs() < 1e-9);
        assert!(width_pt("CO₂/H₂O", 7.0, true) > width_pt("CO₂/H₂O", 7.0, false));
        assert!(width_pt("\u{4e00}", 10.0, false) == 10.0);
    }

    #[test]
    fn numbers_have_true_minus_and_no_negative_zero() {
        assert_eq!(number(-1.5, 1), "−1.5");
        assert_eq!(number(-0.01, 1), "0.0");
        assert_eq!(power_of_ten(-15), "10⁻¹⁵");
        assert_eq!(power_of_ten(23), "10²³");
    }

    #[test]
    fn shortening_and_breaking() {
        let short = elide("a very long name of a comet", 7.0, false, 40.0);
        assert!(short.ends_with('…') && width_pt(&short, 7.0, false) <= 40.0);
        assert_eq!(wrap("one two", 7.0, false, 500.0, 2), ["one two"]);
        let lines = wrap("one two three four five six", 7.0, false, 45.0, 2);
        assert_eq!(lines.len(), 2);
        assert!(lines[1].ends_with('…'));
        assert!(wrap("", 7.0, false, 45.0, 2).is_empty());
        assert_eq!(elide("W", 7.0, false, 1.0), "");
    }

    #[test]
    fn runs_of_blanks_survive_and_controls_do_not() {
        assert_eq!(clean(" a  b\u{1}c\n"), "a \u{A0}b c");
    }
}
