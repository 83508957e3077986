//! What enters the model: inputs, constants inside formulas, lookups, initial values, switches, events, cases.

use super::block::{Align, Block, Column, Inline, Row, RowKind, Table, Text};
use super::words::{self, as_written, expression, or_none, symbol, text, unit_cell, with_unit};
use super::{Blocks, Subject};
use crate::formula::tree::{Binary, Kind, Tree};
use crate::formula::typeset::typeset;
use crate::problem::model::{Action, Between, Lookup, Model, Outside};

pub fn add(subject: &Subject, blocks: &mut Blocks) {
    let model = subject.model;
    blocks.insert("inputs", vec![Block::Table(inputs(model))]);
    blocks.insert("constants", one_table(constants_table(model)));
    blocks.insert(
        "lookups",
        model
            .lookups
            .iter()
            .map(|lookup| Block::Table(lookup_table(lookup)))
            .collect(),
    );
    blocks.insert("initial_values", one_table(initial_values(subject)));
    blocks.insert("switches", one_table(switches(model)));
    blocks.insert("events", one_table(events(subject)));
    blocks.insert("cases", one_table(cases(model)));
}

/// The block of a table, unless it has no rows.
fn one_table(table: Table) -> Vec<Block> {
    if table.rows.is_empty() {
        Vec::new()
    } else {
        vec![Block::Table(table)]
    }
}

fn table(anchor: &str, caption: &str, columns: &[(&str, Align)], rows: Vec<Vec<Text>>) -> Table {
    Table::of(
        anchor,
        caption,
        columns,
        {
            let body = |cells| Row {
                cells,
                kind: RowKind::Body,
            };
            rows.into_iter().map(body).collect()
        },
        Vec::new(),
    )
}

fn inputs(model: &Model) -> Table {
    let with_range = model.inputs.iter().any(|input| input.within.is_some());
    let mut columns = vec![
        ("Symbol", Align::Left),
        ("Meaning", Align::Left),
        ("Value", Align::Decimal),
        ("Unit", Align::Left),
    ];
    if with_range {
        columns.push(("Plausible", Align::Left));
    }
    columns.push(("Source", Align::Left));
    let rows = model.inputs.iter().map(|input| {
        let mut cells = vec![
            symbol(&input.symbol),
            text(input.meaning.clone()),
            text(as_written(input.value)),
            unit_cell(&input.unit),
        ];
        if with_range {
            let range = input.within.map_or_else(
                || "–".to_owned(),
                |(low, high)| {
                    let number =
                        |value: f64| words::trimmed(words::in_unit(model, value, &input.unit));
                    format!("{} to {}", number(low), number(high))
                },
            );
            cells.push(text(range));
        }
        cells.push(text(input.source.clone()));
        cells
    });
    let mut table = table("inputs", "Inputs", &columns, rows.collect());
    table.note = text("Input uncertainty: none stated.");
    table
}

/// A literal that carries engineering content: where, what, whose source.
pub struct Constant {
    pub owner: String,
    pub literal: String,
    pub source: Option<String>,
}

/// Literals other than 0, 1, 2, 1/2, 1/4 and exponents, and every `measure`.
pub fn constants(model: &Model) -> Vec<Constant> {
    let mut found = Vec::new();
    for quantity in &model.quantities {
        literals(
            &quantity.formula.tree,
            &quantity.symbol,
            &quantity.source,
            &mut found,
        );
    }
    for state in &model.states {
        literals(&state.rate.tree, &state.symbol, &state.source, &mut found);
    }
    for event in &model.events {
        literals(&event.when.tree, &event.id, &None, &mut found);
    }
    for result in &model.results {
        literals(&result.formula.tree, &result.symbol, &None, &mut found);
    }
    found
}

fn literals(tree: &Tree, owner: &str, source: &Option<String>, found: &mut Vec<Constant>) {
    let mut note = |literal: String| {
        found.push(Constant {
            owner: owner.to_owned(),
            literal,
            source: source.clone(),
        })
    };
    match &tree.kind {
        Kind::Number(value) if ![0.0, 1.0, 2.0, 0.5, 0.25].contains(value) => {
            note(as_written(*value))
        }
        Kind::Measure(value, unit) => note(
            crate::units::Unit::parse(unit)
                .map_or_else(|_| as_written(*value), |unit| with_unit(*value, &unit)),
        ),
        Kind::Binary(Binary::Power, base, _) => literals(base, owner, source, found),
        Kind::Binary(Binary::Divide, a, b)
            if matches!((&a.kind, &b.kind), (Kind::Number(1.0), Kind::Number(4.0))) => {}
        _ => tree
            .children()
            .into_iter()
            .for_each(|child| literals(child, owner, source, found)),
    }
}

fn constants_table(model: &Model) -> Table {
    let rows = constants(model)
        .into_iter()
        .map(|constant| {
            vec![
                symbol(&constant.owner),
                text(constant.literal),
                or_none(&constant.source),
            ]
        })
        .collect();
    table(
        "constants",
        "Constants inside formulas",
        &[
            ("In the formula of", Align::Left),
            ("Constant", Align::Right),
            ("Source of the formula", Align::Left),
        ],
        rows,
    )
}

fn lookup_table(lookup: &Lookup) -> Table {
    let anchor = format!("lookup-{}", lookup.symbol);
    let argument = format!(
        "{} / {}",
        words::capitalised(&lookup.argument),
        lookup.argument_unit.print()
    );
    let mut value = words::symbol(&lookup.symbol);
    value.push(Inline::Text(format!(" / {}", lookup.unit.print())));
    // Long tables are printed at some points and drawn in full; the file has all.
    let every = lookup.points.len().div_ceil(MOST_PRINTED_POINTS);
    let last = lookup.points.len() - 1;
    let rows = lookup
        .points
        .iter()
        .enumerate()
        .filter(|(index, _)| index % every == 0 || *index == last);
    let rows = rows
        .map(|(_, (x, y))| Row {
            cells: vec![text(as_written(*x)), text(as_written(*y))],
            kind: RowKind::Body,
        })
        .collect();
    let between = match lookup.between {
        Between::Linear => "linear",
        Between::MonotoneCubic => "monotone cubic (Fritsch–Carlson)",
        Between::Step => "a step: each value holds from its argument on",
    };
    let outside = match lookup.outside {
        Outside::Refuse => "refused",
        Outside::Hold => "the end value is held",
    };
    let mut note = vec![Inline::Text(format!(
        "Between points: {between}. Outside: {outside}. Source: {}.",
        lookup.source.trim_end_matches('.')
    ))];
    if let Some(file) = &lookup.file {
        note.push(Inline::Text(" File: ".to_owned()));
        note.push(Inline::Code(file.clone()));
        note.push(Inline::Text(".".to_owned()));
    }
    if every > 1 {
        note.push(Inline::Text(format!(
            " Printed is one point in {every}; the file has all {}.",
            lookup.points.len()
        )));
    }
    Table {
        anchor,
        label: String::new(),
        caption: vec![
            Inline::Text(format!("{} ", words::capitalised(&lookup.meaning))),
            words::symbol(&lookup.symbol).remove(0),
        ],
        columns: vec![
            Column {
                heading: text(argument),
                align: Align::Decimal,
            },
            Column {
                heading: value,
                align: Align::Decimal,
            },
        ],
        rows,
        note,
    }
}

const MOST_PRINTED_POINTS: usize = 40;

fn initial_values(subject: &Subject) -> Table {
    let model = subject.model;
    let rows = model.states.iter().enumerate().map(|(index, state)| {
        let value = words::trimmed(words::in_unit(
            model,
            subject.cases[0].initial[index],
            &state.unit,
        ));
        let source = match &state.initial {
            crate::problem::model::Expression::Formula(_) => text("from inputs"),
            crate::problem::model::Expression::Quantity { .. } => or_none(&state.initial_source),
        };
        vec![
            symbol(&state.symbol),
            text(state.meaning.clone()),
            expression(&state.initial),
            text(value),
            unit_cell(&state.unit),
            source,
        ]
    });
    let columns = [
        ("Symbol", Align::Left),
        ("State", Align::Left),
        ("Initial value", Align::Left),
        ("Base case", Align::Decimal),
        ("Unit", Align::Left),
        ("Source", Align::Left),
    ];
    table("initial-values", "Initial values", &columns, rows.collect())
}

fn switches(model: &Model) -> Table {
    let rows = model
        .switches
        .iter()
        .map(|switch| {
            vec![
                symbol(&switch.symbol),
                text(switch.meaning.clone()),
                text(as_written(switch.initial)),
            ]
        })
        .collect();
    table(
        "switches",
        "Switches",
        &[
            ("Symbol", Align::Left),
            ("Meaning", Align::Left),
            ("Initial", Align::Decimal),
        ],
        rows,
    )
}

fn events(subject: &Subject) -> Table {
    let model = subject.model;
    let rows = model.events.iter().enumerate().map(|(index, event)| {
        let action = match &event.action {
            Action::Note => text("noted"),
            Action::Stop => text("stops the march"),
            Action::Set(list) => {
                let mut words = Vec::new();
                for (symbol, formula) in list {
                    if !words.is_empty() {
                        words.push(Inline::Text(", ".to_owned()));
                    }
                    let assignment = crate::formula::typeset::symbol(symbol);
                    words.push(Inline::Math(crate::formula::typeset::Math::Row(vec![
                        assignment,
                        crate::formula::typeset::Math::operator("←"),
                        typeset(&formula.tree),
                    ])));
                }
                words
            }
        };
        let came: Vec<String> = subject
            .cases
            .iter()
            .map(|case| {
                let first = case
                    .reported()
                    .outcome
                    .events
                    .iter()
                    .find(|occurrence| occurrence.event == index);
                let count = case
                    .reported()
                    .outcome
                    .event_counts
                    .get(index)
                    .copied()
                    .unwrap_or(0);
                let id = &model.cases[case.case].id;
                match first {
                    None => format!("{id}: did not occur"),
                    Some(first) if count == 1 => format!(
                        "{id}: {}",
                        words::rounded(model, first.at, &model.march.unit, 5)
                    ),
                    Some(first) => format!(
                        "{id}: {count} times, first {}",
                        words::rounded(model, first.at, &model.march.unit, 5)
                    ),
                }
            })
            .collect();
        let mut name = vec![Inline::Code(event.id.clone())];
        if let Some(words) = &event.text {
            name.push(Inline::Text(format!("  {words}")));
        }
        vec![
            name,
            words::math(typeset(&event.when.tree)),
            action,
            text(came.join("; ")),
        ]
    });
    let columns = [
        ("Event", Align::Left),
        ("Turns true", Align::Left),
        ("Action", Align::Left),
        ("Occurrence by case", Align::Left),
    ];
    table("events", "Events", &columns, rows.collect())
}

fn cases(model: &Model) -> Table {
    let rows = model.cases.iter().map(|case| {
        let mut changes: Text = Vec::new();
        let separate = |changes: &mut Text| {
            if !changes.is_empty() {
                changes.push(Inline::Text(", ".to_owned()));
            }
        };
        for (input, value, unit) in &case.changes {
            separate(&mut changes);
            changes.extend(symbol(&model.inputs[*input].symbol));
            changes.push(Inline::Text(format!(" = {}", with_unit(*value, unit))));
        }
        for (from, to) in &case.lookups {
            separate(&mut changes);
            changes.extend(symbol(&model.lookups[*from].symbol));
            changes.push(Inline::Text(" by ".to_owned()));
            changes.extend(symbol(&model.lookups[*to].symbol));
        }
        if changes.is_empty() {
            changes = text("nothing");
        }
        vec![
            text(case.id.clone()),
            text(case.text.clone()),
            changes,
            text(case.source.clone().unwrap_or_else(|| "–".to_owned())),
        ]
    });
    table(
        "cases",
        "Cases",
        &[
            ("Case", Align::Left),
            ("Meaning", Align::Left),
            ("Changes", Align::Left),
            ("Source", Align::Left),
        ],
        rows.collect(),
    )
}
