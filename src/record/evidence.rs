//! The evidence: one row for each judged result in the body, ladders and calculator check in full in the appendix.

use super::block::{Align, Block, Column, Inline, Row, RowKind, Table, Text};
use super::words::{self, by_uncertainty, in_unit, symbol, text};
use super::{Blocks, Subject, alternate, checks, stability};
use crate::evidence::{CaseEvidence, Convergence, ResultEvidence};
use crate::float::Numeral;
use crate::march::Trace;
use crate::problem::model::{Model, ResultSpec};

pub fn add(subject: &Subject, blocks: &mut Blocks) {
    blocks.insert("evidence", vec![Block::Table(overview(subject))]);
    blocks.insert("checks", checks::blocks(subject));
    blocks.insert("alternate", alternate::sentences(subject));
    blocks.insert(
        "cost",
        alternate::cost_sentence(subject)
            .map(|sentence| Block::Paragraph(text(sentence)))
            .into_iter()
            .collect(),
    );
    blocks.insert("stability", stability::sentences(subject));
    blocks.insert(
        "stability_table",
        vec![Block::Table(stability::table(subject))],
    );
    blocks.insert(
        "ladders",
        subject
            .cases
            .iter()
            .map(|case| Block::Table(ladders(subject, case)))
            .collect(),
    );
    blocks.insert(
        "state_ladders",
        subject
            .cases
            .iter()
            .map(|case| Block::Table(state_ladders(subject, case)))
            .collect(),
    );
    blocks.insert(
        "calculator_check",
        subject
            .cases
            .first()
            .map(|case| calculator_check(subject, case))
            .unwrap_or_default(),
    );
}

fn table(
    anchor: String,
    caption: String,
    columns: Vec<Column>,
    rows: Vec<Row>,
    note: &str,
) -> Table {
    Table {
        anchor,
        label: String::new(),
        caption: text(caption),
        columns,
        rows,
        note: if note.is_empty() {
            Vec::new()
        } else {
            text(note)
        },
    }
}

fn columns(list: &[(&str, Align)]) -> Vec<Column> {
    list.iter()
        .map(|(name, align)| Column {
            heading: text(*name),
            align: *align,
        })
        .collect()
}

fn body(cells: Vec<Text>) -> Row {
    Row {
        cells,
        kind: RowKind::Body,
    }
}

fn order(value: Option<f64>) -> String {
    value.map_or_else(
        || "–".to_owned(),
        |order| Numeral::decimals(order, 2).typographic(),
    )
}

/// The word of convergence; a value that never came has none.
fn convergence_word(evidence: &ResultEvidence) -> &'static str {
    if evidence.ladder.is_absent() {
        "no value"
    } else {
        evidence.ladder.convergence.word()
    }
}

/// A sentence on what a result's ladder shows.
fn sentence(evidence: &ResultEvidence) -> String {
    let ladder = &evidence.ladder;
    let cause = evidence
        .cause
        .as_deref()
        .map_or_else(String::new, |cause| format!(" Cause: {cause}."));
    let words = match ladder.convergence {
        _ if ladder.is_absent() => "No value at any level: the event did not occur.",
        Convergence::Asymptotic => {
            "The error falls as the method’s order says; the band may be relied on."
        }
        Convergence::OrderReduced => {
            "The error falls more slowly than the method’s order says; the band is widened."
        }
        Convergence::OrderIrregular => {
            "The error falls faster than the method’s order says; the band is widened."
        }
        Convergence::Oscillatory => {
            "The differences alternate in sign; the band is three times the widest of them."
        }
        Convergence::NotConverged => {
            "The differences do not shrink as they should; no band is claimed."
        }
        Convergence::AtRoundoff => "The levels differ by no more than rounding can explain.",
        Convergence::Discrete => "The same at every level.",
    };
    format!("{words}{cause}")
}

fn overview(subject: &Subject) -> Table {
    let model = subject.model;
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
        for (index, evidence) in case.results.iter().enumerate() {
            let judged = model
                .criteria
                .iter()
                .any(|criterion| criterion.result == index && criterion.cases.contains(&case.case));
            if !judged && !model.criteria.is_empty() {
                continue;
            }
            let spec = &model.results[index];
            let relative = match (evidence.ladder.reported(), evidence.ladder.uncertainty) {
                (Some(value), Some(uncertainty))
                    if value != 0.0 && !words::has_own_zero(&spec.unit) =>
                {
                    format!(
                        "{} %",
                        Numeral::rounded_up(100.0 * uncertainty / value.abs(), 2).typographic()
                    )
                }
                _ => "–".to_owned(),
            };
            let comparison = case.alternate.results[index];
            let mut shows = sentence(evidence);
            if alternate::is_without_force(subject, case.case, index, comparison) {
                shows.push_str(" Agreement without force: its bound is wider than the margin of the criterion.");
            }
            let cells = [
                order(evidence.ladder.observed_order),
                relative,
                convergence_word(evidence).to_owned(),
                alternate::cell(model, index, comparison),
                shows,
            ];
            rows.push(body(
                std::iter::once(symbol(&spec.symbol))
                    .chain(cells.into_iter().map(text))
                    .collect(),
            ));
        }
    }
    let heads = [
        ("Result", Align::Left),
        ("Order", Align::Decimal),
        ("Uncertainty", Align::Decimal),
        ("Convergence", Align::Left),
        ("Alternate", Align::Left),
        ("What it shows", Align::Left),
    ];
    let note = "Order: observed from the last three levels. Uncertainty: numerical, relative to the value. Alternate: bound on the difference to the alternate integration, a share or multiple of the uncertainty and 100 times its tolerance. Results used by no criterion are in the appendix.";
    table(
        "evidence".to_owned(),
        "Numerical evidence for the judged results".to_owned(),
        columns(&heads),
        rows,
        note,
    )
}

fn ladders(subject: &Subject, case: &CaseEvidence) -> Table {
    let model = subject.model;
    let levels = case.levels.len();
    let mut heads = vec![Column {
        heading: text("Result"),
        align: Align::Left,
    }];
    for level in 0..levels {
        let name = if level == 0 {
            "at step".to_owned()
        } else {
            format!("step/{}", 1u32 << level)
        };
        heads.push(Column {
            heading: text(name),
            align: Align::Right,
        });
    }
    heads.extend(columns(&[
        ("Order", Align::Right),
        ("Extrapolated", Align::Right),
        ("Uncertainty", Align::Right),
        ("F", Align::Right),
        ("Convergence", Align::Left),
    ]));
    let rows = model
        .results
        .iter()
        .zip(&case.results)
        .map(|(spec, evidence)| ladder_row(model, spec, evidence))
        .collect();
    let id = &model.cases[case.case].id;
    table(
        format!("ladder-{}", super::data::case_stem(model, case.case)),
        format!("Step-halving ladder of every result, case “{id}”"),
        heads,
        rows,
        "F: factor of safety on the estimated error. Digits are printed as far as the levels differ.",
    )
}

fn ladder_row(model: &Model, spec: &ResultSpec, evidence: &ResultEvidence) -> Row {
    let ladder = &evidence.ladder;
    let places = ladder_places(model, spec, evidence);
    let number = |value: Option<f64>| {
        value.map_or_else(
            || "–".to_owned(),
            |value| Numeral::decimals(in_unit(model, value, &spec.unit), places).typographic(),
        )
    };
    let mut name = symbol(&spec.symbol);
    name.push(Inline::Text(format!(" / {}", spec.unit.print())));
    let mut cells = vec![name];
    cells.extend(ladder.values.iter().map(|value| text(number(*value))));
    let uncertainty = match ladder.reported() {
        Some(value) => by_uncertainty(model, value, ladder.uncertainty, &spec.unit).uncertainty,
        None => "–".to_owned(),
    };
    let factor = ladder
        .factor
        .map_or_else(|| "–".to_owned(), words::as_written);
    cells.extend([
        text(order(ladder.observed_order)),
        text(number(ladder.extrapolated)),
        text(uncertainty),
        text(factor),
        text(convergence_word(evidence)),
    ]);
    body(cells)
}

/// Decimals at which the finest difference between levels shows two digits.
fn ladder_places(model: &Model, spec: &ResultSpec, evidence: &ResultEvidence) -> i32 {
    let numbers: Vec<f64> = evidence
        .ladder
        .values
        .iter()
        .flatten()
        .map(|value| in_unit(model, *value, &spec.unit))
        .collect();
    let finest = numbers
        .windows(2)
        .map(|pair| (pair[0] - pair[1]).abs())
        .filter(|difference| *difference > 0.0)
        .fold(f64::INFINITY, crate::float::min);
    let largest = numbers
        .iter()
        .map(|value| value.abs())
        .fold(0.0, crate::float::max);
    let places = if finest.is_finite() && finest > 1e-12 * largest {
        1 - words::magnitude(finest)
    } else {
        5 - words::magnitude(largest)
    };
    places.clamp(0, 15)
}

fn state_ladders(subject: &Subject, case: &CaseEvidence) -> Table {
    let model = subject.model;
    let mut heads = vec![Column {
        heading: text("State"),
        align: Align::Left,
    }];
    for level in 1..case.levels.len() {
        let coarse = if level == 1 {
            "step".to_owned()
        } else {
            format!("step/{}", 1u32 << (level - 1))
        };
        heads.push(Column {
            heading: text(format!("{coarse} to step/{}", 1u32 << level)),
            align: Align::Right,
        });
    }
    heads.extend(columns(&[
        ("Unit", Align::Left),
        ("Observed order", Align::Right),
    ]));
    let rows = model
        .states
        .iter()
        .zip(&case.histories)
        .map(|(state, history)| {
            let unit = state.unit.difference_unit();
            let mut cells = vec![symbol(&state.symbol)];
            cells.extend(history.differences.iter().map(|difference| {
                text(Numeral::significant(unit.difference_from_si(*difference), 2).typographic())
            }));
            cells.extend([words::unit_cell(&unit), text(order(history.observed_order))]);
            body(cells)
        })
        .collect();
    let id = &model.cases[case.case].id;
    table(
        format!("state-ladder-{}", super::data::case_stem(model, case.case)),
        format!("Largest difference of each state’s history between levels, case “{id}”"),
        heads,
        rows,
        "Over the instants of print.",
    )
}

/// Digits of the calculator check: enough to follow every operation.
const HAND_DIGITS: usize = 10;

/// Steps with every intermediate in full, named as the method's literature names them.
fn calculator_check(subject: &Subject, case: &CaseEvidence) -> Vec<Block> {
    let model = subject.model;
    let variable = &model.march.variable;
    let mut blocks = Vec::new();
    for (position, worked) in case.worked.iter().enumerate() {
        let trace = &worked.trace;
        let Some(first) = trace.stages.first() else {
            continue;
        };
        let which = if position == 0 {
            "first step"
        } else {
            "step with the largest scaled slope"
        };
        let time = |t: f64| words::trimmed(in_unit(model, t, &model.march.unit));
        let mut rows = Vec::new();
        for (stage, quantities) in trace.stages.iter().zip(&worked.quantities) {
            rows.push(stage_row(
                model,
                stage.value_name,
                &time(stage.t),
                &stage.y,
                Content::Value,
            ));
            rows.extend(quantities_row(model, quantities));
            rows.push(stage_row(
                model,
                stage.slope_name,
                &time(stage.t),
                &stage.slope,
                Content::Slope,
            ));
        }
        rows.push(stage_row(
            model,
            trace.result_name,
            &time(trace.end),
            &trace.result,
            Content::Value,
        ));
        let mut heads = vec![Column {
            heading: text("Intermediate"),
            align: Align::Left,
        }];
        let mut head = symbol(variable);
        head.push(Inline::Text(format!(" / {}", model.march.unit.print())));
        heads.push(Column {
            heading: head,
            align: Align::Right,
        });
        for state in &model.states {
            heads.push(Column {
                heading: symbol(&state.symbol),
                align: Align::Right,
            });
        }
        heads.push(Column {
            heading: text("Unit"),
            align: Align::Left,
        });
        blocks.push(Block::Table(table(
            format!("calculator-check-{position}"),
            format!(
                "Calculator check: {which}, from {} to {}",
                time(first.t),
                model.march.unit.after(&time(trace.end))
            ),
            heads,
            rows,
            &note(model, trace),
        )));
    }
    blocks
}

/// The quantities at a stage, which its slope is made of.
fn quantities_row(model: &Model, values: &[f64]) -> Option<Row> {
    let mut words: Text = text("With ");
    for (index, (quantity, value)) in model.quantities.iter().zip(values).enumerate() {
        if index > 0 {
            words.push(Inline::Text(", ".to_owned()));
        }
        words.extend(symbol(&quantity.symbol));
        let number = Numeral::significant(*value, HAND_DIGITS).typographic();
        let unit = crate::units::Unit::coherent(quantity.unit.dimension());
        words.push(Inline::Text(format!(" = {}", unit.after(&number))));
    }
    (!model.quantities.is_empty()).then(|| Row {
        cells: vec![words],
        kind: RowKind::Group,
    })
}

/// What the units are, and what is left of an implicit stage's equation.
fn note(model: &Model, trace: &Trace) -> String {
    let units = "In SI base units, so that formulas can be followed with inputs in SI.";
    let largest = (0..model.states.len())
        .map(|state| {
            let left = trace
                .stages
                .iter()
                .filter_map(|stage| stage.residual.get(state));
            left.map(|value| value.abs()).fold(0.0, crate::float::max)
        })
        .collect::<Vec<_>>();
    if trace.stages.iter().all(|stage| stage.residual.is_empty()) {
        return units.to_owned();
    }
    let list: Vec<String> = model
        .states
        .iter()
        .zip(largest)
        .map(|(state, left)| {
            let number = Numeral::rounded_up(left, 2).typographic();
            format!("{} {number}", state.symbol)
        })
        .collect();
    format!(
        "{units} The stages put into their own equations leave at most: {}.",
        words::listed(&list)
    )
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Content {
    Value,
    Slope,
}

fn stage_row(model: &Model, name: &str, time: &str, values: &[f64], content: Content) -> Row {
    let mut cells = vec![text(words::capitalised(name)), text(time)];
    let mut units = Vec::new();
    for (state, value) in model.states.iter().zip(values) {
        cells.push(text(
            Numeral::significant(*value, HAND_DIGITS).typographic(),
        ));
        let dimension = if content == Content::Value {
            state.unit.dimension()
        } else {
            state.rate.dimension
        };
        let unit = dimension.si_unit();
        if !units.contains(&unit) {
            units.push(unit);
        }
    }
    cells.push(text(units.join("; ")));
    body(cells)
}
