//! Cost of accuracy: error against slope evaluations, for the requested method and its neighbours in order.

use super::ResultEvidence;
use super::ladder::Convergence;
use crate::calculation::{self, Prepared, Solution};
use crate::march::{Method, method};
use crate::problem::model::Model;

/// What the accuracy of one result costs, in the base case.
#[derive(Clone, Debug)]
pub struct Cost {
    /// Index into the model's results.
    pub result: usize,
    /// The requested method first.
    pub curves: Vec<Curve>,
}

/// Error of a result, relative to its scale, against slope evaluations.
#[derive(Clone, Debug)]
pub struct Curve {
    pub method: &'static Method,
    /// Slope evaluations at the step requested.
    pub requested: u64,
    /// None of them where the error is too small to be told.
    pub points: Vec<(u64, f64)>,
}

impl Curve {
    /// Slope evaluations at which this method would have `error`, by its own order from its finest point.
    pub fn evaluations_for(&self, error: f64) -> Option<f64> {
        let (evaluations, own) = *self.points.last()?;
        let share = crate::float::pow(own / error, 1.0 / f64::from(self.method.order));
        Some(evaluations as f64 * share)
    }
}

/// One representative of each order, explicit and implicit.
const EXPLICIT: [&str; 5] = ["euler", "heun", "kutta3", "rk4", "dormand-prince54"];
const IMPLICIT: [&str; 3] = ["backward euler", "tr-bdf2", "radau5"];

/// Marches the neighbours at every level; none where the first judged result has no error that can be told.
pub fn cost(
    model: &Model,
    prepared: &mut Prepared,
    levels: &[Solution],
    results: &[ResultEvidence],
    scales: &[f64],
) -> Option<Cost> {
    let judged = |index: &usize| {
        model.criteria.is_empty()
            || model
                .criteria
                .iter()
                .any(|criterion| criterion.result == *index)
    };
    let smooth = |index: &usize| {
        matches!(
            results[*index].ladder.convergence,
            Convergence::Asymptotic | Convergence::OrderReduced | Convergence::OrderIrregular
        )
    };
    let result = (0..results.len()).filter(judged).find(smooth)?;
    let ladder = &results[result].ladder;
    let (limit, scale) = (ladder.extrapolated?, scales[result]);
    if scale == 0.0 {
        return None;
    }
    // The extrapolated value is itself known only to a part of the finest difference.
    let least = 0.2 * (ladder.values.last().copied().flatten()? - limit).abs() / scale;
    let points = |levels: &[Solution]| -> Vec<(u64, f64)> {
        let all = levels.iter().filter_map(|level| {
            Some((
                level.outcome.rate_evaluations,
                (level.results[result]? - limit).abs() / scale,
            ))
        });
        all.filter(|(_, error)| error.is_finite() && *error > 0.0 && *error >= least)
            .collect()
    };
    let requested = prepared.method;
    let mut curves = vec![Curve {
        method: requested,
        requested: levels[0].outcome.rate_evaluations,
        points: points(levels),
    }];
    for neighbour in neighbours(requested) {
        prepared.method = neighbour;
        let solved: Vec<Solution> = (0..model.march.levels)
            .map(|level| calculation::solve(model, prepared, level))
            .collect();
        if solved.iter().all(Solution::is_complete) {
            curves.push(Curve {
                method: neighbour,
                requested: solved[0].outcome.rate_evaluations,
                points: points(&solved),
            });
        }
    }
    prepared.method = requested;
    let has_requested = !curves[0].points.is_empty();
    (has_requested && curves.len() > 1).then_some(Cost { result, curves })
}

/// The representatives of the next lower and next higher order.
fn neighbours(requested: &Method) -> Vec<&'static Method> {
    let names: &[&str] = if requested.is_implicit() {
        &IMPLICIT
    } else {
        &EXPLICIT
    };
    let list: Vec<&'static Method> = names.iter().filter_map(|name| method(name)).collect();
    let lower = list
        .iter()
        .copied()
        .rfind(|other| other.order < requested.order);
    let higher = list
        .iter()
        .copied()
        .find(|other| other.order > requested.order);
    lower.into_iter().chain(higher).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_every_method_has_a_neighbour_of_its_kind() {
        for one in crate::march::METHODS {
            let found = neighbours(one);
            assert!(
                !found.is_empty() && found.iter().all(|other| other.order != one.order),
                "{}",
                one.name
            );
        }
        let names: Vec<&str> = neighbours(method("heun").unwrap())
            .iter()
            .map(|other| other.name)
            .collect();
        assert_eq!(names, ["euler", "kutta3"]);
    }
}
