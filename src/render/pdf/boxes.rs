//! Boxes: notices on tinted ground, checklists.

use super::layout::Layout;
use super::strip::{Band, Drawn, Piece, Strip};
use super::tags::{ElementId, Role};
use super::text::{self, Look, Setting, Slot};
use crate::record::block::{ChecklistColumn, Notice, Tone};
use crate::render::RenderError;
use crate::render::scene::Area;

/// A tinted box with a bar in the colour of its tone.
///
/// # Errors
/// Formulas that cannot be laid out.
pub fn notice(layout: &mut Layout<'_>, notice: &Notice) -> Result<(), RenderError> {
    let colour = layout.style.colour.clone();
    let (bar, ground) = match notice.tone {
        Tone::Good => (colour.good, colour.good_tint),
        Tone::Bad => (colour.bad, colour.bad_tint),
        Tone::Caution => (colour.caution, colour.caution_tint),
        Tone::Plain => (colour.accent, colour.tint),
    };
    let (left, measure) = (layout.style.left, layout.style.measure());
    let band = Band {
        id: layout.next_band(),
        left,
        right: left + measure,
        ground,
        bar: Some(bar),
    };
    let (x, width) = (left + 12.0, measure - 24.0);
    let root = layout.tags.root();
    let part = layout.tags.add(Role::Part, root);
    let title_look = Look {
        colour: bar,
        ..layout.sans(9.6, 13.0, true)
    };
    let body_look = layout.sans(8.9, 12.4, false);

    let mut strips = vec![Strip::new(6.0)];
    let element = layout.tags.add(Role::Paragraph, part);
    let lines = layout.lines(&notice.title, &title_look, width);
    strips.extend(layout.line_strips(&lines, Slot::left(x, width), element));
    strips.iter_mut().for_each(|strip| strip.keep_next = true);
    for text in &notice.body {
        let element = layout.tags.add(Role::Paragraph, part);
        let mut paragraph = layout.paragraph(text, &body_look, Slot::left(x, width), element)?;
        if let Some(first) = paragraph.first_mut() {
            // Space inside the box belongs to the strip, so that the ground has no gap.
            first.height += 2.5;
            first
                .pieces
                .iter_mut()
                .flat_map(|piece| &mut piece.marks)
                .for_each(|mark| mark.shift(0.0, 2.5));
        }
        strips.extend(paragraph);
    }
    if let Some(last) = strips.last_mut() {
        last.keep_next = true;
    }
    strips.push(Strip::new(6.5));
    let height: f32 = strips.iter().map(|strip| strip.height).sum();
    let count = strips.len();
    for (i, strip) in strips.iter_mut().enumerate() {
        strip.band = Some(band);
        strip.keep_next |= height < 160.0 && i + 1 < count;
    }
    layout.push(strips, 6.0, 11.0);
    Ok(())
}

const BOX: f32 = 7.0;
const BOX_INDENT: f32 = 14.0;

/// Columns of boxes side by side.
///
/// # Errors
/// Formulas that cannot be laid out.
pub fn checklist(layout: &mut Layout<'_>, columns: &[ChecklistColumn]) -> Result<(), RenderError> {
    if columns.is_empty() {
        return Ok(());
    }
    const GUTTER: f32 = 18.0;
    let (left, measure, colour) = (
        layout.style.left,
        layout.style.measure(),
        layout.style.colour.clone(),
    );
    let width = (measure - GUTTER * (columns.len() - 1) as f32) / columns.len() as f32;
    let title_look = Look {
        colour: colour.accent,
        ..layout.sans(8.9, 12.0, true)
    };
    let look = layout.sans(8.5, 11.4, false);
    let lists: Vec<_> = columns.iter().map(|_| layout.element(Role::List)).collect();

    let mut head = Strip::new(0.0);
    let mut bottom = 0.0_f32;
    for (k, (column, list)) in columns.iter().zip(&lists).enumerate() {
        let x = left + (width + GUTTER) * k as f32;
        let caption = layout.tags.add(Role::Caption, *list);
        let lines = layout.lines(&column.title, &title_look, width);
        bottom =
            bottom.max(layout.stack(&lines, Slot::left(x, width), 0.0, caption, &mut head.pieces));
    }
    for k in 0..columns.len() {
        let x = left + (width + GUTTER) * k as f32;
        head.pieces
            .push(Strip::rule(x, x + width, bottom + 2.5, 0.5, colour.ink));
    }
    head.height = bottom + 6.0;
    head.keep_next = true;
    let mut strips = vec![head];

    // Every column runs down on its own; strips are cut where no item of any column is cut.
    let mut items: Vec<(f32, f32, Vec<Piece>)> = Vec::new();
    for (k, (column, list)) in columns.iter().zip(&lists).enumerate() {
        let x = left + (width + GUTTER) * k as f32;
        let mut y = 0.0;
        for (ticked, text) in &column.items {
            let item = layout.tags.add(Role::ListItem, *list);
            let (label, body) = (
                layout.tags.add(Role::Label, item),
                layout.tags.add(Role::ListBody, item),
            );
            let mut pieces = vec![tick_box(
                layout,
                x,
                y + (look.leading - BOX) / 2.0,
                *ticked,
                label,
            )];
            let lines = text::lines(
                &text::words(text, &look, layout.faces)?,
                &look,
                width - BOX_INDENT,
                Setting::Left,
            );
            let end = layout
                .stack(
                    &lines,
                    Slot::left(x + BOX_INDENT, width - BOX_INDENT),
                    y,
                    body,
                    &mut pieces,
                )
                .max(y + look.leading)
                + 3.2;
            items.push((y, end, pieces));
            y = end;
        }
    }
    strips.extend(cut(items));
    let count = strips.len();
    for (i, strip) in strips.iter_mut().enumerate() {
        strip.keep_next |= count > 2 && (i == 1 || i + 2 == count);
    }
    layout.push(strips, 8.0, 10.0);
    Ok(())
}

fn tick_box(layout: &Layout<'_>, x: f32, y: f32, ticked: bool, label: ElementId) -> Piece {
    let area = Area {
        left: x,
        top: y,
        right: x + BOX,
        bottom: y + BOX,
    };
    let colour = &layout.style.colour;
    let mut marks = vec![Drawn::Outline {
        area,
        colour: if ticked { colour.accent } else { colour.muted },
        width: 0.6,
    }];
    if ticked {
        marks.push(Drawn::Tick {
            area,
            colour: colour.accent,
        });
    }
    Piece {
        element: Some(label),
        marks,
        link: None,
    }
}

/// Cuts items of several columns into strips at every height that no item crosses.
fn cut(mut items: Vec<(f32, f32, Vec<Piece>)>) -> Vec<Strip> {
    // A stable sort keeps each column in its order.
    items.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut strips: Vec<Strip> = Vec::new();
    let (mut top, mut reach) = (0.0_f32, 0.0_f32);
    let mut open: Vec<Piece> = Vec::new();
    for (from, to, mut pieces) in items {
        if from >= reach - 0.01 && !open.is_empty() {
            strips.push(Strip {
                height: reach - top,
                pieces: std::mem::take(&mut open),
                ..Strip::default()
            });
            top = reach;
        }
        pieces
            .iter_mut()
            .flat_map(|piece| &mut piece.marks)
            .for_each(|mark| mark.shift(0.0, -top));
        open.append(&mut pieces);
        reach = reach.max(to);
    }
    strips.push(Strip {
        height: reach - top,
        pieces: open,
        ..Strip::default()
    });
    strips
}
