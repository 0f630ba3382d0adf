//! From fluxes to molecules and production rates: the constants in use with their sources.

use super::super::bib::{References, published_in, sources_of};
use super::super::latex::harmless;
use super::super::rounding::number;
use super::super::study::Study;
use super::super::tables::band_name;
use super::{list, per_cent};
use crate::analysis::BandResult;

pub(super) fn rates(s: &Study, refs: &mut References) -> String {
    let g: Vec<String> = s
        .analysis
        .bands
        .iter()
        .filter_map(|b| efficiency(s, b, refs))
        .collect();
    let mut out = format!(
        "Fluxes were turned into molecules with fluorescence efficiencies at the heliocentric distance of the comet, in photons s⁻¹ molecule⁻¹: {}.",
        list(&g)
    );
    let without: Vec<String> = s
        .analysis
        .bands
        .iter()
        .filter(|b| b.efficiency.is_none())
        .map(|b| harmless(&b.fit.id))
        .collect();
    if !without.is_empty() {
        out.push_str(&format!(" No efficiency is known for {}.", list(&without)));
    }
    let haser = refs.cite_haser();
    let lengths = scale_lengths(s, refs);
    if !lengths.is_empty() {
        out.push_str(&format!(
            " Production rates follow from the Haser model{haser}, integrated over the aperture, with these scale lengths at the comet (for daughters of the parent and of the species itself) and expansion speeds: {}.",
            lengths.join("; ")
        ));
    }
    out
}

/// Scale lengths, species with the same source and speed together.
fn scale_lengths(s: &Study, refs: &mut References) -> Vec<String> {
    let mut groups: Vec<(&str, f64, Vec<String>)> = Vec::new();
    for t in &s.settings.species {
        let Some(coma) = &t.coma else { continue };
        let lengths = match coma.lengths.daughter_km {
            Some(d) => format!("{} and {} km", number(coma.lengths.parent_km), number(d)),
            None => format!("{} km", number(coma.lengths.parent_km)),
        };
        let text = format!("{} {lengths}", t.species.pretty());
        let same = |g: &&mut (&str, f64, Vec<String>)| {
            g.0 == coma.source.as_str() && g.1 == coma.speed_km_s
        };
        match groups.iter_mut().find(same) {
            Some(group) => group.2.push(text),
            None => groups.push((&coma.source, coma.speed_km_s, vec![text])),
        }
    }
    let said = |(source, speed, texts): (&str, f64, Vec<String>)| {
        let cite = refs.cite(&sources_of(s, source));
        format!("{}, at {} km s⁻¹{cite}", texts.join(", "), number(speed))
    };
    groups.into_iter().map(said).collect()
}

fn efficiency(s: &Study, b: &BandResult, refs: &mut References) -> Option<String> {
    let g = b.efficiency.as_ref()?;
    let mut cite = refs.cite(&sources_of(s, &g.source));
    if cite.is_empty() {
        cite = refs.cite(&published_in(&g.source));
    }
    let source = if cite.is_empty() {
        format!(" ({})", harmless(&g.source))
    } else if g.source.starts_with("equilibrium") {
        format!(", statistical equilibrium{cite}")
    } else {
        cite
    };
    Some(format!(
        "{} for {} (error {}){source}",
        number(g.g_photons_s),
        band_name(b),
        per_cent(g.relative_sigma)
    ))
}
