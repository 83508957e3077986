//! LaTeX for `$…$` in Markdown: safe in table cells (no bare `|`, `<`, `>`) and in every common viewer.

use super::{Gap, gap, is_function, subscript_word};
use crate::formula::typeset::Math;

/// The expression in LaTeX, without delimiters.
pub fn to_latex(math: &Math) -> String {
    match math {
        Math::Row(parts) => row(parts),
        Math::Symbol(name) => symbol(name),
        Math::Upright(text) => upright(text),
        Math::Number(digits) => number(digits),
        Math::Operator(sign) => operator(sign),
        Math::Fraction(above, below) => {
            format!("\\frac{{{}}}{{{}}}", to_latex(above), to_latex(below))
        }
        Math::Superscript(base, exponent) => format!("{}^{{{}}}", braced(base), to_latex(exponent)),
        Math::Subscript(base, index) => format!("{}_{{{}}}", braced(base), subscript(index)),
        Math::Root {
            radicand,
            degree: None,
        } => format!("\\sqrt{{{}}}", to_latex(radicand)),
        Math::Root {
            radicand,
            degree: Some(degree),
        } => format!("\\sqrt[{}]{{{}}}", to_latex(degree), to_latex(radicand)),
        Math::Fenced { open, close, body } => format!(
            "\\left{} {} \\right{}",
            fence(*open, true),
            to_latex(body),
            fence(*close, false)
        ),
        Math::Cases(cases) => {
            let lines: Vec<String> = cases
                .iter()
                .map(|(value, condition)| format!("{} & {}", to_latex(value), to_latex(condition)))
                .collect();
            format!("\\begin{{cases}} {} \\end{{cases}}", lines.join(" \\\\ "))
        }
        Math::Quad => "\\quad ".to_owned(),
    }
}

fn row(parts: &[Math]) -> String {
    let mut text = String::new();
    for (i, part) in parts.iter().enumerate() {
        if i > 0 {
            text.push_str(if gap(&parts[i - 1], part) == Gap::Thin {
                "\\, "
            } else {
                " "
            });
        }
        text.push_str(&to_latex(part));
    }
    text
}

fn braced(base: &Math) -> String {
    match base {
        Math::Symbol(_) | Math::Number(_) | Math::Upright(_) | Math::Fenced { .. } => {
            to_latex(base)
        }
        // A subscript below a superscript (or the other way) joins it on one base.
        Math::Subscript(inner, _)
            if !matches!(**inner, Math::Subscript(..) | Math::Superscript(..)) =>
        {
            to_latex(base)
        }
        _ => format!("{{{}}}", to_latex(base)),
    }
}

fn subscript(index: &Math) -> String {
    subscript_word(index).map_or_else(
        || to_latex(index),
        |word| format!("\\mathrm{{{}}}", escaped(word)),
    )
}

fn symbol(name: &str) -> String {
    let mut characters = name.chars();
    match (characters.next(), characters.next()) {
        (Some(letter), None) => {
            greek(letter).map_or_else(|| escaped(name), |command| format!("\\{command}"))
        }
        _ => format!("\\mathit{{{}}}", escaped(name)),
    }
}

fn upright(text: &str) -> String {
    const COMMANDS: [&str; 18] = [
        "arccos", "arcsin", "arctan", "cos", "cosh", "cot", "det", "exp", "lg", "ln", "log", "max",
        "min", "sin", "sinh", "tan", "tanh", "sup",
    ];
    if COMMANDS.contains(&text) {
        format!("\\{text}")
    } else if is_function(text) {
        format!("\\operatorname{{{}}}", escaped(text))
    } else if text.contains(' ') {
        format!("\\text{{{}}}", escaped(text))
    } else {
        format!("\\mathrm{{{}}}", escaped(text))
    }
}

fn number(digits: &str) -> String {
    let mut text = String::new();
    for character in digits.chars() {
        match character {
            '\u{2009}' | '\u{202f}' | '\u{a0}' | ' ' => text.push_str("\\,"),
            ',' => text.push_str("{,}"),
            '−' => text.push('-'),
            '×' => text.push_str("\\times "),
            '±' => text.push_str("\\pm "),
            c => match "⁰¹²³⁴⁵⁶⁷⁸⁹⁻".chars().position(|s| s == c) {
                Some(10) => text.push_str("^{-}"),
                Some(digit) => text.push_str(&format!("^{{{digit}}}")),
                None => text.push_str(&escaped(&c.to_string())),
            },
        }
    }
    text.replace("}^{", "")
}

fn operator(sign: &str) -> String {
    let command = match sign {
        "−" | "-" => "-",
        "·" | "⋅" => "\\cdot",
        "×" => "\\times",
        "*" => "\\ast",
        "÷" => "\\div",
        "±" => "\\pm",
        "∓" => "\\mp",
        "<" => "\\lt",
        ">" => "\\gt",
        "≤" => "\\le",
        "≥" => "\\ge",
        "≠" => "\\ne",
        "≈" => "\\approx",
        "≡" => "\\equiv",
        "∝" => "\\propto",
        "→" => "\\to",
        "←" => "\\leftarrow",
        "⇒" => "\\Rightarrow",
        "∈" => "\\in",
        "∧" => "\\land",
        "∨" => "\\lor",
        "¬" => "\\lnot",
        "∂" => "\\partial",
        "∞" => "\\infty",
        "∑" => "\\sum",
        "∏" => "\\prod",
        "∫" => "\\int",
        "…" => "\\dots",
        "⋯" => "\\cdots",
        "|" => "\\mid",
        "′" => "'",
        other => return escaped(other),
    };
    command.to_owned()
}

fn fence(character: char, opens: bool) -> &'static str {
    match (character, opens) {
        ('(', _) => "(",
        (')', _) => ")",
        ('[', _) => "[",
        (']', _) => "]",
        ('{', _) => "\\lbrace",
        ('}', _) => "\\rbrace",
        ('|', true) => "\\lvert",
        ('|', false) => "\\rvert",
        ('‖', true) => "\\lVert",
        ('‖', false) => "\\rVert",
        ('⌊', _) => "\\lfloor",
        ('⌋', _) => "\\rfloor",
        ('⌈', _) => "\\lceil",
        ('⌉', _) => "\\rceil",
        ('⟨', _) => "\\langle",
        ('⟩', _) => "\\rangle",
        _ => ".",
    }
}

fn escaped(text: &str) -> String {
    let mut safe = String::with_capacity(text.len());
    for character in text.chars() {
        match character {
            '\\' => safe.push_str("\\backslash "),
            '$' | '%' | '#' | '&' | '_' | '{' | '}' => {
                safe.push('\\');
                safe.push(character);
            }
            '<' => safe.push_str("\\lt "),
            '>' => safe.push_str("\\gt "),
            '|' => safe.push_str("\\vert "),
            '^' | '~' | '`' | '*' => safe.push(' '),
            '·' => safe.push_str("\\cdot "),
            '°' => safe.push_str("^{\\circ}"),
            c => safe.push(c),
        }
    }
    safe
}

fn greek(letter: char) -> Option<&'static str> {
    const LETTERS: [(char, &str); 38] = [
        ('α', "alpha"),
        ('β', "beta"),
        ('γ', "gamma"),
        ('δ', "delta"),
        ('ε', "varepsilon"),
        ('ϵ', "epsilon"),
        ('ζ', "zeta"),
        ('η', "eta"),
        ('θ', "theta"),
        ('ϑ', "vartheta"),
        ('ι', "iota"),
        ('κ', "kappa"),
        ('λ', "lambda"),
        ('μ', "mu"),
        ('ν', "nu"),
        ('ξ', "xi"),
        ('π', "pi"),
        ('ρ', "rho"),
        ('ϱ', "varrho"),
        ('σ', "sigma"),
        ('ς', "varsigma"),
        ('τ', "tau"),
        ('υ', "upsilon"),
        ('φ', "varphi"),
        ('ϕ', "phi"),
        ('χ', "chi"),
        ('ψ', "psi"),
        ('ω', "omega"),
        ('Γ', "Gamma"),
        ('Δ', "Delta"),
        ('Θ', "Theta"),
        ('Λ', "Lambda"),
        ('Ξ', "Xi"),
        ('Π', "Pi"),
        ('Σ', "Sigma"),
        ('Φ', "Phi"),
        ('Ψ', "Psi"),
        ('Ω', "Omega"),
    ];
    LETTERS
        .iter()
        .find(|(character, _)| *character == letter)
        .map(|(_, command)| *command)
}
