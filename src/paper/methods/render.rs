//! The paragraphs as Markdown and LaTeX.

use super::super::bib::References;
use super::super::latex::{cited, tex, tex_with_citations};
use super::Paragraph;

/// The text for people who write in plain text: citations as keys in brackets, references below.
pub(in super::super) fn markdown(
    studies: &[(String, Vec<Paragraph>)],
    refs: &References,
    lead: &str,
) -> String {
    let mut out = format!("<!--\n{lead}-->\n");
    for (heading, paragraphs) in studies {
        out.push_str(&format!("\n## Methods: {}\n", one_line(heading)));
        for p in paragraphs {
            let text = cited(&p.text, str::to_owned, |keys| {
                let keys: Vec<String> = keys.split(',').map(|k| format!("@{k}")).collect();
                format!("[{}]", keys.join("; "))
            });
            out.push_str(&format!("\n**{}.** {text}\n", p.title));
        }
    }
    out.push_str("\n## References\n\n");
    for s in refs.used() {
        out.push_str(&format!("* @{}: {}\n", s.key, s.reference));
    }
    out
}

/// The text as LaTeX paragraphs with `\citep`.
pub(in super::super) fn latex(studies: &[(String, Vec<Paragraph>)], lead: &str) -> String {
    let mut out = lead.to_owned();
    for (heading, paragraphs) in studies {
        out.push_str(&format!("\n% {}\n", one_line(heading)));
        for p in paragraphs {
            out.push_str(&format!(
                "\\paragraph{{{}}}\n{}\n\n",
                tex(&p.title),
                tex_with_citations(&p.text)
            ));
        }
    }
    out
}

fn one_line(text: &str) -> String {
    text.chars()
        .map(|c| if c.is_control() { ' ' } else { c })
        .collect()
}
