//! The summary: two pages for a checker with twenty minutes.

use super::block::{Align, Block, ChecklistColumn, Column, Inline, Row, RowKind, Table, Text};
use super::words::{self, NONE_STATED, difference_in_unit, in_unit, or_none, text};
use super::{Blocks, Subject};
use crate::float::Numeral;
use crate::judgement::{Finding, Judgement};
use crate::problem::model::{Criterion, Limit, Standing};
use crate::units::Unit;

pub fn add(subject: &Subject, blocks: &mut Blocks) {
    let model = subject.model;
    blocks.insert(
        "purpose",
        vec![Block::Paragraph(text(model.head.purpose.clone()))],
    );
    blocks.insert("conclusion", vec![Block::Paragraph(conclusion(subject))]);
    blocks.insert("criteria", vec![Block::Table(criteria(subject))]);
    let shortfalls: Vec<Text> = shortfalls(subject);
    blocks.insert(
        "shortfalls",
        if shortfalls.is_empty() {
            Vec::new()
        } else {
            vec![Block::List {
                ordered: false,
                items: shortfalls,
            }]
        },
    );
    blocks.insert(
        "verification",
        vec![Block::Paragraph(verification(subject))],
    );
    blocks.insert("checklist", vec![Block::Checklist(checklist(subject))]);
}

/// The originator's words with values filled in, so that they cannot go stale.
fn conclusion(subject: &Subject) -> Text {
    match &subject.model.head.conclusion {
        None => text(NONE_STATED),
        Some(words) => text(filled(subject, words)),
    }
}

/// `{symbol}` becomes the base case's value with unit, `{K1.finding}` the finding.
fn filled(subject: &Subject, words: &str) -> String {
    let mut out = String::new();
    let mut rest = words;
    while let Some(start) = rest.find('{') {
        let Some(length) = rest[start..].find('}') else {
            break;
        };
        out.push_str(&rest[..start]);
        let name = &rest[start + 1..start + length];
        match value_of(subject, name) {
            Some(value) => out.push_str(&value),
            None => out.push_str(&rest[start..=start + length]),
        }
        rest = &rest[start + length + 1..];
    }
    out.push_str(rest);
    out
}

fn value_of(subject: &Subject, name: &str) -> Option<String> {
    let model = subject.model;
    if let Some(id) = name.strip_suffix(".finding") {
        let criterion = model
            .criteria
            .iter()
            .position(|criterion| criterion.id == id)?;
        return Some(subject.verdict.finding(criterion).word().to_owned());
    }
    let (symbol, case) = match name.split_once('@') {
        Some((symbol, case)) => (
            symbol.trim(),
            model
                .cases
                .iter()
                .position(|other| other.id == case.trim())?,
        ),
        None => (name, 0),
    };
    if let Some(result) = model
        .results
        .iter()
        .position(|result| result.symbol == symbol)
    {
        let spec = &model.results[result];
        let ladder = &subject.cases[case].results[result].ladder;
        return Some(match ladder.reported() {
            Some(value) => spec.unit.after(&in_words(subject, result, case, value)),
            None => "(no value)".to_owned(),
        });
    }
    let input = model
        .inputs
        .iter()
        .position(|input| input.symbol == symbol)?;
    let unit = &model.inputs[input].unit;
    Some(unit.after(&words::as_written(in_unit(
        model,
        model.cases[case].values[input],
        unit,
    ))))
}

/// A result in running text: few digits, but never on the wrong side of a limit.
fn in_words(subject: &Subject, result: usize, case: usize, value: f64) -> String {
    let model = subject.model;
    let unit = &model.results[result].unit;
    let value = in_unit(model, value, unit);
    let judged = model
        .criteria
        .iter()
        .enumerate()
        .filter(|(_, criterion)| criterion.result == result);
    let limits: Vec<f64> = judged
        .flat_map(|(index, _)| &subject.cases[case].limits[index])
        .map(|limit| in_unit(model, *limit, unit))
        .collect();
    let places = words::truthful_places(
        &[value],
        &limits,
        DIGITS_IN_WORDS - 1 - words::magnitude(value.abs()),
    );
    Numeral::decimals(value, places).typographic()
}

fn criteria(subject: &Subject) -> Table {
    let model = subject.model;
    let columns = [
        "Criterion",
        "Value",
        "Band",
        "Limit",
        "Margin",
        "Case",
        "Finding",
    ];
    let aligns = [
        Align::Left,
        Align::Right,
        Align::Right,
        Align::Right,
        Align::Right,
        Align::Left,
        Align::Left,
    ];
    let mut rows = Vec::new();
    for (index, criterion) in model.criteria.iter().enumerate() {
        let heading = vec![
            Inline::Strong(criterion.id.clone()),
            Inline::Text(format!(
                "  {} Basis: {}.",
                criterion.text,
                criterion.source.trim_end_matches('.')
            )),
        ];
        rows.push(Row {
            cells: vec![heading],
            kind: RowKind::Group,
        });
        let governing = subject
            .verdict
            .governing(index)
            .map(|judgement| judgement.case);
        for judgement in subject
            .verdict
            .judgements
            .iter()
            .filter(|judgement| judgement.criterion == index)
        {
            let governs = Some(judgement.case) == governing && criterion.cases.len() > 1;
            rows.push(judged_row(subject, criterion, judgement, governs));
        }
    }
    Table {
        anchor: "criteria".to_owned(),
        label: String::new(),
        caption: text("Criteria: value, band, limit and finding, case by case"),
        columns: columns
            .iter()
            .zip(aligns)
            .map(|(name, align)| Column {
                heading: text(*name),
                align,
            })
            .collect(),
        rows,
        note: text(
            "Band: value ± numerical uncertainty; input uncertainty is not stated. Margin: of the value, and in parentheses of the nearer edge of the band; negative beyond the limit. The governing case is set in bold.",
        ),
    }
}

fn judged_row(
    subject: &Subject,
    criterion: &Criterion,
    judgement: &Judgement,
    governs: bool,
) -> Row {
    let model = subject.model;
    let spec = &model.results[criterion.result];
    let limits = &subject.cases[judgement.case].limits[judgement.criterion];
    let symbol = words::symbol(&spec.symbol);
    let (value, band) = match (judgement.value, judgement.band) {
        (Some(value), Some(band)) => {
            let printed = printed_band(subject, value, band, limits, &spec.unit);
            // Edges nearer to the value than its last digit say less than the uncertainty itself.
            let half = spec.unit.difference_from_si(0.5 * (band.1 - band.0));
            let edges = if half < words::power_of_ten(-printed.places) {
                let uncertainty =
                    words::by_uncertainty(model, value, Some(0.5 * (band.1 - band.0)), &spec.unit);
                format!("± {}", uncertainty.uncertainty)
            } else {
                format!("{} to {}", printed.low, printed.high)
            };
            (spec.unit.after(&printed.value), edges)
        }
        (Some(value), None) => (
            words::rounded(model, value, &spec.unit, 4),
            "none claimed".to_owned(),
        ),
        (None, _) => ("did not occur".to_owned(), "–".to_owned()),
    };
    let margin = match (judgement.margin, judgement.margin_of_band) {
        (Some(margin), Some(of_band)) => {
            let unit = spec.unit.difference_unit();
            let number = |margin: f64| {
                Numeral::significant(difference_in_unit(margin, &spec.unit), 3).typographic()
            };
            format!("{} ({})", unit.after(&number(margin)), number(of_band))
        }
        _ => "–".to_owned(),
    };
    let mut finding = vec![Inline::Strong(judgement.finding.word().to_owned())];
    if let Some(reason) = &judgement.reason
        && judgement.value.is_some()
    {
        finding.push(Inline::Text(format!(": {reason}")));
    }
    Row {
        cells: vec![
            symbol,
            text(value),
            text(band),
            text(limit_words(criterion, limits, subject)),
            text(margin),
            text(model.cases[judgement.case].id.clone()),
            finding,
        ],
        kind: if governs {
            RowKind::Strong
        } else {
            RowKind::Body
        },
    }
}

/// A value and the edges of its band, spelled to so many decimal places.
struct PrintedBand {
    value: String,
    low: String,
    high: String,
    places: i32,
}

/// Value and band edges, with more digits where rounding would put one of them on the wrong side of a limit.
fn printed_band(
    subject: &Subject,
    value: f64,
    (low, high): (f64, f64),
    limits: &[f64],
    unit: &Unit,
) -> PrintedBand {
    let number = |x: f64| in_unit(subject.model, x, unit);
    let uncertainty = (unit.difference_from_si(high - low) * 0.5).abs();
    let cut = DIGITS_IN_TABLE - 1 - words::magnitude(number(value).abs());
    let least = if uncertainty > 0.0 {
        (1 - words::magnitude(uncertainty)).min(cut)
    } else {
        cut
    };
    let limits: Vec<f64> = limits.iter().map(|limit| number(*limit)).collect();
    let places =
        words::truthful_places(&[number(value), number(low), number(high)], &limits, least);
    let spell = |x: f64| Numeral::decimals(number(x), places).typographic();
    PrintedBand {
        value: spell(value),
        low: spell(low),
        high: spell(high),
        places,
    }
}

/// Significant digits of values in the table of criteria and in the conclusion, unless a limit needs more.
const DIGITS_IN_TABLE: i32 = 5;
const DIGITS_IN_WORDS: i32 = 4;

/// "≥ 12 min".
fn limit_words(criterion: &Criterion, limits: &[f64], subject: &Subject) -> String {
    let spec = &subject.model.results[criterion.result];
    let expressions = criterion.limit.expressions();
    let spell = |index: usize| {
        let unit = expressions[index].unit(&spec.unit);
        unit.after(&words::trimmed(in_unit(subject.model, limits[index], unit)))
    };
    match criterion.limit {
        Limit::AtMost(_) => format!("≤ {}", spell(0)),
        Limit::AtLeast(_) => format!("≥ {}", spell(0)),
        Limit::Between(..) => format!("{} to {}", spell(0), spell(1)),
    }
}

fn shortfalls(subject: &Subject) -> Vec<Text> {
    let model = subject.model;
    let mut items: Vec<Text> = Vec::new();
    for judgement in subject
        .verdict
        .judgements
        .iter()
        .filter(|judgement| judgement.finding != Finding::Met)
    {
        let criterion = &model.criteria[judgement.criterion];
        let reason = judgement
            .reason
            .as_deref()
            .unwrap_or("the whole band lies outside the limit");
        items.push(text(format!(
            "{} in case “{}”: {}; {reason}.",
            criterion.id,
            model.cases[judgement.case].id,
            judgement.finding.word()
        )));
    }
    items.extend(
        subject
            .verdict
            .against
            .iter()
            .chain(&subject.verdict.failed)
            .map(|sentence| text(sentence.clone())),
    );
    for assumption in model.assumptions.iter().filter(|assumption| {
        assumption.standing == crate::problem::model::AssumptionStanding::ToBeConfirmed
    }) {
        items.push(text(format!(
            "Assumption {} is to be confirmed.",
            assumption.id
        )));
    }
    items
}

fn verification(subject: &Subject) -> Text {
    let model = subject.model;
    match &model.verification {
        None => text("Method and extent of the verification: none stated."),
        Some(verification) => {
            let extent = or_none(&verification.extent);
            let mut words = vec![
                Inline::Text("Method: ".to_owned()),
                Inline::Text(verification.method.clone()),
                Inline::Text(". Extent: ".to_owned()),
            ];
            words.extend(extent);
            words
        }
    }
}

/// What the program has checked for this calculation, and what no program can.
fn checklist(subject: &Subject) -> Vec<ChecklistColumn> {
    let model = subject.model;
    let formulas =
        model.quantities.len() + model.states.len() + model.events.len() + model.results.len();
    let levels = model.march.levels;
    let mut checked = vec![
        format!("units and dimensions of {formulas} formulas"),
        "every symbol is defined once, and every input has a source".to_owned(),
        format!(
            "step-halving ladder of every result, {levels} levels, {}",
            words::count(model.cases.len() as u64, "case", "cases")
        ),
        "same events at all levels, located to round-off".to_owned(),
        "stability of the march: eigenvalues of the exact Jacobian at its steps".to_owned(),
        "alternate integration of every case by an independent implementation".to_owned(),
        "finding of every criterion against value and band".to_owned(),
    ];
    if !model.balances.is_empty() || !model.closed_forms.is_empty() {
        checked.push("balances and closed forms against their tolerances".to_owned());
    }
    if model.inputs.iter().any(|input| input.within.is_some()) {
        checked.push("inputs inside their plausibility ranges".to_owned());
    }
    if model.states.iter().any(|state| state.within.is_some()) {
        checked.push("states inside their permitted ranges".to_owned());
    }
    if model.roles.checker.is_some() {
        checked.push("checker is not the originator".to_owned());
    }
    if model.head.standing == Standing::Issued {
        checked.push("an issued calculation’s words are complete".to_owned());
    }
    let left = [
        "the equations are the right ones for this purpose",
        "each formula agrees with its source",
        "each input agrees with its source and is current",
        "assumptions hold, and none is missing",
        "cases cover what can happen",
        "criteria and limits are those of the governing documents",
        "results are plausible against an estimate of the checker’s own",
        "the conclusion follows from the results",
    ];
    vec![
        ChecklistColumn {
            title: "Checked by the program".to_owned(),
            items: checked.into_iter().map(|item| (true, text(item))).collect(),
        },
        ChecklistColumn {
            title: "Left to the checker".to_owned(),
            items: left.into_iter().map(|item| (false, text(item))).collect(),
        },
    ]
}
