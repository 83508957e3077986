//! Listings: lines of a file in the mono face, with numbers.

use super::layout::Layout;
use super::strip::{Band, Drawn, Glyphs, Piece, Strip};
use super::tags::Role;
use super::text::Slot;
use crate::record::block::Listing;
use crate::render::RenderError;
use crate::render::face::{FaceId, Glyph};
use crate::render::style::Rgb;

/// Lines of a file in the mono face with their numbers; long lines wrap with a mark.
///
/// # Errors
/// Formulas in the caption that cannot be laid out.
pub fn listing(layout: &mut Layout<'_>, listing: &Listing) -> Result<(), RenderError> {
    let text = layout.style.text.clone();
    let colour = layout.style.colour.clone();
    let (size, leading) = (text.listing_pt, text.listing_leading_pt);
    let (left, measure) = (layout.style.left, layout.style.measure());
    let mut strips = Vec::new();
    if !listing.caption.is_empty() {
        let element = layout.element(Role::Caption);
        let look = layout.small();
        strips = layout.paragraph(&listing.caption, &look, Slot::left(left, measure), element)?;
        strips.iter_mut().for_each(|strip| strip.keep_next = true);
    }
    let id = layout.next_band();
    let band = Band {
        id,
        left,
        right: left + measure,
        ground: colour.tint,
        bar: None,
    };
    let digits = listing.lines.len().to_string().len();
    let figure = layout.faces.width(FaceId::Mono, "0", size, false);
    let gutter = if listing.numbered {
        figure * digits as f32 + 16.0
    } else {
        8.0
    };
    let width = measure - gutter - 6.0;
    let paragraph = layout.element(Role::Paragraph);
    let element = layout.tags.add(Role::Code, paragraph);
    let baseline = (leading + size * 0.62) / 2.0;
    let mut pad = Strip::new(4.0);
    pad.keep_next = true;
    pad.band = Some(band);
    pad.before = if strips.is_empty() { 0.0 } else { 4.0 };
    strips.push(pad.clone());
    let first = strips.len();
    for (i, line) in listing.lines.iter().enumerate() {
        let parts = wrapped(layout, line, size, width);
        for (j, part) in parts.into_iter().enumerate() {
            let mut strip = Strip::new(leading);
            strip.band = Some(band);
            if listing.numbered && j == 0 {
                let number = (i + 1).to_string();
                let x = left + gutter - 10.0 - figure * number.len() as f32;
                strip.pieces.push(Piece {
                    element: None,
                    marks: mono(layout, &number, size, x, baseline, colour.muted),
                    link: None,
                });
            }
            let mut x = left + gutter;
            if j > 0 {
                // The mark stands in the indent of a continued line.
                strip.pieces.push(Piece {
                    element: None,
                    marks: mono(layout, "↪", size, x, baseline, colour.accent),
                    link: None,
                });
                x += figure * 2.0;
            }
            let mut marks = Vec::new();
            for (face, glyphs) in part {
                let run = Glyphs {
                    face,
                    size,
                    x,
                    baseline,
                    colour: colour.ink,
                    glyphs,
                    stretch: 0.0,
                    upwards: false,
                };
                x += run.width();
                marks.push(Drawn::Glyphs(run));
            }
            if !marks.is_empty() {
                strip.pieces.push(Piece {
                    element: Some(element),
                    marks,
                    link: None,
                });
            }
            // A wrapped line stays with its beginning.
            strip.keep_next = false;
            if j > 0
                && let Some(last) = strips.last_mut()
            {
                last.keep_next = true;
            }
            strips.push(strip);
        }
    }
    let count = strips.len();
    for (i, strip) in strips.iter_mut().enumerate().skip(first) {
        strip.keep_next |= i == first && count > first + 1 || i + 2 == count || i + 1 == count;
    }
    pad.before = 0.0;
    pad.keep_next = false;
    strips.push(pad);
    if let Some(strip) = strips.first_mut() {
        strip.anchor = Some(listing.anchor.clone());
    }
    layout.push(strips, 8.0, 12.0);
    Ok(())
}

type Runs = Vec<(FaceId, Vec<Glyph>)>;

fn mono(
    layout: &Layout<'_>,
    text: &str,
    size: f32,
    x: f32,
    baseline: f32,
    colour: Rgb,
) -> Vec<Drawn> {
    let mut x = x;
    let mut marks = Vec::new();
    for run in layout.faces.shape(FaceId::Mono, text, false).iter() {
        let run = Glyphs {
            face: run.face,
            size,
            x,
            baseline,
            colour,
            glyphs: run.glyphs.clone(),
            stretch: 0.0,
            upwards: false,
        };
        x += run.width();
        marks.push(Drawn::Glyphs(run));
    }
    marks
}

/// One line of a file as runs for each line on paper; breaks after a space in the last third, else anywhere.
fn wrapped(layout: &Layout<'_>, line: &str, size: f32, width: f32) -> Vec<Runs> {
    let expanded = line.replace('\t', "    ");
    let shaped = layout.faces.shape(FaceId::Mono, expanded.trim_end(), false);
    let glyphs: Vec<(FaceId, &Glyph)> = shaped
        .iter()
        .flat_map(|run| run.glyphs.iter().map(|glyph| (run.face, glyph)))
        .collect();
    let indent = layout.faces.width(FaceId::Mono, "00", size, false);
    let mut lines: Vec<Runs> = Vec::new();
    let mut start = 0;
    while start < glyphs.len() {
        let room = if start == 0 { width } else { width - indent };
        let mut used = 0.0;
        let mut end = start;
        while end < glyphs.len() {
            used += glyphs[end].1.advance * size / 1000.0;
            if used > room && end > start {
                break;
            }
            end += 1;
        }
        if end < glyphs.len() {
            let earliest = start + (end - start) * 2 / 3;
            if let Some(space) = (earliest..end).rev().find(|i| glyphs[*i].1.text == " ") {
                end = space + 1;
            }
        }
        let mut runs: Runs = Vec::new();
        for (face, glyph) in &glyphs[start..end] {
            match runs.last_mut() {
                Some((last, run)) if last == face => run.push((*glyph).clone()),
                _ => runs.push((*face, vec![(*glyph).clone()])),
            }
        }
        lines.push(runs);
        start = end;
    }
    if lines.is_empty() {
        lines.push(Vec::new());
    }
    lines
}
