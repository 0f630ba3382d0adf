//! Ordinary and hard inputs for every figure. All values are invented.

use comagauge::figures::*;
use comagauge::ground::Result;

/// A named figure with texts that must appear in it.
pub struct Case {
    pub name: &'static str,
    pub expected: Vec<String>,
    pub draw: Box<dyn Fn(Width) -> Result<String>>,
}

fn case(
    name: &'static str,
    expected: &[&str],
    draw: impl Fn(Width) -> Result<String> + 'static,
) -> Case {
    Case {
        name,
        expected: expected.iter().map(|s| (*s).to_owned()).collect(),
        draw: Box::new(draw),
    }
}

/// Repeatable noise of roughly unit variance.
pub fn noise(i: usize) -> f64 {
    let part = |k: usize| {
        let z = (i as u64 * 16 + k as u64 + 1).wrapping_mul(0x9E37_79B9_7F4A_7C15);
        let z = (z ^ (z >> 31)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        ((z ^ (z >> 29)) >> 11) as f64 / (1u64 << 53) as f64 - 0.5
    };
    (0..12).map(part).sum()
}

fn gauss(x: f64, centre: f64, sigma: f64) -> f64 {
    (-0.5 * ((x - centre) / sigma).powi(2)).exp()
}

/// A window with bands (label, centre, sigma, peak) on a sloping continuum.
pub fn window(
    (lo, hi): (f64, f64),
    samples: usize,
    bands: &[(&str, f64, f64, f64)],
    (level, error): (f64, f64),
) -> FitPanel {
    let at = |i: usize, n: usize| lo + (hi - lo) * (i as f64 + 0.5) / n as f64;
    let continuum = |x: f64| level * (1.0 + 0.2 * (x - lo) / (hi - lo));
    let total = |x: f64| {
        let emission = bands.iter().map(|b| b.3 * gauss(x, b.1, b.2));
        continuum(x) + emission.sum::<f64>()
    };
    let x: Vec<f64> = (0..samples).map(|i| at(i, samples)).collect();
    let grid_x: Vec<f64> = (0..400).map(|i| at(i, 400)).collect();
    FitPanel {
        caption: format!("χ²/ν = 1.0{}", samples % 10),
        y: x.iter()
            .enumerate()
            .map(|(i, &x)| total(x) + error * noise(i))
            .collect(),
        sigma: vec![error; samples],
        used: vec![true; samples],
        model: x.iter().map(|&x| total(x)).collect(),
        continuum: grid_x.iter().map(|&x| continuum(x)).collect(),
        total: grid_x.iter().map(|&x| total(x)).collect(),
        bands: bands
            .iter()
            .map(|b| FitBand {
                label: b.0.to_owned(),
                y: grid_x.iter().map(|&x| b.3 * gauss(x, b.1, b.2)).collect(),
            })
            .collect(),
        x,
        grid_x,
        left_out: Vec::new(),
    }
}

pub fn fit_figure(panels: Vec<FitPanel>) -> FitFigure {
    FitFigure {
        title: "Comet X/2031 D1 (invented), 2031 March 14".to_owned(),
        x_label: "Wavelength (µm)".to_owned(),
        y_quantity: "Flux density".to_owned(),
        y_unit: "W m⁻² µm⁻¹".to_owned(),
        panels,
    }
}

fn one_window() -> FitPanel {
    let bands = [("CO₂", 4.26, 0.02, 6e-15), ("¹³CO₂", 4.38, 0.012, 4e-16)];
    let mut w = window((4.1, 4.5), 120, &bands, (1.2e-15, 1.5e-16));
    for i in 100..110 {
        w.used[i] = false;
        w.y[i] += 3e-15;
    }
    w.y[20] = 4e-14;
    w.used[20] = false;
    w.y[30] = f64::NAN;
    w.left_out = vec![(4.43, 4.47)];
    w
}

fn six_windows() -> Vec<FitPanel> {
    vec![
        window(
            (2.5, 2.9),
            90,
            &[("H₂O", 2.66, 0.04, 8e-15)],
            (1e-15, 2e-16),
        ),
        window(
            (3.2, 3.6),
            60,
            &[
                ("CH₄", 3.31, 0.02, 3e-16),
                ("C₂H₆", 3.35, 0.02, 2e-16),
                ("CH₃OH", 3.52, 0.02, 4e-16),
            ],
            (9e-16, 5e-17),
        ),
        one_window(),
        window(
            (4.5, 4.9),
            120,
            &[("CO", 4.67, 0.025, 9e-16)],
            (1e-15, 1e-16),
        ),
        window(
            (4.7, 5.0),
            30,
            &[("OCS", 4.86, 0.01, 1e-16)],
            (1e-15, 1e-16),
        ),
        window((5.5, 7.0), 200, &[("H₂O", 6.27, 0.2, 120.0)], (30.0, 4.0)),
    ]
}

fn blend() -> FitPanel {
    let names = ["CN", "C₃", "NH₂", "C₂", "CH", "Ni I", "Fe I", "CO⁺"];
    let bands: Vec<(&str, f64, f64, f64)> = (0..8)
        .map(|k| {
            (
                names[k],
                0.4 + 0.0015 * k as f64,
                0.0012,
                1e-14 * (1.0 + (k % 3) as f64),
            )
        })
        .collect();
    window((0.39, 0.42), 300, &bands, (5e-15, 6e-16))
}

fn fit_cases() -> Vec<Case> {
    let flat = || FitPanel {
        x: vec![1.0],
        y: vec![5.0],
        sigma: vec![0.0],
        used: vec![true],
        model: vec![5.0],
        ..FitPanel::default()
    };
    let crowd = || {
        let bands: Vec<(&str, f64, f64, f64)> = (0..30)
            .map(|k| ("NH₂ (0,9,0)", 1.0 + 0.02 * f64::from(k), 0.01, 1.0))
            .collect();
        window((0.9, 1.7), 300, &bands, (-1.0, 0.2))
    };
    let bands_6: &[&str] = &["H₂O", "CH₄", "C₂H₆", "CH₃OH", "CO₂", "¹³CO₂", "CO", "OCS"];
    vec![
        case(
            "fit-one",
            &[
                "CO₂",
                "¹³CO₂",
                "Wavelength (µm)",
                "10⁻¹⁵",
                "not fitted",
                "Residual",
                "X/2031 D1",
            ],
            |w| fit_svg(&fit_figure(vec![one_window()]), w),
        ),
        case("fit-six", bands_6, |w| {
            fit_svg(&fit_figure(six_windows()), w)
        }),
        case(
            "fit-blend",
            &["CN", "C₃", "NH₂", "C₂", "CH", "Ni I", "Fe I", "CO⁺"],
            |w| fit_svg(&fit_figure(vec![blend()]), w),
        ),
        case("fit-blend-two", &["CN", "CO⁺", "OCS"], |w| {
            let mut panels = vec![blend()];
            panels.push(six_windows().remove(4));
            panels.push(blend());
            fit_svg(&fit_figure(panels), w)
        }),
        case("fit-noise", &["HCN", "NH₃"], |w| {
            let bands = [("HCN", 3.0, 0.01, 1.0), ("NH₃", 3.01, 0.01, -0.4)];
            fit_svg(
                &fit_figure(vec![window((2.9, 3.1), 80, &bands, (0.0, 1.0))]),
                w,
            )
        }),
        case("fit-long", &["CN", "C₂"], |w| {
            let bands = [("CN", 0.388, 0.002, 5e-16), ("C₂", 0.516, 0.004, 6e-16)];
            let mut f = fit_figure(vec![window((0.3, 0.7), 5000, &bands, (2e-16, 3e-17))]);
            f.title = "A very long designation with a name ".repeat(6);
            fit_svg(&f, w)
        }),
        case("fit-flat", &["model"], move |w| {
            fit_svg(&fit_figure(vec![flat()]), w)
        }),
        case("fit-crowd", &["NH₂ (0,9,0)"], move |w| {
            fit_svg(&fit_figure(vec![crowd()]), w)
        }),
    ]
}

const CLASSES: [&str; 4] = [
    "Oort cloud",
    "Jupiter family",
    "Halley type",
    "long-period, disintegrated",
];

fn comet(i: usize, limit: bool) -> ComparisonComet {
    let value = 0.12 * (0.9 * noise(i)).exp();
    let f = 1.15 + 0.1 * (i % 4) as f64;
    let value = match (limit, i % 5) {
        (true, 0) => ComparisonValue::LowerLimit(value),
        (true, _) => ComparisonValue::UpperLimit(value),
        _ => ComparisonValue::Measured {
            value,
            bar: Bounds {
                low: value / f,
                high: value * f,
            },
        },
    };
    ComparisonComet {
        name: format!("C/20{i:02} X{i} (Invented-Name-Of-Some-Length {i})"),
        class: i % 4,
        value,
    }
}

pub fn row(ratio: &str, count: usize, limits: usize) -> StandingRow {
    let comets: Vec<ComparisonComet> = (0..count).map(|i| comet(i, i < limits)).collect();
    let mut values: Vec<f64> = comets
        .iter()
        .filter_map(|c| match c.value {
            ComparisonValue::Measured { value, .. } => Some(value),
            _ => None,
        })
        .collect();
    values.sort_by(f64::total_cmp);
    let n = values.len() as f64;
    StandingRow {
        ratio: ratio.to_owned(),
        cumulative: values
            .iter()
            .enumerate()
            .map(|(i, &v)| (v, (i as f64 + 1.0) / n))
            .collect(),
        comets,
        this: ThisComet::Measured {
            median: 0.31,
            inner: Bounds {
                low: 0.27,
                high: 0.36,
            },
            outer: Bounds {
                low: 0.23,
                high: 0.42,
            },
        },
        count_text: format!("{count} comets, {limits} limits"),
        place_text: "percentile 86 (81–92)".to_owned(),
    }
}

pub fn standing(rows: Vec<StandingRow>) -> StandingFigure {
    StandingFigure {
        title: "X/2031 D1 among known comets".to_owned(),
        this_label: "X/2031 D1 (68 %, 95 %)".to_owned(),
        classes: CLASSES.map(str::to_owned).to_vec(),
        rows,
    }
}

fn standing_cases() -> Vec<Case> {
    let three = || {
        let mut upper = row("CO/H₂O", 14, 5);
        upper.this = ThisComet::UpperLimit(0.05);
        let mut few = row("C₂/CN", 5, 2);
        few.this = ThisComet::LowerLimit(0.2);
        let mut open = row("Ni I/Fe I", 9, 0);
        open.this = ThisComet::Unconstrained;
        standing(vec![row("CO₂/H₂O", 60, 20), upper, few, open])
    };
    vec![
        case(
            "standing-four",
            &[
                "CO₂/H₂O",
                "CO/H₂O",
                "C₂/CN",
                "Ni I/Fe I",
                "Oort cloud",
                "Halley type",
                "60 comets, 20 limits",
                "(81–92)",
                "unconstrained",
            ],
            move |w| standing_svg(&three(), w),
        ),
        case("standing-one", &["CO₂/H₂O", "C/2000 X0"], |w| {
            standing_svg(&standing(vec![row("CO₂/H₂O", 1, 0)]), w)
        }),
        case("standing-none", &["CO₂/H₂O"], |w| {
            standing_svg(&standing(vec![row("CO₂/H₂O", 0, 0)]), w)
        }),
        case("standing-many", &["200 comets"], |w| {
            let mut r = row("CO₂/H₂O", 200, 60);
            r.this = ThisComet::Measured {
                median: 1e-3,
                inner: Bounds {
                    low: -1e-4,
                    high: 2e-3,
                },
                outer: Bounds {
                    low: -5e-3,
                    high: 0.5,
                },
            };
            standing_svg(&standing(vec![r]), w)
        }),
    ]
}

pub fn curves(count: usize) -> CurveFigure {
    let x: Vec<f64> = (0..200).map(|i| -100.0 + f64::from(i)).collect();
    let curve = |k: usize| Curve {
        label: if k == 0 {
            "r_h".into()
        } else {
            format!("Δ {k}")
        },
        y: x.iter()
            .map(|t| 1.2 + 0.0001 * t * t * (1.0 + 0.05 * k as f64) + 0.01 * k as f64)
            .collect(),
        x: x.clone(),
    };
    CurveFigure {
        title: "Distances".into(),
        x_label: "Days from perihelion".into(),
        y_quantity: "Distance".into(),
        y_unit: "au".into(),
        curves: (0..count).map(curve).collect(),
        marks: vec![
            VerticalMark {
                x: -20.0,
                label: "observation".into(),
            },
            VerticalMark {
                x: -12.0,
                label: "second".into(),
            },
            VerticalMark {
                x: 0.0,
                label: String::new(),
            },
        ],
        ..CurveFigure::default()
    }
}

fn curve_cases() -> Vec<Case> {
    let dates = || {
        let mut f = curves(2);
        let tick = |d: i32| Tick {
            x: f64::from(d),
            label: format!("2031 Mar {}", (d + 100) / 10),
        };
        f.x_ticks = (-100..100).step_by(25).map(tick).collect();
        f
    };
    let log = || CurveFigure {
        x_label: "r_h (au)".into(),
        y_quantity: "g of CO₂ ν₃".into(),
        y_unit: "s⁻¹".into(),
        x_scale: Scale::Log,
        y_scale: Scale::Log,
        curves: vec![Curve {
            label: "a curve with a name longer than any margin of a column".into(),
            x: vec![0.3, 1.0, 3.0, 10.0, 30.0],
            y: vec![3e-2, 2.8e-3, f64::NAN, 3e-5, 3e-6],
        }],
        ..CurveFigure::default()
    };
    vec![
        case(
            "curve-two",
            &["r_h", "Δ 1", "observation", "second", "Distance (au)"],
            |w| range_svg(&curves(2), w),
        ),
        case("curve-many", &["Δ 11"], |w| range_svg(&curves(12), w)),
        case("curve-dates", &["2031 Mar"], move |w| {
            range_svg(&dates(), w)
        }),
        case("curve-log", &["g of CO₂ ν₃"], move |w| {
            range_svg(&log(), w)
        }),
        case("curve-small", &["g (10⁻¹³ erg s⁻¹)"], |w| {
            let x: Vec<f64> = (-50..=50).map(f64::from).collect();
            let y = x.iter().map(|v| 2e-13 * (1.3 + (v / 7.0).sin())).collect();
            range_svg(
                &CurveFigure {
                    x_label: "Heliocentric velocity (km s⁻¹)".into(),
                    y_quantity: "g".into(),
                    y_unit: "erg s⁻¹".into(),
                    curves: vec![Curve {
                        label: "CN".into(),
                        x,
                        y,
                    }],
                    ..CurveFigure::default()
                },
                w,
            )
        }),
    ]
}

pub fn quicklook(count: usize, samples: usize) -> QuicklookFigure {
    let names = ["CN", "C₃", "CH", "C₂ Swan", "NH₂", "O I", "Na I", "CO⁺"];
    let x: Vec<f64> = (0..samples)
        .map(|i| 3000.0 + 4000.0 * (i as f64 + 0.5) / samples as f64)
        .collect();
    QuicklookFigure {
        title: "spectrum.csv: 3000–7000 Å <vacuum> & rest".into(),
        x_label: "Wavelength (Å)".into(),
        y_quantity: "Flux density".into(),
        y_unit: "erg s⁻¹ cm⁻² Å⁻¹".into(),
        y: x.iter()
            .enumerate()
            .map(|(i, x)| {
                1e-14
                    * (1.0
                        + 8.0 * gauss(*x, 3880.0, 15.0)
                        + 4.0 * gauss(*x, 5160.0, 30.0)
                        + 0.15 * noise(i))
            })
            .collect(),
        x,
        positions: (0..count)
            .map(|k| Position {
                x: 3100.0 + 3800.0 * ((k * 37) % 101) as f64 / 101.0,
                label: names[k % 8].to_owned(),
            })
            .collect(),
    }
}

fn quicklook_cases() -> Vec<Case> {
    vec![
        case(
            "quick-few",
            &["CN", "C₂ Swan", "Wavelength (Å)", "<vacuum> & rest"],
            |w| quicklook_svg(&quicklook(8, 900), w),
        ),
        case("quick-25", &["CN", "Na I"], |w| {
            quicklook_svg(&quicklook(25, 5000), w)
        }),
        case("quick-many", &["CN", "Na I"], |w| {
            quicklook_svg(&quicklook(100, 40_000), w)
        }),
        case("quick-bare", &["Flux density"], |w| {
            quicklook_svg(&quicklook(0, 1), w)
        }),
    ]
}

/// Every case.
pub fn all_cases() -> Vec<Case> {
    let mut all = fit_cases();
    all.extend(standing_cases());
    all.extend(curve_cases());
    all.extend(quicklook_cases());
    all.extend(alternatives_cases());
    all.extend(excitation_cases());
    all
}

fn point(value: f64, part: f64) -> Option<AlternativePoint> {
    let reach = Reach::Interval(Bounds {
        low: value * (1.0 - part),
        high: value * (1.0 + part),
    });
    Some(AlternativePoint { value, reach })
}

/// So many rows and panels with values, limits, gaps and bars that reach zero.
fn alternatives(rows: usize, panels: usize) -> AlternativesFigure {
    let panel = |p: usize| AlternativePanel {
        ratio: format!("C₂H₆/H₂O {p}"),
        inner: p.is_multiple_of(2).then(|| Bounds {
            low: 0.9 * 10f64.powi(p as i32 - 3),
            high: 1.1 * 10f64.powi(p as i32 - 3),
        }),
        points: (0..rows)
            .map(|i| {
                let value = 10f64.powi(p as i32 - 3) * (1.0 + 0.3 * noise(i * 7 + p)).abs();
                let limit = |reach| Some(AlternativePoint { value, reach });
                match (i * 3 + p) % 11 {
                    4 => limit(Reach::Below),
                    7 => limit(Reach::Above),
                    9 => None,
                    10 => point(value, 1.2),
                    _ => point(value, 0.2),
                }
            })
            .collect(),
    };
    AlternativesFigure {
        title: "X/2031 D1 (invented): ratios under other choices".to_owned(),
        note: "White points: ruled out, with an explanation that takes more than one line of a column."
            .to_owned(),
        labels: (0..rows)
            .map(|i| format!("without band number {i}"))
            .collect(),
        ruled_out: (0..rows / 2).map(|i| i.is_multiple_of(4)).collect(),
        panels: (0..panels).map(panel).collect(),
    }
}

fn alternatives_cases() -> Vec<Case> {
    let mut hard = alternatives(3, 2);
    hard.labels[1] =
        "without a band that somebody gave an absurdly long identifier \u{7} <&>".into();
    hard.panels[0].points = vec![point(1e-12, 0.1), point(1e12, 5.0), None];
    hard.panels[1].points = vec![None, point(0.5, f64::NAN), point(0.5, f64::INFINITY)];
    vec![
        case(
            "alternatives",
            &["C₂H₆/H₂O 0", "without band number 11"],
            |w| alternatives_svg(&alternatives(12, 3), w),
        ),
        case("alternatives, one", &["C₂H₆/H₂O 0"], |w| {
            alternatives_svg(&alternatives(1, 1), w)
        }),
        case("alternatives, many", &["C₂H₆/H₂O 6"], |w| {
            alternatives_svg(&alternatives(50, 7), w)
        }),
        case("alternatives, hard", &["C₂H₆/H₂O 1"], move |w| {
            alternatives_svg(&hard, w)
        }),
    ]
}

fn excitation(names: &[&str], each: usize, wrong: &[usize]) -> ExcitationFigure {
    let point = |i: usize| {
        let discordant = wrong.contains(&i);
        ExcitationPoint {
            x: 3.0 + (i as f64 * 0.618_034).fract(),
            ratio: (0.1 * noise(i)).exp() * if discordant { 3.0 } else { 1.0 },
            sigma: 0.05 + 0.1 * noise(i + 7).abs(),
            blend: i % 11 == 5,
            discordant,
            label: format!("{:.2} Å", 3400.0 + 7.3 * i as f64),
        }
    };
    ExcitationFigure {
        title: "C/2031 A1, 2032-01-11".to_owned(),
        x_label: "Energy of the upper level (eV)".to_owned(),
        y_label: "N(line) / N(mean)".to_owned(),
        panels: names
            .iter()
            .map(|name| ExcitationPanel {
                name: (*name).to_owned(),
                remark: format!("{each} lines (3 blended, open), 12 too weak to draw"),
                points: (0..each).map(point).collect(),
            })
            .collect(),
    }
}

fn excitation_cases() -> Vec<Case> {
    let one = excitation(&["Fe I"], 24, &[6]);
    let crowd = excitation(&["Ni I", "Fe I", "CN"], 120, &[1, 2, 9, 14, 22, 35, 56, 57]);
    let mut wide = excitation(&["Fe I"], 20, &[3]);
    wide.panels[0].points[5].ratio = 4000.0;
    wide.panels[0].points[6].ratio = -0.2;
    wide.panels[0].points[7].sigma = 50.0;
    vec![
        case(
            "excitation, one wrong line",
            &["Fe I", "24 lines", "3443.80 Å"],
            move |w| excitation_svg(&one, w),
        ),
        case("excitation, crowd", &["Ni I", "Fe I", "CN"], move |w| {
            excitation_svg(&crowd, w)
        }),
        case(
            "excitation, far beyond",
            &["Fe I", "3421.90 Å"],
            move |w| excitation_svg(&wide, w),
        ),
    ]
}
