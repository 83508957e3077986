//! Checks on the physics: balances and closed forms, case by case.

use super::Subject;
use super::block::{Align, Block, Inline, Row, RowKind, Table, Text};
use super::words::{self, in_unit, symbol, text};
use crate::evidence::{BalanceEvidence, CaseEvidence, ClosedFormEvidence, instant};
use crate::float::Numeral;
use crate::formula::typeset::typeset;
use crate::problem::model::Checked;

/// Tables of what the problem file asks for; nothing where it asks for nothing.
pub fn blocks(subject: &Subject) -> Vec<Block> {
    let mut blocks = Vec::new();
    if !subject.model.balances.is_empty() {
        blocks.push(Block::Table(balances(subject)));
    }
    if !subject.model.closed_forms.is_empty() {
        blocks.push(Block::Table(closed_forms(subject)));
    }
    blocks
}

fn balances(subject: &Subject) -> Table {
    let model = subject.model;
    let mut rows = Vec::new();
    for (index, spec) in model.balances.iter().enumerate() {
        let mut heading = vec![
            Inline::Strong(spec.id.clone()),
            Inline::Text(format!("  {}: ", spec.text.trim_end_matches('.'))),
        ];
        heading.push(Inline::Math(typeset(&spec.formula.tree)));
        rows.push(Row {
            cells: vec![heading],
            kind: RowKind::Group,
        });
        for case in subject.cases {
            rows.extend(
                case.balances
                    .iter()
                    .filter(|balance| balance.balance == index)
                    .map(|balance| balance_row(subject, case, balance)),
            );
        }
    }
    table(
        "balances",
        "Balances: largest change over the march, relative to the largest term",
        &[
            ("Case", Align::Left),
            ("At step", Align::Right),
            ("Finest level", Align::Right),
            ("Order", Align::Right),
            ("Tolerance", Align::Right),
            ("What it shows", Align::Left),
            ("Finding", Align::Left),
        ],
        rows,
        "A balance that is linear in states and integrals holds to round-off for any step and any method: it shows that the rates are written consistently, and nothing of the error of the march. Changes are taken between events that set something.",
    )
}

fn balance_row(subject: &Subject, case: &CaseEvidence, balance: &BalanceEvidence) -> Row {
    let share = |drift: f64| {
        Numeral::rounded_up(
            if drift == 0.0 {
                0.0
            } else {
                drift / balance.scale
            },
            2,
        )
        .typographic()
    };
    let finest = balance.drifts.last().copied().unwrap_or(f64::NAN);
    let observed = balance
        .ladder
        .as_ref()
        .and_then(|ladder| ladder.observed_order);
    let shows = if balance.is_linear {
        "consistency of the written rates"
    } else {
        "error of the march"
    };
    let model = subject.model;
    Row {
        cells: vec![
            text(model.cases[case.case].id.clone()),
            text(share(balance.drifts[0])),
            text(share(finest)),
            text(observed.map_or_else(
                || "–".to_owned(),
                |order| Numeral::decimals(order, 2).typographic(),
            )),
            text(words::as_written(model.balances[balance.balance].tolerance)),
            text(shows),
            finding(balance.holds),
        ],
        kind: RowKind::Body,
    }
}

fn closed_forms(subject: &Subject) -> Table {
    let rows = subject
        .cases
        .iter()
        .flat_map(|case| {
            case.closed_forms
                .iter()
                .flat_map(|form| closed_form_rows(subject, case, form))
        })
        .collect();
    table(
        "closed-forms",
        "Closed forms beside the march",
        &[
            ("Case", Align::Left),
            ("Closed form", Align::Right),
            ("March", Align::Right),
            ("Difference", Align::Right),
            ("Tolerance", Align::Right),
            ("Finding", Align::Left),
        ],
        rows,
        "Differences are relative: of a result to the closed form, of a state’s history to the largest magnitude of the closed form; printed of a history is the instant at which they differ most.",
    )
}

fn closed_form_rows(subject: &Subject, case: &CaseEvidence, form: &ClosedFormEvidence) -> [Row; 2] {
    let model = subject.model;
    let spec = &model.closed_forms[form.closed_form];
    let (name, unit) = match spec.checked {
        Checked::Result(index) => (&model.results[index].symbol, &model.results[index].unit),
        Checked::State(index) => (&model.states[index].symbol, &model.states[index].unit),
    };
    let kind = if spec.is_exact { "exact" } else { "estimate" };
    let mut heading = symbol(name);
    heading.push(Inline::Text(" = ".to_owned()));
    heading.push(Inline::Math(typeset(&spec.formula.tree)));
    heading.push(Inline::Text(format!(
        "  ({kind}; {})",
        spec.source.trim_end_matches('.')
    )));
    let value = |value: f64| {
        unit.after(&Numeral::significant(in_unit(model, value, unit), 6).typographic())
    };
    let id = &model.cases[case.case].id;
    let place = form
        .at
        .map_or_else(|| id.clone(), |t| format!("{id}, {}", instant(model, t)));
    let body = Row {
        cells: vec![
            text(place),
            text(value(form.expected)),
            text(form.found.map_or_else(|| "no value".to_owned(), value)),
            text(form.difference.map_or_else(
                || "–".to_owned(),
                |difference| Numeral::rounded_up(difference, 2).typographic(),
            )),
            text(words::as_written(spec.tolerance)),
            finding(form.holds),
        ],
        kind: RowKind::Body,
    };
    [
        Row {
            cells: vec![heading],
            kind: RowKind::Group,
        },
        body,
    ]
}

fn finding(holds: bool) -> Text {
    vec![Inline::Strong(
        if holds { "within" } else { "outside" }.to_owned(),
    )]
}

fn table(
    anchor: &str,
    caption: &str,
    columns: &[(&str, Align)],
    rows: Vec<Row>,
    note: &str,
) -> Table {
    Table::of(anchor, caption, columns, rows, text(note))
}
