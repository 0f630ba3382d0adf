//! Floor 8, an edge: everything a paper draft needs, from results of `measure` – figures for print,
//! tables, a methods paragraph, references, a page for readers without the field's vocabulary.
//!
//! May import every floor but `cli`. Returns bytes; never reads or writes a file, and never words a
//! number that does not come from the analysis or its settings.

mod bib;
mod draft;
mod ecsv;
mod latex;
mod methods;
mod page;
mod pictures;
mod places;
mod print;
mod provenance;
mod rounding;
mod stamp;
mod study;
mod table;
mod tables;
mod words;

pub use provenance::{PROVENANCE, Provenance, Recorded, drift, is_to_edit, sha256};
pub use stamp::{Hashed, Origin};
pub use study::Study;

use crate::ground::Result;
use bib::References;
use methods::Paragraph;
use page::Page;
use stamp::Stamp;

/// A file of the kit: its name and content.
pub type KitFile = (String, Vec<u8>);

/// All files of the kit of one or several results.
///
/// # Errors
/// A figure that cannot be drawn.
pub fn kit(studies: &[Study]) -> Result<Vec<KitFile>> {
    let stamp = Stamp::new(studies.iter().map(|s| s.origin.clone()));
    let places = places::places(studies);
    let figures = pictures::figures(studies, &places)?;
    let tables = tables::tables(studies);
    let mut files: Vec<KitFile> = pictures::printed(&figures, &stamp)?.concat();
    let mut push = |name: &str, text: String| files.push((name.to_owned(), text.into_bytes()));
    for t in &tables {
        push(&format!("{}.tex", t.name), t.tabular(&stamp));
        push(&format!("{}-deluxe.tex", t.name), t.deluxe(&stamp));
    }
    for (name, text) in ecsv::tables(studies, &stamp) {
        push(name, text);
    }
    let mut refs = References::default();
    let methods: Vec<(String, Vec<Paragraph>)> = studies
        .iter()
        .map(|s| (s.heading(), methods::methods(s, &mut refs)))
        .collect();
    push(
        "methods.md",
        methods::markdown(&methods, &refs, &stamp.comment("")),
    );
    push("methods.tex", methods::latex(&methods, &stamp.comment("%")));
    push("sources.bib", refs.bib(&stamp));
    let page = Page {
        studies,
        places: &places,
        figures: &figures,
        tables: &tables,
        methods: &methods,
        references: refs.used(),
        stamp: &stamp,
    };
    push("report.html", page.html());
    let standing = figures.iter().find(|f| f.name.starts_with("standing"));
    if let (Some(figure), Some(table)) = (standing.or(figures.first()), tables.last()) {
        let shown = (figure.name.as_str(), figure.caption.as_str());
        push("draft.tex", draft::draft(studies, shown, table, &stamp));
    }
    Ok(files)
}
