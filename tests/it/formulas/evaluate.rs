//! A second evaluation of formulas: a recursive descent over the text, with the standard library's functions, and
//! with a bound on the rounding error of each value. Knows nothing of the program.
#![allow(
    clippy::disallowed_methods,
    reason = "an independent evaluation must not go through the functions under test"
)]

/// A value and how far two honest evaluations may differ in it; infinite where nothing can be said.
#[derive(Clone, Copy, Debug)]
pub struct Bounded {
    pub value: f64,
    pub error: f64,
}

type Compare = fn(f64, f64) -> bool;

/// Error of a function of the standard library, in units of the value.
const FUNCTION: f64 = 4.0 * f64::EPSILON;

pub fn evaluate(text: &str, inputs: &[(&str, f64)]) -> Bounded {
    let mut reader = Reader { rest: text, inputs };
    let value = reader.expression();
    assert!(
        reader.rest.trim().is_empty(),
        "{text}: {} is left over",
        reader.rest
    );
    value
}

struct Reader<'a> {
    rest: &'a str,
    inputs: &'a [(&'a str, f64)],
}

/// A condition: false or true, and whether rounding could turn it.
#[derive(Clone, Copy)]
struct Truth {
    value: bool,
    is_certain: bool,
}

impl Reader<'_> {
    fn take(&mut self, sign: &str) -> bool {
        self.rest = self.rest.trim_start();
        match self.rest.strip_prefix(sign) {
            Some(rest) => {
                self.rest = rest;
                true
            }
            None => false,
        }
    }

    fn demand(&mut self, sign: &str) {
        assert!(self.take(sign), "{sign} expected before {}", self.rest);
    }

    fn expression(&mut self) -> Bounded {
        let mut sum = if self.take("-") {
            negate(self.term())
        } else {
            self.term()
        };
        loop {
            if self.take("+") {
                sum = add(sum, self.term());
            } else if self.take("-") {
                sum = add(sum, negate(self.term()));
            } else {
                return sum;
            }
        }
    }

    fn term(&mut self) -> Bounded {
        let mut product = self.power();
        loop {
            if self.take("*") {
                product = multiply(product, self.power());
            } else if self.take("/") {
                product = divide(product, self.power());
            } else {
                return product;
            }
        }
    }

    fn power(&mut self) -> Bounded {
        let base = self.atom();
        if self.take("^") {
            raise(base, self.atom())
        } else {
            base
        }
    }

    fn atom(&mut self) -> Bounded {
        if self.take("(") {
            let value = self.expression();
            self.demand(")");
            return value;
        }
        self.rest = self.rest.trim_start();
        if self.rest.starts_with(|c: char| c.is_ascii_digit()) {
            return self.number();
        }
        let length = self
            .rest
            .find(|c: char| !c.is_ascii_alphanumeric() && c != '_')
            .unwrap_or(self.rest.len());
        let (name, rest) = self.rest.split_at(length);
        self.rest = rest;
        if !self.take("(") {
            let value = if name == "pi" {
                std::f64::consts::PI
            } else {
                self.inputs
                    .iter()
                    .find(|(symbol, _)| *symbol == name)
                    .expect("a known symbol")
                    .1
            };
            return exact(value);
        }
        if name == "if" {
            return self.branch();
        }
        let first = self.expression();
        let value = if self.take(",") {
            of_two(name, first, self.expression())
        } else {
            of_one(name, first)
        };
        self.demand(")");
        value
    }

    fn number(&mut self) -> Bounded {
        let mut length = 0;
        let bytes = self.rest.as_bytes();
        while length < bytes.len() {
            let is_sign_of_exponent =
                matches!(bytes[length], b'-' | b'+') && matches!(bytes[length - 1], b'e' | b'E');
            if !(bytes[length].is_ascii_digit()
                || matches!(bytes[length], b'.' | b'e' | b'E')
                || is_sign_of_exponent)
            {
                break;
            }
            length += 1;
        }
        let (number, rest) = self.rest.split_at(length);
        self.rest = rest;
        exact(
            number
                .parse()
                .unwrap_or_else(|_| panic!("a number, not {number}")),
        )
    }

    fn branch(&mut self) -> Bounded {
        let condition = self.either();
        self.demand(",");
        let yes = self.expression();
        self.demand(",");
        let no = self.expression();
        self.demand(")");
        let chosen = if condition.value { yes } else { no };
        if condition.is_certain {
            chosen
        } else {
            Bounded {
                error: f64::INFINITY,
                ..chosen
            }
        }
    }

    fn either(&mut self) -> Truth {
        let mut truth = self.both();
        while self.take("||") {
            let other = self.both();
            truth = Truth {
                value: truth.value || other.value,
                is_certain: truth.is_certain && other.is_certain,
            };
        }
        truth
    }

    fn both(&mut self) -> Truth {
        let mut truth = self.comparison();
        while self.take("&&") {
            let other = self.comparison();
            truth = Truth {
                value: truth.value && other.value,
                is_certain: truth.is_certain && other.is_certain,
            };
        }
        truth
    }

    fn comparison(&mut self) -> Truth {
        if self.take("!") {
            self.demand("(");
            let truth = self.either();
            self.demand(")");
            return Truth {
                value: !truth.value,
                ..truth
            };
        }
        let a = self.expression();
        let comparisons: [(&str, Compare); 6] = [
            ("<=", |a, b| a <= b),
            (">=", |a, b| a >= b),
            ("==", |a, b| a == b),
            ("!=", |a, b| a != b),
            ("<", |a, b| a < b),
            (">", |a, b| a > b),
        ];
        let (_, compare) = comparisons
            .into_iter()
            .find(|(sign, _)| self.take(sign))
            .expect("a comparison");
        let b = self.expression();
        let slack = a.error + b.error;
        Truth {
            value: compare(a.value, b.value),
            is_certain: slack == 0.0 || (a.value - b.value).abs() > slack,
        }
    }
}

fn exact(value: f64) -> Bounded {
    Bounded { value, error: 0.0 }
}

/// `value` with the propagated `error` and one rounding more; a value that is not finite says nothing unless it is exact.
fn rounded(value: f64, error: f64, is_exact: bool) -> Bounded {
    if is_exact {
        return exact(value);
    }
    if !value.is_finite() {
        return Bounded {
            value,
            error: f64::INFINITY,
        };
    }
    // The least distance of two floats matters where values are tiny.
    Bounded {
        value,
        error: 1.01 * error + f64::EPSILON * value.abs() + f64::MIN_POSITIVE * f64::EPSILON,
    }
}

fn negate(a: Bounded) -> Bounded {
    Bounded {
        value: -a.value,
        ..a
    }
}

fn add(a: Bounded, b: Bounded) -> Bounded {
    rounded(
        a.value + b.value,
        a.error + b.error,
        a.error == 0.0 && b.error == 0.0,
    )
}

fn multiply(a: Bounded, b: Bounded) -> Bounded {
    let error = a.value.abs() * b.error + b.value.abs() * a.error + a.error * b.error;
    rounded(a.value * b.value, error, a.error == 0.0 && b.error == 0.0)
}

fn divide(a: Bounded, b: Bounded) -> Bounded {
    let nearest_zero = b.value.abs() - b.error;
    let value = a.value / b.value;
    let is_exact = a.error == 0.0 && b.error == 0.0;
    if nearest_zero <= 0.0 && !is_exact {
        return Bounded {
            value,
            error: f64::INFINITY,
        };
    }
    rounded(
        value,
        (a.error + value.abs() * b.error) / nearest_zero,
        is_exact,
    )
}

fn raise(a: Bounded, b: Bounded) -> Bounded {
    let value = a.value.powf(b.value);
    // Integer powers are products in the program: some roundings more than one.
    let own = (4.0 + b.value.abs()) * f64::EPSILON * value.abs();
    let ends = [-1.0, 1.0]
        .into_iter()
        .flat_map(|i| [-1.0, 1.0].map(|j| (a.value + i * a.error).powf(b.value + j * b.error)));
    spread(value, ends, own)
}

/// Largest difference between `value` and what it may be at the ends of its arguments' errors.
fn spread(value: f64, ends: impl Iterator<Item = f64>, own: f64) -> Bounded {
    let mut widest = 0.0;
    for end in ends {
        let distance = (end - value).abs();
        if distance.is_nan() && !(end.is_nan() && value.is_nan()) && end != value {
            widest = f64::INFINITY;
        } else if distance > widest {
            widest = distance;
        }
    }
    if value.is_finite() {
        // Twice: the function may bend between the ends.
        return Bounded {
            value,
            error: 2.0 * widest + own + f64::MIN_POSITIVE,
        };
    }
    Bounded {
        value,
        error: if widest == 0.0 { 0.0 } else { f64::INFINITY },
    }
}

fn of_one(name: &str, a: Bounded) -> Bounded {
    let function: fn(f64) -> f64 = match name {
        "sqrt" => f64::sqrt,
        "cbrt" => f64::cbrt,
        "exp" => f64::exp,
        "ln" => f64::ln,
        "log10" => f64::log10,
        "sin" => f64::sin,
        "cos" => f64::cos,
        "tan" => f64::tan,
        "asin" => f64::asin,
        "acos" => f64::acos,
        "atan" => f64::atan,
        "sinh" => f64::sinh,
        "cosh" => f64::cosh,
        "tanh" => f64::tanh,
        "abs" => f64::abs,
        "floor" => f64::floor,
        "ceil" => f64::ceil,
        "sign" => |x| {
            if x > 0.0 {
                1.0
            } else if x < 0.0 {
                -1.0
            } else {
                x
            }
        },
        _ => panic!("no function {name}"),
    };
    let value = function(a.value);
    let own = if matches!(name, "sqrt" | "abs" | "floor" | "ceil" | "sign") && a.error == 0.0 {
        0.0
    } else {
        FUNCTION * value.abs()
    };
    let bounded = spread(
        value,
        [a.value - a.error, a.value + a.error]
            .into_iter()
            .map(function),
        own,
    );
    let turns = matches!(name, "sin" | "cos" | "tan" | "cosh") && a.error > 0.1;
    let jumps = matches!(name, "floor" | "ceil" | "sign") && bounded.error > 0.5;
    if turns || jumps {
        Bounded {
            error: f64::INFINITY,
            ..bounded
        }
    } else {
        bounded
    }
}

fn of_two(name: &str, a: Bounded, b: Bounded) -> Bounded {
    let function: fn(f64, f64) -> f64 = match name {
        "min" => |a, b| {
            if a.is_nan() || b.is_nan() {
                f64::NAN
            } else {
                a.min(b)
            }
        },
        "max" => |a, b| {
            if a.is_nan() || b.is_nan() {
                f64::NAN
            } else {
                a.max(b)
            }
        },
        "atan2" => f64::atan2,
        "hypot" => f64::hypot,
        _ => panic!("no function {name}"),
    };
    let value = function(a.value, b.value);
    let own = if matches!(name, "min" | "max") {
        0.0
    } else {
        FUNCTION * value.abs()
    };
    let ends = [-1.0, 1.0]
        .into_iter()
        .flat_map(|i| [-1.0, 1.0].map(|j| function(a.value + i * a.error, b.value + j * b.error)));
    let bounded = spread(value, ends, own);
    if name == "atan2" && bounded.error > 1.0 {
        Bounded {
            error: f64::INFINITY,
            ..bounded
        }
    } else {
        bounded
    }
}
