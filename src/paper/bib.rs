//! References as BibTeX: the fields that a source's text has, and no others.

mod parts;

use super::latex::{CITE, tex};
use super::stamp::Stamp;
use super::study::Study;
use crate::tables::Source;
use parts::{Parts, last_year};

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

/// Articles named in a text of references joined by `; `, with keys of first author and year; what is
/// no article is left out.
pub(super) fn published_in(text: &str) -> Vec<Source> {
    let piece = |t: &str| {
        let reference = t.rsplit(": ").next().unwrap_or(t).trim().to_owned();
        let parts = Parts::of(&reference).filter(|p| p.place.is_some())?;
        let first = reference.split([',', '&']).next()?;
        let first = first.split(" et al").next()?;
        let first = first.split(|c: char| c.is_ascii_digit()).next()?;
        let letters = first.chars().filter(char::is_ascii_alphabetic);
        let name: String = letters.collect::<String>().to_lowercase();
        Some(Source {
            key: format!("{name}{}", parts.year),
            reference,
            doi_or_id: None,
        })
    };
    text.split("; ").filter_map(piece).collect()
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
    fn articles_are_found_in_running_text() {
        let found = published_in(
            "equilibrium of 2 lines: laboratory gf: Wood et al. 2014, ApJS 211, 20; O'Brian et al. 1991, JOSA B 8, 1185; Den Hartog 2014, ApJS 215, 23; a note",
        );
        let keys: Vec<&str> = found.iter().map(|s| s.key.as_str()).collect();
        assert_eq!(keys, ["wood2014", "obrian1991", "denhartog2014"]);
        assert_eq!(found[1].reference, "O'Brian et al. 1991, JOSA B 8, 1185");
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
