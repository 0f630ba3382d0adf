//! Stored numbers to `f64` columns and flags, one at a time.

use crate::ground::{Error, Result};
use fits_well::table::ElementKind;

/// Which mask values are bad. A value that is not a number always is.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum MaskRule {
    /// Everything but 0.
    NonZero,
    /// Odd values: bit 1 alone counts.
    Bit1,
    /// Everything but these.
    AllBut(Vec<f64>),
}

impl MaskRule {
    /// The rule of a layout's `mask_good`, else `usual`.
    pub(super) fn of(mask_good: &[String], usual: Self) -> Result<Self> {
        if mask_good.is_empty() {
            return Ok(usual);
        }
        let number = |text: &String| {
            text.trim().parse().map_err(|_| {
                Error::plan(format!("mask value {text:?} is not a number"))
                    .remedy("masks in FITS files are numbers; give mask_good as numbers")
            })
        };
        mask_good
            .iter()
            .map(number)
            .collect::<Result<_>>()
            .map(Self::AllBut)
    }

    fn bad(&self, value: f64) -> bool {
        match self {
            Self::NonZero => value != 0.0,
            #[allow(clippy::cast_possible_truncation)]
            Self::Bit1 => value.is_nan() || (value as i64) & 1 == 1,
            Self::AllBut(good) => !good.contains(&value),
        }
    }
}

/// Where numbers go as they are read.
#[derive(Debug)]
pub(super) enum Sink {
    Numbers(Vec<f64>),
    Flags { rule: MaskRule, bad: Vec<bool> },
}

impl Sink {
    /// A column of numbers; `count` must already be borne out by the length of the file.
    pub(super) fn numbers(count: usize) -> Self {
        Self::Numbers(Vec::with_capacity(count))
    }

    pub(super) fn flags(rule: MaskRule, count: usize) -> Self {
        Self::Flags {
            rule,
            bad: Vec::with_capacity(count),
        }
    }

    pub(super) fn push(&mut self, value: f64) {
        match self {
            Self::Numbers(column) => column.push(value),
            Self::Flags { rule, bad } => bad.push(rule.bad(value)),
        }
    }

    pub(super) fn into_numbers(self) -> Vec<f64> {
        match self {
            Self::Numbers(column) => column,
            Self::Flags { .. } => Vec::new(),
        }
    }

    pub(super) fn into_flags(self) -> Vec<bool> {
        match self {
            Self::Flags { bad, .. } => bad,
            Self::Numbers(_) => Vec::new(),
        }
    }
}

/// Stored bytes of one element, or `None` for kinds that are no real numbers.
pub(super) fn element_bytes(element: ElementKind) -> Option<usize> {
    match element {
        ElementKind::Logical | ElementKind::U8 => Some(1),
        ElementKind::I16 => Some(2),
        ElementKind::I32 | ElementKind::F32 => Some(4),
        ElementKind::I64 | ElementKind::F64 => Some(8),
        _ => None,
    }
}

/// How the elements of a column become numbers: value = zero + scale × stored, and the stored
/// integer `null` is not a number (FITS standard 4.0, section 7.3.2).
#[derive(Clone, Copy, Debug)]
pub(super) struct Coding {
    pub(super) element: ElementKind,
    pub(super) scale: f64,
    pub(super) zero: f64,
    pub(super) null: Option<i64>,
}

impl Coding {
    /// The number in `bytes`, big-endian, as many as [`element_bytes`] says.
    pub(super) fn decode(&self, bytes: &[u8]) -> f64 {
        match self.element {
            ElementKind::Logical => match bytes[0] {
                b'T' => 1.0,
                b'F' => 0.0,
                _ => f64::NAN,
            },
            ElementKind::U8 => self.integer(i64::from(bytes[0])),
            ElementKind::I16 => self.integer(i16::from_be_bytes(array(bytes)).into()),
            ElementKind::I32 => self.integer(i32::from_be_bytes(array(bytes)).into()),
            ElementKind::I64 => self.integer(i64::from_be_bytes(array(bytes))),
            ElementKind::F32 => self.real(f32::from_be_bytes(array(bytes)).into()),
            ElementKind::F64 => self.real(f64::from_be_bytes(array(bytes))),
            _ => f64::NAN,
        }
    }

    pub(super) fn integer(&self, stored: i64) -> f64 {
        if self.null == Some(stored) {
            return f64::NAN;
        }
        #[allow(clippy::cast_precision_loss)]
        self.real(stored as f64)
    }

    pub(super) fn real(&self, stored: f64) -> f64 {
        self.zero + self.scale * stored
    }
}

fn array<const N: usize>(bytes: &[u8]) -> [u8; N] {
    bytes[..N].try_into().expect("invariant: N bytes were cut")
}
