//! Labels of instants: texts in rows above a panel, each beside a leader.

use super::{Frame, Pencil, horizontal, is_blank};
use crate::record::block::{Axis, Label, Mark};
use crate::render::scene::{Anchor, Area, Item, Point, Stroke};

/// Labels of instants in rows above a panel.
pub struct Flags {
    pub height: f32,
    placed: Vec<Flag>,
}

/// A text beside a leader that stands on its instant.
struct Flag {
    x: f32,
    /// Row above the panel; 0 is nearest.
    row: usize,
    /// The text stands left of its leader.
    flipped: bool,
    span: (f32, f32),
    label: Label,
}

const FLAG_ROW: f32 = 10.5;
const FLAG_GAP: f32 = 3.0;
const FLAG_ROWS: usize = 8;

/// Spreads the labels of instants over rows so that neither texts nor leaders cross a text.
pub fn flags(marks: &[&Mark], x: &Axis, left: f32, right: f32, pencil: &Pencil<'_>) -> Flags {
    let area = Area {
        left,
        top: 0.0,
        right,
        bottom: 1.0,
    };
    let shown = |mark: &&&Mark| mark.at >= x.low && mark.at <= x.high && !is_blank(&mark.label);
    let mut sorted: Vec<&&Mark> = marks.iter().filter(shown).collect();
    sorted.sort_by(|a, b| a.at.total_cmp(&b.at));
    let flag = |mark: &Mark, flipped: bool| {
        let at = horizontal(&area, x, mark.at);
        let size = pencil.label_size();
        let width = pencil.faces.label_width(&mark.label, size, false);
        let span = match flipped {
            true => (at - FLAG_GAP - width, at - FLAG_GAP),
            false => (at + FLAG_GAP, at + FLAG_GAP + width),
        };
        Flag {
            x: at,
            row: 0,
            flipped,
            span,
            label: mark.label.clone(),
        }
    };
    // Texts lean to the right of their leaders, those near the right edge to the left: as few as will do.
    let mut placed = None;
    for flipped in 0..=sorted.len() {
        let (ahead, behind) = sorted.split_at(sorted.len() - flipped);
        let behind = behind.iter().map(|mark| flag(mark, true));
        let ahead = ahead.iter().rev().map(|mark| flag(mark, false));
        placed = stacked(behind.chain(ahead), (left - 20.0, right + 8.0));
        if placed.is_some() {
            break;
        }
    }
    // Too many for that: every label gets a row of its own.
    let placed = placed.unwrap_or_else(|| {
        let turned = |mark: &&Mark| horizontal(&area, x, mark.at) > (left + right) / 2.0;
        let rows = sorted.iter().enumerate();
        rows.map(|(row, mark)| Flag {
            row,
            ..flag(mark, turned(mark))
        })
        .collect()
    });
    let rows = placed.iter().map(|flag| flag.row + 1).max().unwrap_or(0);
    let height = if rows == 0 {
        0.0
    } else {
        rows as f32 * FLAG_ROW + 2.0
    };
    Flags { height, placed }
}

/// Gives each flag the lowest row that is free; nothing if one finds none or does not fit within the limits.
fn stacked(flags: impl Iterator<Item = Flag>, limits: (f32, f32)) -> Option<Vec<Flag>> {
    let mut placed: Vec<Flag> = Vec::new();
    for flag in flags {
        let (from, to) = flag.span;
        let free = |row: &usize| {
            placed.iter().all(|other| {
                let (a, b) = other.span;
                let texts_apart = other.row != *row || to + 5.0 < a || from - 5.0 > b;
                let leader_clear = other.row < *row || other.x + 1.0 < from || other.x - 1.0 > to;
                let own_leader_clear = other.row >= *row || flag.x + 1.0 < a || flag.x - 1.0 > b;
                texts_apart && leader_clear && own_leader_clear
            })
        };
        if from < limits.0 || to > limits.1 {
            return None;
        }
        let row = (0..FLAG_ROWS).find(free)?;
        placed.push(Flag { row, ..flag });
    }
    Some(placed)
}

/// Draws the labels of a panel with their leaders.
pub fn set(frame: &Frame<'_>, pencil: &Pencil<'_>, items: &mut Vec<Item>) {
    let colour = pencil.style.figure.instant;
    for flag in &frame.instants.placed {
        let baseline = frame.area.top - 4.0 - flag.row as f32 * FLAG_ROW;
        let top = Point {
            x: flag.x,
            y: baseline - pencil.label_size() * 0.65,
        };
        let points = vec![
            Point {
                x: flag.x,
                y: frame.area.top,
            },
            top,
        ];
        items.push(Item::Line {
            points,
            stroke: Stroke::solid(colour, 0.5),
        });
        let (dx, anchor) = match flag.flipped {
            true => (-FLAG_GAP, Anchor::End),
            false => (FLAG_GAP, Anchor::Start),
        };
        let at = Point {
            x: flag.x + dx,
            y: baseline,
        };
        let mut text = pencil.text(&flag.label, pencil.label_size(), at, anchor);
        text.colour = colour;
        items.push(Item::Text(text));
    }
}
