//! Tables: column widths from their content, decimal columns, long cells, heads that repeat.

use super::columns::{Grid, fitted};
use super::decimal::Decimal;
use super::fold;
use super::layout::Layout;
use super::strip::{Drawn, Piece, RunningHead, Strip};
use super::tags::{ElementId, Role};
use super::text::{self, Line, Look, Setting, Slot, Word};
use crate::record::block::{Align, Inline, Row, RowKind, Table, Text};
use crate::render::RenderError;
use crate::render::scene::Area;

/// Rows of more lines than this may break over pages.
const LONG_ROW: usize = 14;

/// Lays out a table as strips: caption, head, rows, note.
///
/// # Errors
/// Formulas that cannot be laid out.
pub fn lay_out(layout: &mut Layout<'_>, table: &Table) -> Result<(), RenderError> {
    if table.columns.is_empty() {
        return Ok(());
    }
    let root = layout.tags.root();
    let element = layout.tags.add(Role::Table, root);
    let mut strips = Vec::new();
    if !table.label.is_empty() || !table.caption.is_empty() {
        let caption = layout.tags.add(Role::Caption, element);
        strips = layout.caption(&table.label, &table.caption, caption)?;
        strips.iter_mut().for_each(|strip| strip.keep_next = true);
    }
    let mut body = match fold::strips(layout, table, element)? {
        Some(folded) => folded,
        None => rows(layout, table, element)?,
    };
    if let Some(first) = body.first_mut() {
        first.before = if strips.is_empty() { 0.0 } else { 4.0 };
    }
    let (caption_height, body_height) = (height(&strips), height(&body));
    if caption_height + body_height < layout.style.depth() * 0.28 {
        let last = body.len().saturating_sub(1);
        body.iter_mut()
            .take(last)
            .for_each(|strip| strip.keep_next = true);
    }
    strips.append(&mut body);
    if !table.note.is_empty() {
        if let Some(last) = strips.last_mut() {
            last.keep_next = true;
        }
        let note = layout.tags.add(Role::Paragraph, root);
        let look = layout.sans(
            layout.style.text.table_pt * 0.92,
            layout.style.text.table_leading_pt,
            false,
        );
        let look = Look {
            colour: layout.style.colour.muted,
            ..look
        };
        let mut below = layout.paragraph(&table.note, &look, layout.column(), note)?;
        if let Some(first) = below.first_mut() {
            first.before = 3.0;
        }
        strips.append(&mut below);
    }
    if let Some(first) = strips.first_mut() {
        first.anchor = Some(table.anchor.clone());
    }
    layout.push(strips, 8.0, 13.0);
    Ok(())
}

/// Head and rows.
fn rows(
    layout: &mut Layout<'_>,
    table: &Table,
    element: ElementId,
) -> Result<Vec<Strip>, RenderError> {
    let grid = fitted(layout, table, layout.style.left, layout.style.measure())?;
    let head_row = layout.tags.add(Role::TableRow, element);
    let mut strips = vec![grid.head(layout, table, Some(head_row))?];
    let count = table.rows.len();
    let mut head = running_head(layout, table, &grid, None)?;
    for (i, row) in table.rows.iter().enumerate() {
        let last = i + 1 == count;
        let id = layout.tags.add(Role::TableRow, element);
        let mut lines = grid.row(layout, row, id)?;
        if last || (i + 1) % grid.ruled_every == 0 || row.kind == RowKind::Group {
            grid.underline(layout, &mut lines, last);
        }
        lines.iter_mut().for_each(|strip| strip.head = Some(head));
        if row.kind == RowKind::Group {
            head = running_head(layout, table, &grid, Some(row))?;
        }
        // Two rows stay together at either end, and a group's name with its first rows.
        let keeps = i == 0 || i + 2 == count || row.kind == RowKind::Group;
        if let Some(strip) = lines.last_mut() {
            strip.keep_next = keeps && !last;
        }
        strips.append(&mut lines);
    }
    strips[0].keep_next = count > 0;
    Ok(strips)
}

fn height(strips: &[Strip]) -> f32 {
    strips.iter().map(|strip| strip.before + strip.height).sum()
}

/// Registers what stands again at the top of the next page: caption, head, and the group that goes on there. It is
/// no part of the document's structure.
fn running_head(
    layout: &mut Layout<'_>,
    table: &Table,
    grid: &Grid,
    group: Option<&Row>,
) -> Result<usize, RenderError> {
    let continued = layout.style.words.continued.clone();
    let scratch = layout.tags.root();
    let mut strips = Vec::new();
    if !table.label.is_empty() {
        let text = vec![Inline::Text(format!("({continued})"))];
        strips = layout.caption(&table.label, &text, scratch)?;
    }
    let mut head = grid.head(layout, table, None)?;
    head.before = if strips.is_empty() { 0.0 } else { 4.0 };
    strips.push(head);
    if let Some(group) = group {
        let mut cells = group.cells.clone();
        if let Some(name) = cells.first_mut() {
            name.push(Inline::Text(format!(" ({continued})")));
        }
        let group = Row {
            cells,
            kind: RowKind::Group,
        };
        let mut name = grid.row(layout, &group, scratch)?;
        grid.underline(layout, &mut name, false);
        strips.append(&mut name);
    }
    for piece in strips.iter_mut().flat_map(|strip| &mut strip.pieces) {
        piece.element = None;
        piece.link = None;
    }
    // A row that goes on here has no air of its own at its top.
    if let Some(last) = strips.last_mut() {
        last.height += 1.2;
    }
    let (right, ink) = (grid.right(), layout.style.colour.hairline);
    let tail = Strip::rule(grid.left, right, 0.0, 0.3, ink);
    layout.flow.heads.push(RunningHead { strips, tail });
    Ok(layout.flow.heads.len() - 1)
}

impl Grid {
    pub fn right(&self) -> f32 {
        self.left + self.columns.iter().map(|column| column.width).sum::<f32>()
    }

    /// The heads of the columns between two rules; none of the structure without a row for them.
    ///
    /// # Errors
    /// Formulas that cannot be laid out.
    pub fn head(
        &self,
        layout: &mut Layout<'_>,
        table: &Table,
        row: Option<ElementId>,
    ) -> Result<Strip, RenderError> {
        let look = layout.sans(self.size, self.leading, true);
        let mut cells = Vec::new();
        for (fit, column) in self.columns.iter().zip(&table.columns) {
            let words = text::words(&column.heading, &look, layout.faces)?;
            cells.push(text::lines(
                &words,
                &look,
                fit.width - 2.0 * self.pad,
                setting(fit.align),
            ));
        }
        let content = cells
            .iter()
            .map(|lines| text::height(lines))
            .fold(look.leading, f32::max);
        let mut strip = Strip::new(content + 2.0 * self.air + 1.0);
        let (ink, right) = (layout.style.colour.ink, self.right());
        strip
            .pieces
            .push(Strip::rule(self.left, right, 0.45, 0.9, ink));
        let mut x = self.left;
        for (fit, lines) in self.columns.iter().zip(&cells) {
            let element = match row {
                Some(row) => layout.tags.add(Role::ColumnHead, row),
                None => layout.tags.root(),
            };
            // Heads stand on the line above the rule.
            let top = self.air + 0.9 + content - text::height(lines);
            layout.stack(
                lines,
                Slot {
                    x: x + self.pad,
                    width: fit.width - 2.0 * self.pad,
                    setting: setting(fit.align),
                },
                top,
                element,
                &mut strip.pieces,
            );
            if lines.is_empty() {
                strip.pieces.push(Piece::empty(element));
            }
            x += fit.width;
        }
        let bottom = strip.height - 0.25;
        strip
            .pieces
            .push(Strip::rule(self.left, right, bottom, 0.5, ink));
        Ok(strip)
    }

    /// One row, whose element is `element`: one strip, or one for each line if it is long.
    ///
    /// # Errors
    /// Formulas that cannot be laid out.
    pub fn row(
        &self,
        layout: &mut Layout<'_>,
        row: &Row,
        element: ElementId,
    ) -> Result<Vec<Strip>, RenderError> {
        let look = layout.sans(self.size, self.leading, row.kind != RowKind::Body);
        if row.kind == RowKind::Group {
            return self.group(layout, row, element, &look);
        }
        let mut cells = Vec::new();
        for (k, fit) in self.columns.iter().enumerate() {
            let empty = Text::new();
            let cell = row.cells.get(k).unwrap_or(&empty);
            let decimal = if fit.align == Align::Decimal {
                Decimal::of(cell, &look, layout)
            } else {
                None
            };
            cells.push(match decimal {
                Some(number) => Cell::Number(number),
                None => {
                    let words: Vec<Word> = text::words(cell, &look, layout.faces)?;
                    Cell::Lines(text::lines(
                        &words,
                        &look,
                        fit.width - 2.0 * self.pad,
                        setting(fit.align),
                    ))
                }
            });
        }
        let ids: Vec<ElementId> = self
            .columns
            .iter()
            .map(|_| layout.tags.add(Role::TableCell, element))
            .collect();
        let longest = cells.iter().map(Cell::count).max().unwrap_or(1);
        let mut strips = Vec::new();
        if longest <= LONG_ROW {
            strips.push(self.strip(layout, &cells, &ids, &look));
        } else {
            for at in 0..longest {
                let slice: Vec<Cell> = cells.iter().map(|cell| cell.line(at)).collect();
                let mut strip = self.strip(layout, &slice, &ids, &look);
                strip.height -= 2.0 * self.air;
                strip.keep_next = at == 0 || at + 2 == longest;
                let lift = if at == 0 { 0.0 } else { self.air };
                strip.height += if at == 0 || at + 1 == longest {
                    self.air
                } else {
                    0.0
                };
                strip
                    .pieces
                    .iter_mut()
                    .flat_map(|piece| &mut piece.marks)
                    .for_each(|mark| mark.shift(0.0, -lift));
                strips.push(strip);
            }
        }
        Ok(strips)
    }

    /// The rule below a row: a hairline, or the closing rule.
    pub fn underline(&self, layout: &Layout<'_>, strips: &mut [Strip], last: bool) {
        if let Some(strip) = strips.last_mut() {
            let colour = &layout.style.colour;
            let (thickness, ink) = if last {
                (0.9, colour.ink)
            } else {
                (0.3, colour.hairline)
            };
            let y = strip.height - thickness / 2.0;
            strip
                .pieces
                .push(Strip::rule(self.left, self.right(), y, thickness, ink));
        }
    }

    fn group(
        &self,
        layout: &mut Layout<'_>,
        row: &Row,
        element: ElementId,
        look: &Look,
    ) -> Result<Vec<Strip>, RenderError> {
        let span = layout
            .tags
            .add(Role::GroupCell(self.columns.len()), element);
        let width = self.right() - self.left - 2.0 * self.pad;
        let cell = row.cells.first().cloned().unwrap_or_default();
        let lines = text::lines(
            &text::words(&cell, look, layout.faces)?,
            look,
            width,
            Setting::Left,
        );
        let mut strip = Strip::new(text::height(&lines).max(look.leading) + 2.0 * self.air);
        let area = Area {
            left: self.left,
            top: 0.0,
            right: self.right(),
            bottom: strip.height,
        };
        let ground = Drawn::Fill {
            area,
            colour: layout.style.colour.tint,
        };
        strip.pieces.push(Piece {
            element: None,
            marks: vec![ground],
            link: None,
        });
        layout.stack(
            &lines,
            Slot::left(self.left + self.pad, width),
            self.air,
            span,
            &mut strip.pieces,
        );
        Ok(vec![strip])
    }

    fn strip(
        &self,
        layout: &mut Layout<'_>,
        cells: &[Cell],
        ids: &[ElementId],
        look: &Look,
    ) -> Strip {
        let content = cells.iter().map(Cell::height).fold(look.leading, f32::max);
        let first = cells.iter().map(Cell::first_above).fold(0.0, f32::max);
        let mut strip = Strip::new(content + 2.0 * self.air);
        let mut x = self.left;
        let mut deepest = 0.0_f32;
        for ((fit, cell), id) in self.columns.iter().zip(cells).zip(ids) {
            match cell {
                Cell::Lines(lines) => {
                    // Cells of a row share the baseline of their first line.
                    let top = self.air + first - cell.first_above();
                    let end = layout.stack(
                        lines,
                        Slot {
                            x: x + self.pad,
                            width: fit.width - 2.0 * self.pad,
                            setting: setting(fit.align),
                        },
                        top,
                        *id,
                        &mut strip.pieces,
                    );
                    if lines.is_empty() {
                        strip.pieces.push(Piece::empty(*id));
                    }
                    deepest = deepest.max(end);
                }
                Cell::Number(number) => {
                    let block = fit.whole + fit.fraction;
                    let sign = x
                        + self.pad
                        + (fit.width - 2.0 * self.pad - block).max(0.0) / 2.0
                        + fit.whole;
                    let baseline = self.air + first.max(number.above);
                    strip.pieces.push(Piece {
                        element: Some(*id),
                        marks: number.marks(sign, baseline, look),
                        link: None,
                    });
                    deepest = deepest.max(baseline + number.below);
                }
            }
            x += fit.width;
        }
        strip.height = strip.height.max(deepest + self.air);
        strip
    }
}

fn setting(align: Align) -> Setting {
    match align {
        Align::Left => Setting::Left,
        Align::Centre | Align::Decimal => Setting::Centred,
        Align::Right => Setting::Right,
    }
}

enum Cell {
    Lines(Vec<Line>),
    Number(Decimal),
}

impl Cell {
    fn count(&self) -> usize {
        match self {
            Cell::Lines(lines) => lines.len(),
            Cell::Number(_) => 1,
        }
    }

    fn height(&self) -> f32 {
        match self {
            Cell::Lines(lines) => text::height(lines),
            Cell::Number(number) => number.above + number.below,
        }
    }

    fn first_above(&self) -> f32 {
        match self {
            Cell::Lines(lines) => lines.first().map_or(0.0, |line| line.above),
            Cell::Number(number) => number.above,
        }
    }

    /// The cell's line at this place alone.
    fn line(&self, at: usize) -> Cell {
        match self {
            Cell::Lines(lines) => Cell::Lines(lines.get(at).cloned().into_iter().collect()),
            Cell::Number(number) if at == 0 => Cell::Number(number.clone()),
            Cell::Number(_) => Cell::Lines(Vec::new()),
        }
    }
}
