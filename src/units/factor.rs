//! Exact factors between a unit and SI.
//!
//! A factor is numerator / denominator × 10^tens × π^pi in integers for as long as these fit, and a
//! float beside them for what is irrational (the root of an inch) or too long.

use num_rational::Ratio;

use crate::float;

#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Factor {
    numerator: u128,
    denominator: u128,
    tens: i32,
    pi: i32,
    /// 1 for as long as the integers say it all.
    rest: f64,
}

impl Factor {
    pub(super) const ONE: Factor = Factor {
        numerator: 1,
        denominator: 1,
        tens: 0,
        pi: 0,
        rest: 1.0,
    };

    pub(super) const fn power_of_ten(tens: i32) -> Factor {
        Factor {
            numerator: 1,
            denominator: 1,
            tens,
            pi: 0,
            rest: 1.0,
        }
    }

    /// Reads a decimal of the catalogue: `0.3048`, `1e-28`, `pi`, `2 pi`; `None` for other text.
    pub(super) fn read(text: &str) -> Option<Factor> {
        let (number, pi) = match text.strip_suffix("pi") {
            Some("") => ("1", 1),
            Some(number) => (number.trim_end(), 1),
            None => (text, 0),
        };
        let (mantissa, exponent) = number.split_once('e').unwrap_or((number, "0"));
        let (whole, fraction) = mantissa.split_once('.').unwrap_or((mantissa, ""));
        let numerator = format!("{whole}{fraction}")
            .parse()
            .ok()
            .filter(|&value| value > 0)?;
        let tens = exponent.parse::<i32>().ok()? - i32::try_from(fraction.len()).ok()?;
        Some(
            Factor {
                numerator,
                denominator: 1,
                tens,
                pi,
                rest: 1.0,
            }
            .reduced(),
        )
    }

    pub(super) fn times(self, other: Factor) -> Factor {
        // Crosswise reduction keeps the products as small as they can be.
        let first = common_divisor(self.numerator, other.denominator);
        let second = common_divisor(other.numerator, self.denominator);
        let numerator = (self.numerator / first).checked_mul(other.numerator / second);
        let denominator = (self.denominator / second).checked_mul(other.denominator / first);
        match (numerator, denominator) {
            (Some(numerator), Some(denominator)) => Factor {
                numerator,
                denominator,
                tens: self.tens.saturating_add(other.tens),
                pi: self.pi.saturating_add(other.pi),
                rest: self.rest * other.rest,
            }
            .reduced(),
            _ => Factor {
                rest: self.value() * other.value(),
                ..Factor::ONE
            },
        }
    }

    pub(super) fn over(self, other: Factor) -> Factor {
        self.times(Factor {
            numerator: other.denominator,
            denominator: other.numerator,
            tens: -other.tens,
            pi: -other.pi,
            rest: 1.0 / other.rest,
        })
    }

    pub(super) fn to_the(self, power: Ratio<i32>) -> Factor {
        self.exact_root(*power.denom())
            .and_then(|root| root.exact_power(*power.numer()))
            .unwrap_or_else(|| {
                let exponent = f64::from(*power.numer()) / f64::from(*power.denom());
                Factor {
                    rest: float::pow(self.value(), exponent),
                    ..Factor::ONE
                }
            })
    }

    /// The factor as numerator and denominator, each the float nearest to its exact value.
    ///
    /// A decimal whose power of ten is not itself a float is rounded once, as a numerator over 1.
    pub(super) fn parts(self) -> (f64, f64) {
        if self.denominator == 1 && self.pi == 0 && self.rest == 1.0 && self.tens < -22 {
            return (decimal(self.numerator, self.tens), 1.0);
        }
        let mut above = decimal(self.numerator, self.tens.max(0)) * self.rest;
        let mut below = decimal(self.denominator, (-self.tens).max(0));
        for _ in 0..self.pi.unsigned_abs() {
            if self.pi > 0 {
                above *= std::f64::consts::PI;
            } else {
                below *= std::f64::consts::PI;
            }
        }
        (above, below)
    }

    fn value(self) -> f64 {
        let (numerator, denominator) = self.parts();
        numerator / denominator
    }

    fn reduced(mut self) -> Factor {
        let divisor = common_divisor(self.numerator, self.denominator);
        self.numerator /= divisor;
        self.denominator /= divisor;
        while self.numerator.is_multiple_of(10) {
            self.numerator /= 10;
            self.tens = self.tens.saturating_add(1);
        }
        while self.denominator.is_multiple_of(10) {
            self.denominator /= 10;
            self.tens = self.tens.saturating_sub(1);
        }
        self
    }

    fn exact_root(self, degree: i32) -> Option<Factor> {
        if degree == 1 {
            return Some(self);
        }
        let divides = |count: i32| (count % degree == 0).then_some(count / degree);
        if self.rest != 1.0 {
            return None;
        }
        Some(Factor {
            numerator: integer_root(self.numerator, degree)?,
            denominator: integer_root(self.denominator, degree)?,
            tens: divides(self.tens)?,
            pi: divides(self.pi)?,
            rest: 1.0,
        })
    }

    fn exact_power(self, power: i32) -> Option<Factor> {
        let magnitude = power.unsigned_abs();
        let raised = Factor {
            numerator: self.numerator.checked_pow(magnitude)?,
            denominator: self.denominator.checked_pow(magnitude)?,
            tens: self.tens.checked_mul(power.checked_abs()?)?,
            pi: self.pi.checked_mul(power.checked_abs()?)?,
            rest: float::pow(self.rest, f64::from(magnitude)),
        }
        .reduced();
        Some(if power < 0 {
            Factor::ONE.over(raised)
        } else {
            raised
        })
    }
}

/// `number` × 10^tens, correctly rounded.
fn decimal(number: u128, tens: i32) -> f64 {
    // The standard library's decimal reader rounds correctly, at any exponent.
    format!("{number}e{tens}").parse().unwrap_or(f64::NAN)
}

fn common_divisor(mut a: u128, mut b: u128) -> u128 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a.max(1)
}

/// The exact root of a perfect power, by halving an interval.
fn integer_root(number: u128, degree: i32) -> Option<u128> {
    let degree = degree.unsigned_abs();
    let (mut low, mut high) = (1_u128, number);
    while low < high {
        let middle = low + (high - low) / 2;
        match middle.checked_pow(degree) {
            Some(power) if power < number => low = middle + 1,
            _ => high = middle,
        }
    }
    (low.checked_pow(degree) == Some(number)).then_some(low)
}
