//! Results case by case, and the printed history.

use super::block::{Align, Block, Column, Inline, Row, RowKind, Table, Text};
use super::words::{self, by_uncertainty, symbol, text, unit_cell};
use super::{Blocks, Subject};
use crate::evidence::{CaseEvidence, stop_sentence};
use crate::float::Numeral;
use crate::march::RowKind as HistoryKind;
use crate::problem::model::Model;
use crate::units::Unit;

pub fn add(subject: &Subject, blocks: &mut Blocks) {
    blocks.insert("results", results(subject));
    blocks.insert("stops", vec![Block::Paragraph(stops(subject))]);
    blocks.insert(
        "histories",
        subject
            .cases
            .iter()
            .map(|case| Block::Table(history(subject, case)))
            .collect(),
    );
}

fn results(subject: &Subject) -> Vec<Block> {
    let model = subject.model;
    if model.results.is_empty() {
        return vec![Block::Paragraph(text("None stated."))];
    }
    let mut rows = Vec::new();
    for case in subject.cases {
        if subject.cases.len() > 1 {
            rows.push(Row {
                cells: vec![vec![
                    Inline::Text("Case ".to_owned()),
                    Inline::Strong(model.cases[case.case].id.clone()),
                ]],
                kind: RowKind::Group,
            });
        }
        for (spec, evidence) in model.results.iter().zip(&case.results) {
            let unit = unit_cell(&spec.unit);
            let ladder = &evidence.ladder;
            let (value, uncertainty) = match ladder.reported() {
                Some(value) => {
                    let rounded = by_uncertainty(model, value, ladder.uncertainty, &spec.unit);
                    (rounded.value, rounded.uncertainty)
                }
                None => ("–".to_owned(), "–".to_owned()),
            };
            let convergence = if ladder.is_absent() {
                did_not_occur(model, case)
            } else {
                ladder.convergence.word().to_owned()
            };
            rows.push(Row {
                cells: vec![
                    symbol(&spec.symbol),
                    text(spec.meaning.clone()),
                    text(value),
                    text(uncertainty),
                    unit,
                    text(convergence),
                ],
                kind: RowKind::Body,
            });
        }
    }
    let columns = [
        ("Symbol", Align::Left),
        ("Result", Align::Left),
        ("Value", Align::Decimal),
        ("±", Align::Decimal),
        ("Unit", Align::Left),
        ("Convergence", Align::Left),
    ];
    vec![Block::Table(Table {
        anchor: "results".to_owned(),
        label: String::new(),
        caption: text("Results with their numerical uncertainty"),
        columns: columns
            .iter()
            .map(|(name, align)| Column {
                heading: text(*name),
                align: *align,
            })
            .collect(),
        rows,
        note: text(
            "±: numerical uncertainty of the value at the step requested, from the step-halving ladder. Values are given to the digits that it supports; all digits are in results/results.json.",
        ),
    })]
}

/// "did not occur within 0 to 30 min".
pub fn did_not_occur(model: &Model, case: &CaseEvidence) -> String {
    let number = |t: f64| words::trimmed(words::in_unit(model, t, &span_unit(model)));
    let end = case.reported().outcome.stop.at;
    format!(
        "did not occur within {} to {}",
        number(case.from),
        span_unit(model).after(&number(end))
    )
}

/// The unit in which the end of the span was written.
fn span_unit(model: &Model) -> Unit {
    model.march.to.unit(&model.march.unit).clone()
}

/// How the march ended: one sentence where all cases ended alike.
fn stops(subject: &Subject) -> Text {
    let sentences: Vec<String> = subject
        .cases
        .iter()
        .map(|case| stop_sentence(subject.model, case.reported()))
        .collect();
    if sentences.iter().all(|sentence| *sentence == sentences[0]) {
        let scope = if sentences.len() > 1 {
            "In every case "
        } else {
            ""
        };
        return text(format!(
            "{}.",
            words::capitalised(&format!("{scope}{}", sentences[0]))
        ));
    }
    let parts: Vec<String> = subject
        .cases
        .iter()
        .zip(&sentences)
        .map(|(case, sentence)| {
            format!(
                "In case “{}” {sentence}.",
                subject.model.cases[case.case].id
            )
        })
        .collect();
    text(parts.join(" "))
}

/// Most columns of a printed history beside the variable.
const MOST_COLUMNS: usize = 7;

fn history(subject: &Subject, case: &CaseEvidence) -> Table {
    let model = subject.model;
    let rows: Vec<&crate::calculation::HistoryRow> = case
        .reported()
        .rows
        .iter()
        .filter(|row| row.printed)
        .collect();
    let mut heads: Vec<(String, Unit)> = model
        .states
        .iter()
        .map(|state| (state.symbol.clone(), state.unit.clone()))
        .collect();
    heads.extend(
        model
            .quantities
            .iter()
            .map(|quantity| (quantity.symbol.clone(), quantity.unit.clone())),
    );
    let all = heads.len();
    heads.truncate(MOST_COLUMNS);
    let value = |row: &crate::calculation::HistoryRow, column: usize| {
        let si = if column < model.states.len() {
            row.states[column]
        } else {
            row.quantities[column - model.states.len()]
        };
        words::in_unit(model, si, &heads[column].1)
    };
    let columns: Vec<Vec<String>> = (0..heads.len())
        .map(|column| {
            words::column(
                &rows
                    .iter()
                    .map(|row| value(row, column))
                    .collect::<Vec<_>>(),
            )
        })
        .collect();
    let times: Vec<String> = rows
        .iter()
        .map(|row| time_cell(model, row.t, row.kind))
        .collect();
    let table_rows = (0..rows.len())
        .map(|index| {
            let mut cells = vec![text(times[index].clone())];
            cells.extend(columns.iter().map(|column| text(column[index].clone())));
            let is_event = matches!(rows[index].kind, HistoryKind::Event | HistoryKind::AfterSet);
            Row {
                cells,
                kind: if is_event {
                    RowKind::Strong
                } else {
                    RowKind::Body
                },
            }
        })
        .collect();
    let head = |name: &str, unit: &Unit| {
        let mut words = symbol(name);
        words.push(Inline::Text(format!(" / {}", unit.print())));
        words
    };
    let mut all_columns = vec![Column {
        heading: head(&model.march.variable, &model.march.unit),
        align: Align::Decimal,
    }];
    all_columns.extend(heads.iter().map(|(name, unit)| Column {
        heading: head(name, unit),
        align: Align::Decimal,
    }));
    let id = &model.cases[case.case].id;
    let mut note = "Rows at events are set in bold.".to_owned();
    if all > MOST_COLUMNS {
        note.push_str(&format!(
            " {} more columns are in the CSV file.",
            all - MOST_COLUMNS
        ));
    }
    Table {
        anchor: format!("history-{}", super::data::case_stem(model, case.case)),
        label: String::new(),
        caption: text(format!("History at the reporting spacing, case “{id}”")),
        columns: all_columns,
        rows: table_rows,
        note: text(note),
    }
}

/// The variable: exact instants of print in full, instants of events rounded.
fn time_cell(model: &Model, t: f64, kind: HistoryKind) -> String {
    let value = words::in_unit(model, t, &model.march.unit);
    match kind {
        HistoryKind::Report => words::trimmed(value),
        _ => Numeral::significant(value, 6).typographic(),
    }
}
