//! What the lines of a species say against its column.

use super::measure::{ByLine, LineResult};
use crate::ground::Caveat;

/// Most lines named in one caveat.
const MOST_NAMED: usize = 8;
/// Where more than one line in this many is discordant, the lines are not to blame.
const MOST_SHARE: usize = 3;
/// Factor on the error from which the scatter is worth a word.
const WORTH_SAYING: f64 = 1.05;

/// Discordant lines with the text that leaves them out, and scatter beyond the errors.
pub(super) fn note(found: &ByLine, caveats: &mut Vec<Caveat>) {
    discordant(found, caveats);
    scatter(found, caveats);
}

fn discordant(found: &ByLine, caveats: &mut Vec<Caveat>) {
    // One word per feature: its strongest line stands for it.
    let mut named: Vec<&LineResult> = Vec::new();
    for l in found.lines.iter().filter(|l| l.discordant) {
        match named.iter_mut().find(|n| n.feature == l.feature) {
            Some(n) if l.line.g_erg_s > n.line.g_erg_s => *n = l,
            Some(_) => {}
            None => named.push(l),
        }
    }
    if named.is_empty() {
        return;
    }
    if named.len() * MOST_SHARE > found.features {
        caveats.push(Caveat::Other {
            code: "line-discordant",
            text: format!(
                "{}: {} of its {} lines do not belong to one column: not single lines but the conditions, the resolution or the identification are in doubt; see lines.csv",
                found.species,
                named.len(),
                found.features
            ),
        });
        return;
    }
    named.sort_by(|a, b| b.pull.abs().total_cmp(&a.pull.abs()));
    let left = named.len().saturating_sub(MOST_NAMED);
    named.truncate(MOST_NAMED);
    let common = found.robust_cm2.value;
    let texts: Vec<String> = named
        .iter()
        .map(|l| {
            format!(
                "{:.2} Å air ({:.2} times the common column, {:+.1} σ)",
                l.line.wavelength_air_aa,
                l.column_cm2.value / common,
                l.pull
            )
        })
        .collect();
    let more = if left > 0 {
        format!(" and {left} more (lines.csv)")
    } else {
        String::new()
    };
    let without: Vec<String> = named.iter().map(|l| format!("{:.2}", l.in_plan)).collect();
    let remedy = if found.robust {
        "they weigh little in the robust mean; to leave them out add"
    } else {
        "set robust = true, or leave them out with"
    };
    caveats.push(Caveat::Other {
        code: "line-discordant",
        text: format!(
            "{}: lines that do not belong to the common column, by a blend or a wrong g: {}{more}; {remedy} without = [{}]",
            found.species,
            texts.join(", "),
            without.join(", ")
        ),
    });
}

fn scatter(found: &ByLine, caveats: &mut Vec<Caveat>) {
    if found.error_factor < WORTH_SAYING {
        return;
    }
    let chi2 = if found.robust {
        found.robust_reduced_chi2
    } else {
        found.reduced_chi2
    };
    caveats.push(Caveat::Other {
        code: "line-scatter",
        text: format!(
            "{}: the columns of its {} lines scatter more than their errors allow (reduced chi-square {chi2:.1}); the error of its column was multiplied by {:.2}",
            found.species, found.features, found.error_factor
        ),
    });
}
