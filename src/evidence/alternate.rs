//! Alternate integration: the same equations by an independent implementation, adaptive and of another family.
//!
//! Owns: its own location of events and its own reading of results; what may be printed of it. Uses the same
//! compiled formulas, inputs and units, and nothing of `march` but its plan: it tests the time integration only and is
//! no design verification by alternate calculation.
//!
//! The last digits of the alternate may depend on the processor, so nothing of it is printed but a bound made of
//! numbers that do not: shares of the numerical uncertainty.

use super::crossing::{Setting, cross};
use super::ladder::{Convergence, Ladder};
use super::{ResultEvidence, Stability};
use crate::calculation::{Prepared, Solution};
use crate::problem::model::Model;

/// Relative tolerance τ of the alternate.
pub const TOLERANCE: f64 = 1e-10;
/// Tolerance of each of its steps, so that the sum of their errors stays within τ.
const LOCAL: f64 = 0.02 * TOLERANCE;
/// It agrees within U_num + 1000·τ·scale; bounds are printed with 100·τ·scale added.
const AGREEMENT: f64 = 1_000.0 * TOLERANCE;
const PRINTED: f64 = 100.0 * TOLERANCE;
/// Shares of U_num that a bound may be.
const SHARES: [f64; 5] = [0.1, 1.0 / 3.0, 1.0, 3.0, 10.0];

/// What the alternate says about the results of a case.
#[derive(Clone, Debug)]
pub struct Alternate {
    /// The family of methods, in words.
    pub family: &'static str,
    /// Why there is no comparison at all.
    pub failure: Option<String>,
    /// In the order of the model's results.
    pub results: Vec<Comparison>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Comparison {
    /// The difference is no larger than `bound`, in SI.
    Agrees { bound: f64 },
    /// None: beyond ten times the numerical uncertainty.
    Disagrees { bound: Option<f64> },
    /// Nothing to compare with: not converged, discrete and absent, or the alternate did not run.
    NotCompared,
}

impl Comparison {
    pub fn word(self) -> &'static str {
        match self {
            Comparison::Agrees { .. } => "agrees",
            Comparison::Disagrees { .. } => "disagrees",
            Comparison::NotCompared => "not compared",
        }
    }
}

/// Integrates the case once more and compares every result.
pub fn alternate(
    model: &Model,
    prepared: &mut Prepared,
    reported: &Solution,
    results: &[ResultEvidence],
    stability: &Stability,
    scales: &[f64],
) -> Alternate {
    let family = if stability.is_stiff {
        "backward differentiation formulas of variable order and step"
    } else {
        "the explicit Runge–Kutta pair 5(4) of Tsitouras with variable step"
    };
    let not_compared = vec![Comparison::NotCompared; model.results.len()];
    if !reported.is_complete() {
        return Alternate {
            family,
            failure: Some("the march itself did not come to its end".to_owned()),
            results: not_compared,
        };
    }
    let setting = setting(model, prepared, reported, stability.is_stiff);
    let mut events = Vec::new();
    let found = prepared.results_by(|system, plan| {
        let crossing = cross(system, plan, &setting)?;
        events.clone_from(&crossing.events);
        Ok::<_, String>(crossing.reading)
    });
    let found = match found {
        Ok(found) => found,
        Err(cause) => {
            return Alternate {
                family,
                failure: Some(cause),
                results: not_compared,
            };
        }
    };
    let expected: Vec<usize> = reported
        .outcome
        .events
        .iter()
        .map(|occurrence| occurrence.event)
        .collect();
    if events != expected {
        let names = |list: &[usize]| {
            list.iter()
                .map(|event| model.events[*event].id.as_str())
                .collect::<Vec<_>>()
                .join(", ")
        };
        // The same list is required: every result may rest on an event that differs.
        let cause = format!(
            "its events differ: {} where the march has {}",
            or_none(names(&events)),
            or_none(names(&expected))
        );
        let results = results.iter().map(|evidence| {
            if is_comparable(&evidence.ladder) {
                Comparison::Disagrees { bound: None }
            } else {
                Comparison::NotCompared
            }
        });
        return Alternate {
            family,
            failure: Some(cause),
            results: results.collect(),
        };
    }
    let compared = results
        .iter()
        .zip(&found)
        .zip(scales)
        .map(|((evidence, found), scale)| compare(&evidence.ladder, *found, *scale));
    Alternate {
        family,
        failure: None,
        results: compared.collect(),
    }
}

fn or_none(names: String) -> String {
    if names.is_empty() {
        "none".to_owned()
    } else {
        names
    }
}

fn is_comparable(ladder: &Ladder) -> bool {
    ladder.convergence != Convergence::NotConverged && !ladder.is_absent()
}

fn compare(ladder: &Ladder, found: Option<f64>, scale: f64) -> Comparison {
    if !is_comparable(ladder) {
        return Comparison::NotCompared;
    }
    let (Some(reported), Some(uncertainty)) = (ladder.reported(), ladder.uncertainty) else {
        return Comparison::NotCompared;
    };
    let Some(found) = found else {
        return Comparison::Disagrees { bound: None };
    };
    let difference = (reported - found).abs();
    let bound = SHARES
        .iter()
        .map(|share| share * uncertainty + PRINTED * scale)
        .find(|bound| difference <= *bound);
    let most = uncertainty + AGREEMENT * scale;
    if difference <= most {
        Comparison::Agrees {
            bound: bound.unwrap_or(most),
        }
    } else {
        Comparison::Disagrees { bound }
    }
}

/// Span, known instants, tolerances of each state and quadrature.
fn setting(model: &Model, prepared: &Prepared, reported: &Solution, is_stiff: bool) -> Setting {
    let mut known: Vec<f64> = prepared
        .grid
        .intervals(0)
        .filter(|interval| interval.known_end && !interval.last)
        .map(|interval| interval.end)
        .collect();
    known.push(prepared.to);
    let sizes = reported.outcome.y.iter().enumerate().map(|(index, end)| {
        let stated = model.states.get(index).and_then(|state| state.scale);
        let size = stated
            .or_else(|| reported.outcome.scale.get(index).copied())
            .unwrap_or(end.abs());
        if size > 0.0 { size } else { 1.0 }
    });
    Setting {
        from: prepared.from,
        to: prepared.to,
        stops: known,
        tolerance: LOCAL,
        sizes: sizes.collect(),
        is_stiff,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::evidence::Roundoff;

    #[test]
    fn hand_bounds_are_shares_of_the_uncertainty() {
        // U = 1.25 as in the ladder's own test; scale 0 leaves the shares alone.
        let ladder = Ladder::of(
            &[Some(2.0), Some(1.25), Some(1.0625)],
            2,
            Roundoff {
                scale: 1.0,
                path: 1.0,
            },
        );
        let word = |found: f64| compare(&ladder, Some(found), 0.0);
        assert_eq!(word(2.05), Comparison::Agrees { bound: 0.125 });
        assert_eq!(word(1.0), Comparison::Agrees { bound: 1.25 });
        assert_eq!(word(0.5), Comparison::Disagrees { bound: Some(3.75) });
        assert_eq!(word(-20.0), Comparison::Disagrees { bound: None });
        assert_eq!(
            compare(&ladder, None, 0.0),
            Comparison::Disagrees { bound: None }
        );
        let unknown = Ladder::not_converged(&[Some(1.0), Some(2.0), Some(4.0)]);
        assert_eq!(compare(&unknown, Some(1.0), 1.0), Comparison::NotCompared);
    }
}
