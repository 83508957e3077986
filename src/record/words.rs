//! Numbers and quantities as words: every rounding of the record is done here.
//!
//! Owns: how many digits, which unit. Does not own: typefaces, column widths.

use crate::diagnostic::line_and_column;
use crate::float::{self, Numeral};
use crate::formula::typeset::{self, Math};
use crate::problem::model::{Expression, Formula, Model};
use crate::record::block::{Inline, Label, Run, Shift, Text};
use crate::units::{Kind, Unit};

/// What is printed where the problem file gives nothing.
pub const NONE_STATED: &str = "none stated";

pub fn text(words: impl Into<String>) -> Text {
    vec![Inline::Text(words.into())]
}

pub fn math(math: Math) -> Text {
    vec![Inline::Math(math)]
}

pub fn symbol(name: &str) -> Text {
    math(typeset::symbol(name))
}

pub fn or_none(words: &Option<String>) -> Text {
    text(words.as_deref().unwrap_or(NONE_STATED))
}

/// A value as written, with all its digits.
pub fn as_written(value: f64) -> String {
    Numeral::shortest(value).typographic()
}

/// A value as written with its unit.
pub fn with_unit(value: f64, unit: &Unit) -> String {
    unit.after(&as_written(value))
}

/// The unit alone, for a column of units.
pub fn unit_cell(unit: &Unit) -> Text {
    text(if unit.is_one() {
        "1".to_owned()
    } else {
        unit.print()
    })
}

/// A value in SI, in `unit`.
pub fn in_unit(model: &Model, value_si: f64, unit: &Unit) -> f64 {
    unit.from_si(value_si, model.ambient).unwrap_or(f64::NAN)
}

/// A difference of two values of `unit` in SI, in the unit in which differences are printed.
pub fn difference_in_unit(value_si: f64, unit: &Unit) -> f64 {
    unit.difference_unit().difference_from_si(value_si)
}

/// A value to `digits` significant digits, with its unit.
pub fn rounded(model: &Model, value_si: f64, unit: &Unit, digits: usize) -> String {
    unit.after(&Numeral::significant(in_unit(model, value_si, unit), digits).typographic())
}

/// Most significant digits of a printed value: numerical uncertainty may be far below what anybody can use.
const MOST_DIGITS: i32 = 6;

/// A value and its numerical uncertainty, spelled to one decimal place.
pub struct Rounded {
    pub value: String,
    pub uncertainty: String,
}

/// Rounds a value in SI by its uncertainty, both in `unit`.
///
/// The uncertainty has two significant digits at most and is rounded up, the value matches it (JCGM 100:2008,
/// 7.2.6); where that would give the value more than six digits, both are cut to six of the value.
pub fn by_uncertainty(
    model: &Model,
    value_si: f64,
    uncertainty_si: Option<f64>,
    unit: &Unit,
) -> Rounded {
    let value = in_unit(model, value_si, unit);
    let Some(uncertainty) = uncertainty_si
        .map(|uncertainty| unit.difference_from_si(uncertainty))
        .filter(|uncertainty| uncertainty.is_finite())
    else {
        return Rounded {
            value: trimmed(value),
            uncertainty: "–".to_owned(),
        };
    };
    let cut = MOST_DIGITS - 1 - magnitude(value.abs());
    let places = if uncertainty > 0.0 {
        1 - magnitude(uncertainty)
    } else {
        i32::MAX
    };
    if uncertainty == 0.0 {
        Rounded {
            value: trimmed(value),
            uncertainty: "0".to_owned(),
        }
    } else if places <= cut || !(0..=12).contains(&cut) {
        let (value, uncertainty) = float::value_with_uncertainty(value, uncertainty);
        Rounded {
            value: value.typographic(),
            uncertainty: uncertainty.typographic(),
        }
    } else {
        // The uncertainty is rounded up to one unit of the last place printed.
        let last_place = Numeral::decimals(power_of_ten(-cut), cut);
        Rounded {
            value: Numeral::decimals(value, cut).typographic(),
            uncertainty: last_place.typographic(),
        }
    }
}

/// Ten to a whole power, correctly rounded.
pub fn power_of_ten(exponent: i32) -> f64 {
    format!("1e{exponent}").parse().unwrap_or(1.0)
}

/// Six significant digits at most, fewer if the value has fewer.
pub fn trimmed(value: f64) -> String {
    let short = Numeral::shortest(value);
    let digits = short
        .digits
        .trim_start_matches(['0', '.'])
        .chars()
        .filter(char::is_ascii_digit)
        .count();
    if digits <= MOST_DIGITS as usize {
        short.typographic()
    } else {
        Numeral::significant(value, MOST_DIGITS as usize).typographic()
    }
}

/// The fewest decimals, from `least` on, at which every one of `values` stands on its true side of every limit.
///
/// A value that rounding would put on, or beyond, a limit that it does not meet gets more digits.
pub fn truthful_places(values: &[f64], limits: &[f64], least: i32) -> i32 {
    let tells_truly = |places: i32| {
        values.iter().all(|value| {
            let rounded = Numeral::decimals(*value, places)
                .plain()
                .parse::<f64>()
                .unwrap_or(f64::NAN);
            limits.iter().all(|limit| {
                value == limit || ((rounded > *limit) == (value > limit) && rounded != *limit)
            })
        })
    };
    (least.max(0)..15)
        .find(|places| tells_truly(*places))
        .unwrap_or(15)
}

/// Values of one column, all with the decimals that give the largest of them five significant digits.
pub fn column(values: &[f64]) -> Vec<String> {
    let largest = values
        .iter()
        .filter(|value| value.is_finite())
        .map(|value| value.abs())
        .fold(0.0, float::max);
    let decimals = 4 - magnitude(largest);
    values
        .iter()
        .map(|value| {
            if value.is_finite() && (-8..=12).contains(&decimals) {
                Numeral::decimals(*value, decimals.max(0)).typographic()
            } else {
                Numeral::significant(*value, 5).typographic()
            }
        })
        .collect()
}

/// Exponent of ten of a positive number; 0 for zero.
pub fn magnitude(value: f64) -> i32 {
    let text = format!("{value:e}");
    text.split('e')
        .nth(1)
        .and_then(|exponent| exponent.parse().ok())
        .filter(|_| value > 0.0)
        .unwrap_or(0)
}

/// An expression of the problem file as a value or as mathematics.
pub fn expression(expression: &Expression) -> Text {
    match expression {
        Expression::Quantity { value, unit, .. } => text(with_unit(*value, unit)),
        Expression::Formula(formula) => math(typeset::typeset(&formula.tree)),
    }
}

/// "line 41" of the problem file, where a formula stands.
pub fn line_of(model: &Model, formula: &Formula) -> String {
    format!(
        "line {}",
        line_and_column(&model.text, formula.span.start).0
    )
}

/// A symbol as label of a figure: base in italics, the rest as subscript.
pub fn symbol_label(name: &str) -> Vec<Run> {
    let mut runs = Vec::new();
    runs_of(&typeset::symbol(name), Shift::Base, &mut runs);
    runs
}

fn runs_of(math: &Math, shift: Shift, runs: &mut Vec<Run>) {
    let mut push = |text: &str, italic: bool| {
        runs.push(Run {
            text: text.to_owned(),
            italic,
            shift,
        })
    };
    match math {
        Math::Symbol(text) => push(text, true),
        Math::Upright(text) | Math::Number(text) | Math::Operator(text) => push(text, false),
        Math::Row(parts) => parts.iter().for_each(|part| runs_of(part, shift, runs)),
        Math::Subscript(base, index) => {
            runs_of(base, shift, runs);
            runs_of(index, Shift::Subscript, runs);
        }
        _ => {}
    }
}

/// Plain words as label of a figure.
pub fn label(words: &str) -> Label {
    Label(vec![plain_run(words)])
}

pub fn plain_run(words: &str) -> Run {
    Run {
        text: words.to_owned(),
        italic: false,
        shift: Shift::Base,
    }
}

/// "depth h / m": what an axis shows.
pub fn axis_label(meaning: &str, name: &str, unit: &Unit) -> Label {
    let mut runs = Vec::new();
    if !meaning.is_empty() {
        let gap = if name.is_empty() { "" } else { "  " };
        runs.push(plain_run(&format!("{meaning}{gap}")));
    }
    runs.extend(symbol_label(name));
    runs.push(plain_run(&format!(" / {}", unit.print())));
    Label(runs)
}

/// Whether differences of this unit are printed in another one.
pub fn has_own_zero(unit: &Unit) -> bool {
    unit.kind() != Kind::Plain
}

/// "1 step", "180 steps".
pub fn count(number: u64, singular: &str, plural: &str) -> String {
    let word = if number == 1 { singular } else { plural };
    format!("{} {word}", as_written(number as f64))
}

/// "a", "a and b", "a, b and c".
pub fn listed(items: &[String]) -> String {
    match items {
        [] => String::new(),
        [one] => one.clone(),
        [rest @ .., last] => format!("{} and {last}", rest.join(", ")),
    }
}

/// The first letter in upper case.
pub fn capitalised(words: &str) -> String {
    let mut letters = words.chars();
    letters.next().map_or_else(String::new, |first| {
        first.to_uppercase().collect::<String>() + letters.as_str()
    })
}
