//! What is wanted and how it is judged: results, criteria, cases, figures.

use std::collections::BTreeMap;

use super::desk::{Desk, Measured, Use};
use super::physics::{Physics, refuse_difference};
use super::scope::{Realm, Scope};
use crate::diagnostic::{
    CONTRADICTION, DUPLICATE, MISSING_KEY, UNJUDGED_CASE, UNKNOWN_ID, WRONG_TYPE, WRONG_UNIT,
    suggestion,
};
use crate::formula::dimensions::Type;
use crate::problem::model::{Case, Criterion, Expression, FigureSpec, Limit, ResultSpec};
use crate::problem::read::{Entry, Section};
use crate::units::Unit;

/// The id of the case that is always run.
pub const BASE: &str = "base";

pub struct Judging {
    pub results: Vec<ResultSpec>,
    pub criteria: Vec<Criterion>,
    pub cases: Vec<Case>,
    pub figures: Vec<FigureSpec>,
}

pub fn judging(desk: &mut Desk, section: &Section, physics: &Physics) -> Judging {
    let results: Vec<ResultSpec> = section
        .sections("result")
        .iter()
        .filter_map(|part| result(desk, part, physics))
        .collect();
    let mut seen = Vec::new();
    for part in section.sections("result") {
        if let Some(symbol) = part.text("symbol") {
            let is_first = desk.first_use(&mut seen, symbol, &part.place_of("symbol"), "result");
            let is_taken = physics.table.inputs.contains_key(symbol)
                || physics.table.others.contains_key(symbol);
            if is_first && is_taken {
                desk.note(
                    &DUPLICATE,
                    &part.place_of("symbol"),
                    format!("symbol `{symbol}` is defined twice"),
                    "rename the result",
                );
            }
        }
    }
    let cases = cases(desk, section, physics);
    let criteria: Vec<Criterion> = section
        .sections("criterion")
        .iter()
        .filter_map(|part| criterion(desk, part, physics, section, &results, &cases))
        .collect();
    if !section.sections("criterion").is_empty() {
        warn_of_unjudged(desk, section, &criteria, &cases);
    }
    let figures = section
        .sections("figure")
        .iter()
        .map(|part| figure(desk, part, physics))
        .collect();
    Judging {
        results,
        criteria,
        cases,
        figures,
    }
}

fn result(desk: &mut Desk, part: &Section, physics: &Physics) -> Option<ResultSpec> {
    let unit = desk.unit(part, "unit")?;
    let symbol = part.required("symbol");
    let scope = Scope {
        table: &physics.table,
        realm: Realm::Results,
    };
    let entry = part.entry("formula")?;
    let (formula, kind) =
        desk.formula_of(entry, &scope, unit.dimension(), &format!("`{symbol}`"))?;
    refuse_difference(desk, entry, kind, &unit);
    let scale = part
        .entry("scale")
        .and_then(|entry| desk.quantity(entry, Some(unit.dimension()), Use::Size))
        .map(|measured| measured.value_si);
    let absolute = matches!(kind, Type::Quantity { absolute: true, .. });
    Some(ResultSpec {
        symbol,
        meaning: part.required("meaning"),
        unit,
        formula,
        absolute,
        scale,
    })
}

/// The base case, then those of the file.
fn cases(desk: &mut Desk, section: &Section, physics: &Physics) -> Vec<Case> {
    let base: Vec<f64> = physics.inputs.iter().map(|input| input.value_si).collect();
    let mut found = vec![Case {
        id: BASE.to_owned(),
        text: "inputs as stated".to_owned(),
        values: base.clone(),
        changes: Vec::new(),
        lookups: BTreeMap::new(),
        source: None,
    }];
    let mut seen = vec![BASE];
    for part in section.sections("case") {
        if let Some(id) = part.text("id") {
            desk.first_use(&mut seen, id, &part.place_of("id"), "case");
        }
        let mut case = Case {
            id: part.required("id"),
            text: part.required("text"),
            values: base.clone(),
            changes: Vec::new(),
            lookups: BTreeMap::new(),
            source: part.owned("source"),
        };
        for (symbol, entry) in part.map("set") {
            if let Some((index, measured)) = changed_input(desk, physics, symbol, entry) {
                case.values[index] = measured.value_si;
                case.changes.push((index, measured.value, measured.unit));
            }
        }
        for (symbol, entry) in part.map("lookups") {
            if let Some((from, to)) = changed_lookup(desk, physics, symbol, entry) {
                case.lookups.insert(from, to);
            }
        }
        if case.changes.is_empty() && case.lookups.is_empty() {
            desk.note(
                &MISSING_KEY,
                &part.span,
                format!("case `{}` changes nothing", case.id),
                "add set = { symbol = value }",
            );
        }
        found.push(case);
    }
    found
}

fn changed_input(
    desk: &mut Desk,
    physics: &Physics,
    symbol: &str,
    entry: &Entry,
) -> Option<(usize, Measured)> {
    let Some(index) = physics
        .inputs
        .iter()
        .position(|input| input.symbol == symbol)
    else {
        let mend = suggestion(
            symbol,
            physics.inputs.iter().map(|input| input.symbol.as_str()),
            "a case changes inputs only",
        );
        desk.note(
            &UNKNOWN_ID,
            &entry.span,
            format!("`{symbol}` is not an input"),
            mend,
        );
        return None;
    };
    let input = &physics.inputs[index];
    let measured = desk.quantity(entry, Some(input.unit.dimension()), Use::Point)?;
    if let Some((low, high)) = input.within
        && !(low..=high).contains(&measured.value_si)
    {
        let message = format!("`{symbol}` lies outside its plausibility range in this case");
        desk.note(
            &crate::diagnostic::OUTSIDE_PLAUSIBLE,
            &entry.span,
            message,
            "mend the value, or justify a wider range",
        );
    }
    Some((index, measured))
}

fn changed_lookup(
    desk: &mut Desk,
    physics: &Physics,
    symbol: &str,
    entry: &Entry,
) -> Option<(usize, usize)> {
    let position = |name: &str| {
        physics
            .lookups
            .iter()
            .position(|lookup| lookup.symbol == name)
    };
    let other = entry.text()?;
    let (Some(from), Some(to)) = (position(symbol), position(other)) else {
        let unknown = if position(symbol).is_none() {
            symbol
        } else {
            other
        };
        let mend = suggestion(
            unknown,
            physics.lookups.iter().map(|lookup| lookup.symbol.as_str()),
            "name two lookups: { ramp = \"ramp_slow\" }",
        );
        desk.note(
            &UNKNOWN_ID,
            &entry.span,
            format!("no lookup `{unknown}`"),
            mend,
        );
        return None;
    };
    let dimensions = |index: usize| {
        (
            physics.lookups[index].argument_unit.dimension(),
            physics.lookups[index].unit.dimension(),
        )
    };
    if dimensions(from) != dimensions(to) {
        desk.note(
            &WRONG_UNIT,
            &entry.span,
            format!("`{symbol}` and `{other}` have other dimensions"),
            "a lookup stands in for one of the same dimensions",
        );
        return None;
    }
    Some((from, to))
}

fn criterion(
    desk: &mut Desk,
    part: &Section,
    physics: &Physics,
    section: &Section,
    results: &[ResultSpec],
    cases: &[Case],
) -> Option<Criterion> {
    let name = part.text("result")?;
    let Some(result) = results.iter().position(|result| result.symbol == name) else {
        // A result with a fault of its own has been reported.
        if !section
            .sections("result")
            .iter()
            .any(|other| other.text("symbol") == Some(name))
        {
            let mend = suggestion(
                name,
                results.iter().map(|result| result.symbol.as_str()),
                "name the symbol of a [[result]]",
            );
            desk.note(
                &UNKNOWN_ID,
                &part.place_of("result"),
                format!("no result `{name}`"),
                mend,
            );
        }
        return None;
    };
    let limit = limit(desk, part, physics, &results[result]);
    let cases = judged_cases(desk, part, cases);
    let if_absent = part.text("if_absent").map(|word| word == "met");
    Some(Criterion {
        id: part.required("id"),
        text: part.required("text"),
        result,
        limit: limit?,
        source: part.required("source"),
        cases,
        if_absent,
    })
}

fn limit(desk: &mut Desk, part: &Section, physics: &Physics, result: &ResultSpec) -> Option<Limit> {
    let scope = Scope {
        table: &physics.table,
        realm: Realm::Inputs,
    };
    let given: Vec<&str> = ["at_most", "at_least", "between"]
        .into_iter()
        .filter(|key| part.entry(key).is_some())
        .collect();
    let what = format!("`{}`", result.symbol);
    let mut read = |entry: &Entry| desk.expression(entry, &scope, result.unit.dimension(), &what);
    match given[..] {
        ["at_most"] => Some(Limit::AtMost(read(part.entry("at_most")?)?)),
        ["at_least"] => Some(Limit::AtLeast(read(part.entry("at_least")?)?)),
        ["between"] => {
            let [low, high] = part.list("between") else {
                return None;
            };
            let (low, high) = (read(low), read(high));
            let (low, high) = (low?, high?);
            if let (
                Expression::Quantity { value_si: low, .. },
                Expression::Quantity { value_si: high, .. },
            ) = (&low, &high)
                && low > high
            {
                desk.note(
                    &WRONG_TYPE,
                    &part.place_of("between"),
                    "the lower limit is above the upper one",
                    "exchange them",
                );
                return None;
            }
            Some(Limit::Between(low, high))
        }
        [] => {
            desk.note(
                &MISSING_KEY,
                &part.span,
                format!("criterion `{}` has no limit", part.required("id")),
                "add at_most, at_least or between",
            );
            None
        }
        _ => {
            desk.note(
                &CONTRADICTION,
                &part.place_of(given[1]),
                format!("{} exclude each other", given.join(" and ")),
                "use between = [a, b] for two limits",
            );
            None
        }
    }
}

fn judged_cases(desk: &mut Desk, part: &Section, cases: &[Case]) -> Vec<usize> {
    if part.entry("cases").is_none() {
        return (0..cases.len()).collect();
    }
    let mut found = Vec::new();
    for entry in part.list("cases") {
        let Some(id) = entry.text() else { continue };
        match cases.iter().position(|case| case.id == id) {
            Some(index) => found.push(index),
            None => {
                let mend = suggestion(
                    id,
                    cases.iter().map(|case| case.id.as_str()),
                    "name the id of a [[case]], or \"base\"",
                );
                desk.note(&UNKNOWN_ID, &entry.span, format!("no case `{id}`"), mend);
            }
        }
    }
    found
}

fn warn_of_unjudged(desk: &mut Desk, section: &Section, criteria: &[Criterion], cases: &[Case]) {
    for (index, case) in cases.iter().enumerate() {
        if !criteria
            .iter()
            .any(|criterion| criterion.cases.contains(&index))
        {
            let part = section
                .sections("case")
                .iter()
                .find(|part| part.text("id") == Some(&case.id));
            let span = part.map_or(0..0, |part| part.place_of("id"));
            desk.note(
                &UNJUDGED_CASE,
                &span,
                format!("case `{}` is in no criterion", case.id),
                "add it to `cases` of a criterion, or say why it is run",
            );
        }
    }
}

fn figure(desk: &mut Desk, part: &Section, physics: &Physics) -> FigureSpec {
    let texts = |key: &str| {
        part.list(key)
            .iter()
            .filter_map(Entry::text)
            .map(str::to_owned)
            .collect::<Vec<_>>()
    };
    let shown: Vec<&str> = physics
        .states
        .iter()
        .map(|state| state.symbol.as_str())
        .chain(
            physics
                .quantities
                .iter()
                .map(|quantity| quantity.symbol.as_str()),
        )
        .collect();
    for entry in part.list("show") {
        if let Some(symbol) = entry.text()
            && !shown.contains(&symbol)
        {
            desk.note(
                &UNKNOWN_ID,
                &entry.span,
                format!("`{symbol}` is not a state or quantity"),
                suggestion(
                    symbol,
                    shown.iter().copied(),
                    "figures show states and quantities",
                ),
            );
        }
    }
    for entry in part.list("mark") {
        if let Some(id) = entry.text()
            && !physics.table.events.iter().any(|event| event == id)
        {
            desk.note(
                &UNKNOWN_ID,
                &entry.span,
                format!("no event `{id}`"),
                suggestion(
                    id,
                    physics.table.events.iter().map(String::as_str),
                    "name the id of an [[event]]",
                ),
            );
        }
    }
    FigureSpec {
        title: part.required("title"),
        show: texts("show"),
        mark: texts("mark"),
    }
}

impl Limit {
    pub fn expressions(&self) -> Vec<&Expression> {
        match self {
            Limit::AtMost(limit) | Limit::AtLeast(limit) => vec![limit],
            Limit::Between(low, high) => vec![low, high],
        }
    }
}

/// The unit in which an expression was written, else `otherwise`.
impl Expression {
    pub fn unit<'a>(&'a self, otherwise: &'a Unit) -> &'a Unit {
        match self {
            Expression::Quantity { unit, .. } => unit,
            Expression::Formula(_) => otherwise,
        }
    }
}
