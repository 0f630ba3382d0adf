//! A comparison in plain language.

use crate::comparison::{ClassTest, Likeness, Membership, RatioComparison, SubjectValue};
use crate::ground::Caveat;
use crate::standing::Known;
use crate::tables::Tables;

/// Comets nearest in distance stand behind the sentence; this is said once.
const RULES: &str = "One comet, one vote: values before limits, then the measurement nearest in heliocentric distance.\nPercentile intervals are 68 %; they hold the comet's own error, the number of comets and their limits.\n";

/// The whole comparison as text.
pub fn comparison_text(
    found: &[RatioComparison],
    likeness: &[(String, Likeness)],
    refused: &[Caveat],
    tables: &Tables,
) -> String {
    let mut out = String::new();
    for c in found {
        out.push_str(&paragraph(c, tables));
        out.push('\n');
    }
    for (label, l) in likeness {
        out.push_str(&nearest(label, l));
    }
    let caveats: Vec<String> = found
        .iter()
        .flat_map(|c| &c.caveats)
        .chain(refused)
        .map(ToString::to_string)
        .collect();
    if !caveats.is_empty() {
        out.push_str("\nTo doubt:\n");
        for c in caveats {
            out.push_str(&format!("  {c}\n"));
        }
    }
    out.push('\n');
    out.push_str(RULES);
    out
}

fn paragraph(c: &RatioComparison, tables: &Tables) -> String {
    let name = format!("{}/{}", c.of.pretty(), c.to.pretty());
    let mut out = format!("{}, {name}{}\n", c.label, dates(c));
    out.push_str(&format!("  {}\n", sentence(c, &name)));
    if let Some(s) = c.without_selection {
        out.push_str(&format!(
            "  without the selection: higher than {:.0} ({:.0}–{:.0}) % of {} comets\n",
            s.percentile, s.percentile_low, s.percentile_high, s.comets
        ));
    }
    if let Some(m) = c.population_median {
        out.push_str(&format!("  median of the comets {}\n", number(m)));
    }
    if let Some(t) = &c.classes {
        out.push_str(&format!("  {}\n", class_sentence(t)));
    }
    out.push_str(&distance_lines(c, &name));
    if let Some(m) = &c.carbon {
        out.push_str(&carbon_lines(m, tables));
    }
    out
}

fn dates(c: &RatioComparison) -> String {
    let r = c
        .r_h_au
        .map_or_else(String::new, |r| format!(" at {r:.2} au"));
    match c.dates.len() {
        1 => r,
        n => format!("{r}, {n} dates as one series"),
    }
}

fn number(v: f64) -> String {
    let digits = (2 - v.abs().log10().floor() as i32).clamp(0, 8) as usize;
    if (1e-5..1e5).contains(&v.abs()) {
        format!("{v:.digits$}")
    } else {
        format!("{v:.2e}")
    }
}

fn comets(n: usize) -> String {
    if n == 1 {
        "1 comet".to_owned()
    } else {
        format!("{n} comets")
    }
}

/// "0.24 (0.22–0.26), higher than 96 (91–98) % of 34 comets; 2 of 34 exceed it".
fn sentence(c: &RatioComparison, name: &str) -> String {
    let n = c.known.len();
    let limits = c.known.iter().filter(|e| e.known != Known::Value).count();
    let among = match limits {
        0 => comets(n),
        k => format!("{} ({k} of them limits)", comets(n)),
    };
    let head = match (c.value, c.standing) {
        (SubjectValue::Measured { median, low, high }, Some(s)) => format!(
            "{name} = {} ({}–{}), higher than {:.0} ({:.0}–{:.0}) % of {among}",
            number(median),
            number(low),
            number(high),
            s.percentile,
            s.percentile_low,
            s.percentile_high
        ),
        (SubjectValue::Measured { median, .. }, None) => {
            format!(
                "{name} = {}; the {among} give no distribution",
                number(median)
            )
        }
        (SubjectValue::Upper(v), _) => format!("{name} < {}, among {among}", number(v)),
        (SubjectValue::Lower(v), _) => format!("{name} > {}, among {among}", number(v)),
    };
    let verb = if c.tail.above == 1 {
        "exceeds"
    } else {
        "exceed"
    };
    let undecided = match c.tail.undecided {
        0 => String::new(),
        k => format!(", {k} could (limits)"),
    };
    format!(
        "{head}; {} of {n} {verb} it{undecided}, which stands for {:.1}–{:.1} % of comets",
        c.tail.above,
        100.0 * c.tail.low,
        100.0 * c.tail.high
    )
}

fn class_sentence(t: &ClassTest) -> String {
    let count = |(n, k): (usize, usize)| match k {
        0 => format!("{n}"),
        k => format!("{n}, {k} limits"),
    };
    let verdict = if t.peto_prentice.p < 0.05 {
        if t.peto_prentice.first_higher {
            "JFC lie higher"
        } else {
            "OCC lie higher"
        }
    } else {
        "no difference shown"
    };
    let anderson = t.anderson.map_or_else(String::new, |a| {
        format!(", Anderson–Darling A² = {:.2}, p = {:.3}", a.statistic, a.p)
    });
    let how = if t.log_rank.by_scores {
        "permutation scores, limits on both sides"
    } else {
        "Peto–Prentice"
    };
    format!(
        "JFC ({}) against OCC ({}): {verdict}; {how} χ² = {:.2}, p = {:.3}; log-rank χ² = {:.2}, p = {:.3}{anderson}",
        count(t.first),
        count(t.second),
        t.peto_prentice.chi2,
        t.peto_prentice.p,
        t.log_rank.chi2,
        t.log_rank.p
    )
}

fn distance_lines(c: &RatioComparison, name: &str) -> String {
    let mut out = String::new();
    if let Some(t) = c.distance.trend {
        out.push_str(&format!(
            "  with distance: {name} ∝ r_h^({:.2} ± {:.2}), scatter {:.2} dex about the line, {}, one row each, limits included\n",
            t.slope, t.slope_sigma, t.scatter, comets(t.points)
        ));
    }
    if let Some(off) = c.distance.off_sigma {
        let side = if off >= 0.0 { "above" } else { "below" };
        out.push_str(&format!(
            "  this comet lies {:.1} standard deviations {side} the line at its distance\n",
            off.abs()
        ));
    }
    if let Some((near, far)) = c.distance.freezing_au {
        out.push_str(&format!(
            "  water stops subliming freely beyond about {near}–{far} au (common practice, no single source)\n"
        ));
    }
    out
}

fn carbon_lines(m: &Membership, tables: &Tables) -> String {
    let source = tables
        .source(&m.source)
        .map_or(m.source.as_str(), |s| s.reference.as_str());
    let memory = if m.from_memory { "; from memory" } else { "" };
    let mut out = format!(
        "  carbon chain: below the published boundary log10 C₂/CN = {} with probability {:.2} ({source}{memory})\n",
        m.boundary_dex, m.below_boundary
    );
    if let Some(p) = m.published {
        out.push_str(&format!(
            "  depleted class with probability {p:.2} by the published class means, scatters and share\n"
        ));
    }
    if m.fitted.is_none() {
        out.push_str("  the comparison comets are too few, or not parted by the boundary, for classes of their own\n");
    }
    if let Some((mix, p)) = &m.fitted {
        out.push_str(&format!(
            "  {p:.2} by two classes fitted to {}: {:.2} ± {:.2} and {:.2} ± {:.2}, {:.0} % depleted\n",
            comets(mix.comets),
            mix.high.mean_dex,
            mix.high.sigma_dex,
            mix.low.mean_dex,
            mix.low.sigma_dex,
            100.0 * mix.low.share
        ));
    }
    out
}

fn nearest(label: &str, l: &Likeness) -> String {
    if l.nearest.is_empty() {
        return String::new();
    }
    let of = l.ratios.len();
    let mut out = format!(
        "Comets most like {label} over {} (distance in scatters of the comets):\n",
        l.ratios.join(", ")
    );
    for n in &l.nearest {
        out.push_str(&format!(
            "  {}  {:.2}  ({} of {of} ratios)\n",
            n.comet, n.distance, n.shared
        ));
    }
    out
}
