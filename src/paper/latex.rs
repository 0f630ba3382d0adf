//! Plain text as LaTeX: nothing in a label can break the document or run a command.

/// Begin and end of a citation in running text; between them keys joined by commas.
pub(super) const CITE: (char, char) = ('\u{E000}', '\u{E001}');

/// Text for the body of a document. Raised and lowered digits become mathematics; signs that the
/// basic fonts lack become `?`.
pub(super) fn tex(text: &str) -> String {
    let mut out = String::with_capacity(text.len() + 16);
    let mut in_math = false;
    let mut rest = text.chars().peekable();
    while let Some(c) = rest.next() {
        let (math, piece) = if let Some((mark, first)) = script(c) {
            let mut run = String::from(first);
            let same = |n: &char| script(*n).filter(|s| s.0 == mark);
            while let Some((_, d)) = rest.peek().and_then(same) {
                run.push(d);
                rest.next();
            }
            (true, format!("{mark}{{{run}}}"))
        } else {
            sign(c)
        };
        // Neighbouring pieces of mathematics share their dollars.
        if math != in_math {
            out.push('$');
            in_math = math;
        }
        out.push_str(&piece);
    }
    if in_math {
        out.push('$');
    }
    out
}

/// The digit of a raised or lowered sign and which of both it is.
fn script(c: char) -> Option<(char, char)> {
    let raised = match c {
        '⁻' => Some('-'),
        '⁺' => Some('+'),
        '¹' => Some('1'),
        '²' => Some('2'),
        '³' => Some('3'),
        '⁰' | '⁴'..='⁹' => char::from_digit(c as u32 - 0x2070, 10),
        _ => None,
    };
    let lowered = match c {
        '₀'..='₉' => char::from_digit(c as u32 - 0x2080, 10),
        _ => None,
    };
    raised.map(|d| ('^', d)).or(lowered.map(|d| ('_', d)))
}

/// A sign as LaTeX, and whether it is mathematics.
fn sign(c: char) -> (bool, String) {
    let words = match c {
        '\\' => r"\textbackslash{}",
        '{' => r"\{",
        '}' => r"\}",
        '$' => r"\$",
        '&' => r"\&",
        '#' => r"\#",
        '%' => r"\%",
        '_' => r"\_",
        '^' => r"\textasciicircum{}",
        '~' => r"\textasciitilde{}",
        '"' | '”' => "''",
        '[' => "{[}",
        ']' => "{]}",
        '\u{A0}' => "~",
        '–' => "--",
        '—' => "---",
        '“' => "``",
        '‘' => "`",
        '’' => "'",
        '…' => r"\ldots{}",
        'Å' | '\u{212B}' => r"\AA{}",
        _ => return symbol(c),
    };
    (false, words.to_owned())
}

fn symbol(c: char) -> (bool, String) {
    let symbol = match c {
        '<' => "<",
        '>' => ">",
        '|' => "|",
        '−' => "-",
        '±' => r"\pm ",
        '×' => r"\times ",
        '·' => r"\cdot ",
        '≤' => r"\le ",
        '≥' => r"\ge ",
        '∝' => r"\propto ",
        '√' => r"\surd ",
        '°' => r"{}^{\circ}",
        '″' => "{}''",
        '′' => "{}'",
        'µ' | 'μ' => r"\mu ",
        'Δ' => r"\Delta ",
        'α' => r"\alpha ",
        'β' => r"\beta ",
        'γ' => r"\gamma ",
        'λ' => r"\lambda ",
        'ν' => r"\nu ",
        'ρ' => r"\rho ",
        'σ' => r"\sigma ",
        'χ' => r"\chi ",
        'τ' => r"\tau ",
        'ṙ' => r"\dot{r}",
        _ => return (false, plain(c).to_string()),
    };
    (true, symbol.to_owned())
}

/// Letters that the basic fonts have or compose stay, blanks of all kinds become blanks, all else a
/// question mark.
fn plain(c: char) -> char {
    const EASTERN: &str = "ĆćČčĎďĚěĞğıŁłŃńŇňŐőŒœŘřŚśŞşŠšŤťŮůŰűŹźŻżŽž";
    match c {
        ' '..='~' => c,
        'Ð' | 'ð' | 'Þ' | 'þ' | '×' | '÷' => '?',
        'À'..='ÿ' => c,
        _ if EASTERN.contains(c) => c,
        _ if c.is_whitespace() || c.is_control() => ' ',
        _ => '?',
    }
}

/// Running text with citations as `\citep{…}`.
pub(super) fn tex_with_citations(text: &str) -> String {
    cited(text, tex, |keys| format!("\\citep{{{keys}}}"))
}

/// Splits text at its citations and renders both kinds of pieces.
pub(super) fn cited(
    text: &str,
    plain: impl Fn(&str) -> String,
    cite: impl Fn(&str) -> String,
) -> String {
    let mut out = String::new();
    let mut rest = text;
    while let Some((before, after)) = rest.split_once(CITE.0) {
        let (keys, behind) = after.split_once(CITE.1).unwrap_or((after, ""));
        out.push_str(&plain(before));
        out.push_str(&cite(keys));
        rest = behind;
    }
    out.push_str(&plain(rest));
    out
}

/// A label that may stand in text with citations: private signs go.
pub(super) fn harmless(text: &str) -> String {
    text.chars()
        .filter(|c| ![CITE.0, CITE.1].contains(c))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hostile_text_is_inert() {
        assert_eq!(
            tex(r"\input{/etc/passwd} 50% of $x_1$ & #1 ~^"),
            r"\textbackslash{}input\{/etc/passwd\} 50\% of \$x\_1\$ \& \#1 \textasciitilde{}\textasciicircum{}"
        );
        assert_eq!(tex("彗星\u{0}\n☄"), "??  ?");
    }

    #[test]
    fn formulas_and_units() {
        assert_eq!(tex("CO₂/H₂O"), "CO$_{2}$/H$_{2}$O");
        assert_eq!(tex("3.4 × 10²⁷ s⁻¹"), r"3.4 $\times $ 10$^{27}$ s$^{-1}$");
        assert_eq!(tex("µm Å"), r"$\mu $m \AA{}");
        // A dollar of the text and those of mathematics do not mix.
        assert_eq!(tex("$<$χ²"), r"\$$<$\$$\chi ^{2}$");
    }

    #[test]
    fn citations_pass_through() {
        let text = format!("values{}a1,b_2{} here", CITE.0, CITE.1);
        assert_eq!(tex_with_citations(&text), r"values\citep{a1,b_2} here");
        assert!(!harmless(&text).contains(CITE.0));
    }
}
