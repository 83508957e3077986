//! Font programs in the page file: cut down to the glyphs in use, under names of our own.

use std::collections::{BTreeMap, BTreeSet};

use lopdf::{Object, ObjectId, Stream};
use printpdf::{
    FontId, FontMetrics, FontType, Op, ParsedFont, PdfDocument, PdfFont, PdfFontHandle,
    PdfFontMetricsStub, TextItem,
};
use sha2::{Digest, Sha256};

use crate::render::RenderError;
use crate::render::face::{FaceId, Faces};

/// Name of a face in the resources of a page.
pub fn resource_name(face: FaceId) -> String {
    format!("Face{}", face.name().replace('-', ""))
}

/// Puts the faces in use into the document and renumbers the glyphs of all pages to those of the cut-down programs.
///
/// # Errors
/// [`RenderError::Face`] if a program cannot be cut down.
pub fn embed(document: &mut PdfDocument, faces: &Faces) -> Result<Subsets, RenderError> {
    let used = used_glyphs(document);
    let mut subsets = Subsets::new();
    let mut numbers: BTreeMap<String, BTreeMap<u16, u16>> = BTreeMap::new();
    for face in FaceId::ALL {
        let name = resource_name(face);
        let Some(glyphs) = used.get(&name) else {
            continue;
        };
        let (font, map) = cut_down(face, glyphs, faces)?;
        let count = font.glyph_widths.len();
        subsets.insert(font.font_name.clone().unwrap_or_default(), count);
        document
            .resources
            .fonts
            .map
            .insert(FontId(name.clone()), PdfFont::new(font));
        numbers.insert(name, map);
    }
    let mut current = None;
    for op in document.pages.iter_mut().flat_map(|page| &mut page.ops) {
        match op {
            Op::SetFont {
                font: PdfFontHandle::External(id),
                ..
            } => current = numbers.get(&id.0),
            Op::ShowText { items } => {
                for item in items {
                    if let (TextItem::GlyphIds(codes), Some(map)) = (item, current) {
                        codes
                            .iter_mut()
                            .for_each(|code| code.gid = map.get(&code.gid).copied().unwrap_or(0));
                    }
                }
            }
            _ => {}
        }
    }
    Ok(subsets)
}

/// Number of glyphs in each cut-down program, by its name in the file.
pub type Subsets = BTreeMap<String, usize>;

/// Writes the list of glyphs beside each program (`CIDSet`): all of them, from the first to the last.
pub fn list_glyphs(document: &mut lopdf::Document, subsets: &Subsets) {
    let descriptor = |object: &Object| {
        let entry = object.as_dict().ok()?;
        let name = entry.get(b"FontName").and_then(Object::as_name).ok()?;
        subsets
            .get(&String::from_utf8_lossy(name).into_owned())
            .copied()
    };
    let found: Vec<(ObjectId, usize)> = document
        .objects
        .iter()
        .filter_map(|(id, object)| Some((*id, descriptor(object)?)))
        .collect();
    for (id, count) in found {
        let mut bits = vec![0_u8; count.div_ceil(8)];
        (0..count).for_each(|glyph| bits[glyph / 8] |= 0x80 >> (glyph % 8));
        let list = document.add_object(Stream::new(lopdf::Dictionary::new(), bits));
        if let Ok(entry) = document.get_dictionary_mut(id) {
            entry.set("CIDSet", list);
        }
    }
}

fn used_glyphs(document: &PdfDocument) -> BTreeMap<String, BTreeSet<u16>> {
    let mut used: BTreeMap<String, BTreeSet<u16>> = BTreeMap::new();
    let mut current = String::new();
    for op in document.pages.iter().flat_map(|page| &page.ops) {
        match op {
            Op::SetFont {
                font: PdfFontHandle::External(id),
                ..
            } => current.clone_from(&id.0),
            Op::ShowText { items } => {
                for item in items {
                    if let TextItem::GlyphIds(codes) = item {
                        used.entry(current.clone())
                            .or_default()
                            .extend(codes.iter().map(|code| code.gid));
                    }
                }
            }
            _ => {}
        }
    }
    used
}

fn cut_down(
    face: FaceId,
    glyphs: &BTreeSet<u16>,
    faces: &Faces,
) -> Result<(ParsedFont, BTreeMap<u16, u16>), RenderError> {
    let damaged = || RenderError::Face(face.name());
    let list: Vec<u16> = glyphs.iter().copied().filter(|glyph| *glyph != 0).collect();
    let mapper = subsetter::GlyphRemapper::new_from_glyphs_sorted(&list);
    let program = subsetter::subset(face.program(), 0, &mapper).map_err(|_| damaged())?;
    let map: BTreeMap<u16, u16> = list
        .iter()
        .filter_map(|glyph| mapper.get(*glyph).map(|new| (*glyph, new)))
        .collect();
    // ISO 32000-1, 9.6.4: six capitals before the name mark a subset; taken from its content they are stable.
    let tag: String = Sha256::digest(&program)
        .iter()
        .take(6)
        .map(|byte| char::from(b'A' + byte % 26))
        .collect();
    let metrics = faces.metrics(face);
    let whole = |value: f32| value.round() as i16;
    let mut widths: BTreeMap<u16, u16> = map
        .iter()
        .map(|(old, new)| (*new, faces.advance(face, *old)))
        .collect();
    widths.insert(0, faces.advance(face, 0));
    let font = ParsedFont {
        original_bytes: program,
        font_index: 0,
        font_name: Some(format!("{tag}+{}", face.name())),
        codepoint_to_glyph: BTreeMap::new(),
        glyph_widths: widths,
        units_per_em: metrics.units_per_em as u16,
        font_metrics: FontMetrics {
            ascent: whole(metrics.ascent),
            descent: whole(metrics.descent),
        },
        font_type: FontType::TrueType,
        pdf_font_metrics: PdfFontMetricsStub {
            units_per_em: metrics.units_per_em as u16,
            x_min: whole(metrics.bounds[0]),
            y_min: whole(metrics.bounds[1]),
            x_max: whole(metrics.bounds[2]),
            y_max: whole(metrics.bounds[3]),
            caret_slope_rise: 1000,
            caret_slope_run: whole(metrics.caret_run),
            us_weight_class: metrics.weight,
        },
    };
    Ok((font, map))
}
