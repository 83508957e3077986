//! The formula as a tree over the real numbers, with positions in its text.
//!
//! Owns: node kinds and the table of functions. Does not own: the parser, dimensions, evaluation.

use std::ops::Range;

/// A node with the byte range of its text.
#[derive(Clone, Debug, PartialEq)]
pub struct Tree {
    pub kind: Kind,
    pub span: Range<usize>,
}

#[derive(Clone, Debug, PartialEq)]
pub enum Kind {
    /// A literal, as a 64-bit float.
    Number(f64),
    /// An input, state, quantity, switch, the independent variable, or `pi`.
    Symbol(String),
    Negate(Box<Tree>),
    Binary(Binary, Box<Tree>, Box<Tree>),
    Compare(Comparison, Box<Tree>, Box<Tree>),
    And(Box<Tree>, Box<Tree>),
    Or(Box<Tree>, Box<Tree>),
    Not(Box<Tree>),
    If(Box<Tree>, Box<Tree>, Box<Tree>),
    Call(Function, Vec<Tree>),
    /// A call of a name that is no function: a lookup, if one of that name exists.
    Lookup(String, Box<Tree>),
    /// A function of the whole march, allowed in results and the like only.
    Probe(ProbeFunction, Vec<Tree>),
    /// The plain number of a quantity in a unit.
    NumberIn(Box<Tree>, String),
    /// A plain number given a unit.
    Measure(f64, String),
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Binary {
    Add,
    Subtract,
    Multiply,
    Divide,
    Power,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Comparison {
    Less,
    LessOrEqual,
    Greater,
    GreaterOrEqual,
    Equal,
    NotEqual,
}

/// How a function treats the dimensions of its arguments.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum DimensionRule {
    /// Dimensionless in, dimensionless out.
    Plain,
    /// Any dimension in, its root of this degree out.
    Root(i32),
    /// All arguments of one dimension, which is that of the value.
    Same,
    /// All arguments of one dimension, a plain number out.
    SameToPlain,
}

macro_rules! functions {
    ($($variant:ident $name:literal $arity:literal $rule:expr, $doc:literal;)*) => {
        /// A function of formulas.
        #[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
        pub enum Function { $($variant),* }

        /// Every function with its name, number of arguments, dimension rule and description.
        pub static FUNCTIONS: &[FunctionEntry] = &[$(FunctionEntry {
            function: Function::$variant, name: $name, arity: $arity, rule: $rule, doc: $doc,
        }),*];
    };
}

pub struct FunctionEntry {
    pub function: Function,
    pub name: &'static str,
    pub arity: usize,
    pub rule: DimensionRule,
    pub doc: &'static str,
}

functions! {
    Sqrt "sqrt" 1 DimensionRule::Root(2), "square root";
    Cbrt "cbrt" 1 DimensionRule::Root(3), "cube root";
    Exp "exp" 1 DimensionRule::Plain, "exponential function";
    Ln "ln" 1 DimensionRule::Plain, "natural logarithm";
    Log10 "log10" 1 DimensionRule::Plain, "decimal logarithm";
    Sin "sin" 1 DimensionRule::Plain, "sine of an angle in radians";
    Cos "cos" 1 DimensionRule::Plain, "cosine of an angle in radians";
    Tan "tan" 1 DimensionRule::Plain, "tangent of an angle in radians";
    Asin "asin" 1 DimensionRule::Plain, "inverse sine, in radians";
    Acos "acos" 1 DimensionRule::Plain, "inverse cosine, in radians";
    Atan "atan" 1 DimensionRule::Plain, "inverse tangent, in radians";
    Atan2 "atan2" 2 DimensionRule::SameToPlain, "angle of the point (second, first), in radians";
    Sinh "sinh" 1 DimensionRule::Plain, "hyperbolic sine";
    Cosh "cosh" 1 DimensionRule::Plain, "hyperbolic cosine";
    Tanh "tanh" 1 DimensionRule::Plain, "hyperbolic tangent";
    Abs "abs" 1 DimensionRule::Same, "magnitude";
    Sign "sign" 1 DimensionRule::SameToPlain, "−1, 0 or 1";
    Min "min" 2 DimensionRule::Same, "the smaller of two";
    Max "max" 2 DimensionRule::Same, "the larger of two";
    Floor "floor" 1 DimensionRule::Plain, "largest integer not above";
    Ceil "ceil" 1 DimensionRule::Plain, "smallest integer not below";
    Hypot "hypot" 2 DimensionRule::Same, "root of the sum of two squares";
}

impl Function {
    pub fn entry(self) -> &'static FunctionEntry {
        // The table is written by the macro in the order of the variants.
        &FUNCTIONS[self as usize]
    }

    pub fn named(name: &str) -> Option<Function> {
        FUNCTIONS
            .iter()
            .find(|entry| entry.name == name)
            .map(|entry| entry.function)
    }
}

/// What a function of the whole march takes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ProbeArguments {
    /// One expression of the states.
    Expression,
    /// An expression and an instant.
    ExpressionAndInstant,
    /// The id of an event.
    Event,
    /// A condition.
    Condition,
}

macro_rules! probes {
    ($($variant:ident $name:literal $arguments:ident, $doc:literal;)*) => {
        /// A function of the whole march.
        #[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
        pub enum ProbeFunction { $($variant),* }

        /// Every result function with its name, arguments and description.
        pub static PROBES: &[ProbeEntry] = &[$(ProbeEntry {
            function: ProbeFunction::$variant, name: $name, arguments: ProbeArguments::$arguments, doc: $doc,
        }),*];
    };
}

pub struct ProbeEntry {
    pub function: ProbeFunction,
    pub name: &'static str,
    pub arguments: ProbeArguments,
    pub doc: &'static str,
}

probes! {
    Initial "initial" Expression, "value at the start";
    Final "final" Expression, "value at the end";
    Largest "largest" Expression, "largest value over the march";
    Smallest "smallest" Expression, "smallest value over the march";
    TimeOfLargest "time_of_largest" Expression, "instant of the largest value";
    TimeOfSmallest "time_of_smallest" Expression, "instant of the smallest value";
    ValueAt "value_at" ExpressionAndInstant, "value at an instant";
    TimeOf "time_of" Event, "instant of the first occurrence of an event";
    TimeOfLast "time_of_last" Event, "instant of the last occurrence of an event";
    CountOf "count_of" Event, "number of occurrences of an event";
    Mean "mean" Expression, "mean over the march";
    Integral "integral" Expression, "integral over the march";
    TimeWhile "time_while" Condition, "how long a condition holds";
}

impl ProbeFunction {
    pub fn entry(self) -> &'static ProbeEntry {
        &PROBES[self as usize]
    }

    pub fn named(name: &str) -> Option<ProbeFunction> {
        PROBES
            .iter()
            .find(|entry| entry.name == name)
            .map(|entry| entry.function)
    }
}

/// Names that no symbol may have, in any spelling of case: functions, literals and words of the language.
pub fn is_reserved(name: &str) -> bool {
    let lower = name.to_ascii_lowercase();
    matches!(
        lower.as_str(),
        "pi" | "inf" | "nan" | "true" | "false" | "if" | "number_in" | "measure"
    ) || Function::named(&lower).is_some()
        || ProbeFunction::named(&lower).is_some()
}

impl Tree {
    pub fn new(kind: Kind, span: Range<usize>) -> Tree {
        Tree { kind, span }
    }

    /// The direct parts, from left to right.
    pub fn children(&self) -> Vec<&Tree> {
        match &self.kind {
            Kind::Number(_) | Kind::Symbol(_) | Kind::Measure(..) => Vec::new(),
            Kind::Negate(a) | Kind::Not(a) | Kind::Lookup(_, a) | Kind::NumberIn(a, _) => vec![a],
            Kind::Binary(_, a, b) | Kind::Compare(_, a, b) | Kind::And(a, b) | Kind::Or(a, b) => {
                vec![a, b]
            }
            Kind::If(c, a, b) => vec![c, a, b],
            Kind::Call(_, list) | Kind::Probe(_, list) => list.iter().collect(),
        }
    }

    /// Calls `visit` for this node and every node below it, parents first.
    pub fn walk<'a>(&'a self, visit: &mut impl FnMut(&'a Tree)) {
        visit(self);
        for child in self.children() {
            child.walk(visit);
        }
    }

    /// Names of the symbols in this formula, with positions, from left to right.
    pub fn symbols(&self) -> Vec<(&str, Range<usize>)> {
        let mut found = Vec::new();
        self.walk(&mut |tree| {
            if let Kind::Symbol(name) = &tree.kind {
                found.push((name.as_str(), tree.span.clone()));
            }
        });
        found
    }

    /// Names of the lookups called in this formula.
    pub fn lookups(&self) -> Vec<&str> {
        let mut found = Vec::new();
        self.walk(&mut |tree| {
            if let Kind::Lookup(name, _) = &tree.kind {
                found.push(name.as_str());
            }
        });
        found
    }

    /// This tree with every part for which `replace` gives another one replaced; parents first.
    #[must_use]
    pub fn replaced(&self, replace: &mut impl FnMut(&Tree) -> Option<Tree>) -> Tree {
        if let Some(tree) = replace(self) {
            return tree;
        }
        let mut go = |tree: &Tree| Box::new(tree.replaced(replace));
        let kind = match &self.kind {
            Kind::Number(_) | Kind::Symbol(_) | Kind::Measure(..) => self.kind.clone(),
            Kind::Negate(a) => Kind::Negate(go(a)),
            Kind::Not(a) => Kind::Not(go(a)),
            Kind::Lookup(name, a) => Kind::Lookup(name.clone(), go(a)),
            Kind::NumberIn(a, unit) => Kind::NumberIn(go(a), unit.clone()),
            Kind::Binary(operator, a, b) => Kind::Binary(*operator, go(a), go(b)),
            Kind::Compare(comparison, a, b) => Kind::Compare(*comparison, go(a), go(b)),
            Kind::And(a, b) => Kind::And(go(a), go(b)),
            Kind::Or(a, b) => Kind::Or(go(a), go(b)),
            Kind::If(c, a, b) => Kind::If(go(c), go(a), go(b)),
            Kind::Call(function, list) => {
                Kind::Call(*function, list.iter().map(|tree| *go(tree)).collect())
            }
            Kind::Probe(function, list) => {
                Kind::Probe(*function, list.iter().map(|tree| *go(tree)).collect())
            }
        };
        Tree::new(kind, self.span.clone())
    }
}
