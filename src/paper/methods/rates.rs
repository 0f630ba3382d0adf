//! From fluxes to molecules and production rates: the constants in use with their sources.

use super::super::bib::{References, published_in, sources_of};
use super::super::latex::harmless;
use super::super::rounding::number;
use super::super::study::Study;
use super::super::tables::band_name;
use super::{list, per_cent};
use crate::analysis::BandResult;
use crate::tables::Source;

pub(super) fn rates(s: &Study, refs: &mut References) -> String {
    let computed = |b: &&BandResult| is_computed(b);
    let listed: Vec<&BandResult> = s
        .analysis
        .bands
        .iter()
        .filter(|b| !is_computed(b))
        .collect();
    let mut g: Vec<String> = listed
        .into_iter()
        .filter_map(|b| efficiency(s, b, refs))
        .collect();
    for t in &s.settings.species {
        let own: Vec<&BandResult> = s
            .analysis
            .bands
            .iter()
            .filter(computed)
            .filter(|b| b.species.as_ref() == Some(&t.species))
            .collect();
        match own[..] {
            [] => {}
            [one] => g.extend(efficiency(s, one, refs)),
            _ => g.push(line_groups(s, &t.species.pretty(), &own, refs)),
        }
    }
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

fn is_computed(b: &BandResult) -> bool {
    let source = b.efficiency.as_ref().map(|g| g.source.as_str());
    source.is_some_and(|t| t.starts_with("equilibrium"))
}

/// All line groups of one species in one phrase.
fn line_groups(s: &Study, name: &str, own: &[&BandResult], refs: &mut References) -> String {
    let all: Vec<_> = own.iter().filter_map(|b| b.efficiency.as_ref()).collect();
    let values = all.iter().map(|g| g.g_photons_s);
    let (low, high) = values.fold((f64::INFINITY, 0.0_f64), |(a, b), v| (a.min(v), b.max(v)));
    let mut sources: Vec<Source> = Vec::new();
    for g in &all {
        let own = sources_of(s, &g.source);
        let found = if own.is_empty() {
            published_in(&g.source)
        } else {
            own
        };
        for source in found {
            if !sources.iter().any(|k| k.key == source.key) {
                sources.push(source);
            }
        }
    }
    let cite = refs.cite(&sources);
    format!(
        "{} to {} for the lines of {name} in {} windows, statistical equilibrium{cite}",
        number(low),
        number(high),
        own.len()
    )
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
