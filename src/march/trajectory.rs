//! The march itself: what it is told, what it gives back.
//!
//! Owns: [`Plan`], [`Outcome`], [`march`]. The loop over steps is in `driver`.

use super::driver::Driver;
use super::event::{EventRule, Graze, Occurrence};
use super::probe::Probe;
use super::{Grid, Method, STEP_LIMIT, System};

/// Occurrences, with their rows, that an outcome holds; later ones are counted only.
pub const OCCURRENCE_LIMIT: usize = 10_000;

/// Grazes that an outcome holds.
pub const GRAZE_LIMIT: usize = 100;

/// What a march starts from and what it must look for.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Plan {
    /// States, then quadratures, at the start.
    pub y0: Vec<f64>,
    pub events: Vec<EventRule>,
    pub probes: Vec<Probe>,
    /// For each state its permitted range; empty when no state has one.
    pub ranges: Vec<Option<(f64, f64)>>,
    /// Conditions at whose turns, in either direction, the rate jumps: the march ends a step there.
    pub breaks: Vec<usize>,
    /// Conditions at whose turns only the slope of the rate jumps: counted.
    pub kinks: Vec<usize>,
    /// Instants of the rows, in the direction of the march.
    pub report_times: Vec<f64>,
    /// Observables of the rows.
    pub report: Vec<usize>,
    /// For each state its typical magnitude if given; empty when none is. Used by Newton's iteration only.
    pub scales: Vec<Option<f64>>,
}

/// What a march gave.
#[derive(Debug, Clone, PartialEq)]
pub struct Outcome {
    pub stop: Stop,
    /// In order of time; at one instant in the order in which they acted. At most [`OCCURRENCE_LIMIT`].
    pub events: Vec<Occurrence>,
    /// How often each event came.
    pub event_counts: Vec<u64>,
    /// In the order of the plan; `None` where there is no value. Not finite where the observable was not.
    pub probes: Vec<Option<f64>>,
    pub rows: Vec<Row>,
    /// States and quadratures at the stop.
    pub y: Vec<f64>,
    pub switches: Vec<f64>,
    /// Steps taken, those cut by events included, partial ones not.
    pub steps: u64,
    /// Slope evaluations, those of partial steps included.
    pub rate_evaluations: u64,
    /// Largest |y| at step ends, for each state.
    pub scale: Vec<f64>,
    /// Sum of |Δy| over the steps, for each state: with `scale` it bounds the round-off.
    pub path: Vec<f64>,
    /// The first grazing crossings, at most [`GRAZE_LIMIT`].
    pub grazes: Vec<Graze>,
    /// Steps in which the rate jumps more often than the march stops for (more than [`super::SET_LIMIT`] breaks).
    pub jump_steps: u64,
    /// For each kink of the plan, how many steps hold one.
    pub kink_steps: Vec<u64>,
}

/// Why and when a march ended.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Stop {
    pub reason: StopReason,
    pub at: f64,
}

/// Why a march ended.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum StopReason {
    EndOfSpan,
    /// An event whose action is to stop.
    Event(usize),
    /// The condition of this event is true at the start, and it is not stated what that means.
    TrueAtStart {
        event: usize,
    },
    /// A state left its permitted range by more than 1e-9 of its width.
    LeftRange {
        state: usize,
    },
    /// A state has no finite value beyond this instant.
    NotFinite {
        state: usize,
    },
    /// This event set something more than [`super::SET_LIMIT`] times within one step.
    Chattering {
        event: usize,
    },
    TooManySteps {
        steps: u64,
        limit: u64,
    },
    /// Newton's iteration met its stopping rule for no value of this state, or a singular matrix.
    NewtonFailed {
        state: usize,
    },
    /// The repeated corrector did not settle on a value of this state.
    CorrectorFailed {
        state: usize,
    },
}

/// The march at one instant.
#[derive(Debug, Clone, PartialEq)]
pub struct Row {
    pub t: f64,
    pub y: Vec<f64>,
    pub observables: Vec<f64>,
    pub kind: RowKind,
}

/// Why there is a row.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum RowKind {
    Report,
    /// At an event, before anything is set.
    Event,
    /// At the same instant, after what is set.
    AfterSet,
    /// Where the march stopped, if no other row is there.
    Stop,
}

/// One step that the march took.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct StepView<'a> {
    pub t: f64,
    pub end: f64,
    pub y: &'a [f64],
    /// Slope at the start.
    pub slope: &'a [f64],
    pub next: &'a [f64],
}

/// Called after every step; what it is given lasts for the call.
pub type Observer<'a> = dyn FnMut(&StepView<'_>) + 'a;

/// Marches `system` over the steps of `grid` at `level`; the switches are put back afterwards.
///
/// Panics when `plan.y0` has not one entry for each state and quadrature.
pub fn march(
    system: &mut dyn System,
    method: &Method,
    grid: &Grid,
    level: u32,
    plan: &Plan,
) -> Outcome {
    march_observed(system, method, grid, level, plan, &mut |_| {})
}

/// As [`march`], showing every step to `observer`.
pub fn march_observed(
    system: &mut dyn System,
    method: &Method,
    grid: &Grid,
    level: u32,
    plan: &Plan,
    observer: &mut Observer,
) -> Outcome {
    let switches = system.switches();
    let length = system.states() + system.quadratures();
    assert_eq!(
        plan.y0.len(),
        length,
        "one initial value for each state and quadrature"
    );
    let mut driver = Driver::new(system, method, grid, plan);
    driver.stepper.cross_parts_in(1 << level);
    let steps = grid.steps(level);
    let stop = if steps > STEP_LIMIT {
        Some(StopReason::TooManySteps {
            steps,
            limit: STEP_LIMIT,
        })
    } else {
        driver.begin(grid)
    };
    let reason = stop.unwrap_or_else(|| {
        grid.intervals(level)
            .find_map(|interval| driver.cross(&interval, observer))
            .unwrap_or(StopReason::EndOfSpan)
    });
    let outcome = driver.finish(reason);
    system.restore(&switches);
    outcome
}
