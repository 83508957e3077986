//! Units of measurement: dimensions, the catalogue, quantities.
//!
//! Owns: what a unit's text means, its exact factor to SI, how it is printed, and the messages for
//! texts that mean nothing. Does not own: where the text stood in a file (offsets are within the
//! text), rounding of numbers (`float`).
//!
//! Everything inside is SI. A factor is an exact fraction of decimals, applied as one product and
//! one quotient, so that 12 min is 720 s and 5 mm is the float nearest to 0.005 m.

mod catalogue;
mod dimension;
mod error;
mod expression;
mod factor;
mod kinds;
mod quantity;
mod suggest;
mod unit;

pub use catalogue::{Entry, Prefix, Scale, catalogue, prefixes};
pub use dimension::Dimension;
pub use error::{MissingAmbient, QuantityError, QuantityFault, UnitError, UnitFault};
pub use quantity::Quantity;
pub use unit::{Kind, Unit};

#[cfg(test)]
mod tests;
