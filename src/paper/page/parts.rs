//! Tables, methods, glossary and provenance of the page.

use super::super::latex::cited;
use super::super::methods::Paragraph;
use super::super::stamp::Stamp;
use super::super::table::Table;
use crate::tables::Source;
use maud::{Markup, PreEscaped, Render, html};

/// Words of the field with their meaning.
const WORDS: [(&str, &str); 12] = [
    (
        "Abundance ratio",
        "how many molecules of one kind there are for each molecule of another.",
    ),
    (
        "Band",
        "a range of wavelengths in which one kind of molecule shines.",
    ),
    (
        "Spectrum",
        "the light sorted by wavelength. Around 0.5 µm light is visible; beyond 0.8 µm it is infrared.",
    ),
    (
        "Continuum",
        "the smooth light between the bands: sunlight scattered by dust, and heat.",
    ),
    ("Flux", "the amount of light received per second and area."),
    (
        "g, fluorescence efficiency",
        "how many photons one molecule in sunlight sends out per second; turns light into numbers of molecules.",
    ),
    (
        "Column density N",
        "the number of molecules above each square centimetre of the picture.",
    ),
    (
        "Production rate Q",
        "the number of molecules that leave the comet per second.",
    ),
    (
        "Scale length",
        "how far a molecule gets before sunlight destroys it.",
    ),
    (
        "68 % and 95 % interval",
        "ranges that hold the true value with these chances, if nothing was overlooked.",
    ),
    (
        "JFC, HTC, OCC, Centaur, MBC",
        "classes of comets by their orbits: Jupiter family, Halley type, from the Oort cloud, Centaurs, main belt.",
    ),
    (
        "Percentile",
        "the share of other comets with a smaller value.",
    ),
];

pub(super) fn table(t: &Table) -> Markup {
    html! {
        div.wide {
            table.sortable {
                caption { (t.caption) }
                thead { tr {
                    @for c in &t.columns {
                        th scope="col" tabindex="0" {
                            (c.title)
                            @if !c.unit.is_empty() { " " span.unit { "(" (c.unit) ")" } }
                        }
                    }
                } }
                tbody {
                    @for row in &t.rows {
                        tr { @for cell in row {
                            @match cell.order() {
                                Some(v) => { td.number data-order=(format!("{v:e}")) { (cell.plain()) } }
                                None => { td { (cell.plain()) } }
                            }
                        } }
                    }
                }
            }
        }
        p.note { (t.note) }
    }
}

pub(super) fn methods(studies: &[(String, Vec<Paragraph>)], references: &[Source]) -> Markup {
    let number = |key: &str| {
        let at = references.iter().position(|s| s.key == key);
        at.map_or_else(|| "?".to_owned(), |i| (i + 1).to_string())
    };
    let escaped = |text: &str| text.render().into_string();
    html! {
        h2 id="methods" { "How it was done" }
        @for (heading, paragraphs) in studies {
            @if studies.len() > 1 { h3 { (heading) } }
            @for p in paragraphs {
                p {
                    strong { (p.title) ". " }
                    (PreEscaped(cited(&p.text, escaped, |keys| {
                        let numbers: Vec<String> = keys.split(',').map(number).collect();
                        format!("[{}]", numbers.join(", "))
                    })))
                }
            }
        }
        h3 { "References" }
        ol.references { @for s in references { li { (s.reference) } } }
    }
}

pub(super) fn glossary() -> Markup {
    html! {
        h2 id="words" { "Words" }
        dl { @for (word, meaning) in WORDS { dt { (word) } dd { (meaning) } } }
    }
}

pub(super) fn provenance(stamp: &Stamp) -> Markup {
    html! {
        h2 id="provenance" { "Where the numbers come from" }
        p { "Every number on this page follows from the files below; "
            code { "comagauge paper --verify" } " with the name of this folder computes them again and says whether they still do." }
        table.plain { tbody {
            @for (key, value) in stamp.pairs() { tr { th scope="row" { (key) } td.hash { (value) } } }
        } }
    }
}
