//! The equations: inputs, lookups, quantities, states, switches, events, the march.

use std::collections::{BTreeMap, BTreeSet};
use std::ops::Range;

use super::NamedFiles;
use super::checks::Checks;
use super::desk::{Desk, Measured, Use};
use super::judging::Judging;
use super::scope::{Realm, Scope, Table};
use crate::diagnostic::{
    BAD_CSV, BAD_GRID, BAD_POINTS, CONTRADICTION, CYCLE, DUPLICATE, MISSING_KEY, NO_STATE,
    OUTSIDE_PLAUSIBLE, TOO_MANY, UNKNOWN_ID, UNREADABLE, UNUSED_INPUT, WRONG_TYPE, suggestion,
};
use crate::formula::dimensions::{Type, describe};
use crate::formula::parse::parse;
use crate::formula::tree::Tree;
use crate::problem::model::{
    Action, Between, Event, Expression, Formula, GridSpec, Input, Lookup, March, NamedQuantity,
    Outside, SegmentSpec, Standing, State, Switch,
};
use crate::problem::read::{Entry, Section, Value};
use crate::units::{Dimension, Kind, MissingAmbient, Unit};

/// Most states of a problem.
pub const MAX_STATES: usize = 400;
/// Most points of a lookup.
pub const MAX_POINTS: usize = 100_000;

/// Everything that is marched, and the names that formulas know.
pub struct Physics {
    pub table: Table,
    pub ambient: Option<f64>,
    pub inputs: Vec<Input>,
    pub lookups: Vec<Lookup>,
    pub quantities: Vec<NamedQuantity>,
    pub states: Vec<State>,
    pub switches: Vec<Switch>,
    pub events: Vec<Event>,
    pub march: Option<March>,
}

pub fn physics(
    desk: &mut Desk,
    section: &Section,
    files: &NamedFiles,
    _standing: Standing,
) -> Physics {
    if let Some(site) = section.section("site")
        && let Some(entry) = site.entry("ambient_pressure")
    {
        let pressure = Unit::parse("Pa").ok().map(|unit| unit.dimension());
        desk.ambient = desk
            .quantity(entry, pressure, Use::Point)
            .map(|measured| measured.value_si);
    }
    let inputs: Vec<Input> = section
        .sections("input")
        .iter()
        .filter_map(|part| input(desk, part))
        .collect();
    let lookups: Vec<Lookup> = section
        .sections("lookup")
        .iter()
        .filter_map(|part| lookup(desk, part, files))
        .collect();
    let table = names(desk, section, &inputs, &lookups);
    let quantities = quantities(desk, section, &table);
    let states = states(desk, section, &table);
    let switches = section
        .sections("switch")
        .iter()
        .map(|part| Switch {
            symbol: part.required("symbol"),
            meaning: part.required("meaning"),
            initial: part.number("initial").unwrap_or(0.0),
        })
        .collect::<Vec<_>>();
    let events = section
        .sections("event")
        .iter()
        .filter_map(|part| event(desk, part, &table, section))
        .collect();
    let march = section
        .section("march")
        .and_then(|part| march(desk, part, &table));
    if section.sections("state").is_empty() {
        desk.note(
            &NO_STATE,
            &(0..0),
            "the problem has no [[state]]",
            "add the quantity that is marched, with its initial value and rate",
        );
    }
    if states.len() > MAX_STATES {
        desk.note(
            &TOO_MANY,
            &(0..0),
            format!("{} states; the limit is {MAX_STATES}", states.len()),
            "divide the calculation",
        );
    }
    Physics {
        table,
        ambient: desk.ambient,
        inputs,
        lookups,
        quantities,
        states,
        switches,
        events,
        march,
    }
}

fn input(desk: &mut Desk, part: &Section) -> Option<Input> {
    let Some(entry) = part.entry("value") else {
        if part.entry("from").is_none() {
            desk.note(
                &MISSING_KEY,
                &part.span,
                format!("input `{}` has no value", part.required("symbol")),
                "add a line like: value = \"12.5 m^2\"",
            );
        }
        return None;
    };
    let Measured {
        value,
        unit,
        value_si,
    } = desk.quantity(entry, None, Use::Point)?;
    let within = bounds(desk, part, "within", unit.dimension());
    if let Some((low, high)) = within {
        if low > high {
            desk.note(
                &OUTSIDE_PLAUSIBLE,
                &part.place_of("within"),
                "the lower bound is above the upper one",
                "exchange them",
            );
        } else if !(low..=high).contains(&value_si) {
            let message = format!(
                "`{}` lies outside its own plausibility range",
                part.required("symbol")
            );
            desk.note(
                &OUTSIDE_PLAUSIBLE,
                &entry.span,
                message,
                "mend the value, or justify a wider range",
            );
        }
    }
    Some(Input {
        symbol: part.required("symbol"),
        meaning: part.required("meaning"),
        value,
        unit,
        value_si,
        source: part.required("source"),
        within,
    })
}

/// Two quantities in SI.
fn bounds(desk: &mut Desk, part: &Section, key: &str, dimension: Dimension) -> Option<(f64, f64)> {
    let list = part.list(key);
    let [low, high] = list else { return None };
    let (low, high) = (
        desk.quantity(low, Some(dimension), Use::Point),
        desk.quantity(high, Some(dimension), Use::Point),
    );
    Some((low?.value_si, high?.value_si))
}

fn lookup(desk: &mut Desk, part: &Section, files: &NamedFiles) -> Option<Lookup> {
    let (argument_unit, unit) = (desk.unit(part, "argument_unit"), desk.unit(part, "unit"));
    let points = match (part.entry("points"), part.entry("file")) {
        (
            Some(Entry {
                value: Value::Points(points),
                ..
            }),
            None,
        ) => Some(points.clone()),
        (None, Some(_)) => csv_points(desk, part, files),
        (Some(_), Some(_)) => {
            desk.note(
                &CONTRADICTION,
                &part.place_of("file"),
                "a lookup has either `points` or `file`",
                "remove one of them",
            );
            None
        }
        _ => {
            desk.note(
                &MISSING_KEY,
                &part.span,
                format!("lookup `{}` has no points", part.required("symbol")),
                "add points = [[x, y], …], or file = \"….csv\"",
            );
            None
        }
    };
    let (argument_unit, unit, points) = (argument_unit?, unit?, points?);
    let span = if part.entry("points").is_some() {
        part.place_of("points")
    } else {
        part.place_of("file")
    };
    let between = match part.text("between") {
        Some("monotone cubic") => Between::MonotoneCubic,
        Some("step") => Between::Step,
        _ => Between::Linear,
    };
    let convert = |unit: &Unit, value: f64| unit.to_si(value, desk.ambient);
    let points_si: Result<Vec<(f64, f64)>, MissingAmbient> = points
        .iter()
        .map(|(x, y)| Ok((convert(&argument_unit, *x)?, convert(&unit, *y)?)))
        .collect();
    let Ok(points_si) = points_si else {
        desk.note(
            &crate::diagnostic::NO_AMBIENT,
            &span,
            "a gauge pressure needs the ambient pressure",
            "add [site] ambient_pressure with its source",
        );
        return None;
    };
    check_points(desk, &points_si, &span)?;
    Some(Lookup {
        symbol: part.required("symbol"),
        meaning: part.required("meaning"),
        argument: part.required("argument"),
        argument_unit,
        unit,
        points,
        points_si,
        between,
        outside: if part.text("outside") == Some("hold") {
            Outside::Hold
        } else {
            Outside::Refuse
        },
        factor: part.owned("factor"),
        file: part.owned("file"),
        source: part.required("source"),
    })
}

fn check_points(desk: &mut Desk, points: &[(f64, f64)], span: &Range<usize>) -> Option<()> {
    if points.len() < 2 {
        desk.note(
            &BAD_POINTS,
            span,
            "a lookup needs at least two points",
            "add points; a constant is an input",
        );
        return None;
    }
    if points.len() > MAX_POINTS {
        desk.note(
            &TOO_MANY,
            span,
            format!("{} points; the limit is {MAX_POINTS}", points.len()),
            "thin the table",
        );
        return None;
    }
    if points.iter().any(|(x, y)| !x.is_finite() || !y.is_finite()) {
        desk.note(
            &BAD_POINTS,
            span,
            "a point of the lookup is not finite",
            "write finite numbers",
        );
        return None;
    }
    if let Some(index) = points.windows(2).position(|pair| pair[1].0 <= pair[0].0) {
        let message = format!(
            "arguments must rise: point {} is not above point {}",
            index + 2,
            index + 1
        );
        desk.note(
            &BAD_POINTS,
            span,
            message,
            "sort the points; a jump is a lookup with between = \"step\"",
        );
        return None;
    }
    Some(())
}

/// The two named columns of a CSV file.
fn csv_points(desk: &mut Desk, part: &Section, files: &NamedFiles) -> Option<Vec<(f64, f64)>> {
    let file = part.text("file")?;
    let span = part.place_of("file");
    let bytes = match files.get(file) {
        Some(Ok(bytes)) => bytes,
        Some(Err(cause)) => {
            desk.note(
                &UNREADABLE,
                &span,
                format!("`{file}`: {cause}"),
                "name a file beside the problem file",
            );
            return None;
        }
        None => {
            desk.note(
                &UNREADABLE,
                &span,
                format!("`{file}` was not read"),
                "name a file beside the problem file",
            );
            return None;
        }
    };
    let mut bad = |message: String, mend: &str| {
        desk.note(&BAD_CSV, &span, format!("`{file}`: {message}"), mend);
        None
    };
    let names: Vec<&str> = part
        .list("columns")
        .iter()
        .filter_map(Entry::text)
        .collect();
    let mut reader = csv::ReaderBuilder::new()
        .trim(csv::Trim::All)
        .comment(Some(b'#'))
        .from_reader(bytes.as_slice());
    let heads: Vec<String> = match reader.headers() {
        Ok(heads) => heads
            .iter()
            .map(|head| head.trim_start_matches('\u{feff}').to_owned())
            .collect(),
        Err(error) => {
            return bad(
                error.to_string(),
                "the first line holds the heads of the columns",
            );
        }
    };
    let columns: Vec<usize> = if names.is_empty() {
        vec![0, 1]
    } else {
        let found: Option<Vec<usize>> = names
            .iter()
            .map(|name| heads.iter().position(|head| head == name))
            .collect();
        match found {
            Some(found) if found.len() == 2 => found,
            Some(_) => {
                return bad(
                    "`columns` names two columns".to_owned(),
                    "argument first, value second",
                );
            }
            None => {
                return bad(
                    format!(
                        "no column of that name; its columns are: {}",
                        heads.join(", ")
                    ),
                    "mend `columns`",
                );
            }
        }
    };
    let mut points = Vec::new();
    for (row, record) in reader.records().enumerate() {
        let record = match record {
            Ok(record) => record,
            Err(error) => return bad(error.to_string(), "every line has the same number of cells"),
        };
        let cell = |column: usize| {
            record
                .get(column)
                .and_then(|cell| cell.parse::<f64>().ok())
                .filter(|value| value.is_finite())
        };
        match (cell(columns[0]), cell(columns[1])) {
            (Some(x), Some(y)) => points.push((x, y)),
            _ => {
                let line = record
                    .position()
                    .map_or(row as u64 + 2, csv::Position::line);
                return bad(
                    format!("line {line} has a cell that is not a finite number"),
                    "decimal point, no units in cells",
                );
            }
        }
        if points.len() > MAX_POINTS {
            return bad(format!("more than {MAX_POINTS} lines"), "thin the table");
        }
    }
    Some(points)
}

/// The table of names; each may be defined once.
fn names(desk: &mut Desk, section: &Section, inputs: &[Input], lookups: &[Lookup]) -> Table {
    let mut table = Table::default();
    let mut seen: Vec<&str> = Vec::new();
    for key in ["input", "lookup", "quantity", "state", "switch"] {
        for part in section.sections(key) {
            if let Some(symbol) = part.text("symbol") {
                desk.first_use(&mut seen, symbol, &part.place_of("symbol"), "symbol");
            }
        }
    }
    for input in inputs {
        table
            .inputs
            .insert(input.symbol.clone(), typed(&input.unit));
    }
    // Inputs and lookups with a fault of their own are still known by name, lest every use be reported too.
    for part in section.sections("input") {
        table
            .inputs
            .entry(part.required("symbol"))
            .or_insert(Type::Zero);
    }
    for lookup in lookups {
        table.lookups.insert(
            lookup.symbol.clone(),
            (lookup.argument_unit.dimension(), lookup.unit.dimension()),
        );
    }
    for part in section.sections("lookup") {
        let dimension = |key: &str| {
            part.text(key)
                .and_then(|text| Unit::parse(text).ok())
                .map(|unit| unit.dimension())
        };
        if let (Some(argument), Some(value)) = (dimension("argument_unit"), dimension("unit")) {
            table
                .lookups
                .entry(part.required("symbol"))
                .or_insert((argument, value));
        }
    }
    for key in ["quantity", "state"] {
        for part in section.sections(key) {
            let unit = part.text("unit").and_then(|text| Unit::parse(text).ok());
            table.others.insert(
                part.required("symbol"),
                unit.map_or(Type::Zero, |unit| typed(&unit)),
            );
        }
    }
    for part in section.sections("switch") {
        table.others.insert(part.required("symbol"), Type::plain());
    }
    for part in section.sections("event") {
        table.events.push(part.required("id"));
    }
    if let Some(part) = section.section("march") {
        let symbol = part.required("variable");
        if seen.contains(&symbol.as_str()) {
            desk.note(
                &DUPLICATE,
                &part.place_of("variable"),
                format!("symbol `{symbol}` is defined twice"),
                "rename one of them",
            );
        }
        if let Some(unit) = desk.unit(part, "unit") {
            table.variable = Some(unit.dimension());
            table.others.insert(symbol, typed(&unit));
        }
    }
    let mut events = Vec::new();
    for part in section.sections("event") {
        if let Some(id) = part.text("id") {
            desk.first_use(&mut events, id, &part.place_of("id"), "event");
        }
    }
    table
}

fn typed(unit: &Unit) -> Type {
    Type::Quantity {
        dimension: unit.dimension(),
        absolute: unit.kind() != Kind::Plain,
    }
}

/// Quantities in an order in which each uses only earlier ones.
fn quantities(desk: &mut Desk, section: &Section, table: &Table) -> Vec<NamedQuantity> {
    let scope = Scope {
        table,
        realm: Realm::Model,
    };
    let mut found: Vec<NamedQuantity> = Vec::new();
    for part in section.sections("quantity") {
        let unit = desk.unit(part, "unit");
        let (Some(unit), Some(entry)) = (unit, part.entry("formula")) else {
            continue;
        };
        let symbol = part.required("symbol");
        if let Some((formula, kind)) =
            desk.formula_of(entry, &scope, unit.dimension(), &format!("`{symbol}`"))
        {
            refuse_difference(desk, entry, kind, &unit);
            found.push(NamedQuantity {
                symbol,
                meaning: part.required("meaning"),
                unit,
                formula,
                source: part.owned("source"),
            });
        }
    }
    ordered(desk, found)
}

/// A difference of absolutes cannot be printed on a scale with a zero of its own.
pub fn refuse_difference(desk: &mut Desk, entry: &Entry, kind: Type, unit: &Unit) {
    if let Type::Quantity {
        absolute: false, ..
    } = kind
        && matches!(unit.kind(), Kind::AbsoluteTemperature { .. })
    {
        let message = format!(
            "this formula is a difference, which has no value in {}",
            unit.print()
        );
        desk.note(
            &crate::diagnostic::ABSOLUTE_DIFFERENCE,
            &entry.span,
            message,
            format!("give the unit {}", unit.difference_unit()),
        );
    }
}

/// The first in the file that uses only those before it comes next, again and again.
fn ordered(desk: &mut Desk, found: Vec<NamedQuantity>) -> Vec<NamedQuantity> {
    let index: BTreeMap<&str, usize> = found
        .iter()
        .enumerate()
        .map(|(index, quantity)| (quantity.symbol.as_str(), index))
        .collect();
    let mut users: Vec<Vec<usize>> = vec![Vec::new(); found.len()];
    let mut lacking = vec![0; found.len()];
    for (user, quantity) in found.iter().enumerate() {
        let used: BTreeSet<usize> = quantity
            .formula
            .tree
            .symbols()
            .iter()
            .filter_map(|(symbol, _)| index.get(*symbol).copied())
            .collect();
        lacking[user] = used.len();
        used.iter().for_each(|used| users[*used].push(user));
    }
    let mut ready: BTreeSet<usize> = (0..found.len()).filter(|at| lacking[*at] == 0).collect();
    let mut order = Vec::new();
    while let Some(next) = ready.pop_first() {
        order.push(next);
        for user in &users[next] {
            lacking[*user] -= 1;
            if lacking[*user] == 0 {
                ready.insert(*user);
            }
        }
    }
    let mut found: Vec<Option<NamedQuantity>> = found.into_iter().map(Some).collect();
    let done: Vec<NamedQuantity> = order
        .into_iter()
        .filter_map(|at| found[at].take())
        .collect();
    let waiting: Vec<NamedQuantity> = found.into_iter().flatten().collect();
    if let Some(first) = waiting.first() {
        let circle = waiting
            .iter()
            .map(|quantity| quantity.symbol.as_str())
            .collect::<Vec<_>>()
            .join(", ");
        let mend = "break the circle: one of them must be a state or be computed from others";
        desk.note(
            &CYCLE,
            &first.formula.span,
            format!("these quantities are defined through each other: {circle}"),
            mend,
        );
    }
    done
}

fn states(desk: &mut Desk, section: &Section, table: &Table) -> Vec<State> {
    let model = Scope {
        table,
        realm: Realm::Model,
    };
    let inputs = Scope {
        table,
        realm: Realm::Inputs,
    };
    let mut found = Vec::new();
    for part in section.sections("state") {
        let Some(unit) = desk.unit(part, "unit") else {
            continue;
        };
        let symbol = part.required("symbol");
        let rate_dimension = table
            .variable
            .and_then(|variable| unit.dimension().over(variable));
        let initial = part.entry("initial").and_then(|entry| {
            desk.expression(entry, &inputs, unit.dimension(), &format!("`{symbol}`"))
        });
        let rate = match (part.entry("rate"), rate_dimension) {
            (Some(entry), Some(dimension)) => desk
                .formula_of(entry, &model, dimension, &format!("the rate of `{symbol}`"))
                .map(|found| found.0),
            _ => None,
        };
        let scale = part
            .entry("scale")
            .and_then(|entry| desk.quantity(entry, Some(unit.dimension()), Use::Size))
            .map(|measured| measured.value_si);
        let within = match part.list("within") {
            [low, high] => {
                let what = format!("`{symbol}`");
                let (low, high) = (
                    desk.expression(low, &inputs, unit.dimension(), &what),
                    desk.expression(high, &inputs, unit.dimension(), &what),
                );
                low.zip(high)
            }
            _ => None,
        };
        if matches!(initial, Some(Expression::Quantity { .. }))
            && part.entry("initial_source").is_none()
        {
            let mend = "add initial_source = \"…\", or make the initial value an input";
            desk.note(
                &MISSING_KEY,
                &part.place_of("initial"),
                format!("the initial value of `{symbol}` has no source"),
                mend,
            );
        }
        if let (Some(initial), Some(rate)) = (initial, rate) {
            found.push(State {
                symbol,
                meaning: part.required("meaning"),
                unit,
                initial,
                initial_source: part.owned("initial_source"),
                rate,
                source: part.owned("source"),
                within,
                scale,
            });
        }
    }
    found
}

fn event(desk: &mut Desk, part: &Section, table: &Table, section: &Section) -> Option<Event> {
    let scope = Scope {
        table,
        realm: Realm::Model,
    };
    let when = part
        .entry("when")
        .and_then(|entry| desk.condition(entry, &scope));
    let action = match (part.text("action"), part.entry("set")) {
        (Some("set"), Some(_)) => Action::Set(assignments(desk, part, table, section)),
        (Some("set"), None) => {
            desk.note(
                &MISSING_KEY,
                &part.span,
                "an event with action \"set\" needs `set`",
                "add a line like: set = { cooling = 0 }",
            );
            return None;
        }
        (_, Some(_)) => {
            desk.note(
                &CONTRADICTION,
                &part.place_of("set"),
                "`set` goes with action = \"set\"",
                "add action = \"set\", or remove `set`",
            );
            return None;
        }
        (Some("stop"), None) => Action::Stop,
        _ => Action::Note,
    };
    Some(Event {
        id: part.required("id"),
        text: part.owned("text"),
        when: when?,
        action,
        once: part.truth("once").unwrap_or(false),
        at_start: part.truth("at_start"),
        span: part.span.clone(),
    })
}

fn assignments(
    desk: &mut Desk,
    part: &Section,
    table: &Table,
    section: &Section,
) -> Vec<(String, Formula)> {
    let scope = Scope {
        table,
        realm: Realm::Model,
    };
    let settable: Vec<String> = ["state", "switch"]
        .iter()
        .flat_map(|key| section.sections(key))
        .map(|part| part.required("symbol"))
        .collect();
    let mut found = Vec::new();
    for (symbol, entry) in part.map("set") {
        if !settable.contains(symbol) {
            let mend = suggestion(
                symbol,
                settable.iter().map(String::as_str),
                "only states and switches can be set",
            );
            desk.note(
                &UNKNOWN_ID,
                &entry.span,
                format!("`{symbol}` is not a state or switch"),
                mend,
            );
            continue;
        }
        let Some(Type::Quantity { dimension, .. }) = table.others.get(symbol).copied() else {
            continue;
        };
        // A bare number is a formula too.
        let formula = match &entry.value {
            Value::Number(value) => number_formula(*value, dimension, &entry.span),
            _ => desk
                .formula_of(entry, &scope, dimension, &format!("`{symbol}`"))
                .map(|found| found.0),
        };
        match formula {
            Some(formula) => found.push((symbol.clone(), formula)),
            None if matches!(entry.value, Value::Number(_)) => {
                let message = format!(
                    "`{symbol}` is {}; a bare number is dimensionless",
                    describe(dimension)
                );
                desk.note(
                    &WRONG_TYPE,
                    &entry.span,
                    message,
                    "name an input with this value",
                );
            }
            None => {}
        }
    }
    found
}

fn number_formula(value: f64, dimension: Dimension, span: &Range<usize>) -> Option<Formula> {
    if value != 0.0 && !dimension.is_none() {
        return None;
    }
    let text = crate::float::shortest(value);
    let tree: Tree = parse(&text).ok()?;
    Some(Formula {
        text,
        tree,
        dimension,
        span: span.clone(),
    })
}

fn march(desk: &mut Desk, part: &Section, table: &Table) -> Option<March> {
    let unit = part.text("unit").and_then(|text| Unit::parse(text).ok())?;
    let inputs = Scope {
        table,
        realm: Realm::Inputs,
    };
    let ends: Vec<Option<Expression>> = ["from", "to"]
        .iter()
        .map(|key| {
            part.entry(key).and_then(|entry| {
                desk.expression(entry, &inputs, unit.dimension(), "the independent variable")
            })
        })
        .collect();
    let method = part.required("method");
    let names: Vec<&str> = crate::march::METHODS
        .iter()
        .map(|method| method.name)
        .collect();
    if !method.is_empty() && crate::march::method(&method).is_none() {
        let mend = suggestion(
            &method,
            names.iter().copied(),
            &format!("methods are: {}", names.join(", ")),
        );
        desk.note(
            &UNKNOWN_ID,
            &part.place_of("method"),
            format!("unknown method `{method}`"),
            mend,
        );
    }
    let grid = grid(desk, part, &unit);
    let report_every = part
        .entry("report_every")
        .and_then(|entry| positive(desk, entry, &unit))
        .map(|measured| measured.value_si);
    let mut ends = ends.into_iter();
    Some(March {
        variable: part.required("variable"),
        from: ends.next()??,
        to: ends.next()??,
        unit,
        method,
        grid: grid?,
        levels: part.integer("levels").unwrap_or(3) as u32,
        report_every,
        span: part.span.clone(),
    })
}

fn positive(desk: &mut Desk, entry: &Entry, unit: &Unit) -> Option<Measured> {
    let measured = desk.quantity(entry, Some(unit.dimension()), Use::Size)?;
    if measured.value_si <= 0.0 {
        desk.note(
            &BAD_GRID,
            &entry.span,
            "a step is larger than zero",
            "the direction follows from `from` and `to`",
        );
        return None;
    }
    Some(measured)
}

fn grid(desk: &mut Desk, part: &Section, unit: &Unit) -> Option<GridSpec> {
    let given: Vec<&str> = ["step", "segments", "grid_tolerance"]
        .into_iter()
        .filter(|key| part.entry(key).is_some())
        .collect();
    match given[..] {
        ["step"] => {
            let Measured {
                value,
                unit,
                value_si,
            } = positive(desk, part.entry("step")?, unit)?;
            Some(GridSpec::Step {
                value,
                unit,
                value_si,
            })
        }
        ["segments"] => {
            let mut segments = Vec::new();
            for segment in part.sections("segments") {
                let to = segment
                    .entry("to")
                    .and_then(|entry| desk.quantity(entry, Some(unit.dimension()), Use::Point));
                let step = segment
                    .entry("step")
                    .and_then(|entry| positive(desk, entry, unit));
                let (to, step) = (to?, step?);
                segments.push(SegmentSpec {
                    to: to.value,
                    to_unit: to.unit,
                    to_si: to.value_si,
                    step: step.value,
                    step_unit: step.unit,
                    step_si: step.value_si,
                });
            }
            Some(GridSpec::Segments(segments))
        }
        ["grid_tolerance"] => part
            .number("grid_tolerance")
            .map(|tolerance| GridSpec::Chosen { tolerance }),
        [] => {
            desk.note(
                &MISSING_KEY,
                &part.span,
                "[march] lacks a grid",
                "add a line like: step = \"10 s\"",
            );
            None
        }
        _ => {
            desk.note(
                &CONTRADICTION,
                &part.place_of(given[1]),
                format!("{} exclude each other", given.join(" and ")),
                "keep one of them",
            );
            None
        }
    }
}

/// Inputs that no formula uses are as likely a slip as a spare.
pub fn warn_of_unused(
    desk: &mut Desk,
    section: &Section,
    physics: &Physics,
    judging: &Judging,
    checks: &Checks,
) {
    let mut used: BTreeMap<String, ()> = BTreeMap::new();
    let mut note = |formula: &Formula| {
        for (symbol, _) in formula.tree.symbols() {
            used.insert(symbol.to_owned(), ());
        }
    };
    let mut note_expression = |expression: &Expression| {
        if let Expression::Formula(formula) = expression {
            note(formula);
        }
    };
    for state in &physics.states {
        note_expression(&state.initial);
        if let Some((low, high)) = &state.within {
            note_expression(low);
            note_expression(high);
        }
    }
    if let Some(march) = &physics.march {
        note_expression(&march.from);
        note_expression(&march.to);
    }
    for criterion in &judging.criteria {
        criterion
            .limit
            .expressions()
            .into_iter()
            .for_each(&mut note_expression);
    }
    physics
        .quantities
        .iter()
        .for_each(|quantity| note(&quantity.formula));
    physics.states.iter().for_each(|state| note(&state.rate));
    physics.events.iter().for_each(|event| {
        note(&event.when);
        if let Action::Set(list) = &event.action {
            list.iter().for_each(|(_, formula)| note(formula));
        }
    });
    judging
        .results
        .iter()
        .for_each(|result| note(&result.formula));
    checks
        .balances
        .iter()
        .for_each(|balance| note(&balance.formula));
    checks
        .closed_forms
        .iter()
        .for_each(|form| note(&form.formula));
    for lookup in &physics.lookups {
        if let Some(factor) = &lookup.factor {
            used.insert(factor.clone(), ());
            if !physics.inputs.iter().any(|input| &input.symbol == factor) {
                let part = section
                    .sections("lookup")
                    .iter()
                    .find(|part| part.text("symbol") == Some(&lookup.symbol));
                let span = part.map_or(0..0, |part| part.place_of("factor"));
                desk.note(
                    &UNKNOWN_ID,
                    &span,
                    format!("`{factor}` is not an input"),
                    "make the factor an input with a source",
                );
            }
        }
    }
    for part in section.sections("input") {
        let symbol = part.required("symbol");
        if !symbol.is_empty() && !used.contains_key(&symbol) {
            desk.note(
                &UNUSED_INPUT,
                &part.place_of("symbol"),
                format!("nothing uses the input `{symbol}`"),
                "use it, or remove it",
            );
        }
    }
}
