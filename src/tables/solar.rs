//! Solar spectral irradiance at 1 au.

use super::sheet::Sheet;
use crate::ground::Result;
use crate::ground::constants::{LIGHT_CM_S, PLANCK_ERG_S};

/// Solar spectral irradiance at 1 au against vacuum wavelength, linear between the entries.
///
/// Source: ASTM E490-00a. Coarse (0.5 nm and more): no solar lines.
#[derive(Clone, Debug, PartialEq)]
pub struct SolarIrradiance {
    wavelength_nm: Vec<f64>,
    irradiance_w_m2_nm: Vec<f64>,
}

impl SolarIrradiance {
    pub(super) const COLUMNS: &[&str] = &["wl_nm", "irr_W_m2_nm"];

    pub(super) fn read(sheet: &Sheet) -> Result<Self> {
        let mut table = Self {
            wavelength_nm: Vec::new(),
            irradiance_w_m2_nm: Vec::new(),
        };
        for row in sheet.rows() {
            let wavelength = row.number("wl_nm", 1.0..=1.0e7)?;
            if table.wavelength_nm.last().is_some_and(|l| *l >= wavelength) {
                return Err(row.fail(
                    format!("column \"wl_nm\": {wavelength} does not exceed the row before"),
                    "sort the rows by wavelength and remove repeated ones",
                ));
            }
            table.wavelength_nm.push(wavelength);
            table
                .irradiance_w_m2_nm
                .push(row.number("irr_W_m2_nm", 0.0..=10.0)?);
        }
        if table.wavelength_nm.len() < 2 {
            return Err(sheet.fail("the solar spectrum needs at least two rows".into()));
        }
        Ok(table)
    }

    /// Range of the table, vacuum Å.
    pub fn range_aa(&self) -> (f64, f64) {
        let last = self.wavelength_nm.len() - 1;
        (
            self.wavelength_nm[0] * 10.0,
            self.wavelength_nm[last] * 10.0,
        )
    }

    /// Irradiance at 1 au, erg s⁻¹ cm⁻² Å⁻¹; `None` outside the table.
    ///
    /// 1 W m⁻² nm⁻¹ = 100 erg s⁻¹ cm⁻² Å⁻¹.
    pub fn irradiance_erg_s_cm2_aa(&self, vacuum_aa: f64) -> Option<f64> {
        let x = vacuum_aa / 10.0;
        let (w, f) = (&self.wavelength_nm, &self.irradiance_w_m2_nm);
        let above = w.partition_point(|&l| l < x);
        if above == w.len() || x.is_nan() || (above == 0 && x < w[0]) {
            return None;
        }
        if above == 0 {
            return Some(f[0] * 100.0);
        }
        let t = (x - w[above - 1]) / (w[above] - w[above - 1]);
        Some((f[above - 1] + t * (f[above] - f[above - 1])) * 100.0)
    }

    /// Photon flux Φ(ν̃) at 1 au, photons s⁻¹ cm⁻² per cm⁻¹; `None` outside the table.
    ///
    /// Φ = F_λ λ² / (h c ν̃) with λ = 1/ν̃, so that a band of integrated strength S (cm per
    /// molecule) absorbs S · Φ photons per second and molecule (Crovisier & Encrenaz 1983).
    pub fn photon_flux_per_cm1(&self, wavenumber_cm1: f64) -> Option<f64> {
        let wavelength_aa = 1.0e8 / wavenumber_cm1;
        let per_aa = self.irradiance_erg_s_cm2_aa(wavelength_aa)?;
        let per_cm1 = per_aa * wavelength_aa / wavenumber_cm1;
        Some(per_cm1 / (PLANCK_ERG_S * LIGHT_CM_S * wavenumber_cm1))
    }
}
