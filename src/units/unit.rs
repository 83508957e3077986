//! A unit as written in a problem file: its meaning, its conversions, its print.

use std::fmt;

use super::dimension::Dimension;
use super::error::{MissingAmbient, UnitError};
use super::expression::{self, Expression};

/// What a number in a unit says beside its size.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Kind {
    /// A size alone: K for temperature differences, Pa for absolute pressures.
    Plain,
    /// A point on a temperature scale; `offset` is 0 K below the scale's zero, in the scale's degrees.
    AbsoluteTemperature { offset: f64 },
    /// Pressure above ambient; absolute inside, so that an ambient pressure is needed to convert.
    Gauge,
}

/// A unit with its exact factor to SI: value × numerator / denominator is the value in SI.
#[derive(Clone, Debug, PartialEq)]
pub struct Unit {
    text: String,
    expression: Expression,
    dimension: Dimension,
    numerator: f64,
    denominator: f64,
    kind: Kind,
}

impl Unit {
    /// Reads a unit such as `kW/(m^2*K)`; errors point into `text`.
    pub fn parse(text: &str) -> Result<Unit, UnitError> {
        let meaning = expression::read(text)?;
        Ok(Unit {
            text: text.to_owned(),
            expression: meaning.expression,
            dimension: meaning.dimension,
            numerator: meaning.numerator,
            denominator: meaning.denominator,
            kind: meaning.kind,
        })
    }

    /// The unit of plain numbers.
    pub fn one() -> Unit {
        Unit::coherent(Dimension::NONE)
    }

    /// The SI unit of a dimension, in base units.
    pub fn coherent(dimension: Dimension) -> Unit {
        Unit {
            text: dimension.si_unit_text(),
            expression: Expression::Coherent(dimension),
            dimension,
            numerator: 1.0,
            denominator: 1.0,
            kind: Kind::Plain,
        }
    }

    /// The text as written, ASCII.
    pub fn text(&self) -> &str {
        &self.text
    }

    pub fn dimension(&self) -> Dimension {
        self.dimension
    }

    pub fn kind(&self) -> Kind {
        self.kind
    }

    /// Numerator of the factor to SI.
    pub fn numerator(&self) -> f64 {
        self.numerator
    }

    /// Denominator of the factor to SI.
    pub fn denominator(&self) -> f64 {
        self.denominator
    }

    /// Whether this is the unit `1`, which is not printed after a number.
    pub fn is_one(&self) -> bool {
        self.text == "1"
    }

    /// A value in this unit, in SI; a gauge pressure needs the ambient pressure in Pa.
    pub fn to_si(&self, value: f64, ambient: Option<f64>) -> Result<f64, MissingAmbient> {
        Ok(match self.kind {
            Kind::Plain => self.difference_to_si(value),
            Kind::AbsoluteTemperature { offset } => self.difference_to_si(value + offset),
            Kind::Gauge => self.difference_to_si(value) + ambient.ok_or(MissingAmbient)?,
        })
    }

    /// A value in SI, in this unit; a gauge pressure needs the ambient pressure in Pa.
    pub fn from_si(&self, value_si: f64, ambient: Option<f64>) -> Result<f64, MissingAmbient> {
        Ok(match self.kind {
            Kind::Plain => self.difference_from_si(value_si),
            Kind::AbsoluteTemperature { offset } => self.difference_from_si(value_si) - offset,
            Kind::Gauge => self.difference_from_si(value_si - ambient.ok_or(MissingAmbient)?),
        })
    }

    /// A difference of two values in this unit's scale, in SI: 5 between two degC values is 5 K.
    pub fn difference_to_si(&self, difference: f64) -> f64 {
        difference * self.numerator / self.denominator
    }

    /// A difference in SI, in this unit's scale.
    pub fn difference_from_si(&self, difference_si: f64) -> f64 {
        difference_si * self.denominator / self.numerator
    }

    /// The unit in which differences, spreads and margins of values in this unit are printed.
    ///
    /// K for temperatures on a scale, the absolute pressure unit for gauge pressures, else the same.
    pub fn difference_unit(&self) -> Unit {
        let plain = match self.kind {
            Kind::Plain => return self.clone(),
            Kind::AbsoluteTemperature { .. } => Unit::parse("K"),
            Kind::Gauge => Unit::parse(self.text.trim_end_matches("(g)")),
        };
        plain.unwrap_or_else(|_| Unit::coherent(self.dimension))
    }

    /// Typographic text: `m³/h`, `kW/(m²·K)`, `°C`, `bar(g)`.
    pub fn print(&self) -> String {
        self.expression.print()
    }

    /// A number and this unit as printed: an unbreakable space between, none before `°`, `′`, `″`, no `1`.
    ///
    /// SI Brochure, 9th ed., 5.4.3; NIST SP 811 (2008), 7.2.
    pub fn after(&self, number: &str) -> String {
        match self.print().as_str() {
            "1" => number.to_owned(),
            angle @ ("°" | "′" | "″") => format!("{number}{angle}"),
            print => format!("{number}\u{A0}{print}"),
        }
    }
}

/// The text as written.
impl fmt::Display for Unit {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        out.write_str(&self.text)
    }
}
