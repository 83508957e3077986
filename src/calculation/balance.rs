//! Balances: their summands, and whether they are linear in what is marched.

use std::collections::BTreeMap;

use super::known::spelled_out;
use crate::formula::tree::{Binary, Kind, Tree};
use crate::problem::model::{Formula, Model};

/// A balance as it is compiled: its formula in summands.
pub struct Summands {
    /// Each with its sign; their sum is the balance.
    pub list: Vec<(f64, Tree)>,
    /// Linear in states, integrals and the independent variable with constant coefficients.
    ///
    /// Such a balance holds to round-off for any step of any method that adds weighted slopes: it shows that the
    /// rates were written consistently, and nothing about the error of the march.
    pub is_linear: bool,
}

impl Summands {
    pub fn of(model: &Model, formula: &Formula) -> Summands {
        let quantities: BTreeMap<&str, &Tree> = model
            .quantities
            .iter()
            .map(|quantity| (quantity.symbol.as_str(), &quantity.formula.tree))
            .collect();
        let mut list = Vec::new();
        split(&formula.tree, 1.0, &quantities, &mut list);
        let degrees = list
            .iter()
            .map(|(_, tree)| degree(&spelled_out(tree, &quantities), model));
        let is_linear = degrees.into_iter().all(|degree| degree.is_some());
        Summands { list, is_linear }
    }

    /// How many running integrals they name.
    pub fn integrals(&self) -> usize {
        let mut count = 0;
        for (_, tree) in &self.list {
            tree.walk(&mut |part| count += usize::from(matches!(part.kind, Kind::Probe(..))));
        }
        count
    }
}

/// Sums, differences, and quantities that stand alone, taken apart.
fn split(tree: &Tree, sign: f64, quantities: &BTreeMap<&str, &Tree>, list: &mut Vec<(f64, Tree)>) {
    match &tree.kind {
        Kind::Binary(Binary::Add, a, b) => {
            split(a, sign, quantities, list);
            split(b, sign, quantities, list);
        }
        Kind::Binary(Binary::Subtract, a, b) => {
            split(a, sign, quantities, list);
            split(b, -sign, quantities, list);
        }
        Kind::Negate(a) => split(a, -sign, quantities, list),
        Kind::Symbol(name) if quantities.contains_key(name.as_str()) => {
            split(quantities[name.as_str()], sign, quantities, list)
        }
        _ => list.push((sign, tree.clone())),
    }
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Degree {
    Constant,
    Linear,
}

/// None where the tree is neither constant nor linear between two events.
fn degree(tree: &Tree, model: &Model) -> Option<Degree> {
    use Degree::{Constant, Linear};
    match &tree.kind {
        Kind::Number(_) | Kind::Measure(..) => Some(Constant),
        Kind::Symbol(name) => {
            let is_marched = *name == model.march.variable
                || model.states.iter().any(|state| state.symbol == *name);
            Some(if is_marched { Linear } else { Constant })
        }
        Kind::Probe(..) => Some(Linear),
        Kind::Negate(a) | Kind::NumberIn(a, _) => degree(a, model),
        Kind::Binary(operator, a, b) => match (operator, degree(a, model)?, degree(b, model)?) {
            (_, Constant, Constant) => Some(Constant),
            (Binary::Add | Binary::Subtract, _, _)
            | (Binary::Multiply, Constant, Linear)
            | (Binary::Multiply | Binary::Divide, Linear, Constant) => Some(Linear),
            _ => None,
        },
        _ => tree
            .children()
            .into_iter()
            .all(|child| degree(child, model) == Some(Constant))
            .then_some(Constant),
    }
}
