//! Identifications as table and CSV.

use crate::ground::{Caveat, air_from_vacuum_aa};
use crate::identify::{Candidate, Found, Identification, MATCH_SIGMA};

/// First line of the CSV.
pub(super) const CSV_HEAD: &str = "spectrum,peak,wavelength_air_aa,wavelength_vacuum_aa,sigma_aa,significance,fwhm_aa,flux_erg_s_cm2,chance,rank,species,transition,line_vacuum_aa,offset_aa,offset_sigma,g_photons_s,relative_strength,origin\n";

/// What the names rest on.
pub(super) const SOURCES: &str = "sources: atlas – Cochran & Cochran 2002, comet 122P/de Vico, NASA PDS EAR-C-CS2-5-RDR-DEVICO-ATLAS-V1.0; atoms – NIST, laboratory and Kurucz data as listed by `comagauge efficiency`; CN – Brooke et al. 2014, ApJS 210, 23. OH and NH are in none of these lists: their peaks stay without a name or get a wrong one";

/// Other species named beside the best.
const ALSO: usize = 3;

/// One row per peak and candidate; a peak without candidates has one row with an empty species.
pub(super) fn csv(spectrum: &str, named: &[Identification]) -> String {
    let mut out = String::new();
    for (i, id) in named.iter().enumerate() {
        let p = &id.peak;
        let head = format!(
            "{},{},{:.4},{:.4},{:.4},{:.1},{:.4},{:.4e},{:.3}",
            quoted(spectrum),
            i + 1,
            air_from_vacuum_aa(p.wavelength_vacuum_aa),
            p.wavelength_vacuum_aa,
            p.sigma_aa,
            p.significance,
            p.fwhm_aa,
            p.flux_erg_s_cm2,
            id.chance
        );
        for (rank, c) in id.candidates.iter().enumerate() {
            out.push_str(&format!("{head},{},{}\n", rank + 1, candidate(c)));
        }
        if id.candidates.is_empty() {
            out.push_str(&format!("{head},,,,,,,,,\n"));
        }
    }
    out
}

fn candidate(c: &Candidate) -> String {
    let line = &c.line;
    let predicted = line.g_photons_s.is_some();
    format!(
        "{},{},{:.4},{:.4},{:.2},{},{},{}",
        line.species.as_ref().map_or("", |s| s.as_str()),
        quoted(&line.transition),
        line.wavelength_vacuum_aa,
        c.offset_aa,
        c.offset_sigma,
        line.g_photons_s
            .map_or_else(String::new, |g| format!("{g:.4e}")),
        if predicted {
            format!("{:.4}", line.relative)
        } else {
            String::new()
        },
        line.origin.as_str()
    )
}

fn quoted(text: &str) -> String {
    format!("\"{}\"", text.replace('"', "\"\""))
}

/// A table for people: the best candidate of each peak, then the peaks without a name.
pub(super) fn table(spectrum: &str, named: &[Identification]) -> String {
    let with_name = || named.iter().filter(|i| i.best().is_some());
    let mut out = format!(
        "{spectrum}: {} peaks, {} with a name\n",
        named.len(),
        with_name().count()
    );
    out.push_str(&format!(
        "{:>11} {:>7} {:>8} {:7} {:>7} {:>7}  {:34} also\n",
        "air Å", "± Å", "signif.", "species", "σ off", "chance", "transition"
    ));
    for id in with_name() {
        let Some(best) = id.best() else { continue };
        out.push_str(&format!(
            "{:11.3} {:7.3} {:8.1} {:7} {:7.1} {:>7}  {:34} {}\n",
            air_from_vacuum_aa(id.peak.wavelength_vacuum_aa),
            id.peak.sigma_aa,
            id.peak.significance,
            best.line.species.as_ref().map_or("", |s| s.as_str()),
            best.offset_sigma,
            format!("{:.0} %", 100.0 * id.chance),
            transition(best),
            also(id).join(", ")
        ));
    }
    let open: Vec<&Identification> = named.iter().filter(|i| i.best().is_none()).collect();
    if !open.is_empty() {
        out.push_str("without a name:\n");
    }
    for id in open {
        let seen = if id.candidates.is_empty() {
            ""
        } else {
            "  seen in the atlas, not identified there"
        };
        out.push_str(&format!(
            "{:11.3} {:7.3} {:8.1}{seen}\n",
            air_from_vacuum_aa(id.peak.wavelength_vacuum_aa),
            id.peak.sigma_aa,
            id.peak.significance
        ));
    }
    out
}

fn transition(c: &Candidate) -> String {
    match c.line.g_photons_s {
        Some(_) => format!("{} ({:.0} %)", c.line.transition, 100.0 * c.line.relative),
        None => c.line.transition.clone(),
    }
}

/// Other species among the candidates, best first.
fn also(id: &Identification) -> Vec<&str> {
    let mut found: Vec<&str> = Vec::new();
    for c in &id.candidates {
        let Some(species) = &c.line.species else {
            continue;
        };
        let name = species.as_str();
        if id.species() != Some(species) && !found.contains(&name) {
            found.push(name);
        }
    }
    found.truncate(ALSO);
    found
}

/// Doubts about the names as a whole.
pub(super) fn doubts(spectrum: &str, found: &Found, named: &[Identification]) -> Vec<Caveat> {
    let mut caveats = Vec::new();
    if named.is_empty() {
        return vec![Caveat::Other {
            code: "no-peaks",
            text: format!("{spectrum}: no peak reaches the significance asked for"),
        }];
    }
    let chance: f64 = named.iter().map(|i| i.chance).sum::<f64>() / named.len() as f64;
    caveats.push(Caveat::Other {
        code: "chance-names",
        text: format!(
            "{spectrum}: {:.0} % of places chosen blindly among these peaks would get a name within {MATCH_SIGMA} σ",
            100.0 * chance
        ),
    });
    let wide = named
        .iter()
        .filter(|i| found.resolution.fwhm_aa(i.peak.wavelength_vacuum_aa) > 0.5)
        .count();
    if 2 * wide > named.len() {
        caveats.push(Caveat::Other {
            code: "blended-peaks",
            text: format!(
                "{spectrum}: at this resolution a peak holds many lines; the names tell what lies at its centre, not what it is made of"
            ),
        });
    }
    caveats
}
