//! Names of molecules, radicals, atoms and ions.

use serde::{Deserialize, Serialize};
use std::fmt;

/// A chemical species by its plain-text formula: `H2O`, `CN`, `Ni I`.
///
/// Atoms carry the spectroscopic stage after a blank, as in the line lists.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(transparent)]
pub struct Species(String);

impl Species {
    /// Takes a formula as written in the tables; outer blanks are dropped.
    pub fn new(formula: &str) -> Self {
        Self(formula.trim().to_owned())
    }

    /// The formula as written in the tables.
    pub fn as_str(&self) -> &str {
        &self.0
    }

    /// The formula with digits as subscripts, for figures: `CO₂`.
    pub fn pretty(&self) -> String {
        let mut out = String::with_capacity(self.0.len() + 4);
        let mut after_letter = false;
        for c in self.0.chars() {
            match c.to_digit(10) {
                Some(d) if after_letter => {
                    out.push(char::from_u32(0x2080 + d).expect("invariant: a subscript digit"));
                }
                _ => {
                    after_letter = c.is_alphabetic();
                    out.push(c);
                }
            }
        }
        out
    }
}

impl fmt::Display for Species {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn digits_after_letters_become_subscripts() {
        assert_eq!(Species::new(" C2H6 ").pretty(), "C₂H₆");
        assert_eq!(Species::new("Ni I").pretty(), "Ni I");
    }
}
