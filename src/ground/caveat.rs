//! Doubts that do not stop the work but travel with the result to every output.

use std::fmt;

/// A reason to read the result with care. `code()` is stable for scripts; `Display` is for people.
#[derive(Clone, Debug, PartialEq)]
pub enum Caveat {
    /// Errors were not given and were estimated from the scatter in the continuum.
    ErrorsEstimated {
        /// Spectrum label.
        spectrum: String,
        /// Estimated typical error, erg s⁻¹ cm⁻² Å⁻¹.
        sigma_erg_s_cm2_aa: f64,
    },
    /// Samples were left out.
    SamplesLeftOut {
        /// Spectrum label.
        spectrum: String,
        /// Not-a-number samples.
        not_a_number: usize,
        /// Samples flagged by the mask column.
        flagged: usize,
    },
    /// The reduced chi-square says that model or errors are wrong.
    PoorFit {
        /// Window, vacuum Å.
        window_aa: (f64, f64),
        /// Reduced chi-square.
        reduced_chi2: f64,
    },
    /// A constant in use was recalled, not read in its source.
    FromMemory {
        /// What it is, for example "g of CO2 4.26 µm".
        what: String,
        /// The source as remembered.
        source: String,
    },
    /// Published values disagree; a default was used.
    SourcesDisagree {
        /// What it is.
        what: String,
        /// Largest over smallest value.
        factor: f64,
    },
    /// Another known band lies inside a fitted window and is not modelled.
    UnmodelledBand {
        /// Band identifier from the line lists.
        band: String,
        /// Window, vacuum Å.
        window_aa: (f64, f64),
    },
    /// A band's shape parameters ended on a bound and were held.
    ShapeHeld {
        /// Band identifier.
        band: String,
        /// What was held and why.
        why: String,
    },
    /// A line is so narrow that sampling it at pixel centres biases the flux.
    Undersampled {
        /// Band identifier.
        band: String,
        /// Width in pixels.
        fwhm_pixels: f64,
    },
    /// The coma may be optically thick in the strongest lines.
    OpticalDepth {
        /// Band identifier.
        band: String,
        /// Estimated line-centre optical depth of the strongest line.
        tau: f64,
    },
    /// The tabulated g has no velocity dependence although the Swings effect matters.
    SwingsIgnored {
        /// Band identifier.
        band: String,
    },
    /// A single Gaussian stands for a band with structure.
    GaussianForStructured {
        /// Band identifier.
        band: String,
    },
    /// The comparison set is small or unlike this observation.
    ThinComparison {
        /// Ratio, for example "CO2/H2O".
        ratio: String,
        /// Number of comets.
        comets: usize,
    },
    /// Anything else, with a stable code.
    Other {
        /// Stable code, words joined by hyphens.
        code: &'static str,
        /// Text for people.
        text: String,
    },
}

impl Caveat {
    /// Stable short code for scripts.
    pub fn code(&self) -> &'static str {
        match self {
            Self::ErrorsEstimated { .. } => "errors-estimated",
            Self::SamplesLeftOut { .. } => "samples-left-out",
            Self::PoorFit { .. } => "poor-fit",
            Self::FromMemory { .. } => "from-memory",
            Self::SourcesDisagree { .. } => "sources-disagree",
            Self::UnmodelledBand { .. } => "unmodelled-band",
            Self::ShapeHeld { .. } => "shape-held",
            Self::Undersampled { .. } => "undersampled",
            Self::OpticalDepth { .. } => "optical-depth",
            Self::SwingsIgnored { .. } => "swings-ignored",
            Self::GaussianForStructured { .. } => "gaussian-for-structured",
            Self::ThinComparison { .. } => "thin-comparison",
            Self::Other { code, .. } => code,
        }
    }
}

impl fmt::Display for Caveat {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::ErrorsEstimated {
                spectrum,
                sigma_erg_s_cm2_aa,
            } => write!(
                f,
                "{spectrum}: no errors given; estimated from the scatter about the continuum, typically {sigma_erg_s_cm2_aa:.2e} erg/s/cm2/Å"
            ),
            Self::SamplesLeftOut {
                spectrum,
                not_a_number,
                flagged,
            } => write!(
                f,
                "{spectrum}: samples left out: {not_a_number} not a number, {flagged} flagged"
            ),
            Self::PoorFit {
                window_aa,
                reduced_chi2,
            } => write!(
                f,
                "window {:.1}–{:.1} Å: reduced chi-square {reduced_chi2:.2}; the model or the errors are wrong and the error bars are not to be trusted",
                window_aa.0, window_aa.1
            ),
            Self::FromMemory { what, source } => {
                write!(
                    f,
                    "{what} rests on memory, not on a text that was read ({source})"
                )
            }
            Self::SourcesDisagree { what, factor } => write!(
                f,
                "{what}: published values differ by a factor {factor:.2}; the default of the line lists was used"
            ),
            Self::UnmodelledBand { band, window_aa } => write!(
                f,
                "{band} lies in the window {:.1}–{:.1} Å and is not in the model; add it to the plan if it can be there",
                window_aa.0, window_aa.1
            ),
            Self::ShapeHeld { band, why } => write!(f, "{band}: {why}"),
            Self::Undersampled { band, fwhm_pixels } => write!(
                f,
                "{band}: only {fwhm_pixels:.1} pixels wide; set sampling = \"pixel\" so that the flux is not biased"
            ),
            Self::OpticalDepth { band, tau } => write!(
                f,
                "{band}: the strongest line reaches an optical depth of about {tau:.1}; the linear conversion gives too few molecules"
            ),
            Self::SwingsIgnored { band } => write!(
                f,
                "{band}: g depends on the heliocentric velocity (Swings effect); the tabulated value ignores it and its error covers the published range"
            ),
            Self::GaussianForStructured { band } => write!(
                f,
                "{band}: resolved rotational structure is fitted with one Gaussian; the flux can be off by more than its error"
            ),
            Self::ThinComparison { ratio, comets } => {
                let noun = if *comets == 1 { "comet" } else { "comets" };
                write!(f, "{ratio}: only {comets} {noun} to compare with")
            }
            Self::Other { text, .. } => f.write_str(text),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn code_and_text() {
        let c = Caveat::Undersampled {
            band: "x".into(),
            fwhm_pixels: 1.2,
        };
        assert_eq!(c.code(), "undersampled");
        assert!(c.to_string().contains("1.2 pixels"));
    }
}
