//! The language of formulas against an independent evaluation.

use std::fmt::Write;

use crate::random::Random;
use crate::reference::{head, input, ladder, march, result, solve, state};

use self::evaluate::evaluate;

mod evaluate;

/// Inputs that random formulas use.
const INPUTS: &[(&str, f64)] = &[
    ("a", 2.5),
    ("b", -0.75),
    ("c", 1e-3),
    ("d_1", 40.0),
    ("Q", 0.0),
    ("x", -3.0),
];

/// Random text of the language, never ambiguous to it: no `a^b^c`, signs only where a term begins.
struct Writer {
    random: Random,
}

impl Writer {
    fn expression(&mut self, depth: usize) -> String {
        let mut text = if self.random.below(6) == 0 {
            "-".to_owned()
        } else {
            String::new()
        };
        text += &self.term(depth);
        while self.random.below(3) == 0 {
            let sign = self.random.pick(&["+", "-", " + ", " - "]);
            text += sign;
            text += &self.term(depth);
        }
        text
    }

    fn term(&mut self, depth: usize) -> String {
        let mut text = self.power(depth);
        while self.random.below(3) == 0 {
            text += self.random.pick(&["*", "/", " * ", " / "]);
            text += &self.power(depth);
        }
        text
    }

    fn power(&mut self, depth: usize) -> String {
        let base = self.atom(depth);
        match self.random.below(8) {
            0 => format!(
                "{base}^{}",
                self.random.pick(&["2", "3", "0.5", "1.5", "7", "0"])
            ),
            1 => format!(
                "{base}^({})",
                self.random.pick(&["-1", "-2", "1/3", "a", "-0.5"])
            ),
            _ => base,
        }
    }

    fn atom(&mut self, depth: usize) -> String {
        let deeper = depth.saturating_sub(1);
        match if depth == 0 {
            self.random.below(2)
        } else {
            self.random.below(7)
        } {
            0 => self
                .random
                .pick(&[
                    "1", "2", "0.5", "10", "3.25", "1e-3", "2.5e2", "7", "0", "pi", "1E2", "0.1",
                ])
                .to_owned(),
            1 | 2 => INPUTS[self.random.below(INPUTS.len())].0.to_owned(),
            3 => format!("({})", self.expression(deeper)),
            4 => {
                let name = self.random.pick(&[
                    "sqrt", "cbrt", "exp", "ln", "log10", "sin", "cos", "tan", "asin", "acos",
                    "atan", "sinh", "cosh", "tanh", "abs", "sign", "floor", "ceil",
                ]);
                format!("{name}({})", self.expression(deeper))
            }
            5 => {
                let name = self.random.pick(&["min", "max", "atan2", "hypot"]);
                format!(
                    "{name}({}, {})",
                    self.expression(deeper),
                    self.expression(deeper)
                )
            }
            _ => format!(
                "if({}, {}, {})",
                self.condition(deeper),
                self.expression(deeper),
                self.expression(deeper)
            ),
        }
    }

    fn condition(&mut self, depth: usize) -> String {
        match if depth == 0 { 0 } else { self.random.below(5) } {
            1 => format!(
                "{} && {}",
                self.condition(depth - 1),
                self.condition(depth - 1)
            ),
            2 => format!(
                "{} || {}",
                self.condition(depth - 1),
                self.condition(depth - 1)
            ),
            3 => format!("!({})", self.condition(depth - 1)),
            _ => {
                let comparison = self.random.pick(&["<", "<=", ">", ">=", " == ", " != "]);
                format!("{}{comparison}{}", self.expression(0), self.expression(0))
            }
        }
    }
}

/// Values of formulas through the whole program: each a result of a problem of inputs.
fn values(formulas: &[String]) -> Vec<f64> {
    let mut file = head("formulas");
    for (symbol, value) in INPUTS {
        input(&mut file, symbol, *value);
    }
    state(&mut file, "y", 1.0, "-y");
    march(&mut file, "t", (0.0, 1.0), 1.0, "euler", 3);
    for (index, formula) in formulas.iter().enumerate() {
        result(&mut file, &format!("out_{index}"), formula);
    }
    let trial = solve(&file);
    (0..formulas.len())
        .map(|index| {
            ladder(&trial, &format!("out_{index}"))
                .reported()
                .unwrap_or(f64::NAN)
        })
        .collect()
}

/// Compares formulas; how many could be told apart from a wrong value.
fn check(formulas: &[String]) -> usize {
    let mut misses = String::new();
    let mut told = 0;
    for chunk in formulas.chunks(200) {
        for (formula, found) in chunk.iter().zip(values(chunk)) {
            let expected = evaluate(formula, INPUTS);
            // Where rounding decides a branch or an overflow nothing can be said.
            if expected.error.is_nan() || expected.error.is_infinite() {
                continue;
            }
            told += 1;
            let agrees = if expected.value.is_finite() {
                (found - expected.value).abs() <= expected.error
            } else {
                found.to_bits() == expected.value.to_bits()
                    || found.is_nan() && expected.value.is_nan()
            };
            if !agrees {
                let _ = writeln!(
                    misses,
                    "{formula} is {found:?}, expected {:?} ± {:e}",
                    expected.value, expected.error
                );
            }
        }
    }
    assert!(misses.is_empty(), "\n{misses}");
    told
}

#[test]
fn prop_random_formulas_agree_with_an_independent_evaluation() {
    let mut writer = Writer {
        random: Random::new(3),
    };
    let mut told = 0;
    for _ in 0..10 {
        // Above, the program refuses them as too long.
        let is_short = |formula: &String| formula.len() < 700;
        let formulas: Vec<String> = (0..1_000)
            .map(|_| writer.expression(3))
            .filter(is_short)
            .collect();
        told += check(&formulas);
    }
    assert!(told > 4_000, "only {told} formulas said anything");
}

#[test]
fn hand_precedence() {
    // Worked by hand; a = 2.5, x = -3.
    for (formula, expected) in [
        ("-x^2", -9.0),
        ("2^-1", 0.5),
        ("2^-(1)", 0.5),
        ("6/2*3", 9.0),
        ("6/(2*3)", 1.0),
        ("1/2", 0.5),
        ("7 - 2 - 1", 4.0),
        ("2*3^2", 18.0),
        ("(-x)^2", 9.0),
        ("-2^2", -4.0),
        ("4^0.5", 2.0),
        ("if(1 < 2 || 1 > 2 && 1 > 2, 1, 0)", 1.0),
        ("if(!(1 < 2) || 2 >= 2, 1, 0)", 1.0),
        ("min(1e30, 2e30)", 1e30),
        ("x - (-a)", -0.5),
        ("3*-a", -7.5),
        ("if(a == 2.5, 1, 1/Q)", 1.0),
        ("floor(-0.5)", -1.0),
        ("sign(x) + sign(Q)", -1.0),
    ] {
        assert_eq!(values(&[formula.to_owned()]), [expected], "{formula}");
    }
}
