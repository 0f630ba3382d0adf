//! Published statistics of comet populations, and solar and meteoritic abundances.

use super::comparison::Basis;
use super::provenance::{Confidence, Provenance, Sources};
use super::sheet::{Row, Sheet};
use crate::ground::{Result, Species};

/// What a published number says about a population.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Statistic {
    /// Arithmetic mean (of logarithms where the scale is log10).
    Mean,
    /// Median.
    Median,
    /// A rounded typical value.
    Typical,
    /// A class boundary.
    Threshold,
    /// A fraction of the group.
    Fraction,
    /// Lower end of the observed range.
    RangeLow,
    /// Upper end of the observed range.
    RangeHigh,
    /// Excess over the solar ratio.
    Excess,
    /// A conversion factor.
    Conversion,
}

impl Statistic {
    const WORDS: &[(&str, Self)] = &[
        ("mean", Self::Mean),
        ("median", Self::Median),
        ("typical", Self::Typical),
        ("threshold", Self::Threshold),
        ("fraction", Self::Fraction),
        ("range low", Self::RangeLow),
        ("range high", Self::RangeHigh),
        ("excess", Self::Excess),
        ("conversion", Self::Conversion),
    ];
}

/// A published statistic of a group of comets.
#[derive(Clone, Debug, PartialEq)]
pub struct PopulationRow {
    /// The quantity in words.
    pub quantity: String,
    /// Numerator, where the quantity belongs to a ratio of two species.
    pub of: Option<Species>,
    /// Denominator, likewise.
    pub to: Option<Species>,
    /// Production rates or columns, for a ratio.
    pub basis: Option<Basis>,
    /// Whether the ratio is meant as its decimal logarithm.
    pub log10: bool,
    /// Group of comets.
    pub group: String,
    /// What the number is.
    pub statistic: Statistic,
    /// The number.
    pub value: f64,
    /// Its published error or scatter.
    pub sigma: Option<f64>,
    /// Number of comets, where published.
    pub comets: Option<usize>,
    /// Technique.
    pub method: String,
    /// How far the number is trusted.
    pub confidence: Confidence,
    /// Source.
    pub provenance: Provenance,
}

impl PopulationRow {
    pub(super) const COLUMNS: &[&str] = &[
        "quantity",
        "of",
        "to",
        "basis",
        "scale",
        "group",
        "statistic",
        "value",
        "sigma",
        "n",
        "method",
        "source",
        "how",
        "confidence",
        "note",
    ];

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        let key = |p: &Self| {
            format!(
                "{:?} of {} in {} by {} ({})",
                p.statistic, p.quantity, p.group, p.provenance.source, p.provenance.note
            )
        };
        sheet.read("statistic", key, |row| Self::read(row, sources))
    }

    fn read(row: &Row, sources: &Sources) -> Result<Self> {
        let given = |column: &str| !row.text(column).is_empty();
        let is_ratio = given("of");
        if ["to", "basis", "scale"]
            .iter()
            .any(|c| given(c) != is_ratio)
        {
            return Err(row.fail(
                "of, to, basis and scale are not given together".into(),
                "give all four for a ratio of two species, none otherwise",
            ));
        }
        let species = |column: &str| is_ratio.then(|| Species::new(row.text(column)));
        Ok(Self {
            quantity: row.required("quantity")?.to_owned(),
            of: species("of"),
            to: species("to"),
            basis: is_ratio
                .then(|| row.word("basis", Basis::WORDS))
                .transpose()?,
            log10: is_ratio && row.word("scale", &[("ratio", false), ("log10", true)])?,
            group: row.required("group")?.to_owned(),
            statistic: row.word("statistic", Statistic::WORDS)?,
            value: row.number("value", -40.0..=1.0e6)?,
            sigma: row.optional("sigma", 0.0..=1.0e6)?,
            comets: row.optional("n", 1.0..=1.0e6)?.map(|n| n as usize),
            method: row.text("method").to_owned(),
            confidence: row.word("confidence", Confidence::WORDS)?,
            provenance: sources.provenance(row)?,
        })
    }
}

/// Scale of a solar abundance.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum AbundanceScale {
    /// log10(N/N_H) + 12.
    DexHydrogen12,
    /// log10 of the number ratio.
    Dex,
    /// Number ratio.
    Ratio,
}

/// A solar or meteoritic abundance.
#[derive(Clone, Debug, PartialEq)]
pub struct SolarAbundance {
    /// Element.
    pub element: String,
    /// Element it is compared with, usually `H`.
    pub relative_to: String,
    /// `solar photosphere`, `CI chondrites` …
    pub set: String,
    /// Scale of value and sigma.
    pub scale: AbundanceScale,
    /// Value.
    pub value: f64,
    /// Standard deviation, where published.
    pub sigma: Option<f64>,
    /// How far the number is trusted.
    pub confidence: Confidence,
    /// Source.
    pub provenance: Provenance,
}

impl SolarAbundance {
    pub(super) const COLUMNS: &[&str] = &[
        "element",
        "relative_to",
        "set",
        "scale",
        "value",
        "sigma",
        "source",
        "how",
        "confidence",
        "note",
    ];

    /// log10 of the number ratio to `relative_to`.
    pub fn log10_ratio(&self) -> f64 {
        match self.scale {
            AbundanceScale::DexHydrogen12 => self.value - 12.0,
            AbundanceScale::Dex => self.value,
            AbundanceScale::Ratio => self.value.log10(),
        }
    }

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources) -> Result<Vec<Self>> {
        let key = |a: &Self| {
            format!(
                "{}/{} of {} by {}",
                a.element, a.relative_to, a.set, a.provenance.source
            )
        };
        sheet.read("abundance", key, |row| {
            let scale = row.word(
                "scale",
                &[
                    ("dex H=12", AbundanceScale::DexHydrogen12),
                    ("dex", AbundanceScale::Dex),
                    ("ratio", AbundanceScale::Ratio),
                ],
            )?;
            let range = match scale {
                AbundanceScale::Ratio => f64::MIN_POSITIVE..=1.0e6,
                _ => -20.0..=20.0,
            };
            Ok(Self {
                element: row.required("element")?.to_owned(),
                relative_to: row.required("relative_to")?.to_owned(),
                set: row.required("set")?.to_owned(),
                scale,
                value: row.number("value", range)?,
                sigma: row.optional("sigma", 0.0..=10.0)?,
                confidence: row.word("confidence", Confidence::WORDS)?,
                provenance: sources.provenance(row)?,
            })
        })
    }
}
