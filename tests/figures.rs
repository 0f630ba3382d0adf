//! The figures hold what they were given, stay inside their page and never let labels touch.

#[path = "figures/cases.rs"]
mod cases;
#[path = "figures/svg.rs"]
mod svg;

use cases::{Case, all_cases};
use comagauge::figures::*;
use svg::{Page, TextBox};

fn pages() -> Vec<(String, Vec<String>, Page)> {
    let both = |c: &Case| {
        let name = c.name;
        [Width::Single, Width::Double].map(|w| {
            let text = (c.draw)(w).unwrap_or_else(|e| panic!("{name}: {e}"));
            (
                format!("{name} {w:?}"),
                c.expected.clone(),
                Page::parse(&text),
            )
        })
    };
    all_cases().iter().flat_map(both).collect()
}

#[test]
fn every_figure_is_well_formed_and_has_its_print_width() {
    for (name, _, page) in pages() {
        let width_in = if name.ends_with("Single") { 3.5 } else { 7.1 };
        assert_eq!(page.width_in, width_in, "{name}");
        let ratio = page.width_in / page.height_in / (page.width / page.height);
        assert!((ratio - 1.0).abs() < 1e-3, "{name}: distorted by {ratio}");
    }
}

#[test]
fn all_labels_are_there() {
    for (name, expected, page) in pages() {
        for label in &expected {
            let found = page.texts.iter().any(|t| t.text.contains(label.as_str()));
            assert!(found, "{name}: {label:?} is missing");
        }
    }
}

#[test]
fn nothing_lies_outside_the_page() {
    for (name, _, page) in pages() {
        for &(x, y) in &page.points {
            let inside = (0.0..=page.width).contains(&x) && (0.0..=page.height).contains(&y);
            assert!(inside, "{name}: point {x},{y}");
        }
        for t in &page.texts {
            let (l, u, r, b) = t.corners();
            let inside = l >= 0.0 && u >= 0.0 && r <= page.width && b <= page.height;
            assert!(
                inside,
                "{name}: {:?} reaches {l:.0},{u:.0},{r:.0},{b:.0}",
                t.text
            );
        }
    }
}

#[test]
fn no_two_labels_overlap() {
    for (name, _, page) in pages() {
        for (i, a) in page.texts.iter().enumerate() {
            for b in &page.texts[..i] {
                assert!(!a.overlaps(b), "{name}: {:?} on {:?}", a.text, b.text);
            }
        }
    }
}

#[test]
fn type_is_readable_in_print() {
    for (name, _, page) in pages() {
        let units_per_pt = page.width / page.width_in / 72.0;
        for t in &page.texts {
            let size = t.size / units_per_pt;
            assert!(
                (5.9..=8.1).contains(&size),
                "{name}: {:?} at {size} pt",
                t.text
            );
        }
    }
}

#[test]
fn the_same_input_gives_the_same_bytes() {
    for (a, b) in all_cases().iter().zip(all_cases()) {
        let (first, again) = ((a.draw)(Width::Double), (b.draw)(Width::Double));
        assert_eq!(first.expect(a.name), again.expect(b.name));
    }
}

#[test]
fn the_checks_above_can_fail() {
    let text = |x: f64, words: &str| TextBox::new(words, (x, 100.0), 20.0);
    assert!(text(0.0, "CO₂").overlaps(&text(10.0, "H₂O")));
    assert!(!text(0.0, "CO₂").overlaps(&text(100.0, "H₂O")));
    for broken in [
        "<svg><g></svg>",
        "<svg a=\"1></svg>",
        "<svg>a & b</svg>",
        "<svg/><svg/>",
    ] {
        let parsed = std::panic::catch_unwind(|| Page::parse(broken));
        assert!(parsed.is_err(), "{broken}");
    }
}

/// Writes every case to the folder named in FIGURES_OUT, for looking at them.
#[test]
fn writes_the_cases_out_when_asked() {
    let Some(folder) = std::env::var_os("FIGURES_OUT") else {
        return;
    };
    for c in all_cases() {
        for (w, tag) in [(Width::Single, "1"), (Width::Double, "2")] {
            let path = std::path::Path::new(&folder).join(format!("{}-{tag}.svg", c.name));
            std::fs::write(path, (c.draw)(w).expect(c.name)).expect("writable folder");
        }
    }
}
