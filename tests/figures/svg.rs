//! A small reader for the figures: strict on nesting, quoting and escapes, and collecting geometry.

use std::collections::HashMap;
use std::sync::OnceLock;

/// A figure as read back.
pub struct Page {
    pub width: f64,
    pub height: f64,
    pub width_in: f64,
    pub height_in: f64,
    pub points: Vec<(f64, f64)>,
    pub texts: Vec<TextBox>,
    /// Centres of filled circles.
    pub discs: Vec<(f64, f64)>,
    /// Open chains of lines.
    pub chains: Vec<Vec<(f64, f64)>>,
}

/// A piece of text with its place.
#[derive(Clone, Debug)]
pub struct TextBox {
    pub text: String,
    pub size: f64,
    x: f64,
    y: f64,
    anchor: String,
    upright: bool,
    bold: bool,
}

type Attributes = HashMap<String, String>;

impl Page {
    /// Panics with a reason when the document is not well formed.
    pub fn parse(document: &str) -> Self {
        let mut open: Vec<(String, Attributes)> = Vec::new();
        let (mut page, mut roots, mut rest) = (None, 0, document.trim());
        while !rest.is_empty() {
            let Some(start) = rest.find('<') else {
                panic!("text after the end: {rest:?}");
            };
            let words = unescape(&rest[..start]);
            let end = rest.find('>').expect("an open tag");
            let tag = &rest[start + 1..end];
            rest = &rest[end + 1..];
            if let (Some((name, attributes)), Some(page)) = (open.last(), page.as_mut()) {
                take_text(page, name, attributes, words.trim());
            }
            if let Some(name) = tag.strip_prefix('/') {
                let (opened, _) = open.pop().expect("an opened element");
                assert_eq!(opened, name.trim());
                continue;
            }
            let alone = tag.ends_with('/');
            let (name, attributes) = attributes(tag.trim_end_matches('/'));
            if open.is_empty() {
                roots += 1;
                assert!(roots == 1 && name == "svg", "one root element");
                page = Some(root(&attributes));
            }
            let page = page.as_mut().expect("a root element");
            let points = geometry(&name, &attributes);
            if name == "circle" && attributes["fill"] != "none" {
                let centre = (points[0].0 + points[1].0, points[0].1 + points[1].1);
                page.discs.push((0.5 * centre.0, 0.5 * centre.1));
            }
            page.points.extend(&points);
            if name == "polyline" {
                page.chains.push(points);
            }
            if !alone {
                open.push((name, attributes));
            }
        }
        assert!(open.is_empty(), "unclosed {open:?}");
        page.expect("a root element")
    }
}

fn root(a: &Attributes) -> Page {
    let inches = |k: &str| -> f64 { a[k].strip_suffix("in").expect("inches").parse().expect(k) };
    let view: Vec<f64> = a["viewBox"]
        .split(' ')
        .map(|v| v.parse().expect("number"))
        .collect();
    Page {
        width: view[2],
        height: view[3],
        width_in: inches("width"),
        height_in: inches("height"),
        points: Vec::new(),
        texts: Vec::new(),
        discs: Vec::new(),
        chains: Vec::new(),
    }
}

fn attributes(tag: &str) -> (String, Attributes) {
    let (name, mut rest) = tag.split_once(' ').unwrap_or((tag, ""));
    let mut out = Attributes::new();
    while let Some((key, tail)) = rest.trim_start().split_once('=') {
        let tail = tail.strip_prefix('"').expect("a quote");
        let (value, tail) = tail.split_once('"').expect("a closing quote");
        assert!(
            out.insert(key.to_owned(), unescape(value)).is_none(),
            "{key} twice"
        );
        rest = tail;
    }
    assert!(rest.trim().is_empty(), "left over in tag: {rest:?}");
    (name.to_owned(), out)
}

fn unescape(text: &str) -> String {
    let mut out = String::new();
    let mut rest = text;
    while let Some(at) = rest.find('&') {
        out.push_str(&rest[..at]);
        let (name, tail) = rest[at + 1..].split_once(';').expect("an entity");
        out.push(match name {
            "lt" => '<',
            "gt" => '>',
            "amp" => '&',
            "quot" => '"',
            "apos" => '\'',
            other => panic!("unknown entity {other:?}"),
        });
        rest = tail;
    }
    out.push_str(rest);
    assert!(
        !out.chars().any(|c| c.is_control() && c != '\n'),
        "control in {out:?}"
    );
    out
}

fn geometry(name: &str, a: &Attributes) -> Vec<(f64, f64)> {
    let n = |k: &str| -> f64 { a[k].parse().expect(k) };
    match name {
        "polyline" | "polygon" => a["points"].split_whitespace().map(pair).collect(),
        "rect" => vec![
            (n("x"), n("y")),
            (n("x") + n("width"), n("y") + n("height")),
        ],
        "circle" => vec![
            (n("cx") - n("r"), n("cy") - n("r")),
            (n("cx") + n("r"), n("cy") + n("r")),
        ],
        "svg" | "text" => Vec::new(),
        other => panic!("unexpected element {other}"),
    }
}

fn pair(text: &str) -> (f64, f64) {
    let (x, y) = text.split_once(',').expect("a pair");
    (x.parse().expect("number"), y.parse().expect("number"))
}

fn take_text(page: &mut Page, name: &str, a: &Attributes, words: &str) {
    if name != "text" {
        assert!(words.is_empty(), "stray text {words:?}");
        return;
    }
    let n = |k: &str| -> f64 { a[k].parse().expect(k) };
    assert!(a["font-family"].starts_with("DejaVu Sans"));
    assert_eq!(a["dy"], "0.76em");
    let upright = a
        .get("transform")
        .is_some_and(|t| t.starts_with("rotate(270"));
    let down = 0.76 * n("font-size");
    let (dx, dy) = if upright { (down, 0.0) } else { (0.0, down) };
    page.texts.push(TextBox {
        text: words.to_owned(),
        size: n("font-size"),
        x: n("x") + dx,
        y: n("y") + dy,
        anchor: a["text-anchor"].clone(),
        upright,
        bold: a.contains_key("font-weight"),
    });
}

impl TextBox {
    /// Level text starting at a point of its baseline.
    pub fn new(text: &str, (x, y): (f64, f64), size: f64) -> Self {
        Self {
            text: text.to_owned(),
            size,
            x,
            y,
            anchor: "start".to_owned(),
            upright: false,
            bold: false,
        }
    }

    /// Left, upper, right, lower edge; heights of capitals above and descenders below the baseline.
    pub fn corners(&self) -> (f64, f64, f64, f64) {
        let length = width_em(&self.text, self.bold) * self.size;
        let before = match self.anchor.as_str() {
            "start" => 0.0,
            "middle" => 0.5 * length,
            "end" => length,
            other => panic!("anchor {other}"),
        };
        let (up, down) = (0.76 * self.size, 0.2 * self.size);
        if self.upright {
            let (lower, upper) = (self.y + before, self.y + before - length);
            (self.x - up, upper, self.x + down, lower)
        } else {
            let left = self.x - before;
            (left, self.y - up, left + length, self.y + down)
        }
    }

    /// Middle of the capitals of level text.
    pub fn middle(&self) -> (f64, f64) {
        let (left, _, right, _) = self.corners();
        (0.5 * (left + right), self.y - 0.365 * self.size)
    }

    pub fn overlaps(&self, other: &Self) -> bool {
        let (a, b) = (self.corners(), other.corners());
        a.0 < b.2 && b.0 < a.2 && a.1 < b.3 && b.1 < a.3
    }
}

/// Advance widths as kept with the figures, see the head of that file.
fn width_em(text: &str, bold: bool) -> f64 {
    static TABLE: OnceLock<HashMap<char, [f64; 2]>> = OnceLock::new();
    let table = TABLE.get_or_init(|| {
        let rows = include_str!("../../src/figures/font/dejavu-sans-advances.csv");
        let row = |line: &str| {
            let cells: Vec<&str> = line.split(',').collect();
            let code = u32::from_str_radix(cells[0], 16).expect("hexadecimal");
            let em = |k: usize| cells[k].parse::<f64>().expect("number") / 2048.0;
            (char::from_u32(code).expect("character"), [em(1), em(2)])
        };
        rows.lines().skip(2).map(row).collect()
    });
    let of = |c: char| table.get(&c).map_or(1.0, |w| w[usize::from(bold)]);
    text.chars().map(of).sum()
}
