//! Formulas compiled to a tape: single-assignment instructions over one array of registers.
//!
//! Owns: compilation with shared subexpressions and folded constants, tiers, evaluation. Does not own: what fills
//! the slots (`calculation`), the values of lookups (a [`Tables`] handed in).
//!
//! The first registers are *slots*: the independent variable, states, switches, inputs. Every instruction writes
//! the register after the slots that has its own index. Instructions are sorted by tier, so that what depends on
//! inputs alone runs once a case and what depends on the variable alone once an instant.

use std::collections::BTreeMap;

use super::tree::{Binary, Comparison, Function, Kind, Tree};
use crate::float;
use crate::units::{Kind as ScaleKind, Unit};

pub type Register = u32;

/// One operation; operands are registers, conditions are 1 (true) and 0 (false).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Instruction {
    /// The bits of a float.
    Constant(u64),
    Negate(Register),
    Add(Register, Register),
    Subtract(Register, Register),
    Multiply(Register, Register),
    Divide(Register, Register),
    Power(Register, Register),
    IntegerPower(Register, i32),
    Call(Function, Register),
    CallTwo(Function, Register, Register),
    Compare(Comparison, Register, Register),
    And(Register, Register),
    Or(Register, Register),
    Not(Register),
    /// Condition, value if true, value if not.
    Select(Register, Register, Register),
    Lookup(u32, Register),
    LookupSlope(u32, Register),
}

/// Values of tabulated functions by their index.
pub trait Tables {
    /// The value at `argument`; NaN where the table refuses.
    fn value(&self, table: usize, argument: f64) -> f64;
    /// The derivative at `argument`.
    fn slope(&self, table: usize, argument: f64) -> f64;
}

/// A problem without lookups.
pub struct NoTables;

impl Tables for NoTables {
    fn value(&self, _: usize, _: f64) -> f64 {
        f64::NAN
    }
    fn slope(&self, _: usize, _: f64) -> f64 {
        f64::NAN
    }
}

/// What an instruction's value depends on.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Tier {
    Constant,
    /// Inputs: once a case.
    Case,
    /// The independent variable: once an instant.
    Time,
    /// States and switches: every evaluation.
    State,
}

/// Builds instructions; equal ones are shared.
#[derive(Clone, Debug)]
pub struct Builder {
    slot_tiers: Vec<Tier>,
    instructions: Vec<Instruction>,
    known: BTreeMap<Instruction, Register>,
}

/// What a symbol of a formula stands for on the tape.
pub type Symbols = BTreeMap<String, Register>;

impl Builder {
    /// A builder over slots of the given tiers.
    pub fn new(slot_tiers: Vec<Tier>) -> Builder {
        Builder {
            slot_tiers,
            instructions: Vec::new(),
            known: BTreeMap::new(),
        }
    }

    /// Compiles `tree`; `symbols` and `tables` give registers of symbols and indices of lookups.
    ///
    /// The tree has passed the dimension check: every name in it is known.
    pub fn add(
        &mut self,
        tree: &Tree,
        symbols: &Symbols,
        tables: &BTreeMap<String, u32>,
    ) -> Register {
        let mut go = |tree: &Tree| self.add(tree, symbols, tables);
        match &tree.kind {
            Kind::Number(value) => self.constant(*value),
            Kind::Symbol(name) if name == "pi" => self.constant(std::f64::consts::PI),
            Kind::Symbol(name) => match symbols.get(name) {
                Some(register) => *register,
                None => self.constant(f64::NAN),
            },
            Kind::Negate(a) => {
                let a = go(a);
                self.push(Instruction::Negate(a))
            }
            Kind::Binary(operator, a, b) => {
                let (a, b) = (go(a), go(b));
                self.binary(*operator, a, b)
            }
            Kind::Compare(comparison, a, b) => {
                let (a, b) = (go(a), go(b));
                self.push(Instruction::Compare(*comparison, a, b))
            }
            Kind::And(a, b) => {
                let (a, b) = (go(a), go(b));
                self.push(Instruction::And(a, b))
            }
            Kind::Or(a, b) => {
                let (a, b) = (go(a), go(b));
                self.push(Instruction::Or(a, b))
            }
            Kind::Not(a) => {
                let a = go(a);
                self.push(Instruction::Not(a))
            }
            Kind::If(c, a, b) => {
                let (c, a, b) = (go(c), go(a), go(b));
                self.push(Instruction::Select(c, a, b))
            }
            Kind::Call(function, arguments) => {
                let registers: Vec<Register> = arguments.iter().map(go).collect();
                match registers[..] {
                    [a] => self.push(Instruction::Call(*function, a)),
                    [a, b] => self.push(Instruction::CallTwo(*function, a, b)),
                    _ => self.constant(f64::NAN),
                }
            }
            Kind::Lookup(name, argument) => {
                let argument = go(argument);
                match tables.get(name) {
                    Some(table) => self.push(Instruction::Lookup(*table, argument)),
                    None => self.constant(f64::NAN),
                }
            }
            // A result's probes are replaced by symbols before compilation.
            Kind::Probe(..) => self.constant(f64::NAN),
            Kind::NumberIn(argument, unit) => {
                let argument = go(argument);
                match Unit::parse(unit) {
                    Ok(unit) => self.number_in(argument, &unit),
                    Err(_) => self.constant(f64::NAN),
                }
            }
            Kind::Measure(value, unit) => {
                let value = Unit::parse(unit)
                    .ok()
                    .and_then(|unit| unit.to_si(*value, None).ok())
                    .unwrap_or(f64::NAN);
                self.constant(value)
            }
        }
    }

    pub fn constant(&mut self, value: f64) -> Register {
        self.push(Instruction::Constant(value.to_bits()))
    }

    pub fn binary(&mut self, operator: Binary, a: Register, b: Register) -> Register {
        match operator {
            Binary::Add => self.push(Instruction::Add(a, b)),
            Binary::Subtract => self.push(Instruction::Subtract(a, b)),
            Binary::Multiply => self.push(Instruction::Multiply(a, b)),
            Binary::Divide => self.push(Instruction::Divide(a, b)),
            Binary::Power => match self.constant_of(b) {
                Some(0.5) => self.push(Instruction::Call(Function::Sqrt, a)),
                Some(exponent) if exponent.fract() == 0.0 && exponent.abs() <= 64.0 => {
                    self.push(Instruction::IntegerPower(a, exponent as i32))
                }
                _ => self.push(Instruction::Power(a, b)),
            },
        }
    }

    /// The plain number of an SI value in `unit`, spelled as the same operations that the unit itself uses.
    fn number_in(&mut self, argument: Register, unit: &Unit) -> Register {
        let denominator = self.constant(unit.denominator());
        let numerator = self.constant(unit.numerator());
        let product = self.push(Instruction::Multiply(argument, denominator));
        let quotient = self.push(Instruction::Divide(product, numerator));
        match unit.kind() {
            ScaleKind::AbsoluteTemperature { offset } => {
                let offset = self.constant(offset);
                self.push(Instruction::Subtract(quotient, offset))
            }
            ScaleKind::Plain | ScaleKind::Gauge => quotient,
        }
    }

    /// Adds an instruction, or finds the equal one; folds it when all its operands are constants.
    pub fn push(&mut self, instruction: Instruction) -> Register {
        let instruction = self.folded(instruction).unwrap_or(instruction);
        if let Some(register) = self.known.get(&instruction) {
            return *register;
        }
        let register = (self.slot_tiers.len() + self.instructions.len()) as Register;
        self.instructions.push(instruction);
        self.known.insert(instruction, register);
        register
    }

    fn folded(&self, instruction: Instruction) -> Option<Instruction> {
        if matches!(
            instruction,
            Instruction::Constant(_) | Instruction::Lookup(..) | Instruction::LookupSlope(..)
        ) {
            return None;
        }
        let operands = operands(instruction);
        let values: Option<Vec<f64>> = operands
            .iter()
            .map(|register| self.constant_of(*register))
            .collect();
        let values = values?;
        let mut position = 0;
        let value = apply(
            renumbered(instruction, |_| {
                position += 1;
                position - 1
            }),
            &values,
            &NoTables,
        );
        Some(Instruction::Constant(value.to_bits()))
    }

    pub fn constant_of(&self, register: Register) -> Option<f64> {
        match self.instruction(register)? {
            Instruction::Constant(bits) => Some(f64::from_bits(bits)),
            _ => None,
        }
    }

    /// The instruction that writes `register`; none for a slot.
    pub fn instruction(&self, register: Register) -> Option<Instruction> {
        let index = (register as usize).checked_sub(self.slot_tiers.len())?;
        self.instructions.get(index).copied()
    }

    /// What each register depends on, slots first.
    fn tiers(&self) -> Vec<Tier> {
        let mut tiers = self.slot_tiers.clone();
        for instruction in &self.instructions {
            let tier = operands(*instruction)
                .iter()
                .map(|operand| tiers[*operand as usize])
                .max();
            tiers.push(tier.unwrap_or(Tier::Constant));
        }
        tiers
    }

    /// What `register` depends on.
    pub fn tier(&self, register: Register) -> Tier {
        self.tiers()[register as usize]
    }

    pub fn slots(&self) -> usize {
        self.slot_tiers.len()
    }

    /// Registers in evaluation order on which `outputs` depend, slots left out.
    pub fn needed(&self, outputs: &[Register]) -> Vec<Register> {
        let mut is_needed = vec![false; self.slots() + self.instructions.len()];
        for output in outputs {
            is_needed[*output as usize] = true;
        }
        for index in (self.slots()..is_needed.len()).rev() {
            if is_needed[index] {
                for operand in operands(self.instructions[index - self.slots()]) {
                    is_needed[operand as usize] = true;
                }
            }
        }
        (self.slots()..is_needed.len())
            .filter(|index| is_needed[*index])
            .map(|index| index as Register)
            .collect()
    }

    /// The same instructions, with other registers in place of those that `to` maps.
    ///
    /// What was computed for a mapped register is computed no more: a caller fills the slot that stands for it.
    #[must_use]
    pub fn redirected(&self, to: &BTreeMap<Register, Register>) -> Builder {
        let redirect = |register: Register| to.get(&register).copied().unwrap_or(register);
        let instructions: Vec<Instruction> = self
            .instructions
            .iter()
            .map(|instruction| renumbered(*instruction, redirect))
            .collect();
        Builder {
            instructions,
            ..self.clone()
        }
    }

    /// The tape that computes `outputs`, with nothing else on it.
    pub fn tape(&self, outputs: &[Register]) -> Tape {
        let slots = self.slots();
        let tiers = self.tiers();
        let mut order = self.needed(outputs);
        // A stable sort: an operand is never of a later tier than its user, so evaluation order holds.
        order.sort_by_key(|register| tiers[*register as usize]);
        let mut place: Vec<Register> = (0..(slots + self.instructions.len()) as Register).collect();
        for (position, register) in order.iter().enumerate() {
            place[*register as usize] = (slots + position) as Register;
        }
        let instructions: Vec<Instruction> = order
            .iter()
            .map(|register| {
                renumbered(self.instructions[*register as usize - slots], |operand| {
                    place[operand as usize]
                })
            })
            .collect();
        let count = |tier: Tier| {
            order
                .iter()
                .filter(|register| tiers[**register as usize] <= tier)
                .count()
        };
        Tape {
            slots,
            case_start: count(Tier::Constant),
            time_start: count(Tier::Case),
            state_start: count(Tier::Time),
            instructions,
            outputs: outputs
                .iter()
                .map(|output| place[*output as usize])
                .collect(),
        }
    }
}

/// A compiled set of formulas.
#[derive(Clone, Debug)]
pub struct Tape {
    slots: usize,
    case_start: usize,
    time_start: usize,
    state_start: usize,
    instructions: Vec<Instruction>,
    outputs: Vec<Register>,
}

impl Tape {
    /// Number of instructions.
    pub fn len(&self) -> usize {
        self.instructions.len()
    }

    pub fn is_empty(&self) -> bool {
        self.instructions.is_empty()
    }

    /// Instructions that run at every evaluation.
    pub fn state_len(&self) -> usize {
        self.instructions.len() - self.state_start
    }

    /// Registers with constants in place; slots zero.
    pub fn registers(&self) -> Vec<f64> {
        let mut registers = vec![0.0; self.slots + self.instructions.len()];
        for (index, instruction) in self.instructions[..self.case_start].iter().enumerate() {
            if let Instruction::Constant(bits) = instruction {
                registers[self.slots + index] = f64::from_bits(*bits);
            }
        }
        registers
    }

    /// Runs what depends on inputs alone; inputs are in their slots.
    pub fn run_case(&self, registers: &mut [f64], tables: &dyn Tables) {
        self.run(self.case_start, self.time_start, registers, tables);
    }

    /// Runs what depends on the independent variable; it is in its slot.
    pub fn run_time(&self, registers: &mut [f64], tables: &dyn Tables) {
        self.run(self.time_start, self.state_start, registers, tables);
    }

    /// Runs what depends on states and switches.
    pub fn run_state(&self, registers: &mut [f64], tables: &dyn Tables) {
        self.run(self.state_start, self.instructions.len(), registers, tables);
    }

    fn run(&self, from: usize, to: usize, registers: &mut [f64], tables: &dyn Tables) {
        for (index, instruction) in self.instructions[from..to].iter().enumerate() {
            registers[self.slots + from + index] = apply(*instruction, registers, tables);
        }
    }

    /// Value of output `index` after a run.
    pub fn output(&self, index: usize, registers: &[f64]) -> f64 {
        registers[self.outputs[index] as usize]
    }

    pub fn outputs(&self) -> usize {
        self.outputs.len()
    }
}

/// The registers that `instruction` reads.
pub fn operands(instruction: Instruction) -> Vec<Register> {
    match instruction {
        Instruction::Constant(_) => Vec::new(),
        Instruction::Negate(a)
        | Instruction::IntegerPower(a, _)
        | Instruction::Call(_, a)
        | Instruction::Not(a)
        | Instruction::Lookup(_, a)
        | Instruction::LookupSlope(_, a) => vec![a],
        Instruction::Add(a, b)
        | Instruction::Subtract(a, b)
        | Instruction::Multiply(a, b)
        | Instruction::Divide(a, b)
        | Instruction::Power(a, b)
        | Instruction::CallTwo(_, a, b)
        | Instruction::Compare(_, a, b)
        | Instruction::And(a, b)
        | Instruction::Or(a, b) => vec![a, b],
        Instruction::Select(a, b, c) => vec![a, b, c],
    }
}

/// `instruction` with every operand replaced, from left to right.
fn renumbered(instruction: Instruction, mut to: impl FnMut(Register) -> Register) -> Instruction {
    match instruction {
        Instruction::Constant(bits) => Instruction::Constant(bits),
        Instruction::Negate(a) => Instruction::Negate(to(a)),
        Instruction::Add(a, b) => Instruction::Add(to(a), to(b)),
        Instruction::Subtract(a, b) => Instruction::Subtract(to(a), to(b)),
        Instruction::Multiply(a, b) => Instruction::Multiply(to(a), to(b)),
        Instruction::Divide(a, b) => Instruction::Divide(to(a), to(b)),
        Instruction::Power(a, b) => Instruction::Power(to(a), to(b)),
        Instruction::IntegerPower(a, n) => Instruction::IntegerPower(to(a), n),
        Instruction::Call(function, a) => Instruction::Call(function, to(a)),
        Instruction::CallTwo(function, a, b) => Instruction::CallTwo(function, to(a), to(b)),
        Instruction::Compare(comparison, a, b) => Instruction::Compare(comparison, to(a), to(b)),
        Instruction::And(a, b) => Instruction::And(to(a), to(b)),
        Instruction::Or(a, b) => Instruction::Or(to(a), to(b)),
        Instruction::Not(a) => Instruction::Not(to(a)),
        Instruction::Select(c, a, b) => Instruction::Select(to(c), to(a), to(b)),
        Instruction::Lookup(table, a) => Instruction::Lookup(table, to(a)),
        Instruction::LookupSlope(table, a) => Instruction::LookupSlope(table, to(a)),
    }
}

fn truth(condition: bool) -> f64 {
    if condition { 1.0 } else { 0.0 }
}

#[inline(always)]
fn apply(instruction: Instruction, r: &[f64], tables: &dyn Tables) -> f64 {
    let at = |register: Register| r[register as usize];
    match instruction {
        Instruction::Constant(bits) => f64::from_bits(bits),
        Instruction::Negate(a) => -at(a),
        Instruction::Add(a, b) => at(a) + at(b),
        Instruction::Subtract(a, b) => at(a) - at(b),
        Instruction::Multiply(a, b) => at(a) * at(b),
        Instruction::Divide(a, b) => at(a) / at(b),
        Instruction::Power(a, b) => float::pow(at(a), at(b)),
        Instruction::IntegerPower(a, n) => float::powi(at(a), n),
        Instruction::Call(function, a) => call(function, at(a)),
        Instruction::CallTwo(function, a, b) => call_two(function, at(a), at(b)),
        Instruction::Compare(comparison, a, b) => truth(compare(comparison, at(a), at(b))),
        Instruction::And(a, b) => truth(at(a) != 0.0 && at(b) != 0.0),
        Instruction::Or(a, b) => truth(at(a) != 0.0 || at(b) != 0.0),
        Instruction::Not(a) => truth(at(a) == 0.0),
        Instruction::Select(c, a, b) => {
            if at(c) != 0.0 {
                at(a)
            } else {
                at(b)
            }
        }
        Instruction::Lookup(table, a) => tables.value(table as usize, at(a)),
        Instruction::LookupSlope(table, a) => tables.slope(table as usize, at(a)),
    }
}

pub fn compare(comparison: Comparison, a: f64, b: f64) -> bool {
    match comparison {
        Comparison::Less => a < b,
        Comparison::LessOrEqual => a <= b,
        Comparison::Greater => a > b,
        Comparison::GreaterOrEqual => a >= b,
        Comparison::Equal => a == b,
        Comparison::NotEqual => a != b,
    }
}

fn call(function: Function, x: f64) -> f64 {
    match function {
        Function::Sqrt => x.sqrt(),
        Function::Cbrt => float::cbrt(x),
        Function::Exp => float::exp(x),
        Function::Ln => float::ln(x),
        Function::Log10 => float::log10(x),
        Function::Sin => float::sin(x),
        Function::Cos => float::cos(x),
        Function::Tan => float::tan(x),
        Function::Asin => float::asin(x),
        Function::Acos => float::acos(x),
        Function::Atan => float::atan(x),
        Function::Sinh => float::sinh(x),
        Function::Cosh => float::cosh(x),
        Function::Tanh => float::tanh(x),
        Function::Abs => x.abs(),
        Function::Sign => float::sign(x),
        Function::Floor => x.floor(),
        Function::Ceil => x.ceil(),
        // Functions of two arguments come through `call_two`.
        Function::Atan2 | Function::Min | Function::Max | Function::Hypot => f64::NAN,
    }
}

fn call_two(function: Function, a: f64, b: f64) -> f64 {
    match function {
        Function::Atan2 => float::atan2(a, b),
        Function::Min => float::min(a, b),
        Function::Max => float::max(a, b),
        Function::Hypot => float::hypot(a, b),
        _ => f64::NAN,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::formula::parse::parse;

    /// Evaluates `text` with x in the only slot.
    fn value(text: &str, x: f64) -> f64 {
        let mut builder = Builder::new(vec![Tier::State]);
        let symbols = Symbols::from([("x".to_owned(), 0)]);
        let output = builder.add(&parse(text).unwrap(), &symbols, &BTreeMap::new());
        let tape = builder.tape(&[output]);
        let mut registers = tape.registers();
        registers[0] = x;
        tape.run_case(&mut registers, &NoTables);
        tape.run_time(&mut registers, &NoTables);
        tape.run_state(&mut registers, &NoTables);
        tape.output(0, &registers)
    }

    #[test]
    fn hand_values() {
        assert_eq!(value("1/2", 0.0), 0.5);
        assert_eq!(value("-x^2", 3.0), -9.0);
        assert_eq!(value("2^-x", 3.0), 0.125);
        assert_eq!(value("if(x == 3, sqrt(x + 1), sqrt(-1))", 3.0), 2.0);
        assert_eq!(value("min(1e30, 2e30)", 0.0), 1e30);
        assert_eq!(value("(x > 2 && !(x > 4)) * 7", 3.0), 7.0);
        assert_eq!(value("x^0.5", 2.0), 2f64.sqrt());
        assert_eq!(value("max(x, 0)", -2.0), 0.0);
        assert!(value("max(x, 0)", f64::NAN).is_nan());
    }

    #[test]
    fn hand_common_parts_are_shared_and_tiers_kept_apart() {
        // t, y, input k
        let mut builder = Builder::new(vec![Tier::Time, Tier::State, Tier::Case]);
        let symbols = Symbols::from([
            ("t".to_owned(), 0),
            ("y".to_owned(), 1),
            ("k".to_owned(), 2),
        ]);
        let tree = parse("(2 + 3) * sqrt(k) * sin(t) * y + sqrt(k) * sin(t)").unwrap();
        let output = builder.add(&tree, &symbols, &BTreeMap::new());
        let tape = builder.tape(&[output]);
        // constant 5 · sqrt(k), 5·sqrt(k) · sin(t), sqrt(k)·sin(t), (5·sqrt(k))·sin(t) · ·y, +
        assert_eq!(tape.len(), 8);
        assert_eq!(tape.state_len(), 2);
        let mut registers = tape.registers();
        registers[2] = 4.0;
        tape.run_case(&mut registers, &NoTables);
        registers[0] = 0.5;
        tape.run_time(&mut registers, &NoTables);
        registers[1] = 3.0;
        tape.run_state(&mut registers, &NoTables);
        let sine = float::sin(0.5);
        assert_eq!(
            tape.output(0, &registers),
            5.0 * 2.0 * sine * 3.0 + 2.0 * sine
        );
    }
}
