//! The desk at which a problem is resolved: collects faults, reads quantities and formulas.

use std::ops::Range;

use super::NamedFiles;
use super::scope::{Scope, check_in_scope};
use crate::diagnostic::{
    ABSOLUTE_DIFFERENCE, AMBIGUOUS_UNIT, BAD_PICTURE, BAD_QUANTITY, Code, DUPLICATE, Diagnostic,
    NO_AMBIENT, NOT_YET, Place, UNKNOWN_UNIT, UNREADABLE, WRONG_UNIT,
};
use crate::formula::Fault;
use crate::formula::dimensions::{Type, describe};
use crate::formula::parse::parse;
use crate::problem::model::{Expression, Formula};
use crate::problem::read::{Entry, Section, Value};
use crate::units::{Dimension, Kind, Quantity, QuantityFault, Unit, UnitFault};

pub struct Desk<'a> {
    file: &'a str,
    /// Ambient pressure in Pa, once known.
    pub ambient: Option<f64>,
    diagnostics: Vec<Diagnostic>,
}

/// A quantity as written and in SI.
#[derive(Clone, Debug)]
pub struct Measured {
    pub value: f64,
    pub unit: Unit,
    pub value_si: f64,
}

/// What a value is for: decides whether a scale with a zero of its own (degC, bar(g)) makes sense.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Use {
    /// A point: an input, a limit, an initial value.
    Point,
    /// A size: a step, a scale, a spread.
    Size,
}

impl<'a> Desk<'a> {
    pub fn new(file: &'a str) -> Desk<'a> {
        Desk {
            file,
            ambient: None,
            diagnostics: Vec::new(),
        }
    }

    pub fn finish(self) -> Vec<Diagnostic> {
        self.diagnostics
    }

    pub fn note(
        &mut self,
        code: &'static Code,
        span: &Range<usize>,
        message: impl Into<String>,
        mend: impl Into<String>,
    ) {
        let place = Place::new(self.file, span.clone());
        self.diagnostics
            .push(Diagnostic::new(code, message).at(place).mend(mend));
    }

    pub fn not_yet(&mut self, span: &Range<usize>, what: &str) {
        let mend = "remove it, or use a version that has it; nothing in a problem file is ignored";
        self.note(
            &NOT_YET,
            span,
            format!("{what} cannot be computed by this version"),
            mend,
        );
    }

    /// Notes a second use of `name`; true if it is the first.
    pub fn first_use<'n>(
        &mut self,
        seen: &mut Vec<&'n str>,
        name: &'n str,
        span: &Range<usize>,
        what: &str,
    ) -> bool {
        if seen.contains(&name) {
            self.note(
                &DUPLICATE,
                span,
                format!("{what} `{name}` is defined twice"),
                "rename one of them",
            );
            return false;
        }
        seen.push(name);
        true
    }

    pub fn unit(&mut self, section: &Section, key: &str) -> Option<Unit> {
        let entry = section.entry(key)?;
        let text = entry.text()?;
        match Unit::parse(text) {
            Ok(unit) => Some(unit),
            Err(error) => {
                let span = entry.range_of(&(error.offset..error.offset + error.length));
                let code = unit_code(&error.fault);
                self.note(
                    code,
                    &span,
                    error.to_string(),
                    error.help().unwrap_or_default(),
                );
                None
            }
        }
    }

    /// The quantity at `entry`, of dimension `expected` where given.
    pub fn quantity(
        &mut self,
        entry: &Entry,
        expected: Option<Dimension>,
        purpose: Use,
    ) -> Option<Measured> {
        let quantity = match &entry.value {
            Value::Number(value) => Quantity {
                value: *value,
                unit: Unit::one(),
            },
            Value::Text(text) => match Quantity::parse(text) {
                Ok(quantity) => quantity,
                Err(error) => {
                    let code = match &error.fault {
                        QuantityFault::Unit(fault) => unit_code(fault),
                        _ => &BAD_QUANTITY,
                    };
                    let span = entry.range_of(&(error.offset..error.offset + error.length));
                    self.note(
                        code,
                        &span,
                        error.to_string(),
                        error.help().unwrap_or_default(),
                    );
                    return None;
                }
            },
            _ => return None,
        };
        self.measure(quantity, entry, expected, purpose)
    }

    fn measure(
        &mut self,
        quantity: Quantity,
        entry: &Entry,
        expected: Option<Dimension>,
        purpose: Use,
    ) -> Option<Measured> {
        let Quantity { value, unit } = quantity;
        if let Some(expected) = expected
            && unit.dimension() != expected
        {
            let mend = format!("write it in a unit like {}", expected.si_unit());
            self.note(
                &WRONG_UNIT,
                &entry.span,
                format!(
                    "{} is {}; expected is {}",
                    written(value, &unit),
                    describe(unit.dimension()),
                    describe(expected)
                ),
                mend,
            );
            return None;
        }
        if purpose == Use::Size && unit.kind() != Kind::Plain {
            let mend = format!("write it in {}", unit.difference_unit());
            self.note(
                &ABSOLUTE_DIFFERENCE,
                &entry.span,
                format!(
                    "a size cannot be given in {}, which has a zero of its own",
                    unit.print()
                ),
                mend,
            );
            return None;
        }
        match unit.to_si(value, self.ambient) {
            Ok(value_si) => Some(Measured {
                value,
                unit,
                value_si,
            }),
            Err(_) => {
                self.note(
                    &NO_AMBIENT,
                    &entry.span,
                    format!("{} needs the ambient pressure", written(value, &unit)),
                    "add [site] ambient_pressure = \"101.325 kPa\" with its source",
                );
                None
            }
        }
    }

    /// The formula at `entry`, with its type.
    pub fn formula(&mut self, entry: &Entry, scope: &Scope) -> Option<(Formula, Type)> {
        let text = entry.text()?;
        let checked = parse(text).and_then(|tree| {
            let found = check_in_scope(&tree, scope)?;
            Ok((tree, found))
        });
        match checked {
            Ok((tree, found)) => {
                let dimension = match found {
                    Type::Quantity { dimension, .. } => dimension,
                    Type::Truth | Type::Zero => Dimension::NONE,
                };
                Some((
                    Formula {
                        text: text.to_owned(),
                        tree,
                        dimension,
                        span: entry.span.clone(),
                    },
                    found,
                ))
            }
            Err(faults) => {
                for fault in faults {
                    self.formula_fault(entry, fault);
                }
                None
            }
        }
    }

    fn formula_fault(&mut self, entry: &Entry, fault: Fault) {
        let span = entry.range_of(&fault.span);
        self.note(fault.code, &span, fault.message, fault.mend);
    }

    /// A formula of dimension `expected`, which is called `what` in messages.
    pub fn formula_of(
        &mut self,
        entry: &Entry,
        scope: &Scope,
        expected: Dimension,
        what: &str,
    ) -> Option<(Formula, Type)> {
        let (mut formula, found) = self.formula(entry, scope)?;
        match found {
            Type::Zero => formula.dimension = expected,
            Type::Quantity { dimension, .. } if dimension == expected => {}
            Type::Quantity { dimension, .. } => {
                let mend = format!("mend the formula, or the unit of {what}");
                self.note(
                    &crate::diagnostic::DIMENSION,
                    &entry.span,
                    format!(
                        "this formula is {}; {what} is {}",
                        describe(dimension),
                        describe(expected)
                    ),
                    mend,
                );
                return None;
            }
            Type::Truth => {
                self.note(
                    &crate::diagnostic::NOT_A_NUMBER,
                    &entry.span,
                    "a condition stands where a quantity is expected",
                    "write if(condition, 1, 0)",
                );
                return None;
            }
        }
        Some((formula, found))
    }

    pub fn condition(&mut self, entry: &Entry, scope: &Scope) -> Option<Formula> {
        let (formula, found) = self.formula(entry, scope)?;
        if found != Type::Truth {
            self.note(
                &crate::diagnostic::NOT_A_CONDITION,
                &entry.span,
                "a quantity stands where a condition is expected",
                "compare it: h < h_alarm",
            );
            return None;
        }
        Some(formula)
    }

    /// A quantity, or a formula in `scope`.
    pub fn expression(
        &mut self,
        entry: &Entry,
        scope: &Scope,
        expected: Dimension,
        what: &str,
    ) -> Option<Expression> {
        let is_formula = entry.text().is_some_and(|text| !Quantity::is_meant(text));
        if is_formula {
            return self
                .formula_of(entry, scope, expected, what)
                .map(|(formula, _)| Expression::Formula(formula));
        }
        // A bare 0 fits any unit, as in formulas.
        if matches!(entry.value, Value::Number(0.0)) {
            return Some(Expression::Quantity {
                value: 0.0,
                unit: Unit::coherent(expected),
                value_si: 0.0,
            });
        }
        let Measured {
            value,
            unit,
            value_si,
        } = self.quantity(entry, Some(expected), Use::Point)?;
        Some(Expression::Quantity {
            value,
            unit,
            value_si,
        })
    }

    /// Notes files that could not be read.
    pub fn check_files(&mut self, sections: &[Section], files: &NamedFiles) {
        for section in sections {
            let Some(file) = section.text("file") else {
                continue;
            };
            let span = section.place_of("file");
            match files.get(file) {
                Some(Ok(bytes))
                    if section.table.name == "sketch" && picture_kind(bytes).is_none() =>
                {
                    self.note(
                        &BAD_PICTURE,
                        &span,
                        format!("`{file}` is neither SVG, PNG nor JPEG"),
                        "save the picture in one of these formats",
                    );
                }
                Some(Ok(_)) => {}
                Some(Err(cause)) => self.note(
                    &UNREADABLE,
                    &span,
                    format!("`{file}`: {cause}"),
                    "name a file beside the problem file",
                ),
                None => self.note(
                    &UNREADABLE,
                    &span,
                    format!("`{file}` was not read"),
                    "name a file beside the problem file",
                ),
            }
        }
    }
}

/// The kind of a picture by its first bytes.
fn picture_kind(bytes: &[u8]) -> Option<&'static str> {
    if bytes.starts_with(b"\x89PNG\r\n\x1a\n") {
        return Some("PNG");
    }
    if bytes.starts_with(&[0xff, 0xd8, 0xff]) {
        return Some("JPEG");
    }
    let head = String::from_utf8_lossy(&bytes[..bytes.len().min(2000)]);
    head.contains("<svg").then_some("SVG")
}

fn unit_code(fault: &UnitFault) -> &'static Code {
    match fault {
        UnitFault::Ambiguous { .. } => &AMBIGUOUS_UNIT,
        _ => &UNKNOWN_UNIT,
    }
}

fn written(value: f64, unit: &Unit) -> String {
    unit.after(&crate::float::shortest(value))
}
