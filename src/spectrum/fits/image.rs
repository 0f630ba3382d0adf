//! A spectrum in an image: the only long axis of an array, or a chosen row.

use super::axis::Axis;
use super::companions::{self, Role};
use super::numbers::{MaskRule, Sink};
use super::parts::{Kind, PartInfo};
use super::source::{Opened, refused};
use super::units::{self, Errors, Raw};
use super::words::Words;
use super::{ErrorKind, FitsLayout};
use crate::ground::{Error, FluxUnit, Result};
use std::ops::Range;

/// Samples read at a time.
const CHUNK: usize = 1 << 16;

/// A line of an array along one axis (counted from 0), at fixed places on the others.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Line {
    pub(super) axis: usize,
    place: Vec<usize>,
    pub(super) len: usize,
}

/// The line of an array that is a spectrum: its only long axis, or the row chosen (from 1) along the
/// first axis.
pub(super) fn line(shape: &[usize], row: Option<usize>) -> Result<Line> {
    let long: Vec<usize> = (0..shape.len()).filter(|a| shape[*a] > 1).collect();
    let on = |axis: usize, place: Vec<usize>| Line {
        axis,
        place,
        len: shape[axis],
    };
    match (&long[..], row) {
        ([], _) => Ok(on(0, vec![0; shape.len()])),
        ([axis], None | Some(1)) => Ok(on(*axis, vec![0; shape.len()])),
        (_, Some(row)) => {
            let mut left = row.checked_sub(1).unwrap_or(usize::MAX);
            let mut place = vec![0; shape.len()];
            for axis in 1..shape.len() {
                place[axis] = left % shape[axis];
                left /= shape[axis];
            }
            if left == 0 {
                return Ok(on(0, place));
            }
            let rows: u128 = shape[1..].iter().map(|n| *n as u128).product();
            Err(Error::input(format!("the image has no row {row}"))
                .remedy(format!("choose a row from 1 to {rows}")))
        }
        _ => Err(Error::input(format!(
            "the image has {} long axes; a spectrum has one",
            long.len()
        ))
        .remedy("extract a one-dimensional spectrum first; if each row is a spectrum, choose one with the plan key row (from 1)")),
    }
}

/// Reads the spectrum of an image with the errors and flags beside it.
pub(super) fn read(
    file: &mut Opened,
    parts: &[PartInfo],
    part: &PartInfo,
    layout: &FitsLayout,
) -> Result<Raw> {
    let Kind::Image { shape } = &part.kind else {
        return Err(Error::input(format!("{} is not an image", part.title())));
    };
    let line = line(shape, layout.row)?;
    let words = Words::of(parts, part);
    let mut assumed = Vec::new();
    let axis = Axis::read(words, line.axis + 1, layout, &mut assumed)?;
    let unit = words.text_inherited("BUNIT");
    let flux_unit = units::flux(layout, unit, "BUNIT", &mut assumed)?;
    let errors = errors(file, parts, part, &line, flux_unit, layout, &mut assumed)?;
    let flags = flags(file, parts, part, &line, layout)?;
    let mut flux = Sink::numbers(line.len);
    samples(file, part, &line, &mut flux)?;
    Ok(Raw {
        axis: values(file, part, &axis, &line)?,
        axis_words: axis.words,
        wavelength_unit: axis.unit,
        medium: axis.medium,
        flux: flux.into_numbers(),
        flux_unit,
        errors,
        flags,
        assumed,
    })
}

fn values(file: &mut Opened, part: &PartInfo, axis: &Axis, line: &Line) -> Result<Vec<f64>> {
    if axis.is_table() {
        return tabulated(file, part, line);
    }
    #[allow(clippy::cast_precision_loss)]
    Ok((1..=line.len).map(|p| axis.value(p as f64)).collect())
}

/// A -TAB axis, its table resolved by the FITS reader; values in the unit of the standard.
fn tabulated(file: &mut Opened, part: &PartInfo, line: &Line) -> Result<Vec<f64>> {
    let doing = "the tabulated axis cannot be read";
    let wcs = file
        .reader
        .read_wcs(part.number, None)
        .map_err(|e| refused(doing, &e))?;
    #[allow(clippy::cast_precision_loss)]
    let mut pixel: Vec<f64> = line.place.iter().map(|p| *p as f64 + 1.0).collect();
    let mut world = vec![0.0; pixel.len()];
    (1..=line.len)
        .map(|p| {
            #[allow(clippy::cast_precision_loss)]
            {
                pixel[line.axis] = p as f64;
            }
            wcs.pixel_to_world(&pixel, &mut world)
                .map_err(|e| refused(doing, &e))?;
            Ok(world[line.axis])
        })
        .collect()
}

/// Reads the samples of a line into `sink`, a chunk at a time.
fn samples(file: &mut Opened, part: &PartInfo, line: &Line, sink: &mut Sink) -> Result<()> {
    let doing = format!("{} cannot be read", part.title());
    let mut image = file
        .reader
        .image(part.number)
        .map_err(|e| refused(&doing, &e))?;
    let mut region: Vec<Range<usize>> = line.place.iter().map(|p| *p..*p + 1).collect();
    let mut chunk: Vec<f64> = Vec::with_capacity(CHUNK.min(line.len));
    let mut start = 0;
    while start < line.len {
        let end = line.len.min(start + CHUNK);
        region[line.axis] = start..end;
        chunk.clear();
        image
            .physical_into(&region[..], &mut chunk)
            .map_err(|e| refused(&doing, &e))?;
        chunk.iter().for_each(|v| sink.push(*v));
        start = end;
    }
    Ok(())
}

fn errors(
    file: &mut Opened,
    parts: &[PartInfo],
    main: &PartInfo,
    line: &Line,
    flux_unit: FluxUnit,
    layout: &FitsLayout,
    assumed: &mut Vec<String>,
) -> Result<Option<Errors>> {
    let Some(index) = companions::errors(parts, main, layout)? else {
        return Ok(None);
    };
    let part = &parts[index];
    let by_name: Option<ErrorKind> = match companions::role(part) {
        Some(Role::Errors(kind)) => kind,
        _ => None,
    };
    let unit = Words::of(parts, part).text("BUNIT");
    let source = part.title();
    let (kind, unit) = units::errors(layout, by_name, unit, flux_unit, &source, assumed)?;
    let mut sink = Sink::numbers(line.len);
    samples(file, part, line, &mut sink)?;
    Ok(Some(Errors {
        values: sink.into_numbers(),
        kind,
        unit,
        source,
    }))
}

fn flags(
    file: &mut Opened,
    parts: &[PartInfo],
    main: &PartInfo,
    line: &Line,
    layout: &FitsLayout,
) -> Result<Option<(Vec<bool>, String)>> {
    let Some(index) = companions::flags(parts, main, layout)? else {
        return Ok(None);
    };
    let part = &parts[index];
    let rule = MaskRule::of(&layout.mask_good, MaskRule::NonZero)?;
    let mut sink = Sink::flags(rule, line.len);
    samples(file, part, line, &mut sink)?;
    Ok(Some((sink.into_flags(), part.title())))
}
