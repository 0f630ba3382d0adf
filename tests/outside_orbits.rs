//! Orbits, dates and observing geometry against values from outside (`tests/external/orbits`).

use comagauge::frame::orbit::{
    Conic, Elements, GAUSS_K, Instant, Orbit, Scale, Sky, earth_heliocentric, observe,
    observe_same_instant,
};
use std::collections::HashMap;

const KM_S_PER_AU_D: f64 = comagauge::ground::constants::AU_KM / 86_400.0;

type Row = HashMap<String, String>;

fn rows(name: &str) -> Vec<Row> {
    let path = format!(
        "{}/tests/external/orbits/{name}",
        env!("CARGO_MANIFEST_DIR")
    );
    let mut reader = csv::Reader::from_path(&path).expect(&path);
    reader.deserialize().map(|row| row.expect(&path)).collect()
}

fn number(row: &Row, column: &str) -> f64 {
    row[column].parse().expect(column)
}

/// Keeps the worst difference of each named quantity against its tolerance.
#[derive(Default)]
struct Worst(HashMap<&'static str, (f64, f64, String)>);

impl Worst {
    fn add(&mut self, name: &'static str, got: f64, expected: f64, tolerance: f64, place: &str) {
        let miss = (got - expected).abs();
        let entry = self.0.entry(name).or_insert((0.0, tolerance, place.into()));
        // Not-a-number must not slip through.
        if !(miss / tolerance <= entry.0 / entry.1) {
            *entry = (miss, tolerance, place.into());
        }
    }

    fn check(self, quantities: usize) {
        assert_eq!(self.0.len(), quantities);
        let mut all: Vec<_> = self.0.into_iter().collect();
        all.sort_by_key(|(name, _)| *name);
        for (name, (miss, tolerance, place)) in &all {
            println!("{name:28} worst {miss:.2e} of {tolerance:.0e} at {place}");
        }
        for (name, (miss, tolerance, place)) in all {
            assert!(
                miss <= tolerance,
                "{name}: {miss:e} > {tolerance:e} at {place}"
            );
        }
    }
}

#[test]
fn time_scales() {
    let mut worst = Worst::default();
    let table = rows("time_scales.csv");
    assert_eq!(table.len(), 22);
    for row in &table {
        let text = &row["utc"];
        let when = Instant::parse(text, Scale::Utc).unwrap();
        // The file keeps 9 decimals, 43 µs.
        for (name, scale) in [
            ("jd_utc", Scale::Utc),
            ("jd_tai", Scale::Tai),
            ("jd_tt", Scale::Tt),
            ("jd_tdb", Scale::Tdb),
        ] {
            worst.add(name, when.jd(scale), number(row, name), 1.0e-9, text);
        }
        let (tdb, tt) = (when.two_part(Scale::Tdb), when.two_part(Scale::Tt));
        let seconds = ((tdb.0 - tt.0) + (tdb.1 - tt.1)) * 86_400.0;
        worst.add(
            "tdb_minus_tt_s",
            seconds,
            number(row, "tdb_minus_tt_s"),
            6.0e-7,
            text,
        );
        for scale in [Scale::Utc, Scale::Tai, Scale::Tt, Scale::Tdb] {
            let (day, part) = when.two_part(scale);
            let back = Instant::from_jd(day, part, scale).unwrap();
            let miss = back.days_since_tdb(tdb.0, tdb.1);
            worst.add("round trip, d", miss, 0.0, 1.0e-12, text);
        }
    }
    worst.check(6);
}

/// 1 − e from its decimal digits, since a rounded e close to 1 no longer determines it.
fn one_minus(decimal: &str) -> f64 {
    let (whole, fraction) = decimal.split_once('.').unwrap_or((decimal, ""));
    let scale = 10_i64.pow(fraction.len() as u32);
    let digits: i64 = format!("{whole}{fraction}").parse().unwrap();
    (scale - digits) as f64 / scale as f64
}

#[test]
fn kepler_equation() {
    let mut worst = Worst::default();
    let table = rows("kepler_equation.csv");
    assert_eq!(table.len(), 276);
    for row in &table {
        // a = ±1 au, so that M = k·t.
        let perihelion_au = one_minus(&row["e"]).abs();
        let axis = if row["kind"] == "elliptic" { 1.0 } else { -1.0 };
        let conic = Conic::from_inverse_axis(perihelion_au, axis).unwrap();
        let place = format!("e {} M {}", row["e"], row["M_rad"]);
        let p = conic.at(number(row, "M_rad") / GAUSS_K);
        let anomaly = number(row, "E_or_H_rad");
        let scale = anomaly.abs().max(1e-3);
        worst.add(
            "E or H, relative",
            p.universal_anomaly_sqrt_au / scale,
            anomaly / scale,
            1e-12,
            &place,
        );
        worst.add(
            "true anomaly, rad",
            p.true_anomaly_rad(),
            number(row, "true_anomaly_rad"),
            1e-12,
            &place,
        );
        let distance = number(row, "r_over_abs_a");
        worst.add("r, relative", p.distance_au / distance, 1.0, 1e-12, &place);
    }
    worst.check(3);
}

#[test]
fn state_from_perihelion() {
    let mut worst = Worst::default();
    let table = rows("perihelion_state.csv");
    assert_eq!(table.len(), 22);
    for row in &table {
        let conic = Conic::new(number(row, "q_au"), number(row, "e")).unwrap();
        let p = conic.at(number(row, "days_from_perihelion"));
        let place = format!("q {} e {}", row["q_au"], row["e"]);
        let mut add = |name, got: f64, column| {
            let expected = number(row, column);
            let scale = expected.abs().max(1e-3);
            worst.add(name, got / scale, expected / scale, 2e-12, &place);
        };
        add(
            "true anomaly, relative",
            p.true_anomaly_rad().to_degrees(),
            "true_anomaly_deg",
        );
        add("r, relative", p.distance_au, "r_au");
        add("rdot, relative", p.rate_au_d * KM_S_PER_AU_D, "rdot_km_s");
        let speed = p.vx_au_d.hypot(p.vy_au_d) * KM_S_PER_AU_D;
        add("speed, relative", speed, "speed_km_s");
    }
    worst.check(4);
}

#[test]
fn earth() {
    let mut worst = Worst::default();
    let table = rows("earth_epv00.csv");
    assert_eq!(table.len(), 30);
    for row in &table {
        let when = Instant::from_jd(number(row, "jd_tdb"), 0.0, Scale::Tdb).unwrap();
        let state = earth_heliocentric(&when).unwrap();
        for (i, axis) in ["x", "y", "z"].into_iter().enumerate() {
            let position = number(row, &format!("{axis}h_au"));
            let velocity = number(row, &format!("v{axis}h_au_d"));
            let place = &row["tdb"];
            worst.add("position, au", state.position_au[i], position, 6e-13, place);
            worst.add(
                "velocity, au/d",
                state.velocity_au_d[i],
                velocity,
                6e-15,
                place,
            );
        }
    }
    worst.check(2);
}

fn orbit_of(row: &Row) -> Orbit {
    Elements {
        perihelion_au: number(row, "q_au"),
        eccentricity: number(row, "e"),
        inclination_deg: number(row, "i_deg"),
        node_deg: number(row, "node_deg"),
        argument_deg: number(row, "argp_deg"),
        perihelion_time_jd_tdb: number(row, "Tp_jd_tdb"),
        epoch_jd_tdb: None,
    }
    .orbit()
    .unwrap()
}

/// Column, tolerance, accessor.
type Quantity = (&'static str, f64, fn(&Sky) -> f64);

#[test]
fn comets_from_the_geocentre() {
    let geometric: [Quantity; 6] = [
        ("r_au", 1e-9, |s| s.heliocentric_au),
        ("rdot_km_s", 1e-7, |s| s.heliocentric_km_s),
        ("delta_au", 1e-9, |s| s.observer_au),
        ("deltadot_km_s", 1e-6, |s| s.observer_km_s),
        ("phase_deg", 1e-6, |s| s.phase_deg),
        ("elong_deg", 1e-6, |s| s.elongation_deg),
    ];
    let delayed: [Quantity; 7] = [
        ("r_lt_au", 1e-9, |s| s.heliocentric_au),
        ("rdot_lt_km_s", 1e-7, |s| s.heliocentric_km_s),
        ("delta_lt_au", 1e-9, |s| s.observer_au),
        ("deltadot_lt_km_s", 1e-6, |s| s.observer_km_s),
        ("phase_lt_deg", 1e-6, |s| s.phase_deg),
        ("elong_lt_deg", 1e-6, |s| s.elongation_deg),
        ("light_time_s", 1e-4, |s| s.light_time_s),
    ];
    let mut worst = Worst::default();
    let table = rows("comet_geometry.csv");
    assert_eq!(table.len(), 60);
    for row in &table {
        let orbit = orbit_of(row);
        let when = Instant::from_jd(number(row, "jd_tdb"), 0.0, Scale::Tdb).unwrap();
        let place = format!("{} {}", row["orbit"], row["jd_tdb"]);
        let state = orbit.state(&when);
        for (i, axis) in ["x", "y", "z"].into_iter().enumerate() {
            let position = number(row, &format!("{axis}_au"));
            let velocity = number(row, &format!("v{axis}_au_d"));
            worst.add(
                "position, au",
                state.position_au[i],
                position,
                5e-11,
                &place,
            );
            worst.add(
                "velocity, au/d",
                state.velocity_au_d[i],
                velocity,
                1e-11,
                &place,
            );
        }
        let same = observe_same_instant(&orbit, &when, None).unwrap();
        for (name, tolerance, get) in geometric {
            worst.add(name, get(&same), number(row, name), tolerance, &place);
        }
        let seen = observe(&orbit, &when, None).unwrap();
        for (name, tolerance, get) in delayed {
            worst.add(name, get(&seen), number(row, name), tolerance, &place);
        }
        // What leaving out the Sun's own motion during the light time costs.
        worst.add(
            "delta, barycentric light time",
            seen.observer_au,
            number(row, "delta_lt_barycentric_au"),
            1e-5,
            &place,
        );
    }
    worst.check(16);
}

/// The number that follows a label such as `q=`.
fn after(text: &str, label: &str) -> Option<f64> {
    let start = text.find(label)? + label.len();
    let digits: String = text[start..]
        .chars()
        .take_while(|c| c.is_ascii_digit() || ".+-".contains(*c))
        .collect();
    digits.trim_end_matches('.').parse().ok()
}

/// What the code gives for one handbook row, or nothing where the row asks for something it does not
/// compute. `inputs` are those of an earlier row when the row says "same".
fn handbook_value(quantity: &str, inputs: &str) -> Option<f64> {
    if quantity.starts_with("Julian date") {
        return Some(Instant::parse(inputs, Scale::Tt).unwrap().jd(Scale::Tt));
    }
    if let Some(anomaly) = after(inputs, "M=") {
        return kepler_example(quantity, inputs, anomaly);
    }
    if inputs.starts_with("Encke") {
        return encke_example(quantity, inputs);
    }
    if quantity.starts_with("heliocentric") || quantity.contains("Sun") {
        return earth_example(quantity, inputs);
    }
    let e = after(inputs, "e=")?;
    let q = after(inputs, "q=").or_else(|| Some(after(inputs, "a=")? * (1.0 - e)))?;
    let conic = Conic::new(q, e).unwrap();
    let days = match after(inputs, "t-T=") {
        Some(days) => days,
        None if quantity.contains("aphelion") => 0.5 * conic.period_d()?,
        None if quantity.contains("perihelion") => 0.0,
        None if inputs.contains("T=1998 Apr 14.4358") && inputs.contains("t=1998 Aug 5.0") => {
            let jd = |text| Instant::parse(text, Scale::Tt).unwrap().jd(Scale::Tt);
            jd("1998-08-05.0") - jd("1998-04-14.4358")
        }
        None => return None,
    };
    let p = conic.at(days);
    if quantity.starts_with("true anomaly") {
        return Some(p.true_anomaly_rad().to_degrees().rem_euclid(360.0));
    }
    match quantity {
        "r, au" => Some(p.distance_au),
        q if q.starts_with("speed") => Some(p.vx_au_d.hypot(p.vy_au_d) * KM_S_PER_AU_D),
        _ => None,
    }
}

fn kepler_example(quantity: &str, inputs: &str, mean: f64) -> Option<f64> {
    let e = after(inputs, "e=")?;
    let mean = if inputs.contains("deg") {
        mean.to_radians()
    } else {
        mean
    };
    let conic = Conic::new((1.0 - e).abs(), e).unwrap();
    let anomaly = conic.at(mean / GAUSS_K).universal_anomaly_sqrt_au;
    let elliptic = e < 1.0;
    Some(match (quantity.contains("deg"), elliptic) {
        (true, true) => anomaly.to_degrees().rem_euclid(360.0),
        _ => anomaly,
    })
}

fn encke_example(quantity: &str, inputs: &str) -> Option<f64> {
    let e = after(inputs, "e=")?;
    let date = |text| Instant::parse(text, Scale::Tt).unwrap();
    assert!(inputs.ends_with("T=1990 Oct 28.54502 TD; 1990 Oct 6.0 TD"));
    let orbit = Elements {
        perihelion_au: after(inputs, " a=")? * (1.0 - e),
        eccentricity: e,
        inclination_deg: after(inputs, " i=")?,
        node_deg: after(inputs, " node=")?,
        argument_deg: after(inputs, " w=")?,
        perihelion_time_jd_tdb: date("1990-10-28.54502").jd(Scale::Tdb),
        epoch_jd_tdb: None,
    }
    .orbit()
    .unwrap();
    let when = date("1990-10-06.0");
    let sky = observe(&orbit, &when, None).unwrap();
    Some(match quantity.split([' ', ',']).next()? {
        "right" => sky.ra_deg,
        "declination" => sky.dec_deg,
        "elongation" => sky.elongation_deg,
        "delta" => {
            observe_same_instant(&orbit, &when, None)
                .unwrap()
                .observer_au
        }
        "light" => sky.light_time_s / 86_400.0,
        _ => return None,
    })
}

fn earth_example(quantity: &str, inputs: &str) -> Option<f64> {
    let when = match after(inputs, "2400000.5 + ") {
        Some(days) => Instant::from_jd(2_400_000.5, days, Scale::Tdb),
        None if inputs.contains("1992 Oct 13.0") || inputs.contains("2448908.5") => {
            Instant::parse("1992-10-13.0", Scale::Tt)
        }
        None => return None,
    };
    let position = earth_heliocentric(&when.unwrap()).unwrap().position_au;
    let axis = |name: &str| "xyz".find(&name.to_lowercase());
    if let Some(name) = quantity.strip_prefix("heliocentric ") {
        return Some(position[axis(&name[..1])?]);
    }
    if quantity.starts_with("Sun-Earth") {
        return Some(position.iter().map(|x| x * x).sum::<f64>().sqrt());
    }
    Some(-position[axis(&quantity[..1])?])
}

#[test]
fn handbooks() {
    let (mut done, mut inputs, mut left) = (0, String::new(), Vec::new());
    for row in rows("handbook_examples.csv") {
        if !row["inputs"].contains("same") {
            // "e=…" alone completes the inputs of the row before.
            let fresh = row["inputs"].clone();
            inputs = if fresh.starts_with("e=") && !fresh.contains(' ') {
                format!("{inputs} {fresh}")
            } else {
                fresh
            };
        }
        let quantity = &row["quantity"];
        let Some(got) = handbook_value(quantity, &inputs) else {
            left.push(format!("{}: {quantity}", row["source"]));
            continue;
        };
        let miss = (got - number(&row, "printed_value")).abs();
        // The last digit of a double.
        let tolerance = number(&row, "tolerance").max(4.0 * f64::EPSILON * got.abs());
        assert!(
            miss <= tolerance,
            "{}: {quantity}: {got} misses by {miss:e}",
            row["source"]
        );
        done += 1;
    }
    println!("{done} rows agree; not computed here: {left:#?}");
    assert_eq!((done, left.len()), (48, 3));
}
