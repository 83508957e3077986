//! Presentation MathML (MathML Core), the form that the mathematics layout reads.

use super::{Gap, gap, is_prefix, is_tall, subscript_word};
use crate::formula::typeset::Math;

/// The expression as an inline `<math>` element.
pub fn to_mathml(math: &Math) -> String {
    format!("<math>{}</math>", element(math))
}

/// The expression as a displayed `<math display="block">` element.
pub fn to_mathml_display(math: &Math) -> String {
    format!("<math display=\"block\">{}</math>", element(math))
}

fn element(math: &Math) -> String {
    match math {
        Math::Row(parts) => row(parts),
        Math::Symbol(name) => identifier(name),
        Math::Upright(text) if text.contains(char::is_whitespace) => {
            format!("<mtext>{}</mtext>", edges_kept(text))
        }
        Math::Upright(text) => format!("<mi mathvariant=\"normal\">{}</mi>", escaped(text)),
        Math::Number(digits) => format!("<mn>{}</mn>", escaped(&digits.replace(' ', "\u{2009}"))),
        Math::Operator(sign) => operator(sign, false),
        Math::Fraction(above, below) => format!("<mfrac>{}{}</mfrac>", group(above), group(below)),
        Math::Superscript(base, exponent) => match &**base {
            Math::Subscript(inner, index) => format!(
                "<msubsup>{}{}{}</msubsup>",
                group(inner),
                subscript(index),
                group(exponent)
            ),
            _ => format!("<msup>{}{}</msup>", group(base), group(exponent)),
        },
        Math::Subscript(base, index) => match &**base {
            Math::Superscript(inner, exponent) => format!(
                "<msubsup>{}{}{}</msubsup>",
                group(inner),
                subscript(index),
                group(exponent)
            ),
            _ => format!("<msub>{}{}</msub>", group(base), subscript(index)),
        },
        Math::Root {
            radicand,
            degree: None,
        } => format!("<msqrt>{}</msqrt>", element(radicand)),
        Math::Root {
            radicand,
            degree: Some(degree),
        } => format!("<mroot>{}{}</mroot>", group(radicand), group(degree)),
        Math::Fenced { open, close, body } => {
            let (open, close) = (escaped(&open.to_string()), escaped(&close.to_string()));
            let grows = is_tall(body);
            let fence = format!("stretchy=\"{grows}\" lspace=\"0em\" rspace=\"0em\"");
            format!(
                "<mrow><mo form=\"prefix\" {fence}>{open}</mo>{}<mo form=\"postfix\" {fence}>{close}</mo></mrow>",
                group(body)
            )
        }
        Math::Cases(cases) => {
            let line = |(value, condition): &(Math, Math)| {
                let (value, condition) = (element(value), element(condition));
                format!(
                    "<mtr><mtd>{value}</mtd><mtd><mspace width=\"0.6em\"/>{condition}</mtd></mtr>"
                )
            };
            let lines: String = cases.iter().map(line).collect();
            let brace = "<mo form=\"prefix\" stretchy=\"true\">{</mo>";
            format!("<mrow>{brace}<mtable columnalign=\"left left\">{lines}</mtable></mrow>")
        }
        Math::Quad => "<mspace width=\"1em\"/>".to_owned(),
    }
}

/// One element for one argument.
fn group(math: &Math) -> String {
    match math {
        Math::Row(_) | Math::Fenced { .. } => format!("<mrow>{}</mrow>", element(math)),
        _ => element(math),
    }
}

fn row(parts: &[Math]) -> String {
    let mut text = String::new();
    for (i, part) in parts.iter().enumerate() {
        if i > 0 && gap(&parts[i - 1], part) == Gap::Thin {
            text.push_str("<mspace width=\"0.1667em\"/>");
        }
        match part {
            Math::Operator(sign) => text.push_str(&operator(sign, is_prefix(parts, i))),
            Math::Row(_) => text.push_str(&group(part)),
            _ => text.push_str(&element(part)),
        }
    }
    text
}

fn operator(sign: &str, prefix: bool) -> String {
    let shown = match sign {
        "-" => "−",
        "*" => "·",
        other => other,
    };
    // A relation or separator at the head of a continued line keeps its spacing; only signs bind to the right.
    let form = if prefix && matches!(shown, "−" | "+" | "±" | "∓") {
        " form=\"prefix\""
    } else {
        " form=\"infix\""
    };
    let form = if matches!(shown, "∑" | "∏" | "∫" | "∂" | "¬" | "!" | "′") {
        ""
    } else {
        form
    };
    format!("<mo stretchy=\"false\"{form}>{}</mo>", escaped(shown))
}

fn identifier(name: &str) -> String {
    if name.chars().count() > 1 {
        format!("<mi mathvariant=\"italic\">{}</mi>", escaped(name))
    } else {
        format!("<mi>{}</mi>", escaped(name))
    }
}

fn subscript(index: &Math) -> String {
    match subscript_word(index) {
        Some(word) => format!("<mi mathvariant=\"normal\">{}</mi>", escaped(word)),
        None => group(index),
    }
}

/// MathML trims white space at the ends of a token: keep it as no-break spaces.
fn edges_kept(text: &str) -> String {
    let inner = text.trim();
    let lead = text.len() - text.trim_start().len();
    let tail = text.len() - text.trim_end().len();
    let pad = |n: usize| "\u{a0}".repeat(n.min(1));
    format!(
        "{}{}{}",
        pad(lead),
        escaped(inner),
        pad(if inner.is_empty() { 0 } else { tail })
    )
}

fn escaped(text: &str) -> String {
    let mut safe = String::with_capacity(text.len());
    for character in crate::render::face::printable(text).chars() {
        match character {
            '&' => safe.push_str("&amp;"),
            '<' => safe.push_str("&lt;"),
            '>' => safe.push_str("&gt;"),
            '"' => safe.push_str("&quot;"),
            c => safe.push(c),
        }
    }
    safe
}
