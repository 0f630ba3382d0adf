//! Censored distributions and ratio intervals against other people's numbers; files and sources in
//! `tests/external/stats/`.

use comagauge::fit::upper_limit;
use comagauge::ground::Measured;
use comagauge::ratio::Interval;
use comagauge::standing::{Censored, Distribution, Known};
use rand::SeedableRng;
use rand_distr::{Distribution as _, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use statrs::distribution::{ContinuousCDF, Normal};
use std::collections::BTreeMap;
use std::path::PathBuf;

type Row = BTreeMap<String, String>;

fn rows(name: &str) -> Vec<Row> {
    let path = PathBuf::from(env!("CARGO_MANIFEST_DIR"))
        .join("tests/external/stats")
        .join(name);
    csv::Reader::from_path(path)
        .expect("the reference file")
        .deserialize()
        .map(|r| r.expect("a row"))
        .collect()
}

fn number(row: &Row, column: &str) -> f64 {
    match row[column].as_str() {
        "inf" => f64::INFINITY,
        text => text
            .parse()
            .unwrap_or_else(|_| panic!("{column}: {text:?}")),
    }
}

fn sample(dataset: &str) -> Vec<Censored> {
    rows("km_data.csv")
        .iter()
        .filter(|r| r["dataset"] == dataset)
        .map(|r| Censored {
            value: number(r, "value"),
            known: if r["is_upper_limit"] == "1" {
                Known::Upper
            } else {
                Known::Value
            },
        })
        .collect()
}

#[test]
fn product_limit_for_upper_limits() {
    let mut worst: f64 = 0.0;
    let mut compared = 0;
    for row in rows("km_left_censored.csv") {
        let distribution = Distribution::estimate(&sample(&row["dataset"])).expect("values");
        let v = number(&row, "value");
        let off = (distribution.at_or_below(v) - number(&row, "P_X_le_value_lifelines_flipped_KM"))
            .abs()
            .max((distribution.below(v) - number(&row, "P_X_lt_value_own")).abs());
        worst = worst.max(off);
        compared += 1;
    }
    println!("Kaplan–Meier: {compared} steps, largest difference {worst:.1e}");
    assert!(compared > 60 && worst < 1e-9);
}

#[test]
fn medians_and_counts_of_the_censored_sets() {
    for row in rows("km_summary.csv") {
        let distribution = Distribution::estimate(&sample(&row["dataset"])).expect("values");
        assert_eq!(distribution.entries() as f64, number(&row, "n"));
        let median = distribution.quantile(0.5).expect("a median");
        assert_eq!(
            median,
            number(&row, "median_smallest_detected_with_P_ge_0.5")
        );
    }
}

/// Where the denominator is safely positive, the quantiles of drawn ratios are Fieller's limits;
/// 200 000 draws fix them to about 1 % of the interval.
#[test]
fn drawn_ratios_follow_fieller() {
    let mut compared = 0;
    for row in rows("fieller.csv") {
        let (a, b) = (number(&row, "numerator"), number(&row, "denominator"));
        let (sa, sb) = (number(&row, "sd_num"), number(&row, "sd_den"));
        if row["kind"] != "interval" || row["dof"] != "inf" || b / sb < 5.0 {
            continue;
        }
        let rho = number(&row, "correlation");
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(7);
        let mut z = || -> f64 { StandardNormal.sample(&mut rng) };
        let draws: Vec<f64> = (0..200_000)
            .map(|_| {
                let (u, v) = (z(), z());
                let w = rho * u + (1.0 - rho * rho).sqrt() * v;
                (a + sa * w) / (b + sb * u)
            })
            .collect();
        let (low, high) = (number(&row, "lower"), number(&row, "upper"));
        let mut sorted = draws.clone();
        sorted.sort_by(f64::total_cmp);
        let tail = 0.5 * (1.0 - number(&row, "level"));
        let found = (
            comagauge::ratio::quantile(&sorted, tail),
            comagauge::ratio::quantile(&sorted, 1.0 - tail),
        );
        let size = high - low;
        assert!(
            (found.0 - low).abs() < 0.015 * size && (found.1 - high).abs() < 0.015 * size,
            "{row:?}: {found:?}"
        );
        compared += 1;
    }
    assert!(compared >= 4, "only {compared} rows compared");
}

#[test]
fn normal_tails_behind_the_limits() {
    let normal = Normal::standard();
    let mut compared = 0;
    for row in rows("distribution_tails.csv") {
        if row["function"] != "normal_sf" {
            continue;
        }
        let (x, expected) = (number(&row, "x"), number(&row, "value"));
        assert!((normal.cdf(-x) / expected - 1.0).abs() < 1e-9, "{x}");
        compared += 1;
    }
    assert!(compared > 2, "only {compared} rows compared");
    // A limit from F = 0: the half normal's 99.7 % point is the normal's 99.85 % point.
    let limit = upper_limit(Measured::new(0.0, 1.0));
    assert!((normal.cdf(limit) - 0.9985).abs() < 1e-9);
    assert!(Interval::of([1.0]).is_some());
}
