//! Checks on the physics: balances and closed forms.

use super::desk::Desk;
use super::judging::{BASE, Judging};
use super::physics::Physics;
use super::scope::{Realm, Scope};
use crate::diagnostic::{
    CONTRADICTION, DIMENSION, MISSING_KEY, NOT_A_NUMBER, NOT_AN_INPUT, PROBE_MISPLACED, UNKNOWN_ID,
    suggestion,
};
use crate::formula::dimensions::{Type, describe};
use crate::formula::tree::{Kind, ProbeFunction};
use crate::problem::model::{Balance, Checked, ClosedForm, Formula};
use crate::problem::read::{Entry, Section};
use crate::units::Dimension;

pub struct Checks {
    pub balances: Vec<Balance>,
    pub closed_forms: Vec<ClosedForm>,
}

pub fn checks(desk: &mut Desk, section: &Section, physics: &Physics, judging: &Judging) -> Checks {
    let mut seen = Vec::new();
    for part in section.sections("balance") {
        if let Some(id) = part.text("id") {
            desk.first_use(&mut seen, id, &part.place_of("id"), "balance");
        }
    }
    Checks {
        balances: section
            .sections("balance")
            .iter()
            .filter_map(|part| balance(desk, part, physics))
            .collect(),
        closed_forms: section
            .sections("closed_form")
            .iter()
            .filter_map(|part| closed_form(desk, part, section, physics, judging))
            .collect(),
    }
}

fn balance(desk: &mut Desk, part: &Section, physics: &Physics) -> Option<Balance> {
    let entry = part.entry("formula")?;
    let scope = Scope {
        table: &physics.table,
        realm: Realm::Balances,
    };
    let (formula, found) = desk.formula(entry, &scope)?;
    if found == Type::Truth {
        desk.note(
            &NOT_A_NUMBER,
            &entry.span,
            "a condition stands where a quantity is expected",
            "write what must stay constant",
        );
        return None;
    }
    let mut misplaced = None;
    formula.tree.walk(&mut |tree| match &tree.kind {
        Kind::Probe(function, _) if *function != ProbeFunction::Integral => {
            misplaced = misplaced
                .take()
                .or(Some((tree.span.clone(), function.entry().name)))
        }
        _ => {}
    });
    if let Some((span, name)) = misplaced {
        let mend = "a balance holds at every instant: write states, quantities and integral(x) up to that instant";
        desk.note(
            &PROBE_MISPLACED,
            &entry.range_of(&span),
            format!("`{name}` cannot be used in a balance"),
            mend,
        );
        return None;
    }
    Some(Balance {
        id: part.required("id"),
        text: part.required("text"),
        formula,
        tolerance: part.number("tolerance")?,
    })
}

fn closed_form(
    desk: &mut Desk,
    part: &Section,
    section: &Section,
    physics: &Physics,
    judging: &Judging,
) -> Option<ClosedForm> {
    let (checked, dimension, name) = checked(desk, part, section, physics, judging)?;
    let entry = part.entry("formula")?;
    let formula = match checked {
        Checked::Result(_) => {
            let scope = Scope {
                table: &physics.table,
                realm: Realm::Inputs,
            };
            desk.formula_of(entry, &scope, dimension, &format!("`{name}`"))?
                .0
        }
        Checked::State(_) => of_variable(desk, entry, physics, dimension, &name)?,
    };
    let case = match part.text("case") {
        None | Some(BASE) => 0,
        Some(id) => match judging.cases.iter().position(|case| case.id == id) {
            Some(case) => case,
            None => {
                let mend = suggestion(
                    id,
                    judging.cases.iter().map(|case| case.id.as_str()),
                    "name the id of a [[case]], or \"base\"",
                );
                desk.note(
                    &UNKNOWN_ID,
                    &part.place_of("case"),
                    format!("no case `{id}`"),
                    mend,
                );
                return None;
            }
        },
    };
    let is_exact = part.text("kind") == Some("exact");
    Some(ClosedForm {
        checked,
        formula,
        is_exact,
        tolerance: part.number("tolerance")?,
        case,
        source: part.required("source"),
    })
}

/// What is checked, its dimension and its name.
fn checked(
    desk: &mut Desk,
    part: &Section,
    section: &Section,
    physics: &Physics,
    judging: &Judging,
) -> Option<(Checked, Dimension, String)> {
    let (key, name, index, names): (_, _, _, Vec<&str>) =
        match (part.text("result"), part.text("state")) {
            (Some(name), None) => {
                let names = judging
                    .results
                    .iter()
                    .map(|result| result.symbol.as_str())
                    .collect();
                (
                    "result",
                    name,
                    judging
                        .results
                        .iter()
                        .position(|result| result.symbol == name),
                    names,
                )
            }
            (None, Some(name)) => {
                let names = physics
                    .states
                    .iter()
                    .map(|state| state.symbol.as_str())
                    .collect();
                (
                    "state",
                    name,
                    physics.states.iter().position(|state| state.symbol == name),
                    names,
                )
            }
            (Some(_), Some(_)) => {
                desk.note(
                    &CONTRADICTION,
                    &part.place_of("state"),
                    "a closed form has either `result` or `state`",
                    "write one block for each",
                );
                return None;
            }
            (None, None) => {
                desk.note(
                    &MISSING_KEY,
                    &part.span,
                    "this closed form does not say what it checks",
                    "add result = \"…\" or state = \"…\"",
                );
                return None;
            }
        };
    let Some(index) = index else {
        // One with a fault of its own has been reported.
        if !section
            .sections(key)
            .iter()
            .any(|other| other.text("symbol") == Some(name))
        {
            desk.note(
                &UNKNOWN_ID,
                &part.place_of(key),
                format!("no {key} `{name}`"),
                suggestion(name, names, ""),
            );
        }
        return None;
    };
    Some(match key {
        "result" => (
            Checked::Result(index),
            judging.results[index].unit.dimension(),
            name.to_owned(),
        ),
        _ => (
            Checked::State(index),
            physics.states[index].unit.dimension(),
            name.to_owned(),
        ),
    })
}

/// A formula of inputs and the independent variable.
fn of_variable(
    desk: &mut Desk,
    entry: &Entry,
    physics: &Physics,
    dimension: Dimension,
    name: &str,
) -> Option<Formula> {
    let scope = Scope {
        table: &physics.table,
        realm: Realm::Model,
    };
    let (mut formula, found) = desk.formula(entry, &scope)?;
    match found {
        Type::Zero => formula.dimension = dimension,
        Type::Quantity {
            dimension: found, ..
        } if found == dimension => {}
        Type::Quantity {
            dimension: found, ..
        } => {
            let message = format!(
                "this formula is {}; `{name}` is {}",
                describe(found),
                describe(dimension)
            );
            desk.note(&DIMENSION, &entry.span, message, "mend the formula");
            return None;
        }
        Type::Truth => {
            desk.note(
                &NOT_A_NUMBER,
                &entry.span,
                "a condition stands where a quantity is expected",
                "write if(condition, 1, 0)",
            );
            return None;
        }
    }
    let computed = physics
        .states
        .iter()
        .map(|state| &state.symbol)
        .chain(physics.quantities.iter().map(|quantity| &quantity.symbol))
        .chain(physics.switches.iter().map(|switch| &switch.symbol));
    let computed: Vec<&String> = computed.collect();
    let wrong = formula
        .tree
        .symbols()
        .into_iter()
        .find(|(symbol, _)| computed.iter().any(|other| other == symbol))
        .map(|(symbol, span)| (symbol.to_owned(), span));
    if let Some((symbol, span)) = wrong {
        let mend = "a closed form is made of inputs and the independent variable, or it would check the march against itself";
        desk.note(
            &NOT_AN_INPUT,
            &entry.range_of(&span),
            format!("`{symbol}` is computed by the march"),
            mend,
        );
        return None;
    }
    Some(formula)
}
