//! The part of the sky that the spectrum was extracted from.

use crate::ground::constants::{ARCSEC_RAD, AU_KM};
use crate::ground::{Error, Result};
use serde::Serialize;

/// An extraction aperture on the sky. Offsets are from the nucleus.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub enum Aperture {
    /// A circle centred on the nucleus.
    Circle {
        /// Radius, arcsec.
        radius_arcsec: f64,
    },
    /// A rectangle (slit), possibly off the nucleus.
    Slit {
        /// Full width, arcsec.
        width_arcsec: f64,
        /// Full length, arcsec.
        length_arcsec: f64,
        /// Offset of the slit's centre along its width, arcsec.
        offset_across_arcsec: f64,
        /// Offset of the slit's centre along its length, arcsec.
        offset_along_arcsec: f64,
    },
}

/// Kilometres at the comet that one arcsecond spans at a distance in au (small angles).
pub fn km_per_arcsec(observer_au: f64) -> f64 {
    observer_au * AU_KM * ARCSEC_RAD
}

impl Aperture {
    /// Checks that sizes are positive and below 10 degrees and offsets finite.
    ///
    /// # Errors
    /// Names the size that is out of range.
    pub fn checked(self) -> Result<Self> {
        let sizes: &[(&str, f64)] = match &self {
            Self::Circle { radius_arcsec } => &[("radius_arcsec", *radius_arcsec)],
            Self::Slit {
                width_arcsec,
                length_arcsec,
                ..
            } => &[
                ("width_arcsec", *width_arcsec),
                ("length_arcsec", *length_arcsec),
            ],
        };
        for (name, value) in sizes {
            if *value <= 0.0 || !(0.0..=36_000.0).contains(value) {
                return Err(Error::plan(format!(
                    "aperture {name} = {value} is outside 0 to 36000 arcsec"
                )));
            }
        }
        if let Self::Slit {
            offset_across_arcsec,
            offset_along_arcsec,
            ..
        } = self
        {
            for value in [offset_across_arcsec, offset_along_arcsec] {
                if !(-36_000.0..=36_000.0).contains(&value) {
                    return Err(Error::plan(format!(
                        "aperture offset {value} is outside -36000 to 36000 arcsec"
                    )));
                }
            }
        }
        Ok(self)
    }

    /// Solid angle, arcsec².
    pub fn area_arcsec2(&self) -> f64 {
        match *self {
            Self::Circle { radius_arcsec } => std::f64::consts::PI * radius_arcsec * radius_arcsec,
            Self::Slit {
                width_arcsec,
                length_arcsec,
                ..
            } => width_arcsec * length_arcsec,
        }
    }

    /// Projected area at the comet, cm².
    pub fn area_cm2(&self, observer_au: f64) -> f64 {
        let cm = km_per_arcsec(observer_au) * 1.0e5;
        self.area_arcsec2() * cm * cm
    }
}
