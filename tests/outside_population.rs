//! Statistics of populations against other people's numbers; files and sources in
//! `tests/external/stats/`. Run with `--nocapture` to see the largest differences.

use comagauge::standing::{
    Censored, ClassShape, Estimated, Known, Mixture, ScatterRule, TrendPoint, Weighting,
    anderson_darling, fit_trend, jeffreys, two_sample, weighted_mean,
};
use std::collections::BTreeMap;
use std::path::PathBuf;

type Row = BTreeMap<String, String>;

fn file(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
        .join("tests/external/stats")
        .join(name)
}

fn rows(name: &str) -> Vec<Row> {
    csv::Reader::from_path(file(name))
        .expect("the reference file")
        .deserialize()
        .map(|r| r.expect("a row"))
        .collect()
}

fn json(name: &str) -> serde_json::Value {
    let text = std::fs::read_to_string(file(name)).expect("the reference file");
    serde_json::from_str(&text).expect("JSON")
}

fn number(row: &Row, column: &str) -> f64 {
    row[column]
        .parse()
        .unwrap_or_else(|_| panic!("{column}: {:?}", row[column]))
}

fn numbers(v: &serde_json::Value) -> Vec<f64> {
    v.as_array()
        .expect("a list")
        .iter()
        .map(|x| x.as_f64().expect("a number"))
        .collect()
}

/// The sample of a dataset, by group in the order of the file.
fn groups(dataset: &str) -> Vec<(String, Vec<Censored>)> {
    let (name, value, flag, limit) = if dataset.starts_with("Freireich") {
        (
            "freireich_data.csv",
            "weeks",
            "relapse_observed",
            Known::Lower,
        )
    } else {
        ("km_data.csv", "value", "is_upper_limit", Known::Upper)
    };
    let mut out: Vec<(String, Vec<Censored>)> = Vec::new();
    for r in rows(name) {
        if r.get("dataset").is_some_and(|d| d != dataset) {
            continue;
        }
        let seen = (r[flag] == "1") == (limit == Known::Lower);
        let entry = Censored {
            value: number(&r, value),
            known: if seen { Known::Value } else { limit },
        };
        match out.iter_mut().find(|g| g.0 == r["group"]) {
            Some(g) => g.1.push(entry),
            None => out.push((r["group"].clone(), vec![entry])),
        }
    }
    out
}

#[test]
fn two_sample_tests() {
    let (mut compared, mut worst) = (0, 0.0_f64);
    for row in rows("two_sample_censored.csv") {
        let weighting = match row["test"].as_str() {
            "log-rank" => Weighting::LogRank,
            t if t.starts_with("Peto-Peto") => Weighting::PetoPeto,
            t if t.starts_with("Peto (lifelines") => Weighting::PetoPrentice,
            _ => continue,
        };
        let g = groups(&row["dataset"]);
        let found = two_sample(&g[0].1, &g[1].1, weighting).expect("a test");
        let off = (found.chi2 / number(&row, "chi2_lifelines") - 1.0).abs();
        let p_off = (found.p / number(&row, "p_lifelines") - 1.0).abs();
        println!(
            "{} {}: {found:?} off {off:.1e}",
            row["dataset"], row["test"]
        );
        worst = worst.max(off).max(p_off);
        compared += 1;
    }
    println!("{compared} tests, largest relative difference {worst:.1e}");
    assert!(compared >= 10 && worst < 1e-6);
}

#[test]
fn greenwood_errors_and_bands() {
    let (mut compared, mut worst) = (0, 0.0_f64);
    let reference = rows("km_greenwood.csv");
    for pair in reference.windows(2) {
        // Rows descend; "below this value" is "at or below" the next one down.
        let (row, next) = (&pair[0], &pair[1]);
        if row["dataset"] != next["dataset"] {
            continue;
        }
        let sample: Vec<Censored> = groups(&row["dataset"])
            .into_iter()
            .flat_map(|g| g.1)
            .collect();
        let estimated = Estimated::of(&sample).expect("values");
        let place = number(next, "value");
        let band = estimated.band();
        let step = band.iter().find(|s| s.value == place).expect("a step");
        for (found, column) in [
            (step.at_or_below, "P_X_lt_value"),
            (estimated.sigma(place), "greenwood_se"),
            (step.low, "low68"),
            (step.high, "high68"),
        ] {
            worst = worst.max((found - number(row, column)).abs());
        }
        compared += 1;
    }
    println!("Greenwood: {compared} steps, largest difference {worst:.1e}");
    assert!(compared > 50 && worst < 1e-8);
}

#[test]
fn anderson_darling_of_several_samples() {
    for set in json("anderson_ksamp.json").as_array().expect("a list") {
        let samples: Vec<Vec<f64>> = set["samples"]
            .as_array()
            .expect("samples")
            .iter()
            .map(numbers)
            .collect();
        let views: Vec<&[f64]> = samples.iter().map(Vec::as_slice).collect();
        let found = anderson_darling(&views, 1).expect("a test");
        let (a2, p) = (
            set["A2"].as_f64().expect("A2"),
            set["p_permutation_20000"].as_f64().expect("p"),
        );
        println!("{}: {found:?}, reference {a2} {p}", set["name"]);
        assert!((found.statistic - a2).abs() < 1e-9);
        // Two sets of random permutations: 10 000 here, 20 000 there.
        let sigma = (p * (1.0 - p) * (1.0 / 1e4 + 1.0 / 2e4)).sqrt();
        assert!((found.p - p).abs() < 4.0 * sigma, "{} {p}", found.p);
    }
}

#[test]
fn jeffreys_bounds() {
    for row in rows("jeffreys.csv") {
        let (low, high) = jeffreys(number(&row, "k") as usize, number(&row, "n") as usize);
        assert!((low - number(&row, "low68")).abs() < 1e-7, "{row:?} {low}");
        assert!(
            (high - number(&row, "high68")).abs() < 1e-7,
            "{row:?} {high}"
        );
    }
}

#[test]
fn means_with_intrinsic_scatter() {
    let data = rows("random_effects_data.csv");
    let mut worst = 0.0_f64;
    for row in rows("random_effects.csv") {
        let set: Vec<(f64, f64)> = data
            .iter()
            .filter(|r| r["dataset"] == row["dataset"])
            .map(|r| (number(r, "y"), number(r, "sd")))
            .collect();
        for (rule, tau2, mean, sd) in [
            (
                ScatterRule::DerSimonianLaird,
                "tau2_DL_own",
                "mean_DL_own",
                "sd_DL_own",
            ),
            (
                ScatterRule::PauleMandel,
                "tau2_PauleMandel",
                "mean_PM",
                "sd_PM",
            ),
        ] {
            let m = weighted_mean(&set, rule).expect("values");
            assert_eq!(m.count as f64, number(&row, "k"));
            for (found, column) in [(m.scatter * m.scatter, tau2), (m.mean, mean), (m.sigma, sd)] {
                worst = worst.max((found - number(&row, column)).abs());
            }
        }
    }
    println!("means with scatter: largest difference {worst:.1e}");
    assert!(worst < 1e-7);
}

#[test]
fn two_classes_by_maximum_likelihood() {
    let reference = json("mixture.json");
    let sample: Vec<(f64, Known)> = numbers(&reference["values"])
        .into_iter()
        .map(|v| (v, Known::Value))
        .collect();
    let start = |mean_dex| ClassShape {
        mean_dex,
        sigma_dex: 0.5,
        share: 0.5,
    };
    let m = Mixture::fit(&sample, [start(5.0), start(1.5)]).expect("values");
    let off = |found: f64, key: &str, i: usize| (found - numbers(&reference[key])[i]).abs();
    for (i, class) in [m.high, m.low].iter().enumerate() {
        assert!(off(class.mean_dex, "means", i) < 1e-5);
        assert!(off(class.sigma_dex, "sd", i) < 1e-5);
        assert!(off(class.share, "weights", i) < 1e-5);
    }
    let likelihood = reference["log_likelihood"].as_f64().expect("a number");
    assert!((m.log_likelihood - likelihood).abs() < 1e-6);
    for (i, y) in numbers(&reference["at"]).iter().enumerate() {
        assert!(off(m.low_membership(*y), "membership_low", i) < 1e-4, "{y}");
    }
}

#[test]
fn regression_with_limits() {
    for row in rows("censored_regression.csv") {
        let g = groups(&row["dataset"]);
        let mut log_values = 0.0;
        let mut points = Vec::new();
        for (name, sample) in &g {
            let x = f64::from(u8::from(*name == row["x_is_1_for"]));
            for e in sample {
                log_values += if e.known == Known::Value {
                    e.value.ln()
                } else {
                    0.0
                };
                points.push(TrendPoint {
                    x,
                    y: e.value.ln(),
                    sigma_dex: 0.0,
                    known: e.known,
                });
            }
        }
        let t = fit_trend(&points).expect("a trend");
        println!("{}: {t:?}", row["dataset"]);
        let near = |found: f64, column: &str, tolerance: f64| {
            let wanted = number(&row, column);
            assert!(
                (found - wanted).abs() < tolerance,
                "{column}: {found} {wanted}"
            );
        };
        near(t.at(0.0), "intercept_ln", 2e-4);
        near(t.slope, "slope_ln", 2e-4);
        near(t.slope_sigma, "slope_se_ln", 2e-4);
        near(t.scatter, "scatter_ln", 2e-4);
        near(t.log_likelihood - log_values, "log_likelihood", 1e-3);
    }
}

/// Percentile intervals on simulated populations with 40 % limits hold the true percentile at
/// least 66 % of the time.
///
/// The population is log-normal, 0.4 dex wide; 34 comets, each with a sensitivity of its own that
/// hides 40 % of them as upper limits, at either quarter or all of the range of values; the new
/// comet is drawn from the same population and measured to 0.08 dex.
#[test]
fn percentile_intervals_cover() {
    use comagauge::standing::place;
    use rand::SeedableRng;
    use rand_distr::{Distribution as _, StandardNormal};
    use statrs::distribution::{ContinuousCDF, Normal};
    const TRIALS: usize = 1500;
    const COMETS: usize = 34;
    let normal = Normal::standard();
    let mut rng = rand_xoshiro::Xoshiro256PlusPlus::seed_from_u64(20);
    for spread in [0.25, 1.0] {
        let (mut held, mut limits) = (0, 0);
        for trial in 0..TRIALS {
            let mut z = || -> f64 { StandardNormal.sample(&mut rng) };
            // A sensitivity below the value shows it; the offset makes 40 % limits.
            let offset = normal.inverse_cdf(0.4) * f64::hypot(1.0, spread);
            let sample: Vec<Censored> = (0..COMETS)
                .map(|_| {
                    let (value, sensitivity) = (z(), offset + spread * z());
                    if value > sensitivity {
                        Censored {
                            value,
                            known: Known::Value,
                        }
                    } else {
                        Censored {
                            value: sensitivity,
                            known: Known::Upper,
                        }
                    }
                })
                .collect();
            limits += sample.iter().filter(|e| e.known == Known::Upper).count();
            let truth = z();
            let seen = truth + 0.2 * z();
            let draws: Vec<f64> = (0..600).map(|_| seen + 0.2 * z()).collect();
            let estimated = Estimated::of(&sample).expect("values");
            let s = place(&estimated, seen, &draws, trial as u64);
            let percent = 100.0 * normal.cdf(truth);
            if s.percentile_low <= percent && percent <= s.percentile_high {
                held += 1;
            }
        }
        let coverage = held as f64 / TRIALS as f64;
        let share = limits as f64 / (TRIALS * COMETS) as f64;
        println!(
            "sensitivity spread {spread}: coverage {:.1} %, {:.0} % limits",
            100.0 * coverage,
            100.0 * share
        );
        assert!((share - 0.4).abs() < 0.02, "{share}");
        assert!(coverage >= 0.66, "{spread}: {coverage}");
    }
}
