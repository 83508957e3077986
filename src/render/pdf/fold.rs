//! Long narrow tables: two halves side by side, the second going on where the first ends.

use super::columns::{Grid, fitted, natural_width};
use super::layout::Layout;
use super::strip::Strip;
use super::tags::{ElementId, Role};
use crate::record::block::{RowKind, Table};
use crate::render::RenderError;

/// Space between the halves.
const GAP: f32 = 22.0;
/// A table of fewer rows is not long.
const FEWEST_ROWS: usize = 16;
/// A table of more rows does not fold: its halves would not stand on one page with their surroundings.
const MOST_ROWS: usize = 72;

/// Head and rows in two halves; nothing if the table is short, wide, very long or in groups.
///
/// # Errors
/// Formulas that cannot be laid out.
pub fn strips(
    layout: &mut Layout<'_>,
    table: &Table,
    element: ElementId,
) -> Result<Option<Vec<Strip>>, RenderError> {
    let count = table.rows.len();
    let grouped = table.rows.iter().any(|row| row.kind == RowKind::Group);
    if !(FEWEST_ROWS..=MOST_ROWS).contains(&count) || grouped {
        return Ok(None);
    }
    let width = (layout.style.measure() - GAP) / 2.0;
    if natural_width(layout, table)? > width {
        return Ok(None);
    }
    let left = fitted(layout, table, layout.style.left, width)?;
    let right = fitted(layout, table, layout.style.left + width + GAP, width)?;

    let head_row = layout.tags.add(Role::TableRow, element);
    let mut head = left.head(layout, table, Some(head_row))?;
    let mut again = right.head(layout, table, None)?;
    again
        .pieces
        .iter_mut()
        .for_each(|piece| piece.element = None);
    head.height = head.height.max(again.height);
    head.pieces.append(&mut again.pieces);

    let ids: Vec<ElementId> = table
        .rows
        .iter()
        .map(|_| layout.tags.add(Role::TableRow, element))
        .collect();
    let half = count.div_ceil(2);
    // The whole table is one strip, drawn half by half: what is drawn first is read first.
    let top = head.height;
    let mut whole = head;
    for (grid, first, end) in [(&left, 0, half), (&right, half, count)] {
        let mut y = top;
        for i in first..end {
            let Some(mut row) = single(layout, grid, table, i, end, &ids)? else {
                return Ok(None);
            };
            let marks = row.pieces.iter_mut().flat_map(|piece| &mut piece.marks);
            marks.for_each(|mark| mark.shift(0.0, y));
            y += row.height;
            whole.pieces.append(&mut row.pieces);
        }
        whole.height = whole.height.max(y);
    }
    Ok(Some(vec![whole]))
}

/// Row `i` of the half that ends before row `end`; nothing if it takes more than a strip.
fn single(
    layout: &mut Layout<'_>,
    grid: &Grid,
    table: &Table,
    i: usize,
    end: usize,
    ids: &[ElementId],
) -> Result<Option<Strip>, RenderError> {
    let mut lines = grid.row(layout, &table.rows[i], ids[i])?;
    let place = i % table.rows.len().div_ceil(2);
    let last = i + 1 == end;
    if last || (place + 1).is_multiple_of(grid.ruled_every) {
        grid.underline(layout, &mut lines, last);
    }
    Ok(if lines.len() == 1 { lines.pop() } else { None })
}
