//! Orbits, dates and observing geometry against values from outside (`tests/external/orbits`).

use comagauge::frame::orbit::{
    Conic, Elements, GAUSS_K, Instant, Orbit, Scale, Sky, earth_heliocentric, observe,
    observe_same_instant,
};
use std::collections::HashMap;

#[path = "outside_orbits/handbooks.rs"]
mod handbooks;

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
        // In total order not-a-number is the worst of all, and stays.
        if miss.total_cmp(&entry.0).is_gt() {
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
