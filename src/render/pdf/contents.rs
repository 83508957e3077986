//! The table of contents.

use super::layout::Layout;
use super::strip::{Drawn, PageNumber, Piece, Strip};
use super::tags::Role;
use super::text::{self, Look, Slot};
use crate::record::block::{Block, Heading};
use crate::render::RenderError;

/// Headings of levels 1 and 2 with the pages on which they stand, under the title that stands there or one of its
/// own.
///
/// # Errors
/// None of its own.
pub fn contents(
    layout: &mut Layout<'_>,
    blocks: &[Block],
    title: Option<&Heading>,
) -> Result<(), RenderError> {
    let (left, measure) = (layout.style.left, layout.style.measure());
    if title.is_none() {
        let look = layout.sans(16.0, 20.0, true);
        let element = layout.element(Role::Paragraph);
        let lines = layout.lines(&layout.style.words.contents, &look, measure);
        let mut strips = layout.line_strips(&lines, Slot::left(left, measure), element);
        strips.iter_mut().for_each(|strip| strip.keep_next = true);
        layout.push(strips, 20.0, 6.0);
    }
    let list = layout.element(Role::Contents);
    let headings = blocks.iter().filter_map(|block| match block {
        Block::Heading(heading) if heading.level <= 2 && Some(heading) != title => Some(heading),
        _ => None,
    });
    for heading in headings {
        let top = heading.level == 1;
        let look = layout.sans(9.2, 13.4, top);
        let number_look = Look {
            colour: layout.style.colour.accent,
            ..look
        };
        let (number_x, text_x) = if top {
            (left, left + 24.0)
        } else {
            (left + 24.0, left + 54.0)
        };
        let item = layout.tags.add(Role::ContentsItem, list);
        let link = layout.tags.add(Role::Link, item);
        let width = left + measure - text_x - 34.0;
        let lines = layout.lines(&heading.text, &look, width);
        let text_x = if heading.number.is_empty() {
            number_x
        } else {
            text_x
        };
        let mut strips = layout.line_strips(&lines, Slot::left(text_x, width), link);
        let number = layout.lines(&heading.number, &number_look, 60.0);
        if let (Some(first), Some(line)) = (strips.first_mut(), number.first()) {
            let mut pieces = text::set_line(
                line,
                Slot::left(number_x, 60.0),
                line.above,
                link,
                &mut layout.tags,
            );
            pieces.append(&mut first.pieces);
            first.pieces = pieces;
        }
        if let (Some(last), Some(line)) = (strips.last_mut(), lines.last()) {
            let mark = Drawn::PageNumber(PageNumber {
                anchor: heading.anchor.clone(),
                from: text_x + line.width,
                right: left + measure,
                baseline: line.above,
                size: look.size,
                strong: top,
            });
            last.pieces.push(Piece {
                element: Some(link),
                marks: vec![mark],
                link: None,
            });
        }
        for strip in &mut strips {
            strip
                .pieces
                .iter_mut()
                .for_each(|piece| piece.link = Some(heading.anchor.clone()));
            strip.keep_next = top;
        }
        layout.push(strips, if top { 6.0 } else { 0.0 }, 0.0);
    }
    layout.push(vec![Strip::new(0.0)], 0.0, 10.0);
    Ok(())
}
