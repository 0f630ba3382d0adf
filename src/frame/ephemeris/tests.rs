use super::*;
use crate::frame::orbit::{Elements, Orbit, observe};
use std::fmt::Write;

fn orbit() -> Orbit {
    Elements {
        perihelion_au: 1.1,
        eccentricity: 0.98,
        inclination_deg: 62.0,
        node_deg: 20.0,
        argument_deg: 300.0,
        perihelion_time_jd_tdb: 2_462_950.0,
        epoch_jd_tdb: None,
    }
    .orbit()
    .unwrap()
}

/// Daily rows for ten days from JD 2462940.5 UTC, with or without rates, rates times `sign`.
fn table(rates: bool, sign: f64) -> String {
    let mut text = String::from("# a comment\ntime,observer_au,magnitude,heliocentric_au");
    text += if rates {
        ",observer_km_s,heliocentric_km_s\n"
    } else {
        "\n"
    };
    for day in 0..10 {
        let jd = 2_462_940.5 + f64::from(day);
        let when = Instant::from_jd(jd, 0.0, Scale::Utc).unwrap();
        let g = observe(&orbit(), &when, None).unwrap().geometry();
        write!(
            text,
            "JD {jd},{:.9},12.0,{:.9}",
            g.observer_au, g.heliocentric_au
        )
        .unwrap();
        if rates {
            let (a, b) = (sign * g.observer_km_s, sign * g.heliocentric_km_s);
            write!(text, ",{a:.5},{b:.5}").unwrap();
        }
        text.push('\n');
    }
    text
}

fn parse(text: &str) -> Result<Ephemeris> {
    Ephemeris::from_csv(text, Path::new("places.csv"))
}

#[test]
fn meets_the_orbit_between_rows() {
    // With rates the interval's own fourth derivative is left, without them that of three intervals;
    // dΔ/dt differs from the line-of-sight rate by v/c.
    for (rates, au, km_s) in [(true, 1e-7, 0.01), (false, 2e-6, 0.02)] {
        let ephemeris = parse(&table(rates, 1.0)).unwrap();
        assert_eq!(ephemeris.has_rates(), (rates, rates));
        assert_eq!(ephemeris.rows(), 10);
        for step in 0..=90 {
            let jd = 2_462_940.5 + 0.1 * f64::from(step);
            let when = Instant::from_jd(jd, 0.0, Scale::Utc).unwrap();
            let got = ephemeris.at(&when).unwrap();
            let true_value = observe(&orbit(), &when, None).unwrap().geometry();
            for (a, b, tolerance) in [
                (got.heliocentric_au, true_value.heliocentric_au, au),
                (got.observer_au, true_value.observer_au, au),
                (got.heliocentric_km_s, true_value.heliocentric_km_s, km_s),
                (got.observer_km_s, true_value.observer_km_s, km_s),
            ] {
                assert!((a - b).abs() < tolerance, "{rates} {jd}: {a} {b}");
            }
        }
    }
}

#[test]
fn a_cubic_is_met_exactly() {
    let f = |t: f64| 2.0 - t + 0.5 * t * t - 0.1 * t.powi(3);
    let df = |t: f64| -1.0 + t - 0.3 * t * t;
    let x = [0.0, 0.7, 2.0, 3.5];
    for t in [0.0, 0.3, 1.9, 3.5] {
        let (value, slope) = cubic(&x, &x.map(f), t);
        assert!((value - f(t)).abs() < 1e-14 && (slope - df(t)).abs() < 1e-14);
        let (value, slope) = hermite(t, 3.5, (f(0.0), df(0.0)), (f(3.5), df(3.5)));
        assert!((value - f(t)).abs() < 1e-14 && (slope - df(t)).abs() < 1e-14);
    }
}

#[test]
fn refuses_to_extrapolate() {
    let ephemeris = parse(&table(true, 1.0)).unwrap();
    for jd in [2_462_940.499, 2_462_949.501] {
        let when = Instant::from_jd(jd, 0.0, Scale::Utc).unwrap();
        let error = ephemeris.at(&when).unwrap_err();
        assert!(error.message().contains("outside the ephemeris"), "{error}");
    }
}

#[test]
fn refuses_rates_of_the_wrong_sign_or_unit() {
    for sign in [-1.0, 1.0 / KM_S_PER_AU_D] {
        let error = parse(&table(true, sign)).unwrap_err();
        assert!(error.message().contains("km_s says"), "{error}");
        assert!(error.line().is_some());
    }
}

#[test]
fn coarse_printing_is_no_contradiction() {
    // Two rows a minute apart: 0.0001 au of rounding is worth 250 km/s.
    let text = "time,heliocentric_au,heliocentric_km_s,observer_au,observer_km_s\n\
        2031-03-14T00:00,1.0000,-20,0.5000,3\n\
        2031-03-14T00:01,0.9999,-20,0.5001,3\n";
    assert!(parse(text).is_ok());
}

#[test]
fn refuses_bad_tables_with_the_line() {
    let head = "time,heliocentric_au,heliocentric_km_s,observer_au,observer_km_s\n";
    for (text, message, line) in [
        (String::new(), "column \"time\" is missing", None),
        (head.into(), "the ephemeris has no rows", None),
        (
            format!("{head}2031-03-14,1,0,1,0\n"),
            "1 row(s) are too few",
            None,
        ),
        (
            "time,heliocentric_au,observer_au\n2031-03-14,1,1\n2031-03-15,1,1\n".into(),
            "2 row(s) are too few",
            None,
        ),
        (
            format!("{head}2031-03-14,1,0,1,0\n2031-03-14,1,0,1,0\n"),
            "the time is not later",
            Some(3),
        ),
        (
            format!("{head}2031-02-30,1,0,1,0\n"),
            "\"2031-02-30\": there is",
            Some(2),
        ),
        (
            format!("{head}2031-03-14,x,0,1,0\n"),
            "distance (au) \"x\"",
            Some(2),
        ),
        (
            format!("{head}2031-03-14,NaN,0,1,0\n"),
            "distance (au) NaN",
            Some(2),
        ),
        (
            format!("{head}2031-03-14,1,9999,1,0\n"),
            "rate (km/s) 9999",
            Some(2),
        ),
        (
            format!("{head}2031-03-14,1,0,1\n"),
            "the table cannot be read",
            Some(2),
        ),
        ("time,time\n".into(), "column \"time\" occurs twice", None),
        (
            "time,r_au\n".into(),
            "column \"heliocentric_au\" is missing",
            None,
        ),
    ] {
        let error = parse(&text).unwrap_err();
        assert!(error.message().starts_with(message), "{error}");
        assert_eq!(error.line(), line, "{error}");
    }
}
