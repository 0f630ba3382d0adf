//! Unit symbols: what one of each is in cm, g, s, arcsec and photons.
//!
//! Symbols and prefixes of the FITS standard 4.0 (section 4.3) and IVOA VOUnits 1.1 that a flux density
//! or a spectral axis can hold, with the spellings commonly found in headers. `A` is taken for Å, not
//! ampere: no current occurs here.

use crate::ground::constants::{ARCSEC_RAD, ARCSEC2_PER_SR};
use std::f64::consts::PI;

/// Powers of the base dimensions, in the order of the constants below.
pub(super) type Powers = [i32; 8];

pub(super) const MASS: usize = 0;
pub(super) const LENGTH: usize = 1;
pub(super) const TIME: usize = 2;
pub(super) const ANGLE: usize = 3;
pub(super) const PHOTON: usize = 4;
pub(super) const COUNT: usize = 5;
pub(super) const PIXEL: usize = 6;
pub(super) const MAGNITUDE: usize = 7;

/// A unit as mantissa · 10^exponent of its base dimensions, so that decimal factors stay exact.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Quantity {
    pub(super) mantissa: f64,
    pub(super) exponent: i32,
    pub(super) powers: Powers,
}

struct Symbol {
    names: &'static [&'static str],
    mantissa: f64,
    exponent: i32,
    powers: Powers,
    prefixed: bool,
}

const fn symbol(
    names: &'static [&'static str],
    mantissa: f64,
    exponent: i32,
    powers: Powers,
    prefixed: bool,
) -> Symbol {
    Symbol {
        names,
        mantissa,
        exponent,
        powers,
        prefixed,
    }
}

const ENERGY: Powers = [1, 2, -2, 0, 0, 0, 0, 0];
const POWER: Powers = [1, 2, -3, 0, 0, 0, 0, 0];
const PER_AA: Powers = [1, -1, -3, 0, 0, 0, 0, 0];
const PER_HZ: Powers = [1, 0, -2, 0, 0, 0, 0, 0];
const EV_MANTISSA: f64 = 1.602_176_634;
const RAYLEIGH_PER_ARCSEC2: f64 = 1.0 / (4.0 * PI * ARCSEC2_PER_SR);

const fn base(dimension: usize, power: i32) -> Powers {
    let mut powers = [0; 8];
    powers[dimension] = power;
    powers
}

static SYMBOLS: &[Symbol] = &[
    symbol(
        &[
            "Angstrom",
            "angstrom",
            "Angstroms",
            "angstroms",
            "Å",
            "AA",
            "A",
            "Ang",
            "ang",
        ],
        1.0,
        -8,
        base(LENGTH, 1),
        false,
    ),
    symbol(
        &["micron", "microns", "micrometer", "micrometers"],
        1.0,
        -4,
        base(LENGTH, 1),
        false,
    ),
    symbol(
        &["nanometer", "nanometers"],
        1.0,
        -7,
        base(LENGTH, 1),
        false,
    ),
    symbol(&["m", "meter", "meters"], 1.0, 2, base(LENGTH, 1), true),
    symbol(
        &["s", "sec", "second", "seconds"],
        1.0,
        0,
        base(TIME, 1),
        true,
    ),
    symbol(&["min"], 60.0, 0, base(TIME, 1), false),
    symbol(&["h"], 3600.0, 0, base(TIME, 1), false),
    symbol(&["Hz", "hertz"], 1.0, 0, base(TIME, -1), true),
    symbol(&["g"], 1.0, 0, base(MASS, 1), true),
    symbol(&["erg", "ergs"], 1.0, 0, ENERGY, false),
    symbol(&["J"], 1.0, 7, ENERGY, true),
    symbol(&["eV"], EV_MANTISSA, -12, ENERGY, true),
    symbol(&["W", "watt", "Watt"], 1.0, 7, POWER, true),
    symbol(&["Jy", "Jansky", "jansky"], 1.0, -23, PER_HZ, true),
    symbol(&["FLAM", "flam"], 1.0, 8, PER_AA, false),
    symbol(&["FNU", "fnu"], 1.0, 0, PER_HZ, false),
    symbol(&["ph", "photon", "photons"], 1.0, 0, base(PHOTON, 1), false),
    symbol(
        &["R", "rayleigh", "Rayleigh"],
        RAYLEIGH_PER_ARCSEC2,
        6,
        [0, -2, -1, -2, 1, 0, 0, 0],
        false,
    ),
    symbol(
        &["arcsec", "arcseconds", "arcsecond", "asec", "\""],
        1.0,
        0,
        base(ANGLE, 1),
        false,
    ),
    symbol(&["mas"], 1.0, -3, base(ANGLE, 1), false),
    symbol(&["arcmin"], 60.0, 0, base(ANGLE, 1), false),
    symbol(&["deg"], 3600.0, 0, base(ANGLE, 1), false),
    symbol(&["rad"], 1.0 / ARCSEC_RAD, 0, base(ANGLE, 1), false),
    symbol(
        &["sr", "ster", "steradian"],
        ARCSEC2_PER_SR,
        0,
        base(ANGLE, 2),
        false,
    ),
    symbol(
        &[
            "ct",
            "cts",
            "count",
            "counts",
            "adu",
            "ADU",
            "DN",
            "dn",
            "electron",
            "electrons",
            "e",
        ],
        1.0,
        0,
        base(COUNT, 1),
        false,
    ),
    symbol(
        &[
            "pix", "pixel", "pixels", "spaxel", "spaxels", "beam", "bin", "chan", "fiber", "fibre",
            "voxel",
        ],
        1.0,
        0,
        base(PIXEL, 1),
        false,
    ),
    symbol(&["mag", "dex"], 1.0, 0, base(MAGNITUDE, 1), false),
];

const PREFIXES: [(char, i32); 11] = [
    ('f', -15),
    ('p', -12),
    ('n', -9),
    ('u', -6),
    ('m', -3),
    ('c', -2),
    ('d', -1),
    ('k', 3),
    ('M', 6),
    ('G', 9),
    ('T', 12),
];

/// Spellings in capitals that cannot be mistaken; `MJY` could be milli or mega and is not one.
const CAPITALS: [&str; 17] = [
    "ERG",
    "ERGS",
    "CM",
    "S",
    "SEC",
    "HZ",
    "JY",
    "NM",
    "UM",
    "MICRON",
    "MICRONS",
    "ANGSTROM",
    "ANGSTROMS",
    "ANG",
    "SR",
    "ARCSEC",
    "PHOTONS",
];

/// Looks a symbol up, with its prefix.
pub(super) fn look_up(word: &str) -> Option<Quantity> {
    exact(word).or_else(|| prefixed(word)).or_else(|| {
        let small = word.to_ascii_lowercase();
        let known = CAPITALS.contains(&word);
        known.then(|| exact(&small).or_else(|| prefixed(&small)))?
    })
}

fn exact(word: &str) -> Option<Quantity> {
    let found = SYMBOLS.iter().find(|s| s.names.contains(&word))?;
    Some(found.quantity())
}

fn prefixed(word: &str) -> Option<Quantity> {
    let first = word.chars().next()?;
    let (_, exponent) = PREFIXES.iter().find(|(sign, _)| *sign == first)?;
    let rest = &word[first.len_utf8()..];
    let found = SYMBOLS
        .iter()
        .find(|s| s.prefixed && s.names.contains(&rest))?;
    let mut quantity = found.quantity();
    quantity.exponent += exponent;
    Some(quantity)
}

/// Every symbol without prefix, for suggestions.
pub(super) fn names() -> impl Iterator<Item = &'static str> {
    SYMBOLS.iter().flat_map(|s| s.names.iter().copied())
}

impl Symbol {
    fn quantity(&self) -> Quantity {
        Quantity {
            mantissa: self.mantissa,
            exponent: self.exponent,
            powers: self.powers,
        }
    }
}

impl Quantity {
    /// A pure number.
    pub(super) fn number(mantissa: f64, exponent: i32) -> Self {
        Self {
            mantissa,
            exponent,
            powers: [0; 8],
        }
    }

    /// Product of this and another quantity to a power; `None` when it leaves sensible bounds.
    pub(super) fn times(mut self, other: &Self, power: i32) -> Option<Self> {
        self.mantissa *= other.mantissa.powi(power);
        self.exponent = self
            .exponent
            .checked_add(other.exponent.checked_mul(power)?)?;
        for (mine, theirs) in self.powers.iter_mut().zip(other.powers) {
            *mine = mine.checked_add(theirs.checked_mul(power)?)?;
        }
        let sensible = self.mantissa.is_finite()
            && self.mantissa > 0.0
            && self.exponent.abs() < 250
            && self.powers.iter().all(|p| p.abs() < 50);
        sensible.then_some(self)
    }

    /// The factor with the exponent shifted, correctly rounded for decimal factors.
    pub(super) fn factor(&self, shift: i32) -> f64 {
        let ten: f64 = format!("1e{}", self.exponent + shift)
            .parse()
            .expect("invariant: a power of ten is a number");
        if self.mantissa == 1.0 {
            ten
        } else {
            self.mantissa * ten
        }
    }
}
