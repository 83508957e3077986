//! The cover: title, facts, sign-off with room for signatures.

use super::layout::Layout;
use super::strip::{Drawn, Piece, Strip};
use super::tags::{ElementId, Role};
use super::text::{self, Look, Setting, Slot};
use crate::record::block::{Signatory, Text, Title};
use crate::render::RenderError;
use crate::render::scene::Area;
use crate::render::style::Rgb;

/// Kind, title and the facts that identify the document.
///
/// # Errors
/// None of its own.
pub fn title(layout: &mut Layout<'_>, title: &Title) -> Result<(), RenderError> {
    let (left, measure, colour) = (
        layout.style.left,
        layout.style.measure(),
        layout.style.colour.clone(),
    );
    let mut bar = Strip::new(4.0);
    bar.cover = true;
    bar.keep_next = true;
    bar.pieces
        .push(Strip::rule(left, left + measure, 1.5, 3.0, colour.accent));
    layout.push(vec![bar], 0.0, 10.0);

    let kind = Look {
        colour: colour.accent,
        ..layout.sans(10.5, 14.0, true)
    };
    line(
        layout,
        &format!("{}  {}", title.kind, title.number),
        &kind,
        10.0,
    );
    let name = layout.sans(22.0, 27.0, true);
    line(layout, &title.title, &name, 2.0);
    let project = Look {
        colour: colour.muted,
        ..layout.sans(12.0, 16.0, false)
    };
    line(layout, &title.project, &project, 2.0);

    let words = layout.style.words.clone();
    let pairs = [
        (&words.number, &title.number),
        (&words.revision, &title.revision),
        (&words.date, &title.date),
        (&words.standing, &title.standing),
        (&words.issuer, &title.issuer),
    ];
    let shown: Vec<_> = pairs
        .iter()
        .filter(|(_, value)| !value.is_empty())
        .collect();
    let weights: Vec<f32> = shown
        .iter()
        .map(|(_, value)| value.chars().count().clamp(9, 26) as f32)
        .collect();
    let total: f32 = weights.iter().sum();
    let label_look = Look {
        colour: colour.muted,
        ..layout.sans(7.4, 10.0, false)
    };
    let value_look = layout.sans(9.4, 12.4, true);
    let mut strip = Strip::new(0.0);
    strip.pieces.push(Strip::rule(
        left,
        left + measure,
        0.15,
        0.3,
        colour.hairline,
    ));
    let mut x = left;
    let mut bottom = 0.0_f32;
    for ((label, value), weight) in shown.iter().zip(&weights) {
        let width = measure * weight / total;
        let element = layout.element(Role::Paragraph);
        let mut y = 6.0;
        for (text, look) in [(label, &label_look), (value, &value_look)] {
            let lines = layout.lines(text, look, width - 8.0);
            y = layout.stack(
                &lines,
                Slot::left(x, width - 8.0),
                y,
                element,
                &mut strip.pieces,
            );
        }
        bottom = bottom.max(y);
        x += width;
    }
    strip.height = bottom + 6.0;
    strip.pieces.push(Strip::rule(
        left,
        left + measure,
        bottom + 5.85,
        0.3,
        colour.hairline,
    ));
    layout.push(vec![strip], 14.0, 16.0);
    Ok(())
}

fn line(layout: &mut Layout<'_>, text: &str, look: &Look, before: f32) {
    if text.trim().is_empty() {
        return;
    }
    let element = layout.element(Role::Paragraph);
    let (left, measure) = (layout.style.left, layout.style.measure());
    let lines = layout.lines(text, look, measure);
    let mut strips = layout.line_strips(&lines, Slot::left(left, measure), element);
    strips.iter_mut().for_each(|strip| strip.keep_next = true);
    layout.push(strips, before, 2.0);
}

/// Labels and values in two columns.
///
/// # Errors
/// Formulas that cannot be laid out.
pub fn facts(layout: &mut Layout<'_>, facts: &[(Text, Text)]) -> Result<(), RenderError> {
    let (left, measure) = (layout.style.left, layout.style.measure());
    let value_look = layout.small();
    let label_look = Look {
        colour: layout.style.colour.muted,
        ..value_look
    };
    let mut labels = Vec::new();
    for (label, _) in facts {
        labels.push(text::words(label, &label_look, layout.faces)?);
    }
    let widest = labels
        .iter()
        .map(|words| text::natural_width(words))
        .fold(0.0, f32::max);
    let indent = (widest + 14.0).clamp(70.0, measure * 0.34);
    let table = layout.element(Role::Table);
    let mut strips = Vec::new();
    for (words, (_, value)) in labels.iter().zip(facts) {
        let row = layout.tags.add(Role::TableRow, table);
        let (head, cell) = (
            layout.tags.add(Role::RowHead, row),
            layout.tags.add(Role::TableCell, row),
        );
        let label_lines = text::lines(words, &label_look, indent - 10.0, Setting::Left);
        let value_lines = text::lines(
            &text::words(value, &value_look, layout.faces)?,
            &value_look,
            measure - indent,
            Setting::Left,
        );
        let mut strip = Strip::new(0.0);
        let label_end = layout.stack(
            &label_lines,
            Slot::left(left, indent),
            0.0,
            head,
            &mut strip.pieces,
        );
        let value_end = layout.stack(
            &value_lines,
            Slot::left(left + indent, measure - indent),
            0.0,
            cell,
            &mut strip.pieces,
        );
        strip.height = label_end.max(value_end).max(value_look.leading) + 1.6;
        strips.push(strip);
    }
    keep_ends(&mut strips);
    // A short list stays whole.
    if strips.iter().map(|strip| strip.height).sum::<f32>() < 150.0 {
        let last = strips.len().saturating_sub(1);
        strips
            .iter_mut()
            .take(last)
            .for_each(|strip| strip.keep_next = true);
    }
    layout.push(strips, 4.0, 10.0);
    Ok(())
}

/// Two strips stay together at either end.
fn keep_ends(strips: &mut [Strip]) {
    let count = strips.len();
    for (i, strip) in strips.iter_mut().enumerate() {
        strip.keep_next = count > 1 && (i == 0 || i + 2 == count);
    }
}

/// Height of the room for one signature.
const SIGNATURE_ROOM: f32 = 50.0;

/// One row for each signatory: role, name and meaning, empty room for the signature, date.
///
/// # Errors
/// None of its own.
pub fn sign_off(layout: &mut Layout<'_>, signatories: &[Signatory]) -> Result<(), RenderError> {
    let (measure, colour) = (layout.style.measure(), layout.style.colour.clone());
    let words = layout.style.words.clone();
    let widths = [0.15, 0.36, 0.34, 0.15].map(|part| part * measure);
    let (label, value, strong) = (
        layout.sans(7.4, 10.0, false),
        layout.sans(8.6, 11.6, false),
        layout.sans(8.6, 11.6, true),
    );
    let label = Look {
        colour: colour.muted,
        ..label
    };
    let quiet = Look {
        colour: colour.muted,
        ..layout.sans(7.6, 9.8, false)
    };
    let table = layout.element(Role::Table);
    let mut strips = Vec::new();

    let mut row = SignatureRow {
        table,
        role: Role::ColumnHead,
        widths,
        least: 0.0,
        rule: colour.ink,
    };
    let heads = [&words.role, &words.name, &words.signature, &words.date]
        .map(|head| vec![(head.clone(), label)]);
    strips.push(row.strip(layout, &heads));
    row = SignatureRow {
        role: Role::TableCell,
        least: SIGNATURE_ROOM,
        rule: colour.hairline,
        ..row
    };
    for signatory in signatories {
        let name = vec![
            (signatory.name.clone(), strong),
            (signatory.capacity.clone(), value),
            (signatory.meaning.clone(), quiet),
        ];
        let cells = [
            vec![(signatory.role.clone(), strong)],
            name,
            Vec::new(),
            vec![(signatory.date.clone(), value)],
        ];
        strips.push(row.strip(layout, &cells));
    }
    let count = strips.len();
    strips
        .iter_mut()
        .take(count - 1)
        .for_each(|strip| strip.keep_next = true);
    layout.push(strips, 10.0, 12.0);
    Ok(())
}

/// The look of one row of the sign-off table.
struct SignatureRow {
    table: ElementId,
    role: Role,
    widths: [f32; 4],
    /// Height that the row has at least; a row of none is the head.
    least: f32,
    rule: Rgb,
}

impl SignatureRow {
    fn strip(&self, layout: &mut Layout<'_>, cells: &[Vec<(String, Look)>; 4]) -> Strip {
        let SignatureRow {
            table,
            role,
            widths,
            least,
            rule,
        } = *self;
        let left = layout.style.left;
        let row = layout.tags.add(Role::TableRow, table);
        let mut strip = Strip::new(0.0);
        let mut x = left;
        let mut bottom = least;
        for (k, (cell, width)) in cells.iter().zip(&widths).enumerate() {
            let element = layout.tags.add(role, row);
            let before = strip.pieces.len();
            let inset = if k == 0 { 0.0 } else { 6.0 };
            let mut y = 4.0;
            for (text, look) in cell {
                let lines = layout.lines(text, look, width - inset - 4.0);
                y = layout.stack(
                    &lines,
                    Slot::left(x + inset, width - inset - 4.0),
                    y,
                    element,
                    &mut strip.pieces,
                );
            }
            if strip.pieces.len() == before {
                strip.pieces.push(Piece::empty(element));
            }
            bottom = bottom.max(y + 3.0);
            x += width;
        }
        strip.height = bottom;
        let right = left + widths.iter().sum::<f32>();
        strip.pieces.push(Strip::rule(
            left,
            right,
            bottom - 0.2,
            if least > 0.0 { 0.4 } else { 0.7 },
            rule,
        ));
        if least > 0.0 {
            // The reserved field: a tinted box that nothing else stands on.
            let start = left + widths[0] + widths[1] + 6.0;
            let area = Area {
                left: start,
                top: 4.0,
                right: start + widths[2] - 10.0,
                bottom: bottom - 4.0,
            };
            let ground = Drawn::Fill {
                area,
                colour: layout.style.colour.tint,
            };
            strip.pieces.insert(
                0,
                Piece {
                    element: None,
                    marks: vec![ground],
                    link: None,
                },
            );
        }
        strip
    }
}
