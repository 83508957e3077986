//! Checks on the physics: balances and closed forms.
//!
//! Owns: drift and difference, and whether they are within their tolerance. A balance that is linear in what is
//! marched holds to round-off for any step: it is a check of the rates as written, never evidence of accuracy.

use super::ladder::{Ladder, Roundoff};
use crate::calculation::{Prepared, Solution};
use crate::float;
use crate::march::{RowKind, StepView};
use crate::problem::model::{Checked, Model};

/// A balance in one case; magnitudes in SI.
#[derive(Clone, Debug)]
pub struct BalanceEvidence {
    /// Index into the model's balances.
    pub balance: usize,
    /// It holds to round-off for any step: consistency of the written rates.
    pub is_linear: bool,
    /// Largest change between two events that set something, at each level.
    pub drifts: Vec<f64>,
    /// Largest magnitude of any summand at the step requested.
    pub scale: f64,
    /// Of the drifts; none for a linear balance.
    pub ladder: Option<Ladder>,
    pub holds: bool,
}

impl BalanceEvidence {
    /// Drift at the step requested, relative to the largest summand.
    pub fn relative(&self) -> f64 {
        relative(self.drifts[0], self.scale)
    }
}

/// A closed form beside the march; in SI.
#[derive(Clone, Debug)]
pub struct ClosedFormEvidence {
    /// Index into the model's closed forms.
    pub closed_form: usize,
    /// Value of the closed form; for a state's history where the difference is largest.
    pub expected: f64,
    /// None: the result has no value.
    pub found: Option<f64>,
    /// Instant of the largest difference of a history.
    pub at: Option<f64>,
    /// Relative to the closed form; for a history to its largest magnitude.
    pub difference: Option<f64>,
    pub holds: bool,
}

/// Draws up every balance of the case at every level.
pub fn balances(
    model: &Model,
    prepared: &mut Prepared,
    levels: &[Solution],
) -> Vec<BalanceEvidence> {
    if model.balances.is_empty() {
        return Vec::new();
    }
    let tallies: Vec<Vec<Tally>> = (0..model.march.levels)
        .map(|level| tally(model.balances.len(), prepared, level))
        .collect();
    let order = prepared.method.order;
    (0..model.balances.len())
        .map(|balance| {
            let drifts: Vec<f64> = tallies.iter().map(|level| level[balance].drift).collect();
            let scale = tallies[0][balance].scale;
            let is_linear = prepared.balance_is_linear(balance);
            let is_complete = levels.iter().all(Solution::is_complete);
            let values: Vec<Option<f64>> = drifts.iter().map(|drift| Some(*drift)).collect();
            let ladder = (!is_linear && is_complete)
                .then(|| Ladder::of(&values, order, Roundoff { scale, path: scale }));
            let holds = relative(drifts[0], scale) <= model.balances[balance].tolerance;
            BalanceEvidence {
                balance,
                is_linear,
                drifts,
                scale,
                ladder,
                holds,
            }
        })
        .collect()
}

/// Drift of one balance over a march.
#[derive(Clone, Copy, Default)]
struct Tally {
    /// Value after the last event that set something.
    start: f64,
    drift: f64,
    scale: f64,
}

fn tally(count: usize, prepared: &mut Prepared, level: u32) -> Vec<Tally> {
    use crate::march::System as _;
    let mut tallies = vec![Tally::default(); count];
    let mut last: Option<(Vec<f64>, Vec<f64>)> = None;
    prepared.follow(level, &mut |step: &StepView, system| {
        let switches = system.switches();
        let goes_on = last
            .as_ref()
            .is_some_and(|(y, held)| y == step.y && *held == switches);
        for (index, tally) in tallies.iter_mut().enumerate() {
            if !goes_on {
                let (value, scale) = system.balance(index, step.t, step.y);
                tally.start = value;
                tally.scale = float::max(tally.scale, scale);
            }
            let (value, scale) = system.balance(index, step.end, step.next);
            tally.drift = float::max(tally.drift, (value - tally.start).abs());
            tally.scale = float::max(tally.scale, scale);
        }
        last = Some((step.next.to_vec(), switches));
    });
    tallies
}

/// Compares every closed form of the case with the march.
pub fn closed_forms(
    model: &Model,
    case: usize,
    prepared: &mut Prepared,
    reported: &Solution,
    scales: &[f64],
) -> Vec<ClosedFormEvidence> {
    let own = model
        .closed_forms
        .iter()
        .enumerate()
        .filter(|(_, form)| form.case == case);
    own.map(|(index, form)| {
        let (expected, found, at, difference) = match form.checked {
            Checked::Result(result) => {
                let expected = prepared.closed_form(model, index, prepared.from);
                let size = if expected == 0.0 {
                    scales[result]
                } else {
                    expected.abs()
                };
                let found = reported.results[result];
                (
                    expected,
                    found,
                    None,
                    found.map(|found| relative((found - expected).abs(), size)),
                )
            }
            Checked::State(state) => history(model, index, state, prepared, reported),
        };
        let holds = difference.is_some_and(|difference| difference <= form.tolerance);
        ClosedFormEvidence {
            closed_form: index,
            expected,
            found,
            at,
            difference,
            holds,
        }
    })
    .collect()
}

/// The largest difference over the rows, relative to the largest magnitude of the closed form.
fn history(
    model: &Model,
    index: usize,
    state: usize,
    prepared: &mut Prepared,
    reported: &Solution,
) -> (f64, Option<f64>, Option<f64>, Option<f64>) {
    let rows = reported
        .rows
        .iter()
        .filter(|row| matches!(row.kind, RowKind::Report | RowKind::Stop));
    let pairs: Vec<(f64, f64, f64)> = rows
        .map(|row| {
            (
                row.t,
                prepared.closed_form(model, index, row.t),
                row.states[state],
            )
        })
        .collect();
    let size = pairs
        .iter()
        .map(|(_, expected, _)| expected.abs())
        .fold(0.0, float::max);
    let worst = pairs
        .iter()
        .map(|(t, expected, found)| ((found - expected).abs(), *t, *expected, *found))
        .reduce(|worst, other| {
            // A difference that is not a number is the worst.
            if other.0 > worst.0 || (other.0.is_nan() && !worst.0.is_nan()) {
                other
            } else {
                worst
            }
        });
    match worst {
        Some((difference, t, expected, found)) => (
            expected,
            Some(found),
            Some(t),
            Some(relative(difference, size)),
        ),
        None => (f64::NAN, None, None, None),
    }
}

/// 0/0 is no difference; anything else over 0 is beyond every tolerance.
fn relative(difference: f64, size: f64) -> f64 {
    if difference == 0.0 {
        0.0
    } else {
        difference / size
    }
}
