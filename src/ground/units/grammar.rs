//! The grammar of unit strings.
//!
//! FITS standard 4.0, section 4.3, and IVOA VOUnits 1.1: products by a blank, `*` or `.`; quotients by
//! `/`, which divides by the one unit or parenthesis that follows, from left to right; powers as `m2`,
//! `m-2`, `m**2`, `m^2`, `m^(-2)`; a numeric factor such as `1E-17`, `10**-17`, `10^(-17)`, `10-17`.
//! Departs from both: several solidi, superscripts, `·` and outer square brackets are accepted.

use super::symbols::{Quantity, look_up, names};
use crate::ground::{Error, Result, did_you_mean};

const LONGEST: usize = 200;
const DEEPEST: usize = 8;

/// Reads a unit string into a factor and powers of the base dimensions.
pub(super) fn parse(text: &str) -> Result<Quantity> {
    let plain = plain(text);
    if plain.len() > LONGEST {
        return Err(Error::plan(format!(
            "a unit of {} characters is too long to be one",
            plain.len()
        )));
    }
    let mut parser = Parser {
        text: plain.chars().collect(),
        at: 0,
    };
    let quantity = parser.product(0)?;
    match parser.peek() {
        None => Ok(quantity),
        Some(c) => Err(parser.refuse(&format!("{c:?} does not belong there"))),
    }
}

/// Superscripts, signs and outer brackets in plain ASCII.
fn plain(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.trim().chars() {
        match c {
            '⁰' => out.push('0'),
            '¹' => out.push('1'),
            '²' => out.push('2'),
            '³' => out.push('3'),
            '⁻' | '−' => out.push('-'),
            'µ' | 'μ' => out.push('u'),
            '\u{212b}' => out.push('Å'),
            '·' | '×' => out.push('*'),
            c if ('⁴'..='⁹').contains(&c) => {
                out.push(char::from(b'4' + (c as u32 - '⁴' as u32) as u8));
            }
            c => out.push(c),
        }
    }
    let inner = out.strip_prefix('[').and_then(|t| t.strip_suffix(']'));
    inner.map_or(out.clone(), |t| t.trim().to_owned())
}

struct Parser {
    text: Vec<char>,
    at: usize,
}

impl Parser {
    fn peek(&self) -> Option<char> {
        self.text.get(self.at).copied()
    }

    fn peek_at(&self, offset: usize) -> Option<char> {
        self.text.get(self.at + offset).copied()
    }

    fn blanks(&mut self) {
        while self.peek().is_some_and(char::is_whitespace) {
            self.at += 1;
        }
    }

    fn refuse(&self, why: &str) -> Error {
        let text: String = self.text.iter().collect();
        Error::plan(format!("unit {text:?} cannot be read: {why}"))
    }

    /// Factors up to the end or a closing parenthesis.
    fn product(&mut self, depth: usize) -> Result<Quantity> {
        if depth > DEEPEST {
            return Err(self.refuse("too many parentheses"));
        }
        let mut total = Quantity::number(1.0, 0);
        let mut any = false;
        loop {
            self.blanks();
            let power = match self.peek() {
                None | Some(')') => break,
                Some('/') => -1,
                Some('*' | '.') if any => 1,
                _ => 0,
            };
            if power != 0 {
                self.at += 1;
                self.blanks();
            }
            let factor = self.factor(depth)?;
            let sign = if power < 0 { -1 } else { 1 };
            total = total
                .times(&factor, sign)
                .ok_or_else(|| self.refuse("its factor or powers are out of bounds"))?;
            any = true;
        }
        if any {
            Ok(total)
        } else {
            Err(self.refuse("a unit is missing"))
        }
    }

    /// A number, a symbol or a parenthesis, with its power.
    fn factor(&mut self, depth: usize) -> Result<Quantity> {
        let (quantity, implicit) = match self.peek() {
            Some('(') => {
                self.at += 1;
                let inner = self.product(depth + 1)?;
                if self.peek() != Some(')') {
                    return Err(self.refuse("a parenthesis is not closed"));
                }
                self.at += 1;
                (inner, false)
            }
            Some(c) if c.is_ascii_digit() || c == '.' => {
                let number = self.number()?;
                let signed = matches!(self.peek(), Some('+' | '-'))
                    || (self.peek() == Some('(') && matches!(self.peek_at(1), Some('+' | '-')));
                (number, signed)
            }
            Some(c) if c.is_alphabetic() || c == '"' => {
                let symbol = self.symbol()?;
                let next = self.peek();
                (
                    symbol,
                    next.is_some_and(|c| c.is_ascii_digit() || "+-".contains(c)),
                )
            }
            Some(c) => return Err(self.refuse(&format!("{c:?} does not belong there"))),
            None => return Err(self.refuse("a unit is missing at its end")),
        };
        let power = self.power(implicit)?;
        Quantity::number(1.0, 0)
            .times(&quantity, power)
            .ok_or_else(|| self.refuse("its factor or powers are out of bounds"))
    }

    fn number(&mut self) -> Result<Quantity> {
        let start = self.at;
        while self.peek().is_some_and(|c| c.is_ascii_digit() || c == '.') {
            self.at += 1;
        }
        let digits: String = self.text[start..self.at].iter().collect();
        let mantissa: f64 = digits
            .parse()
            .map_err(|_| self.refuse(&format!("{digits:?} is not a number")))?;
        let signed = usize::from(matches!(self.peek_at(1), Some('+' | '-')));
        let exponential = matches!(self.peek(), Some('e' | 'E'))
            && self.peek_at(1 + signed).is_some_and(|c| c.is_ascii_digit());
        let exponent = if exponential {
            self.at += 1;
            self.integer()?
        } else {
            0
        };
        if mantissa <= 0.0 {
            return Err(self.refuse("its factor is zero"));
        }
        Ok(if mantissa == 10.0 {
            Quantity::number(1.0, exponent + 1)
        } else {
            Quantity::number(mantissa, exponent)
        })
    }

    fn symbol(&mut self) -> Result<Quantity> {
        let start = self.at;
        while self
            .peek()
            .is_some_and(|c| c.is_alphabetic() || c == '"' || c == '_')
        {
            self.at += 1;
        }
        let word: String = self.text[start..self.at].iter().collect();
        look_up(&word).ok_or_else(|| {
            let hint = did_you_mean(&word, names().filter(|n| n.len() > 2));
            let hint = hint.map_or(String::new(), |h| format!("; did you mean {h}?"));
            self.refuse(&format!("{word:?} is not a known unit{hint}"))
        })
    }

    /// The power behind a factor; 1 when there is none.
    fn power(&mut self, implicit: bool) -> Result<i32> {
        let stars = self.peek() == Some('*') && self.peek_at(1) == Some('*');
        if stars {
            self.at += 2;
        } else if self.peek() == Some('^') {
            self.at += 1;
        } else if !implicit {
            return Ok(1);
        }
        self.blanks();
        let close = match self.peek() {
            Some('(') => Some(')'),
            Some('{') => Some('}'),
            _ => None,
        };
        let Some(close) = close else {
            return self.integer();
        };
        self.at += 1;
        self.blanks();
        let power = self.integer()?;
        self.blanks();
        if self.peek() != Some(close) {
            return Err(self.refuse("a power is not a whole number in parentheses"));
        }
        self.at += 1;
        Ok(power)
    }

    fn integer(&mut self) -> Result<i32> {
        let start = self.at;
        if matches!(self.peek(), Some('+' | '-')) {
            self.at += 1;
        }
        while self.peek().is_some_and(|c| c.is_ascii_digit()) {
            self.at += 1;
        }
        let digits: String = self.text[start..self.at].iter().collect();
        match digits.parse::<i32>() {
            Ok(n) if n.abs() <= 300 => Ok(n),
            _ => Err(self.refuse(&format!("{digits:?} is not a whole power"))),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn spellings_of_one_unit() {
        let wanted = parse("1e-16 erg/s/cm2/Angstrom").unwrap();
        for text in [
            "10**-16 erg/s/cm2/Angstrom",
            "10^(-16) erg s^-1 cm^-2 A^-1",
            "1E-16 erg/s/cm^2/Ang",
            "10**(-16)erg.cm**(-2).s**(-1).angstrom**(-1)",
            "10-16 erg s-1 cm-2 AA-1",
            "10(-16)erg/(s cm2 A)",
            "1.0e-16 * erg / (Angstrom s cm2)",
            "[10⁻¹⁶ erg s⁻¹ cm⁻² Å⁻¹]",
            "10^{-16} ERG/CM**2/SEC/ANGSTROM",
            "1e-16 ergs/cm2/s/A",
            "1e-16 FLAM",
            "10**-16 (erg/s) / (cm2*Angstrom)",
        ] {
            let found = parse(text).unwrap_or_else(|e| panic!("{e}"));
            assert_eq!(found.powers, wanted.powers, "{text}");
            let ratio = found.factor(0) / wanted.factor(0);
            assert!((ratio - 1.0).abs() < 1e-14, "{text}: {ratio}");
        }
    }

    #[test]
    fn refusals_say_why() {
        for (text, why) in [
            ("", "missing"),
            ("erg/", "missing"),
            ("erg/(s", "not closed"),
            ("erg)", "')'"),
            ("erg/s/cm2/Angstorm", "angstrom?"),
            ("cm^x", "whole power"),
            ("cm^(1/2)", "whole number"),
            ("0 erg", "zero"),
            ("10**999 erg", "whole power"),
            ("1e200*1e200 m", "out of bounds"),
            ("((((((((((((m))))))))))))", "parentheses"),
            ("m,s", "','"),
        ] {
            let e = parse(text).unwrap_err().to_string();
            assert!(e.contains(why), "{text}: {e}");
        }
        assert!(parse(&"m ".repeat(150)).is_err());
    }
}
