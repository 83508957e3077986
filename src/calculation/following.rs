//! A march seen step by step, with the equations as they hold in each step.

use std::cell::RefCell;

use super::system::CaseSystem;
use crate::march::{self, Grid, Method, Plan, StepView, System};

/// Called after every step with the equations as they hold in it.
pub type StepVisitor<'v> = dyn FnMut(&StepView, &mut CaseSystem) + 'v;

/// Marches `system` and shows every step to `visit`, with `beside` (the same equations) set to the switches of the step.
pub(super) fn follow(
    system: &mut CaseSystem,
    beside: &mut CaseSystem,
    (method, grid, level): (&Method, &Grid, u32),
    plan: &Plan,
    visit: &mut StepVisitor,
) {
    let switches = RefCell::new(system.switches());
    let before = beside.switches();
    let mut followed = Followed {
        system,
        switches: &switches,
    };
    let mut observer = |step: &StepView| {
        beside.restore(&switches.borrow());
        visit(step, beside);
    };
    march::march_observed(&mut followed, method, grid, level, plan, &mut observer);
    beside.restore(&before);
}

/// A system that tells which switches hold while the march has it in hand.
struct Followed<'a, 'b> {
    system: &'a mut CaseSystem<'b>,
    switches: &'a RefCell<Vec<f64>>,
}

impl System for Followed<'_, '_> {
    fn states(&self) -> usize {
        self.system.states()
    }

    fn quadratures(&self) -> usize {
        self.system.quadratures()
    }

    fn rate(&mut self, t: f64, y: &[f64], out: &mut [f64]) {
        self.system.rate(t, y, out);
    }

    fn jacobian(&mut self, t: f64, y: &[f64], out: &mut [f64]) {
        self.system.jacobian(t, y, out);
    }

    fn condition(&mut self, index: usize, t: f64, y: &[f64]) -> bool {
        self.system.condition(index, t, y)
    }

    fn observe(&mut self, index: usize, t: f64, y: &[f64]) -> f64 {
        self.system.observe(index, t, y)
    }

    fn observe_slope(&mut self, index: usize, t: f64, y: &[f64]) -> f64 {
        self.system.observe_slope(index, t, y)
    }

    fn assign(&mut self, event: usize, t: f64, y: &mut [f64]) {
        self.system.assign(event, t, y);
        *self.switches.borrow_mut() = self.system.switches();
    }

    fn hold(&mut self, index: usize, truth: Option<bool>) {
        self.system.hold(index, truth);
    }

    fn switches(&self) -> Vec<f64> {
        self.system.switches()
    }

    fn restore(&mut self, switches: &[f64]) {
        self.system.restore(switches);
        *self.switches.borrow_mut() = self.system.switches();
    }
}
