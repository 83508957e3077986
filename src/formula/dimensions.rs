//! The dimension check: every formula, before anything is solved.
//!
//! Owns: the rules. Does not own: what a symbol is (a [`Names`] answers), units' own algebra (`units`).

use std::ops::Range;

use num_rational::Ratio;

use super::Fault;
use super::tree::{
    Binary, Comparison, DimensionRule, Function, Kind, ProbeArguments, ProbeFunction, Tree,
};
use crate::diagnostic::{
    BAD_ARGUMENT, BAD_EXPONENT, DIMENSION, NOT_A_CONDITION, NOT_A_NUMBER, PROBE_MISPLACED,
    UNKNOWN_FUNCTION, UNKNOWN_ID, UNKNOWN_SYMBOL, suggestion,
};
use crate::units::{Dimension, Kind as ScaleKind, Unit};

/// What an expression is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Type {
    /// A condition.
    Truth,
    /// A quantity; `absolute` for temperatures and gauge pressures on a scale with a zero of its own, so that
    /// their difference is a different thing.
    Quantity {
        dimension: Dimension,
        absolute: bool,
    },
    /// The literal 0, which fits any dimension.
    Zero,
}

impl Type {
    pub fn plain() -> Type {
        Type::of(Dimension::NONE)
    }

    pub fn of(dimension: Dimension) -> Type {
        Type::Quantity {
            dimension,
            absolute: false,
        }
    }
}

/// What the names of a formula stand for.
pub trait Names {
    fn symbol(&self, name: &str) -> Option<Type>;
    /// Dimensions of argument and value.
    fn lookup(&self, name: &str) -> Option<(Dimension, Dimension)>;
    fn is_event(&self, id: &str) -> bool;
    /// Dimension of the independent variable, where result functions may be used; none where not.
    fn variable(&self) -> Option<Dimension>;
    /// All known symbols and lookups, for suggestions.
    fn all(&self) -> Vec<&str>;
    fn events(&self) -> Vec<&str>;
}

/// The type of `tree`, or its faults.
///
/// # Errors
/// Every fault found; parts without fault are checked even beside faulty ones.
pub fn check(tree: &Tree, names: &dyn Names) -> Result<Type, Vec<Fault>> {
    let mut checker = Checker {
        names,
        faults: Vec::new(),
    };
    let found = checker.infer(tree);
    match found {
        Some(found) if checker.faults.is_empty() => Ok(found),
        _ => Err(checker.faults),
    }
}

struct Checker<'a> {
    names: &'a dyn Names,
    faults: Vec<Fault>,
}

impl Checker<'_> {
    fn fault(
        &mut self,
        code: &'static crate::diagnostic::Code,
        span: &Range<usize>,
        message: impl Into<String>,
        mend: impl Into<String>,
    ) {
        self.faults
            .push(Fault::new(code, span.clone(), message, mend));
    }

    /// None after a fault has been noted.
    fn infer(&mut self, tree: &Tree) -> Option<Type> {
        match &tree.kind {
            Kind::Number(value) => Some(if *value == 0.0 {
                Type::Zero
            } else {
                Type::plain()
            }),
            Kind::Symbol(name) if name == "pi" => Some(Type::plain()),
            Kind::Symbol(name) => self.symbol(name, &tree.span),
            Kind::Negate(a) => match self.infer(a)? {
                Type::Truth => self.not_a_number(a),
                Type::Quantity { dimension, .. } => Some(Type::of(dimension)),
                Type::Zero => Some(Type::Zero),
            },
            Kind::Binary(operator, a, b) => self.binary(*operator, a, b),
            Kind::Compare(comparison, a, b) => {
                self.same(&[a, b], &tree.span, comparison_word(*comparison))?;
                Some(Type::Truth)
            }
            Kind::And(a, b) | Kind::Or(a, b) => {
                let (first, second) = (self.condition(a), self.condition(b));
                first.and(second)
            }
            Kind::Not(a) => self.condition(a),
            Kind::If(c, a, b) => {
                let condition = self.condition(c);
                let value = self.same(&[a, b], &tree.span, "the two branches of `if`");
                condition.and(value)
            }
            Kind::Call(function, arguments) => self.call(*function, arguments, &tree.span),
            Kind::Lookup(name, argument) => self.lookup(name, argument, &tree.span),
            Kind::Probe(function, arguments) => self.probe(*function, arguments, &tree.span),
            Kind::NumberIn(argument, unit) => {
                let found = self.infer(argument)?;
                let unit = self.unit(unit, &tree.span)?;
                self.expect(
                    found,
                    unit.dimension(),
                    &argument.span,
                    "the unit named in `number_in`",
                )?;
                Some(Type::plain())
            }
            Kind::Measure(_, unit) => {
                let unit = self.unit(unit, &tree.span)?;
                if unit.kind() == ScaleKind::Gauge {
                    self.fault(
                        &BAD_ARGUMENT,
                        &tree.span,
                        "a gauge pressure cannot stand in a formula",
                        "make it an input with a source",
                    );
                    return None;
                }
                Some(Type::Quantity {
                    dimension: unit.dimension(),
                    absolute: unit.kind() != ScaleKind::Plain,
                })
            }
        }
    }

    fn symbol(&mut self, name: &str, span: &Range<usize>) -> Option<Type> {
        let found = self.names.symbol(name);
        if found.is_none() {
            let mend = suggestion(
                name,
                self.names.all(),
                "every symbol is an input, state, quantity, switch or the independent variable",
            );
            self.fault(
                &UNKNOWN_SYMBOL,
                span,
                format!("unknown symbol `{name}`"),
                mend,
            );
        }
        found
    }

    fn unit(&mut self, text: &str, span: &Range<usize>) -> Option<Unit> {
        match Unit::parse(text) {
            Ok(unit) => Some(unit),
            Err(error) => {
                self.fault(
                    &BAD_ARGUMENT,
                    span,
                    error.to_string(),
                    error.help().unwrap_or_default(),
                );
                None
            }
        }
    }

    fn not_a_number(&mut self, tree: &Tree) -> Option<Type> {
        self.fault(
            &NOT_A_NUMBER,
            &tree.span,
            "a condition stands where a quantity is expected",
            "write if(condition, 1, 0)",
        );
        None
    }

    fn condition(&mut self, tree: &Tree) -> Option<Type> {
        match self.infer(tree)? {
            Type::Truth => Some(Type::Truth),
            _ => {
                self.fault(
                    &NOT_A_CONDITION,
                    &tree.span,
                    "a quantity stands where a condition is expected",
                    "compare it: x > 0",
                );
                None
            }
        }
    }

    /// A quantity's dimension and whether it is absolute; none for the zero literal.
    fn quantity(&mut self, tree: &Tree) -> Option<Option<(Dimension, bool)>> {
        match self.infer(tree)? {
            Type::Truth => self.not_a_number(tree).map(|_| None),
            Type::Zero => Some(None),
            Type::Quantity {
                dimension,
                absolute,
            } => Some(Some((dimension, absolute))),
        }
    }

    fn binary(&mut self, operator: Binary, a: &Tree, b: &Tree) -> Option<Type> {
        if operator == Binary::Power {
            return self.power(a, b);
        }
        let (left, right) = (self.quantity(a), self.quantity(b));
        let (left, right) = (left?, right?);
        match operator {
            Binary::Multiply | Binary::Divide => {
                let left = left.map_or(Dimension::NONE, |found| found.0);
                let right = right.map_or(Dimension::NONE, |found| found.0);
                let result = if operator == Binary::Multiply {
                    left.times(right)
                } else {
                    left.over(right)
                };
                self.in_range(result, &(a.span.start..b.span.end))
            }
            _ => {
                let (word, sign) = if operator == Binary::Add {
                    ("sum", "+")
                } else {
                    ("difference", "-")
                };
                match (left, right) {
                    (None, None) => Some(Type::Zero),
                    (Some((dimension, absolute)), None) | (None, Some((dimension, absolute))) => {
                        Some(Type::Quantity {
                            dimension,
                            absolute,
                        })
                    }
                    (Some((left, first)), Some((right, second))) => {
                        self.equal(
                            left,
                            right,
                            a,
                            b,
                            &format!("the two sides of `{sign}`"),
                            word,
                        )?;
                        // A difference of two absolutes is a difference; an absolute and a difference give an absolute.
                        let absolute = if operator == Binary::Add {
                            first || second
                        } else {
                            first && !second
                        };
                        Some(Type::Quantity {
                            dimension: left,
                            absolute,
                        })
                    }
                }
            }
        }
    }

    fn equal(
        &mut self,
        left: Dimension,
        right: Dimension,
        a: &Tree,
        b: &Tree,
        what: &str,
        word: &str,
    ) -> Option<()> {
        if left == right {
            return Some(());
        }
        let span = a.span.start..b.span.end;
        let literal = [a, b]
            .iter()
            .any(|side| matches!(side.kind, Kind::Number(_)));
        let mend = if literal && (left.is_none() || right.is_none()) {
            "a literal is a plain number: make it an input with a unit and a source".to_owned()
        } else {
            format!("a {word} needs equal dimensions")
        };
        self.fault(
            &DIMENSION,
            &span,
            format!("{what} differ: {} and {}", describe(left), describe(right)),
            mend,
        );
        None
    }

    fn power(&mut self, base: &Tree, exponent: &Tree) -> Option<Type> {
        let (found, power) = (self.quantity(base), self.quantity(exponent));
        let (found, power) = (found?, power?);
        if let Some((dimension, _)) = power
            && !dimension.is_none()
        {
            self.fault(
                &BAD_EXPONENT,
                &exponent.span,
                format!(
                    "an exponent is a plain number; this is {}",
                    describe(dimension)
                ),
                "divide it by a reference value of its own unit",
            );
            return None;
        }
        let Some((dimension, _)) = found.filter(|found| !found.0.is_none()) else {
            return Some(Type::plain());
        };
        let Some(power) = literal_value(exponent).and_then(simple_ratio) else {
            let mend = "write the exponent as a number: x^2, x^(1/3), x^1.5";
            self.fault(
                &BAD_EXPONENT,
                &exponent.span,
                format!(
                    "the base is {}, so its exponent must be a plain fraction",
                    describe(dimension)
                ),
                mend,
            );
            return None;
        };
        self.in_range(
            dimension.to_the(power),
            &(base.span.start..exponent.span.end),
        )
    }

    /// The dimension, unless its exponents have left the range that is carried.
    fn in_range(&mut self, dimension: Option<Dimension>, span: &Range<usize>) -> Option<Type> {
        if dimension.is_none() {
            self.fault(
                &DIMENSION,
                span,
                "the dimension of this has exponents beyond all reason",
                "divide by reference values first",
            );
        }
        dimension.map(Type::of)
    }

    /// All of `trees` have one dimension; its type. `what` names them in the message.
    fn same(&mut self, trees: &[&Tree], span: &Range<usize>, what: &str) -> Option<Type> {
        let found: Vec<Option<Option<(Dimension, bool)>>> =
            trees.iter().map(|tree| self.quantity(tree)).collect();
        let found: Option<Vec<Option<(Dimension, bool)>>> = found.into_iter().collect();
        let mut common: Option<(Dimension, bool)> = None;
        for (dimension, absolute) in found?.into_iter().flatten() {
            match common {
                None => common = Some((dimension, absolute)),
                Some((first, _)) if first != dimension => {
                    let mend = "literals are plain numbers; give the value a unit as an input";
                    self.fault(
                        &DIMENSION,
                        span,
                        format!(
                            "{what} differ: {} and {}",
                            describe(first),
                            describe(dimension)
                        ),
                        mend,
                    );
                    return None;
                }
                Some((first, was_absolute)) => common = Some((first, was_absolute || absolute)),
            }
        }
        Some(
            common.map_or(Type::Zero, |(dimension, absolute)| Type::Quantity {
                dimension,
                absolute,
            }),
        )
    }

    fn expect(
        &mut self,
        found: Type,
        expected: Dimension,
        span: &Range<usize>,
        what: &str,
    ) -> Option<()> {
        match found {
            Type::Zero => Some(()),
            Type::Quantity { dimension, .. } if dimension == expected => Some(()),
            Type::Quantity { dimension, .. } => {
                self.fault(
                    &DIMENSION,
                    span,
                    format!(
                        "this is {}, but {what} is {}",
                        describe(dimension),
                        describe(expected)
                    ),
                    "mend the formula, or the unit of what it uses",
                );
                None
            }
            Type::Truth => {
                self.fault(
                    &NOT_A_NUMBER,
                    span,
                    "a condition stands where a quantity is expected",
                    "write if(condition, 1, 0)",
                );
                None
            }
        }
    }

    fn call(
        &mut self,
        function: Function,
        arguments: &[Tree],
        span: &Range<usize>,
    ) -> Option<Type> {
        let entry = function.entry();
        let trees: Vec<&Tree> = arguments.iter().collect();
        match entry.rule {
            DimensionRule::Plain => {
                let found = self.quantity(trees[0])?;
                if let Some((dimension, _)) = found.filter(|found| !found.0.is_none()) {
                    let mend = "divide it by a scale, or write number_in(x, \"unit\") for an empirical formula";
                    self.fault(
                        &DIMENSION,
                        &trees[0].span,
                        format!(
                            "the argument of `{}` is a plain number; this is {}",
                            entry.name,
                            describe(dimension)
                        ),
                        mend,
                    );
                    return None;
                }
                Some(Type::plain())
            }
            DimensionRule::Root(degree) => {
                let found = self.quantity(trees[0])?;
                let dimension = found.map_or(Dimension::NONE, |found| found.0);
                self.in_range(dimension.to_the(Ratio::new(1, degree)), span)
            }
            DimensionRule::Same => {
                self.same(&trees, span, &format!("the arguments of `{}`", entry.name))
            }
            DimensionRule::SameToPlain => {
                self.same(&trees, span, &format!("the arguments of `{}`", entry.name))?;
                Some(Type::plain())
            }
        }
    }

    fn lookup(&mut self, name: &str, argument: &Tree, span: &Range<usize>) -> Option<Type> {
        let found = self.infer(argument);
        let Some((argument_dimension, dimension)) = self.names.lookup(name) else {
            let functions = super::tree::FUNCTIONS.iter().map(|entry| entry.name);
            let candidates: Vec<&str> = self.names.all().into_iter().chain(functions).collect();
            let mend = if self.names.symbol(name).is_some() {
                "products are written with a star: a * (b + c)".to_owned()
            } else {
                suggestion(
                    name,
                    candidates,
                    "`countermarch functions` lists the functions; a table is a [[lookup]]",
                )
            };
            self.fault(
                &UNKNOWN_FUNCTION,
                &(span.start..span.start + name.len()),
                format!("unknown function or lookup `{name}`"),
                mend,
            );
            return None;
        };
        self.expect(
            found?,
            argument_dimension,
            &argument.span,
            &format!("the argument of `{name}`"),
        )?;
        Some(Type::of(dimension))
    }

    fn probe(
        &mut self,
        function: ProbeFunction,
        arguments: &[Tree],
        span: &Range<usize>,
    ) -> Option<Type> {
        let entry = function.entry();
        let Some(variable) = self.names.variable() else {
            let mend = "functions of the whole march stand in results, balances and closed forms";
            self.fault(
                &PROBE_MISPLACED,
                span,
                format!("`{}` cannot be used here", entry.name),
                mend,
            );
            return None;
        };
        match entry.arguments {
            ProbeArguments::Event => {
                let known =
                    matches!(&arguments[0].kind, Kind::Symbol(id) if self.names.is_event(id));
                if !known {
                    let word = if let Kind::Symbol(id) = &arguments[0].kind {
                        id.as_str()
                    } else {
                        ""
                    };
                    let mend = suggestion(word, self.names.events(), "name the id of an [[event]]");
                    self.fault(
                        &UNKNOWN_ID,
                        &arguments[0].span,
                        format!("`{}` takes the id of an event", entry.name),
                        mend,
                    );
                    return None;
                }
                Some(if function == ProbeFunction::CountOf {
                    Type::plain()
                } else {
                    Type::of(variable)
                })
            }
            ProbeArguments::Condition => {
                self.condition(&arguments[0])?;
                Some(Type::of(variable))
            }
            ProbeArguments::Expression => {
                let found = self.inner(&arguments[0])?;
                Some(match (function, found) {
                    (ProbeFunction::TimeOfLargest | ProbeFunction::TimeOfSmallest, _) => {
                        Type::of(variable)
                    }
                    (ProbeFunction::Integral, Some((dimension, _))) => {
                        return self.in_range(dimension.times(variable), span);
                    }
                    (_, Some((dimension, absolute))) => Type::Quantity {
                        dimension,
                        absolute,
                    },
                    (_, None) => Type::Zero,
                })
            }
            ProbeArguments::ExpressionAndInstant => {
                let found = self.inner(&arguments[0]);
                let instant = self.infer(&arguments[1])?;
                self.expect(
                    instant,
                    variable,
                    &arguments[1].span,
                    "the independent variable",
                )?;
                Some(
                    found?.map_or(Type::Zero, |(dimension, absolute)| Type::Quantity {
                        dimension,
                        absolute,
                    }),
                )
            }
        }
    }

    /// The expression inside a result function, which holds no result function itself.
    fn inner(&mut self, tree: &Tree) -> Option<Option<(Dimension, bool)>> {
        let mut nested = None;
        tree.walk(&mut |part| {
            if let Kind::Probe(function, _) = &part.kind {
                nested.get_or_insert((part.span.clone(), function.entry().name));
            }
        });
        if let Some((span, name)) = nested {
            self.fault(
                &PROBE_MISPLACED,
                &span,
                format!("`{name}` cannot stand inside another result function's expression"),
                "make it a result of its own",
            );
            return None;
        }
        self.quantity(tree)
    }
}

/// A dimension in words that an engineer reads.
pub fn describe(dimension: Dimension) -> String {
    if dimension.is_none() {
        return "a plain number".to_owned();
    }
    match dimension.usual_name() {
        Some(name) => format!("{name} ({})", dimension.si_unit()),
        None => format!("a quantity in {}", dimension.si_unit()),
    }
}

fn comparison_word(comparison: Comparison) -> &'static str {
    match comparison {
        Comparison::Less => "the two sides of `<`",
        Comparison::LessOrEqual => "the two sides of `<=`",
        Comparison::Greater => "the two sides of `>`",
        Comparison::GreaterOrEqual => "the two sides of `>=`",
        Comparison::Equal => "the two sides of `==`",
        Comparison::NotEqual => "the two sides of `!=`",
    }
}

/// The value of an expression of literals alone, as exponents are.
pub fn literal_value(tree: &Tree) -> Option<f64> {
    match &tree.kind {
        Kind::Number(value) => Some(*value),
        Kind::Negate(a) => Some(-literal_value(a)?),
        Kind::Binary(operator, a, b) => {
            let (a, b) = (literal_value(a)?, literal_value(b)?);
            match operator {
                Binary::Add => Some(a + b),
                Binary::Subtract => Some(a - b),
                Binary::Multiply => Some(a * b),
                Binary::Divide => Some(a / b),
                Binary::Power => None,
            }
        }
        _ => None,
    }
}

/// `value` as a fraction with a small denominator, if it is one to round-off.
fn simple_ratio(value: f64) -> Option<Ratio<i32>> {
    const LARGEST: f64 = 60.0;
    (1..=100).find_map(|denominator| {
        let numerator = value * f64::from(denominator);
        let is_whole = (numerator - numerator.round()).abs() <= 1e-12 * numerator.abs().max(1.0);
        (is_whole && value.abs() <= LARGEST)
            .then(|| Ratio::new(numerator.round() as i32, denominator))
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::formula::parse::parse;

    struct Tank;

    impl Names for Tank {
        fn symbol(&self, name: &str) -> Option<Type> {
            let unit = match name {
                "h" => "m",
                "A" => "m^2",
                "g" => "m/s^2",
                "q" => "m^3/s",
                "t" => "s",
                "C" => "1",
                "T" | "T_a" => "K",
                _ => return None,
            };
            Some(Type::Quantity {
                dimension: Unit::parse(unit).ok()?.dimension(),
                absolute: name.starts_with('T'),
            })
        }
        fn lookup(&self, name: &str) -> Option<(Dimension, Dimension)> {
            (name == "eta").then(|| (Unit::parse("m^3/s").unwrap().dimension(), Dimension::NONE))
        }
        fn is_event(&self, id: &str) -> bool {
            id == "alarm"
        }
        fn variable(&self) -> Option<Dimension> {
            Some(Unit::parse("s").unwrap().dimension())
        }
        fn all(&self) -> Vec<&str> {
            vec!["h", "A", "g", "q", "t", "C", "eta"]
        }
        fn events(&self) -> Vec<&str> {
            vec!["alarm"]
        }
    }

    fn dimension(text: &str) -> Dimension {
        match check(&parse(text).unwrap(), &Tank) {
            Ok(Type::Quantity { dimension, .. }) => dimension,
            other => panic!("{text}: {other:?}"),
        }
    }

    fn unit(text: &str) -> Dimension {
        Unit::parse(text).unwrap().dimension()
    }

    #[test]
    fn hand_dimensions_follow_the_rules() {
        assert_eq!(dimension("C * A * sqrt(2 * g * max(h, 0))"), unit("m^3/s"));
        assert_eq!(dimension("h^(3/2)"), unit("m^(3/2)"));
        assert_eq!(dimension("eta(q) * h"), unit("m"));
        assert_eq!(dimension("time_of(alarm)"), unit("s"));
        assert_eq!(dimension("integral(q)"), unit("m^3"));
        assert_eq!(
            dimension("value_at(h, time_of(alarm)) / h"),
            Dimension::NONE
        );
        assert_eq!(dimension("measure(2, \"m\") + h"), unit("m"));
        assert_eq!(dimension("number_in(h, \"mm\")"), Dimension::NONE);
        assert_eq!(dimension("2^(h/h)"), Dimension::NONE);
    }

    #[test]
    fn hand_difference_of_absolutes_is_a_difference() {
        let absolute = |text: &str| match check(&parse(text).unwrap(), &Tank) {
            Ok(Type::Quantity { absolute, .. }) => absolute,
            other => panic!("{other:?}"),
        };
        assert!(!absolute("T - T_a"));
        assert!(absolute("T - (T - T_a)"));
        assert!(!absolute("2 * T"));
    }

    #[test]
    fn hand_faults_have_code_and_place() {
        for (text, code, span) in [
            ("h + A", "F08", 0..5),
            ("h + 273.15", "F08", 0..10),
            ("2 * hh", "F05", 4..6),
            ("exp(h)", "F08", 4..5),
            ("A^h", "F11", 2..3),
            ("A^(C)", "F11", 3..4),
            ("h < A", "F08", 0..5),
            ("if(h, 1, 2)", "F09", 3..4),
            ("(h > 0) + 1", "F10", 1..6),
            ("etta(q)", "F06", 0..4),
            ("h(2)", "F06", 0..1),
            ("eta(h)", "F08", 4..5),
            ("time_of(alarmm)", "X02", 8..14),
            ("largest(final(h))", "F12", 8..16),
            ("number_in(h, \"kg\")", "F08", 10..11),
            ("max(h, A)", "F08", 0..9),
        ] {
            let faults = check(&parse(text).unwrap(), &Tank).expect_err(text);
            assert_eq!(
                (faults[0].code.id, faults[0].span.clone()),
                (code, span),
                "{text}: {}",
                faults[0].message
            );
        }
    }

    #[test]
    fn hand_all_faults_of_a_formula_come_at_once() {
        let faults = check(&parse("hh + gg * exp(h)").unwrap(), &Tank).unwrap_err();
        assert_eq!(faults.len(), 3, "{faults:?}");
    }
}
