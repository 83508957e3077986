//! Why a march could not go on: the innermost part of a formula that has no finite value.
//!
//! Owns: the search for it, after the fact. The hot loop only sees that a value is not finite.

use std::collections::BTreeMap;

use super::system::LookupTables;
use crate::formula::tape::{Builder, Register, Symbols, Tier};
use crate::formula::tree::{Kind, Tree};
use crate::problem::model::{Case, Model, Outside};

/// What has no finite value, and where in the formulas.
#[derive(Clone, Debug, PartialEq)]
pub struct Trouble {
    /// Symbol of the quantity, or of the state whose rate it is.
    pub owner: String,
    /// The part of its formula, as written.
    pub part: String,
    pub cause: Cause,
    /// Where it happens, in SI.
    pub t: f64,
}

#[derive(Clone, Debug, PartialEq)]
pub enum Cause {
    /// A lookup was asked outside its points; argument in SI, index of the lookup.
    OutsideLookup { lookup: usize, argument: f64 },
    /// A function or operation with these arguments, in SI.
    Operation { arguments: Vec<f64> },
}

/// Where values stand when trouble is looked for.
pub struct Scene<'a> {
    pub model: &'a Model,
    pub case: &'a Case,
    pub tables: &'a LookupTables,
    pub switches: &'a [f64],
}

/// The first formula part without a finite value near (t, y), looked for along the slope over one step `h`.
pub fn find(scene: &Scene, t: f64, y: &[f64], slope: &[f64], h: f64) -> Option<Trouble> {
    // The march saw it at a stage; the last good state may still be fine.
    let shares = [0.0, 1e-6, 1e-4, 1e-2, 0.1, 0.25, 0.5, 0.75, 1.0];
    shares.iter().find_map(|share| {
        let moved: Vec<f64> = y
            .iter()
            .zip(slope)
            .map(|(y, slope)| y + share * h * if slope.is_finite() { *slope } else { 0.0 })
            .collect();
        at_point(scene, t + share * h, &moved)
    })
}

fn at_point(scene: &Scene, t: f64, y: &[f64]) -> Option<Trouble> {
    let model = scene.model;
    let mut values: BTreeMap<String, f64> = BTreeMap::from([(model.march.variable.clone(), t)]);
    values.extend(
        model
            .states
            .iter()
            .zip(y)
            .map(|(state, y)| (state.symbol.clone(), *y)),
    );
    values.extend(
        model
            .switches
            .iter()
            .zip(scene.switches)
            .map(|(switch, value)| (switch.symbol.clone(), *value)),
    );
    values.extend(
        model
            .inputs
            .iter()
            .zip(&scene.case.values)
            .map(|(input, value)| (input.symbol.clone(), *value)),
    );
    for quantity in &model.quantities {
        let value = evaluate(scene, &quantity.formula.tree, &values);
        if !value.is_finite() {
            return innermost(
                scene,
                &quantity.symbol,
                &quantity.formula.text,
                &quantity.formula.tree,
                &values,
                t,
            );
        }
        values.insert(quantity.symbol.clone(), value);
    }
    model
        .states
        .iter()
        .find(|state| !evaluate(scene, &state.rate.tree, &values).is_finite())
        .and_then(|state| {
            innermost(
                scene,
                &state.symbol,
                &state.rate.text,
                &state.rate.tree,
                &values,
                t,
            )
        })
}

fn innermost(
    scene: &Scene,
    owner: &str,
    text: &str,
    tree: &Tree,
    values: &BTreeMap<String, f64>,
    t: f64,
) -> Option<Trouble> {
    let found = guilty(scene, tree, values);
    let arguments: Vec<f64> = found
        .children()
        .into_iter()
        .map(|child| evaluate(scene, child, values))
        .collect();
    let cause = match &found.kind {
        Kind::Lookup(name, _) => {
            let lookup = scene
                .model
                .lookups
                .iter()
                .position(|lookup| &lookup.symbol == name)?;
            let used = scene.case.lookups.get(&lookup).copied().unwrap_or(lookup);
            if scene.model.lookups[used].outside == Outside::Refuse {
                Cause::OutsideLookup {
                    lookup: used,
                    argument: arguments.first().copied()?,
                }
            } else {
                Cause::Operation { arguments }
            }
        }
        _ => Cause::Operation { arguments },
    };
    let part = text.get(found.span.clone()).unwrap_or(text).to_owned();
    Some(Trouble {
        owner: owner.to_owned(),
        part,
        cause,
        t,
    })
}

/// The deepest part without a finite value whose own parts all have one; of `if`, the branch taken.
fn guilty<'a>(scene: &Scene, tree: &'a Tree, values: &BTreeMap<String, f64>) -> &'a Tree {
    let parts = match &tree.kind {
        Kind::If(condition, a, b) => vec![
            &**condition,
            if evaluate(scene, condition, values) != 0.0 {
                a
            } else {
                b
            },
        ],
        _ => tree.children(),
    };
    match parts
        .into_iter()
        .find(|part| !evaluate(scene, part, values).is_finite())
    {
        Some(part) => guilty(scene, part, values),
        None => tree,
    }
}

fn evaluate(scene: &Scene, tree: &Tree, values: &BTreeMap<String, f64>) -> f64 {
    let mut builder = Builder::new(vec![Tier::Case; values.len()]);
    let symbols: Symbols = values
        .keys()
        .enumerate()
        .map(|(slot, name)| (name.clone(), slot as Register))
        .collect();
    let lookups = scene
        .model
        .lookups
        .iter()
        .enumerate()
        .map(|(index, lookup)| (lookup.symbol.clone(), index as u32))
        .collect();
    let output = builder.add(tree, &symbols, &lookups);
    let tape = builder.tape(&[output]);
    let mut registers = tape.registers();
    for (slot, value) in values.values().enumerate() {
        registers[slot] = *value;
    }
    tape.run_case(&mut registers, scene.tables);
    tape.output(0, &registers)
}
