//! Results in plain language, for readers without the field's vocabulary.

use super::rounding::{decimals, fixed};
use super::study::Study;
use crate::analysis::RatioResult;
use crate::ground::Species;
use crate::ratio::{Basis, Interval, RatioKind};

/// Fewer comets than this allow no judgement.
const FEW_COMETS: usize = 10;
/// Percentiles beyond which a value is called unusual, when its whole interval lies beyond.
const UNUSUAL: (f64, f64) = (10.0, 90.0);
/// Percentiles beyond which it is called lowish or highish.
const LEANING: (f64, f64) = (30.0, 70.0);

/// What was found about one ratio, how sure it is, and how it compares.
pub(super) struct Finding {
    /// The finding.
    pub found: String,
    /// How sure.
    pub sure: String,
    /// Its place among comets; empty when there is nothing to compare with.
    pub place: String,
}

/// One finding per ratio that the data constrain.
pub(super) fn findings(s: &Study) -> Vec<Finding> {
    s.analysis.ratios.iter().map(finding).collect()
}

/// A species by its everyday name, with its formula.
pub(super) fn name(species: &Species) -> String {
    let everyday = match species.as_str() {
        "H2O" => "water",
        "CO2" => "carbon dioxide",
        "CO" => "carbon monoxide",
        "OH" => "hydroxyl",
        "CN" => "cyanogen",
        "C2" => "two-atom carbon",
        "C3" => "three-atom carbon",
        "NH" => "imidogen",
        "NH2" => "amidogen",
        "CH" => "methylidyne",
        "CH4" => "methane",
        "C2H6" => "ethane",
        "C2H2" => "acetylene",
        "CH3OH" => "methanol",
        "H2CO" => "formaldehyde",
        "HCN" => "hydrogen cyanide",
        "NH3" => "ammonia",
        "OCS" => "carbonyl sulphide",
        "Ni I" => "nickel",
        "Fe I" => "iron",
        _ => return species.pretty(),
    };
    format!("{everyday} ({})", species.pretty())
}

fn particles(species: &Species) -> &'static str {
    if species.as_str().contains(' ') {
        "atoms"
    } else {
        "molecules"
    }
}

/// A round number of reference particles that makes the count easy to read.
fn reference(ratio: f64) -> f64 {
    let mut n = 100.0;
    while ratio * n < 10.0 && n < 1e12 {
        n *= 10.0;
    }
    n
}

fn round_number(n: f64) -> String {
    let digits = format!("{n:.0}");
    let mut out = String::new();
    for (i, c) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) && digits.len() > 4 {
            out.push('\u{A0}');
        }
        out.push(c);
    }
    out
}

fn finding(r: &RatioResult) -> Finding {
    let (of, to) = (&r.ratio.of, &r.ratio.to);
    let where_to = match r.ratio.basis {
        Basis::Production => "that left the comet",
        Basis::Column => "in view",
    };
    let per = |n: f64| {
        format!(
            "for every {} {} {} {where_to}",
            round_number(n),
            particles(to),
            of_name(to)
        )
    };
    match (r.ratio.kind, r.ratio.interval, r.ratio.limit) {
        (RatioKind::Value, Some(i), _) if i.median > 0.0 => measured(r, &i, &per),
        (RatioKind::Upper, _, Some(limit)) => Finding {
            found: format!(
                "No {} was seen: {} there were fewer than {} {} of it.",
                name(of),
                per(reference(limit)),
                fixed((limit * reference(limit)).ceil(), 0),
                particles(of)
            ),
            sure: "This bound holds with a chance of 99.7 %.".to_owned(),
            place: String::new(),
        },
        (RatioKind::Lower, _, Some(limit)) => Finding {
            found: format!(
                "{} was seen but no {}: {} there were more than {} {} of {}.",
                capital(&name(of)),
                name(to),
                per(reference(limit)),
                fixed((limit * reference(limit)).floor(), 0),
                particles(of),
                name(of)
            ),
            sure: "This bound holds with a chance of 99.7 %.".to_owned(),
            place: String::new(),
        },
        _ => Finding {
            found: format!(
                "Neither {} nor {} was seen clearly enough to say anything about their ratio.",
                name(of),
                name(to)
            ),
            sure: String::new(),
            place: String::new(),
        },
    }
}

/// `of water (H₂O)`.
fn of_name(species: &Species) -> String {
    format!("of {}", name(species))
}

fn capital(text: &str) -> String {
    let mut chars = text.chars();
    chars.next().map_or_else(String::new, |c| {
        c.to_uppercase().collect::<String>() + chars.as_str()
    })
}

fn measured(r: &RatioResult, i: &Interval, per: &dyn Fn(f64) -> String) -> Finding {
    let n = reference(i.median);
    let error = n * (i.high68 - i.median).min(i.median - i.low68);
    // Whole numbers are easier to read than the last digit that the error would allow.
    let places = if error > 0.0 {
        decimals(error).min(i32::from(n * i.median < 10.0))
    } else {
        1
    };
    let count = |v: f64| fixed(n * v, places);
    let of = &r.ratio.of;
    Finding {
        found: format!(
            "{} there were about {} {} {}.",
            capital(&per(n)),
            count(i.median),
            particles(of),
            of_name(of)
        ),
        sure: format!(
            "The true number lies between {} and {} with a chance of two in three, and between {} and {} with a chance of 19 in 20, as far as the errors are known.",
            count(i.low68),
            count(i.high68),
            count(i.low95),
            count(i.high95)
        ),
        place: place(r),
    }
}

fn place(r: &RatioResult) -> String {
    let Some(s) = r.standing else {
        return "No published comets have this ratio, so nothing can be said about how unusual it is."
            .to_owned();
    };
    if s.comets < FEW_COMETS {
        let noun = if s.comets == 1 {
            "comet has"
        } else {
            "comets have"
        };
        return format!(
            "Only {} other {noun} a published value: too few to say whether this is unusual.",
            s.comets
        );
    }
    let verdict = if s.percentile_low >= UNUSUAL.1 {
        "unusually high"
    } else if s.percentile_high <= UNUSUAL.0 {
        "unusually low"
    } else if s.percentile_low >= LEANING.1 {
        "on the high side, but not unusual"
    } else if s.percentile_high <= LEANING.0 {
        "on the low side, but not unusual"
    } else {
        "an ordinary value for a comet"
    };
    format!(
        "That is {verdict}: it is higher than in about {:.0} % of {} comets with published values (between {:.0} and {:.0} %, given the errors).",
        s.percentile, s.comets, s.percentile_low, s.percentile_high
    )
}

/// What a kind of caveat means for the reader.
pub(super) fn doubt(code: &str) -> &'static str {
    match code {
        "from-memory" => {
            "Some constants were recalled from memory and not checked in the publication. If one is wrong, the result is wrong by the same factor."
        }
        "sources-disagree" => {
            "Publications disagree about some constants. The error bars hold the stated error of the one used, not always the whole disagreement."
        }
        "swings-ignored" => {
            "How strongly these gases shine depends on the comet's speed along the line to the Sun; the value used is an average."
        }
        "gaussian-for-structured" => {
            "A simple bell curve stands for a feature with a more complex shape. The amount of light in it can be off by more than its error bar says."
        }
        "samples-left-out" => "Some data points were flagged as bad and were not used.",
        "thin-comparison" => {
            "Very few other comets have a published value of these ratios; the comparison means little."
        }
        "errors-estimated" => {
            "The data came without errors; they were estimated from the scatter, so the error bars are rough."
        }
        "poor-fit" => {
            "The model does not describe the data well here; do not trust these error bars."
        }
        "unmodelled-band" => {
            "Light of another gas may lie in the same range and was not taken into account."
        }
        "shape-held" => "The shape of these features could not be measured and was set beforehand.",
        "undersampled" => "The data points are too far apart to follow these features.",
        "optical-depth" => {
            "The gas may be so dense that it hides part of its own light; the true amount would be larger."
        }
        "water-freezes" => {
            "So far from the Sun water ice hardly evaporates: ratios to water are high for that reason alone."
        }
        "series-varies" => "The dates differ by more than their errors; the mean hides this.",
        "bands-disagree" => {
            "Different features of the same gas give different amounts; something is mixed in or a constant is wrong."
        }
        "sun-coarse" => {
            "The picture of sunlight used under the gas is less sharp than the data in part of the range."
        }
        "red-bands-in-outline" | "water-levels-by-energy" => {
            "How strongly one of these gases shines was computed with a simplified model of the molecule; it may be off by some per cent."
        }
        "afrho-aperture" => {
            "The measure of dust is for a round opening that lets in as much light as the real one."
        }
        "samples-clipped" => {
            "Some data points far off the rest, such as hits of cosmic rays, were dropped."
        }
        "spikes" => {
            "Some data points lie far off the rest, as hits of cosmic rays do, and were kept."
        }
        "correlated-noise" | "resampling-uncorrelated" => {
            "Neighbouring data points err together, which makes the result less sure; the error bars were raised for it where that was possible."
        }
        "errors-scaled" | "errors-too-small" => {
            "The errors given with the data do not match their scatter."
        }
        "integral-gaps" | "integral-not-clipped" => {
            "The light of a feature was summed up point by point, and some points are missing or may be hits of cosmic rays."
        }
        "temperature-assumed" | "temperature-open" => {
            "A temperature that shapes the model is not well known."
        }
        "transmission-divided" => {
            "The dimming by the air was divided out with a curve whose own errors are not known."
        }
        "line-discordant" | "line-scatter" => {
            "Some lines of an element disagree with the others; the error bars were widened or the lines are named so that they can be left out."
        }
        "column-not-production" | "lifetime-unknown" => {
            "The ratio is of what was in view; the ratio of what leaves the comet may differ."
        }
        "not-in-equilibrium" | "levels-without-decay" | "levels-without-return" => {
            "The atoms may not have had the time, or the model not the data, to settle as assumed."
        }
        "no-calibration-error" => {
            "The error of the brightness scale was not given and is not in the error bars."
        }
        "narrower-than-instrument" | "flux-on-limit" | "walkers-stuck" => {
            "Part of the model ended at the edge of what it was allowed; its error bars are rough."
        }
        "far-from-epoch" | "geometry-differs" => {
            "The place of the comet was computed far from the date of its orbit."
        }
        "spectrum-unused" => "One of the spectra shows none of the features asked for.",
        "nothing-to-compare" => "No published comets have these ratios.",
        _ => "A technical remark; open it to read it.",
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_for_people() {
        assert_eq!(reference(0.158), 100.0);
        assert_eq!(reference(0.00247), 10_000.0);
        assert_eq!(reference(1.3), 100.0);
        assert_eq!(round_number(10_000.0), "10\u{A0}000");
        assert_eq!(round_number(1000.0), "1000");
        assert_eq!(name(&Species::new("CO2")), "carbon dioxide (CO₂)");
        assert_eq!(name(&Species::new("S2")), "S₂");
    }
}
