//! References as BibTeX: the fields that a source's text has, and no others.

use super::latex::{CITE, tex};
use super::stamp::Stamp;
use super::study::Study;
use crate::tables::Source;

/// The coma model's own reference, which no table row carries.
const HASER: (&str, &str) = (
    "haser1957",
    "Haser 1957, Bulletin de l'Académie royale de Belgique 43, 740",
);

/// References in the order of their first citation.
#[derive(Default)]
pub(super) struct References {
    used: Vec<Source>,
}

impl References {
    /// A citation of these sources in running text; empty when none is given.
    pub(super) fn cite(&mut self, sources: &[Source]) -> String {
        let mut keys: Vec<String> = Vec::new();
        for s in sources {
            let key = safe_key(&s.key);
            if !self.used.iter().any(|u| u.key == key) {
                self.used.push(Source {
                    key: key.clone(),
                    ..s.clone()
                });
            }
            if !keys.contains(&key) {
                keys.push(key);
            }
        }
        if keys.is_empty() {
            return String::new();
        }
        format!(" {}{}{}", CITE.0, keys.join(","), CITE.1)
    }

    /// A citation of the Haser model.
    pub(super) fn cite_haser(&mut self) -> String {
        self.cite(&[Source {
            key: HASER.0.to_owned(),
            reference: HASER.1.to_owned(),
            doi_or_id: None,
        }])
    }

    /// What was cited.
    pub(super) fn used(&self) -> &[Source] {
        &self.used
    }

    /// `sources.bib`.
    pub(super) fn bib(&self, stamp: &Stamp) -> String {
        let mut out = stamp.comment("%");
        for s in &self.used {
            out.push('\n');
            out.push_str(&entry(s));
        }
        out
    }
}

/// The sources that a text of references joined by `; ` is made of. The longest match wins, so that
/// a source whose text contains that of another is not taken for it.
pub(super) fn sources_of(study: &Study, text: &str) -> Vec<Source> {
    let mut all: Vec<&(String, String)> = study.settings.sources.iter().collect();
    all.sort_by_key(|(_, reference)| std::cmp::Reverse(reference.len()));
    let mut rest = text.to_owned();
    let mut out = Vec::new();
    for (key, reference) in all {
        if !reference.is_empty() && rest.contains(reference.as_str()) {
            rest = rest.replace(reference.as_str(), "");
            let known = study.tables.source(key);
            out.push(known.cloned().unwrap_or_else(|| Source {
                key: key.clone(),
                reference: reference.clone(),
                doi_or_id: None,
            }));
        }
    }
    out.reverse();
    out
}

/// A key that can stand in `\citep` and in a BibTeX entry.
fn safe_key(key: &str) -> String {
    key.chars()
        .map(|c| {
            if c.is_ascii_alphanumeric() || matches!(c, '-' | '.' | ':') {
                c
            } else {
                '-'
            }
        })
        .collect()
}

/// Text inside the braces of a field: BibTeX counts braces even behind a backslash, so they go.
fn field_text(text: &str) -> String {
    tex(&text.replace('{', "(").replace('}', ")"))
}

fn entry(source: &Source) -> String {
    let parts = Parts::of(&source.reference);
    let kind = match &parts {
        Some(Parts { place: Some(_), .. }) => "article",
        _ => "misc",
    };
    let mut fields: Vec<(&str, String)> = Vec::new();
    match parts {
        Some(p) => {
            fields.push(("author", p.authors));
            fields.push(("year", p.year));
            match p.place {
                Some((journal, volume, pages)) => {
                    fields.push(("journal", field_text(&journal)));
                    fields.push(("volume", field_text(&volume)));
                    fields.push(("pages", field_text(&pages)));
                }
                None if !p.rest.is_empty() => fields.push(("note", field_text(&p.rest))),
                None => {}
            }
        }
        None => {
            // Styles sort and label an entry without author by this.
            let words = source.reference.split_whitespace();
            let first = words.take_while(|w| !w.starts_with('(')).take(2);
            let short = first.collect::<Vec<_>>().join(" ");
            fields.push(("key", field_text(short.trim_end_matches([',', ':', ';']))));
            if let Some(year) = last_year(&source.reference) {
                fields.push(("year", year.to_owned()));
            }
            fields.push(("note", field_text(&source.reference)));
        }
    }
    if let Some(id) = &source.doi_or_id {
        if id.starts_with("10.") {
            fields.push(("doi", field_text(id)));
        } else if let Some(number) = id.strip_prefix("arXiv:") {
            fields.push(("eprint", field_text(number)));
            fields.push(("archiveprefix", "arXiv".to_owned()));
        } else {
            fields.push(("howpublished", field_text(id)));
        }
    }
    let lines = fields.iter().map(|(k, v)| format!("  {k} = {{{v}}}"));
    let lines = lines.collect::<Vec<_>>().join(",\n");
    format!("@{kind}{{{},\n{lines}\n}}\n", source.key)
}

/// A reference taken apart.
struct Parts {
    /// BibTeX list of names.
    authors: String,
    year: String,
    /// Journal, volume, page.
    place: Option<(String, String, String)>,
    /// What follows the year.
    rest: String,
}

impl Parts {
    /// `Names YEAR, Journal VOLUME, PAGE`, or names and year followed by anything; `None` for texts
    /// that do not begin like that.
    fn of(reference: &str) -> Option<Self> {
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
fn last_year(text: &str) -> Option<&str> {
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

#[cfg(test)]
mod tests {
    use super::*;

    fn made(reference: &str, id: Option<&str>) -> String {
        entry(&Source {
            key: "k".into(),
            reference: reference.into(),
            doi_or_id: id.map(Into::into),
        })
    }

    #[test]
    fn fields_come_from_the_text_alone() {
        let e = made("Ootsubo et al. 2012, ApJ 752, 15", None);
        assert_eq!(
            e,
            "@article{k,\n  author = {{Ootsubo} and others},\n  year = {2012},\n  journal = {ApJ},\n  volume = {752},\n  pages = {15}\n}\n"
        );
        let e = made("Manfroid, Hutsemekers & Jehin 2021, Nature 593, 372", None);
        assert!(
            e.contains("{Manfroid} and {Hutsemekers} and {Jehin}"),
            "{e}"
        );
        let e = made(
            "Biver et al. 2021, A&A 648, A49 (arXiv:2102.12847)",
            Some("arXiv:2102.12847"),
        );
        assert!(
            e.contains(r"journal = {A\&A}") && e.contains("eprint = {2102.12847}"),
            "{e}"
        );
    }

    #[test]
    fn odd_texts_become_notes() {
        for text in [
            "Expansion law as quoted by Tseng et al. 2007, A&A (arXiv:astro-ph/0702193)",
            "Crovisier et al. 1999; Colom et al. 1997 (as cited elsewhere)",
            "Common practice in cometary spectroscopy; set here by hand, no single source",
            "{unbalanced",
        ] {
            let e = made(text, None);
            assert!(
                e.starts_with("@misc{k,\n  key = {") && e.contains("note = {"),
                "{e}"
            );
            assert_eq!(e.matches('{').count(), e.matches('}').count(), "{e}");
        }
        let e = made(
            "DiSanti et al. 2009 (as cited in Harrington Pinto et al. 2022, PSJ 3, 247)",
            None,
        );
        assert!(
            e.contains("year = {2009}") && e.contains("note = {(as cited"),
            "{e}"
        );
        assert!(made("IAUC 7455 (2000)", None).contains("key = {IAUC 7455},\n  year = {2000}"));
        assert_eq!(safe_key("a, b}c_d"), "a--b-c-d");
    }
}
