//! Exact derivatives, as more instructions on the same tape.
//!
//! Owns: the rules of differentiation. At a kink (`abs`, `min`, `if`, a knot of a lookup) the derivative is that of
//! the branch taken; `floor` and `ceil` have derivative 0.

use std::collections::BTreeMap;

use super::tape::{Builder, Instruction, Register};
use super::tree::{Binary, Comparison, Function};

impl Builder {
    /// The register of ∂`of`/∂`by`, where `by` is a slot; none when it is zero everywhere.
    pub fn derivative(&mut self, of: Register, by: Register) -> Option<Register> {
        if of == by {
            return Some(self.constant(1.0));
        }
        let mut known: BTreeMap<Register, Register> = BTreeMap::new();
        known.insert(by, self.constant(1.0));
        for register in self.needed(&[of]) {
            if let Some(instruction) = self.instruction(register)
                && let Some(derivative) = self.rule(register, instruction, &known)
            {
                known.insert(register, derivative);
            }
        }
        known.get(&of).copied()
    }

    fn rule(
        &mut self,
        itself: Register,
        instruction: Instruction,
        known: &BTreeMap<Register, Register>,
    ) -> Option<Register> {
        let d = |register: Register| known.get(&register).copied();
        match instruction {
            Instruction::Constant(_)
            | Instruction::Compare(..)
            | Instruction::And(..)
            | Instruction::Or(..)
            | Instruction::Not(_)
            | Instruction::LookupSlope(..) => None,
            Instruction::Negate(a) => {
                let da = d(a)?;
                Some(self.push(Instruction::Negate(da)))
            }
            Instruction::Add(a, b) => self.sum(d(a), d(b)),
            Instruction::Subtract(a, b) => self.difference(d(a), d(b)),
            Instruction::Multiply(a, b) => {
                let first = d(a).map(|da| self.times(da, b));
                let second = d(b).map(|db| self.times(a, db));
                self.sum(first, second)
            }
            Instruction::Divide(a, b) => {
                // (da − q·db)/b with q = a/b, the register itself.
                let product = d(b).map(|db| self.times(itself, db));
                let numerator = self.difference(d(a), product)?;
                Some(self.push(Instruction::Divide(numerator, b)))
            }
            Instruction::IntegerPower(a, n) => {
                let da = d(a)?;
                let factor = self.constant(f64::from(n));
                let power = self.push(Instruction::IntegerPower(a, n - 1));
                let slope = self.times(factor, power);
                Some(self.times(slope, da))
            }
            Instruction::Power(a, b) => self.power_rule(itself, a, b, d(a), d(b)),
            Instruction::Call(function, a) => {
                let da = d(a)?;
                let slope = self.slope_of(function, itself, a)?;
                Some(self.times(slope, da))
            }
            Instruction::CallTwo(function, a, b) => {
                self.rule_of_two(function, itself, (a, d(a)), (b, d(b)))
            }
            Instruction::Select(c, a, b) => {
                let (da, db) = (d(a), d(b));
                self.select(c, da, db)
            }
            Instruction::Lookup(table, a) => {
                let da = d(a)?;
                let slope = self.push(Instruction::LookupSlope(table, a));
                Some(self.times(slope, da))
            }
        }
    }

    fn times(&mut self, a: Register, b: Register) -> Register {
        if self.constant_of(a) == Some(1.0) {
            b
        } else if self.constant_of(b) == Some(1.0) {
            a
        } else {
            self.push(Instruction::Multiply(a, b))
        }
    }

    fn sum(&mut self, a: Option<Register>, b: Option<Register>) -> Option<Register> {
        match (a, b) {
            (Some(a), Some(b)) => Some(self.push(Instruction::Add(a, b))),
            (one, None) | (None, one) => one,
        }
    }

    fn difference(&mut self, a: Option<Register>, b: Option<Register>) -> Option<Register> {
        match (a, b) {
            (Some(a), Some(b)) => Some(self.push(Instruction::Subtract(a, b))),
            (None, Some(b)) => Some(self.push(Instruction::Negate(b))),
            (a, None) => a,
        }
    }

    fn select(
        &mut self,
        condition: Register,
        a: Option<Register>,
        b: Option<Register>,
    ) -> Option<Register> {
        if a.is_none() && b.is_none() {
            return None;
        }
        let zero = self.constant(0.0);
        Some(self.push(Instruction::Select(
            condition,
            a.unwrap_or(zero),
            b.unwrap_or(zero),
        )))
    }

    /// d(a^b): b·a^(b−1)·da + a^b·ln(a)·db.
    fn power_rule(
        &mut self,
        itself: Register,
        a: Register,
        b: Register,
        da: Option<Register>,
        db: Option<Register>,
    ) -> Option<Register> {
        let first = da.map(|da| {
            let one = self.constant(1.0);
            let exponent = self.push(Instruction::Subtract(b, one));
            let power = self.binary(Binary::Power, a, exponent);
            let slope = self.times(b, power);
            self.times(slope, da)
        });
        let second = db.map(|db| {
            let logarithm = self.push(Instruction::Call(Function::Ln, a));
            let slope = self.times(itself, logarithm);
            self.times(slope, db)
        });
        self.sum(first, second)
    }

    /// f'(a) of a function of one argument whose value is the register `itself`; none where it is zero.
    fn slope_of(&mut self, function: Function, itself: Register, a: Register) -> Option<Register> {
        let one = self.constant(1.0);
        let slope = match function {
            Function::Sqrt => {
                let two = self.constant(2.0);
                let double = self.times(two, itself);
                self.push(Instruction::Divide(one, double))
            }
            Function::Cbrt => {
                let three = self.constant(3.0);
                let square = self.times(itself, itself);
                let triple = self.times(three, square);
                self.push(Instruction::Divide(one, triple))
            }
            Function::Exp => itself,
            Function::Ln => self.push(Instruction::Divide(one, a)),
            Function::Log10 => {
                let ln_ten = self.constant(std::f64::consts::LN_10);
                let scaled = self.times(ln_ten, a);
                self.push(Instruction::Divide(one, scaled))
            }
            Function::Sin => self.push(Instruction::Call(Function::Cos, a)),
            Function::Cos => {
                let sine = self.push(Instruction::Call(Function::Sin, a));
                self.push(Instruction::Negate(sine))
            }
            Function::Tan => {
                let square = self.times(itself, itself);
                self.push(Instruction::Add(one, square))
            }
            Function::Asin | Function::Acos => {
                let square = self.times(a, a);
                let rest = self.push(Instruction::Subtract(one, square));
                let root = self.push(Instruction::Call(Function::Sqrt, rest));
                let slope = self.push(Instruction::Divide(one, root));
                if function == Function::Asin {
                    slope
                } else {
                    self.push(Instruction::Negate(slope))
                }
            }
            Function::Atan => {
                let square = self.times(a, a);
                let sum = self.push(Instruction::Add(one, square));
                self.push(Instruction::Divide(one, sum))
            }
            Function::Sinh => self.push(Instruction::Call(Function::Cosh, a)),
            Function::Cosh => self.push(Instruction::Call(Function::Sinh, a)),
            Function::Tanh => {
                let square = self.times(itself, itself);
                self.push(Instruction::Subtract(one, square))
            }
            Function::Abs => self.push(Instruction::Call(Function::Sign, a)),
            Function::Sign | Function::Floor | Function::Ceil => return None,
            // Functions of two arguments have their own rule.
            Function::Atan2 | Function::Min | Function::Max | Function::Hypot => return None,
        };
        Some(slope)
    }

    fn rule_of_two(
        &mut self,
        function: Function,
        itself: Register,
        (a, da): (Register, Option<Register>),
        (b, db): (Register, Option<Register>),
    ) -> Option<Register> {
        match function {
            Function::Min => {
                let first = self.push(Instruction::Compare(Comparison::LessOrEqual, a, b));
                self.select(first, da, db)
            }
            Function::Max => {
                let first = self.push(Instruction::Compare(Comparison::GreaterOrEqual, a, b));
                self.select(first, da, db)
            }
            Function::Hypot => {
                let first = da.map(|da| self.times(a, da));
                let second = db.map(|db| self.times(b, db));
                let numerator = self.sum(first, second)?;
                Some(self.push(Instruction::Divide(numerator, itself)))
            }
            Function::Atan2 => {
                let first = da.map(|da| self.times(b, da));
                let second = db.map(|db| self.times(a, db));
                let numerator = self.difference(first, second)?;
                let (aa, bb) = (self.times(a, a), self.times(b, b));
                let square = self.push(Instruction::Add(aa, bb));
                Some(self.push(Instruction::Divide(numerator, square)))
            }
            _ => None,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::formula::parse::parse;
    use crate::formula::tape::{NoTables, Symbols, Tier};

    /// Value and derivative of `text` by x at `x`.
    fn value_and_slope(text: &str, x: f64) -> (f64, f64) {
        let mut builder = Builder::new(vec![Tier::State]);
        let symbols = Symbols::from([("x".to_owned(), 0)]);
        let value = builder.add(&parse(text).unwrap(), &symbols, &BTreeMap::new());
        let zero = builder.constant(0.0);
        let slope = builder.derivative(value, 0).unwrap_or(zero);
        let tape = builder.tape(&[value, slope]);
        let mut registers = tape.registers();
        registers[0] = x;
        tape.run_case(&mut registers, &NoTables);
        tape.run_state(&mut registers, &NoTables);
        (tape.output(0, &registers), tape.output(1, &registers))
    }

    #[test]
    fn hand_polynomials_and_branches_are_exact() {
        assert_eq!(value_and_slope("3*x^2 - 2*x + 1", 2.0), (9.0, 10.0));
        assert_eq!(value_and_slope("if(x < 0, -x, x^3)", 2.0), (8.0, 12.0));
        assert_eq!(value_and_slope("max(x, 1)", 0.5), (1.0, 0.0));
        assert_eq!(value_and_slope("abs(x)", -3.0), (3.0, -1.0));
        assert_eq!(value_and_slope("1/x", 2.0), (0.5, -0.25));
        assert_eq!(value_and_slope("sqrt(x)", 4.0), (2.0, 0.25));
        assert_eq!(value_and_slope("floor(x) + 7", 2.5), (9.0, 0.0));
    }

    /// Central differences are an independent check: their error here is some 1e-10.
    #[test]
    fn prop_every_function_agrees_with_a_central_difference() {
        for text in [
            "exp(x)",
            "ln(x)",
            "log10(x)",
            "sin(x)",
            "cos(x)",
            "tan(x)",
            "asin(x/2)",
            "acos(x/2)",
            "atan(x)",
            "sinh(x)",
            "cosh(x)",
            "tanh(x)",
            "cbrt(x)",
            "sqrt(x)",
            "x^2.7",
            "x^-3",
            "2.3^x",
            "x^x",
            "hypot(x, 2)",
            "atan2(x, 3)",
            "atan2(2, x)",
            "min(x^2, x^3)",
            "max(x^2, x^3)",
            "(x^2 + 1)/(x + sin(x))",
            "exp(-x^2)*cos(3*x)",
        ] {
            for x in [0.31, 0.87, 1.43] {
                let h = 1e-5;
                let difference =
                    (value_and_slope(text, x + h).0 - value_and_slope(text, x - h).0) / (2.0 * h);
                let slope = value_and_slope(text, x).1;
                assert!(
                    (slope - difference).abs() <= 3e-8 * (1.0 + slope.abs()),
                    "{text} at {x}: {slope} {difference}"
                );
            }
        }
    }
}
