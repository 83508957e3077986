//! Choosing a grid once, by the local error of an embedded pair.
//!
//! Owns: the grid that `grid_tolerance` asks for. Not owned: what is marched on it afterwards, at every level and
//! for every sample alike. The estimate is that of the method's own pair; of Bogacki and Shampine's for explicit
//! methods without one; of TR-BDF2's for implicit ones, filtered as its authors advise (M. E. Hosea, L. F. Shampine,
//! Appl. Numer. Math. 20 (1996) 21–37), because fast modes that the method damps would otherwise govern.
//!
//! Rule: a step is taken when the largest |error|/scale of a state is at most the tolerance; the scale is that
//! given, or the largest of |y| so far and |h·rate| now; a state at rest at zero, and quadratures, do not count. The next step is the longest of a
//! fixed list of multiples for which the error would be half the tolerance, so that no root need be taken, and at
//! most twice the last one and a twentieth of the span.

use super::driver::Driver;
use super::newton::Newton;
use super::stepper::{Span, Stepper};
use super::tableau::Embedded;
use super::{
    Grid, GridError, Interval, Method, Plan, Scheme, SegmentSpec, System, Tableau, methods,
};

/// Chosen steps beyond which the tolerance is refused.
pub const CHOICE_LIMIT: usize = 1_000_000;

/// Multiples of a step that are tried, longest first.
const MULTIPLES: [f64; 15] = [
    2.0, 1.8, 1.6, 1.4, 1.2, 1.0, 0.9, 0.8, 0.7, 0.6, 0.5, 0.4, 0.3, 0.2, 0.1,
];
/// Shares of the span: first trial, longest and shortest step.
const FIRST: f64 = 0.01;
const LONGEST: f64 = 0.05;
const SHORTEST: f64 = 1e-12;

/// A chosen grid.
#[derive(Debug, Clone, PartialEq)]
pub struct Choice {
    pub grid: Grid,
    /// Title of the pair whose estimate chose it.
    pub pair: &'static str,
    /// Trial steps whose error was too large.
    pub rejected: u64,
}

/// Why no grid can be chosen.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum ChoiceError {
    /// The tolerance is not above zero or not finite.
    Tolerance,
    Grid(GridError),
    /// No step of at least 1e-12 of the span meets the tolerance here.
    StepTooShort {
        at: f64,
    },
    TooManySteps {
        at: f64,
        limit: usize,
    },
}

/// The grid on which the pair's local error meets `tolerance` at every step, marching as `plan` says from its start.
///
/// `known` instants become grid points. Where the march stops early, steps of the last length lead to the end.
pub fn choose_grid(
    system: &mut dyn System,
    method: &Method,
    (from, to): (f64, f64),
    known: &[f64],
    tolerance: f64,
    plan: &Plan,
) -> Result<Choice, ChoiceError> {
    if !(tolerance > 0.0 && tolerance.is_finite()) {
        return Err(ChoiceError::Tolerance);
    }
    let span = (to - from).abs();
    let outline = Grid::uniform(from, to, span)
        .map_err(ChoiceError::Grid)?
        .with_known(known);
    let plan = Plan {
        probes: Vec::new(),
        report_times: Vec::new(),
        ..plan.clone()
    };
    let switches = system.switches();
    let pair = Pair::serving(method);
    let mut search = Search {
        tolerance,
        estimate: Estimate::new(system, pair, &plan),
        specs: Vec::new(),
        step: FIRST * span,
        longest: LONGEST * span,
        shortest: SHORTEST * span,
        rejected: 0,
    };
    let mut driver = Driver::new(system, pair.method, &outline, &plan);
    let mut stopped = driver.begin(&outline).is_some();
    for stretch in outline.intervals(0) {
        if stopped {
            break;
        }
        stopped = search.cross(&mut driver, &stretch)?;
    }
    driver.put_back(&switches);
    let reached = search.specs.last().map_or(from, |spec| spec.to);
    if reached != to {
        search.specs.push(SegmentSpec {
            to,
            step: search.step.min((to - reached).abs()),
        });
    }
    let grid = Grid::segmented(from, &search.specs)
        .map_err(ChoiceError::Grid)?
        .with_known(known);
    Ok(Choice {
        grid,
        pair: pair.method.title,
        rejected: search.rejected,
    })
}

/// A method with an embedded estimate.
#[derive(Clone, Copy)]
struct Pair<'a> {
    method: &'a Method,
    tableau: &'static Tableau,
    embedded: Embedded,
}

impl Pair<'_> {
    /// The pair whose estimate serves `asked`.
    fn serving(asked: &Method) -> Pair<'_> {
        if let Scheme::RungeKutta(tableau) = asked.scheme
            && let Some(embedded) = tableau.embedded
        {
            return Pair {
                method: asked,
                tableau,
                embedded,
            };
        }
        let (method, tableau, embedded) = if asked.is_implicit() {
            methods::IMPLICIT_PAIR
        } else {
            methods::EXPLICIT_PAIR
        };
        Pair {
            method,
            tableau,
            embedded,
        }
    }

    /// The local error goes with this power of the step.
    fn power(&self) -> u32 {
        1 + self.method.order.min(self.embedded.order)
    }
}

/// The search for steps under way.
struct Search<'a> {
    tolerance: f64,
    estimate: Estimate<'a>,
    specs: Vec<SegmentSpec>,
    step: f64,
    longest: f64,
    shortest: f64,
    rejected: u64,
}

impl Search<'_> {
    /// Crosses `stretch`, between known instants, in steps that meet the tolerance; true when the march stops.
    fn cross(&mut self, driver: &mut Driver, stretch: &Interval) -> Result<bool, ChoiceError> {
        let direction = (stretch.end - stretch.start).signum();
        let mut start = stretch.start;
        loop {
            let remaining = (stretch.end - start).abs();
            let mut step = self.step.min(self.longest);
            let end = loop {
                if step < self.shortest {
                    return Err(ChoiceError::StepTooShort { at: start });
                }
                // Neither a sliver at the end of the stretch nor a step of more than was asked for.
                let taken = if step >= remaining * (1.0 - 1e-9) {
                    remaining
                } else if 2.0 * step > remaining {
                    0.5 * remaining
                } else {
                    step
                };
                let is_last = taken == remaining;
                let end = if is_last {
                    stretch.end
                } else {
                    start + direction * taken
                };
                let known_start = (stretch.known_start && start == stretch.start).then_some(start);
                let span = Span::new(driver.t, end, known_start, is_last && stretch.known_end);
                let error = self.estimate.error(driver, &span);
                let multiple = self.multiple(error);
                if error <= self.tolerance {
                    self.step = taken * multiple.max(0.5);
                    break end;
                }
                self.rejected += 1;
                step = taken * multiple.min(0.7);
            };
            if self.specs.len() >= CHOICE_LIMIT {
                return Err(ChoiceError::TooManySteps {
                    at: start,
                    limit: CHOICE_LIMIT,
                });
            }
            let is_last = end == stretch.end;
            self.specs.push(SegmentSpec {
                to: end,
                step: (end - start).abs(),
            });
            let interval = Interval {
                start,
                end,
                known_start: stretch.known_start && start == stretch.start,
                known_end: is_last && stretch.known_end,
                last: is_last && stretch.last,
            };
            if driver.cross(&interval, &mut |_| {}).is_some() {
                return Ok(true);
            }
            if is_last {
                return Ok(false);
            }
            start = end;
        }
    }

    /// Longest multiple of a step with this error whose error would be half the tolerance.
    fn multiple(&self, error: f64) -> f64 {
        let fits = |multiple: &&f64| {
            let grown = (0..self.estimate.pair.power()).fold(error, |error, _| error * **multiple);
            grown <= 0.5 * self.tolerance
        };
        MULTIPLES.iter().find(fits).copied().unwrap_or(0.1)
    }
}

/// The local error of a trial step.
struct Estimate<'a> {
    pair: Pair<'a>,
    stepper: Stepper,
    /// b − b̂ of each stage.
    weights: Vec<f64>,
    /// Room to filter the error of an implicit pair.
    filter: Option<Newton>,
    given: Vec<Option<f64>>,
    slope: Vec<f64>,
    next: Vec<f64>,
    difference: Vec<f64>,
}

impl<'a> Estimate<'a> {
    fn new(system: &mut dyn System, pair: Pair<'a>, plan: &Plan) -> Estimate<'a> {
        let length = plan.y0.len();
        let states = system.states();
        let tableau = pair.tableau;
        Estimate {
            stepper: Stepper::new(pair.method, states, length, &plan.scales),
            weights: tableau
                .b
                .iter()
                .zip(pair.embedded.b)
                .map(|(b, hat)| b.value(tableau.radicand) - hat.value(tableau.radicand))
                .collect(),
            filter: pair
                .method
                .is_implicit()
                .then(|| Newton::new(states, length, 1)),
            given: (0..states)
                .map(|state| plan.scales.get(state).copied().flatten())
                .collect(),
            slope: vec![0.0; length],
            next: vec![0.0; length],
            difference: vec![0.0; states],
            pair,
        }
    }

    /// Largest |error|/scale of a state over `span` from where `driver` stands; infinite without a result.
    fn error(&mut self, driver: &mut Driver, span: &Span) -> f64 {
        let h = span.h();
        let y = &driver.y;
        let system = &mut *driver.system;
        self.stepper
            .rate(system, span.time(0.0), y, &mut self.slope);
        if self
            .stepper
            .step(system, span, y, &self.slope, &mut self.next)
            .is_err()
        {
            return f64::INFINITY;
        }
        self.difference.fill(0.0);
        let mut stage = 0;
        self.stepper.visit_stages(|_, _, slope| {
            for (difference, slope) in self.difference.iter_mut().zip(slope) {
                *difference += h * self.weights[stage] * slope;
            }
            stage += 1;
        });
        if let Some(filter) = &mut self.filter {
            let last = self.pair.tableau.stages() - 1;
            let diagonal = self
                .pair
                .tableau
                .entry(last, last)
                .value(self.pair.tableau.radicand);
            if !filter.filter(
                system,
                span.time(0.0),
                y,
                h * diagonal,
                &mut self.difference,
            ) {
                return f64::INFINITY;
            }
        }
        let mut largest = 0.0_f64;
        for (state, difference) in self.difference.iter().enumerate() {
            let so_far = driver.outcome.scale[state].max((h * self.slope[state]).abs());
            let scale = match self.given[state] {
                Some(scale) => scale,
                // At rest at zero: there is no magnitude yet to measure an error by.
                None if so_far == 0.0 => continue,
                None => so_far.max(self.next[state].abs()),
            };
            let share = if *difference == 0.0 {
                0.0
            } else {
                difference.abs() / scale
            };
            if !share.is_finite() {
                return f64::INFINITY;
            }
            largest = largest.max(share);
        }
        largest
    }
}
