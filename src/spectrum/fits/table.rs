//! A spectrum in a binary table: one sample per row, or the vectors in the cells of one row.

use super::FitsLayout;
use super::columns::{self, ColumnInfo, Picks, SURFACE, fold};
use super::numbers::{Coding, MaskRule, Sink};
use super::parts::{Kind, PartInfo};
use super::source::{Opened, refused};
use super::units::{self, Errors, Raw};
use super::words::Words;
use crate::ground::{Error, Medium, Result, WavelengthUnit};
use fits_well::table::ColumnData;

/// Bytes read at a time.
const CHUNK: usize = 1 << 20;

/// The rows to read: all, a sample each, or the vectors of one (from 0).
#[derive(Clone, Copy, Debug, PartialEq)]
enum Rows {
    All(usize),
    One(usize),
}

struct Table<'a> {
    part: &'a PartInfo,
    row_bytes: usize,
    columns: &'a [ColumnInfo],
    rows: Rows,
}

/// Reads the spectrum of a table.
pub(super) fn read(
    file: &mut Opened,
    parts: &[PartInfo],
    part: &PartInfo,
    layout: &FitsLayout,
) -> Result<Raw> {
    let Kind::Table {
        rows,
        row_bytes,
        columns,
    } = &part.kind
    else {
        return Err(Error::input(format!("{} is not a table", part.title())));
    };
    let picks = columns::pick(columns, layout)?;
    let table = Table {
        part,
        row_bytes: *row_bytes,
        columns,
        rows: which_rows(*rows, &columns[picks.wavelength], layout.row)?,
    };
    let words = Words::of(parts, part);
    let raw = table.spectrum(file, words, &picks, layout)?;
    match surface_picks(columns, &picks, layout) {
        Some(surface) if empty(&raw) => {
            let mut other = table.spectrum(file, words, &surface, layout)?;
            if empty(&other) {
                return Ok(raw);
            }
            other.assumed.push(format!(
                "{} read, since {} holds no values or no errors",
                columns[surface.flux].title(),
                columns[picks.flux].title()
            ));
            Ok(other)
        }
        _ => Ok(raw),
    }
}

/// True when all fluxes, or all errors, are 0 or not numbers.
fn empty(raw: &Raw) -> bool {
    let nothing = |values: &[f64]| values.iter().all(|v| *v == 0.0 || v.is_nan());
    nothing(&raw.flux) || raw.errors.as_ref().is_some_and(|e| nothing(&e.values))
}

/// The columns of surface brightness, when the flux was not chosen by the plan.
fn surface_picks(columns: &[ColumnInfo], picks: &Picks, layout: &FitsLayout) -> Option<Picks> {
    let place = |name: &str| columns.iter().position(|c| fold(&c.name) == name);
    let flux = place(SURFACE.0).filter(|f| *f != picks.flux && layout.flux.is_none())?;
    Some(Picks {
        flux,
        error: place(SURFACE.1),
        ..picks.clone()
    })
}

fn which_rows(rows: usize, wavelength: &ColumnInfo, row: Option<usize>) -> Result<Rows> {
    if rows == 0 {
        return Err(Error::input("the table has no rows").remedy("choose another part"));
    }
    if !wavelength.is_vector() && row.is_none() {
        return Ok(Rows::All(rows));
    }
    if !wavelength.is_vector() {
        return Err(Error::input(format!(
            "{} has one value per row, so a row is a sample, not a spectrum",
            wavelength.title()
        ))
        .remedy("remove the plan key row"));
    }
    match row {
        Some(row) if (1..=rows).contains(&row) => Ok(Rows::One(row - 1)),
        Some(row) => Err(Error::input(format!("the table has no row {row}"))
            .remedy(format!("choose a row from 1 to {rows}"))),
        None if rows == 1 => Ok(Rows::One(0)),
        None => Err(
            Error::input(format!("the table holds {rows} spectra, one in each row"))
                .remedy("choose one with the plan key row, counted from 1"),
        ),
    }
}

impl Table<'_> {
    fn spectrum(
        &self,
        file: &mut Opened,
        words: Words,
        picks: &Picks,
        layout: &FitsLayout,
    ) -> Result<Raw> {
        let mut assumed = Vec::new();
        let wavelength = &self.columns[picks.wavelength];
        let flux = &self.columns[picks.flux];
        let wavelength_unit = wavelength_unit(wavelength, layout, &mut assumed)?;
        let medium = units::medium(layout, wavelength_unit, &said_medium(wavelength, words)?)?;
        let place = format!("TUNIT{}", flux.index + 1);
        let said = flux.unit.as_deref().or(words.text_inherited("BUNIT"));
        let flux_unit = units::flux(layout, said, &place, &mut assumed)?;
        let errors = picks.error.map(|e| &self.columns[e]);
        let meaning = errors
            .map(|c| {
                let by_name = columns::error_kind(c);
                let unit = c.unit.as_deref();
                units::errors(layout, by_name, unit, flux_unit, &c.title(), &mut assumed)
            })
            .transpose()?;
        let mask = picks.mask.map(|m| &self.columns[m]);
        let mut read = self
            .columns_of(file, wavelength, flux, errors, mask, layout)?
            .into_iter();
        let mut numbers = || read.next().map(Sink::into_numbers).unwrap_or_default();
        Ok(Raw {
            axis: axis_values(wavelength, numbers()),
            axis_words: axis_words(wavelength),
            wavelength_unit,
            medium,
            flux: numbers(),
            flux_unit,
            errors: errors.zip(meaning).map(|(c, (kind, unit))| Errors {
                values: numbers(),
                kind,
                unit,
                source: c.title(),
            }),
            flags: mask
                .zip(read.next())
                .map(|(m, f)| (f.into_flags(), m.title())),
            assumed,
        })
    }

    /// Wavelength, flux, then error and mask where there are any.
    fn columns_of(
        &self,
        file: &mut Opened,
        wavelength: &ColumnInfo,
        flux: &ColumnInfo,
        errors: Option<&ColumnInfo>,
        mask: Option<&ColumnInfo>,
        layout: &FitsLayout,
    ) -> Result<Vec<Sink>> {
        let count = match self.rows {
            Rows::All(rows) => rows,
            Rows::One(_) if wavelength.variable => 0,
            Rows::One(_) => wavelength.repeat,
        };
        let mut picked: Vec<(&ColumnInfo, Sink)> = [Some(wavelength), Some(flux), errors]
            .into_iter()
            .flatten()
            .map(|c| (c, Sink::numbers(count)))
            .collect();
        if let Some(mask) = mask {
            let space = self.columns.iter().any(|c| fold(&c.name) == SURFACE.0);
            let usual = if space && fold(&mask.name) == "dq" {
                MaskRule::Bit1
            } else {
                MaskRule::NonZero
            };
            picked.push((
                mask,
                Sink::flags(MaskRule::of(&layout.mask_good, usual)?, count),
            ));
        }
        match self.rows {
            Rows::All(rows) => self.all_rows(file, rows, &mut picked)?,
            Rows::One(row) => {
                for (column, sink) in &mut picked {
                    self.cell(file, row, column, sink)?;
                }
            }
        }
        Ok(picked.into_iter().map(|(_, sink)| sink).collect())
    }

    /// One value of each column per row, in one pass over the file.
    fn all_rows(
        &self,
        file: &mut Opened,
        rows: usize,
        picked: &mut [(&ColumnInfo, Sink)],
    ) -> Result<()> {
        if let Some((column, _)) = picked.iter().find(|(c, _)| c.is_vector()) {
            return Err(Error::input(format!(
                "{} holds several values per row, but the wavelengths one",
                column.title()
            ))
            .remedy("name columns of the same form"));
        }
        // The schema holds every column inside the row, so a row without bytes has none to pick.
        if self.row_bytes > CHUNK || self.row_bytes == 0 {
            for row in 0..rows {
                for (column, sink) in &mut *picked {
                    self.fixed_cell(file, row, column, sink)?;
                }
            }
            return Ok(());
        }
        let per_chunk = (CHUNK / self.row_bytes).min(rows);
        let mut buffer = vec![0; per_chunk * self.row_bytes];
        let mut row = 0;
        while row < rows {
            let bytes = &mut buffer[..per_chunk.min(rows - row) * self.row_bytes];
            file.read_at(self.offset(row, 0), bytes)?;
            for cells in bytes.chunks_exact(self.row_bytes) {
                for (column, sink) in &mut *picked {
                    sink.push(column.coding.decode(&cells[column.byte_offset..]));
                }
            }
            row += per_chunk;
        }
        Ok(())
    }

    fn offset(&self, row: usize, byte: usize) -> u64 {
        self.part.data_offset + row as u64 * self.row_bytes as u64 + byte as u64
    }

    /// The vector in one cell.
    fn cell(
        &self,
        file: &mut Opened,
        row: usize,
        column: &ColumnInfo,
        sink: &mut Sink,
    ) -> Result<()> {
        if !column.variable {
            return self.fixed_cell(file, row, column, sink);
        }
        let data = file
            .reader
            .read_table_cell(self.part.number, row, column.index)
            .map_err(|e| refused(&format!("{} cannot be read", column.title()), &e))?;
        push_all(&data, &column.coding, sink);
        Ok(())
    }

    fn fixed_cell(
        &self,
        file: &mut Opened,
        row: usize,
        column: &ColumnInfo,
        sink: &mut Sink,
    ) -> Result<()> {
        let size = column.element_bytes.unwrap_or(1);
        let total = column.repeat * size;
        let mut buffer = vec![0; total.min(CHUNK)];
        let mut done = 0;
        while done < total {
            let bytes = &mut buffer[..CHUNK.min(total - done)];
            file.read_at(self.offset(row, column.byte_offset + done), bytes)?;
            bytes
                .chunks_exact(size)
                .for_each(|b| sink.push(column.coding.decode(b)));
            done += bytes.len();
        }
        Ok(())
    }
}

fn push_all(data: &ColumnData, coding: &Coding, sink: &mut Sink) {
    match data {
        ColumnData::U8(v) => v
            .iter()
            .for_each(|x| sink.push(coding.integer((*x).into()))),
        ColumnData::I16(v) => v
            .iter()
            .for_each(|x| sink.push(coding.integer((*x).into()))),
        ColumnData::I32(v) => v
            .iter()
            .for_each(|x| sink.push(coding.integer((*x).into()))),
        ColumnData::I64(v) => v.iter().for_each(|x| sink.push(coding.integer(*x))),
        ColumnData::F32(v) => v.iter().for_each(|x| sink.push(coding.real((*x).into()))),
        ColumnData::F64(v) => v.iter().for_each(|x| sink.push(coding.real(*x))),
        ColumnData::Logical(v) => v.iter().for_each(|x| {
            sink.push(x.map_or(f64::NAN, |yes| f64::from(u8::from(yes))));
        }),
        _ => {}
    }
}

/// What a column's name, TUCD and header words say of the medium.
fn said_medium(column: &ColumnInfo, words: Words) -> Result<Vec<(Medium, String)>> {
    let mut said = Vec::new();
    let name = column.name.to_ascii_lowercase();
    let word = |w: &str| {
        name.split(|c: char| !c.is_ascii_alphabetic())
            .any(|t| t == w)
    };
    if word("air") || word("awav") {
        said.push((Medium::Air, column.title()));
    }
    if word("vac") || word("vacuum") {
        said.push((Medium::Vacuum, column.title()));
    }
    // From memory: archives mark wavelengths in the air of the observatory by this second word.
    if column.ucd.contains("obs.atmos") {
        said.push((
            Medium::Air,
            format!("TUCD{} = {}", column.index + 1, column.ucd),
        ));
    }
    said.extend(words.medium()?);
    Ok(said)
}

fn wavelength_unit(
    column: &ColumnInfo,
    layout: &FitsLayout,
    assumed: &mut Vec<String>,
) -> Result<WavelengthUnit> {
    let place = format!("TUNIT{}", column.index + 1);
    if !column.is_log10() {
        return units::wavelength(layout, column.unit.as_deref(), &place, assumed);
    }
    // The unit of a logarithm is seldom one that can be read; survey files mean Å.
    let unit = units::wavelength(layout, Some("Angstrom"), &place, assumed)?;
    assumed.push(format!("{} is log10 of a length in {unit}", column.title()));
    Ok(unit)
}

fn axis_values(column: &ColumnInfo, mut values: Vec<f64>) -> Vec<f64> {
    if column.is_log10() {
        values.iter_mut().for_each(|v| *v = 10_f64.powf(*v));
    }
    values
}

fn axis_words(column: &ColumnInfo) -> String {
    let log = if column.is_log10() {
        ", decimal logarithm"
    } else {
        ""
    };
    format!("{}{log}", column.title())
}
