//! The solar spectrum at 1 au, put together from several published ones.

use super::bundle::{Table, table};
use crate::ground::constants::FWHM_PER_SIGMA;
use crate::ground::{Error, Result};
use serde::Deserialize;
use std::path::Path;

#[derive(Clone, Debug, Deserialize)]
struct Piece {
    file: String,
    from_nm: f64,
    to_nm: f64,
    fwhm_nm: f64,
    relative_sigma: f64,
    unresolved_factor: f64,
    unresolved_floor: f64,
}

#[derive(Deserialize)]
struct SampleRow {
    wavelength_vacuum_nm: f64,
    irradiance_w_m2_nm: f64,
}

/// One file of samples, with its line numbers for messages.
struct Samples {
    table: Table,
    rows: Vec<(usize, SampleRow)>,
}

/// erg s⁻¹ cm⁻² Å⁻¹ in one W m⁻² nm⁻¹.
const CGS_PER_W_M2_NM: f64 = 100.0;
const AA_PER_NM: f64 = 10.0;
/// Nodes of the Gaussian average on either side, and their spacing in standard deviations. The
/// trapezoid rule on a Gaussian is then good to 1e-9; what is left is the spectrum's own structure.
const SIDE_NODES: i32 = 5;
const NODE_STEP_SIGMA: f64 = 0.94;

/// Spectral irradiance of the Sun at 1 au against vacuum wavelength, linear between samples.
///
/// Pieces, resolutions and errors: `line-lists/solar/pieces.csv`. High resolution from 200 to
/// 1001 nm (TSIS-1 HSRS: Coddington et al. 2021, 2023; SAO2010: Chance & Kurucz 2010), ASTM E490-00a
/// outside. The wavelength scale is that of sunlight as it reaches 1 au: gravitational shift and
/// convective blueshift of the disc are in it, the Sun–observer motion is not.
#[derive(Clone, Debug)]
pub struct SolarSpectrum {
    wavelength_aa: Vec<f64>,
    irradiance_erg_s_cm2_aa: Vec<f64>,
    pieces: Vec<Piece>,
}

/// Reads the solar spectrum from the folder's `solar/` files if they are there, else the bundled ones.
///
/// # Errors
/// An unreadable table, pieces that do not follow each other, samples out of order or negative.
pub fn sun(dir: Option<&Path>) -> Result<SolarSpectrum> {
    let plan = table(dir, "solar/pieces.csv")?;
    let mut spectrum = SolarSpectrum {
        wavelength_aa: Vec::new(),
        irradiance_erg_s_cm2_aa: Vec::new(),
        pieces: Vec::new(),
    };
    let mut read: Vec<(String, Samples)> = Vec::new();
    for (line, piece) in plan.rows::<Piece>()? {
        let end = spectrum.pieces.last().map_or(0.0, |p| p.to_nm);
        if !(piece.from_nm >= end && piece.to_nm > piece.from_nm && piece.fwhm_nm > 0.0) {
            return Err(plan
                .refuse(
                    line,
                    "pieces overlap, or a range or resolution is not positive",
                )
                .remedy("order the pieces by wavelength; each begins where the one before ends"));
        }
        if !read.iter().any(|(name, _)| *name == piece.file) {
            let table = table(dir, &format!("solar/{}.csv", piece.file))?;
            let rows = table.rows()?;
            read.push((piece.file.clone(), Samples { table, rows }));
        }
        let found = read.iter().find(|(name, _)| *name == piece.file);
        let (_, samples) = found.expect("invariant: the file was read above");
        spectrum.take(&piece, samples)?;
        spectrum.pieces.push(piece);
    }
    if spectrum.wavelength_aa.len() < 2 {
        return Err(
            Error::table("the solar spectrum has fewer than two samples").in_file(&plan.path),
        );
    }
    Ok(spectrum)
}

impl SolarSpectrum {
    fn take(&mut self, piece: &Piece, samples: &Samples) -> Result<()> {
        let table = &samples.table;
        for (line, row) in &samples.rows {
            let (nm, value) = (row.wavelength_vacuum_nm, row.irradiance_w_m2_nm);
            if !(nm.is_finite() && value >= 0.0 && value.is_finite()) {
                return Err(table.refuse(
                    *line,
                    format!("irradiance {value} at {nm} nm is not a positive number"),
                ));
            }
            if nm < piece.from_nm || nm >= piece.to_nm {
                continue;
            }
            if self
                .wavelength_aa
                .last()
                .is_some_and(|w| *w >= nm * AA_PER_NM)
            {
                return Err(table
                    .refuse(*line, format!("wavelength {nm} nm is out of order"))
                    .remedy("sort the table by wavelength"));
            }
            self.wavelength_aa.push(nm * AA_PER_NM);
            self.irradiance_erg_s_cm2_aa.push(value * CGS_PER_W_M2_NM);
        }
        Ok(())
    }

    /// First and last wavelength, vacuum Å.
    pub fn range_aa(&self) -> (f64, f64) {
        let last = self.wavelength_aa.len() - 1;
        (self.wavelength_aa[0], self.wavelength_aa[last])
    }

    /// Irradiance at 1 au at a vacuum wavelength in Å, erg s⁻¹ cm⁻² Å⁻¹: linear between samples,
    /// zero shortward of the first, falling as λ⁻⁴ (Rayleigh–Jeans) longward of the last.
    pub fn irradiance_erg_s_cm2_aa(&self, vacuum_aa: f64) -> f64 {
        let after = self.wavelength_aa.partition_point(|w| *w <= vacuum_aa);
        self.between(after, vacuum_aa)
    }

    fn between(&self, after: usize, vacuum_aa: f64) -> f64 {
        let (w, f) = (&self.wavelength_aa, &self.irradiance_erg_s_cm2_aa);
        if after == 0 {
            return 0.0;
        }
        if after == w.len() {
            return f[after - 1] * (w[after - 1] / vacuum_aa).powi(4);
        }
        let t = (vacuum_aa - w[after - 1]) / (w[after] - w[after - 1]);
        f[after - 1] + t * (f[after] - f[after - 1])
    }

    /// Irradiance averaged over a Gaussian of this full width at half maximum, Å; the plain
    /// irradiance for zero width.
    pub fn averaged_erg_s_cm2_aa(&self, vacuum_aa: f64, fwhm_aa: f64) -> f64 {
        if fwhm_aa <= 0.0 {
            return self.irradiance_erg_s_cm2_aa(vacuum_aa);
        }
        let step_aa = NODE_STEP_SIGMA * fwhm_aa / FWHM_PER_SIGMA;
        let first_aa = vacuum_aa - f64::from(SIDE_NODES) * step_aa;
        let mut after = self.wavelength_aa.partition_point(|w| *w <= first_aa);
        let (mut sum, mut weights) = (0.0, 0.0);
        for node in -SIDE_NODES..=SIDE_NODES {
            let at_aa = vacuum_aa + f64::from(node) * step_aa;
            while self.wavelength_aa.get(after).is_some_and(|w| *w <= at_aa) {
                after += 1;
            }
            let weight = (-0.5 * (f64::from(node) * NODE_STEP_SIGMA).powi(2)).exp();
            sum += weight * self.between(after, at_aa);
            weights += weight;
        }
        sum / weights
    }

    /// Resolution of the reference at a vacuum wavelength: full width at half maximum, Å.
    pub fn fwhm_aa(&self, vacuum_aa: f64) -> f64 {
        self.piece(vacuum_aa).fwhm_nm * AA_PER_NM
    }

    fn piece(&self, vacuum_aa: f64) -> &Piece {
        let found = self
            .pieces
            .iter()
            .find(|p| vacuum_aa < p.to_nm * AA_PER_NM)
            .or(self.pieces.last());
        found.expect("invariant: construction refuses an empty spectrum")
    }

    /// Irradiance convolved with a Gaussian of this full width at half maximum, Å, cut at
    /// `reach_sigma` standard deviations: cell by cell of the reference, exact for its straight pieces
    /// in cells wider than a quarter of σ, by the mid-cell weight in narrower ones (relative error of
    /// the weights below 3e-3 in one cell, of opposite sign on either side of the flank).
    pub fn convolved_erg_s_cm2_aa(&self, vacuum_aa: f64, fwhm_aa: f64, reach_sigma: f64) -> f64 {
        if fwhm_aa <= 0.0 {
            return self.irradiance_erg_s_cm2_aa(vacuum_aa);
        }
        let sigma = fwhm_aa / FWHM_PER_SIGMA;
        let (low, high) = (
            vacuum_aa - reach_sigma * sigma,
            vacuum_aa + reach_sigma * sigma,
        );
        let w = &self.wavelength_aa;
        let mut after = w.partition_point(|x| *x <= low);
        let (mut left, mut sum, mut weights) = (low, 0.0, 0.0);
        while left < high {
            let right = w.get(after).copied().unwrap_or(f64::INFINITY).min(high);
            let (value, weight) = self.cell(after, (left, right), vacuum_aa, sigma);
            sum += value;
            weights += weight;
            left = right;
            after += 1;
        }
        sum / weights
    }

    /// ∫ f G and ∫ G over a cell, without the normal density's 1/√2π.
    fn cell(&self, after: usize, (a, b): (f64, f64), centre: f64, sigma: f64) -> (f64, f64) {
        let density = |u: f64| (-0.5 * u * u).exp();
        if b - a < 0.25 * sigma {
            let middle = 0.5 * (a + b);
            let weight = density((middle - centre) / sigma) * (b - a) / sigma;
            return (weight * self.between(after, middle), weight);
        }
        let (ua, ub) = ((a - centre) / sigma, (b - centre) / sigma);
        let root = std::f64::consts::FRAC_1_SQRT_2;
        let area = (std::f64::consts::PI / 2.0).sqrt();
        let zeroth = area * (libm::erf(ub * root) - libm::erf(ua * root));
        let first = density(ua) - density(ub);
        let slope = (self.between(after, b) - self.between(after, a)) / (b - a);
        let at_centre = self.between(after, a) + slope * (centre - a);
        (at_centre * zeroth + slope * sigma * first, zeroth)
    }

    /// Relative standard deviation of the irradiance at one wavelength: absolute level and finite
    /// resolution, the latter from what one more smoothing to the resolution would change. It grows
    /// in the cores and on the flanks of Fraunhofer lines, hence near zero heliocentric velocity.
    pub fn relative_sigma(&self, vacuum_aa: f64) -> f64 {
        let piece = self.piece(vacuum_aa);
        let plain = self.irradiance_erg_s_cm2_aa(vacuum_aa);
        let smooth = self.averaged_erg_s_cm2_aa(vacuum_aa, piece.fwhm_nm * AA_PER_NM);
        let change = if plain > 0.0 {
            (smooth / plain - 1.0).abs().min(1.0)
        } else {
            1.0
        };
        let unresolved = piece
            .unresolved_floor
            .hypot(piece.unresolved_factor * change);
        piece.relative_sigma.hypot(unresolved)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_bundled_sun_has_the_solar_constant() {
        let sun = sun(None).unwrap();
        let (w, f) = (&sun.wavelength_aa, &sun.irradiance_erg_s_cm2_aa);
        let total: f64 = (1..w.len())
            .map(|i| 0.5 * (f[i] + f[i - 1]) * (w[i] - w[i - 1]))
            .sum();
        // Nominal irradiance 1361 W m⁻² (IAU 2015 B3, from memory), here in erg s⁻¹ cm⁻²; the ultraviolet piece is
        // known to be high (pieces.csv), so 1.5 %.
        assert!((total / 1.361e6 - 1.0).abs() < 0.015, "{total}");
    }

    #[test]
    fn ends_and_averages() {
        let sun = sun(None).unwrap();
        assert_eq!(sun.irradiance_erg_s_cm2_aa(1000.0), 0.0);
        let (_, end_aa) = sun.range_aa();
        let ratio = sun.irradiance_erg_s_cm2_aa(2.0 * end_aa) / sun.irradiance_erg_s_cm2_aa(end_aa);
        assert!((ratio * 16.0 - 1.0).abs() < 1e-12);
        // Wide cells by the closed form, narrow ones by the middle: both agree with a fine sum.
        for (at, fwhm) in [(3933.0, 6.0), (3933.0, 0.9), (48_000.0, 300.0)] {
            let sigma = fwhm / FWHM_PER_SIGMA;
            let (mut top, mut bottom) = (0.0, 0.0);
            for i in -20_000..=20_000 {
                let u = 5.0 * f64::from(i) / 20_000.0;
                let weight = (-0.5 * u * u).exp();
                top += weight * sun.irradiance_erg_s_cm2_aa(at + u * sigma);
                bottom += weight;
            }
            let found = sun.convolved_erg_s_cm2_aa(at, fwhm, 5.0);
            assert!((found / (top / bottom) - 1.0).abs() < 2e-4, "{at} {fwhm}");
        }
        // A straight piece of spectrum is not changed by averaging.
        let straight_aa = 25_107.0;
        let plain = sun.irradiance_erg_s_cm2_aa(straight_aa);
        let averaged = sun.averaged_erg_s_cm2_aa(straight_aa, 1.0);
        assert!((averaged / plain - 1.0).abs() < 1e-9);
    }

    #[test]
    fn cores_of_fraunhofer_lines_are_the_most_doubtful() {
        let sun = sun(None).unwrap();
        let core = sun.relative_sigma(5891.583);
        let clear = sun.relative_sigma(5894.5);
        assert!(core > clear, "{core} {clear}");
        assert!(sun.relative_sigma(3100.0) > 0.06);
    }
}
