//! Dimensions: products of rational powers of the seven base quantities.

use std::fmt;

use num_rational::Ratio;

use super::kinds;
use crate::float::superscript;

/// Exponents of length, mass, time, current, temperature, amount of substance, luminous intensity.
///
/// Numerators and denominators stay within ±9999, so that no operation overflows.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Dimension([Ratio<i32>; 7]);

impl Dimension {
    /// The dimension of plain numbers.
    pub const NONE: Dimension = Dimension::of([0; 7]);

    /// The dimension with these integer exponents (L, M, T, I, Θ, N, J).
    pub(super) const fn of(exponents: [i8; 7]) -> Dimension {
        let mut ratios = [Ratio::new_raw(0, 1); 7];
        let mut index = 0;
        while index < 7 {
            ratios[index] = Ratio::new_raw(exponents[index] as i32, 1);
            index += 1;
        }
        Dimension(ratios)
    }

    /// Length.
    pub const LENGTH: Dimension = Dimension::of(kinds::LENGTH);
    /// Time.
    pub const TIME: Dimension = Dimension::of(kinds::TIME);
    /// Thermodynamic temperature.
    pub const TEMPERATURE: Dimension = Dimension::of(kinds::TEMPERATURE);
    /// Pressure.
    pub const PRESSURE: Dimension = Dimension::of(kinds::PRESSURE);

    /// Exponents of L, M, T, I, Θ, N, J.
    pub fn exponents(&self) -> &[Ratio<i32>; 7] {
        &self.0
    }

    /// Whether this is the dimension of plain numbers.
    pub fn is_none(&self) -> bool {
        *self == Dimension::NONE
    }

    /// Dimension of a product; `None` if an exponent leaves its range.
    pub fn times(self, other: Dimension) -> Option<Dimension> {
        self.combined(other, |a, b| a + b)
    }

    /// Dimension of a quotient; `None` if an exponent leaves its range.
    pub fn over(self, other: Dimension) -> Option<Dimension> {
        self.combined(other, |a, b| a - b)
    }

    /// Dimension of a power; `None` if an exponent leaves its range.
    pub fn to_the(self, power: Ratio<i32>) -> Option<Dimension> {
        if !in_range(power) {
            return None;
        }
        let result = Dimension(self.0.map(|exponent| exponent * power));
        result.checked()
    }

    /// Name of the quantity usually meant by this dimension: "pressure", "mass flow rate".
    ///
    /// For messages only: torque and energy share a dimension, and one name is given.
    pub fn usual_name(&self) -> Option<&'static str> {
        kinds::NAMES
            .iter()
            .find(|(_, exponents)| Dimension::of(*exponents) == *self)
            .map(|(name, _)| *name)
    }

    /// The coherent SI unit in base units, as printed: `kg/(m·s²)`; `1` for plain numbers.
    pub fn si_unit(&self) -> String {
        self.in_base_units("·", |exponent| {
            if *exponent.denom() == 1 {
                superscript(*exponent.numer())
            } else {
                format!("^({exponent})")
            }
        })
    }

    /// The coherent SI unit in base units, as written in a problem file: `kg/(m*s^2)`.
    pub fn si_unit_text(&self) -> String {
        self.in_base_units("*", |exponent| {
            if *exponent.denom() == 1 {
                format!("^{exponent}")
            } else {
                format!("^({exponent})")
            }
        })
    }

    fn in_base_units(&self, times: &str, power: impl Fn(Ratio<i32>) -> String) -> String {
        const BASE: [(usize, &str); 7] = [
            (1, "kg"),
            (0, "m"),
            (2, "s"),
            (3, "A"),
            (4, "K"),
            (5, "mol"),
            (6, "cd"),
        ];
        let zero = Ratio::new_raw(0, 1);
        let one = Ratio::new_raw(1, 1);
        let spelled = |exponent: Ratio<i32>, symbol: &str| {
            if exponent == one {
                symbol.to_owned()
            } else {
                format!("{symbol}{}", power(exponent))
            }
        };
        let mut above = Vec::new();
        let mut below = Vec::new();
        for (index, symbol) in BASE {
            let exponent = self.0[index];
            if exponent > zero {
                above.push(spelled(exponent, symbol));
            } else if exponent < zero {
                below.push(spelled(-exponent, symbol));
            }
        }
        let numerator = if above.is_empty() {
            "1".to_owned()
        } else {
            above.join(times)
        };
        match below.len() {
            0 => numerator,
            1 => format!("{numerator}/{}", below[0]),
            _ => format!("{numerator}/({})", below.join(times)),
        }
    }

    fn combined(
        self,
        other: Dimension,
        operation: impl Fn(Ratio<i32>, Ratio<i32>) -> Ratio<i32>,
    ) -> Option<Dimension> {
        let mut result = self;
        for (exponent, &second) in result.0.iter_mut().zip(&other.0) {
            *exponent = operation(*exponent, second);
        }
        result.checked()
    }

    fn checked(self) -> Option<Dimension> {
        self.0
            .iter()
            .all(|&exponent| in_range(exponent))
            .then_some(self)
    }
}

/// In the symbols of the base quantities: `L·T⁻¹`; `1` for plain numbers.
impl fmt::Display for Dimension {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        const SYMBOLS: [&str; 7] = ["L", "M", "T", "I", "Θ", "N", "J"];
        let mut is_first = true;
        for (exponent, symbol) in self.0.iter().zip(SYMBOLS) {
            if *exponent.numer() == 0 {
                continue;
            }
            if !is_first {
                out.write_str("·")?;
            }
            is_first = false;
            out.write_str(symbol)?;
            match (*exponent.numer(), *exponent.denom()) {
                (1, 1) => {}
                (whole, 1) => out.write_str(&superscript(whole))?,
                _ => write!(out, "^({exponent})")?,
            }
        }
        if is_first { out.write_str("1") } else { Ok(()) }
    }
}

const LARGEST_PART: u32 = 9999;

fn in_range(exponent: Ratio<i32>) -> bool {
    exponent.numer().unsigned_abs() <= LARGEST_PART
        && exponent.denom().unsigned_abs() <= LARGEST_PART
}
