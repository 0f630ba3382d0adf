//! Tables for machines: ECSV 1.0, the enhanced CSV of the astronomy community (a YAML header with
//! names, units, types and provenance; then CSV). Values are not rounded; empty cells are missing.

use super::stamp::Stamp;
use super::study::Study;
use crate::report::shortest;
use serde::Serialize;

/// One column: name, unit in the VOUnit-like words of the header, type, meaning.
struct Field {
    name: &'static str,
    unit: &'static str,
    kind: &'static str,
    about: &'static str,
}

const fn field(
    name: &'static str,
    unit: &'static str,
    kind: &'static str,
    about: &'static str,
) -> Field {
    Field {
        name,
        unit,
        kind,
        about,
    }
}

const FLUX: &str = "erg / (s cm2)";
const COLUMN: &str = "1 / cm2";
const RATE: &str = "1 / s";

const WHERE: [Field; 2] = [
    field("comet", "", "string", "name of the comet"),
    field("date", "", "string", "date of observation"),
];

const BANDS: [Field; 12] = [
    field("band", "", "string", "band identifier"),
    field("species", "", "string", "species"),
    field("centre", "Angstrom", "float64", "rest centre in vacuum"),
    field(
        "centre_sigma",
        "Angstrom",
        "float64",
        "its error; missing when held",
    ),
    field("fwhm", "Angstrom", "float64", "full width at half maximum"),
    field(
        "fwhm_sigma",
        "Angstrom",
        "float64",
        "its error; missing when held",
    ),
    field("flux", FLUX, "float64", "band flux"),
    field("flux_sigma", FLUX, "float64", "its error from the fit"),
    field(
        "flux_limit",
        FLUX,
        "float64",
        "upper limit when not detected",
    ),
    field(
        "g",
        "ph / s",
        "float64",
        "fluorescence efficiency per molecule at the comet",
    ),
    field(
        "column",
        COLUMN,
        "float64",
        "mean column density in the aperture",
    ),
    field("column_sigma", COLUMN, "float64", "its error from the fit"),
];

const SPECIES: [Field; 9] = [
    field("species", "", "string", "species"),
    field("detected", "", "bool", "detected"),
    field(
        "column",
        COLUMN,
        "float64",
        "mean column density in the aperture",
    ),
    field("column_sigma", COLUMN, "float64", "its full error"),
    field("production", RATE, "float64", "production rate"),
    field("production_sigma", RATE, "float64", "its full error"),
    field(
        "parent_length",
        "km",
        "float64",
        "scale length of the parent, or of a species from the nucleus",
    ),
    field(
        "daughter_length",
        "km",
        "float64",
        "scale length of the observed daughter",
    ),
    field("speed", "km / s", "float64", "expansion speed"),
];

const RATIOS: [Field; 13] = [
    field("of", "", "string", "numerator"),
    field("to", "", "string", "denominator"),
    field(
        "basis",
        "",
        "string",
        "production rates or column densities",
    ),
    field("kind", "", "string", "value, upper, lower or unconstrained"),
    field("median", "", "float64", "median"),
    field("low68", "", "float64", "15.87 % point"),
    field("high68", "", "float64", "84.13 % point"),
    field("low95", "", "float64", "2.28 % point"),
    field("high95", "", "float64", "97.72 % point"),
    field("limit", "", "float64", "one-sided 99.7 % limit"),
    field("comets", "", "int64", "published comets compared with"),
    field("percentile", "%", "float64", "share of them below"),
    field(
        "heliocentric_distance",
        "AU",
        "float64",
        "heliocentric distance of the comet",
    ),
];

/// `bands.ecsv`, `species.ecsv`, `ratios.ecsv`.
pub(super) fn tables(studies: &[Study], stamp: &Stamp) -> Vec<(&'static str, String)> {
    vec![
        ("bands.ecsv", table(&BANDS, stamp, studies, bands)),
        ("species.ecsv", table(&SPECIES, stamp, studies, species)),
        ("ratios.ecsv", table(&RATIOS, stamp, studies, ratios)),
    ]
}

fn table(
    fields: &[Field],
    stamp: &Stamp,
    studies: &[Study],
    rows_of: impl Fn(&Study) -> Vec<Vec<String>>,
) -> String {
    let all = || WHERE.iter().chain(fields);
    let mut out = String::from("# %ECSV 1.0\n# ---\n# delimiter: ','\n# datatype:\n");
    for f in all() {
        let unit = if f.unit.is_empty() {
            String::new()
        } else {
            format!(", unit: '{}'", f.unit)
        };
        out.push_str(&format!(
            "# - {{name: {}{unit}, datatype: {}, description: '{}'}}\n",
            f.name, f.kind, f.about
        ));
    }
    out.push_str("# meta: !!omap\n");
    let pairs = stamp.pairs();
    let mut said: Vec<&str> = Vec::new();
    for (key, _) in &pairs {
        if said.contains(&key.as_str()) {
            continue;
        }
        said.push(key);
        let values = pairs.iter().filter(|p| p.0 == *key).map(|p| quoted(&p.1));
        let values = values.collect::<Vec<_>>().join(", ");
        out.push_str(&format!("# - {{{key}: [{values}]}}\n"));
    }
    out.push_str("# schema: astropy-2.0\n");
    let mut writer = csv::Writer::from_writer(Vec::new());
    let memory = "invariant: writing rows of one length to memory";
    writer.write_record(all().map(|f| f.name)).expect(memory);
    for s in studies {
        let date = s.settings.date.clone().unwrap_or_default();
        for row in rows_of(s) {
            let lead = [one_line(&s.settings.label), one_line(&date)];
            writer.write_record(lead.iter().chain(&row)).expect(memory);
        }
    }
    let body = writer.into_inner().expect(memory);
    out + &String::from_utf8(body).expect("invariant: cells are UTF-8")
}

/// A YAML scalar in single quotes.
fn quoted(text: &str) -> String {
    format!("'{}'", one_line(text).replace('\'', "''"))
}

fn one_line(text: &str) -> String {
    text.chars()
        .map(|c| if c.is_control() { ' ' } else { c })
        .collect()
}

fn number(v: impl Into<Option<f64>>) -> String {
    let finite = v.into().filter(|v| v.is_finite());
    finite.map_or_else(String::new, shortest)
}

fn word(value: &impl Serialize) -> String {
    match serde_json::to_value(value) {
        Ok(serde_json::Value::String(s)) => s,
        _ => String::new(),
    }
}

fn bands(s: &Study) -> Vec<Vec<String>> {
    let row = |b: &crate::analysis::BandResult| {
        let f = &b.fit;
        vec![
            f.id.clone(),
            b.species
                .as_ref()
                .map_or_else(String::new, ToString::to_string),
            number(f.centre_aa),
            number(f.centre_sigma_aa),
            number(f.fwhm_aa),
            number(f.fwhm_sigma_aa),
            number(f.flux_erg_s_cm2.value),
            number(f.flux_erg_s_cm2.sigma),
            number(f.flux_limit_erg_s_cm2),
            number(b.efficiency.as_ref().map(|g| g.g_photons_s)),
            number(b.column_cm2.map(|c| c.value)),
            number(b.column_cm2.map(|c| c.sigma)),
        ]
    };
    s.analysis.bands.iter().map(row).collect()
}

fn species(s: &Study) -> Vec<Vec<String>> {
    let row = |r: &crate::analysis::SpeciesResult| {
        let mut all = s.settings.species.iter();
        let coma = all
            .find(|t| t.species == r.species)
            .and_then(|t| t.coma.as_ref());
        vec![
            r.species.to_string(),
            if r.detected { "True" } else { "False" }.to_owned(),
            number(r.column_cm2.value),
            number(r.column_cm2.sigma),
            number(r.production_per_s.map(|q| q.value)),
            number(r.production_per_s.map(|q| q.sigma)),
            number(coma.map(|c| c.lengths.parent_km)),
            number(coma.and_then(|c| c.lengths.daughter_km)),
            number(coma.map(|c| c.speed_km_s)),
        ]
    };
    s.analysis.species.iter().map(row).collect()
}

fn ratios(s: &Study) -> Vec<Vec<String>> {
    let row = |r: &crate::analysis::RatioResult| {
        let i = r.ratio.interval;
        vec![
            r.ratio.of.to_string(),
            r.ratio.to.to_string(),
            word(&r.ratio.basis),
            word(&r.ratio.kind),
            number(i.map(|i| i.median)),
            number(i.map(|i| i.low68)),
            number(i.map(|i| i.high68)),
            number(i.map(|i| i.low95)),
            number(i.map(|i| i.high95)),
            number(r.ratio.limit),
            r.known.len().to_string(),
            number(r.standing.map(|s| s.percentile)),
            number(s.settings.geometry.heliocentric_au),
        ]
    };
    s.analysis.ratios.iter().map(row).collect()
}
