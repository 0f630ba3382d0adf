//! The figures hold what they were given, stay inside their page and never let labels touch.

#[path = "figures/cases.rs"]
mod cases;
#[path = "figures/svg.rs"]
mod svg;

use cases::{Case, all_cases};
use comagauge::figures::*;
use proptest::prelude::*;
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

/// The page position of a tick label; the first one with this text.
fn tick(page: &Page, label: &str) -> (f64, f64) {
    let found = page.texts.iter().find(|t| t.text == label);
    let all = || page.texts.iter().map(|t| &t.text).collect::<Vec<_>>();
    found
        .unwrap_or_else(|| panic!("no tick {label} in {:?}", all()))
        .middle()
}

/// Whether a place is within a fifth of a point of another, in drawing units of 1/20 pt.
fn near(a: f64, b: f64) -> bool {
    (a - b).abs() < 4.0
}

#[test]
fn samples_stand_where_the_ticks_say() {
    let panel = FitPanel {
        x: vec![1.0, 2.0, 3.0],
        y: vec![2e-15, 4e-15, 8e-15],
        sigma: vec![1e-15; 3],
        used: vec![true; 3],
        model: vec![2e-15, 2e-15, 8e-15],
        grid_x: vec![1.0, 2.0, 3.0],
        continuum: vec![1e-15; 3],
        total: vec![1e-15, 3e-15, 1e-15],
        bands: vec![FitBand {
            label: "CO₂".into(),
            y: vec![0.0, 2e-15, 0.0],
        }],
        ..FitPanel::default()
    };
    let svg = fit_svg(&cases::fit_figure(vec![panel]), Width::Single).expect("a figure");
    let page = Page::parse(&svg);
    // The first disc belongs to the key, then come three samples and three residuals.
    assert_eq!(page.discs.len(), 7);
    for (k, (x, y)) in [("1.0", "2"), ("2.0", "4"), ("3.0", "8")]
        .into_iter()
        .enumerate()
    {
        let (px, py) = page.discs[1 + k];
        assert!(
            near(px, tick(&page, x).0) && near(py, tick(&page, y).1),
            "{x}, {y}"
        );
    }
    let residual = page.discs[5];
    let zero = tick(&page, "0").1;
    let per_sigma = (tick(&page, "−4").1 - zero) / 4.0;
    assert!(near(residual.1, zero - 2.0 * per_sigma), "a residual of +2");
}

#[test]
fn curves_and_single_samples_stand_where_the_ticks_say() {
    let mut figure = cases::curves(1);
    figure.curves = vec![Curve {
        label: "level".into(),
        x: vec![-50.0, 50.0],
        y: vec![3.0, 5.0],
    }];
    for (scale, width) in [(Scale::Linear, Width::Single), (Scale::Log, Width::Double)] {
        figure.y_scale = scale;
        let page = Page::parse(&range_svg(&figure, width).expect("a figure"));
        let y = |v: f64| {
            let label = page.texts.iter().map(|t| (t, t.text.parse::<f64>()));
            let mut near_v = label.filter(|(_, n)| n.as_ref().is_ok_and(|n| *n == v));
            near_v.next().expect("a tick at the value").0.middle().1
        };
        let drawn = page.chains.iter().any(|c| {
            let (from, to) = (c[0], c[c.len() - 1]);
            near(from.1, y(3.0)) && near(to.1, y(5.0)) && to.0 - from.0 > 1000.0
        });
        assert!(drawn, "{scale:?}: no line from 3 to 5");
    }
    let mut one = cases::quicklook(0, 1);
    (one.x, one.y) = (vec![5000.0], vec![2e-14]);
    one.positions = vec![Position {
        x: 5000.0,
        label: "CN".into(),
    }];
    let page = Page::parse(&quicklook_svg(&one, Width::Double).expect("a figure"));
    let (px, py) = page.discs[0];
    assert!(near(px, tick(&page, "5000").0) && near(py, tick(&page, "2.00").1));
}

#[test]
fn this_comet_stands_at_its_ratio() {
    let mut row = cases::row("CO₂/H₂O", 60, 20);
    row.this = ThisComet::UpperLimit(0.1);
    let page =
        Page::parse(&standing_svg(&cases::standing(vec![row]), Width::Single).expect("a figure"));
    let x = tick(&page, "0.1").0;
    let bar = |c: &&Vec<(f64, f64)>| c.len() == 2 && near(c[0].0, x) && near(c[1].0, x);
    let longest = page
        .chains
        .iter()
        .filter(bar)
        .map(|c| (c[0].1 - c[1].1).abs());
    assert!(longest.fold(0.0, f64::max) > 100.0, "a bar at 0.1");
    let arrow = |c: &Vec<(f64, f64)>| near(c[0].0, x) && c[0].0 - c[c.len() - 1].0 > 200.0;
    assert!(page.chains.iter().any(arrow), "an arrow to smaller ratios");
}

#[test]
fn what_cannot_be_drawn_is_refused_with_its_name() {
    let refused = |r: comagauge::ground::Result<String>, words: &str| {
        let e = r.expect_err(words);
        assert!(e.to_string().contains(words), "{e}");
        assert_eq!(e.kind(), comagauge::ground::ErrorKind::Compute);
    };
    let w = Width::Single;
    refused(fit_svg(&FitFigure::default(), w), "no fitted window");
    let mut short = cases::fit_figure(vec![FitPanel::default(), FitPanel::default()]);
    short.panels[0].x = vec![1.0];
    refused(fit_svg(&short, w), "window 1: 0 values for 1 samples");
    short.panels.remove(0);
    refused(fit_svg(&short, w), "no finite value");
    refused(range_svg(&CurveFigure::default(), w), "no curve");
    let mut log = cases::curves(2);
    log.x_scale = Scale::Log;
    refused(range_svg(&log, w), "logarithmic");
    log.curves[1].y.pop();
    refused(range_svg(&log, w), "200 abscissae but 199 ordinates");
    let mut quick = cases::quicklook(3, 5);
    quick.y = vec![f64::NAN; 5];
    refused(quicklook_svg(&quick, w), "no finite value");
    refused(standing_svg(&StandingFigure::default(), w), "no ratio");
    let mut row = cases::row("CO/H₂O", 3, 0);
    row.comets[1].value = ComparisonValue::UpperLimit(0.0);
    refused(
        standing_svg(&cases::standing(vec![row.clone()]), w),
        "CO/H₂O",
    );
    row.comets[1].class = 9;
    refused(standing_svg(&cases::standing(vec![row]), w), "class 9 of 4");
}

/// Numbers that trip careless code.
fn odd() -> impl Strategy<Value = f64> {
    prop_oneof![
        -10.0..10.0,
        Just(0.0),
        Just(5.0),
        Just(f64::NAN),
        Just(f64::INFINITY),
        Just(-1e300),
        Just(1e300),
        Just(1e-310),
        Just(1e15 + 1.0),
    ]
}

fn check_if_drawn(svg: comagauge::ground::Result<String>) {
    let Ok(svg) = svg else { return };
    let page = Page::parse(&svg);
    for &(x, y) in &page.points {
        let inside = (0.0..=page.width).contains(&x) && (0.0..=page.height).contains(&y);
        assert!(inside, "point {x},{y}");
    }
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(96))]

    #[test]
    fn odd_numbers_are_drawn_inside_the_page_or_refused(
        v in prop::collection::vec(odd(), 3..24),
        label in ".{0,12}",
        wide in any::<bool>(),
        log in any::<bool>(),
    ) {
        let width = if wide { Width::Double } else { Width::Single };
        let n = v.len() / 3;
        let (x, y, s) = (v[..n].to_vec(), v[n..2 * n].to_vec(), v[2 * n..3 * n].to_vec());
        let panel = FitPanel {
            x: x.clone(),
            y: y.clone(),
            sigma: s.clone(),
            used: s.iter().map(|s| *s > 0.0).collect(),
            model: x.clone(),
            grid_x: y.clone(),
            continuum: s.clone(),
            total: x.clone(),
            bands: vec![FitBand { label: label.clone(), y: s.clone() }],
            left_out: vec![(x[0], y[0])],
            caption: label.clone(),
        };
        check_if_drawn(fit_svg(&cases::fit_figure(vec![panel]), width));
        let scale = if log { Scale::Log } else { Scale::Linear };
        check_if_drawn(range_svg(&CurveFigure {
            curves: vec![Curve { label: label.clone(), x: x.clone(), y: y.clone() }],
            marks: vec![VerticalMark { x: s[0], label: label.clone() }],
            x_ticks: vec![Tick { x: s[0], label: label.clone() }],
            x_scale: scale,
            y_scale: scale,
            ..CurveFigure::default()
        }, width));
        check_if_drawn(quicklook_svg(&QuicklookFigure {
            title: label.clone(),
            positions: vec![Position { x: s[0], label: label.clone() }],
            x: x.clone(),
            y: y.clone(),
            ..QuicklookFigure::default()
        }, width));
        let bounds = Bounds { low: y[0], high: s[0] };
        let comet = |&value: &f64| ComparisonComet {
            name: label.clone(),
            class: 0,
            value: ComparisonValue::Measured { value, bar: bounds },
        };
        check_if_drawn(standing_svg(&cases::standing(vec![StandingRow {
            ratio: label.clone(),
            comets: x.iter().filter(|x| **x > 0.0).map(comet).collect(),
            cumulative: x.iter().copied().zip(y.iter().copied()).collect(),
            this: ThisComet::Measured { median: 1.0, inner: bounds, outer: bounds },
            count_text: label.clone(),
            place_text: label.clone(),
        }]), width));
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
