//! The catalogue of units: one table, which drives reading, printing, listing and tests.
//!
//! To add a unit, add a row to `si.rs` or `customary.rs`; its factor is exact or as many digits as
//! its source gives.

mod customary;
mod si;

use super::dimension::Dimension;
use super::factor::Factor;
use super::kinds::Exponents;
use super::unit::Kind;

#[cfg(test)]
pub(super) use customary::AMBIGUOUS;

/// One unit of the catalogue.
#[derive(Debug, PartialEq)]
pub struct Entry {
    /// As written in a problem file.
    pub symbol: &'static str,
    /// As printed.
    pub print: &'static str,
    pub name: &'static str,
    exponents: Exponents,
    /// Decimal, `pi` or a decimal times `pi`: value × numerator / denominator is in SI.
    pub numerator: &'static str,
    pub denominator: &'static str,
    pub accepts_prefixes: bool,
    pub scale: Scale,
    /// Where the factor comes from.
    pub source: &'static str,
}

/// What a number in the unit says beside its size.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Scale {
    Plain,
    /// `offset`: from 0 K to the scale's zero, in its degrees; `difference`: the unit of differences.
    Temperature {
        offset: f64,
        difference: &'static str,
    },
    Gauge,
}

/// A decimal prefix of the SI.
#[derive(Debug, PartialEq)]
pub struct Prefix {
    /// As written in a problem file.
    pub symbol: &'static str,
    /// As printed.
    pub print: &'static str,
    pub name: &'static str,
    /// Power of ten.
    pub power: i32,
}

/// All units: SI units first, then the accepted ones, then customary ones, by quantity.
pub fn catalogue() -> impl Iterator<Item = &'static Entry> {
    si::UNITS.iter().chain(customary::UNITS)
}

/// All prefixes, from the smallest.
pub fn prefixes() -> impl Iterator<Item = &'static Prefix> {
    si::PREFIXES.iter()
}

impl Entry {
    pub fn dimension(&self) -> Dimension {
        Dimension::of(self.exponents)
    }

    /// The exact factor to SI; `None` only for a malformed row, which a test rules out.
    pub(super) fn factor(&self) -> Option<Factor> {
        Some(Factor::read(self.numerator)?.over(Factor::read(self.denominator)?))
    }

    const fn prefixed(mut self) -> Entry {
        self.accepts_prefixes = true;
        self
    }

    const fn on_scale(mut self, scale: Scale) -> Entry {
        self.scale = scale;
        self
    }
}

impl Scale {
    pub(super) fn kind(self) -> Kind {
        match self {
            Scale::Plain => Kind::Plain,
            Scale::Temperature { offset, .. } => Kind::AbsoluteTemperature { offset },
            Scale::Gauge => Kind::Gauge,
        }
    }
}

/// The unit of this name, with its prefix if it has one; a whole symbol wins over a prefixed one.
pub(super) fn find(name: &str) -> Option<(Option<&'static Prefix>, &'static Entry)> {
    if let Some(entry) = catalogue().find(|entry| entry.symbol == name) {
        return Some((None, entry));
    }
    prefixes().find_map(|prefix| {
        let rest = name.strip_prefix(prefix.symbol)?;
        let entry = catalogue().find(|entry| entry.accepts_prefixes && entry.symbol == rest)?;
        Some((Some(prefix), entry))
    })
}

/// The units that an ambiguous customary name may stand for.
pub(super) fn ambiguous(name: &str) -> Option<&'static [&'static str]> {
    let choices_of = |name: &str| {
        customary::AMBIGUOUS
            .iter()
            .find(|(symbol, _)| *symbol == name)
            .map(|(_, choices)| *choices)
    };
    choices_of(name).or_else(|| {
        if find(name).is_some() {
            return None;
        }
        choices_of(name.strip_prefix(['k', 'M', 'm'])?)
    })
}

/// One row of the table: a plain unit without prefixes.
const fn row(
    symbol: &'static str,
    print: &'static str,
    name: &'static str,
    exponents: Exponents,
    numerator: &'static str,
    denominator: &'static str,
    source: &'static str,
) -> Entry {
    Entry {
        symbol,
        print,
        name,
        exponents,
        numerator,
        denominator,
        accepts_prefixes: false,
        scale: Scale::Plain,
        source,
    }
}
