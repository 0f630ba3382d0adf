//! The parts of a file, each checked against the length of the file before anything is read.

use super::columns::ColumnInfo;
use super::source::{DAMAGED, Opened};
use super::understood::PartFacts;
use super::words::text;
use crate::ground::{Error, Result};
use fits_well::header::Header;
use fits_well::io::{BLOCK_SIZE, CARD_SIZE, Hdu, HduKind};

/// What a part holds.
#[derive(Clone, Debug)]
pub(super) enum Kind {
    /// No data.
    Empty,
    /// An array, first axis fastest.
    Image { shape: Vec<usize> },
    /// A binary table.
    Table {
        rows: usize,
        row_bytes: usize,
        columns: Vec<ColumnInfo>,
    },
    /// Anything else, with why it cannot hold a spectrum here.
    Other(String),
}

/// A header with what its data are and where they stand.
#[derive(Clone, Debug)]
pub(super) struct PartInfo {
    pub(super) number: usize,
    pub(super) name: Option<String>,
    pub(super) kind: Kind,
    pub(super) header: Header,
    pub(super) data_offset: u64,
}

impl PartInfo {
    pub(super) fn is_table(&self) -> bool {
        matches!(self.kind, Kind::Table { .. })
    }

    /// For messages: `part 1 (SCI)`.
    pub(super) fn title(&self) -> String {
        match &self.name {
            Some(name) => format!("part {} ({name})", self.number),
            None => format!("part {}", self.number),
        }
    }

    pub(super) fn facts(&self) -> PartFacts {
        let (kind, size) = match &self.kind {
            Kind::Empty => ("empty".to_owned(), String::new()),
            Kind::Image { shape } => {
                let axes: Vec<String> = shape.iter().map(usize::to_string).collect();
                (format!("{}-D image", shape.len()), axes.join(" x "))
            }
            Kind::Table { rows, columns, .. } => (
                "table".to_owned(),
                format!("{rows} rows x {} columns", columns.len()),
            ),
            Kind::Other(why) => (why.clone(), String::new()),
        };
        PartFacts {
            number: self.number,
            name: self.name.clone().unwrap_or_default(),
            kind,
            size,
        }
    }
}

/// The parts in a few lines, for messages.
pub(super) fn listing(parts: &[PartInfo]) -> String {
    let line = |p: &PartInfo| {
        let f = p.facts();
        let line = format!("{} {} {} {}", f.number, f.name, f.kind, f.size);
        let words: Vec<&str> = line.split_whitespace().collect();
        words.join(" ")
    };
    parts.iter().map(line).collect::<Vec<_>>().join("\n")
}

/// Lists the parts. A part whose data are claimed to reach past the end of the file is refused here.
pub(super) fn list(file: &mut Opened) -> Result<Vec<PartInfo>> {
    let mut parts = Vec::new();
    let mut offset = 0;
    for index in 0..file.reader.hdus().len() {
        let data_offset = after_header(file, offset)?;
        let hdu = &file.reader.hdus()[index];
        let left = file.len.saturating_sub(data_offset);
        let part = describe(hdu, data_offset);
        if hdu.data_bytes > left {
            return Err(Error::input(format!(
                "{} is said to hold {} bytes, but the file ends after {left} of them",
                part.title(),
                hdu.data_bytes
            ))
            .remedy(DAMAGED));
        }
        offset = data_offset.saturating_add(hdu.padded_data_bytes());
        parts.push(part);
    }
    if let Some(defect) = file.reader.scan_defect() {
        let number = parts.len();
        return Err(super::source::refused(
            &format!("the header of part {number} cannot be read"),
            defect,
        ));
    }
    Ok(parts)
}

/// Where the data begin whose header begins at `offset`: after the block with the END card.
fn after_header(file: &mut Opened, offset: u64) -> Result<u64> {
    let mut block = [0; BLOCK_SIZE];
    let mut at = offset;
    loop {
        file.read_at(at, &mut block)?;
        at += BLOCK_SIZE as u64;
        let ends = |card: &[u8]| card.starts_with(b"END") && card[3..].iter().all(|b| *b == b' ');
        if block.chunks_exact(CARD_SIZE).any(ends) {
            return Ok(at);
        }
    }
}

fn describe(hdu: &Hdu, data_offset: u64) -> PartInfo {
    PartInfo {
        number: hdu.index,
        name: text(&hdu.header, "EXTNAME").map(str::to_owned),
        kind: kind(hdu),
        header: hdu.header.clone(),
        data_offset,
    }
}

fn kind(hdu: &Hdu) -> Kind {
    match hdu.kind {
        HduKind::Primary | HduKind::Image | HduKind::CompressedImage => {
            if !hdu.is_image() {
                return Kind::Empty;
            }
            match hdu.image_metadata() {
                Ok(meta) if meta.shape.contains(&0) => Kind::Empty,
                Ok(meta) => Kind::Image {
                    shape: meta.shape.to_vec(),
                },
                Err(e) => Kind::Other(format!("unreadable image ({e})")),
            }
        }
        HduKind::BinTable => match hdu.table_schema() {
            Ok(schema) => Kind::Table {
                rows: schema.row_count(),
                row_bytes: schema.row_len(),
                columns: ColumnInfo::all(schema, &hdu.header),
            },
            Err(e) => Kind::Other(format!("unreadable table ({e})")),
        },
        HduKind::AsciiTable => Kind::Other("ASCII table (not read)".to_owned()),
        HduKind::CompressedTable => Kind::Other("compressed table (not read)".to_owned()),
        HduKind::RandomGroups => Kind::Other("random groups (not read)".to_owned()),
        _ => Kind::Other("unknown extension".to_owned()),
    }
}
