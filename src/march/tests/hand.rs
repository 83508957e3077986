//! Steps worked by hand in exact fractions: `tests/reference-cases/hand_steps.json`.

use super::*;
use serde_json::Value as Json;

fn hand_steps() -> Json {
    serde_json::from_str(include_str!(
        "../../../tests/reference-cases/hand_steps.json"
    ))
    .unwrap()
}

/// The method that the reference file calls `name`, if it is registered.
fn named(name: &str) -> Option<&'static Method> {
    method(if name == "ralston" { "ralston2" } else { name })
}

/// "n/d" or a decimal.
fn number(text: &Json) -> f64 {
    let text = text.as_str().unwrap();
    match text.split_once('/') {
        Some((n, d)) => n.parse::<f64>().unwrap() / d.parse::<f64>().unwrap(),
        None => text.parse().unwrap(),
    }
}

fn list(json: &Json) -> &Vec<Json> {
    json.as_array().unwrap()
}

fn system_of(problem: &Json) -> (Problem, Vec<f64>) {
    let states = list(&problem["states"]);
    let text = |json: &Json| json.as_str().unwrap().to_owned();
    let mut names = vec![text(&problem["independent_variable"])];
    names.extend(states.iter().map(|state| text(&state["symbol"])));
    let rates: Vec<String> = states.iter().map(|state| text(&state["rate"])).collect();
    let y0 = states
        .iter()
        .map(|state| number(&state["initial"]))
        .collect();
    (problem_of_text(&names, &rates), y0)
}

#[test]
fn hand_steps_and_stages_in_exact_fractions() {
    let reference = hand_steps();
    let mut checked = 0;
    for problem in list(&reference["problems"]) {
        let (mut system, y0) = system_of(problem);
        let (start, h) = (number(&problem["start"]), number(&problem["h"]));
        for (name, result) in problem["results"].as_object().unwrap() {
            let Some(method) = named(name) else { continue };
            let trace = trace_step(&mut system, method, start, &y0, h).unwrap();
            let stages = list(&result["first_step_stages"]);
            assert_eq!(trace.stages.len(), stages.len());
            for (stage, expected) in trace.stages.iter().zip(stages) {
                for (slope, expected) in stage.slope.iter().zip(list(expected)) {
                    let expected = number(&expected["decimal"]);
                    assert_close(*slope, expected, 1e-15 * expected.abs().max(1.0));
                }
            }
            let steps = list(&result["steps"]);
            let end = start + h * (steps.len() - 1) as f64;
            let grid = Grid::uniform(start, end, h.abs()).unwrap();
            let mut plan = plan(&y0);
            plan.report_times = steps.iter().map(|step| number(&step["t"])).collect();
            let outcome = march(&mut system, method, &grid, 0, &plan);
            assert_eq!(outcome.rows.len(), steps.len(), "{} {name}", problem["id"]);
            for (row, step) in outcome.rows.iter().zip(steps) {
                for (y, expected) in row.y.iter().zip(list(&step["values"])) {
                    let expected = number(&expected["decimal"]);
                    assert_close(*y, expected, 4e-15 * expected.abs().max(1.0));
                    checked += 1;
                }
            }
        }
    }
    assert!(checked >= 250, "only {checked} values checked");
}

#[test]
fn hand_step_halving_records() {
    let reference = hand_steps();
    let problems = list(&reference["problems"]);
    let mut checked = 0;
    for record in list(&reference["halving"]) {
        let Some(method) = named(record["method"].as_str().unwrap()) else {
            continue;
        };
        let problem = problems
            .iter()
            .find(|p| p["id"] == record["problem"])
            .unwrap();
        let (mut system, y0) = system_of(problem);
        let (start, end) = (number(&problem["start"]), number(&record["end"]));
        let steps = list(&record["h"]);
        let grid = Grid::uniform(start, end, number(&steps[0]).abs()).unwrap();
        let mut found: Vec<Vec<f64>> = Vec::new();
        for level in 0..steps.len() as u32 {
            let outcome = march(&mut system, method, &grid, level, &plan(&y0));
            assert_eq!(
                outcome.steps,
                record["steps"][level as usize].as_u64().unwrap()
            );
            found.push(outcome.y);
        }
        for state in 0..y0.len() {
            let record_of = |key: &str, level: usize| number(&record[key][state][level]);
            for (level, values) in found.iter().enumerate() {
                let expected = number(&record["values"][level][state]);
                assert_close(values[state], expected, 4e-15 * expected.abs().max(1.0));
                checked += 1;
            }
            for level in 0..found.len() - 2 {
                if record["observed_order"][state][level].is_null() {
                    continue;
                }
                let (a, b, c) = (
                    found[level][state],
                    found[level + 1][state],
                    found[level + 2][state],
                );
                assert_close(
                    order(a - b, b - c),
                    record_of("observed_order", level),
                    1e-4,
                );
            }
        }
    }
    assert!(checked >= 120, "only {checked} values checked");
}

/// Burden & Faires, Numerical Analysis, chapter 5: y' = y − t² + 1, y(0) = 1/2, h = 1/5, seven decimals.
#[test]
fn val_textbook_table() {
    let reference = hand_steps();
    let mut checked = 0;
    for table in list(&reference["textbook"]) {
        if !table["problem"]
            .as_str()
            .unwrap()
            .starts_with("y' = y - t^2 + 1")
        {
            continue;
        }
        let Some(method) = named(table["method"].as_str().unwrap()) else {
            continue;
        };
        let mut system = Problem::new(1, |t, y, _, out| out[0] = y[0] - t * t + 1.0);
        let mut plan = plan(&[0.5]);
        let grid = Grid::uniform(0.0, 2.0, 0.2).unwrap();
        plan.report_times = list(&table["steps"])
            .iter()
            .map(|s| number(&s["t"]))
            .collect();
        let outcome = march(&mut system, method, &grid, 0, &plan);
        for (row, step) in outcome.rows.iter().zip(list(&table["steps"])) {
            assert_close(row.y[0], number(&step["value"]), 1e-14);
        }
        let at = |t: &str| {
            list(&table["steps"])
                .iter()
                .position(|s| s["t"] == t)
                .unwrap()
        };
        for (t, value) in table["published"].as_object().into_iter().flatten() {
            assert_close(outcome.rows[at(t)].y[0], number(value), 0.5e-7 + 1e-12);
            checked += 1;
        }
    }
    assert!(checked >= 8, "only {checked} printed values checked");
}
