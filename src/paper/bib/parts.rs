//! References as the tables write them, taken apart.

use super::field_text;

/// A reference taken apart.
pub(super) struct Parts {
    /// BibTeX list of names.
    pub authors: String,
    pub year: String,
    /// Journal, volume, page.
    pub place: Option<(String, String, String)>,
    /// What follows the year.
    pub rest: String,
}

impl Parts {
    /// `Names YEAR, Journal VOLUME, PAGE`, or names and year followed by anything; `None` for texts
    /// that do not begin like that.
    pub(super) fn of(reference: &str) -> Option<Self> {
        let year_at = reference
            .char_indices()
            .map(|(i, _)| i)
            .find(|i| is_year(reference, *i))?;
        let authors = names(reference[..year_at].trim())?;
        let rest = reference[year_at + 4..].trim_start_matches(|c: char| c.is_ascii_lowercase());
        let behind = rest.trim_start_matches([',', ' ']).to_owned();
        if rest.starts_with(';') {
            return None;
        }
        Some(Self {
            authors,
            year: reference[year_at..year_at + 4].to_owned(),
            place: place(&behind),
            rest: behind,
        })
    }
}

/// Whether four digits of a plausible year stand here between a blank and no further digit.
fn is_year(text: &str, at: usize) -> bool {
    let (before, here) = text.split_at(at);
    let digits: String = here.chars().take_while(char::is_ascii_digit).collect();
    let plausible = digits.len() == 4 && matches!(&digits[..2], "17" | "18" | "19" | "20");
    plausible && before.ends_with(' ')
}

/// The year of a text that ends with one in parentheses.
pub(super) fn last_year(text: &str) -> Option<&str> {
    let inside = text.strip_suffix(')')?.rsplit_once('(')?.1;
    is_year(&format!(" {inside}"), 1)
        .then_some(inside)
        .filter(|y| y.len() == 4)
}

/// Surnames joined by `&`, `and` and commas, with `et al.` as `others`; `None` when a word does not
/// look like part of a name.
fn names(text: &str) -> Option<String> {
    const PARTICLES: [&str; 9] = ["de", "van", "von", "der", "den", "la", "le", "du", "da"];
    let (text, others) = match text.strip_suffix("et al.") {
        Some(first) => (first.trim(), true),
        None => (text, false),
    };
    let text = text.replace(" and ", " & ").replace(", ", " & ");
    let mut out = Vec::new();
    for name in text.split(" & ") {
        let words: Vec<&str> = name.split_whitespace().collect();
        let fits = |w: &&str| {
            PARTICLES.contains(w)
                || (w.starts_with(char::is_uppercase)
                    && w.chars().all(|c| c.is_alphabetic() || "'’-.".contains(c)))
        };
        if words.is_empty() || words.len() > 4 || !words.iter().all(fits) {
            return None;
        }
        out.push(format!("{{{}}}", field_text(name)));
    }
    if others {
        out.push("others".to_owned());
    }
    Some(out.join(" and "))
}

/// `Journal VOLUME, PAGE`, possibly followed by an arXiv number in parentheses.
fn place(text: &str) -> Option<(String, String, String)> {
    let text = text.split(" (arXiv:").next()?;
    let mut parts = text.split(", ");
    let (source, page, more) = (parts.next()?, parts.next()?, parts.next());
    let (journal, volume) = source.rsplit_once(' ')?;
    let number = |s: &str| s.chars().all(|c| c.is_ascii_digit()) && !s.is_empty();
    let page_like = !page.contains(' ') && page.ends_with(|c: char| c.is_ascii_digit());
    (more.is_none() && number(volume) && page_like && !journal.contains('(')).then(|| {
        (
            journal.to_owned(),
            volume.to_owned(),
            page.trim().to_owned(),
        )
    })
}
