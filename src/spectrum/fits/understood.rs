//! What was understood of a file, for people to check.

use super::parts::PartInfo;
use super::words::Words;
use crate::ground::Medium;

/// One part of a file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PartFacts {
    /// Place in the file, 0 being the primary part.
    pub number: usize,
    /// EXTNAME, empty when it has none.
    pub name: String,
    /// Image, table …
    pub kind: String,
    /// Axis lengths, or rows and columns.
    pub size: String,
}

/// The plain facts found while reading a FITS file.
#[derive(Clone, Debug, PartialEq)]
pub struct Understood {
    /// Every part of the file.
    pub parts: Vec<PartFacts>,
    /// Number of the part with the spectrum.
    pub part: usize,
    /// How the spectral axis is given.
    pub axis: String,
    /// Unit of the spectral axis in the file.
    pub wavelength_unit: String,
    /// Medium of the wavelengths in the file and where it is said; frequencies have none.
    pub medium: Option<(Medium, String)>,
    /// Unit of the flux in the file.
    pub flux_unit: String,
    /// Where the errors came from, if there are any.
    pub errors: Option<String>,
    /// Where the flags came from, if there are any.
    pub flags: Option<String>,
    /// Words on the rest frame: keyword and value of SPECSYS, VELOSYS, SSYSOBS.
    pub frame: Vec<(String, String)>,
    /// Words on the date: keyword and value.
    pub date: Vec<(String, String)>,
    /// Words on the exposure time: keyword and value.
    pub exposure: Vec<(String, String)>,
    /// OBJECT.
    pub object: Option<String>,
    /// Words on the position: keyword and value.
    pub position: Vec<(String, String)>,
    /// What the file does not say and the standard, or usage, fills in.
    pub assumed: Vec<String>,
}

impl Understood {
    /// True when the medium was neither given nor found, only gone on with.
    pub fn medium_is_open(&self) -> bool {
        self.medium
            .as_ref()
            .is_some_and(|(_, why)| why == super::units::MEDIUM_NOT_SAID)
    }

    /// The facts that stand in the headers.
    pub(super) fn of(parts: &[PartInfo], chosen: usize) -> Self {
        let words = Words::of(parts, &parts[chosen]);
        let found = |keys: &[&str]| {
            keys.iter()
                .filter_map(|k| words.shown(k).map(|v| ((*k).to_owned(), v)))
                .collect()
        };
        Self {
            parts: parts.iter().map(PartInfo::facts).collect(),
            part: chosen,
            axis: String::new(),
            wavelength_unit: String::new(),
            medium: None,
            flux_unit: String::new(),
            errors: None,
            flags: None,
            frame: found(&["SPECSYS", "SSYSOBS", "VELOSYS"]),
            date: found(&[
                "DATE-OBS", "DATE-AVG", "DATE-BEG", "MJD-OBS", "MJD-AVG", "MJD-END", "MJD",
            ]),
            exposure: found(&["EXPTIME", "EXPOSURE", "TEXPTIME", "EFFEXPTM", "XPOSURE"]),
            object: words.shown("OBJECT"),
            position: found(&["RA", "DEC", "RA_TARG", "DEC_TARG", "TARG_RA", "TARG_DEC"]),
            assumed: Vec::new(),
        }
    }
}
