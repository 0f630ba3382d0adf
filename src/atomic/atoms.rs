//! Reads the levels and lines of an atom or ion.

use super::bundle::{Table, atom_stems, table};
use super::quality::Letters;
use super::system::{Level, LevelSystem, Line, LineKind};
use crate::ground::{Error, Result, Species, did_you_mean};
use serde::Deserialize;
use std::path::Path;

#[derive(Deserialize)]
struct LevelRow {
    level: usize,
    energy_cm1: f64,
    weight: f64,
    label: String,
}

#[derive(Deserialize)]
struct LineRow {
    wavelength_vacuum_aa: f64,
    lower: usize,
    upper: usize,
    einstein_a_per_s: f64,
    kind: String,
    quality: char,
}

/// m_e c/(8π² e²) for a wavelength in Å: gf = 1.4992e-16 · λ² · g_u A, from CODATA 2022 in cgs.
const GF_PER_AA2_S: f64 = 1.499_193_7e-16;
/// Largest relative difference of a tabulated wavelength from the levels it joins.
const RITZ_TOLERANCE: f64 = 1e-5;

/// Names of the bundled atoms and ions, `Fe I` and so on.
pub fn bundled_atoms() -> Vec<Species> {
    atom_stems().map(species_of).collect()
}

/// Levels and lines of an atom or ion such as `Fe I`: `atoms/fe_i_levels.csv` and
/// `atoms/fe_i_lines.csv` of the folder if they are there, else of the binary. Wavelengths are
/// recomputed from the level energies (Ritz), so that closed loops of transitions conserve energy.
///
/// # Errors
/// An unknown species; a missing, unreadable or inconsistent row, with file and line.
pub fn atom(species: &Species, dir: Option<&Path>) -> Result<LevelSystem> {
    let stem = species.as_str().to_lowercase().replace(' ', "_");
    let bundled = atom_stems().any(|s| s == stem);
    let own = dir.is_some_and(|d| d.join(format!("atoms/{stem}_levels.csv")).is_file());
    if !(bundled || own) {
        return Err(unknown(species));
    }
    let letters = Letters::load(&stem, dir)?;
    let levels = levels(&table(dir, &format!("atoms/{stem}_levels.csv"))?)?;
    let lines = lines(
        &table(dir, &format!("atoms/{stem}_lines.csv"))?,
        &levels,
        &letters,
    )?;
    LevelSystem::new(species.clone(), levels, lines)
}

fn unknown(species: &Species) -> Error {
    let known = bundled_atoms();
    let names: Vec<&str> = known.iter().map(Species::as_str).collect();
    let error = Error::plan(format!("there are no levels and lines of {species}"));
    match did_you_mean(species.as_str(), names.iter().copied()) {
        Some(name) => error.remedy(format!("did you mean {name:?}?")),
        None => error.remedy(format!("use one of {}", names.join(", "))),
    }
}

fn species_of(stem: &str) -> Species {
    let (element, stage) = stem.split_once('_').unwrap_or((stem, "i"));
    let mut name = element[..1].to_uppercase();
    name.push_str(&element[1..]);
    Species::new(&format!("{name} {}", stage.to_uppercase()))
}

fn levels(table: &Table) -> Result<Vec<Level>> {
    let mut levels: Vec<Level> = Vec::new();
    for (line, row) in table.rows::<LevelRow>()? {
        if row.level != levels.len() + 1 {
            return Err(table
                .refuse(line, format!("level {} is out of order", row.level))
                .remedy("number the levels 1, 2, 3 … in order of energy"));
        }
        let floor = levels.last().map_or(0.0, |l| l.energy_cm1);
        if !(row.energy_cm1 >= floor && row.energy_cm1.is_finite()) {
            return Err(table
                .refuse(
                    line,
                    format!(
                        "energy {} cm-1 is below that of the level before it, {floor}",
                        row.energy_cm1
                    ),
                )
                .remedy("sort the levels by energy; the ground level is first, at 0"));
        }
        if !(row.weight >= 1.0 && row.weight.is_finite()) {
            return Err(table
                .refuse(line, format!("weight {} is not 2J+1", row.weight))
                .remedy("give 1, 2, 3 …"));
        }
        levels.push(Level {
            energy_cm1: row.energy_cm1,
            weight: row.weight,
            label: row.label,
        });
    }
    Ok(levels)
}

fn lines(table: &Table, levels: &[Level], letters: &Letters) -> Result<Vec<Line>> {
    let rows = table.rows::<LineRow>()?;
    if rows.is_empty() {
        return Err(Error::table("no lines in this table").in_file(&table.path));
    }
    rows.into_iter()
        .map(|(at, row)| one_line(table, at, &row, levels, letters))
        .collect()
}

fn one_line(
    table: &Table,
    at: usize,
    row: &LineRow,
    levels: &[Level],
    letters: &Letters,
) -> Result<Line> {
    let level = |number: usize| {
        number
            .checked_sub(1)
            .and_then(|i| levels.get(i))
            .ok_or_else(|| {
                table
                    .refuse(at, format!("level {number} does not exist"))
                    .remedy(format!("use a level number from 1 to {}", levels.len()))
            })
    };
    let (lower, upper) = (level(row.lower)?, level(row.upper)?);
    let wavelength_vacuum_aa = 1.0e8 / (upper.energy_cm1 - lower.energy_cm1);
    let off = (row.wavelength_vacuum_aa / wavelength_vacuum_aa - 1.0).abs();
    if off.is_nan() || off > RITZ_TOLERANCE {
        return Err(table
            .refuse(
                at,
                format!(
                    "wavelength {} Å does not fit levels {} and {}: {wavelength_vacuum_aa:.3} Å",
                    row.wavelength_vacuum_aa, row.lower, row.upper
                ),
            )
            .remedy("give vacuum Å, and the lower level first"));
    }
    let a = row.einstein_a_per_s;
    if !(a > 0.0 && a.is_finite()) {
        return Err(table.refuse(at, format!("A = {a} per second is not positive")));
    }
    let kind = match row.kind.as_str() {
        "E1" => LineKind::Allowed,
        "M1" | "E2" | "M2" => LineKind::Forbidden,
        other => {
            return Err(table
                .refuse(at, format!("kind {other:?} is not known"))
                .remedy("use E1, M1, E2 or M2"));
        }
    };
    let gf = GF_PER_AA2_S * wavelength_vacuum_aa.powi(2) * upper.weight * a;
    let (sigma_ln_a, source) = letters.of(row.quality, gf.log10()).ok_or_else(|| {
        table
            .refuse(at, format!("quality {:?} has no source", row.quality))
            .remedy("add the species and the letter to sources.csv")
    })?;
    Ok(Line {
        wavelength_vacuum_aa,
        lower: row.lower - 1,
        upper: row.upper - 1,
        einstein_a_per_s: a,
        sigma_ln_a,
        kind,
        source,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::fs;

    #[test]
    fn every_bundled_atom_loads() {
        let all = bundled_atoms();
        assert!(all.contains(&Species::new("Ca II")) && all.contains(&Species::new("Fe I")));
        for species in all {
            let atom = atom(&species, None).unwrap();
            assert!(atom.levels()[0].energy_cm1 == 0.0, "{species}");
        }
    }

    #[test]
    fn a_mistyped_species_is_answered() {
        let text = atom(&Species::new("FeI"), None).unwrap_err().to_string();
        assert!(text.contains("Fe I"), "{text}");
    }

    fn refusal(levels: &str, lines: &str) -> String {
        let dir = tempfile::tempdir().unwrap();
        let folder = dir.path().join("atoms");
        fs::create_dir(&folder).unwrap();
        fs::write(
            folder.join("na_i_levels.csv"),
            format!("level,energy_cm1,weight,label\n{levels}"),
        )
        .unwrap();
        fs::write(
            folder.join("na_i_lines.csv"),
            format!("wavelength_vacuum_aa,lower,upper,einstein_a_per_s,kind,quality\n{lines}"),
        )
        .unwrap();
        match atom(&Species::new("Na I"), Some(dir.path())) {
            Ok(_) => String::new(),
            Err(e) => e.to_string(),
        }
    }

    #[test]
    fn refusals_name_the_line() {
        let good = "1,0,2,a\n2,20000,4,b\n";
        assert_eq!(refusal(good, "5000,1,2,1e7,E1,N\n"), "");
        for (levels, lines, part) in [
            (good, "5000,1,3,1e7,E1,N\n", "level 3 does not exist"),
            (good, "5000,2,1,1e7,E1,N\n", "does not fit"),
            (good, "5001,1,2,1e7,E1,N\n", "does not fit"),
            (good, "5000,1,2,-1,E1,N\n", "not positive"),
            (good, "5000,1,2,1e7,E3,N\n", "E3"),
            (good, "5000,1,2,1e7,E1,L\n", "has no source"),
            (good, "", "no lines"),
            ("1,0,2,a\n3,20000,4,b\n", "", "out of order"),
            ("1,5,2,a\n2,3,4,b\n", "", "below that"),
            ("1,0,0,a\n", "", "2J+1"),
        ] {
            let text = refusal(levels, lines);
            assert!(text.contains(part), "{part}: {text}");
            assert!(text.contains("na_i_"), "{text}");
        }
    }
}
