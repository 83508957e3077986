//! Column widths of a table, from its content and the width of the text block.

use super::decimal::Decimal;
use super::layout::Layout;
use super::text;
use crate::record::block::{Align, RowKind, Table};
use crate::render::RenderError;

/// A table of more rows than this is set close.
const DENSE: usize = 24;
/// A table of more columns than this has less space between them.
const MANY_COLUMNS: usize = 8;

/// A table whose column widths are settled.
pub struct Grid {
    pub size: f32,
    pub leading: f32,
    pub left: f32,
    /// Space left and right of the content of a cell.
    pub pad: f32,
    /// Space above and below the content of a cell.
    pub air: f32,
    /// Rows between two hairlines.
    pub ruled_every: usize,
    pub columns: Vec<ColumnFit>,
}

#[derive(Clone, Copy)]
pub struct ColumnFit {
    pub align: Align,
    pub width: f32,
    /// Widths left and right of the decimal sign.
    pub whole: f32,
    pub fraction: f32,
}

struct Measured {
    least: f32,
    natural: f32,
    /// Natural width of a cell on the average of the rows.
    usual: f32,
    whole: f32,
    fraction: f32,
}

/// Settles the column widths, at a smaller size if the table does not fit otherwise.
///
/// # Errors
/// Formulas that cannot be laid out.
pub fn fitted(
    layout: &Layout<'_>,
    table: &Table,
    left: f32,
    measure: f32,
) -> Result<Grid, RenderError> {
    let text = &layout.style.text;
    let pad = pad(table);
    let mut chosen = None;
    for scale in [1.0, 0.94, 0.88, 0.82, 0.76, 0.7] {
        let (size, leading) = (
            text.table_pt * scale,
            text.table_leading_pt * (0.4 + 0.6 * scale),
        );
        let measured = measure_columns(layout, table, size, leading, pad)?;
        let least: f32 = measured.iter().map(|column| column.least).sum();
        let fits = least <= measure;
        chosen = Some((size, leading, measured));
        if fits {
            break;
        }
    }
    let (size, leading, measured) =
        chosen.unwrap_or((text.table_pt, text.table_leading_pt, Vec::new()));
    let widths = shared_out(&measured, table, measure);
    let columns = table.columns.iter().zip(measured.iter().zip(widths));
    let columns = columns.map(|(column, (m, width))| ColumnFit {
        align: column.align,
        width,
        whole: m.whole,
        fraction: m.fraction,
    });
    // Long tables are read along groups of rows: set close, ruled every fifth row.
    let dense = table.rows.len() > DENSE;
    let leading = if dense {
        leading.min(size * 1.26)
    } else {
        leading
    };
    Ok(Grid {
        size,
        leading,
        left,
        pad,
        air: if dense { 0.9 } else { 2.1 },
        ruled_every: if dense { 5 } else { 1 },
        columns: columns.collect(),
    })
}

/// Width of the table with every cell on one line.
///
/// # Errors
/// Formulas that cannot be laid out.
pub fn natural_width(layout: &Layout<'_>, table: &Table) -> Result<f32, RenderError> {
    let text = &layout.style.text;
    let (size, leading) = (text.table_pt, text.table_leading_pt);
    let columns = measure_columns(layout, table, size, leading, pad(table))?;
    Ok(columns.iter().map(|column| column.natural).sum())
}

fn pad(table: &Table) -> f32 {
    if table.columns.len() > MANY_COLUMNS {
        3.0
    } else {
        5.5
    }
}

fn measure_columns(
    layout: &Layout<'_>,
    table: &Table,
    size: f32,
    leading: f32,
    pad: f32,
) -> Result<Vec<Measured>, RenderError> {
    let (body, strong) = (
        layout.sans(size, leading, false),
        layout.sans(size, leading, true),
    );
    let limit = layout.style.measure() * 0.22;
    let mut columns = Vec::new();
    for (k, column) in table.columns.iter().enumerate() {
        let head = text::words(&column.heading, &strong, layout.faces)?;
        let mut measured = Measured {
            least: text::least_width(&head, limit),
            natural: text::natural_width(&head),
            usual: 0.0,
            whole: 0.0,
            fraction: 0.0,
        };
        for row in table.rows.iter().filter(|row| row.kind != RowKind::Group) {
            let Some(cell) = row.cells.get(k) else {
                continue;
            };
            let look = if row.kind == RowKind::Strong {
                &strong
            } else {
                &body
            };
            if column.align == Align::Decimal
                && let Some(number) = Decimal::of(cell, look, layout)
            {
                measured.whole = measured.whole.max(number.whole_width);
                measured.fraction = measured.fraction.max(number.fraction_width);
                continue;
            }
            let words = text::words(cell, look, layout.faces)?;
            measured.least = measured.least.max(text::least_width(&words, limit));
            let width = text::natural_width(&words);
            measured.natural = measured.natural.max(width);
            measured.usual += width / table.rows.len() as f32;
        }
        let number = measured.whole + measured.fraction;
        columns.push(Measured {
            least: measured.least.max(number) + 2.0 * pad,
            natural: measured.natural.max(number) + 2.0 * pad + 0.5,
            usual: measured.usual + 2.0 * pad,
            ..measured
        });
    }
    Ok(columns)
}

/// Divides the measure among the columns.
fn shared_out(columns: &[Measured], table: &Table, measure: f32) -> Vec<f32> {
    let least: f32 = columns.iter().map(|column| column.least).sum();
    let natural: f32 = columns.iter().map(|column| column.natural).sum();
    if least > measure {
        // Nothing fits: every column gives up the same part, and words break anywhere.
        return columns
            .iter()
            .map(|column| column.least * measure / least)
            .collect();
    }
    if natural <= measure {
        // Spare room goes to the columns of words first; a small table stays small.
        let small = (measure * 0.5).min(natural * 1.6).max(natural * 1.25);
        let spare = if natural < measure * 0.5 {
            small - natural
        } else {
            measure - natural
        };
        let share = |k: usize| match table.columns[k].align {
            Align::Left => columns[k].natural,
            Align::Centre | Align::Right | Align::Decimal => columns[k].natural * 0.35,
        };
        let total: f32 = (0..columns.len()).map(share).sum();
        return (0..columns.len())
            .map(|k| columns[k].natural + spare * share(k) / total.max(1.0))
            .collect();
    }
    // Too wide for one line a cell. Columns that need no more than a fair share keep their natural width; the
    // others divide what is left between their least and natural widths.
    let mut fixed = vec![false; columns.len()];
    loop {
        let open: Vec<usize> = (0..columns.len()).filter(|k| !fixed[*k]).collect();
        let taken: f32 = (0..columns.len())
            .filter(|k| fixed[*k])
            .map(|k| columns[k].natural)
            .sum();
        let fair = (measure - taken) / open.len().max(1) as f32;
        let fits = |k: &usize| {
            columns[*k].natural <= fair && {
                let rest: f32 = open
                    .iter()
                    .filter(|other| *other != k)
                    .map(|other| columns[*other].least)
                    .sum();
                taken + columns[*k].natural + rest <= measure
            }
        };
        match open.iter().find(|k| fits(k)) {
            Some(k) => fixed[*k] = true,
            None => {
                let least: f32 = open.iter().map(|k| columns[*k].least).sum();
                let want: f32 = open.iter().map(|k| columns[*k].want()).sum();
                let room = (measure - taken - least).max(0.0);
                let width = |k: usize| match fixed[k] {
                    true => columns[k].natural,
                    false => columns[k].least + room * columns[k].want() / want.max(1.0),
                };
                match open.iter().find(|k| width(**k) > columns[**k].natural) {
                    Some(k) => fixed[*k] = true,
                    None => return (0..columns.len()).map(width).collect(),
                }
            }
        }
    }
}

impl Measured {
    /// How much a column gains by room beyond its least width: what its usual cell lacks counts more than what its
    /// widest one lacks, for that is one row only.
    fn want(&self) -> f32 {
        0.3 * (self.natural - self.least) + 0.7 * (self.usual - self.least).max(0.0) + 0.01
    }
}
