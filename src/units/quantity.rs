//! A number with a unit, as written in a problem file.

use std::fmt;

use super::error::{MissingAmbient, QuantityError, QuantityFault};
use super::suggest;
use super::unit::{Kind, Unit};
use crate::float;

/// A value in the unit it was written in.
#[derive(Clone, Debug, PartialEq)]
pub struct Quantity {
    /// The value in `unit`, finite.
    pub value: f64,
    pub unit: Unit,
}

impl Quantity {
    /// Reads a number, one space and a unit (`12.5 m^2`), or a bare number; errors point into `text`.
    pub fn parse(text: &str) -> Result<Quantity, QuantityError> {
        if text.len() > LONGEST_QUANTITY {
            return Err(QuantityError {
                offset: 0,
                length: text.len(),
                fault: QuantityFault::TooLong,
            });
        }
        let length = number_length(text);
        let value = read_number(text, length)?;
        let rest = &text[length..];
        if rest.is_empty() {
            return Ok(Quantity {
                value,
                unit: Unit::one(),
            });
        }
        let Some(unit_text) = rest.strip_prefix(' ') else {
            let unit = suggest::in_ascii(rest.trim_start());
            return Err(fault(length, rest, QuantityFault::NoSpace { unit }));
        };
        if unit_text.trim() != unit_text {
            return Err(fault(length, rest, QuantityFault::Spaces));
        }
        let unit = Unit::parse(unit_text).map_err(|error| QuantityError {
            offset: length + 1 + error.offset,
            length: error.length,
            fault: QuantityFault::Unit(error.fault),
        })?;
        let quantity = Quantity { value, unit };
        quantity.check(text)?;
        Ok(quantity)
    }

    /// Whether `text` is meant as a quantity: a number, then nothing or what can begin a unit.
    ///
    /// The rest of what may stand in such a place is a formula: `2 * h_0`, `h_0`.
    pub fn is_meant(text: &str) -> bool {
        let length = number_length(text);
        let rest = text[length..].trim_start();
        let starts_unit = |first: char| first.is_alphanumeric() || "%(°,".contains(first);
        length > 0 && rest.chars().next().is_none_or(starts_unit)
    }

    /// The value in SI; a gauge pressure needs the ambient pressure in Pa.
    pub fn value_si(&self, ambient: Option<f64>) -> Result<f64, MissingAmbient> {
        self.unit.to_si(self.value, ambient)
    }

    fn check(&self, text: &str) -> Result<(), QuantityError> {
        let value_si = match self.unit.kind() {
            Kind::Gauge => self.unit.difference_to_si(self.value),
            _ => self.value_si(None).unwrap_or(f64::NAN),
        };
        if !value_si.is_finite() {
            return Err(fault(0, text, QuantityFault::OutOfRange));
        }
        let is_temperature = matches!(self.unit.kind(), Kind::AbsoluteTemperature { .. });
        if is_temperature && value_si < 0.0 {
            return Err(fault(0, text, QuantityFault::BelowAbsoluteZero));
        }
        Ok(())
    }
}

/// The shortest text that reads back to the same quantity.
impl fmt::Display for Quantity {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(&float::shortest(self.value))?;
        if self.unit.is_one() {
            Ok(())
        } else {
            write!(out, " {}", self.unit)
        }
    }
}

const LONGEST_QUANTITY: usize = 400;

fn fault(offset: usize, at: &str, fault: QuantityFault) -> QuantityError {
    QuantityError {
        offset,
        length: at.len(),
        fault,
    }
}

/// Length of the number that `text` begins with: sign, digits, point, exponent; 0 if there is none.
fn number_length(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits_from = |start: usize| {
        bytes[start.min(bytes.len())..]
            .iter()
            .take_while(|byte| byte.is_ascii_digit())
            .count()
    };
    let sign = usize::from(matches!(bytes.first(), Some(b'-' | b'+')));
    let whole = digits_from(sign);
    let mut length = sign + whole;
    let mut fraction = 0;
    if bytes.get(length) == Some(&b'.') {
        fraction = digits_from(length + 1);
        length += 1 + fraction;
    }
    if whole + fraction == 0 {
        return 0;
    }
    if matches!(bytes.get(length), Some(b'e' | b'E')) {
        let exponent_sign = usize::from(matches!(bytes.get(length + 1), Some(b'-' | b'+')));
        let exponent = digits_from(length + 1 + exponent_sign);
        if exponent > 0 {
            length += 1 + exponent_sign + exponent;
        }
    }
    length
}

fn read_number(text: &str, length: usize) -> Result<f64, QuantityError> {
    let number = &text[..length];
    if length == 0 {
        let is_minus = |first: char| "−–‒".contains(first);
        return Err(match text.chars().next().filter(|&first| is_minus(first)) {
            Some(minus) => fault(0, &text[..minus.len_utf8()], QuantityFault::MinusSign),
            None => fault(0, text, QuantityFault::NoNumber),
        });
    }
    if text[length..].starts_with(',') {
        let comma = &text[length..length + 1];
        return Err(fault(length, comma, QuantityFault::DecimalComma));
    }
    let mantissa = number
        .trim_start_matches(['-', '+'])
        .split(['e', 'E'])
        .next()
        .unwrap_or("");
    if mantissa.starts_with('.') || mantissa.ends_with('.') {
        return Err(fault(0, number, QuantityFault::BarePoint));
    }
    let is_zero = mantissa.bytes().all(|byte| matches!(byte, b'0' | b'.'));
    match number.parse::<f64>() {
        Ok(value) if value.is_finite() && (value != 0.0 || is_zero) => Ok(value),
        _ => Err(fault(0, number, QuantityFault::OutOfRange)),
    }
}
