//! What names stand for, and where they may be used.

use std::collections::BTreeMap;

use crate::diagnostic::NOT_AN_INPUT;
use crate::formula::Fault;
use crate::formula::dimensions::{Names, Type, check};
use crate::formula::tree::{Kind, Tree};
use crate::units::Dimension;

/// Where a formula stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Realm {
    /// Initial values, limits, spans, cases: inputs alone.
    Inputs,
    /// Rates, quantities, events: everything but result functions.
    Model,
    /// Results: result functions of everything, and inputs.
    Results,
    /// Balances: everything, and running integrals.
    Balances,
}

/// The names of a problem, seen from a realm.
#[derive(Clone, Debug, Default)]
pub struct Table {
    pub inputs: BTreeMap<String, Type>,
    /// States, quantities, switches, the independent variable.
    pub others: BTreeMap<String, Type>,
    /// Dimensions of argument and value.
    pub lookups: BTreeMap<String, (Dimension, Dimension)>,
    pub events: Vec<String>,
    pub variable: Option<Dimension>,
}

pub struct Scope<'a> {
    pub table: &'a Table,
    pub realm: Realm,
}

impl Names for Scope<'_> {
    fn symbol(&self, name: &str) -> Option<Type> {
        self.table
            .inputs
            .get(name)
            .or_else(|| self.table.others.get(name))
            .copied()
    }

    fn lookup(&self, name: &str) -> Option<(Dimension, Dimension)> {
        self.table.lookups.get(name).copied()
    }

    fn is_event(&self, id: &str) -> bool {
        self.table.events.iter().any(|event| event == id)
    }

    fn variable(&self) -> Option<Dimension> {
        if matches!(self.realm, Realm::Results | Realm::Balances) {
            self.table.variable
        } else {
            None
        }
    }

    fn all(&self) -> Vec<&str> {
        let names = self.table.inputs.keys().map(String::as_str);
        match self.realm {
            Realm::Inputs => names.collect(),
            _ => names
                .chain(self.table.others.keys().map(String::as_str))
                .chain(self.table.lookups.keys().map(String::as_str))
                .collect(),
        }
    }

    fn events(&self) -> Vec<&str> {
        self.table.events.iter().map(String::as_str).collect()
    }
}

/// The type of `tree`; names that exist but may not stand here are faults of their own kind.
pub fn check_in_scope(tree: &Tree, scope: &Scope) -> Result<Type, Vec<Fault>> {
    let found = check(tree, scope)?;
    let mut faults = Vec::new();
    if !matches!(scope.realm, Realm::Model | Realm::Balances) {
        bare_names(tree, scope, &mut faults);
    }
    if faults.is_empty() {
        Ok(found)
    } else {
        Err(faults)
    }
}

/// Outside result functions, results and inputs' formulas know inputs only.
fn bare_names(tree: &Tree, scope: &Scope, faults: &mut Vec<Fault>) {
    match &tree.kind {
        Kind::Probe(_, arguments) => {
            for argument in arguments.iter().skip(1) {
                bare_names(argument, scope, faults);
            }
        }
        Kind::Symbol(name) if scope.table.others.contains_key(name) => {
            let mend = match scope.realm {
                Realm::Results => format!(
                    "say which value is meant: final({name}), largest({name}), value_at({name}, …)"
                ),
                _ => "only inputs are known here".to_owned(),
            };
            faults.push(Fault::new(
                &NOT_AN_INPUT,
                tree.span.clone(),
                format!("`{name}` changes during the march"),
                mend,
            ));
        }
        _ => {
            for child in tree.children() {
                bare_names(child, scope, faults);
            }
        }
    }
}
