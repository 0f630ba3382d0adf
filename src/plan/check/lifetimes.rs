//! Whether a ratio of columns of atoms is also their ratio of production rates.

use super::Checker;
use super::convert::aperture;
use crate::analysis::{BandSettings, RatioSettings};
use crate::coma::{ApertureKm, Lengths, molecules_km};
use crate::frame::Geometry;
use crate::ground::{Caveat, Result, Species};
use crate::ratio::Basis;

/// Difference of the two ratios that is worth a word.
const DIFFERENT: f64 = 0.05;
/// A lifetime so long that nothing is lost.
const FOREVER_KM: f64 = 1e13;

impl Checker<'_> {
    /// Time in which gas leaves the aperture, s: its radius (of the circle of the same area) over the
    /// expansion speed.
    pub(super) fn transit_s(&mut self, geometry: &Geometry) -> Result<f64> {
        let area_cm2 = aperture(&self.plan.aperture)?.area_cm2(geometry.observer_au);
        let radius_km = (area_cm2 / std::f64::consts::PI).sqrt() * 1e-5;
        Ok(radius_km / self.parent_speed(geometry)?.0)
    }

    /// Atoms that leave the nucleus, or a parent that lives much shorter than they cross the aperture,
    /// give N₁/N₂ = Q₁/Q₂ as long as neither is ionised on the way. A caveat says by how much the two
    /// ratios differ where they do: the share of each species that a coma of its photo-ionisation
    /// length leaves in the aperture. Every published rate is tried.
    pub(super) fn note_lifetimes(
        &mut self,
        bands: &[BandSettings],
        ratios: &[RatioSettings],
        geometry: &Geometry,
    ) -> Result<()> {
        let atom = |s: &Species| {
            let own = |b: &&BandSettings| b.species.as_ref() == Some(s);
            bands.iter().filter(own).any(|b| b.lines.is_some())
        };
        for r in ratios.iter().filter(|r| r.basis == Basis::Column) {
            if !(atom(&r.of) && atom(&r.to)) {
                continue;
            }
            let (of, to) = (
                self.survival(&r.of, geometry)?,
                self.survival(&r.to, geometry)?,
            );
            let (Some(of), Some(to)) = (of, to) else {
                let unknown = if of.is_none() { &r.of } else { &r.to };
                self.caveats.push(Caveat::Other {
                    code: "lifetime-unknown",
                    text: format!(
                        "{}/{}: no photo-ionisation rate of {unknown} is known; the ratio of columns is that of production rates only if both atoms live much longer than they take to leave the aperture",
                        r.of, r.to
                    ),
                });
                continue;
            };
            let factor = |low: f64, high: f64| {
                if (low - 1.0).abs() > (high - 1.0).abs() {
                    low
                } else {
                    high
                }
            };
            // N₁/N₂ over Q₁/Q₂.
            let worst = factor(of.least / to.most, of.most / to.least);
            if (worst - 1.0).abs() > DIFFERENT {
                let transit_s = self.transit_s(geometry)?;
                self.caveats.push(Caveat::Other {
                    code: "column-not-production",
                    text: format!(
                        "{}/{}: atoms leave the aperture in about {transit_s:.1e} s, {} is ionised after {:.1e} s, {} after {:.1e} s; the ratio of columns is up to {worst:.2} times the ratio of production rates",
                        r.of, r.to, r.of, of.shortest_s, r.to, to.shortest_s
                    ),
                });
            }
        }
        Ok(())
    }

    fn survival(&mut self, species: &Species, geometry: &Geometry) -> Result<Option<Survival>> {
        let speed_km_s = self.parent_speed(geometry)?.0;
        let active = self.plan.coma.sun.as_deref() == Some("active");
        let km = ApertureKm::at(&aperture(&self.plan.aperture)?, geometry.observer_au);
        let in_view = |parent_km: f64| {
            let lengths = Lengths {
                parent_km,
                daughter_km: None,
            };
            molecules_km(&lengths, &km)
        };
        let all = in_view(FOREVER_KM);
        let mut out: Option<Survival> = None;
        let mut cited = Vec::new();
        for rate in self.tables.photo_rates_of(species) {
            let per_s = if active {
                rate.active_per_s
            } else {
                rate.quiet_per_s
            };
            let lifetime_s = geometry.heliocentric_au.powi(2) / per_s;
            let share = in_view(speed_km_s * lifetime_s) / all;
            let found = out.get_or_insert(Survival {
                least: share,
                most: share,
                shortest_s: lifetime_s,
            });
            found.least = found.least.min(share);
            found.most = found.most.max(share);
            found.shortest_s = found.shortest_s.min(lifetime_s);
            cited.push(rate.provenance.source.clone());
        }
        for key in cited {
            self.cite(&key);
        }
        Ok(out)
    }
}

/// Share of the atoms in the aperture that ionisation leaves there, over the published rates.
#[derive(Clone, Copy)]
struct Survival {
    least: f64,
    most: f64,
    shortest_s: f64,
}
