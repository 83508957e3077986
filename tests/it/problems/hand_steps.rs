//! Steps in exact fractions, through the whole program: `reference-cases/hand_steps.json`.
//!
//! Source: exact arithmetic on the defining coefficients of each method; the file names the books.

use std::fmt::Write;

use countermarch::march;
use serde_json::Value;

use crate::reference::{self, fraction, head, ladder, solve, text};

/// Names of the file for methods, where ours differ.
const METHOD_NAMES: &[(&str, &str)] = &[("ralston", "ralston2")];

/// Growing round-off of a few dozen operations, in units of the largest value of the march.
const ROUND_OFF: f64 = 40.0 * f64::EPSILON;

/// Right sides of the textbook's equations, as formulas.
const TEXTBOOK_RATES: &[(&str, &str)] = &[
    ("y' = y - t^2 + 1, y(0) = 1/2, h = 1/5", "y - t^2 + 1"),
    ("v' = 9.8 - (12.5/68.1)*v, v(0) = 0", "9.8 - (12.5/68.1)*y"),
    (
        "y' = -2 t^3 + 12 t^2 - 20 t + 8.5, y(0) = 1",
        "-2*t^3 + 12*t^2 - 20*t + 8.5",
    ),
    (
        "y' = 4 exp(0.8 t) - 0.5 y, y(0) = 2",
        "4*exp(0.8*t) - 0.5*y",
    ),
];

fn our_name(theirs: &str) -> &str {
    let name = METHOD_NAMES
        .iter()
        .find(|(other, _)| *other == theirs)
        .map_or(theirs, |(_, ours)| ours);
    assert!(march::method(name).is_some(), "no method {name}");
    name
}

fn list(value: &Value) -> &[Value] {
    value
        .as_array()
        .unwrap_or_else(|| panic!("an array, not {value}"))
}

fn decimal(value: &Value) -> f64 {
    fraction(text(value))
}

/// A march of one of the file's problems, with every state's value wanted at `times`.
fn problem_file(
    problem: &Value,
    method: &str,
    step: f64,
    end: f64,
    levels: u32,
    times: &[f64],
) -> String {
    let mut file = head(text(&problem["id"]));
    for state in list(&problem["states"]) {
        reference::state(
            &mut file,
            text(&state["symbol"]),
            decimal(&state["initial"]),
            text(&state["rate"]),
        );
    }
    reference::march(
        &mut file,
        "t",
        (decimal(&problem["start"]), end),
        step.abs(),
        our_name(method),
        levels,
    );
    for (index, time) in times.iter().enumerate() {
        for state in list(&problem["states"]) {
            let symbol = text(&state["symbol"]);
            reference::result(
                &mut file,
                &format!("{symbol}_{index}"),
                &format!("value_at({symbol}, {time:?})"),
            );
        }
    }
    file
}

fn agrees(what: &str, found: f64, expected: f64, scale: f64, misses: &mut String) {
    if (found - expected).abs() > ROUND_OFF * scale {
        let _ = writeln!(misses, "{what}: {found:?}, expected {expected:?}");
    }
}

#[test]
fn val_every_step_of_the_hand_calculations() {
    let file = reference::read_json("hand_steps.json");
    let (mut misses, mut compared) = (String::new(), 0);
    for problem in list(&file["problems"]) {
        let step = decimal(&problem["h"]);
        for (method, record) in problem["results"].as_object().expect("results") {
            let steps = list(&record["steps"]);
            let times: Vec<f64> = steps.iter().map(|step| decimal(&step["t"])).collect();
            let trial = solve(&problem_file(
                problem,
                method,
                step,
                times[times.len() - 1],
                3,
                &times,
            ));
            let values = steps.iter().flat_map(|step| list(&step["values"]));
            let scale = values
                .map(|value| decimal(&value["decimal"]).abs())
                .fold(1.0, f64::max);
            for (index, expected) in steps.iter().enumerate() {
                for (state, value) in list(&problem["states"])
                    .iter()
                    .zip(list(&expected["values"]))
                {
                    let result = format!("{}_{index}", text(&state["symbol"]));
                    let found = ladder(&trial, &result).reported().expect("a value");
                    let what = format!("{} by {method}, {result}", text(&problem["id"]));
                    agrees(&what, found, decimal(&value["decimal"]), scale, &mut misses);
                    compared += 1;
                }
            }
            // The record shows the first step in full: its slopes are the stages of the hand calculation.
            let trace = &trial.cases[0].worked[0].trace;
            for (stage, expected) in trace.stages.iter().zip(list(&record["first_step_stages"])) {
                for (slope, value) in stage.slope.iter().zip(list(expected)) {
                    let what =
                        format!("{} by {method}, {}", text(&problem["id"]), stage.slope_name);
                    agrees(
                        &what,
                        *slope,
                        decimal(&value["decimal"]),
                        scale,
                        &mut misses,
                    );
                    compared += 1;
                }
            }
            assert_eq!(
                trace.stages.len(),
                list(&record["first_step_stages"]).len(),
                "stages of {method}"
            );
        }
    }
    assert!(misses.is_empty(), "\n{misses}");
    assert!(compared > 500, "only {compared} values were compared");
}

#[test]
fn val_step_halving_records() {
    let file = reference::read_json("hand_steps.json");
    let mut misses = String::new();
    for record in list(&file["halving"]) {
        let id = text(&record["id"]);
        let problem = list(&file["problems"])
            .iter()
            .find(|problem| problem["id"] == record["problem"])
            .expect("its problem");
        let end = decimal(&record["end"]);
        // Observed orders of the first and of the second triple: ladders of three and of four levels.
        let ladders = [3, 4].map(|levels| {
            solve(&problem_file(
                problem,
                text(&record["method"]),
                decimal(&record["h"][0]),
                end,
                levels,
                &[end],
            ))
        });
        for (state, symbol) in list(&record["states"]).iter().enumerate() {
            let result = format!("{}_0", text(symbol));
            let values = list(&record["values"]);
            for (level, value) in values.iter().enumerate() {
                let found = ladder(&ladders[1], &result).values[level].expect("a value");
                agrees(
                    &format!("{id} level {level}"),
                    found,
                    decimal(&value[state]),
                    1.0,
                    &mut misses,
                );
            }
            for (triple, trial) in ladders.iter().enumerate() {
                let found = ladder(trial, &result).observed_order;
                let Some(expected) = record["observed_order"][state][triple].as_str() else {
                    continue;
                };
                // Printed to twelve digits; differences of nearly equal values cost the rest.
                let error = (found.unwrap_or(f64::NAN) - fraction(expected)).abs();
                if error.is_nan() || error > 1e-8 {
                    let _ = writeln!(
                        misses,
                        "{id} observed order {triple}: {found:?}, expected {expected}"
                    );
                }
                let extrapolated = decimal(&record["richardson"][state][triple + 1]);
                let word = ladder(trial, &result).convergence;
                if word == countermarch::evidence::Convergence::Asymptotic {
                    agrees(
                        &format!("{id} f*"),
                        ladder(trial, &result).extrapolated.expect("f*"),
                        extrapolated,
                        1.0,
                        &mut misses,
                    );
                }
            }
        }
    }
    assert!(misses.is_empty(), "\n{misses}");
}

#[test]
fn val_growth_of_one_step() {
    // y' = λ y with h = 1: after a step, y is the method's growth factor at z = λ.
    let file = reference::read_json("hand_steps.json");
    let mut misses = String::new();
    for entry in list(&file["stability"]) {
        for (method, growth) in entry["growth_per_step"]
            .as_object()
            .expect("growth factors")
        {
            let mut problem = head("growth of one step");
            reference::input(&mut problem, "z", decimal(&entry["z"]));
            reference::state(&mut problem, "y", 1.0, "z*y");
            reference::march(&mut problem, "t", (0.0, 1.0), 1.0, our_name(method), 3);
            reference::result(&mut problem, "growth", "final(y)");
            let found = ladder(&solve(&problem), "growth")
                .reported()
                .expect("a value");
            let expected = decimal(growth);
            agrees(
                &format!("{method} at z = {}", entry["z"]),
                found,
                expected,
                expected.abs().max(1.0),
                &mut misses,
            );
        }
    }
    assert!(misses.is_empty(), "\n{misses}");
}

#[test]
fn val_textbook_tables() {
    let file = reference::read_json("hand_steps.json");
    let mut misses = String::new();
    for entry in list(&file["textbook"]) {
        let stated = text(&entry["problem"]);
        let (_, rate) = TEXTBOOK_RATES
            .iter()
            .find(|(problem, _)| *problem == stated)
            .unwrap_or_else(|| panic!("no formula for {stated}"));
        let initial = stated
            .split_once("(0) = ")
            .and_then(|(_, rest)| rest.split(',').next())
            .expect("an initial value");
        let steps = list(&entry["steps"]);
        let times: Vec<f64> = steps.iter().map(|step| decimal(&step["t"])).collect();
        let mut problem = head("textbook");
        reference::state(&mut problem, "y", fraction(initial), rate);
        reference::march(
            &mut problem,
            "t",
            (0.0, times[times.len() - 1]),
            times[0],
            our_name(text(&entry["method"])),
            3,
        );
        for (index, time) in times.iter().enumerate() {
            reference::result(
                &mut problem,
                &format!("y_{index}"),
                &format!("value_at(y, {time:?})"),
            );
        }
        let trial = solve(&problem);
        for (index, step) in steps.iter().enumerate() {
            let found = ladder(&trial, &format!("y_{index}"))
                .reported()
                .expect("a value");
            let expected = decimal(&step["value"]);
            agrees(
                &format!("{} of {stated} at {}", entry["method"], step["t"]),
                found,
                expected,
                expected.abs().max(10.0),
                &mut misses,
            );
        }
    }
    assert!(misses.is_empty(), "\n{misses}");
}
