//! Typeset expressions in other notations: LaTeX for Markdown, MathML for layout, plain text for readers' ears.

mod latex;
mod mathml;
mod plain;

pub use latex::to_latex;
pub use mathml::{to_mathml, to_mathml_display};
pub use plain::to_plain;

use crate::formula::typeset::Math;

/// Names set upright that take an argument: they want a thin space before an argument without parentheses.
const FUNCTIONS: [&str; 24] = [
    "arccos", "arcsin", "arctan", "atan2", "cos", "cosh", "cot", "det", "erf", "exp", "interp",
    "lb", "lg", "ln", "log", "max", "mean", "min", "mod", "sgn", "sin", "sinh", "tan", "tanh",
];

fn is_function(name: &str) -> bool {
    FUNCTIONS.binary_search(&name).is_ok()
}

/// What stands between two neighbours in a row.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Gap {
    None,
    Thin,
}

/// A thin space parts a name from its argument, a number from its unit, and long names from their factors.
fn gap(left: &Math, right: &Math) -> Gap {
    let thin = match (last(left), first(right)) {
        (Math::Fraction(..), Math::Operator(sign)) => sign == "," || sign == ";",
        (Math::Operator(_) | Math::Quad, _) | (_, Math::Operator(_) | Math::Quad) => false,
        (_, Math::Upright(text)) if text.starts_with(char::is_whitespace) => false,
        (Math::Upright(text), _) if text.ends_with(char::is_whitespace) => false,
        (left, Math::Fenced { .. }) => matches!(core(left), Math::Number(_)),
        (Math::Number(_), Math::Upright(_) | Math::Number(_)) => true,
        (left, right) => is_word(core(left)) || is_word(core(right)),
    };
    if thin { Gap::Thin } else { Gap::None }
}

/// What a row within a row begins with.
fn first(math: &Math) -> &Math {
    match math {
        Math::Row(parts) => parts.first().map_or(math, first),
        other => other,
    }
}

/// What a row within a row ends with.
fn last(math: &Math) -> &Math {
    match math {
        Math::Row(parts) => parts.last().map_or(math, last),
        other => other,
    }
}

/// Whether fences around the expression must grow: sub- and superscripts alone do not make them.
fn is_tall(math: &Math) -> bool {
    match math {
        Math::Row(parts) => parts.iter().any(is_tall),
        Math::Symbol(_) | Math::Upright(_) | Math::Number(_) | Math::Operator(_) | Math::Quad => {
            false
        }
        Math::Superscript(base, exponent) => is_tall(base) || is_tall(exponent),
        Math::Subscript(base, _) => is_tall(base),
        Math::Fenced { body, .. } => is_tall(body),
        Math::Fraction(..) | Math::Root { .. } | Math::Cases(_) => true,
    }
}

/// A name of several letters; a single upright letter (the d of a derivative) stands as close as a symbol.
fn is_word(math: &Math) -> bool {
    matches!(math, Math::Upright(name) | Math::Symbol(name) if name.chars().count() > 1)
}

/// The base under any sub- and superscripts.
fn core(math: &Math) -> &Math {
    match math {
        Math::Superscript(base, _) | Math::Subscript(base, _) => core(base),
        other => other,
    }
}

/// Whether an operator at this place of a row has nothing on its left to join: a sign rather than a difference.
fn is_prefix(row: &[Math], place: usize) -> bool {
    match place.checked_sub(1).and_then(|before| row.get(before)) {
        None | Some(Math::Operator(_) | Math::Quad) => true,
        Some(_) => false,
    }
}

/// A subscript of several letters is a word, not a product of variables: upright.
fn subscript_word(math: &Math) -> Option<&str> {
    match math {
        Math::Symbol(name) if name.chars().count() > 1 => Some(name),
        _ => None,
    }
}

#[cfg(test)]
mod tests;
