//! `draft.tex`: one page that puts figure, table, methods and references together.

use super::latex::tex;
use super::stamp::Stamp;
use super::study::Study;
use super::table::Table;

/// The document; it compiles with `pdflatex` and `bibtex` of a basic installation.
pub(super) fn draft(
    studies: &[Study],
    figure: (&str, &str),
    table: &Table,
    stamp: &Stamp,
) -> String {
    let mut names: Vec<&str> = studies.iter().map(|s| s.settings.label.as_str()).collect();
    names.dedup();
    let found = match table.statements().join(", ") {
        none if none.is_empty() => "The data allow no ratio to be given.".to_owned(),
        some => format!("We find {some}."),
    };
    let (figure, caption) = figure;
    let shown = if figure.starts_with("standing") {
        "them among published comets"
    } else {
        "the data"
    };
    format!(
        r"{stamp}% A draft to write on: edit it freely. Compile: pdflatex draft; bibtex draft; pdflatex draft twice.
\documentclass[10pt,twocolumn]{{article}}
\usepackage[utf8]{{inputenc}}
\usepackage{{graphicx}}
\IfFileExists{{natbib.sty}}{{\usepackage{{natbib}}\bibliographystyle{{plainnat}}\setlength{{\bibsep}}{{0pt}}}}%
  {{\providecommand{{\citep}}[1]{{\cite{{#1}}}}\bibliographystyle{{plain}}}}
\setlength{{\textheight}}{{9.8in}}\setlength{{\topmargin}}{{-0.9in}}\setlength{{\floatsep}}{{6pt}}\setlength{{\textfloatsep}}{{6pt}}
\setlength{{\textwidth}}{{7.1in}}\setlength{{\oddsidemargin}}{{-0.3in}}\setlength{{\columnsep}}{{0.2in}}
\setlength{{\emergencystretch}}{{3em}}
\begin{{document}}
\twocolumn[{{\begin{{center}}{{\Large Abundance ratios of {names}}}\par\vspace{{4pt}}Your name\end{{center}}\vspace{{10pt}}}}]

\subsection*{{Results}}
{{\small {found} Table~\ref{{tab:{table}}} lists the ratios with their intervals, Figure~\ref{{fig:{figure}}} shows {shown}.}}

\begin{{figure}}
\centering
\includegraphics[width=\columnwidth,height=0.42\textheight,keepaspectratio]{{{figure}-narrow.pdf}}
\caption{{\footnotesize {caption}}}
\label{{fig:{figure}}}
\end{{figure}}

\begin{{table}}
\centering\footnotesize\setlength{{\tabcolsep}}{{3pt}}\renewcommand{{\arraystretch}}{{1.25}}
\caption{{\footnotesize {title}. {note}}}
\label{{tab:{table}}}
\input{{{table}.tex}}
\end{{table}}

\subsection*{{Methods}}
{{\footnotesize\input{{methods.tex}}}}

{{\scriptsize
\bibliography{{sources}}}}
\end{{document}}
",
        stamp = stamp.comment("%"),
        table = table.name,
        title = tex(&table.caption),
        note = tex(&table.note),
        names = tex(&names.join(", ")),
        caption = tex(caption),
    )
}
