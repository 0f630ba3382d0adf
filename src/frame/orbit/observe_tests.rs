use super::super::Elements;
use super::*;

fn orbit() -> Orbit {
    Elements {
        perihelion_au: 0.7,
        eccentricity: 1.2,
        inclination_deg: 110.0,
        node_deg: 20.0,
        argument_deg: 300.0,
        perihelion_time_jd_tdb: 2_462_950.0,
        epoch_jd_tdb: Some(2_462_900.5),
    }
    .orbit()
    .unwrap()
}

fn tdb(jd: f64) -> Instant {
    Instant::from_jd(jd, 0.0, Scale::Tdb).unwrap()
}

/// Distance (deg) and position angle (deg) from one place on the sky to another, by the sine and
/// cosine formulas of spherical trigonometry.
fn bearing(from: (f64, f64), to: (f64, f64)) -> (f64, f64) {
    let (d1, d2) = (from.1.to_radians(), to.1.to_radians());
    let a = (to.0 - from.0).to_radians();
    let y = d2.cos() * a.sin();
    let x = d1.cos() * d2.sin() - d1.sin() * d2.cos() * a.cos();
    let along = d1.sin() * d2.sin() + d1.cos() * d2.cos() * a.cos();
    (
        x.hypot(y).atan2(along).to_degrees(),
        y.atan2(x).to_degrees().rem_euclid(360.0),
    )
}

fn turn_between(a: f64, b: f64) -> f64 {
    ((a - b + 180.0).rem_euclid(360.0) - 180.0).abs()
}

#[test]
fn the_sun_lies_where_its_own_coordinates_say() {
    for days in [-200.0, -30.0, 0.0, 11.0, 90.0] {
        let when = tdb(2_462_950.0 + days);
        let sky = observe(&orbit(), &when, None).unwrap();
        let sun = -Vector3::from(earth_heliocentric(&when).unwrap().position_au);
        let sun_ra = sun.y.atan2(sun.x).to_degrees();
        let sun_dec = (sun.z / sun.norm()).asin().to_degrees();
        let (elongation, angle) = bearing((sky.ra_deg, sky.dec_deg), (sun_ra, sun_dec));
        assert!((elongation - sky.elongation_deg).abs() < 1e-9);
        assert!(turn_between(angle, sky.sun_position_angle_deg) < 1e-9);
        assert!((turn_between(angle, sky.antisolar_position_angle_deg) - 180.0).abs() < 1e-9);
    }
}

#[test]
fn motion_is_the_change_of_the_coordinates() {
    let site = Site::new(-70.4, -24.6, 2600.0).unwrap();
    for (days, site) in [(-100.0, None), (5.0, None), (5.0, Some(&site))] {
        let place = |minutes: f64| {
            let sky = observe(&orbit(), &tdb(2_462_950.0 + days + minutes / 1440.0), site).unwrap();
            (sky.ra_deg, sky.dec_deg)
        };
        let sky = observe(&orbit(), &tdb(2_462_950.0 + days), site).unwrap();
        // One minute to each side: 60 half-hours to the hour.
        let (arc_deg, _) = bearing(place(-1.0), place(1.0));
        let (_, angle) = bearing(place(0.0), place(1.0));
        let rate = arc_deg * 3600.0 * 30.0;
        assert!(
            (rate / sky.motion_arcsec_per_h - 1.0).abs() < 1e-5,
            "{rate}"
        );
        assert!(turn_between(angle, sky.motion_position_angle_deg) < 0.05);
    }
}

#[test]
fn the_trail_points_to_where_the_comet_was() {
    let when = tdb(2_462_980.0);
    let sky = observe(&orbit(), &when, None).unwrap();
    let earth = Vector3::from(earth_heliocentric(&when).unwrap().position_au);
    // A place on the orbit, one minute behind, seen from the Earth as it stands now.
    let delay = sky.light_time_s / 86_400.0;
    let seen = |days: f64| {
        let p = Vector3::from(orbit().state(&tdb(2_462_980.0 + days)).position_au) - earth;
        (
            p.y.atan2(p.x).to_degrees(),
            p.z.atan2(p.x.hypot(p.y)).to_degrees(),
        )
    };
    let (_, angle) = bearing(seen(-delay), seen(-delay - 1.0 / 1440.0));
    assert!(turn_between(angle, sky.velocity_position_angle_deg) < 0.01);
}

#[test]
fn a_site_sees_the_comet_rise_towards_it() {
    // On the equator the Earth's turning alters the line-of-sight rate by at most 0.47 km/s, and over
    // a day both ways.
    let site = Site::new(30.0, 0.0, 0.0).unwrap();
    let difference: Vec<f64> = (0..24)
        .map(|hour| {
            let when = tdb(2_462_980.0 + f64::from(hour) / 24.0);
            let here = observe(&orbit(), &when, Some(&site)).unwrap();
            let centre = observe(&orbit(), &when, None).unwrap();
            assert!((here.heliocentric_au - centre.heliocentric_au).abs() < 1e-6);
            here.observer_km_s - centre.observer_km_s
        })
        .collect();
    let (low, high) = difference
        .iter()
        .fold((0.0_f64, 0.0_f64), |(l, h), d| (l.min(*d), h.max(*d)));
    let sky = observe(&orbit(), &tdb(2_462_980.5), None).unwrap();
    let due = 0.4651 * sky.dec_deg.to_radians().cos();
    assert!(
        (high - due).abs() < 0.01 && (low + due).abs() < 0.01,
        "{low} {high} {due}"
    );
}

#[test]
fn refuses_dates_without_an_earth_and_comets_in_the_sun() {
    for date in ["1850-01-01", "2150-06-01"] {
        let when = Instant::parse(date, Scale::Tdb).unwrap();
        let error = observe(&orbit(), &when, None).unwrap_err();
        assert!(error.message().contains("1900 to 2100"), "{error}");
    }
    let mut sungrazer = orbit().elements();
    sungrazer.perihelion_au = 0.001;
    let orbit = sungrazer.orbit().unwrap();
    let error = observe_same_instant(&orbit, &tdb(2_462_950.0), None).unwrap_err();
    assert!(error.message().starts_with("heliocentric_au"), "{error}");
}
