//! `comagauge show`: what was read and how it was understood.

use super::output;
use super::reading::Reading;
use crate::ground::Result;
use crate::spectrum::{Spectrum, Understood};
use clap::Args;
use std::fmt::Write;
use std::path::PathBuf;

/// Arguments of `show`.
#[derive(Args)]
pub(super) struct Show {
    /// The spectrum.
    file: PathBuf,
    #[command(flatten)]
    reading: Reading,
    /// Print the samples as read: vacuum wavelength, flux density, error, usable or not.
    #[arg(long)]
    csv: bool,
}

impl Show {
    pub(super) fn run(self) -> Result<()> {
        let (spectrum, understood) = self.reading.read(&self.file)?;
        if self.csv {
            return output::stream(|out| samples(&spectrum, out));
        }
        let mut text = format!("{}\n\n", self.file.display());
        if let Some(u) = &understood {
            text.push_str(&facts(u));
        }
        text.push_str(&content(&spectrum));
        output::print(&text)
    }
}

/// Samples as CSV; surface brightness has columns of its own.
fn samples(spectrum: &Spectrum, out: &mut dyn std::io::Write) -> std::io::Result<()> {
    out.write_all(if spectrum.per_arcsec2() {
        b"wavelength_vacuum_aa,brightness_erg_s_cm2_aa_arcsec2,brightness_sigma_erg_s_cm2_aa_arcsec2,good\n"
    } else {
        b"wavelength_vacuum_aa,flux_erg_s_cm2_aa,sigma_erg_s_cm2_aa,good\n"
    })?;
    let number = |v: f64| {
        if v.is_finite() {
            format!("{v:e}")
        } else {
            String::new()
        }
    };
    let sigma = spectrum.sigma_erg_s_cm2_aa();
    for i in 0..spectrum.len() {
        writeln!(
            out,
            "{},{},{},{}",
            spectrum.wavelength_aa()[i],
            number(spectrum.flux_erg_s_cm2_aa()[i]),
            sigma.map_or_else(String::new, |s| number(s[i])),
            spectrum.good()[i]
        )?;
    }
    Ok(())
}

fn line(out: &mut String, name: &str, value: &str) {
    writeln!(out, "{name:14} {value}").expect("invariant: writing to memory");
}

fn facts(u: &Understood) -> String {
    let mut out = String::new();
    let words = |list: &[(String, String)]| {
        let all: Vec<String> = list.iter().map(|(k, v)| format!("{k} = {v}")).collect();
        if all.is_empty() {
            "not said".to_owned()
        } else {
            all.join(", ")
        }
    };
    for part in &u.parts {
        let mark = if part.number == u.part {
            "  ← read"
        } else {
            ""
        };
        let words = [part.name.as_str(), part.kind.as_str(), part.size.as_str()];
        let words: Vec<&str> = words.into_iter().filter(|w| !w.is_empty()).collect();
        let name = if part.number == 0 { "parts" } else { "" };
        line(
            &mut out,
            name,
            &format!("{} {}{mark}", part.number, words.join(", ")),
        );
    }
    line(
        &mut out,
        "object",
        u.object.as_deref().unwrap_or("not said"),
    );
    line(&mut out, "date", &words(&u.date));
    line(&mut out, "exposure", &words(&u.exposure));
    line(&mut out, "position", &words(&u.position));
    line(&mut out, "frame", &words(&u.frame));
    line(
        &mut out,
        "axis",
        &format!("{}, in {}", u.axis, u.wavelength_unit),
    );
    if let Some((medium, why)) = &u.medium {
        line(&mut out, "medium", &format!("{medium} ({why})"));
    }
    line(&mut out, "flux", &u.flux_unit);
    line(&mut out, "errors", u.errors.as_deref().unwrap_or("none"));
    line(&mut out, "flags", u.flags.as_deref().unwrap_or("none"));
    for (i, text) in u.assumed.iter().enumerate() {
        line(&mut out, if i == 0 { "assumed" } else { "" }, text);
    }
    out.push('\n');
    out
}

fn content(spectrum: &Spectrum) -> String {
    let mut out = String::new();
    let x = spectrum.wavelength_aa();
    let (nan, flagged) = spectrum.left_out();
    line(
        &mut out,
        "samples",
        &format!(
            "{} ({} usable, {nan} not a number, {flagged} flagged)",
            x.len(),
            x.len() - nan - flagged
        ),
    );
    line(
        &mut out,
        "vacuum Å",
        &format!("{:.3} to {:.3}", x[0], x[x.len() - 1]),
    );
    let step = |i: usize| x[i + 1] - x[i];
    if let Some([low, high, median]) = summary(x.len().saturating_sub(1), step, |_| true) {
        let text = format!("{low:.4} to {high:.4}, median {median:.4}");
        line(&mut out, "step Å", &text);
    }
    let unit = if spectrum.per_arcsec2() {
        "erg/s/cm2/Å/arcsec2"
    } else {
        "erg/s/cm2/Å"
    };
    let good = spectrum.good();
    let flux = spectrum.flux_erg_s_cm2_aa();
    if let Some([low, high, median]) = summary(x.len(), |i| flux[i], |i| good[i]) {
        let text = format!("{low:.3e} to {high:.3e}, median {median:.3e} {unit}");
        line(&mut out, "flux density", &text);
    }
    match spectrum.sigma_erg_s_cm2_aa() {
        Some(sigma) => {
            if let Some([_, _, median]) = summary(x.len(), |i| sigma[i], |i| good[i]) {
                line(&mut out, "error", &format!("median {median:.3e} {unit}"));
            }
        }
        None => line(
            &mut out,
            "error",
            "none; estimated from the scatter when fitted",
        ),
    }
    out
}

/// Least, greatest and median of the wanted values; the median of long lists from evenly spaced ones,
/// so that a large file needs no second copy.
fn summary(
    count: usize,
    value: impl Fn(usize) -> f64,
    wanted: impl Fn(usize) -> bool,
) -> Option<[f64; 3]> {
    const KEPT: usize = 100_000;
    let every = count.div_ceil(KEPT).max(1);
    let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
    let mut kept = Vec::new();
    for i in (0..count).filter(|i| wanted(*i)) {
        let v = value(i);
        low = low.min(v);
        high = high.max(v);
        if i % every == 0 {
            kept.push(v);
        }
    }
    kept.sort_by(f64::total_cmp);
    let median = *kept.get(kept.len() / 2)?;
    Some([low, high, median])
}
