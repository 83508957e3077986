//! A small reader of the reference cases' formulas, for tests only.

use crate::float;

/// A formula over a list of values.
pub(super) enum Expression {
    Number(f64),
    Value(usize),
    Binary(&'static str, Box<Expression>, Box<Expression>),
    Minus(Box<Expression>),
    Call(String, Vec<Expression>),
}

use Expression::{Binary, Call, Minus, Number, Value};

/// Operators by precedence, weakest first; unary minus binds between `*` and `^`.
const LEVELS: [&[&str]; 5] = [
    &["||"],
    &["&&"],
    &["<=", ">=", "==", "<", ">"],
    &["+", "-"],
    &["*", "/"],
];

impl Expression {
    /// Reads `text`; panics where it is not a formula of `names`.
    pub fn parse(text: &str, names: &[String]) -> Expression {
        let mut reader = Reader { rest: text, names };
        let expression = reader.level(0);
        assert!(
            reader.rest.trim().is_empty(),
            "left over in {text}: {}",
            reader.rest
        );
        expression
    }

    pub fn value(&self, values: &[f64]) -> f64 {
        let truth = |condition: bool| f64::from(u8::from(condition));
        match self {
            Number(number) => *number,
            Value(index) => values[*index],
            Minus(a) => -a.value(values),
            Binary(operator, a, b) => {
                let (a, b) = (a.value(values), b.value(values));
                match *operator {
                    "+" => a + b,
                    "-" => a - b,
                    "*" => a * b,
                    "/" => a / b,
                    "^" => power(a, b),
                    "<=" => truth(a <= b),
                    ">=" => truth(a >= b),
                    "==" => truth(a == b),
                    "<" => truth(a < b),
                    ">" => truth(a > b),
                    "&&" => truth(a != 0.0 && b != 0.0),
                    _ => truth(a != 0.0 || b != 0.0),
                }
            }
            Call(name, arguments) => {
                if name == "if" {
                    let branch = if arguments[0].value(values) == 0.0 {
                        2
                    } else {
                        1
                    };
                    return arguments[branch].value(values);
                }
                let a = arguments[0].value(values);
                match name.as_str() {
                    "sqrt" => a.sqrt(),
                    "abs" => a.abs(),
                    "exp" => float::exp(a),
                    "ln" => float::ln(a),
                    "sin" => float::sin(a),
                    "cos" => float::cos(a),
                    "tan" => float::tan(a),
                    "atan" => float::atan(a),
                    "sinh" => float::sinh(a),
                    "cosh" => float::cosh(a),
                    "tanh" => float::tanh(a),
                    "min" => a.min(arguments[1].value(values)),
                    "max" => a.max(arguments[1].value(values)),
                    _ => panic!("function {name}"),
                }
            }
        }
    }
}

fn power(a: f64, b: f64) -> f64 {
    if b.abs() <= 8.0 && b.trunc() == b {
        let product = (0..b.abs() as u32).fold(1.0, |product, _| product * a);
        return if b < 0.0 { 1.0 / product } else { product };
    }
    float::pow(a, b)
}

struct Reader<'a> {
    rest: &'a str,
    names: &'a [String],
}

impl<'a> Reader<'a> {
    fn level(&mut self, level: usize) -> Expression {
        let Some(operators) = LEVELS.get(level) else {
            return self.unary();
        };
        let mut left = self.level(level + 1);
        while let Some(operator) = operators.iter().find(|operator| self.take(operator)) {
            left = Binary(operator, Box::new(left), Box::new(self.level(level + 1)));
        }
        left
    }

    fn unary(&mut self) -> Expression {
        if self.take("-") {
            return Minus(Box::new(self.unary()));
        }
        let base = self.primary();
        if self.take("^") {
            return Binary("^", Box::new(base), Box::new(self.unary()));
        }
        base
    }

    fn primary(&mut self) -> Expression {
        if self.take("(") {
            let inner = self.level(0);
            assert!(self.take(")"), "missing ) before {}", self.rest);
            return inner;
        }
        let is_number = self
            .rest
            .starts_with(|c: char| c.is_ascii_digit() || c == '.');
        if is_number {
            return Number(self.number());
        }
        let name = self.word();
        if self.take("(") {
            let mut arguments = vec![self.level(0)];
            while self.take(",") {
                arguments.push(self.level(0));
            }
            assert!(self.take(")"), "missing ) before {}", self.rest);
            return Call(name.to_owned(), arguments);
        }
        let index = self.names.iter().position(|known| known == name);
        Value(index.unwrap_or_else(|| panic!("symbol {name}")))
    }

    fn word(&mut self) -> &'a str {
        let end = self
            .rest
            .find(|c: char| !c.is_ascii_alphanumeric() && c != '_')
            .unwrap_or(self.rest.len());
        let (word, rest) = self.rest.split_at(end);
        self.rest = rest;
        word
    }

    fn number(&mut self) -> f64 {
        let bytes = self.rest.as_bytes();
        let end = (0..bytes.len())
            .find(|&i| {
                let sign = matches!(bytes[i], b'+' | b'-') && matches!(bytes[i - 1], b'e' | b'E');
                !(bytes[i].is_ascii_digit() || matches!(bytes[i], b'.' | b'e' | b'E') || sign)
            })
            .unwrap_or(bytes.len());
        let (number, rest) = self.rest.split_at(end);
        self.rest = rest;
        number.parse().unwrap()
    }

    fn take(&mut self, token: &str) -> bool {
        self.rest = self.rest.trim_start();
        let rest = self.rest.strip_prefix(token);
        if let Some(rest) = rest {
            self.rest = rest.trim_start();
        }
        rest.is_some()
    }
}
