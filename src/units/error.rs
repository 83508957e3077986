//! Faults in unit and quantity texts: what is wrong, where in the text, how to mend it.

use std::fmt;

use super::expression::{DEEPEST_NESTING, LARGEST_EXPONENT, LONGEST_TEXT};

/// A text that is no unit; `offset` and `length` are bytes within the text.
#[derive(Clone, Debug, PartialEq)]
pub struct UnitError {
    pub offset: usize,
    pub length: usize,
    pub fault: UnitFault,
}

/// A text that is no quantity; `offset` and `length` are bytes within the text.
#[derive(Clone, Debug, PartialEq)]
pub struct QuantityError {
    pub offset: usize,
    pub length: usize,
    pub fault: QuantityFault,
}

/// A gauge pressure was to be converted without an ambient pressure.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct MissingAmbient;

#[derive(Clone, Debug, PartialEq)]
pub enum UnitFault {
    Empty,
    TooLong,
    TooDeep,
    /// The text ends where a unit should stand.
    Incomplete,
    Space,
    Unexpected {
        found: char,
    },
    NotAscii {
        found: char,
        mend: Option<String>,
    },
    Unclosed,
    Unopened,
    /// A number other than 1.
    Number,
    /// An exponent that is no small integer or fraction.
    Exponent,
    SecondSolidus {
        readings: Vec<String>,
    },
    MissingProduct {
        name: String,
    },
    Unknown {
        name: String,
        nearest: Vec<String>,
    },
    Ambiguous {
        name: String,
        choices: &'static [&'static str],
    },
    /// A temperature scale or gauge pressure inside a product, quotient or power.
    ScaleInProduct {
        name: String,
        write: String,
    },
    /// Factor or dimension beyond what can be represented.
    OutOfRange,
}

#[derive(Clone, Debug, PartialEq)]
pub enum QuantityFault {
    TooLong,
    NoNumber,
    /// A typographic minus sign.
    MinusSign,
    DecimalComma,
    /// `.5` or `5.`
    BarePoint,
    /// The unit stands right after the number; `unit` is what may be meant.
    NoSpace {
        unit: Option<String>,
    },
    Spaces,
    OutOfRange,
    BelowAbsoluteZero,
    Unit(UnitFault),
}

impl UnitError {
    /// How to mend the text, where something useful can be said.
    pub fn help(&self) -> Option<String> {
        self.fault.help()
    }
}

impl QuantityError {
    /// How to mend the text, where something useful can be said.
    pub fn help(&self) -> Option<String> {
        match &self.fault {
            QuantityFault::Unit(fault) => fault.help(),
            QuantityFault::NoNumber => Some(
                "a quantity is a number, one space and a unit, such as \"12.5 m^2\"".to_owned(),
            ),
            QuantityFault::MinusSign => Some("write the hyphen \"-\" of the keyboard".to_owned()),
            QuantityFault::DecimalComma => Some("write a decimal point".to_owned()),
            QuantityFault::BarePoint => {
                Some("write a digit on both sides of the point, as in 0.5".to_owned())
            }
            QuantityFault::NoSpace { unit: Some(unit) } => {
                Some(format!("write one space before \"{unit}\""))
            }
            QuantityFault::NoSpace { unit: None } | QuantityFault::Spaces => {
                Some("write the number, one space and the unit, and nothing else".to_owned())
            }
            QuantityFault::TooLong
            | QuantityFault::OutOfRange
            | QuantityFault::BelowAbsoluteZero => None,
        }
    }
}

impl UnitFault {
    fn help(&self) -> Option<String> {
        Some(match self {
            UnitFault::Empty => "a plain number has the unit \"1\"".to_owned(),
            UnitFault::Space => "write units without spaces, as in kg/(m*s)".to_owned(),
            UnitFault::NotAscii {
                mend: Some(mend), ..
            } => format!("write \"{mend}\""),
            UnitFault::NotAscii { mend: None, .. } => {
                "units are written in ASCII: u for micro, ohm, degC, ^2, *".to_owned()
            }
            UnitFault::Number => {
                "put the number into the value; powers that are fractions are written ^(1/2)"
                    .to_owned()
            }
            UnitFault::Exponent => {
                format!("write ^2, ^-1 or ^(1/2); parts up to {LARGEST_EXPONENT}, not zero")
            }
            UnitFault::SecondSolidus { readings } if !readings.is_empty() => {
                format!("write {}", quoted(readings))
            }
            UnitFault::SecondSolidus { .. } => "use parentheses, as in W/(m^2*K)".to_owned(),
            UnitFault::MissingProduct { name } => format!("write \"{name}*(…\""),
            UnitFault::Unknown { nearest, .. } if !nearest.is_empty() => {
                format!("did you mean {}?", quoted(nearest))
            }
            UnitFault::Unknown { .. } => "`countermarch units` lists the known units".to_owned(),
            UnitFault::Ambiguous { choices, .. } => {
                format!("write {}", quoted(choices))
            }
            UnitFault::ScaleInProduct { write, .. } => format!("write \"{write}\""),
            UnitFault::Incomplete => "a unit must follow".to_owned(),
            UnitFault::TooLong
            | UnitFault::TooDeep
            | UnitFault::Unexpected { .. }
            | UnitFault::Unclosed
            | UnitFault::Unopened
            | UnitFault::OutOfRange => return None,
        })
    }
}

impl fmt::Display for UnitError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.fault.fmt(out)
    }
}

impl fmt::Display for UnitFault {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            UnitFault::Empty => write!(out, "the unit is empty"),
            UnitFault::TooLong => write!(out, "the unit is longer than {LONGEST_TEXT} characters"),
            UnitFault::TooDeep => {
                write!(
                    out,
                    "parentheses are nested more than {DEEPEST_NESTING} deep"
                )
            }
            UnitFault::Incomplete => write!(out, "the unit is not complete"),
            UnitFault::Space => write!(out, "there is a space inside the unit"),
            UnitFault::Unexpected { found } => {
                write!(out, "{:?} cannot stand here in a unit", found)
            }
            UnitFault::NotAscii { found, .. } => {
                write!(out, "the character {found:?} is not used in units")
            }
            UnitFault::Unclosed => write!(out, "this parenthesis is not closed"),
            UnitFault::Unopened => write!(out, "this parenthesis was not opened"),
            UnitFault::Number => write!(out, "a number other than 1 cannot stand in a unit"),
            UnitFault::Exponent => write!(out, "this is not the exponent of a unit"),
            UnitFault::SecondSolidus { readings } if readings.len() == 1 => {
                write!(out, "a second \"/\" needs parentheses")
            }
            UnitFault::SecondSolidus { .. } => {
                write!(out, "what follows the \"/\" can be read in two ways")
            }
            UnitFault::MissingProduct { name } => {
                write!(
                    out,
                    "there is no \"*\" between \"{name}\" and the parenthesis"
                )
            }
            UnitFault::Unknown { name, .. } => write!(out, "the unit \"{name}\" is not known"),
            UnitFault::Ambiguous { name, .. } => {
                write!(out, "\"{name}\" stands for several units")
            }
            UnitFault::ScaleInProduct { name, .. } => write!(
                out,
                "\"{name}\" is a point on a scale and cannot be part of a composed unit"
            ),
            UnitFault::OutOfRange => write!(out, "the unit is too large or too small to compute"),
        }
    }
}

impl fmt::Display for QuantityError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match &self.fault {
            QuantityFault::TooLong => write!(out, "the text is too long for a quantity"),
            QuantityFault::NoNumber => write!(out, "there is no number at the start"),
            QuantityFault::MinusSign => write!(out, "this minus sign is not ASCII"),
            QuantityFault::DecimalComma => write!(out, "there is a comma inside the number"),
            QuantityFault::BarePoint => write!(out, "a digit is missing beside the decimal point"),
            QuantityFault::NoSpace { .. } => write!(out, "there is no space after the number"),
            QuantityFault::Spaces => write!(out, "there are spaces too many"),
            QuantityFault::OutOfRange => write!(out, "the value is beyond the range of numbers"),
            QuantityFault::BelowAbsoluteZero => {
                write!(out, "the temperature is below absolute zero")
            }
            QuantityFault::Unit(fault) => fault.fmt(out),
        }
    }
}

impl fmt::Display for MissingAmbient {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            out,
            "a gauge pressure needs the ambient pressure of the site"
        )
    }
}

impl std::error::Error for UnitError {}
impl std::error::Error for QuantityError {}
impl std::error::Error for MissingAmbient {}

/// `"a"`, `"b" or "c"`.
fn quoted(choices: &[impl AsRef<str>]) -> String {
    let quoted: Vec<String> = choices
        .iter()
        .map(|choice| format!("\"{}\"", choice.as_ref()))
        .collect();
    match quoted.split_last() {
        Some((last, others)) if !others.is_empty() => format!("{} or {last}", others.join(", ")),
        Some((last, _)) => last.clone(),
        None => String::new(),
    }
}
