//! Published infrared fluxes to production rates, beside the published rates
//! (`tests/external/chains/`).
//!
//! The ratio is printed, not tuned. What separates the two: g of a branch is taken here as strength
//! × sunlight, with the strength moved from 296 K to the printed 50 K by the rotational partition
//! function (∝ T^1.5) and the Boltzmann factor of the branch's lowest level. Excited molecules of
//! neighbouring levels also end in the branch and leave it, which this leaves out, so a factor of two
//! is expected for single branches; the methanol band carries the error of its g (30 %, from memory).

use comagauge::coma::{ApertureKm, Lengths, molecules_km, molecules_per_flux};
use comagauge::frame::Aperture;
use comagauge::ground::Species;
use comagauge::ground::constants::HC_OVER_K_CM_K;
use comagauge::tables::Tables;
use std::path::Path;

struct Chain {
    id: String,
    species: Species,
    band: String,
    r_h_au: f64,
    delta_au: f64,
    aperture: Aperture,
    flux_erg_s_cm2: f64,
    wavenumber_cm1: f64,
    published: (f64, f64),
}

fn read() -> Vec<Chain> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/external/chains/flux_chains.csv");
    let mut table = csv::Reader::from_path(path).unwrap();
    let head = table.headers().unwrap().clone();
    table
        .records()
        .map(|row| {
            let row = row.unwrap();
            let cell = |name: &str| {
                row[head
                    .iter()
                    .position(|h| h == name)
                    .unwrap_or_else(|| panic!("{name}"))]
                .to_owned()
            };
            let number = |name: &str| cell(name).parse::<f64>().unwrap();
            // "CSHELL 2 x 4 arcsec" and the like.
            let sides: Vec<f64> = cell("aperture")
                .split(' ')
                .filter_map(|w| w.parse().ok())
                .collect();
            let rate = cell("published_value");
            let ends: Vec<f64> = rate.split("..").map(|v| v.parse().unwrap()).collect();
            assert_eq!(cell("flux_unit"), "W m-2");
            Chain {
                id: cell("id"),
                species: Species::new(&cell("species")),
                band: cell("line_or_band"),
                r_h_au: number("r_h_au"),
                delta_au: number("delta_au"),
                aperture: Aperture::Slit {
                    width_arcsec: sides[0],
                    length_arcsec: sides[1],
                    offset_across_arcsec: 0.0,
                    offset_along_arcsec: 0.0,
                },
                flux_erg_s_cm2: number("flux") * 1e3,
                wavenumber_cm1: number("wavenumber_cm-1"),
                published: (ends[0], ends[ends.len() - 1]),
            }
        })
        .collect()
}

/// g at 1 au of the row's branch or band, photons s⁻¹.
fn g_at_1_au(tables: &Tables, chain: &Chain) -> f64 {
    let Some(strength) = tables
        .strengths()
        .iter()
        .find(|s| s.species == chain.species && s.band == chain.band && s.unit.starts_with("cm m"))
    else {
        return tables
            .default_efficiency("CH3OH-3.52um")
            .expect("a g-factor")
            .g_photons_s;
    };
    let constant = |quantity: &str| {
        tables
            .strength(&chain.species, "ground", quantity)
            .expect("a constant")
            .value
    };
    let number: f64 = chain
        .band
        .chars()
        .last()
        .and_then(|c| c.to_digit(10))
        .unwrap()
        .into();
    let b = constant("B lower");
    let lowest_cm1 = if chain.species.as_str() == "CH4" {
        b * number * (number + 1.0)
    } else {
        // Symmetric top: J = K is the lowest level of a K ladder.
        b * number * (number + 1.0) + (constant("A0") - b) * number * number
    };
    let boltzmann = (-HC_OVER_K_CM_K * lowest_cm1 * (1.0 / 50.0 - 1.0 / 296.0)).exp();
    let cold = (296.0_f64 / 50.0).powf(1.5) * boltzmann;
    // The sum over J of a K ladder shrinks with √T when it is cold.
    let ladder = if chain.species.as_str() == "CH4" {
        1.0
    } else {
        (50.0_f64 / 296.0).sqrt()
    };
    let photons = tables
        .solar()
        .photon_flux_per_cm1(chain.wavenumber_cm1)
        .expect("in range");
    strength.per_molecule() * cold * ladder * photons
}

#[test]
fn published_rates_are_met() {
    let tables = Tables::bundled();
    let chains = read();
    assert_eq!(chains.len(), 4);
    for chain in chains {
        let g = g_at_1_au(&tables, &chain) / chain.r_h_au.powi(2);
        let wavelength_aa = 1e8 / chain.wavenumber_cm1;
        let molecules = chain.flux_erg_s_cm2 * molecules_per_flux(g, wavelength_aa, chain.delta_au);
        // v = 0.8 r_h^−½ km/s was usual for these data (common practice).
        let speed = 0.8 / chain.r_h_au.sqrt();
        let rate = tables
            .photo_rate(&chain.species)
            .expect("a photo rate")
            .quiet_per_s;
        let lengths = Lengths {
            parent_km: speed * chain.r_h_au.powi(2) / rate,
            daughter_km: None,
        };
        let km = ApertureKm::at(&chain.aperture, chain.delta_au);
        let production = molecules * speed / molecules_km(&lengths, &km);
        let (low, high) = chain.published;
        println!(
            "{} {} {}: g(1 au) {:.2e}, Q {production:.2e}, published {low:.2e} to {high:.2e}, ratio to the middle {:.2}",
            chain.id,
            chain.species,
            chain.band,
            g * chain.r_h_au.powi(2),
            production / (low * high).sqrt()
        );
        assert!(production > low / 2.5 && production < high * 2.5);
    }
}
