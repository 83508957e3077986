//! Tests of the march: a system made of closures or of text, and the tests by subject.

mod choices;
mod events;
mod expression;
mod figures;
mod grids;
mod hand;
mod implicit;
mod lookups;
mod orders;
mod references;
mod stability;
mod tableaux;

use super::*;
use crate::float;
use expression::Expression;
use std::collections::BTreeMap;

type RateFn = Box<dyn Fn(f64, &[f64], &[f64], &mut [f64])>;
type ValueFn = Box<dyn Fn(f64, &[f64], &[f64]) -> f64>;
type ConditionFn = Box<dyn Fn(f64, &[f64]) -> bool>;
type AssignFn = Box<dyn Fn(f64, &mut [f64], &mut [f64])>;

/// A system made of closures; rates and observables also see the switches.
pub(super) struct Problem {
    states: usize,
    quadratures: usize,
    rate: RateFn,
    conditions: Vec<ConditionFn>,
    observables: Vec<(ValueFn, ValueFn)>,
    assigns: BTreeMap<usize, AssignFn>,
    switches: Vec<f64>,
}

impl Problem {
    pub fn new(states: usize, rate: impl Fn(f64, &[f64], &[f64], &mut [f64]) + 'static) -> Self {
        Problem {
            states,
            quadratures: 0,
            rate: Box::new(rate),
            conditions: Vec::new(),
            observables: Vec::new(),
            assigns: BTreeMap::new(),
            switches: Vec::new(),
        }
    }

    pub fn quadratures(mut self, quadratures: usize) -> Self {
        self.quadratures = quadratures;
        self
    }

    pub fn with_switches(mut self, switches: &[f64]) -> Self {
        self.switches = switches.to_vec();
        self
    }

    pub fn condition(mut self, condition: impl Fn(f64, &[f64]) -> bool + 'static) -> Self {
        self.conditions.push(Box::new(condition));
        self
    }

    pub fn observable(
        mut self,
        value: impl Fn(f64, &[f64], &[f64]) -> f64 + 'static,
        slope: impl Fn(f64, &[f64], &[f64]) -> f64 + 'static,
    ) -> Self {
        self.observables.push((Box::new(value), Box::new(slope)));
        self
    }

    /// Observes state `index`.
    pub fn observe_state(mut self, index: usize) -> Self {
        self.observables.push((
            Box::new(move |_, y, _| y[index]),
            Box::new(move |_, _, slope| slope[index]),
        ));
        self
    }

    pub fn assign(
        mut self,
        event: usize,
        assign: impl Fn(f64, &mut [f64], &mut [f64]) + 'static,
    ) -> Self {
        self.assigns.insert(event, Box::new(assign));
        self
    }
}

impl System for Problem {
    fn states(&self) -> usize {
        self.states
    }
    fn quadratures(&self) -> usize {
        self.quadratures
    }
    fn rate(&mut self, t: f64, y: &[f64], out: &mut [f64]) {
        (self.rate)(t, y, &self.switches, out);
    }
    /// Central differences: exact enough for Newton's iteration to converge, and no test asks for more.
    fn jacobian(&mut self, t: f64, y: &[f64], out: &mut [f64]) {
        let mut shifted = y.to_vec();
        let (mut above, mut below) = (vec![0.0; y.len()], vec![0.0; y.len()]);
        for column in 0..self.states {
            let step = 6e-6 * y[column].abs().max(1e-3);
            shifted[column] = y[column] + step;
            self.rate(t, &shifted, &mut above);
            shifted[column] = y[column] - step;
            self.rate(t, &shifted, &mut below);
            shifted[column] = y[column];
            for row in 0..self.states {
                out[row * self.states + column] = (above[row] - below[row]) / (2.0 * step);
            }
        }
    }
    fn condition(&mut self, index: usize, t: f64, y: &[f64]) -> bool {
        self.conditions[index](t, y)
    }
    fn observe(&mut self, index: usize, t: f64, y: &[f64]) -> f64 {
        self.observables[index].0(t, y, &self.switches)
    }
    /// Observables of tests are handed the slope of y in place of the switches.
    fn observe_slope(&mut self, index: usize, t: f64, y: &[f64]) -> f64 {
        let mut slope = vec![0.0; y.len()];
        self.rate(t, y, &mut slope);
        self.observables[index].1(t, y, &slope)
    }
    /// The truth held of condition `index` goes to switch `index`, NaN for none; a problem without switches ignores it.
    fn hold(&mut self, index: usize, truth: Option<bool>) {
        if let Some(switch) = self.switches.get_mut(index) {
            *switch = truth.map_or(f64::NAN, |truth| f64::from(u8::from(truth)));
        }
    }
    fn assign(&mut self, event: usize, t: f64, y: &mut [f64]) {
        self.assigns[&event](t, y, &mut self.switches);
    }
    fn switches(&self) -> Vec<f64> {
        self.switches.clone()
    }
    fn restore(&mut self, switches: &[f64]) {
        self.switches = switches.to_vec();
    }
}

/// A problem whose rates are text in the symbols `names`, the first being the independent variable.
pub(super) fn problem_of_text(names: &[String], rates: &[String]) -> Problem {
    let rates: Vec<Expression> = rates
        .iter()
        .map(|text| Expression::parse(text, names))
        .collect();
    Problem::new(rates.len(), move |t, y, _, out| {
        let mut values = vec![t];
        values.extend_from_slice(y);
        for (out, rate) in out.iter_mut().zip(&rates) {
            *out = rate.value(&values);
        }
    })
}

pub(super) fn plan(y0: &[f64]) -> Plan {
    Plan {
        y0: y0.to_vec(),
        ..Plan::default()
    }
}

pub(super) fn event(condition: usize, action: Action) -> EventRule {
    EventRule {
        condition,
        action,
        once: false,
        at_start: Some(false),
    }
}

/// Observed order from errors at steps h and h/2.
pub(super) fn order(coarse: f64, fine: f64) -> f64 {
    float::ln((coarse / fine).abs()) / float::ln(2.0)
}

#[track_caller]
pub(super) fn assert_close(found: f64, expected: f64, tolerance: f64) {
    assert!(
        (found - expected).abs() <= tolerance,
        "found {found:e}, expected {expected:e} within {tolerance:e}"
    );
}
