//! Floor 8, an edge: everything a paper draft needs, from results of `measure` – figures for print,
//! tables, a methods paragraph, references, a page for readers without the field's vocabulary.
//!
//! May import every floor but `cli`. Returns bytes; never reads or writes a file, and never words a
//! number that does not come from the analysis or its settings.

mod bib;
mod ecsv;
mod latex;
mod methods;
mod pictures;
mod places;
mod print;
mod rounding;
mod stamp;
mod study;
mod table;
mod tables;

pub use stamp::{Hashed, Origin};
pub use study::Study;

use crate::ground::Result;
use bib::References;
use stamp::Stamp;

/// A file of the kit: its name and content.
pub type KitFile = (String, Vec<u8>);

/// All files of the kit of one or several results.
///
/// # Errors
/// A figure that cannot be drawn.
pub fn kit(studies: &[Study]) -> Result<Vec<KitFile>> {
    let stamp = Stamp::new(studies.iter().map(|s| s.origin.clone()));
    let figures = pictures::figures(studies)?;
    let mut files = Vec::new();
    for f in pictures::printed(&figures, &stamp)? {
        files.extend(f);
    }
    for t in tables::tables(studies) {
        files.push((format!("{}.tex", t.name), t.tabular(&stamp).into_bytes()));
        files.push((
            format!("{}-deluxe.tex", t.name),
            t.deluxe(&stamp).into_bytes(),
        ));
    }
    for (name, text) in ecsv::tables(studies, &stamp) {
        files.push((name.to_owned(), text.into_bytes()));
    }
    let mut refs = References::default();
    let text: Vec<(String, Vec<methods::Paragraph>)> = studies
        .iter()
        .map(|s| (s.heading(), methods::methods(s, &mut refs)))
        .collect();
    let mut push = |name: &str, text: String| files.push((name.to_owned(), text.into_bytes()));
    push(
        "methods.md",
        methods::markdown(&text, &refs, &stamp.comment("")),
    );
    push("methods.tex", methods::latex(&text, &stamp.comment("%")));
    push("sources.bib", refs.bib(&stamp));
    Ok(files)
}
