//! Reading the plan's text, and pointing at its lines when something is wrong.

use super::schema::Plan;
use crate::ground::{Error, Result, did_you_mean};
use std::ops::Range;
use std::path::{Path, PathBuf};

/// A plan with the text it was read from.
pub struct PlanFile {
    /// The plan.
    pub plan: Plan,
    path: PathBuf,
    text: String,
}

/// Most bytes a plan may have.
const LARGEST_PLAN: u64 = 1_000_000;

/// Reads a plan file.
///
/// # Errors
/// A file that cannot be read or is not a plan: bad TOML, unknown keys, missing keys, wrong types,
/// each with file, line and the keys allowed there.
pub fn read_plan(path: &Path) -> Result<PlanFile> {
    let refuse = |cause: &std::io::Error| {
        Error::plan(format!("cannot read the plan {}: {cause}", path.display()))
            .remedy("give the path of a plan file; `comagauge measure --help` shows an example")
    };
    let about = std::fs::metadata(path).map_err(|e| refuse(&e))?;
    if about.is_dir() || about.len() > LARGEST_PLAN {
        return Err(
            Error::plan(format!("{} is not a plan file", path.display()))
                .remedy("give the path of a TOML file below 1 MB"),
        );
    }
    let bytes = std::fs::read(path).map_err(|e| refuse(&e))?;
    let text = String::from_utf8(bytes).map_err(|_| {
        Error::plan(format!("the plan {} is not UTF-8 text", path.display()))
            .remedy("give the path of a TOML file, not of a spectrum")
    })?;
    PlanFile::parse(path, text)
}

impl PlanFile {
    /// Parses a plan's text; `path` is for messages and for relative file names.
    ///
    /// # Errors
    /// As [`read_plan`].
    pub fn parse(path: &Path, text: String) -> Result<Self> {
        let text = text
            .strip_prefix('\u{feff}')
            .map_or(text.clone(), str::to_owned);
        if let Some(error) = blanks(path, &text) {
            return Err(error);
        }
        match toml::from_str::<Plan>(&text) {
            Ok(plan) => Ok(Self {
                plan,
                path: path.to_owned(),
                text,
            }),
            Err(cause) => Err(toml_error(path, &text, &cause)),
        }
    }

    /// The plan's path.
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// The folder that relative file names start from.
    pub fn folder(&self) -> &Path {
        self.path.parent().unwrap_or(Path::new("."))
    }

    /// Adds file, line and underlined text of a key, such as `["spectrum", "0", "file"]`, to an
    /// error; the nearest enclosing key that exists is shown.
    #[must_use]
    pub fn point(&self, error: Error, keys: &[&str]) -> Error {
        let error = error.in_file(&self.path);
        match self.locate(keys) {
            Some(span) => {
                let (line, excerpt) = underline(&self.text, span);
                error.at_line(line).showing(excerpt)
            }
            None => error,
        }
    }

    fn locate(&self, keys: &[&str]) -> Option<Range<usize>> {
        let root = toml::de::DeTable::parse(&self.text).ok()?;
        let mut table = root.get_ref();
        let mut found = None;
        let mut rest = keys;
        while let [key, tail @ ..] = rest {
            let (name, value) = table.iter().find(|(k, _)| k.get_ref() == key)?;
            let (mut value, mut tail) = (value, tail);
            found = Some(name.span().start..value.span().end.max(name.span().end));
            if let toml::de::DeValue::Array(items) = value.get_ref()
                && let [index, after @ ..] = tail
            {
                let item = items.get(index.parse::<usize>().ok()?)?;
                found = Some(item.span());
                (value, tail) = (item, after);
            }
            match value.get_ref() {
                toml::de::DeValue::Table(inner) if !tail.is_empty() => table = inner,
                _ => break,
            }
            rest = tail;
            let next_exists = rest
                .first()
                .is_some_and(|k| table.iter().any(|(n, _)| n.get_ref() == k));
            if !next_exists {
                break;
            }
        }
        found
    }
}

/// The refusal of a plan with blanks, values `"?"`, all of them listed.
fn blanks(path: &Path, text: &str) -> Option<Error> {
    let root = toml::de::DeTable::parse(text).ok()?;
    let mut found = Vec::new();
    for (key, value) in root.get_ref() {
        collect_blanks(key.get_ref().to_string(), value, &mut found);
    }
    found.sort_by_key(|(_, span): &(String, Range<usize>)| span.start);
    let (_, first) = found.first()?;
    let (line, excerpt) = underline(text, first.clone());
    let list: Vec<String> = found
        .iter()
        .map(|(name, span)| format!("{name} (line {})", underline(text, span.clone()).0))
        .collect();
    let noun = if list.len() == 1 { "blank" } else { "blanks" };
    Some(
        Error::plan(format!(
            "the plan has {} {noun} to fill in: {}",
            list.len(),
            list.join(", ")
        ))
        .in_file(path)
        .at_line(line)
        .showing(excerpt)
        .remedy("replace each \"?\" by its value, or remove keys that another one replaces"),
    )
}

fn collect_blanks(
    name: String,
    value: &toml::Spanned<toml::de::DeValue<'_>>,
    found: &mut Vec<(String, Range<usize>)>,
) {
    match value.get_ref() {
        toml::de::DeValue::String(text) if text.trim() == "?" => found.push((name, value.span())),
        toml::de::DeValue::Array(items) => {
            for (i, item) in items.iter().enumerate() {
                collect_blanks(format!("{name}[{i}]"), item, found);
            }
        }
        toml::de::DeValue::Table(inner) => {
            for (key, value) in inner {
                collect_blanks(format!("{name}.{}", key.get_ref()), value, found);
            }
        }
        _ => {}
    }
}

/// One-based line of a span's start, and that line with the span underlined.
fn underline(text: &str, span: Range<usize>) -> (usize, String) {
    let start = span.start.min(text.len());
    let line_start = text[..start].rfind('\n').map_or(0, |i| i + 1);
    let line_end = text[start..].find('\n').map_or(text.len(), |i| start + i);
    let line = text[line_start..line_end].trim_end_matches('\r');
    let number = text[..start].matches('\n').count() + 1;
    let before = text[line_start..start].chars().count();
    let end = span
        .end
        .clamp(start, line_start + line.len().max(start - line_start));
    let length = text[start..end.max(start)]
        .trim_end()
        .chars()
        .count()
        .max(1);
    (
        number,
        format!("{line}\n{}{}", " ".repeat(before), "^".repeat(length)),
    )
}

fn toml_error(path: &Path, text: &str, cause: &toml::de::Error) -> Error {
    let message = cause.message().trim().to_owned();
    let (summary, remedy) = explain(&message);
    let mut error = Error::plan(summary).in_file(path);
    if let Some(span) = cause.span() {
        let (line, excerpt) = underline(text, span);
        error = error.at_line(line).showing(excerpt);
    }
    match remedy {
        Some(remedy) => error.remedy(remedy),
        None => error,
    }
}

/// Rewords the parser's message for an observer and finds the nearest allowed key.
fn explain(message: &str) -> (String, Option<String>) {
    let quoted: Vec<&str> = message.split('`').skip(1).step_by(2).collect();
    if message.starts_with("unknown field") {
        let (typed, known) = quoted
            .split_first()
            .expect("invariant: the message quotes the key");
        let mut remedy = format!("allowed here: {}", known.join(", "));
        if let Some(near) = did_you_mean(typed, known.iter().copied()) {
            remedy = format!("did you mean {near}? {remedy}");
        }
        return (format!("the key {typed} is not known here"), Some(remedy));
    }
    if message.starts_with("missing field")
        && let Some(name) = quoted.first()
    {
        let remedy = match *name {
            "spectrum" => {
                "add a [[spectrum]] table with file and, for text, wavelength_unit, medium and flux_unit"
            }
            "comet" => {
                "add a [comet] table with label and the geometry: heliocentric_au, heliocentric_km_s, observer_au and observer_km_s, or a date with [comet.orbit]"
            }
            "aperture" => {
                "add an [aperture] table with radius_arcsec, or width_arcsec and length_arcsec"
            }
            "measure" => "add a [measure] table with bands = [\"...\"]",
            _ => "add it",
        };
        return (
            format!("the key {name} is missing"),
            Some(remedy.to_owned()),
        );
    }
    let hint = message
        .contains("invalid type")
        .then(|| "give the key a value of that type".to_owned());
    (plain_types(message), hint)
}

/// Names of types as a user knows them.
fn plain_types(message: &str) -> String {
    [
        ("expected f64", "expected a number"),
        ("expected usize", "expected a whole number, not negative"),
        ("expected u64", "expected a whole number, not negative"),
        ("expected a sequence", "expected a list [...]"),
        (
            "expected an array of length 2",
            "expected two numbers [low, high]",
        ),
        (
            "data did not match any variant of untagged enum ColumnPlan",
            "a column is given by its number or its name",
        ),
        (
            "data did not match any variant of untagged enum DatePlan",
            "a date is text such as \"2031-04-17T05:12\" or a Julian date",
        ),
        ("floating point", "number"),
    ]
    .iter()
    .fold(message.to_owned(), |text, (from, to)| {
        text.replace(from, to)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn error(text: &str) -> String {
        match PlanFile::parse(Path::new("p.toml"), text.to_owned()) {
            Err(e) => e.to_string(),
            Ok(_) => panic!("accepted: {text}"),
        }
    }

    #[test]
    fn an_unknown_key_is_named_with_its_line_and_a_guess() {
        let text = error("[comet]\nlabel = \"x\"\nheliocentric_a = 1.0\n");
        assert!(text.contains("heliocentric_a is not known"), "{text}");
        assert!(text.contains("p.toml:3"), "{text}");
        assert!(text.contains("did you mean heliocentric_au"), "{text}");
        assert!(text.contains("^^^^"), "{text}");
    }

    #[test]
    fn wrong_types_and_bad_syntax_have_lines() {
        let text = error("[comet]\nlabel = 5\n");
        assert!(
            text.contains("p.toml:2") && text.contains("string"),
            "{text}"
        );
        let text = error("[comet\n");
        assert!(text.contains("p.toml:1"), "{text}");
    }

    #[test]
    fn a_missing_table_says_what_to_add() {
        assert!(error("").contains("[comet] table"), "{}", error(""));
    }
}
