//! Nomenclature and equations, typeset from the formulas that were solved.

use super::block::{Align, Block, Column, Equation, Inline, Row, RowKind, Table, Text};
use super::words::{line_of, symbol, text, unit_cell};
use super::{Blocks, Subject};
use crate::formula::typeset::{self, Math, typeset};
use crate::problem::model::{Expression, Formula, Model};

pub fn add(subject: &Subject, blocks: &mut Blocks) {
    let model = subject.model;
    blocks.insert("nomenclature", vec![Block::Table(nomenclature(model))]);
    blocks.insert("rates", rates(model));
    blocks.insert("quantities", quantities(model));
    blocks.insert("result_formulas", result_formulas(model));
}

fn nomenclature(model: &Model) -> Table {
    let mut rows: Vec<(String, Vec<Text>)> = Vec::new();
    let mut add = |name: &str, meaning: &str, unit: Text, role: &str| {
        rows.push((
            name.to_lowercase(),
            vec![symbol(name), text(meaning), unit, text(role)],
        ));
    };
    add(
        &model.march.variable,
        "independent variable",
        unit_cell(&model.march.unit),
        "variable",
    );
    model.states.iter().for_each(|state| {
        add(
            &state.symbol,
            &state.meaning,
            unit_cell(&state.unit),
            "state",
        )
    });
    model.quantities.iter().for_each(|quantity| {
        add(
            &quantity.symbol,
            &quantity.meaning,
            unit_cell(&quantity.unit),
            "quantity",
        )
    });
    model.inputs.iter().for_each(|input| {
        add(
            &input.symbol,
            &input.meaning,
            unit_cell(&input.unit),
            "input",
        )
    });
    model.lookups.iter().for_each(|lookup| {
        add(
            &lookup.symbol,
            &lookup.meaning,
            unit_cell(&lookup.unit),
            "lookup",
        )
    });
    model
        .switches
        .iter()
        .for_each(|switch| add(&switch.symbol, &switch.meaning, text("1"), "switch"));
    model.results.iter().for_each(|result| {
        add(
            &result.symbol,
            &result.meaning,
            unit_cell(&result.unit),
            "result",
        )
    });
    rows.sort_by(|a, b| a.0.cmp(&b.0));
    let columns = ["Symbol", "Meaning", "Unit", "Role"];
    Table {
        anchor: "nomenclature".to_owned(),
        label: String::new(),
        caption: text("Nomenclature"),
        columns: columns
            .iter()
            .map(|name| Column {
                heading: text(*name),
                align: Align::Left,
            })
            .collect(),
        rows: rows
            .into_iter()
            .map(|(_, cells)| Row {
                cells,
                kind: RowKind::Body,
            })
            .collect(),
        note: Vec::new(),
    }
}

fn equation(anchor: String, math: Math, note: Text) -> Block {
    Block::Equation(Equation {
        anchor,
        label: "numbered".to_owned(),
        math,
        note,
    })
}

/// "Depth of water. Source: R2. Dimension checked: m/s. Problem file, line 80."
fn note(model: &Model, meaning: &str, source: &Option<String>, formula: &Formula) -> Text {
    let source = source.as_deref().map_or_else(String::new, |source| {
        format!(" Source: {}.", source.trim_end_matches('.'))
    });
    let dimension = if formula.dimension.is_none() {
        "a plain number".to_owned()
    } else {
        formula.dimension.si_unit()
    };
    let sentence = format!(
        "{}.{source} Dimension of both sides: {dimension}. Problem file: {}.",
        super::words::capitalised(meaning.trim_end_matches('.')),
        line_of(model, formula)
    );
    vec![Inline::Text(sentence)]
}

fn rates(model: &Model) -> Vec<Block> {
    let variable = typeset::symbol(&model.march.variable);
    let rows = model.states.iter();
    rows.map(|state| {
        let rate = typeset::symbol(&state.symbol).rate(variable.clone());
        let mut math = vec![rate, Math::operator("="), typeset(&state.rate.tree)];
        if let Expression::Formula(initial) = &state.initial {
            let start = match &model.march.from {
                Expression::Formula(formula) => typeset(&formula.tree),
                Expression::Quantity { value, unit, .. }
                    if *value == 0.0 && unit.kind() == crate::units::Kind::Plain =>
                {
                    Math::number("0")
                }
                Expression::Quantity { value, unit, .. } => Math::Row(vec![
                    typeset::number(*value),
                    Math::upright(&format!("\u{2009}{}", unit.print())),
                ]),
            };
            math.extend([
                Math::operator(","),
                Math::Quad,
                typeset::symbol(&state.symbol).of(start),
                Math::operator("="),
                typeset(&initial.tree),
            ]);
        }
        equation(
            format!("rate-{}", state.symbol),
            Math::Row(math),
            note(model, &state.meaning, &state.source, &state.rate),
        )
    })
    .collect()
}

fn quantities(model: &Model) -> Vec<Block> {
    let rows = model.quantities.iter();
    rows.map(|quantity| {
        let math = typeset::symbol(&quantity.symbol).equals(typeset(&quantity.formula.tree));
        equation(
            format!("quantity-{}", quantity.symbol),
            math,
            note(
                model,
                &quantity.meaning,
                &quantity.source,
                &quantity.formula,
            ),
        )
    })
    .collect()
}

fn result_formulas(model: &Model) -> Vec<Block> {
    let rows = model.results.iter();
    rows.map(|result| {
        let math = typeset::symbol(&result.symbol).equals(typeset(&result.formula.tree));
        equation(
            format!("result-{}", result.symbol),
            math,
            note(model, &result.meaning, &None, &result.formula),
        )
    })
    .collect()
}
