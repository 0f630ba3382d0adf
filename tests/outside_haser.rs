//! Bessel functions and the Haser model against high-precision tables (`tests/external/haser/`).

use comagauge::coma::{
    ApertureKm, Lengths, bessel_k0, bessel_k0_tail, bessel_k1, column_km, molecules_km,
};
use std::path::{Path, PathBuf};

fn file(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/external/haser")
        .join(name)
}

#[test]
fn bessel_functions() {
    let mut table = csv::Reader::from_path(file("bessel_k0_k1.csv")).unwrap();
    let (mut rows, mut worst) = (0, 0.0_f64);
    for row in table.records().map(|r| r.unwrap()) {
        let v: Vec<f64> = row.iter().map(|c| c.parse().unwrap()).collect();
        for (found, wanted) in [
            (bessel_k0(v[0]), v[1]),
            (bessel_k1(v[0]), v[2]),
            (bessel_k0_tail(v[0]), v[4]),
        ] {
            let off = (found / wanted - 1.0).abs();
            worst = worst.max(off);
            assert!(off < 1e-10, "x = {}: {found} {wanted}", v[0]);
        }
        rows += 1;
    }
    assert_eq!(rows, 125);
    println!("Bessel functions: worst relative difference {worst:.1e}");
}

#[test]
fn haser_model() {
    // Every row of the table is for Q = 1e27 s⁻¹ and v = 1 km s⁻¹.
    const Q: f64 = 1e27;
    let mut table = csv::Reader::from_path(file("haser_reference.csv")).unwrap();
    let mut rows = 0;
    let mut worst = std::collections::BTreeMap::new();
    for row in table.records().map(|r| r.unwrap()) {
        let number = |i: usize| row[i].parse::<f64>();
        let lengths = Lengths {
            parent_km: number(2).unwrap(),
            daughter_km: number(3).ok(),
        };
        let a = number(5).unwrap();
        let wanted = number(10).unwrap();
        let stated = number(13).unwrap();
        let found = Q * match &row[4] {
            // km⁻² to cm⁻².
            "column" => column_km(&lengths, a) * 1e-10,
            "circle" => molecules_km(&lengths, &ApertureKm::Circle { radius_km: a }),
            "annulus" => molecules_km(
                &lengths,
                &ApertureKm::Annulus {
                    inner_km: a,
                    outer_km: number(6).unwrap(),
                },
            ),
            "rectangle" => {
                let (b, x0, y0) = (number(6).unwrap(), number(7).unwrap(), number(8).unwrap());
                molecules_km(
                    &lengths,
                    &ApertureKm::Rectangle {
                        x_km: (x0 - 0.5 * a, x0 + 0.5 * a),
                        y_km: (y0 - 0.5 * b, y0 + 0.5 * b),
                    },
                )
            }
            other => panic!("unknown shape {other}"),
        };
        let off = (found / wanted - 1.0).abs();
        let limit = if &row[4] == "rectangle" { 1e-6 } else { 1e-8 };
        assert!(off < limit + stated, "{row:?}: {found:e}, off by {off:e}");
        let kind = format!("{} {}", &row[1], &row[4]);
        let entry: &mut f64 = worst.entry(kind).or_default();
        *entry = entry.max(off);
        rows += 1;
    }
    assert_eq!(rows, 153);
    for (kind, off) in worst {
        println!("{kind}: worst relative difference {off:.1e}");
    }
}
