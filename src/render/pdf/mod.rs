//! The page file: blocks to strips, strips to pages, pages to PDF 1.7.
//!
//! Owns: page layout and the file format. Does not own: any word or number on the pages. The only folder that knows
//! the page-writing library.
//!
//! First pass (`layout` and the files that it calls): blocks become strips. Second pass (`page_break`): strips become
//! pages. Then `drawing` makes operations of them and `finish` a document.

mod boxes;
mod canvas;
mod columns;
mod contents;
mod cover;
mod decimal;
mod display;
mod drawing;
mod finish;
mod fold;
mod font;
mod formula;
mod furniture;
mod layout;
mod listing;
mod page_break;
mod picture;
mod profile;
mod strip;
mod table;
mod tags;
mod text;
mod words;

#[cfg(test)]
mod tests;

use super::RenderError;
use super::face::Faces;
use super::sketch::Raster;
use super::style::PageStyle;
use crate::record::block::Document;
use page_break::{Page, Room, paginate};
use tags::Tags;

/// Writes the document as a PDF file; the same document gives the same bytes.
///
/// # Errors
/// [`RenderError::MissingGlyphs`] with every character that no bundled face has, and faults of pictures and plots.
pub fn write(document: &Document, style: &PageStyle) -> Result<Vec<u8>, RenderError> {
    let faces = Faces::load()?;
    let pages = lay_out(document, style, &faces)?;
    let (file, finish) = drawing::draw(pages, &document.identity, style, &faces)?;
    // Running heads may bring characters that no block has.
    match faces.missing() {
        missing if missing.is_empty() => finish::write(file, finish),
        missing => Err(RenderError::MissingGlyphs(missing)),
    }
}

/// Pages with everything in its place, before drawing.
struct Pages {
    pages: Vec<Page>,
    rasters: Vec<Raster>,
    tags: Tags,
}

fn lay_out(document: &Document, style: &PageStyle, faces: &Faces) -> Result<Pages, RenderError> {
    let layout = layout::flow(document, style, faces)?;
    let mut flow = layout.flow;
    let rasters = std::mem::take(&mut flow.rasters);
    let room = Room {
        top: style.top,
        bottom: style.height - style.bottom,
    };
    Ok(Pages {
        pages: paginate(flow, room),
        rasters,
        tags: layout.tags,
    })
}
