//! Laws that must hold for any orbit, tried on random ones.

use super::*;
use nalgebra::Vector3;
use proptest::prelude::*;

const GM: f64 = GAUSS_K * GAUSS_K;

prop_compose! {
    fn any_elements()(
        log_q in -2.0..2.0_f64,
        e in prop_oneof![
            0.0..0.99_f64,
            (-12.0..-2.0_f64, any::<bool>()).prop_map(|(p, over)| {
                1.0 + if over { 10_f64.powf(p) } else { -10_f64.powf(p) }
            }),
            Just(0.0),
            Just(1.0),
            1.0..20.0_f64,
        ],
        inclination_deg in prop_oneof![0.0..=180.0_f64, Just(0.0), Just(180.0)],
        node_deg in 0.0..360.0_f64,
        argument_deg in 0.0..360.0_f64,
        perihelion_time_jd_tdb in 2_420_000.0..2_480_000.0_f64,
    ) -> Elements {
        Elements {
            perihelion_au: 10_f64.powf(log_q),
            eccentricity: e,
            inclination_deg,
            node_deg,
            argument_deg,
            perihelion_time_jd_tdb,
            epoch_jd_tdb: Some(2_460_000.5),
        }
    }
}

fn vectors(state: &State) -> (Vector3<f64>, Vector3<f64>) {
    (state.position_au.into(), state.velocity_au_d.into())
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 200, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn energy_and_momentum_are_kept(elements in any_elements(), days in -30_000.0..30_000.0_f64) {
        let orbit = elements.orbit().unwrap();
        let (q, e) = (elements.perihelion_au, elements.eccentricity);
        let (r, v) = vectors(&orbit.state_after_perihelion(days));
        // Both energies cancel in a near-parabolic orbit, hence against the kinetic one.
        let energy = 0.5 * v.norm_squared() - GM / r.norm();
        let due = -0.5 * GM * (1.0 - e) / q;
        prop_assert!((energy - due).abs() < 1e-12 * (GM / r.norm() + v.norm_squared()));
        let momentum = r.cross(&v).norm();
        let due = (GM * q * (1.0 + e)).sqrt();
        prop_assert!((momentum / due - 1.0).abs() < 1e-9 || r.norm() * v.norm() > 1e4 * due);
        prop_assert!((momentum - due).abs() < 1e-13 * r.norm() * v.norm() + 1e-13 * due);
        prop_assert!(r.norm() >= q * (1.0 - 1e-12));
    }

    #[test]
    fn a_state_makes_the_orbit_again(elements in any_elements(), days in -400.0..400.0_f64) {
        let orbit = elements.orbit().unwrap();
        let epoch_jd_tdb = elements.perihelion_time_jd_tdb + days;
        let first = orbit.state_after_perihelion(days);
        // Above 1000 km/s a state is refused.
        prop_assume!(vectors(&first).1.norm() < 0.5);
        let again = StateVector {
            position_au: first.position_au,
            velocity_au_d: first.velocity_au_d,
            axes: Axes::EquatorialIcrs,
            epoch_jd_tdb,
        }
        .orbit()
        .unwrap();
        // Through elements and back, and a while later: the state is what must agree.
        for orbit_again in [again, again.elements().orbit().unwrap()] {
            for step in [0.0, 30.0] {
                let jd = epoch_jd_tdb + step;
                let when = Instant::from_jd(jd, 0.0, Scale::Tdb).unwrap();
                let (r, v) = vectors(&orbit.state(&when));
                let (r2, v2) = vectors(&orbit_again.state(&when));
                // Rounding of the state acts through the orbit's steepest passage, near perihelion.
                let steep = 1.0 + (r.norm() / elements.perihelion_au).powf(1.5);
                prop_assert!((r - r2).norm() < 1e-9 * steep * (1.0 + r.norm()), "{r} {r2}");
                prop_assert!((v - v2).norm() < 1e-9 * steep * (1.0 + v.norm()), "{v} {v2}");
            }
        }
    }

    #[test]
    fn nothing_happens_at_e_1(log_q in -1.0..1.0_f64, days in -3000.0..3000.0_f64) {
        let q = 10_f64.powf(log_q);
        let at = |e: f64| Conic::new(q, e).unwrap().at(days);
        let middle = at(1.0);
        for step in [1e-13, 1e-10, 1e-7] {
            let (below, above) = (at(1.0 - step), at(1.0 + step));
            // Two sides of a smooth curve: differences are equal and opposite to first order.
            let (left, right) = (middle.x_au - below.x_au, above.x_au - middle.x_au);
            let size = middle.distance_au * (middle.distance_au / q);
            prop_assert!(left.abs() < 10.0 * step * size + 1e-12 * size, "{left} {size}");
            prop_assert!((left - right).abs() < 1e-3 * step * size + 1e-12 * size);
        }
    }

    #[test]
    fn any_elements_and_site_give_numbers_or_an_error(
        elements in any_elements(),
        jd in 2_410_000.0..2_490_000.0_f64,
        longitude in -180.0..360.0_f64,
        latitude in -90.0..=90.0_f64,
    ) {
        let when = Instant::from_jd(jd, 0.0, Scale::Tdb).unwrap();
        let site = Site::new(longitude, latitude, 2000.0).unwrap();
        let Ok(sky) = observe(&elements.orbit().unwrap(), &when, Some(&site)) else {
            return Ok(());
        };
        for value in [
            sky.heliocentric_km_s, sky.observer_km_s, sky.phase_deg, sky.elongation_deg,
            sky.light_time_s, sky.ra_deg, sky.dec_deg, sky.sun_position_angle_deg,
            sky.antisolar_position_angle_deg, sky.velocity_position_angle_deg,
            sky.motion_arcsec_per_h, sky.motion_position_angle_deg,
        ] {
            prop_assert!(value.is_finite());
        }
        prop_assert_eq!(sky.geometry().observer_au, sky.observer_au);
        prop_assert_eq!(sky.days_from_epoch, Some(when.days_since_tdb(2_460_000.5, 0.0)));
    }

    #[test]
    fn any_text_is_a_date_or_an_error(text in "\\PC{0,30}|[0-9TZ:. -]{0,24}|(MJD|JD) [0-9.]{0,12} ?(UTC|TT|TDB)?") {
        let _ = Instant::parse(&text, Scale::Utc);
    }
}
