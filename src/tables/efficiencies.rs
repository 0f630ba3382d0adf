//! Fluorescence efficiencies (g-factors) as published.

use super::bands::Band;
use super::provenance::{Provenance, Sources};
use super::sheet::{Row, Sheet};
use crate::ground::{Result, constants::HC_ERG_AA, did_you_mean};

/// A published fluorescence efficiency of one band: g(r_h) = g(1 au) · r_h^`rh_power`.
#[derive(Clone, Debug, PartialEq)]
pub struct Efficiency {
    /// Band identifier.
    pub band: String,
    /// g at 1 au, photons s⁻¹ per molecule; an energy is divided by hc/λ at the band centre.
    pub g_photons_s: f64,
    /// Whether the source gives erg s⁻¹ per molecule.
    pub given_erg: bool,
    /// Power of the heliocentric distance in au, usually −2.
    pub rh_power: f64,
    /// Relative standard deviation.
    pub relative_sigma: f64,
    /// Whether g depends on the heliocentric velocity (Swings effect), which one number ignores.
    pub velocity_dependent: bool,
    /// Whether this row is used when the plan names none.
    pub default: bool,
    /// Source.
    pub provenance: Provenance,
}

impl Efficiency {
    pub(super) const COLUMNS: &[&str] = &[
        "band",
        "value",
        "unit",
        "rh_power",
        "relative_sigma",
        "velocity_dependent",
        "default",
        "source",
        "how",
        "note",
    ];

    /// g at a heliocentric distance, photons s⁻¹ per molecule.
    pub fn g_at_photons_s(&self, r_h_au: f64) -> f64 {
        self.g_photons_s * r_h_au.powf(self.rh_power)
    }

    pub(super) fn read_all(sheet: &Sheet, sources: &Sources, bands: &[Band]) -> Result<Vec<Self>> {
        let key = |e: &Self| format!("{} of {}", e.band, e.provenance.source);
        let list = sheet.read("efficiency", key, |row| Self::read(row, sources, bands))?;
        for band in bands {
            let of_band = list.iter().filter(|e| e.band == band.id);
            let (rows, defaults) =
                of_band.fold((0, 0), |(n, d), e| (n + 1, d + usize::from(e.default)));
            if rows > 0 && defaults != 1 {
                return Err(sheet
                    .fail(format!(
                        "band {} has {rows} efficiencies, of which {defaults} are marked default",
                        band.id
                    ))
                    .remedy("mark exactly one row of each band default = true"));
            }
        }
        Ok(list)
    }

    fn read(row: &Row, sources: &Sources, bands: &[Band]) -> Result<Self> {
        let id = row.required("band")?;
        let Some(band) = bands.iter().find(|b| b.id == id) else {
            let hint = did_you_mean(id, bands.iter().map(|b| b.id.as_str()))
                .map(|near| format!(" (did you mean {near:?}?)"))
                .unwrap_or_default();
            return Err(row.fail(
                format!("column \"band\": {id:?} is not in bands.csv{hint}"),
                "add the band to bands.csv",
            ));
        };
        let value = row.number("value", f64::MIN_POSITIVE..=1.0e3)?;
        let given_erg = row.word("unit", &[("photons/s", false), ("erg/s", true)])?;
        Ok(Self {
            band: id.to_owned(),
            g_photons_s: if given_erg {
                value * band.centre_aa / HC_ERG_AA
            } else {
                value
            },
            given_erg,
            rh_power: row.number("rh_power", -4.0..=0.0)?,
            relative_sigma: row.number("relative_sigma", 0.0..=2.0)?,
            velocity_dependent: row.flag("velocity_dependent")?,
            default: row.flag("default")?,
            provenance: sources.provenance(row)?,
        })
    }
}
