//! Marching an initial-value problem: methods, grids, events, probes, lookups.
//!
//! Owns: the registry of methods, the step grid, the location of events, the figures read off a march.
//! Does not own: units, formulas, files, the step-halving ladder. Knows `f64` slices and a [`System`].
//! Reading order: [`Method`] and `methods/`, `tableau`, `stepper` with its kernels, `grid`, `event`, `probe`,
//! `trajectory` (the march itself), `trace`, `lookup`.
//!
//! Invariants: a march never panics on numbers and always ends; failures are [`StopReason`] values; the loop
//! over steps allocates nothing; memory does not grow with the number of steps.

mod actions;
mod choose;
mod driver;
mod ends;
mod event;
mod explicit;
mod grid;
mod implicit;
mod iterated;
mod lookup;
mod methods;
mod multistep;
mod newton;
mod probe;
mod stability;
mod stepper;
mod tableau;
mod trace;
mod trajectory;
mod watch;

#[cfg(test)]
mod tests;

pub use choose::{CHOICE_LIMIT, Choice, ChoiceError, choose_grid};
pub use event::{Action, EventRule, Graze, Occurrence, SET_LIMIT};
pub use grid::{Grid, GridError, Interval, STEP_LIMIT, SegmentSpec};
pub use lookup::{Between, Lookup, LookupError, Outside};
pub use methods::{METHODS, method};
pub use multistep::AdamsPair;
pub use probe::Probe;
pub use stability::amplification;
pub use tableau::{Coefficient, Embedded, Tableau};
pub use trace::{Stage, Trace, trace_step};
pub use trajectory::{
    GRAZE_LIMIT, OCCURRENCE_LIMIT, Observer, Outcome, Plan, Row, RowKind, StepView, Stop,
    StopReason, march, march_observed,
};

/// An initial-value problem y' = f(t, y) with discrete switches, as the march sees it.
///
/// The vector `y` holds `states()` states followed by `quadratures()` quadrature states, whose rates
/// never depend on quadrature states. Switches live inside the system and change only in [`System::assign`].
/// Near an instant that the grid knows, times are handed over a few units in the last place inside the interval
/// that is being crossed, so that a jump there is seen from the right side.
pub trait System {
    fn states(&self) -> usize;
    fn quadratures(&self) -> usize;
    /// Slopes of all states and quadratures into `out` (same length as `y`).
    fn rate(&mut self, t: f64, y: &[f64], out: &mut [f64]);
    /// Exact Jacobian ∂f/∂y of the states (not the quadratures), row-major, `states() × states()`.
    fn jacobian(&mut self, t: f64, y: &[f64], out: &mut [f64]);
    /// Truth of condition `index` (conditions are numbered from 0; events and `time while` probes share them).
    fn condition(&mut self, index: usize, t: f64, y: &[f64]) -> bool;
    /// Value of observable `index` (an expression of t, states, switches).
    fn observe(&mut self, index: usize, t: f64, y: &[f64]) -> f64;
    /// Total derivative of observable `index` along the solution: ∂x/∂t + Σ ∂x/∂y_i · f_i.
    fn observe_slope(&mut self, index: usize, t: f64, y: &[f64]) -> f64;
    /// Keeps rates and Jacobian on the branch on which condition `index` has this truth, wherever a stage falls; `None`
    /// lets them look again. Called for the breaks of a [`Plan`] only. A system that does nothing is marched all the
    /// same, but stages that look across a break then cost order.
    fn hold(&mut self, _index: usize, _truth: Option<bool>) {}
    /// Carries out the assignments of event `event` (right-hand sides first): may change `y` and switches.
    fn assign(&mut self, event: usize, t: f64, y: &mut [f64]);
    /// Snapshot of the switches, to be restored by [`System::restore`]; empty when there are none.
    fn switches(&self) -> Vec<f64>;
    fn restore(&mut self, switches: &[f64]);
}

/// One way of marching: what the file calls it, what the literature calls it, and its coefficients.
#[derive(Debug)]
pub struct Method {
    /// The word in the problem file.
    pub name: &'static str,
    /// The method's name in print.
    pub title: &'static str,
    /// Order of accuracy p: the error of a march is O(h^p).
    pub order: u32,
    /// Slope evaluations of one step, counting a slope handed on from step to step once; of an implicit method
    /// those of one iteration.
    pub stages: u32,
    pub citation: &'static str,
    pub scheme: Scheme,
    /// Names of each stage's value and of the slope there, as the method's literature has them.
    pub stage_names: &'static [StageName],
    /// Name of the value at the end of the step.
    pub result_name: &'static str,
}

/// What a method does in a step.
#[derive(Debug, Clone, Copy)]
pub enum Scheme {
    /// Runge–Kutta method; explicit or implicit is read off the tableau.
    RungeKutta(&'static Tableau),
    /// Heun's method with the corrector repeated until it settles.
    IteratedHeun,
    /// Adams predictor–corrector pair, evaluated twice a step; `starter` has the same order.
    Adams {
        pair: &'static AdamsPair,
        starter: &'static Method,
    },
    /// Second backward differentiation formula; `starter` has the same order.
    Bdf2 { starter: &'static Method },
}

impl Method {
    /// Whether a step needs equations solved by Newton's iteration.
    pub fn is_implicit(&self) -> bool {
        match self.scheme {
            Scheme::RungeKutta(tableau) => !tableau.is_explicit(),
            Scheme::Bdf2 { .. } => true,
            Scheme::IteratedHeun | Scheme::Adams { .. } => false,
        }
    }

    /// The one-step method that starts this one and takes its partial steps: itself unless it needs a past.
    pub fn starter(&self) -> &Method {
        match self.scheme {
            Scheme::Adams { starter, .. } | Scheme::Bdf2 { starter } => starter,
            Scheme::RungeKutta(_) | Scheme::IteratedHeun => self,
        }
    }
}

/// Names of one stage: of its value of y, and of the slope there.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct StageName {
    pub value: &'static str,
    pub slope: &'static str,
}
