//! The grammar of unit texts, and what a parsed one means and looks like.
//!
//! ```text
//! unit     := factor ( "*" factor )* [ "/" factor ]
//! factor   := atom [ "^" exponent ]
//! atom     := "1" | name | "(" unit ")"
//! name     := letters and digits [ "(" qualifier ")" ] | "%"
//! exponent := integer | "(" integer [ "/" integer ] ")"
//! ```
//!
//! One solidus a level: `a/b/c` and `a/b*c` are refused with their readings (SI Brochure, 9th ed.,
//! 5.2, and NIST SP 811 (2008), 6.1.6: more than one solidus needs brackets).

use num_rational::Ratio;

use super::catalogue::{self, Entry, Prefix, Scale};
use super::dimension::Dimension;
use super::error::{UnitError, UnitFault};
use super::factor::Factor;
use super::suggest;
use super::unit::Kind;
use crate::float::superscript;

/// A unit as it was put together.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Expression {
    One,
    Coherent(Dimension),
    Named {
        prefix: Option<&'static Prefix>,
        entry: &'static Entry,
    },
    Product(Vec<Expression>),
    Quotient(Box<Expression>, Box<Expression>),
    Power(Box<Expression>, Ratio<i32>),
}

/// A unit's meaning.
pub(super) struct Meaning {
    pub(super) expression: Expression,
    pub(super) dimension: Dimension,
    pub(super) numerator: f64,
    pub(super) denominator: f64,
    pub(super) kind: Kind,
}

pub(super) const LONGEST_TEXT: usize = 200;
pub(super) const DEEPEST_NESTING: usize = 8;
pub(super) const LARGEST_EXPONENT: i32 = 99;

pub(super) fn read(text: &str) -> Result<Meaning, UnitError> {
    let whole = |fault| UnitError {
        offset: 0,
        length: text.len(),
        fault,
    };
    if text.is_empty() {
        return Err(whole(UnitFault::Empty));
    }
    if text.len() > LONGEST_TEXT {
        return Err(whole(UnitFault::TooLong));
    }
    if let Some((offset, found)) = text.char_indices().find(|(_, letter)| !letter.is_ascii()) {
        let fault = UnitFault::NotAscii {
            found,
            mend: suggest::in_ascii(text),
        };
        return Err(UnitError {
            offset,
            length: found.len_utf8(),
            fault,
        });
    }
    let mut parser = Parser {
        text,
        position: 0,
        depth: 0,
        scales: Vec::new(),
    };
    let expression = parser.unit()?;
    if let Some(next) = parser.peek() {
        return Err(parser.unexpected(next));
    }
    parser.refuse_scales_in_products(&expression)?;
    let (dimension, factor) = expression
        .meaning()
        .ok_or_else(|| whole(UnitFault::OutOfRange))?;
    let (numerator, denominator) = factor.parts();
    if !(numerator.is_normal() && denominator.is_normal()) {
        return Err(whole(UnitFault::OutOfRange));
    }
    let kind = match &expression {
        Expression::Named { entry, .. } => entry.scale.kind(),
        _ => Kind::Plain,
    };
    Ok(Meaning {
        expression,
        dimension,
        numerator,
        denominator,
        kind,
    })
}

impl Expression {
    /// Typographic text.
    pub(super) fn print(&self) -> String {
        match self {
            Expression::One => "1".to_owned(),
            Expression::Coherent(dimension) => dimension.si_unit(),
            Expression::Named { prefix, entry } => {
                format!(
                    "{}{}",
                    prefix.map_or("", |prefix| prefix.print),
                    entry.print
                )
            }
            Expression::Product(factors) => {
                let factors: Vec<String> = factors.iter().map(Expression::print_inner).collect();
                factors.join("·")
            }
            Expression::Quotient(above, below) => {
                let above = match **above {
                    Expression::Quotient(..) => above.print_inner(),
                    _ => above.print(),
                };
                format!("{above}/{}", below.print_inner())
            }
            Expression::Power(base, power) => {
                let base = base.print_inner();
                match (*power.numer(), *power.denom()) {
                    (whole, 1) => format!("{base}{}", superscript(whole)),
                    (1, 2) => format!("√{base}"),
                    _ => format!("{base}^({power})"),
                }
            }
        }
    }

    fn print_inner(&self) -> String {
        match self {
            Expression::Product(_) | Expression::Quotient(..) => format!("({})", self.print()),
            _ => self.print(),
        }
    }

    /// Dimension and factor; `None` where an exponent leaves its range.
    fn meaning(&self) -> Option<(Dimension, Factor)> {
        match self {
            Expression::One => Some((Dimension::NONE, Factor::ONE)),
            Expression::Coherent(dimension) => Some((*dimension, Factor::ONE)),
            Expression::Named { prefix, entry } => {
                let factor = entry.factor()?;
                let power = prefix.map_or(0, |prefix| prefix.power);
                Some((entry.dimension(), factor.times(Factor::power_of_ten(power))))
            }
            Expression::Product(factors) => {
                let mut product = (Dimension::NONE, Factor::ONE);
                for factor in factors {
                    let (dimension, size) = factor.meaning()?;
                    product = (product.0.times(dimension)?, product.1.times(size));
                }
                Some(product)
            }
            Expression::Quotient(above, below) => {
                let (above, below) = (above.meaning()?, below.meaning()?);
                Some((above.0.over(below.0)?, above.1.over(below.1)))
            }
            Expression::Power(base, power) => {
                let (dimension, size) = base.meaning()?;
                Some((dimension.to_the(*power)?, size.to_the(*power)))
            }
        }
    }
}

struct Parser<'t> {
    text: &'t str,
    position: usize,
    depth: usize,
    /// Where names of temperature scales and gauge pressures stand: start, end, entry.
    scales: Vec<(usize, usize, &'static Entry)>,
}

impl Parser<'_> {
    fn unit(&mut self) -> Result<Expression, UnitError> {
        let start = self.position;
        let mut factors = vec![self.factor()?];
        while self.peek() == Some('*') {
            self.position += 1;
            factors.push(self.factor()?);
        }
        let above = match factors.pop() {
            Some(only) if factors.is_empty() => only,
            last => {
                factors.extend(last);
                Expression::Product(factors)
            }
        };
        if self.peek() != Some('/') {
            return Ok(above);
        }
        let solidus = self.position;
        self.position += 1;
        let below = self.factor()?;
        if let Some(second @ ('/' | '*')) = self.peek() {
            return Err(self.second_solidus(start, solidus, second));
        }
        Ok(Expression::Quotient(Box::new(above), Box::new(below)))
    }

    fn factor(&mut self) -> Result<Expression, UnitError> {
        let base = self.atom()?;
        if self.peek() != Some('^') {
            return Ok(base);
        }
        self.position += 1;
        let power = self.exponent()?;
        if self.peek() == Some('^') {
            return Err(self.unexpected('^'));
        }
        Ok(Expression::Power(Box::new(base), power))
    }

    fn atom(&mut self) -> Result<Expression, UnitError> {
        match self.peek() {
            Some('(') => self.group(),
            Some('%') => {
                self.position += 1;
                self.named(self.position - 1)
            }
            Some(first) if first.is_ascii_alphabetic() => {
                let start = self.position;
                self.skip(|byte| byte.is_ascii_alphanumeric());
                if self.peek() == Some('(') {
                    self.qualifier(start)?;
                }
                self.named(start)
            }
            Some(first) if first.is_ascii_digit() => {
                let start = self.position;
                self.skip(|byte| byte.is_ascii_digit() || byte == b'.');
                if &self.text[start..self.position] == "1" {
                    Ok(Expression::One)
                } else {
                    Err(self.fault_from(start, UnitFault::Number))
                }
            }
            Some(other) => Err(self.unexpected(other)),
            None => Err(self.fault_from(self.position, UnitFault::Incomplete)),
        }
    }

    fn group(&mut self) -> Result<Expression, UnitError> {
        let open = self.position;
        self.position += 1;
        self.depth += 1;
        if self.depth > DEEPEST_NESTING {
            return Err(self.fault_from(open, UnitFault::TooDeep));
        }
        let inner = self.unit()?;
        self.depth -= 1;
        self.close(open)?;
        Ok(inner)
    }

    fn qualifier(&mut self, name_start: usize) -> Result<(), UnitError> {
        let open = self.position;
        self.position += 1;
        self.skip(|byte| byte.is_ascii_alphanumeric() || b". ".contains(&byte));
        if matches!(self.peek(), Some('*' | '/' | '^' | '(')) {
            // A unit right before a parenthesis: a product sign was forgotten.
            let name = self.text[name_start..open].to_owned();
            return Err(UnitError {
                offset: open,
                length: 1,
                fault: UnitFault::MissingProduct { name },
            });
        }
        self.close(open)
    }

    fn close(&mut self, open: usize) -> Result<(), UnitError> {
        match self.peek() {
            Some(')') => {
                self.position += 1;
                Ok(())
            }
            Some(other) => Err(self.unexpected(other)),
            None => Err(UnitError {
                offset: open,
                length: 1,
                fault: UnitFault::Unclosed,
            }),
        }
    }

    /// The catalogue's unit whose name runs from `start` to here.
    fn named(&mut self, start: usize) -> Result<Expression, UnitError> {
        let name = &self.text[start..self.position];
        if let Some(choices) = catalogue::ambiguous(name) {
            let fault = UnitFault::Ambiguous {
                name: name.to_owned(),
                choices,
            };
            return Err(self.fault_from(start, fault));
        }
        let Some((prefix, entry)) = catalogue::find(name) else {
            let nearest = suggest::nearest(name);
            let fault = UnitFault::Unknown {
                name: name.to_owned(),
                nearest,
            };
            return Err(self.fault_from(start, fault));
        };
        if entry.scale != Scale::Plain {
            self.scales.push((start, self.position, entry));
        }
        Ok(Expression::Named { prefix, entry })
    }

    fn exponent(&mut self) -> Result<Ratio<i32>, UnitError> {
        let start = self.position;
        let (numerator, denominator) = if self.peek() == Some('(') {
            self.position += 1;
            let numerator = self.integer(start)?;
            let denominator = if self.peek() == Some('/') {
                self.position += 1;
                self.integer(start)?
            } else {
                1
            };
            self.close(start)?;
            (numerator, denominator)
        } else {
            (self.integer(start)?, 1)
        };
        if numerator == 0 || denominator <= 0 {
            return Err(self.fault_from(start, UnitFault::Exponent));
        }
        Ok(Ratio::new(numerator, denominator))
    }

    fn integer(&mut self, exponent_start: usize) -> Result<i32, UnitError> {
        let start = self.position;
        if self.peek() == Some('-') {
            self.position += 1;
        }
        self.skip(|byte| byte.is_ascii_digit());
        match self.text[start..self.position].parse::<i32>() {
            Ok(value) if value.abs() <= LARGEST_EXPONENT && self.peek() != Some('.') => Ok(value),
            _ => Err(self.fault_from(exponent_start, UnitFault::Exponent)),
        }
    }

    fn refuse_scales_in_products(&self, expression: &Expression) -> Result<(), UnitError> {
        let Some(&(start, end, entry)) = self.scales.first() else {
            return Ok(());
        };
        if matches!(expression, Expression::Named { .. }) {
            return Ok(());
        }
        let name = self.text[start..end].to_owned();
        let write = match entry.scale {
            Scale::Gauge => name.trim_end_matches("(g)").to_owned(),
            Scale::Temperature { difference, .. } => difference.to_owned(),
            Scale::Plain => name.clone(),
        };
        let fault = UnitFault::ScaleInProduct { name, write };
        Err(UnitError {
            offset: start,
            length: end - start,
            fault,
        })
    }

    fn second_solidus(&mut self, start: usize, solidus: usize, second: char) -> UnitError {
        let sign = self.position;
        let above = &self.text[start..solidus];
        let below = &self.text[solidus + 1..sign];
        self.position += 1;
        let readings = match self.factor() {
            Ok(_) => {
                let third = &self.text[sign + 1..self.position];
                let together = format!("{above}/({below}*{third})");
                if second == '/' {
                    vec![together]
                } else {
                    vec![together, format!("{above}*{third}/{below}")]
                }
            }
            Err(_) => Vec::new(),
        };
        UnitError {
            offset: sign,
            length: 1,
            fault: UnitFault::SecondSolidus { readings },
        }
    }

    fn unexpected(&self, found: char) -> UnitError {
        let fault = match found {
            ' ' | '\t' | '\n' | '\r' => UnitFault::Space,
            ')' if self.depth == 0 => UnitFault::Unopened,
            _ => UnitFault::Unexpected { found },
        };
        UnitError {
            offset: self.position,
            length: 1,
            fault,
        }
    }

    fn fault_from(&self, start: usize, fault: UnitFault) -> UnitError {
        UnitError {
            offset: start,
            length: self.position - start,
            fault,
        }
    }

    fn peek(&self) -> Option<char> {
        self.text
            .as_bytes()
            .get(self.position)
            .map(|&byte| char::from(byte))
    }

    fn skip(&mut self, belongs: impl Fn(u8) -> bool) {
        let bytes = &self.text.as_bytes()[self.position..];
        self.position += bytes.iter().take_while(|&&byte| belongs(byte)).count();
    }
}
