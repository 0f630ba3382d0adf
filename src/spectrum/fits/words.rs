//! Keywords of a part, with those of the primary part as fallback.

use super::parts::PartInfo;
use super::source::refused;
use crate::ground::{Error, Medium, Result};
use fits_well::header::{Header, Value};

/// The header of a part and that of the primary part.
#[derive(Clone, Copy)]
pub(super) struct Words<'a> {
    pub(super) own: &'a Header,
    primary: &'a Header,
}

impl<'a> Words<'a> {
    pub(super) fn of(parts: &'a [PartInfo], part: &'a PartInfo) -> Self {
        Self {
            own: &part.header,
            primary: &parts[0].header,
        }
    }

    /// A number of this part; a word that is there but no number is an error.
    pub(super) fn number(&self, key: &str) -> Result<Option<f64>> {
        let value = self
            .own
            .get_real(key)
            .map_err(|e| refused(&format!("the keyword {key} cannot be read"), &e))?;
        match value {
            Some(v) if !v.is_finite() => {
                Err(Error::input(format!("{key} = {v} is not finite")).remedy("correct the header"))
            }
            other => Ok(other),
        }
    }

    /// A text of this part, trimmed; `None` when absent, empty or not a text.
    pub(super) fn text(&self, key: &str) -> Option<&'a str> {
        text(self.own, key)
    }

    /// A text of this part, else of the primary part.
    pub(super) fn text_inherited(&self, key: &str) -> Option<&'a str> {
        text(self.own, key).or_else(|| text(self.primary, key))
    }

    /// A word of this part, else of the primary part, written out.
    pub(super) fn shown(&self, key: &str) -> Option<String> {
        shown(self.own, key).or_else(|| shown(self.primary, key))
    }

    /// The medium the header states in words of its own: AIRORVAC, or the logical VACUUM.
    pub(super) fn medium(&self) -> Result<Option<(Medium, String)>> {
        if let Some(word) = self.text_inherited("AIRORVAC") {
            let medium = match word.to_ascii_lowercase().as_str() {
                "air" => Medium::Air,
                "vac" | "vacuum" => Medium::Vacuum,
                _ => {
                    return Err(Error::input(format!(
                        "AIRORVAC = {word:?} is neither air nor vac"
                    ))
                    .remedy("say which with the plan key medium"));
                }
            };
            return Ok(Some((medium, format!("AIRORVAC = {word}"))));
        }
        let value = [self.own, self.primary]
            .into_iter()
            .find_map(|h| h.get("VACUUM").ok().flatten());
        let vacuum = value.and_then(|v| match v {
            Value::Logical(yes) => Some(*yes),
            other => match other.as_integer() {
                Ok(Some(0)) => Some(false),
                Ok(Some(1)) => Some(true),
                _ => None,
            },
        });
        if vacuum.is_none()
            && let Some(name) = self.text_inherited("TELESCOP")
            && IN_SPACE.contains(&name.to_ascii_uppercase().as_str())
        {
            return Ok(Some((
                Medium::Vacuum,
                format!("TELESCOP = {name}, in space"),
            )));
        }
        Ok(vacuum.map(|yes| {
            let medium = if yes { Medium::Vacuum } else { Medium::Air };
            (medium, format!("VACUUM = {}", if yes { 'T' } else { 'F' }))
        }))
    }
}

/// Telescopes above the air, whose wavelengths are in vacuum (common practice; names from memory).
const IN_SPACE: [&str; 9] = [
    "HST", "JWST", "SPITZER", "IUE", "FUSE", "GALEX", "AKARI", "SPHEREX", "SWIFT",
];

/// A non-empty text of a header, trimmed.
pub(super) fn text<'a>(header: &'a Header, key: &str) -> Option<&'a str> {
    let value = header.get_text(key).ok().flatten()?.trim();
    (!value.is_empty()).then_some(value)
}

fn shown(header: &Header, key: &str) -> Option<String> {
    let value = header.get(key).ok().flatten()?;
    if let Some(text) = value.as_text() {
        let text = text.trim();
        return (!text.is_empty()).then(|| text.to_owned());
    }
    if let Ok(Some(integer)) = value.as_integer() {
        return Some(integer.to_string());
    }
    if let Ok(Some(real)) = value.as_real() {
        return Some(real.to_string());
    }
    value
        .as_logical()
        .map(|yes| if yes { "T" } else { "F" }.to_owned())
}
