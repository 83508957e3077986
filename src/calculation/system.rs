//! Tapes as the march sees them: a [`System`] for one case.

use super::compile::{Compiled, Layout};
use crate::float;
use crate::formula::tape::{Tables, Tape};
use crate::march::{self, System};
use crate::problem::model::{Between, Case, Model, Outside};

/// A tape with its registers, which remembers the instant that it was last run for.
struct Engine<'a> {
    tape: &'a Tape,
    registers: Vec<f64>,
    /// Bits of the instant for which the time tier holds.
    instant: Option<u64>,
}

impl<'a> Engine<'a> {
    fn new(tape: &'a Tape, layout: &Layout, inputs: &[f64], tables: &LookupTables) -> Engine<'a> {
        let mut registers = tape.registers();
        let first = layout.first_input();
        registers[first..first + inputs.len()].copy_from_slice(inputs);
        tape.run_case(&mut registers, tables);
        Engine {
            tape,
            registers,
            instant: None,
        }
    }

    #[inline]
    fn run(&mut self, t: f64, states: &[f64], switches: &[f64], tables: &LookupTables) {
        if self.instant != Some(t.to_bits()) {
            self.registers[0] = t;
            self.tape.run_time(&mut self.registers, tables);
            self.instant = Some(t.to_bits());
        }
        self.registers[1..=states.len()].copy_from_slice(states);
        self.registers[1 + states.len()..1 + states.len() + switches.len()]
            .copy_from_slice(switches);
        self.tape.run_state(&mut self.registers, tables);
    }

    fn output(&self, index: usize) -> f64 {
        self.tape.output(index, &self.registers)
    }
}

/// The lookups of a case, by index.
pub struct LookupTables {
    tables: Vec<march::Lookup>,
}

impl LookupTables {
    fn new(model: &Model, case: &Case) -> LookupTables {
        let tables = (0..model.lookups.len())
            .map(|index| {
                let lookup = &model.lookups[case.lookups.get(&index).copied().unwrap_or(index)];
                let (x, y) = lookup.points_si.iter().copied().unzip();
                let between = match lookup.between {
                    Between::Linear => march::Between::Linear,
                    Between::MonotoneCubic => march::Between::MonotoneCubic,
                    Between::Step => march::Between::Step,
                };
                let outside = match lookup.outside {
                    Outside::Refuse => march::Outside::Refuse,
                    Outside::Hold => march::Outside::Hold,
                };
                march::Lookup::new(x, y, between, outside)
            })
            .collect::<Result<Vec<_>, _>>()
            // The points of a model have been checked.
            .unwrap_or_default();
        LookupTables { tables }
    }
}

impl Tables for LookupTables {
    fn value(&self, table: usize, argument: f64) -> f64 {
        self.tables
            .get(table)
            .map_or(f64::NAN, |lookup| lookup.value(argument))
    }

    fn slope(&self, table: usize, argument: f64) -> f64 {
        self.tables
            .get(table)
            .map_or(f64::NAN, |lookup| lookup.slope(argument))
    }
}

/// A model's equations for one case.
pub struct CaseSystem<'a> {
    layout: &'a Layout,
    quadratures: usize,
    tables: LookupTables,
    switches: Vec<f64>,
    /// Conditions at which rates jump, and the truth that each is held at, if it is.
    breaks: &'a [usize],
    held: Vec<Option<bool>>,
    rates: Engine<'a>,
    jacobian: Engine<'a>,
    conditions: Vec<Engine<'a>>,
    observables: Vec<Engine<'a>>,
    slopes: Vec<Engine<'a>>,
    sets: Vec<Vec<(usize, Engine<'a>)>>,
    /// Each with the signs of its summands.
    balances: Vec<(Engine<'a>, &'a [f64])>,
}

impl<'a> CaseSystem<'a> {
    pub fn new(model: &Model, compiled: &'a Compiled, case: &Case) -> CaseSystem<'a> {
        let layout = compiled.layout();
        let tables = LookupTables::new(model, case);
        let engine = |tape: &'a Tape| Engine::new(tape, layout, &case.values, &tables);
        CaseSystem {
            layout,
            quadratures: compiled.quadratures(),
            switches: model.switches.iter().map(|switch| switch.initial).collect(),
            breaks: &compiled.breaks,
            held: vec![None; compiled.breaks.len()],
            rates: engine(&compiled.rates),
            jacobian: engine(&compiled.jacobian),
            conditions: compiled.conditions.iter().map(engine).collect(),
            observables: compiled.observables.iter().map(engine).collect(),
            slopes: compiled.slopes.iter().map(engine).collect(),
            sets: compiled
                .sets
                .iter()
                .map(|list| {
                    list.iter()
                        .map(|(slot, tape)| (*slot, engine(tape)))
                        .collect()
                })
                .collect(),
            balances: compiled
                .balances
                .iter()
                .map(|balance| (engine(&balance.tape), balance.signs.as_slice()))
                .collect(),
            tables,
        }
    }

    /// Value of a balance at an instant, and the largest magnitude of its summands; `y` holds the quadratures too.
    pub fn balance(&mut self, index: usize, t: f64, y: &[f64]) -> (f64, f64) {
        let (engine, signs) = &mut self.balances[index];
        let first = self.layout.first_integral();
        for (slot, quadrature) in self.layout.integrals.iter().enumerate() {
            engine.registers[first + slot] = y[self.layout.states + quadrature];
        }
        engine.run(t, &y[..self.layout.states], &self.switches, &self.tables);
        let terms: Vec<f64> = signs
            .iter()
            .enumerate()
            .map(|(index, sign)| sign * engine.output(index))
            .collect();
        (
            float::sum(&terms),
            terms.iter().map(|term| term.abs()).fold(0.0, float::max),
        )
    }

    /// The truth of every break at (t, y), or what it is held at, into the slots of rates and Jacobian.
    fn set_branches(&mut self, t: f64, y: &[f64]) {
        for position in 0..self.breaks.len() {
            let truth = match self.held[position] {
                Some(truth) => truth,
                None => self.condition(self.breaks[position], t, y),
            };
            let slot = self.layout.first_hold() + position;
            let value = if truth { 1.0 } else { 0.0 };
            self.rates.registers[slot] = value;
            self.jacobian.registers[slot] = value;
        }
    }

    /// The lookups of this case.
    pub fn tables(&self) -> &LookupTables {
        &self.tables
    }
}

impl System for CaseSystem<'_> {
    fn states(&self) -> usize {
        self.layout.states
    }

    fn quadratures(&self) -> usize {
        self.quadratures
    }

    fn rate(&mut self, t: f64, y: &[f64], out: &mut [f64]) {
        self.set_branches(t, y);
        self.rates
            .run(t, &y[..self.layout.states], &self.switches, &self.tables);
        for (index, slope) in out.iter_mut().enumerate() {
            *slope = self.rates.output(index);
        }
    }

    fn jacobian(&mut self, t: f64, y: &[f64], out: &mut [f64]) {
        self.set_branches(t, y);
        self.jacobian
            .run(t, &y[..self.layout.states], &self.switches, &self.tables);
        for (index, entry) in out.iter_mut().enumerate() {
            *entry = self.jacobian.output(index);
        }
    }

    fn condition(&mut self, index: usize, t: f64, y: &[f64]) -> bool {
        let engine = &mut self.conditions[index];
        engine.run(t, &y[..self.layout.states], &self.switches, &self.tables);
        engine.output(0) != 0.0
    }

    fn observe(&mut self, index: usize, t: f64, y: &[f64]) -> f64 {
        let engine = &mut self.observables[index];
        engine.run(t, &y[..self.layout.states], &self.switches, &self.tables);
        engine.output(0)
    }

    fn observe_slope(&mut self, index: usize, t: f64, y: &[f64]) -> f64 {
        let engine = &mut self.slopes[index];
        engine.run(t, &y[..self.layout.states], &self.switches, &self.tables);
        engine.output(0)
    }

    fn hold(&mut self, index: usize, truth: Option<bool>) {
        if let Some(position) = self.breaks.iter().position(|condition| *condition == index) {
            self.held[position] = truth;
        }
    }

    fn assign(&mut self, event: usize, t: f64, y: &mut [f64]) {
        let states = self.layout.states;
        let mut values = Vec::with_capacity(self.sets[event].len());
        for (slot, engine) in &mut self.sets[event] {
            engine.run(t, &y[..states], &self.switches, &self.tables);
            values.push((*slot, engine.output(0)));
        }
        for (slot, value) in values {
            if slot >= self.layout.first_switch() {
                self.switches[slot - self.layout.first_switch()] = value;
            } else {
                y[slot - self.layout.first_state()] = value;
            }
        }
    }

    fn switches(&self) -> Vec<f64> {
        self.switches.clone()
    }

    fn restore(&mut self, switches: &[f64]) {
        self.switches.copy_from_slice(switches);
    }
}
