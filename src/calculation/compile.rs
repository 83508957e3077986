//! Formulas to tapes, once a model.

use std::collections::BTreeMap;

use super::balance::Summands;
use super::probes::{CompiledProbe, Instant};
use crate::formula::tape::{Builder, NoTables, Register, Symbols, Tape, Tier};
use crate::formula::tree::{Binary, Comparison, Function, Kind, ProbeFunction, Tree};
use crate::march::{Action as MarchAction, EventRule};
use crate::problem::model::{Action, Between, Checked, ClosedForm, Expression, Model};

/// A model's tapes. Slots: the independent variable, states, switches, inputs, held truths of breaks, in this order.
#[derive(Debug)]
pub struct Compiled {
    layout: Layout,
    /// Rates of the states, then of the quadratures.
    pub(super) rates: Tape,
    /// ∂rate/∂state, row by row.
    pub(super) jacobian: Tape,
    pub(super) conditions: Vec<Tape>,
    pub(super) observables: Vec<Tape>,
    pub(super) slopes: Vec<Tape>,
    /// For each event its assignments: slot that is set, tape of its value.
    pub(super) sets: Vec<Vec<(usize, Tape)>>,
    pub(super) event_rules: Vec<EventRule>,
    /// Conditions at whose turns a rate may jump, and at whose turns only its slope does.
    pub(super) breaks: Vec<usize>,
    pub(super) kinks: Vec<usize>,
    /// Observables of the quantities, in their order.
    pub(super) report_observables: Vec<usize>,
    pub(super) probes: Vec<CompiledProbe>,
    pub(super) balances: Vec<CompiledBalance>,
    /// For each closed form its observable, where it is one of a state.
    pub(super) closed_forms: Vec<Option<usize>>,
    /// For each result: its tape over inputs and probes, and the probes that it uses.
    result_tapes: Vec<(Tape, Vec<usize>)>,
}

/// A balance's summands, which may use running integrals.
#[derive(Debug)]
pub(super) struct CompiledBalance {
    pub tape: Tape,
    /// Sign of each summand.
    pub signs: Vec<f64>,
    pub is_linear: bool,
}

#[derive(Clone, Debug)]
pub(super) struct Layout {
    pub states: usize,
    pub switches: usize,
    /// For each running integral of the balances, in the order of their slots: its quadrature.
    pub integrals: Vec<usize>,
    inputs: usize,
    names: Vec<String>,
    tiers: Vec<Tier>,
}

impl Layout {
    fn new(model: &Model) -> Layout {
        let mut names = vec![model.march.variable.clone()];
        let mut tiers = vec![Tier::Time];
        let mut add = |list: Vec<&String>, tier: Tier| {
            for name in list {
                names.push(name.clone());
                tiers.push(tier);
            }
        };
        add(
            model.states.iter().map(|state| &state.symbol).collect(),
            Tier::State,
        );
        add(
            model.switches.iter().map(|switch| &switch.symbol).collect(),
            Tier::State,
        );
        add(
            model.inputs.iter().map(|input| &input.symbol).collect(),
            Tier::Case,
        );
        let holds = jumps(model);
        for index in 0..holds {
            names.push(format!("#hold{index}"));
            tiers.push(Tier::State);
        }
        Layout {
            states: model.states.len(),
            switches: model.switches.len(),
            integrals: Vec::new(),
            inputs: model.inputs.len(),
            names,
            tiers,
        }
    }

    pub fn first_state(&self) -> usize {
        1
    }

    pub fn first_switch(&self) -> usize {
        1 + self.states
    }

    pub fn first_input(&self) -> usize {
        1 + self.states + self.switches
    }

    pub fn first_integral(&self) -> usize {
        self.names.len()
    }

    /// First of the slots that hold the truth of a break while a step is taken.
    pub fn first_hold(&self) -> usize {
        self.first_input() + self.inputs
    }

    fn input_names(&self) -> &[String] {
        &self.names[self.first_input()..self.first_hold()]
    }

    fn symbols(&self) -> Symbols {
        self.names
            .iter()
            .take(self.first_hold())
            .enumerate()
            .map(|(slot, name)| (name.clone(), slot as Register))
            .collect()
    }
}

/// A builder that knows every symbol of the model, quantities included.
struct Workshop<'a> {
    builder: Builder,
    symbols: Symbols,
    lookups: &'a BTreeMap<String, u32>,
    factors: &'a BTreeMap<String, String>,
}

impl Workshop<'_> {
    fn add(&mut self, tree: &Tree) -> Register {
        self.builder.add(
            &with_factors(tree, self.factors),
            &self.symbols,
            self.lookups,
        )
    }
}

impl Compiled {
    pub fn new(model: &Model) -> Compiled {
        let layout = Layout::new(model);
        let balances: Vec<Summands> = model
            .balances
            .iter()
            .map(|balance| Summands::of(model, &balance.formula))
            .collect();
        let mut tiers = layout.tiers.clone();
        tiers.resize(
            tiers.len() + balances.iter().map(Summands::integrals).sum::<usize>(),
            Tier::State,
        );
        let lookups: BTreeMap<String, u32> = model
            .lookups
            .iter()
            .enumerate()
            .map(|(index, lookup)| (lookup.symbol.clone(), index as u32))
            .collect();
        let factors: BTreeMap<String, String> = model
            .lookups
            .iter()
            .filter_map(|lookup| Some((lookup.symbol.clone(), lookup.factor.clone()?)))
            .collect();
        let mut workshop = Workshop {
            builder: Builder::new(tiers),
            symbols: layout.symbols(),
            lookups: &lookups,
            factors: &factors,
        };
        for quantity in &model.quantities {
            let register = workshop.add(&quantity.formula.tree);
            workshop.symbols.insert(quantity.symbol.clone(), register);
        }
        let rate_registers: Vec<Register> = model
            .states
            .iter()
            .map(|state| workshop.add(&state.rate.tree))
            .collect();

        let mut gathered = Gathered {
            layout: &layout,
            workshop,
            observables: Vec::new(),
            conditions: Vec::new(),
            quadratures: Vec::new(),
            probes: Vec::new(),
        };
        let report_observables = model
            .quantities
            .iter()
            .map(|quantity| {
                let register = gathered.workshop.symbols[&quantity.symbol];
                gathered.observable(register)
            })
            .collect();
        let event_rules = model
            .events
            .iter()
            .map(|event| {
                let register = gathered.workshop.add(&event.when.tree);
                EventRule {
                    condition: gathered.condition(register),
                    action: match event.action {
                        Action::Note => MarchAction::Note,
                        Action::Stop => MarchAction::Stop,
                        Action::Set(_) => MarchAction::Set,
                    },
                    once: event.once,
                    at_start: event.at_start,
                }
            })
            .collect();
        let event_ids: Vec<&str> = model.events.iter().map(|event| event.id.as_str()).collect();
        let result_tapes = model
            .results
            .iter()
            .map(|result| gathered.result(&result.formula.tree, &event_ids))
            .collect();
        let sets = model
            .events
            .iter()
            .map(|event| gathered.sets(&event.action))
            .collect();
        let closed_forms = model
            .closed_forms
            .iter()
            .map(|form| gathered.closed_form(form))
            .collect();
        let mut integrals = Vec::new();
        let balances = balances
            .iter()
            .map(|summands| gathered.balance(summands, &mut integrals))
            .collect();

        let (breaks, kinks) = gathered.unsteady(model);

        let Gathered {
            mut workshop,
            observables,
            conditions,
            quadratures,
            probes,
            ..
        } = gathered;
        let all_rates: Vec<Register> = rate_registers.iter().chain(&quadratures).copied().collect();
        let jacobian = jacobian(&mut workshop.builder, &rate_registers, &layout);
        let slopes: Vec<Register> = observables
            .iter()
            .map(|observable| slope(&mut workshop.builder, *observable, &rate_registers, &layout))
            .collect();
        let builder = &workshop.builder;
        let tape = |register: &Register| builder.tape(&[*register]);
        // Rates look at slots instead of conditions, so that a step can be kept on one branch.
        let held: BTreeMap<Register, Register> = breaks
            .iter()
            .enumerate()
            .map(|(position, index)| {
                (
                    conditions[*index],
                    (layout.first_hold() + position) as Register,
                )
            })
            .collect();
        let branch = builder.redirected(&held);
        Compiled {
            rates: branch.tape(&all_rates),
            jacobian: branch.tape(&jacobian),
            conditions: conditions.iter().map(tape).collect(),
            observables: observables.iter().map(tape).collect(),
            slopes: slopes.iter().map(tape).collect(),
            sets,
            event_rules,
            breaks,
            kinks,
            report_observables,
            probes,
            balances,
            closed_forms,
            result_tapes,
            layout: Layout {
                integrals,
                ..layout
            },
        }
    }

    pub(super) fn layout(&self) -> &Layout {
        &self.layout
    }

    pub fn quadratures(&self) -> usize {
        self.rates.outputs() - self.layout.states
    }

    /// Instructions of one slope evaluation.
    pub fn operations(&self) -> usize {
        self.rates.state_len()
    }

    /// Value of a quantity or a formula of inputs, in SI.
    pub fn of_inputs(&self, expression: &Expression, inputs: &[f64]) -> f64 {
        match expression {
            Expression::Quantity { value_si, .. } => *value_si,
            Expression::Formula(formula) => of_inputs(&formula.tree, &self.input_names(), inputs),
        }
    }

    pub(super) fn input_names(&self) -> Vec<String> {
        self.layout.input_names().to_vec()
    }

    /// Means and integrals stand at the end of the march, in its quadratures.
    pub(super) fn read_quadratures(
        &self,
        y: &[f64],
        at: f64,
        from: f64,
        values: &mut [Option<Option<f64>>],
    ) {
        let span = at - from;
        for (probe, value) in self.probes.iter().zip(values) {
            match probe {
                CompiledProbe::Integral(quadrature) => {
                    *value = Some(Some(y[self.layout.states + quadrature]))
                }
                CompiledProbe::Mean(quadrature) => {
                    *value = Some(Some(y[self.layout.states + quadrature] / span))
                }
                _ => {}
            }
        }
    }

    /// For each result, how many of the first steps, which end at `ends`, had begun by the earliest of its instants.
    ///
    /// `None` when no instant lies among them; an instant at `from` itself needs no step.
    pub(super) fn steps_begun(
        &self,
        instants: &[Option<f64>],
        from: f64,
        ends: &[f64],
    ) -> Vec<Option<usize>> {
        let begun = |probe: &usize| {
            let distance = (instants[*probe]? - from).abs();
            let step = ends.iter().position(|end| distance <= (end - from).abs())?;
            (distance > 0.0).then_some(step + 1)
        };
        self.result_tapes
            .iter()
            .map(|(_, used)| used.iter().filter_map(begun).min())
            .collect()
    }

    /// Values of the results: none where one rests on an event that never came.
    pub(super) fn results(
        &self,
        inputs: &[f64],
        values: &[Option<Option<f64>>],
    ) -> Vec<Option<f64>> {
        let probe_values: Vec<Option<f64>> = values.iter().map(|value| value.flatten()).collect();
        self.result_tapes
            .iter()
            .map(|(tape, used)| {
                let mut registers = tape.registers();
                registers[..inputs.len()].copy_from_slice(inputs);
                for (position, probe) in used.iter().enumerate() {
                    registers[inputs.len() + position] = probe_values[*probe].unwrap_or(f64::NAN);
                }
                tape.run_case(&mut registers, &NoTables);
                let value = tape.output(0, &registers);
                let lacks_one = used.iter().any(|probe| probe_values[*probe].is_none());
                if value.is_nan() && lacks_one {
                    None
                } else {
                    Some(value)
                }
            })
            .collect()
    }
}

/// Value of a formula of inputs.
pub(super) fn of_inputs(tree: &Tree, names: &[String], inputs: &[f64]) -> f64 {
    let mut builder = Builder::new(vec![Tier::Case; names.len()]);
    let symbols: Symbols = names
        .iter()
        .enumerate()
        .map(|(slot, name)| (name.clone(), slot as Register))
        .collect();
    let output = builder.add(tree, &symbols, &BTreeMap::new());
    let tape = builder.tape(&[output]);
    let mut registers = tape.registers();
    registers[..inputs.len()].copy_from_slice(inputs);
    tape.run_case(&mut registers, &NoTables);
    tape.output(0, &registers)
}

/// Calls of a lookup with a factor become factor times call.
pub(super) fn with_factors(tree: &Tree, factors: &BTreeMap<String, String>) -> Tree {
    if factors.is_empty() {
        return tree.clone();
    }
    tree.replaced(&mut |part| {
        let Kind::Lookup(name, argument) = &part.kind else {
            return None;
        };
        let factor = factors.get(name)?;
        let call = Tree::new(
            Kind::Lookup(name.clone(), Box::new(with_factors(argument, factors))),
            part.span.clone(),
        );
        let symbol = Tree::new(Kind::Symbol(factor.clone()), part.span.clone());
        Some(Tree::new(
            Kind::Binary(Binary::Multiply, Box::new(symbol), Box::new(call)),
            part.span.clone(),
        ))
    })
}

fn jacobian(builder: &mut Builder, rates: &[Register], layout: &Layout) -> Vec<Register> {
    let zero = builder.constant(0.0);
    let mut entries = Vec::with_capacity(rates.len() * rates.len());
    for rate in rates {
        for state in 0..layout.states {
            let slot = (layout.first_state() + state) as Register;
            entries.push(builder.derivative(*rate, slot).unwrap_or(zero));
        }
    }
    entries
}

/// ∂x/∂t + Σ ∂x/∂y_i · f_i.
fn slope(
    builder: &mut Builder,
    observable: Register,
    rates: &[Register],
    layout: &Layout,
) -> Register {
    let mut sum = builder
        .derivative(observable, 0)
        .unwrap_or_else(|| builder.constant(0.0));
    for (state, rate) in rates.iter().enumerate() {
        let slot = (layout.first_state() + state) as Register;
        if let Some(partial) = builder.derivative(observable, slot) {
            let product = builder.binary(Binary::Multiply, partial, *rate);
            sum = builder.binary(Binary::Add, sum, product);
        }
    }
    sum
}

/// What results and events need of the march, gathered while their formulas are compiled.
struct Gathered<'a> {
    layout: &'a Layout,
    workshop: Workshop<'a>,
    observables: Vec<Register>,
    conditions: Vec<Register>,
    quadratures: Vec<Register>,
    probes: Vec<CompiledProbe>,
}

/// Index of `item` in `list`, added if it is new.
fn index_of<T: PartialEq>(list: &mut Vec<T>, item: T) -> usize {
    list.iter()
        .position(|other| *other == item)
        .unwrap_or_else(|| {
            list.push(item);
            list.len() - 1
        })
}

/// Knots of one lookup beyond which it counts as smooth: a curve given by so many points has no corner that matters.
const MOST_KNOTS: usize = 64;

impl Gathered<'_> {
    /// Conditions on states at whose turns the rates jump or bend, by the formulas that the rates rest on.
    fn unsteady(&mut self, model: &Model) -> (Vec<usize>, Vec<usize>) {
        let (mut breaks, mut kinks) = (Vec::new(), Vec::new());
        for tree in trees_of_rates(model) {
            tree.walk(&mut |part| {
                for (condition, is_jump) in turns_of(part, model) {
                    let register = self.workshop.add(&condition);
                    // Turns of the variable alone are grid points already.
                    if self.workshop.builder.tier(register) != Tier::State {
                        continue;
                    }
                    let index = self.condition(register);
                    let list = if is_jump { &mut breaks } else { &mut kinks };
                    index_of(list, index);
                }
            });
        }
        kinks.retain(|index| !breaks.contains(index));
        (breaks, kinks)
    }

    fn observable(&mut self, register: Register) -> usize {
        index_of(&mut self.observables, register)
    }

    fn condition(&mut self, register: Register) -> usize {
        index_of(&mut self.conditions, register)
    }

    fn sets(&mut self, action: &Action) -> Vec<(usize, Tape)> {
        let Action::Set(list) = action else {
            return Vec::new();
        };
        list.iter()
            .filter_map(|(symbol, formula)| {
                let slot = self.layout.names.iter().position(|name| name == symbol)?;
                let register = self.workshop.add(&formula.tree);
                Some((slot, self.workshop.builder.tape(&[register])))
            })
            .collect()
    }

    fn closed_form(&mut self, form: &ClosedForm) -> Option<usize> {
        matches!(form.checked, Checked::State(_)).then(|| {
            let register = self.workshop.add(&form.formula.tree);
            self.observable(register)
        })
    }

    /// Running integrals become slots of their own, filled from the quadratures when the balance is drawn up.
    fn balance(&mut self, summands: &Summands, integrals: &mut Vec<usize>) -> CompiledBalance {
        let first = self.layout.first_integral();
        let registers: Vec<Register> = summands
            .list
            .iter()
            .map(|(_, tree)| {
                let replaced = tree.replaced(&mut |part| {
                    let Kind::Probe(ProbeFunction::Integral, arguments) = &part.kind else {
                        return None;
                    };
                    let register = self.workshop.add(&arguments[0]);
                    integrals.push(index_of(&mut self.quadratures, register));
                    let slot = first + integrals.len() - 1;
                    self.workshop
                        .symbols
                        .insert(probe_symbol(slot), slot as Register);
                    Some(Tree::new(
                        Kind::Symbol(probe_symbol(slot)),
                        part.span.clone(),
                    ))
                });
                self.workshop.add(&replaced)
            })
            .collect();
        let signs = summands.list.iter().map(|(sign, _)| *sign).collect();
        CompiledBalance {
            tape: self.workshop.builder.tape(&registers),
            signs,
            is_linear: summands.is_linear,
        }
    }

    /// A result's formula with every result function replaced by the value of a probe.
    fn result(&mut self, tree: &Tree, events: &[&str]) -> (Tape, Vec<usize>) {
        let mut used = Vec::new();
        let replaced = self.with_probes(tree, events, &mut used);
        let names: Vec<String> = self.layout.input_names().to_vec();
        let mut builder = Builder::new(vec![Tier::Case; names.len() + used.len()]);
        let mut symbols: Symbols = names
            .iter()
            .enumerate()
            .map(|(slot, name)| (name.clone(), slot as Register))
            .collect();
        for (position, probe) in used.iter().enumerate() {
            symbols.insert(probe_symbol(*probe), (names.len() + position) as Register);
        }
        let output = builder.add(&replaced, &symbols, &BTreeMap::new());
        (builder.tape(&[output]), used)
    }

    fn with_probes(&mut self, tree: &Tree, events: &[&str], used: &mut Vec<usize>) -> Tree {
        tree.replaced(&mut |part| {
            let Kind::Probe(function, arguments) = &part.kind else {
                return None;
            };
            let probe = self.probe(*function, arguments, events)?;
            let index = index_of(&mut self.probes, probe);
            index_of(used, index);
            Some(Tree::new(
                Kind::Symbol(probe_symbol(index)),
                part.span.clone(),
            ))
        })
    }

    fn probe(
        &mut self,
        function: ProbeFunction,
        arguments: &[Tree],
        events: &[&str],
    ) -> Option<CompiledProbe> {
        let event_of = |tree: &Tree| match &tree.kind {
            Kind::Symbol(id) => events.iter().position(|event| event == id),
            _ => None,
        };
        let first = &arguments[0];
        Some(match function {
            ProbeFunction::TimeOf => CompiledProbe::TimeOf {
                event: event_of(first)?,
                last: false,
            },
            ProbeFunction::TimeOfLast => CompiledProbe::TimeOf {
                event: event_of(first)?,
                last: true,
            },
            ProbeFunction::CountOf => CompiledProbe::CountOf(event_of(first)?),
            ProbeFunction::TimeWhile => {
                let register = self.workshop.add(first);
                CompiledProbe::TimeWhile(self.condition(register))
            }
            ProbeFunction::Integral | ProbeFunction::Mean => {
                let register = self.workshop.add(first);
                let quadrature = index_of(&mut self.quadratures, register);
                if function == ProbeFunction::Integral {
                    CompiledProbe::Integral(quadrature)
                } else {
                    CompiledProbe::Mean(quadrature)
                }
            }
            ProbeFunction::ValueAt => {
                let register = self.workshop.add(first);
                let observable = self.observable(register);
                match &arguments[1].kind {
                    Kind::Probe(ProbeFunction::TimeOf, inner) => CompiledProbe::AtEvent {
                        observable,
                        event: event_of(&inner[0])?,
                        last: false,
                    },
                    Kind::Probe(ProbeFunction::TimeOfLast, inner) => CompiledProbe::AtEvent {
                        observable,
                        event: event_of(&inner[0])?,
                        last: true,
                    },
                    _ => {
                        let mut used = Vec::new();
                        let tree = self.with_probes(&arguments[1], events, &mut used);
                        let names = self.layout.input_names().to_vec();
                        CompiledProbe::AtInstant {
                            observable,
                            instant: Instant { tree, names, used },
                        }
                    }
                }
            }
            ProbeFunction::Initial
            | ProbeFunction::Final
            | ProbeFunction::Largest
            | ProbeFunction::Smallest
            | ProbeFunction::TimeOfLargest
            | ProbeFunction::TimeOfSmallest => {
                let register = self.workshop.add(first);
                let observable = self.observable(register);
                CompiledProbe::OfExpression {
                    function,
                    observable,
                }
            }
        })
    }
}

/// A symbol that no problem file can contain.
pub(super) fn probe_symbol(index: usize) -> String {
    format!("#{index}")
}

/// How many conditions at most may make a rate jump.
fn jumps(model: &Model) -> usize {
    let mut count = 0;
    for tree in trees_of_rates(model) {
        tree.walk(&mut |part| {
            count += turns_of(part, model)
                .iter()
                .filter(|(_, is_jump)| *is_jump)
                .count();
        });
    }
    count
}

/// The formulas on which the rates rest: the rates themselves and the quantities that they use.
fn trees_of_rates(model: &Model) -> Vec<&Tree> {
    let mut trees: Vec<&Tree> = model.states.iter().map(|state| &state.rate.tree).collect();
    let mut next = 0;
    let mut seen: Vec<&str> = Vec::new();
    while next < trees.len() {
        for (symbol, _) in trees[next].symbols() {
            if let Some(quantity) = model
                .quantities
                .iter()
                .find(|quantity| quantity.symbol == symbol)
                && !seen.contains(&quantity.symbol.as_str())
            {
                seen.push(&quantity.symbol);
                trees.push(&quantity.formula.tree);
            }
        }
        next += 1;
    }
    trees
}

/// Conditions at whose turns this node's value jumps (true) or bends (false).
fn turns_of(part: &Tree, model: &Model) -> Vec<(Tree, bool)> {
    let less = |a: &Tree, b: Tree| {
        Tree::new(
            Kind::Compare(Comparison::Less, Box::new(a.clone()), Box::new(b)),
            part.span.clone(),
        )
    };
    let number = |value: f64| Tree::new(Kind::Number(value), part.span.clone());
    match &part.kind {
        Kind::If(condition, ..) => {
            let mut comparisons = Vec::new();
            condition.walk(&mut |inner| {
                if matches!(inner.kind, Kind::Compare(..)) {
                    comparisons.push((inner.clone(), true));
                }
            });
            comparisons
        }
        Kind::Call(Function::Min | Function::Max, list) => {
            vec![(less(&list[0], list[1].clone()), false)]
        }
        Kind::Call(Function::Abs, list) => vec![(less(&list[0], number(0.0)), false)],
        Kind::Call(Function::Sign, list) => vec![(less(&list[0], number(0.0)), true)],
        Kind::Lookup(name, argument) => {
            let Some(lookup) = model.lookups.iter().find(|lookup| &lookup.symbol == name) else {
                return Vec::new();
            };
            let is_jump = match lookup.between {
                Between::Step => true,
                Between::Linear => false,
                Between::MonotoneCubic => return Vec::new(),
            };
            if lookup.points_si.len() > MOST_KNOTS {
                return Vec::new();
            }
            lookup
                .points_si
                .iter()
                .map(|(knot, _)| (less(argument, number(*knot)), is_jump))
                .collect()
        }
        _ => Vec::new(),
    }
}
