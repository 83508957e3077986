//! Expressions in one line of plain text: what is spoken for a formula and what stands in an outline.

use super::{Gap, gap};
use crate::formula::typeset::Math;

/// The expression as one line of text, unambiguous by parentheses.
pub fn to_plain(math: &Math) -> String {
    match math {
        Math::Row(parts) => row(parts),
        Math::Symbol(text) | Math::Upright(text) | Math::Number(text) => text.clone(),
        Math::Operator(sign) => match sign.as_str() {
            "," | ";" => format!("{sign} "),
            "(" | ")" | "/" | "·" | "′" => sign.clone(),
            _ => format!(" {sign} "),
        },
        Math::Fraction(above, below) => format!("{}/{}", wrapped(above), wrapped(below)),
        Math::Superscript(base, exponent) => format!("{}^{}", wrapped(base), wrapped(exponent)),
        Math::Subscript(base, index) => format!("{}_{}", wrapped(base), wrapped(index)),
        Math::Root {
            radicand,
            degree: None,
        } => format!("√({})", to_plain(radicand)),
        Math::Root {
            radicand,
            degree: Some(degree),
        } => format!(
            "root of degree {} of ({})",
            to_plain(degree),
            to_plain(radicand)
        ),
        Math::Fenced { open, close, body } => format!("{open}{}{close}", to_plain(body)),
        Math::Cases(cases) => {
            let spoken: Vec<String> = cases
                .iter()
                .map(|(value, condition)| match to_plain(condition).trim() {
                    "otherwise" => format!("{} otherwise", to_plain(value)),
                    condition => format!(
                        "{} if {}",
                        to_plain(value),
                        condition.trim_start_matches("if ")
                    ),
                })
                .collect();
            spoken.join("; ")
        }
        Math::Quad => " ".to_owned(),
    }
}

fn row(parts: &[Math]) -> String {
    let mut text = String::new();
    for (i, part) in parts.iter().enumerate() {
        if i > 0 && gap(&parts[i - 1], part) == Gap::Thin {
            text.push(' ');
        }
        text.push_str(&to_plain(part));
    }
    // Operators bring a space on each side; one is enough between words, none at an end.
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

fn wrapped(math: &Math) -> String {
    match math {
        Math::Row(parts) if parts.len() > 1 => format!("({})", to_plain(math)),
        Math::Fraction(..) | Math::Cases(_) => format!("({})", to_plain(math)),
        _ => to_plain(math),
    }
}
