//! The step-halving ladder: what values at step, step/2, step/4 … say about the value at the step requested.
//!
//! Owns: the rules, as stated in the record. Sources: Oberkampf & Roy, Verification and Validation in Scientific
//! Computing, Cambridge 2010, ch. 8; Roache, J. Fluids Eng. 116 (1994) 405; Celik et al., J. Fluids Eng. 130 (2008)
//! 078001.

use crate::float;

/// Unit round-off of a 64-bit float.
const UNIT_ROUNDOFF: f64 = f64::EPSILON / 2.0;

/// Factor of safety where the observed order agrees with the formal one.
pub const FACTOR_ASYMPTOTIC: f64 = 1.25;
/// Factor of safety elsewhere.
pub const FACTOR_OTHERWISE: f64 = 3.0;

/// How values behave as the step is halved, in words that a reviewer can quote.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Convergence {
    Asymptotic,
    OrderReduced,
    OrderIrregular,
    Oscillatory,
    NotConverged,
    AtRoundoff,
    Discrete,
}

impl Convergence {
    pub fn word(self) -> &'static str {
        match self {
            Convergence::Asymptotic => "asymptotic",
            Convergence::OrderReduced => "order reduced",
            Convergence::OrderIrregular => "order irregular",
            Convergence::Oscillatory => "oscillatory",
            Convergence::NotConverged => "not converged",
            Convergence::AtRoundoff => "at round-off",
            Convergence::Discrete => "discrete",
        }
    }
}

/// What bounds the rounding error of a value.
#[derive(Clone, Copy, Debug)]
pub struct Roundoff {
    /// Typical magnitude.
    pub scale: f64,
    /// Sum of |Δ| over the march.
    pub path: f64,
}

impl Roundoff {
    pub fn floor(self) -> f64 {
        16.0 * UNIT_ROUNDOFF * (self.scale + self.path)
    }
}

/// A value's ladder; all in the unit of the values.
#[derive(Clone, Debug, PartialEq)]
pub struct Ladder {
    /// Level 0 first; none where the value is absent.
    pub values: Vec<Option<f64>>,
    pub convergence: Convergence,
    /// log2(1/|R|) of the last three levels.
    pub observed_order: Option<f64>,
    pub formal_order: u32,
    /// Richardson's f*.
    pub extrapolated: Option<f64>,
    /// F_s.
    pub factor: Option<f64>,
    /// U_num of the reported value; none: no band is claimed.
    pub uncertainty: Option<f64>,
}

impl Ladder {
    /// The value that is reported: at the step requested.
    pub fn reported(&self) -> Option<f64> {
        self.values[0]
    }

    /// True when the value is absent at every level.
    pub fn is_absent(&self) -> bool {
        self.values.iter().all(Option::is_none)
    }

    /// Judges at least three values by the rules for a method of order `order`.
    pub fn of(values: &[Option<f64>], order: u32, roundoff: Roundoff) -> Ladder {
        let numbers: Option<Vec<f64>> = values.iter().copied().collect();
        let Some(numbers) = numbers
            .filter(|numbers| numbers.len() >= 3 && numbers.iter().all(|value| value.is_finite()))
        else {
            let absent = values.iter().all(Option::is_none);
            let ladder = Ladder::not_converged(values);
            // Absent at every level: nothing differs, there is just no number.
            return if absent {
                Ladder {
                    convergence: Convergence::Discrete,
                    ..ladder
                }
            } else {
                ladder
            };
        };
        let floor = roundoff.floor();
        let [a, b, c] = [
            numbers[numbers.len() - 3],
            numbers[numbers.len() - 2],
            numbers[numbers.len() - 1],
        ];
        let (older, newer) = (a - b, b - c);
        let reported = numbers[0];
        let formal = f64::from(order);
        let ladder = Ladder {
            formal_order: order,
            ..Ladder::not_converged(values)
        };
        if older.abs() <= floor && newer.abs() <= floor {
            let spread = numbers
                .iter()
                .map(|value| (reported - value).abs())
                .fold(floor, float::max);
            return Ladder {
                convergence: Convergence::AtRoundoff,
                uncertainty: Some(spread),
                ..ladder
            };
        }
        if older.abs() <= floor {
            return ladder;
        }
        let ratio = newer / older;
        let observed = (ratio != 0.0).then(|| observed_order((older, newer), (2.0, 2.0)));
        if ratio < 0.0 && ratio > -1.0 && newer.abs() > floor {
            let widest = widest_difference(&numbers);
            return Ladder {
                convergence: Convergence::Oscillatory,
                observed_order: observed,
                factor: Some(FACTOR_OTHERWISE),
                uncertainty: Some(FACTOR_OTHERWISE * widest),
                ..ladder
            };
        }
        if newer.abs() <= floor {
            return Ladder {
                observed_order: observed,
                ..ladder
            }
            .extrapolate(
                reported,
                (b, c),
                formal,
                FACTOR_OTHERWISE,
                Convergence::OrderIrregular,
            );
        }
        let Some(observed) = observed.filter(|_| ratio > 0.0 && ratio < 1.0) else {
            return Ladder {
                observed_order: observed,
                ..ladder
            };
        };
        let ladder = Ladder {
            observed_order: Some(observed),
            ..ladder
        };
        if (observed - formal).abs() <= 0.1 * formal {
            ladder.extrapolate(
                reported,
                (b, c),
                formal,
                FACTOR_ASYMPTOTIC,
                Convergence::Asymptotic,
            )
        } else if observed < formal {
            ladder.extrapolate(
                reported,
                (b, c),
                observed.max(0.5),
                FACTOR_OTHERWISE,
                Convergence::OrderReduced,
            )
        } else {
            ladder.extrapolate(
                reported,
                (b, c),
                formal,
                FACTOR_OTHERWISE,
                Convergence::OrderIrregular,
            )
        }
    }

    /// The same ladder with no better word than "order reduced", and the factor of safety that goes with it.
    pub fn at_most_reduced(self) -> Ladder {
        if self.convergence != Convergence::Asymptotic {
            return self;
        }
        let widen = FACTOR_OTHERWISE / FACTOR_ASYMPTOTIC;
        Ladder {
            convergence: Convergence::OrderReduced,
            factor: Some(FACTOR_OTHERWISE),
            uncertainty: self.uncertainty.map(|uncertainty| uncertainty * widen),
            ..self
        }
    }

    /// Counts: the same at all levels, or not converged.
    pub fn discrete(values: &[Option<f64>]) -> Ladder {
        let same = values.iter().all(|value| *value == values[0]);
        let ladder = Ladder::not_converged(values);
        if same {
            Ladder {
                convergence: Convergence::Discrete,
                uncertainty: values[0].map(|_| 0.0),
                ..ladder
            }
        } else {
            ladder
        }
    }

    /// No band is claimed.
    pub fn not_converged(values: &[Option<f64>]) -> Ladder {
        Ladder {
            values: values.to_vec(),
            convergence: Convergence::NotConverged,
            observed_order: None,
            formal_order: 0,
            extrapolated: None,
            factor: None,
            uncertainty: None,
        }
    }

    /// f* = c − (b − c)/(2^p − 1) and U_num = F_s · max(|g − f*|, |g − c|) of the reported value g.
    fn extrapolate(
        self,
        reported: f64,
        (b, c): (f64, f64),
        order: f64,
        factor: f64,
        convergence: Convergence,
    ) -> Ladder {
        let limit = c - (b - c) / (float::pow(2.0, order) - 1.0);
        let error = float::max((reported - limit).abs(), (reported - c).abs());
        Ladder {
            convergence,
            extrapolated: Some(limit),
            factor: Some(factor),
            uncertainty: Some(factor * error),
            ..self
        }
    }
}

/// Order observed from the differences of three levels, coarser pair first, whose steps have these ratios.
///
/// Celik et al. (2008), equation 3, by fixed-point iteration; with equal ratios it is log(older/newer)/log(ratio).
fn observed_order((older, newer): (f64, f64), (coarser, finer): (f64, f64)) -> f64 {
    const MOST_ROUNDS: u32 = 200;
    let quotient = older / newer;
    let sign = float::sign(quotient);
    let mut order = float::ln(quotient.abs()) / float::ln(finer);
    if coarser == finer {
        return order;
    }
    for _ in 0..MOST_ROUNDS {
        let shift =
            float::ln((float::pow(finer, order) - sign) / (float::pow(coarser, order) - sign));
        let next = (float::ln(quotient.abs()) + shift).abs() / float::ln(finer);
        let moved = (next - order).abs();
        order = next;
        if moved <= 1e-12 * order {
            break;
        }
    }
    order
}

fn widest_difference(numbers: &[f64]) -> f64 {
    let largest = numbers.iter().copied().fold(f64::NEG_INFINITY, float::max);
    let smallest = numbers.iter().copied().fold(f64::INFINITY, float::min);
    largest - smallest
}

#[cfg(test)]
mod tests {
    use super::*;

    const ROUNDOFF: Roundoff = Roundoff {
        scale: 1.0,
        path: 1.0,
    };

    fn ladder(values: &[f64], order: u32) -> Ladder {
        Ladder::of(
            &values.iter().map(|value| Some(*value)).collect::<Vec<_>>(),
            order,
            ROUNDOFF,
        )
    }

    #[test]
    fn hand_second_order_sequence() {
        // g(h) = 1 + h² at h = 1, 1/2, 1/4.
        let found = ladder(&[2.0, 1.25, 1.0625], 2);
        assert_eq!(found.convergence, Convergence::Asymptotic);
        assert!((found.observed_order.unwrap() - 2.0).abs() < 1e-14);
        assert_eq!(found.extrapolated, Some(1.0));
        assert_eq!(found.uncertainty, Some(1.25));
    }

    #[test]
    fn hand_words_by_ratio() {
        assert_eq!(
            ladder(&[1.5, 1.25, 1.125], 2).convergence,
            Convergence::OrderReduced
        );
        assert_eq!(
            ladder(&[2.0, 1.0625, 1.0 + 1.0 / 256.0], 2).convergence,
            Convergence::OrderIrregular
        );
        let oscillatory = ladder(&[1.0, 0.8, 0.9], 2);
        assert_eq!(oscillatory.convergence, Convergence::Oscillatory);
        assert!((oscillatory.uncertainty.unwrap() - 0.6).abs() < 1e-15);
        assert_eq!(oscillatory.extrapolated, None);
        assert_eq!(
            ladder(&[1.0, 1.1, 1.3], 2).convergence,
            Convergence::NotConverged
        );
        assert_eq!(
            ladder(&[1.0, 1.1, 0.9], 2).convergence,
            Convergence::NotConverged
        );
        assert_eq!(
            ladder(&[1.0, 1.0, 1.0], 2).convergence,
            Convergence::AtRoundoff
        );
        assert_eq!(
            ladder(&[1.0, 1.0, 1.3], 2).convergence,
            Convergence::NotConverged
        );
        assert_eq!(
            ladder(&[1.0, 0.9, 0.9], 2).convergence,
            Convergence::OrderIrregular
        );
    }

    /// Celik et al., J. Fluids Eng. 130 (2008) 078001, table 1: reattachment length on grids of 18000, 8000 and 4500
    /// cells, axial velocities on grids of 18000, 4500 and 980; order, extrapolated value and grid convergence index
    /// in per cent as printed.
    #[test]
    fn val_worked_examples_of_celik() {
        let ratio = |fine: f64, coarse: f64| (fine / coarse).sqrt();
        let even = (ratio(18_000.0, 8_000.0), ratio(8_000.0, 4_500.0));
        let uneven = (ratio(18_000.0, 4_500.0), ratio(4_500.0, 980.0));
        let examples = [
            (even, [6.063, 5.972, 5.863], 1.53, 6.1685, 2.2),
            (uneven, [10.7880, 10.7250, 10.6050], 0.75, 10.8801, 1.1),
            (uneven, [6.0042, 5.9624, 6.0909], 1.51, 6.0269, 0.5),
        ];
        for ((finer, coarser), [first, second, third], order, extrapolated, index) in examples {
            let found = observed_order((third - second, second - first), (coarser, finer));
            assert!((found - order).abs() < 0.005, "{found} {order}");
            let power = float::pow(finer, found);
            let limit = (power * first - second) / (power - 1.0);
            assert!(
                (limit - extrapolated).abs() < 0.000_06,
                "{limit} {extrapolated}"
            );
            let percent =
                100.0 * FACTOR_ASYMPTOTIC * ((first - second) / first).abs() / (power - 1.0);
            assert!((percent - index).abs() < 0.05, "{percent} {index}");
        }
    }

    #[test]
    fn hand_absent_and_discrete() {
        assert_eq!(
            Ladder::of(&[None, None, None], 2, ROUNDOFF).convergence,
            Convergence::Discrete
        );
        assert_eq!(
            Ladder::of(&[Some(1.0), None, Some(1.0)], 2, ROUNDOFF).convergence,
            Convergence::NotConverged
        );
        assert_eq!(Ladder::discrete(&[Some(3.0); 3]).uncertainty, Some(0.0));
        assert_eq!(
            Ladder::discrete(&[Some(3.0), Some(3.0), Some(4.0)]).convergence,
            Convergence::NotConverged
        );
        assert_eq!(
            ladder(&[1.0, f64::NAN, 1.0], 2).convergence,
            Convergence::NotConverged
        );
    }

    #[test]
    fn hand_four_levels_report_the_first() {
        // g(h) = 1 + h² at h = 1, 1/2, 1/4, 1/8: judged on the last three, reported is the first.
        let found = ladder(&[2.0, 1.25, 1.0625, 1.015625], 2);
        assert_eq!(found.reported(), Some(2.0));
        assert_eq!(found.uncertainty, Some(1.25));
    }
}
