//! `report.html`: one file that opens anywhere, without network.

mod parts;

use super::methods::Paragraph;
use super::pictures::Figure;
use super::stamp::Stamp;
use super::study::Study;
use super::table::Table;
use super::words::{doubt, findings};
use crate::comparison::RatioComparison;
use crate::ground::Caveat;
use crate::tables::Source;
use maud::{DOCTYPE, Markup, PreEscaped, html};

const STYLE: &str = include_str!("page/style.css");
const SORT: &str = include_str!("page/sort.js");
/// Nothing may be fetched.
const POLICY: &str =
    "default-src 'none'; style-src 'unsafe-inline'; script-src 'unsafe-inline'; img-src data:";

/// What the page shows.
pub(super) struct Page<'a> {
    pub studies: &'a [Study],
    pub places: &'a [RatioComparison],
    pub figures: &'a [Figure],
    pub tables: &'a [Table],
    pub methods: &'a [(String, Vec<Paragraph>)],
    pub references: &'a [Source],
    pub stamp: &'a Stamp,
}

impl Page<'_> {
    /// The document.
    pub(super) fn html(&self) -> String {
        let mut names: Vec<&str> = self
            .studies
            .iter()
            .map(|s| s.settings.label.as_str())
            .collect();
        names.dedup();
        let title = format!("Gases in {}", names.join(", "));
        let page = html! {
            (DOCTYPE)
            html lang="en" {
                head {
                    meta charset="utf-8";
                    meta name="viewport" content="width=device-width, initial-scale=1";
                    meta http-equiv="Content-Security-Policy" content=(POLICY);
                    meta name="generator" content=(Stamp::PROGRAM);
                    link rel="icon" href="data:,";
                    title { (title) }
                    style { (PreEscaped(STYLE)) }
                }
                body {
                    h1 { (title) }
                    @for s in self.studies { (self.summary(s)) }
                    h2 id="figures" { "Figures" }
                    @for f in self.figures {
                        figure {
                            div.picture role="img" aria-label=(f.caption) { (PreEscaped(inline(&f.narrow))) }
                            figcaption { (f.caption) }
                        }
                    }
                    h2 id="tables" { "Tables" }
                    p.hint { "Select a column's name to sort by it." }
                    @for t in self.tables { (parts::table(t)) }
                    (parts::methods(self.methods, self.references))
                    (parts::glossary())
                    (parts::provenance(self.stamp))
                    script { (PreEscaped(SORT)) }
                }
            }
        };
        page.into_string()
    }

    /// The doubts of the result and of its comparison with other comets.
    fn caveats(&self, s: &Study) -> Vec<Caveat> {
        let mut all = s.analysis.caveats.clone();
        let own = self.places.iter().filter(|c| c.label == s.settings.label);
        for c in own.flat_map(|c| &c.caveats) {
            if !all.contains(c) {
                all.push(c.clone());
            }
        }
        all
    }

    fn summary(&self, s: &Study) -> Markup {
        let g = &s.settings.geometry;
        html! {
            section.result {
                @if self.studies.len() > 1 { h2 { (s.heading()) } }
                p.lead {
                    (lead(s)) " It was " (g.heliocentric_au) " times as far from the Sun as the Earth is."
                }
                (caution(s))
                h2 { "What was found, and how sure it is" }
                @for f in findings(s) {
                    p.finding { strong { (f.found) } " " (f.sure) " " (f.place) }
                }
                (doubts(&self.caveats(s)))
            }
        }
    }
}

/// The warning before everything else.
fn caution(s: &Study) -> Markup {
    let Some(first) = s.analysis.caveats.first() else {
        return html! {};
    };
    html! {
        p.doubt {
            strong { "Before you use these numbers: " } (doubt(first.code()))
            " Read “What to doubt” below."
        }
    }
}

fn lead(s: &Study) -> String {
    let seen: Vec<String> = s
        .analysis
        .species
        .iter()
        .filter(|r| r.detected)
        .map(|r| super::words::name(&r.species))
        .collect();
    let date = s
        .settings
        .date
        .as_ref()
        .map_or_else(String::new, |d| format!(" on {d}"));
    if seen.is_empty() {
        return format!(
            "The light of {} was measured{date}; no gas was seen with certainty.",
            s.settings.label
        );
    }
    format!(
        "Gas that escapes from a comet shines at wavelengths of its own. In the light of {}{date} these gases were seen: {}.",
        s.settings.label,
        super::methods::list(&seen)
    )
}

/// Caveats by kind, in the order of their first appearance, each kind with what it means.
fn doubts(caveats: &[Caveat]) -> Markup {
    let mut kinds: Vec<(&str, Vec<String>)> = Vec::new();
    for c in caveats {
        match kinds.iter_mut().find(|k| k.0 == c.code()) {
            Some(kind) => kind.1.push(c.to_string()),
            None => kinds.push((c.code(), vec![c.to_string()])),
        }
    }
    html! {
        h2 { "What to doubt" }
        @if kinds.is_empty() { p { "The program found nothing that casts doubt on the numbers." } }
        @for (code, texts) in &kinds {
            details.doubt {
                summary { (doubt(code)) " " span.count { "(" (texts.len()) ")" } }
                ul { @for t in texts { li { (t) } } }
            }
        }
        p.hint { "The chances given above hold only as far as these doubts do not matter." }
    }
}

/// A drawing without its fixed print size, so that it takes the width of the page.
fn inline(svg: &str) -> String {
    let end = svg.find('>').map_or(0, |i| i + 1);
    let (root, body) = svg.split_at(end);
    let sized = root
        .find("viewBox")
        .map_or_else(|| root.to_owned(), |i| format!("<svg {}", &root[i..]));
    sized + &body.replace(" opacity=\"1\"", "")
}
