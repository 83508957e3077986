//! Instants known before the run: knots of lookups of the variable, turns of conditions of the variable alone.
//!
//! They become grid points at every level, so that no step straddles them.

use std::collections::BTreeMap;

use super::compile::with_factors;
use super::system::CaseSystem;
use crate::formula::tape::{Builder, Register, Symbols, Tape, Tier, compare};
use crate::formula::tree::{Comparison, Kind, Tree};
use crate::problem::model::{Case, Model};

/// Points at which a condition that is not linear in the variable is sampled.
const SAMPLES: usize = 2_000;
/// Most instants from one table or condition.
const MOST: usize = 100_000;

/// The known instants of `case` between `from` and `to`, unordered.
pub fn instants(
    model: &Model,
    system: &mut CaseSystem,
    case: &Case,
    from: f64,
    to: f64,
) -> Vec<f64> {
    let variable = &model.march.variable;
    let quantities: BTreeMap<&str, &Tree> = model
        .quantities
        .iter()
        .map(|quantity| (quantity.symbol.as_str(), &quantity.formula.tree))
        .collect();
    let mut trees: Vec<&Tree> = model.states.iter().map(|state| &state.rate.tree).collect();
    trees.extend(
        model
            .quantities
            .iter()
            .map(|quantity| &quantity.formula.tree),
    );
    trees.extend(model.events.iter().map(|event| &event.when.tree));
    trees.extend(model.results.iter().map(|result| &result.formula.tree));
    let mut found = Vec::new();
    for tree in trees {
        tree.walk(&mut |part| match &part.kind {
            Kind::Lookup(name, argument) if matches!(&argument.kind, Kind::Symbol(symbol) if symbol == variable) => {
                if let Some(index) = model.lookups.iter().position(|lookup| &lookup.symbol == name) {
                    let lookup = &model.lookups[case.lookups.get(&index).copied().unwrap_or(index)];
                    found.extend(lookup.points_si.iter().map(|(x, _)| *x).take(MOST));
                }
            }
            Kind::Compare(comparison, a, b) => {
                let sides = [spelled_out(a, &quantities), spelled_out(b, &quantities)];
                if sides.iter().all(|side| is_of_variable(side, model)) && sides.iter().any(|side| mentions(side, variable)) {
                    let tape = compile(model, &sides);
                    found.extend(turns(&tape, system, case, *comparison, from, to));
                }
            }
            _ => {}
        });
    }
    let (low, high) = if from < to { (from, to) } else { (to, from) };
    found.retain(|instant| *instant > low && *instant < high);
    found
}

/// `tree` with quantities replaced by their formulas.
pub(super) fn spelled_out(tree: &Tree, quantities: &BTreeMap<&str, &Tree>) -> Tree {
    tree.replaced(&mut |part| match &part.kind {
        Kind::Symbol(name) => quantities
            .get(name.as_str())
            .map(|formula| spelled_out(formula, quantities)),
        _ => None,
    })
}

fn is_of_variable(tree: &Tree, model: &Model) -> bool {
    tree.symbols().iter().all(|(name, _)| {
        *name == model.march.variable
            || *name == "pi"
            || model.inputs.iter().any(|input| input.symbol == *name)
    })
}

fn mentions(tree: &Tree, symbol: &str) -> bool {
    tree.symbols().iter().any(|(name, _)| *name == symbol)
}

/// A tape of both sides over the variable and the inputs.
fn compile(model: &Model, sides: &[Tree; 2]) -> Tape {
    let mut tiers = vec![Tier::Time];
    tiers.resize(1 + model.inputs.len(), Tier::Case);
    let mut builder = Builder::new(tiers);
    let mut symbols = Symbols::from([(model.march.variable.clone(), 0)]);
    symbols.extend(
        model
            .inputs
            .iter()
            .enumerate()
            .map(|(index, input)| (input.symbol.clone(), 1 + index as Register)),
    );
    let lookups: BTreeMap<String, u32> = model
        .lookups
        .iter()
        .enumerate()
        .map(|(index, lookup)| (lookup.symbol.clone(), index as u32))
        .collect();
    let factors = model
        .lookups
        .iter()
        .filter_map(|lookup| Some((lookup.symbol.clone(), lookup.factor.clone()?)))
        .collect();
    let outputs: Vec<Register> = sides
        .iter()
        .map(|side| builder.add(&with_factors(side, &factors), &symbols, &lookups))
        .collect();
    builder.tape(&outputs)
}

/// Instants at which the comparison turns.
fn turns(
    tape: &Tape,
    system: &CaseSystem,
    case: &Case,
    comparison: Comparison,
    from: f64,
    to: f64,
) -> Vec<f64> {
    let mut registers = tape.registers();
    registers[1..=case.values.len()].copy_from_slice(&case.values);
    tape.run_case(&mut registers, system.tables());
    let mut sides = |t: f64| {
        registers[0] = t;
        tape.run_time(&mut registers, system.tables());
        (tape.output(0, &registers), tape.output(1, &registers))
    };
    let mut distance = |t: f64| {
        let (a, b) = sides(t);
        a - b
    };
    // A comparison linear in the variable turns once, wherever that is: a short pulse must not slip between samples.
    let (start, end) = (distance(from), distance(to));
    let size = start.abs() + end.abs();
    // Places without a common measure, lest a periodic distance that is zero at all of them look linear.
    let is_linear = [0.5, 0.381_966, 0.729_413].into_iter().all(|share| {
        (distance(from + share * (to - from)) - (start + share * (end - start))).abs()
            <= 1e-12 * size
    });
    if is_linear && (start < 0.0) != (end < 0.0) {
        let estimate = from - start * (to - from) / (end - start);
        let margin = 1e-9 * (to - from);
        return vec![
            bisect(&mut sides, comparison, estimate - margin, estimate + margin)
                .unwrap_or(estimate),
        ];
    }
    let at = |k: usize| from + (to - from) * k as f64 / SAMPLES as f64;
    (0..SAMPLES)
        .filter_map(|k| bisect(&mut sides, comparison, at(k), at(k + 1)))
        .collect()
}

/// The instant between `low` and `high` at which the comparison turns, if it differs at the two.
fn bisect(
    sides: &mut impl FnMut(f64) -> (f64, f64),
    comparison: Comparison,
    mut low: f64,
    mut high: f64,
) -> Option<f64> {
    let mut truth = |t: f64| {
        let (a, b) = sides(t);
        compare(comparison, a, b)
    };
    let at_low = truth(low);
    if truth(high) == at_low {
        return None;
    }
    loop {
        let middle = 0.5 * low + 0.5 * high;
        if middle <= low.min(high) || middle >= low.max(high) {
            return Some(high);
        }
        if truth(middle) == at_low {
            low = middle;
        } else {
            high = middle;
        }
    }
}
