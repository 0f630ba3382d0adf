//! Worked examples of handbooks, read row by row.

use super::{KM_S_PER_AU_D, number, rows};
use comagauge::frame::orbit::{
    Conic, Elements, GAUSS_K, Instant, Scale, earth_heliocentric, observe, observe_same_instant,
};

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
