//! A figure as files for print: SVG as drawn, PDF with embedded fonts, PNG at 300 dpi.
//!
//! The only font is DejaVu Sans, carried in the program: the result does not depend on the fonts of
//! the machine, and it has every sign that the figures use (₂, ⁻, Å, µ, ρ, σ).

use super::stamp::Stamp;
use crate::ground::{Error, Result};
use flate2::Crc;
use pdf_writer::{Content, Finish, Name, Pdf, Rect, Ref, TextStr};
use resvg::tiny_skia::{Pixmap, Transform};
use resvg::usvg::{Options, Tree};
use std::sync::OnceLock;

/// Resolution of the PNG.
const DOTS_PER_INCH: f32 = 300.0;
/// Units per inch of a parsed SVG (the CSS pixel).
const PIXELS_PER_INCH: f32 = 96.0;
/// Points per inch of a PDF page.
const POINTS_PER_INCH: f32 = 72.0;
/// Length of the signature and the header chunk of a PNG.
const PNG_HEAD: usize = 8 + 25;

/// One figure in its three formats.
pub(super) struct Printed {
    pub svg: Vec<u8>,
    pub pdf: Vec<u8>,
    pub png: Vec<u8>,
}

/// Renders a figure; `name` stands in messages and as the title of the PDF.
///
/// # Errors
/// The libraries refuse the drawing.
pub(super) fn print(svg: &str, name: &str, stamp: &Stamp) -> Result<Printed> {
    let refuse = |what: &str, cause: &dyn std::fmt::Display| {
        Error::compute(format!("figure {name}: {what}: {cause}"))
    };
    let tree = Tree::from_str(svg, fonts()).map_err(|e| refuse("not a drawing", &e))?;
    let pdf = pdf(&tree, name, stamp).map_err(|e| refuse("no PDF", &e))?;
    let png = png(&tree, stamp).map_err(|e| refuse("no PNG", &e))?;
    Ok(Printed {
        svg: stamped_svg(svg, stamp).into_bytes(),
        pdf,
        png,
    })
}

fn fonts() -> &'static Options<'static> {
    static OPTIONS: OnceLock<Options<'static>> = OnceLock::new();
    OPTIONS.get_or_init(|| {
        let mut options = Options {
            font_family: "DejaVu Sans".to_owned(),
            ..Options::default()
        };
        let db = options.fontdb_mut();
        db.load_font_data(dejavu::sans::regular().to_vec());
        db.load_font_data(dejavu::sans::bold().to_vec());
        db.set_sans_serif_family("DejaVu Sans");
        options
    })
}

/// The drawing with its provenance as metadata.
fn stamped_svg(svg: &str, stamp: &Stamp) -> String {
    let end = svg.find('>').map_or(0, |i| i + 1);
    format!(
        "{}\n<metadata>{}</metadata>{}",
        &svg[..end],
        escape_xml(&stamp.line()),
        &svg[end..]
    )
}

fn escape_xml(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
}

fn pdf(
    tree: &Tree,
    name: &str,
    stamp: &Stamp,
) -> std::result::Result<Vec<u8>, svg2pdf::ConversionError> {
    let (chunk, drawing) = svg2pdf::to_chunk(tree, svg2pdf::ConversionOptions::default())?;
    let [catalog, pages, page, content, info] = [1, 2, 3, 4, 5].map(Ref::new);
    let shift = info.get();
    let chunk = chunk.renumber(|r| Ref::new(r.get() + shift));
    let drawing = Ref::new(drawing.get() + shift);
    let scale = POINTS_PER_INCH / PIXELS_PER_INCH;
    let (width, height) = (tree.size().width() * scale, tree.size().height() * scale);
    let mut pdf = Pdf::new();
    pdf.catalog(catalog).pages(pages);
    pdf.pages(pages).count(1).kids([page]);
    let mut leaf = pdf.page(page);
    leaf.parent(pages)
        .media_box(Rect::new(0.0, 0.0, width, height))
        .contents(content);
    leaf.resources().x_objects().pair(Name(b"F"), drawing);
    leaf.finish();
    let mut draw = Content::new();
    draw.transform([width, 0.0, 0.0, height, 0.0, 0.0])
        .x_object(Name(b"F"));
    pdf.stream(content, &draw.finish());
    pdf.document_info(info)
        .title(TextStr(name))
        .creator(TextStr(Stamp::PROGRAM))
        .keywords(TextStr(&stamp.line()));
    pdf.extend(&chunk);
    Ok(pdf.finish())
}

fn png(tree: &Tree, stamp: &Stamp) -> std::result::Result<Vec<u8>, String> {
    let scale = DOTS_PER_INCH / PIXELS_PER_INCH;
    let side = |length: f32| (length * scale).ceil() as u32;
    let (width, height) = (side(tree.size().width()), side(tree.size().height()));
    let mut pixels =
        Pixmap::new(width, height).ok_or_else(|| format!("{width} × {height} pixels"))?;
    resvg::render(
        tree,
        Transform::from_scale(scale, scale),
        &mut pixels.as_mut(),
    );
    let plain = pixels.encode_png().map_err(|e| e.to_string())?;
    let per_metre = (f64::from(DOTS_PER_INCH) / 0.0254).round() as u32;
    let mut size = Vec::from(per_metre.to_be_bytes());
    size.extend(per_metre.to_be_bytes());
    size.push(1);
    let mut out = plain[..PNG_HEAD].to_vec();
    out.extend(png_chunk(b"pHYs", &size));
    let text = format!("comagauge\0\0\0\0\0{}", stamp.line());
    out.extend(png_chunk(b"iTXt", text.as_bytes()));
    out.extend(&plain[PNG_HEAD..]);
    Ok(out)
}

/// Length, name, content and check sum of a PNG chunk.
fn png_chunk(name: &[u8; 4], content: &[u8]) -> Vec<u8> {
    let mut checked = name.to_vec();
    checked.extend(content);
    let mut crc = Crc::new();
    crc.update(&checked);
    let mut out = Vec::from((content.len() as u32).to_be_bytes());
    out.extend(checked);
    out.extend(crc.sum().to_be_bytes());
    out
}
