//! Typeset expressions: what a formula looks like on paper, free of any layout.
//!
//! Owns: the [`Math`] tree and the way from a formula to it. Does not own: fonts, MathML, LaTeX (`render`).

use super::tree::{Binary, Comparison, Function, Kind, ProbeArguments, Tree};
use crate::float;
use crate::units::Unit;

/// One piece of typeset mathematics.
#[derive(Clone, Debug, PartialEq)]
pub enum Math {
    /// Pieces side by side.
    Row(Vec<Math>),
    /// A quantity symbol, set in italics: a Latin or Greek letter, or a short name.
    Symbol(String),
    /// Upright text: function names, units, words in subscripts and cases.
    Upright(String),
    /// A number, already rounded and spelled as it is to be printed.
    Number(String),
    /// An operator or relation: `+`, `−`, `=`, `≤`, `·`, `,`.
    Operator(String),
    Fraction(Box<Math>, Box<Math>),
    Superscript(Box<Math>, Box<Math>),
    Subscript(Box<Math>, Box<Math>),
    /// A root of `degree`, square without one.
    Root {
        radicand: Box<Math>,
        degree: Option<Box<Math>>,
    },
    /// Fences that grow with their content: `(`…`)`, `|`…`|`, `⌊`…`⌋`.
    Fenced {
        open: char,
        close: char,
        body: Box<Math>,
    },
    /// A definition by cases: (value, condition); the last condition may be the word "otherwise".
    Cases(Vec<(Math, Math)>),
    /// A space as wide as one em, between an equation and its side condition.
    Quad,
}

impl Math {
    pub fn symbol(name: &str) -> Math {
        symbol(name)
    }

    pub fn number(text: &str) -> Math {
        Math::Number(text.to_owned())
    }

    pub fn operator(text: &str) -> Math {
        Math::Operator(text.to_owned())
    }

    pub fn upright(text: &str) -> Math {
        Math::Upright(text.to_owned())
    }

    pub fn fenced(body: Math) -> Math {
        Math::Fenced {
            open: '(',
            close: ')',
            body: Box::new(body),
        }
    }

    pub fn over(self, denominator: Math) -> Math {
        Math::Fraction(Box::new(self), Box::new(denominator))
    }

    pub fn indexed(self, index: Math) -> Math {
        Math::Subscript(Box::new(self), Box::new(index))
    }

    pub fn raised(self, exponent: Math) -> Math {
        Math::Superscript(Box::new(self), Box::new(exponent))
    }

    /// The symbol of a step of the variable: Δt.
    pub fn step_of(variable: &str) -> Math {
        Math::Row(vec![Math::upright("Δ"), symbol(variable)])
    }

    /// `left = right`.
    pub fn equals(self, right: Math) -> Math {
        Math::Row(vec![self, Math::operator("="), right])
    }

    /// `f(x)`, with the argument in parentheses.
    pub fn of(self, argument: Math) -> Math {
        Math::Row(vec![self, Math::fenced(argument)])
    }

    /// d`self`/d`by`.
    pub fn rate(self, by: Math) -> Math {
        Math::Row(vec![Math::upright("d"), self]).over(Math::Row(vec![Math::upright("d"), by]))
    }
}

/// Names of Greek letters in symbols, with the letters.
static GREEK: &[(&str, &str)] = &[
    ("alpha", "α"),
    ("beta", "β"),
    ("gamma", "γ"),
    ("delta", "δ"),
    ("epsilon", "ε"),
    ("zeta", "ζ"),
    ("eta", "η"),
    ("theta", "θ"),
    ("iota", "ι"),
    ("kappa", "κ"),
    ("lambda", "λ"),
    ("mu", "μ"),
    ("nu", "ν"),
    ("xi", "ξ"),
    ("rho", "ρ"),
    ("sigma", "σ"),
    ("tau", "τ"),
    ("upsilon", "υ"),
    ("phi", "φ"),
    ("chi", "χ"),
    ("psi", "ψ"),
    ("omega", "ω"),
    ("Gamma", "Γ"),
    ("Delta", "Δ"),
    ("Theta", "Θ"),
    ("Lambda", "Λ"),
    ("Xi", "Ξ"),
    ("Pi", "Π"),
    ("Sigma", "Σ"),
    ("Phi", "Φ"),
    ("Psi", "Ψ"),
    ("Omega", "Ω"),
    ("pi", "π"),
];

/// A part of a name: its Greek letter, if it is the name of one.
fn letter(part: &str) -> String {
    GREEK
        .iter()
        .find(|(name, _)| *name == part)
        .map_or_else(|| part.to_owned(), |(_, letter)| (*letter).to_owned())
}

/// A symbol by its name: `C_d` is C with subscript d, `rho_w` is ρ with subscript w, `T1` is T with subscript 1.
pub fn symbol(name: &str) -> Math {
    let (base, index) = match name.split_once('_') {
        Some((base, index)) if !base.is_empty() && !index.is_empty() => {
            (base, index.replace('_', ","))
        }
        _ => {
            let digits = name.trim_end_matches(|c: char| c.is_ascii_digit());
            if digits.is_empty() || digits.len() == name.len() {
                return Math::Symbol(letter(name));
            }
            (digits, name[digits.len()..].to_owned())
        }
    };
    let parts: Vec<Math> = index.split(',').map(subscript_part).collect();
    let mut row = Vec::new();
    for part in parts {
        if !row.is_empty() {
            row.push(Math::operator(","));
        }
        row.push(part);
    }
    let index = if row.len() == 1 {
        row.remove(0)
    } else {
        Math::Row(row)
    };
    symbol(base).indexed(index)
}

/// Numbers and words in subscripts are upright; a single letter is itself a symbol.
fn subscript_part(part: &str) -> Math {
    if part.chars().all(|c| c.is_ascii_digit()) {
        return Math::number(part);
    }
    let letter = letter(part);
    if letter.chars().count() == 1 {
        Math::Symbol(letter)
    } else {
        Math::Upright(letter)
    }
}

/// How tightly an expression binds; a part that binds less tightly than its place needs parentheses.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
enum Binding {
    Or,
    And,
    Relation,
    Sum,
    Product,
    Negation,
    Power,
    Atom,
}

fn binding(tree: &Tree) -> Binding {
    match &tree.kind {
        Kind::Or(..) => Binding::Or,
        Kind::And(..) => Binding::And,
        Kind::Compare(..) => Binding::Relation,
        Kind::Binary(Binary::Add | Binary::Subtract, ..) => Binding::Sum,
        Kind::Binary(Binary::Multiply, ..) => Binding::Product,
        Kind::Negate(_) => Binding::Negation,
        Kind::Number(value) if *value < 0.0 => Binding::Negation,
        Kind::Number(value) if float::Numeral::shortest(*value).exponent.is_some() => {
            Binding::Product
        }
        Kind::Measure(..) => Binding::Product,
        Kind::Binary(Binary::Power, ..) => Binding::Power,
        _ => Binding::Atom,
    }
}

/// The formula as it is written on paper.
pub fn typeset(tree: &Tree) -> Math {
    match &tree.kind {
        Kind::Number(value) => number(*value),
        Kind::Symbol(name) => symbol(name),
        Kind::Negate(a) => Math::Row(vec![Math::operator("−"), at_least(a, Binding::Product)]),
        Kind::Binary(Binary::Add, a, b) => Math::Row(vec![
            at_least(a, Binding::Sum),
            Math::operator("+"),
            at_least(b, Binding::Product),
        ]),
        Kind::Binary(Binary::Subtract, a, b) => Math::Row(vec![
            at_least(a, Binding::Sum),
            Math::operator("−"),
            at_least(b, Binding::Product),
        ]),
        Kind::Binary(Binary::Multiply, a, b) => product(a, b),
        Kind::Binary(Binary::Divide, a, b) => typeset(a).over(typeset(b)),
        Kind::Binary(Binary::Power, a, b) => power(a, b),
        Kind::Compare(comparison, a, b) => Math::Row(vec![
            at_least(a, Binding::Sum),
            Math::operator(relation(*comparison)),
            at_least(b, Binding::Sum),
        ]),
        Kind::And(a, b) => Math::Row(vec![
            at_least(a, Binding::And),
            Math::operator("∧"),
            at_least(b, Binding::And),
        ]),
        Kind::Or(a, b) => Math::Row(vec![
            at_least(a, Binding::Or),
            Math::operator("∨"),
            at_least(b, Binding::Or),
        ]),
        Kind::Not(a) => Math::Row(vec![Math::operator("¬"), Math::fenced(typeset(a))]),
        Kind::If(c, a, b) => Math::Cases(cases(c, a, b)),
        Kind::Call(function, arguments) => call(*function, arguments),
        Kind::Lookup(name, argument) => symbol(name).of(typeset(argument)),
        Kind::Probe(function, arguments) => {
            let name = function.entry().name.replace('_', " ");
            let is_event = function.entry().arguments == ProbeArguments::Event;
            match (&arguments[0].kind, is_event) {
                // An event's id is a name, not a quantity.
                (Kind::Symbol(id), true) => {
                    Math::upright(&name).of(Math::Upright(id.replace('_', " ")))
                }
                _ => Math::upright(&name).of(list(arguments)),
            }
        }
        Kind::NumberIn(argument, unit) => {
            let unit = Unit::parse(unit).map_or_else(|_| unit.clone(), |unit| unit.print());
            Math::Fenced {
                open: '{',
                close: '}',
                body: Box::new(typeset(argument)),
            }
            .indexed(Math::Upright(unit))
        }
        Kind::Measure(value, unit) => {
            let unit = Unit::parse(unit).map_or_else(|_| unit.clone(), |unit| unit.print());
            Math::Row(vec![
                number(*value),
                Math::Upright(format!("\u{2009}{unit}")),
            ])
        }
    }
}

/// A number as it is written: 1.2e-3 as 1.2 · 10⁻³.
pub fn number(value: f64) -> Math {
    let numeral = float::Numeral::shortest(value);
    let mantissa = float::Numeral {
        exponent: None,
        ..numeral.clone()
    }
    .typographic();
    match numeral.exponent {
        None => Math::Number(mantissa),
        Some(exponent) => {
            let exponent = Math::Number(exponent.to_string().replace('-', "−"));
            Math::Row(vec![
                Math::Number(mantissa),
                Math::operator("×"),
                Math::number("10").raised(exponent),
            ])
        }
    }
}

fn at_least(tree: &Tree, needed: Binding) -> Math {
    if binding(tree) >= needed {
        typeset(tree)
    } else {
        Math::fenced(typeset(tree))
    }
}

fn relation(comparison: Comparison) -> &'static str {
    match comparison {
        Comparison::Less => "<",
        Comparison::LessOrEqual => "≤",
        Comparison::Greater => ">",
        Comparison::GreaterOrEqual => "≥",
        Comparison::Equal => "=",
        Comparison::NotEqual => "≠",
    }
}

/// Factors side by side; a dot where two numbers would run together.
fn product(a: &Tree, b: &Tree) -> Math {
    let needs_dot = starts_with_digit(b);
    let (left, right) = (at_least(a, Binding::Product), at_least(b, Binding::Power));
    if needs_dot {
        Math::Row(vec![left, Math::operator("·"), right])
    } else {
        Math::Row(vec![left, right])
    }
}

fn starts_with_digit(tree: &Tree) -> bool {
    match &tree.kind {
        Kind::Number(_) | Kind::Measure(..) => true,
        Kind::Binary(Binary::Multiply | Binary::Power, a, _) => starts_with_digit(a),
        Kind::Binary(Binary::Divide, a, _) => matches!(a.kind, Kind::Number(_)),
        _ => false,
    }
}

fn power(base: &Tree, exponent: &Tree) -> Math {
    // A function's power stands behind its closed argument, so only atoms go without parentheses.
    let is_tall = matches!(base.kind, Kind::Binary(Binary::Divide, ..) | Kind::If(..));
    let base = if is_tall {
        Math::fenced(typeset(base))
    } else {
        at_least(base, Binding::Atom)
    };
    base.raised(flat(exponent))
}

/// In an exponent a quotient of numbers stands on one line: x^{2/3}.
fn flat(tree: &Tree) -> Math {
    match &tree.kind {
        Kind::Binary(Binary::Divide, a, b)
            if matches!((&a.kind, &b.kind), (Kind::Number(_), Kind::Number(_))) =>
        {
            Math::Row(vec![typeset(a), Math::operator("/"), typeset(b)])
        }
        _ => typeset(tree),
    }
}

/// A chain of `if`s in the last branch is one definition by cases.
fn cases(condition: &Tree, then: &Tree, otherwise: &Tree) -> Vec<(Math, Math)> {
    let mut list = vec![(
        typeset(then),
        Math::Row(vec![Math::upright("if "), typeset(condition)]),
    )];
    match &otherwise.kind {
        Kind::If(c, a, b) => list.extend(cases(c, a, b)),
        _ => list.push((typeset(otherwise), Math::upright("otherwise"))),
    }
    list
}

fn call(function: Function, arguments: &[Tree]) -> Math {
    let fence = |open: char, close: char| Math::Fenced {
        open,
        close,
        body: Box::new(list(arguments)),
    };
    match function {
        Function::Sqrt => Math::Root {
            radicand: Box::new(list(arguments)),
            degree: None,
        },
        Function::Cbrt => Math::Root {
            radicand: Box::new(list(arguments)),
            degree: Some(Box::new(Math::number("3"))),
        },
        Function::Abs => fence('|', '|'),
        Function::Floor => fence('⌊', '⌋'),
        Function::Ceil => fence('⌈', '⌉'),
        Function::Exp if arguments.iter().all(is_short) => {
            Math::upright("e").raised(list(arguments))
        }
        Function::Asin => Math::upright("arcsin").of(list(arguments)),
        Function::Acos => Math::upright("arccos").of(list(arguments)),
        Function::Atan | Function::Atan2 => Math::upright("arctan").of(list(arguments)),
        Function::Sign => Math::upright("sgn").of(list(arguments)),
        Function::Log10 => Math::upright("log")
            .indexed(Math::number("10"))
            .of(list(arguments)),
        _ => Math::upright(function.entry().name).of(list(arguments)),
    }
}

/// Short enough to be legible as an exponent of e.
fn is_short(tree: &Tree) -> bool {
    let mut nodes = 0;
    tree.walk(&mut |_| nodes += 1);
    nodes <= 8
}

fn list(arguments: &[Tree]) -> Math {
    let mut row = Vec::new();
    for argument in arguments {
        if !row.is_empty() {
            row.push(Math::operator(","));
        }
        row.push(typeset(argument));
    }
    if row.len() == 1 {
        row.remove(0)
    } else {
        Math::Row(row)
    }
}
