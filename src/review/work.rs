//! How much work a stranger's problem asks for, counted before any of it is done.
//!
//! Owns: the estimate and its default limit. An upper estimate, not a measurement: one unit is about one
//! arithmetic operation of a formula.

use crate::calculation::{Compiled, MAX_REPORT_ROWS};
use crate::march;
use crate::problem::model::{Case, Expression, GridSpec, Model};

/// Most work that a recheck does unasked: a few minutes (measured: 3.4e8 operations in 2.6 s by a build that is
/// optimised little).
pub const DEFAULT_LIMIT: u64 = 20_000_000_000;

/// Bytes of formula text for one operation (judged from the demonstrations: names, spaces, parentheses).
const BYTES_PER_OPERATION: f64 = 4.0;
/// Typesetting a printed number costs about as much as this many operations (measured: 10 µs to 5 ns).
const OPERATIONS_PER_PRINTED_NUMBER: f64 = 2000.0;
/// Iterations of an implicit step (common practice, no source).
const NEWTON_ITERATIONS: f64 = 4.0;
/// Marches of the requested method, its neighbours and the alternate, in marches of the requested one (judged from
/// their stages: Heun's method with Euler's, Kutta's third and a pair of order five).
const MARCHES: f64 = 4.0;
/// Rows for curves beside the printed ones.
const CURVE_ROWS: f64 = 240.0;

/// Work of solving and printing `model`, in operations.
pub fn of(model: &Model) -> f64 {
    let compiled = Compiled::new(model);
    let step_cost = step_cost(model, &compiled);
    // Each level has twice the steps of the one before.
    let ladder = (0..model.march.levels).fold(0.0, |sum, _| 2.0 * sum + 1.0);
    let columns = (model.states.len() + model.quantities.len() + 1) as f64;
    let case_work = |case: &Case| {
        let value = |expression: &Expression| compiled.of_inputs(expression, &case.values);
        let span = (value(&model.march.to) - value(&model.march.from)).abs();
        let marching = steps(model, &value, span) * ladder * step_cost * passes(model) * MARCHES;
        let rows = printed_rows(model, span) + CURVE_ROWS * f64::from(model.march.levels);
        marching + rows * columns * OPERATIONS_PER_PRINTED_NUMBER
    };
    // What is not finite is refused when it is laid out, before it costs anything.
    model
        .cases
        .iter()
        .map(case_work)
        .filter(|work| work.is_finite())
        .sum()
}

/// Operations of one step: slopes, and what events and results look at.
fn step_cost(model: &Model, compiled: &Compiled) -> f64 {
    let n_states = model.states.len() as f64;
    let slope = (compiled.operations() as f64).max(n_states);
    let operations_in = |text: &str| text.len() as f64 / BYTES_PER_OPERATION;
    let quantities: f64 = model
        .quantities
        .iter()
        .map(|quantity| operations_in(&quantity.formula.text))
        .sum();
    let watched = model.events.iter().map(|event| &event.when);
    let wanted = model.results.iter().map(|result| &result.formula);
    let looks: f64 = watched
        .chain(wanted)
        .map(|formula| operations_in(&formula.text) + quantities)
        .sum();
    let Some(method) = march::method(&model.march.method) else {
        return slope + looks;
    };
    let slopes = f64::from(method.stages) * slope;
    if method.is_implicit() {
        let unknowns = n_states * f64::from(method.stages);
        NEWTON_ITERATIONS * (slopes + unknowns * unknowns)
            + n_states * slope
            + unknowns * unknowns * unknowns
            + looks
    } else {
        slopes + looks
    }
}

/// Steps of the requested grid.
fn steps(model: &Model, value: &impl Fn(&Expression) -> f64, span: f64) -> f64 {
    match &model.march.grid {
        GridSpec::Step { value_si, .. } => span / value_si,
        GridSpec::Segments(segments) => {
            let mut from = value(&model.march.from);
            let mut sum = 0.0;
            for segment in segments {
                sum += (segment.to_si - from).abs() / segment.step_si;
                from = segment.to_si;
            }
            sum
        }
        // Not known before it is chosen; no chosen grid has more.
        GridSpec::Chosen { .. } => march::CHOICE_LIMIT as f64,
    }
}

/// Marches of one level: an instant that depends on another result needs one more.
fn passes(model: &Model) -> f64 {
    let nested = |text: &str| text.matches("value_at").count();
    let formulas = model.results.iter().map(|result| &result.formula.text);
    1.0 + formulas.map(|text| nested(text)).max().unwrap_or(0) as f64
}

fn printed_rows(model: &Model, span: f64) -> f64 {
    const ROWS_WHERE_NOT_STATED: f64 = 30.0;
    let rows = model
        .march
        .report_every
        .map_or(ROWS_WHERE_NOT_STATED, |spacing| span / spacing);
    rows.min(MAX_REPORT_ROWS)
}
