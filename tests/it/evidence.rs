//! What the evidence beside the ladder says of problems whose truth is known by hand.

use std::fmt::Write;

use countermarch::evidence::{CaseEvidence, Comparison};
use countermarch::judgement::Overall;
use countermarch::pipeline::{self, Trial};

use crate::reference::{self, head, march, solve, state};

/// A problem of dimensionless states over 0 to `to`, with more blocks of the file after them.
fn problem(states: &[(&str, f64, &str)], to: f64, step: f64, method: &str, rest: &str) -> Trial {
    let mut file = head("Evidence");
    for (symbol, initial, rate) in states {
        state(&mut file, symbol, *initial, rate);
    }
    march(&mut file, "t", (0.0, to), step, method, 3);
    file.push_str(rest);
    solve(&file)
}

fn result(symbol: &str, formula: &str) -> String {
    let mut file = String::new();
    reference::result(&mut file, symbol, formula);
    file
}

fn between(result: &str, low: f64, high: f64) -> String {
    format!(
        "[[criterion]]\nid = \"K\"\ntext = \"Limit.\"\nresult = \"{result}\"\nbetween = [{low:?}, {high:?}]\nsource = \"by hand\"\n\n"
    )
}

fn balance(formula: &str, tolerance: f64) -> String {
    format!(
        "[[balance]]\nid = \"B\"\ntext = \"what stays\"\nformula = \"{formula}\"\ntolerance = {tolerance:?}\n\n"
    )
}

fn closed_form(key: &str, name: &str, formula: &str, kind: &str, tolerance: f64) -> String {
    format!(
        "[[closed_form]]\n{key} = \"{name}\"\nformula = \"{formula}\"\nkind = \"{kind}\"\ntolerance = {tolerance:?}\nsource = \"by hand\"\n\n"
    )
}

fn base(trial: &Trial) -> &CaseEvidence {
    &trial.cases[0]
}

fn record(trial: &Trial) -> String {
    let assembled = pipeline::assemble(trial).unwrap_or_else(|failure| panic!("{failure:?}"));
    let (_, bytes) = assembled
        .bag
        .files()
        .iter()
        .find(|(path, _)| path.ends_with("record.md"))
        .expect("a record");
    String::from_utf8(bytes.to_vec()).expect("text")
}

/// h' = −√h from 1: h(1) = 1/4. Forward Euler with five steps is 20 % off, and loses not a drop.
#[test]
fn hand_a_perfect_balance_is_not_accuracy() {
    let mut rest = result("h_end", "final(h)");
    rest.push_str(&between("h_end", 0.245, 0.255));
    rest.push_str(&balance("h + integral(sqrt(max(h, 0)))", 1e-12));
    let trial = problem(&[("h", 1.0, "-sqrt(max(h, 0))")], 1.0, 0.2, "euler", &rest);
    let found = &base(&trial).balances[0];
    assert!(
        found.is_linear && found.holds && found.relative() < 1e-14,
        "{found:?}"
    );
    assert!(found.ladder.is_none(), "a linear balance has no ladder");
    let ladder = &base(&trial).results[0].ladder;
    let error = (ladder.reported().unwrap() - 0.25).abs();
    assert!(error > 0.02, "{error}");
    assert!(
        ladder.uncertainty.is_none_or(|band| band >= error),
        "{ladder:?}"
    );
    assert_eq!(trial.verdict.overall, Overall::NotSupported);
    let record = record(&trial);
    assert!(
        record.contains("consistency of the written rates"),
        "{record}"
    );
}

/// Energy of x'' = −x under Heun's method grows; a nonlinear balance is laddered and its drift judged.
#[test]
fn hand_a_nonlinear_balance_is_evidence() {
    let states = [("x", 1.0, "v"), ("v", 0.0, "-x")];
    let trial = problem(
        &states,
        6.0,
        0.1,
        "heun",
        &balance("x^2 / 2 + v^2 / 2", 1e-6),
    );
    let found = &base(&trial).balances[0];
    assert!(!found.is_linear && !found.holds, "{found:?}");
    // One step multiplies the amplitude by |R| = √(1 + h⁴/4): the energy gains 60·h⁴/4 in 60 steps.
    assert!(
        (found.relative() - 1.5e-3).abs() < 5e-5,
        "{}",
        found.relative()
    );
    let order = found
        .ladder
        .as_ref()
        .and_then(|ladder| ladder.observed_order)
        .unwrap();
    assert!((order - 3.0).abs() < 0.1, "{order}");
    assert_eq!(trial.verdict.overall, Overall::NotSupported);
    assert!(
        trial.verdict.against[0].contains("drifts"),
        "{:?}",
        trial.verdict.against
    );
    let loose = problem(
        &states,
        6.0,
        0.1,
        "heun",
        &balance("x^2 / 2 + v^2 / 2", 1e-2),
    );
    assert_eq!(loose.verdict.overall, Overall::Supported);
}

/// A ball loses energy at every bounce and nowhere else; RK4 is exact in between.
#[test]
fn hand_balances_start_anew_after_what_is_set() {
    let trial = ball("rk4", &balance("9.81 * z + v^2 / 2", 1e-12));
    let found = &base(&trial).balances[0];
    assert!(found.holds, "{found:?}");
    assert!(base(&trial).reported().outcome.event_counts[0] >= 2);
}

fn ball(method: &str, rest: &str) -> Trial {
    let mut file = String::from(
        "[[event]]\nid = \"bounce\"\nwhen = \"z < 0 && v < 0\"\naction = \"set\"\nset = { v = \"-0.8 * v\" }\nat_start = false\n\n",
    );
    file.push_str(&result("z_late", "final(z)"));
    file.push_str(&result("bounces", "count_of(bounce)"));
    file.push_str(&result("t_first", "time_of(bounce)"));
    file.push_str(&result("z_top", "value_at(z, time_of(bounce) + 0.3)"));
    file.push_str(rest);
    problem(
        &[("z", 1.0, "v"), ("v", 0.0, "-9.81")],
        1.5,
        0.05,
        method,
        &file,
    )
}

#[test]
fn hand_closed_forms_of_results_and_histories() {
    let mut rest = result("y_end", "final(y)");
    rest.push_str(&closed_form("state", "y", "exp(-t)", "exact", 1e-6));
    rest.push_str(&closed_form("result", "y_end", "exp(-2)", "exact", 1e-5));
    rest.push_str(&closed_form("result", "y_end", "0.2", "estimate", 0.05));
    let trial = problem(&[("y", 1.0, "-y")], 2.0, 0.1, "rk4", &rest);
    let forms = &base(&trial).closed_forms;
    assert!(
        forms[0].holds && forms[1].holds && !forms[2].holds,
        "{forms:?}"
    );
    assert!(forms[0].at.is_some_and(|t| t > 0.0));
    assert_eq!(trial.verdict.overall, Overall::NotSupported);
    assert_eq!(
        trial.verdict.against.len(),
        1,
        "{:?}",
        trial.verdict.against
    );
}

/// z = hλ = −10: Euler multiplies by −9 a step; 0.02 is the longest stable one.
#[test]
fn hand_an_unstable_march_is_named_with_the_step_that_would_do() {
    let trial = problem(
        &[("y", 1.0, "-100 * y")],
        2.0,
        0.1,
        "euler",
        &result("y_end", "final(y)"),
    );
    let stability = &base(&trial).stability;
    assert!(stability.is_unstable());
    assert!(
        (stability.largest_growth.unwrap().value - 9.0).abs() < 1e-9,
        "{stability:?}"
    );
    assert!((stability.largest_stable_step.unwrap().value - 0.02).abs() < 1e-8);
    assert_eq!(trial.verdict.overall, Overall::NotSupported);
    assert!(
        trial.verdict.against[0].contains("0.02") && trial.verdict.against[0].contains("implicit"),
        "{:?}",
        trial.verdict.against
    );
    // The trapezoidal rule is stable there, and rings: (1 − 5)/(1 + 5).
    let trial = problem(
        &[("y", 1.0, "-100 * y")],
        2.0,
        0.1,
        "trapezoidal",
        &result("y_end", "final(y)"),
    );
    let stability = &base(&trial).stability;
    assert!(!stability.is_unstable());
    assert!(
        (stability.ringing.unwrap().value + 2.0 / 3.0).abs() < 1e-12,
        "{stability:?}"
    );
    assert_eq!(stability.largest_stable_step, None);
    assert!(record(&trial).contains("rings"));
}

#[test]
fn hand_no_false_alarms() {
    // Euler on an undamped oscillator grows, but nothing there should decay: that is for the ladder to tell.
    let trial = problem(&[("x", 1.0, "v"), ("v", 0.0, "-x")], 6.0, 0.1, "euler", "");
    assert!(!base(&trial).stability.is_unstable());
    assert_eq!(base(&trial).stability.largest_growth, None);
    // The rate of an emptying tank has an infinite derivative at the bottom.
    for method in ["euler", "heun", "rk4"] {
        for step in [0.15, 0.1, 0.07, 0.03] {
            let trial = problem(&[("h", 1.0, "-sqrt(max(h, 0))")], 3.0, step, method, "");
            assert!(
                !base(&trial).stability.is_unstable(),
                "{method} {step}: {:?}",
                base(&trial).stability.run
            );
        }
    }
    // At z = −2.7 RK4 is stable.
    let trial = problem(&[("y", 1.0, "-27 * y")], 2.0, 0.1, "rk4", "");
    assert!(!base(&trial).stability.is_unstable() && base(&trial).stability.run.is_none());
}

#[test]
fn hand_stiffness_is_the_ratio_of_decay_rates() {
    let trial = problem(
        &[("a", 1.0, "-a"), ("b", 1.0, "-1000 * (b - a)")],
        10.0,
        0.1,
        "radau5",
        &result("a_end", "final(a)"),
    );
    let stability = &base(&trial).stability;
    assert!(
        (stability.stiffness.unwrap().value - 1000.0).abs() < 1e-6,
        "{stability:?}"
    );
    assert!(stability.is_stiff && !stability.is_unstable());
    assert!(base(&trial).alternate.family.contains("backward"));
    assert!(
        matches!(base(&trial).alternate.results[0], Comparison::Agrees { .. }),
        "{:?}",
        base(&trial).alternate
    );
}

fn all_agree(trial: &Trial) {
    for case in &trial.cases {
        assert_eq!(case.alternate.failure, None);
        for (spec, comparison) in trial.model.results.iter().zip(&case.alternate.results) {
            assert!(
                matches!(comparison, Comparison::Agrees { .. }),
                "{}: {:?}",
                spec.symbol,
                case.alternate
            );
        }
    }
}

#[test]
fn prop_the_alternate_agrees_through_events_sets_and_stops() {
    all_agree(&ball("rk4", ""));
    // A relay with two switching points, set by events.
    let mut relay =
        String::from("[[switch]]\nsymbol = \"on\"\nmeaning = \"heater\"\ninitial = 1\n\n");
    for (id, when, value) in [("off", "y > 1.2", 0), ("start", "y < 0.8", 1)] {
        let _ = write!(
            relay,
            "[[event]]\nid = \"{id}\"\nwhen = \"{when}\"\naction = \"set\"\nset = {{ on = {value} }}\nat_start = false\n\n"
        );
    }
    for (symbol, formula) in [
        ("y_end", "final(y)"),
        ("y_top", "largest(y)"),
        ("t_hot", "time_while(y > 1)"),
        ("energy", "integral(on)"),
        ("starts", "count_of(start)"),
    ] {
        relay.push_str(&result(symbol, formula));
    }
    all_agree(&problem(
        &[("y", 1.0, "2 * on - y")],
        5.0,
        0.05,
        "heun",
        &relay,
    ));
    // A pulse known before the run, an extreme inside a step, and a stop.
    let mut pulse = String::from(
        "[[event]]\nid = \"done\"\nwhen = \"t > 1 && y > 1.5\"\naction = \"stop\"\nat_start = false\n\n",
    );
    for (symbol, formula) in [
        ("y_top", "largest(y)"),
        ("t_top", "time_of_largest(y)"),
        ("t_done", "time_of(done)"),
        ("y_mean", "mean(y)"),
        ("y_half", "value_at(y, 0.5)"),
    ] {
        pulse.push_str(&result(symbol, formula));
    }
    all_agree(&problem(
        &[("y", 0.0, "if(t > 0.2 && t < 0.33, 10, 0) + t - y * y")],
        9.0,
        0.1,
        "rk4",
        &pulse,
    ));
}

#[test]
fn prop_machines_read_the_comparison() {
    let trial = problem(
        &[("y", 1.0, "-y")],
        2.0,
        0.1,
        "heun",
        &result("y_end", "final(y)"),
    );
    let json: serde_json::Value =
        serde_json::from_str(&pipeline::results_json(&trial)).expect("JSON");
    assert_eq!(json["cases"][0]["results"][0]["alternate"], "agrees");
    // Heun's neighbours are Euler and Kutta: the better method is the cheaper one at this error.
    let cost = base(&trial).cost.as_ref().expect("errors that can be told");
    let names: Vec<&str> = cost.curves.iter().map(|curve| curve.method.name).collect();
    assert_eq!(names, ["heun", "euler", "kutta3"]);
    let (evaluations, error) = cost.curves[0].points[0];
    assert!(cost.curves[1].evaluations_for(error).unwrap() > 5.0 * evaluations as f64);
    assert!(cost.curves[2].evaluations_for(error).unwrap() < evaluations as f64);
}
