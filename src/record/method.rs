//! How the equations were marched: method, its formula of the step, grid, program.

use std::collections::BTreeMap;

use num_rational::Ratio;

use super::block::{Block, Equation, Text};
use super::words::{self, as_written, expression, listed, text, with_unit};
use super::{Blocks, Fact, PROGRAM, Subject};
use crate::formula::typeset::Math;
use crate::march::{AdamsPair, Coefficient, Method, Scheme, Tableau};
use crate::problem::model::GridSpec;

pub fn facts(subject: &Subject) -> BTreeMap<&'static str, Fact> {
    let method = subject.cases[0].method;
    let levels = subject.model.march.levels;
    let steps: Vec<String> = (0..levels)
        .map(|level| {
            if level == 0 {
                "step".to_owned()
            } else {
                format!("step/{}", 1u32 << level)
            }
        })
        .collect();
    BTreeMap::from([
        ("method_title", method.title.into()),
        ("method_order", method.order.into()),
        ("level_words", listed(&steps).into()),
        ("grid", grid_sentence(subject).into()),
    ])
}

pub fn add(subject: &Subject, blocks: &mut Blocks) {
    let method = subject.cases[0].method;
    blocks.insert("step_formula", step_formula(subject, method));
    blocks.insert("method_facts", vec![Block::Facts(method_facts(subject))]);
}

fn grid_sentence(subject: &Subject) -> String {
    let model = subject.model;
    let case = &subject.cases[0];
    let steps = words::count(case.steps, "step", "steps");
    let mut sentence = match &model.march.grid {
        GridSpec::Step { value, unit, .. } => format!(
            "The grid has a constant step of {}: {steps} in the base case.",
            with_unit(*value, unit)
        ),
        GridSpec::Segments(segments) => {
            let parts: Vec<String> = segments
                .iter()
                .map(|segment| {
                    format!(
                        "{} up to {}",
                        with_unit(segment.step, &segment.step_unit),
                        with_unit(segment.to, &segment.to_unit)
                    )
                })
                .collect();
            format!(
                "The grid has a step of {}: {steps} in the base case.",
                listed(&parts)
            )
        }
        GridSpec::Chosen { tolerance } => {
            let pair = case.chosen_by.unwrap_or("the method’s own estimate");
            let longest = words::rounded(
                model,
                case.longest_step,
                &model.march.unit.difference_unit(),
                3,
            );
            format!(
                "The grid was chosen once for each case, at nominal inputs, by the local error estimate of {pair} to a tolerance of {} relative to the scale of each state: {steps} in the base case, the longest {longest}.",
                as_written(*tolerance)
            )
        }
    };
    if !case.short_intervals.is_empty() {
        let ends: Vec<String> = case
            .short_intervals
            .iter()
            .map(|end| words::rounded(model, *end, &model.march.unit, 6))
            .collect();
        sentence.push_str(&format!(
            " The span is no multiple of the step: the interval that ends at {} is shorter.",
            listed(&ends)
        ));
    }
    sentence
}

fn method_facts(subject: &Subject) -> Vec<(Text, Text)> {
    let model = subject.model;
    let method = subject.cases[0].method;
    let mut span = expression(&model.march.from);
    span.extend(text(" to "));
    span.extend(expression(&model.march.to));
    let evaluations: u64 = subject
        .cases
        .iter()
        .flat_map(|case| &case.levels)
        .map(|level| level.outcome.rate_evaluations)
        .sum();
    vec![
        (
            text("Method"),
            text(format!(
                "{} (order {}, {})",
                method.title,
                method.order,
                words::count(
                    u64::from(method.stages),
                    "slope evaluation a step",
                    "slope evaluations a step"
                )
            )),
        ),
        (text("Citation"), text(method.citation)),
        (text("Span"), span),
        (
            text("Levels of the ladder"),
            text(as_written(f64::from(model.march.levels))),
        ),
        (
            text("Slope evaluations in all"),
            text(as_written(evaluations as f64)),
        ),
        (text("Program"), text(PROGRAM)),
        (
            text("Numeric contract"),
            text(
                "64-bit floats; elementary functions correctly rounded or from one pinned library; no result depends on machine, threads, locale or clock",
            ),
        ),
    ]
}

/// The formula of the step, from the coefficients that were used.
fn step_formula(subject: &Subject, method: &Method) -> Vec<Block> {
    let variable = &subject.model.march.variable;
    let lines = match method.scheme {
        Scheme::RungeKutta(tableau) => runge_kutta_lines(variable, tableau),
        Scheme::IteratedHeun => iterated_heun_lines(variable),
        Scheme::Adams { pair, .. } => adams_lines(variable, pair),
        Scheme::Bdf2 { .. } => bdf2_lines(variable),
    };
    let last = lines.len() - 1;
    lines
        .into_iter()
        .enumerate()
        .map(|(position, math)| {
            let label = if position == last { "numbered" } else { "" };
            Block::Equation(Equation {
                anchor: format!("step-{position}"),
                label: label.to_owned(),
                math,
                note: Vec::new(),
            })
        })
        .collect()
}

/// A symbol with index n + `offset`.
fn at_point(name: &str, offset: i32) -> Math {
    let n = Math::Symbol("n".to_owned());
    let index = match offset {
        0 => n,
        _ => Math::Row(vec![
            n,
            Math::operator(if offset < 0 { "−" } else { "+" }),
            Math::number(&offset.abs().to_string()),
        ]),
    };
    Math::symbol(name).indexed(index)
}

/// f(t, y).
fn rate_at(time: Math, value: Math) -> Math {
    Math::symbol("f").of(Math::Row(vec![time, Math::operator(","), value]))
}

fn plus(left: Math, right: Math) -> Math {
    Math::Row(vec![left, Math::operator("+"), right])
}

fn runge_kutta_lines(variable: &str, tableau: &Tableau) -> Vec<Math> {
    let stages = tableau.stages();
    let terms_of = |coefficients: &dyn Fn(usize) -> Coefficient| -> Vec<(Coefficient, Math)> {
        (0..stages)
            .map(|stage| (coefficients(stage), slope(stage)))
            .filter(|(weight, _)| !is_zero(*weight))
            .collect()
    };
    let mut lines: Vec<Math> = Vec::new();
    for stage in 0..stages {
        let c = tableau.c[stage];
        let time = if is_zero(c) {
            at_point(variable, 0)
        } else {
            plus(
                at_point(variable, 0),
                weighted(c, tableau.radicand, Math::step_of(variable)),
            )
        };
        let terms = terms_of(&|other| tableau.entry(stage, other));
        let value = if terms.is_empty() {
            at_point("y", 0)
        } else {
            plus(
                at_point("y", 0),
                times_h(variable, &terms, tableau.radicand),
            )
        };
        lines.push(slope(stage).equals(rate_at(time, value)));
    }
    let weights = terms_of(&|stage| tableau.b[stage]);
    lines.push(at_point("y", 1).equals(plus(
        at_point("y", 0),
        times_h(variable, &weights, tableau.radicand),
    )));
    lines
}

fn iterated_heun_lines(variable: &str) -> Vec<Math> {
    let iterate = |index: Math| at_point("y", 1).raised(Math::fenced(index));
    let i = Math::Symbol("i".to_owned());
    let here = rate_at(at_point(variable, 0), at_point("y", 0));
    let there = rate_at(at_point(variable, 1), iterate(i.clone()));
    let predictor = iterate(Math::number("0")).equals(plus(
        at_point("y", 0),
        Math::Row(vec![Math::step_of(variable), here.clone()]),
    ));
    let sum = Math::fenced(plus(here, there));
    let corrector = iterate(plus(i, Math::number("1"))).equals(plus(
        at_point("y", 0),
        Math::Row(vec![Math::step_of(variable).over(Math::number("2")), sum]),
    ));
    vec![predictor, corrector]
}

fn adams_lines(variable: &str, pair: &AdamsPair) -> Vec<Math> {
    let predicted = Math::Row(vec![at_point("y", 1)]).raised(Math::operator("∗"));
    let past = |offset: i32| at_point("f", offset);
    let terms: Vec<(Coefficient, Math)> = pair
        .predictor
        .iter()
        .enumerate()
        .map(|(back, weight)| (*weight, past(-(back as i32))))
        .collect();
    let predictor = predicted
        .clone()
        .equals(plus(at_point("y", 0), times_h(variable, &terms, 1)));
    let slope_there = Math::Row(vec![at_point("f", 1)]).raised(Math::operator("∗"));
    let definition = slope_there
        .clone()
        .equals(rate_at(at_point(variable, 1), predicted));
    let terms: Vec<(Coefficient, Math)> = pair
        .corrector
        .iter()
        .enumerate()
        .map(|(back, weight)| {
            (
                *weight,
                if back == 0 {
                    slope_there.clone()
                } else {
                    past(1 - back as i32)
                },
            )
        })
        .collect();
    let corrector = at_point("y", 1).equals(plus(at_point("y", 0), times_h(variable, &terms, 1)));
    vec![predictor, definition, corrector]
}

fn bdf2_lines(variable: &str) -> Vec<Math> {
    let third = |numerator: &str| Math::number(numerator).over(Math::number("3"));
    let next = rate_at(at_point(variable, 1), at_point("y", 1));
    let right = Math::Row(vec![
        third("4"),
        at_point("y", 0),
        Math::operator("−"),
        third("1"),
        at_point("y", -1),
        Math::operator("+"),
        third("2"),
        Math::step_of(variable),
        next,
    ]);
    vec![at_point("y", 1).equals(right)]
}

fn is_zero(coefficient: Coefficient) -> bool {
    coefficient.rational.0 == 0 && coefficient.surd.0 == 0
}

fn slope(stage: usize) -> Math {
    Math::symbol("k").indexed(Math::number(&(stage + 1).to_string()))
}

/// A coefficient times a term; none is written for 1.
fn weighted(coefficient: Coefficient, radicand: u32, term: Math) -> Math {
    if coefficient.surd.0 == 0 {
        let mut row: Vec<Math> = factor(Ratio::new(coefficient.rational.0, coefficient.rational.1))
            .into_iter()
            .collect();
        row.push(term);
        return Math::Row(row);
    }
    let root = Math::Root {
        radicand: Box::new(Math::number(&radicand.to_string())),
        degree: None,
    };
    let surd = Ratio::new(coefficient.surd.0, coefficient.surd.1);
    let rational = Ratio::new(coefficient.rational.0, coefficient.rational.1);
    let sum = sum(&[(rational, Math::number("1")), (surd, root)]);
    Math::Row(vec![Math::fenced(sum), term])
}

/// The step times a sum of weighted slopes; one common denominator is written once: Δt/6 (k1 + 2 k2 + 2 k3 + k4).
fn times_h(variable: &str, terms: &[(Coefficient, Math)], radicand: u32) -> Math {
    if terms.iter().any(|(weight, _)| weight.surd.0 != 0) {
        let mut row = Vec::new();
        for (weight, term) in terms {
            if !row.is_empty() {
                row.push(Math::operator("+"));
            }
            row.push(weighted(*weight, radicand, term.clone()));
        }
        return Math::Row(vec![Math::step_of(variable), Math::fenced(Math::Row(row))]);
    }
    let terms: Vec<(Ratio<i64>, Math)> = terms
        .iter()
        .map(|(weight, term)| {
            (
                Ratio::new(weight.rational.0, weight.rational.1),
                term.clone(),
            )
        })
        .collect();
    if let [(weight, term)] = &terms[..] {
        let mut row: Vec<Math> = factor(*weight).into_iter().collect();
        row.extend([Math::step_of(variable), term.clone()]);
        return Math::Row(row);
    }
    let common = terms
        .iter()
        .map(|(weight, _)| *weight.denom())
        .fold(1, least_common_multiple);
    let scaled: Vec<(Ratio<i64>, Math)> = terms
        .iter()
        .map(|(weight, term)| (*weight * common, term.clone()))
        .collect();
    let step = if common == 1 {
        Math::step_of(variable)
    } else {
        Math::step_of(variable).over(Math::number(&common.to_string()))
    };
    Math::Row(vec![step, Math::fenced(sum(&scaled))])
}

/// a x + b y − c z, with zero terms left out.
fn sum(terms: &[(Ratio<i64>, Math)]) -> Math {
    let mut row: Vec<Math> = Vec::new();
    for (weight, term) in terms.iter().filter(|(weight, _)| *weight.numer() != 0) {
        let negative = *weight.numer() < 0;
        if negative {
            row.push(Math::operator("−"));
        } else if !row.is_empty() {
            row.push(Math::operator("+"));
        }
        let size = if negative { -*weight } else { *weight };
        let is_one = matches!(term, Math::Number(text) if text == "1");
        match factor(size) {
            Some(factor) if is_one => row.push(factor),
            Some(factor) => row.extend([factor, term.clone()]),
            None => row.push(term.clone()),
        }
    }
    if row.len() == 1 {
        row.remove(0)
    } else {
        Math::Row(row)
    }
}

/// The factor before a term; none for 1.
fn factor(weight: Ratio<i64>) -> Option<Math> {
    let number = |value: i64| {
        let digits = Math::number(&value.abs().to_string());
        if value < 0 {
            Math::Row(vec![Math::operator("−"), digits])
        } else {
            digits
        }
    };
    match (*weight.numer(), *weight.denom()) {
        (1, 1) => None,
        (numerator, 1) => Some(number(numerator)),
        (numerator, denominator) => Some(number(numerator).over(number(denominator))),
    }
}

fn least_common_multiple(a: i64, b: i64) -> i64 {
    let (mut x, mut y) = (a, b);
    while y != 0 {
        (x, y) = (y, x % y);
    }
    a / x * b
}
