//! The loop over steps. What happens at the instants inside them is in `actions`.

use super::event::{Action, SET_LIMIT};
use super::probe::{ProbeBook, same_instant, share_before};
use super::stepper::{Span, StepFailure, Stepper};
use super::trajectory::{Observer, Outcome, Plan, Row, RowKind, StepView, Stop, StopReason};
use super::watch::{StepStart, Turn, Watch, Watched};
use super::{Grid, Interval, Method, Scheme, System};

/// A remainder of a step shorter than this share of it is merged with the next step.
const MERGED_REMAINDER: f64 = 1e-10;

/// A march under way.
pub(super) struct Driver<'a> {
    pub(super) system: &'a mut dyn System,
    pub(super) plan: &'a Plan,
    pub(super) stepper: Stepper,
    pub(super) watch: Watch,
    pub(super) probes: ProbeBook,
    pub(super) t: f64,
    pub(super) y: Vec<f64>,
    pub(super) slope: Vec<f64>,
    /// `slope` is that at (t, y) on the side of the coming step.
    pub(super) slope_is_current: bool,
    /// The coming step smoothly continues the last one.
    pub(super) continues: bool,
    pub(super) next: Vec<f64>,
    pub(super) next_slope: Vec<f64>,
    pub(super) part: Vec<f64>,
    /// Share of the step in hand up to which probes and rows have been served.
    pub(super) served: f64,
    pub(super) turns: Vec<Turn>,
    /// Events to act in this round at an instant, and those triggered for the next.
    pub(super) acting: Vec<bool>,
    pub(super) triggered: Vec<bool>,
    /// Sets of each event in the grid step in hand.
    pub(super) sets: Vec<u32>,
    pub(super) has_set: bool,
    /// Breaks in the grid step in hand.
    pub(super) breaks: u32,
    pub(super) spent: Vec<bool>,
    pub(super) next_report: usize,
    pub(super) kink_truth: Vec<bool>,
    pub(super) outcome: Outcome,
}

/// How an attempt at a step ended.
enum Flow {
    Reached,
    /// Cut short at an instant; `t` and `y` are there.
    Cut,
    Stopped(StopReason),
}

impl<'a> Driver<'a> {
    pub fn new(
        system: &'a mut dyn System,
        method: &Method,
        grid: &Grid,
        plan: &'a Plan,
    ) -> Driver<'a> {
        let length = plan.y0.len();
        let states = system.states();
        let events = plan.events.len();
        let conditions: Vec<usize> = plan
            .events
            .iter()
            .map(|event| event.condition)
            .chain(plan.probes.iter().filter_map(|probe| match probe {
                super::Probe::TimeWhile(condition) => Some(*condition),
                _ => None,
            }))
            .chain(plan.breaks.iter().copied())
            .collect();
        let abscissae: Vec<f64> = match method.scheme {
            Scheme::RungeKutta(tableau) => tableau
                .c
                .iter()
                .map(|c| c.value(tableau.radicand))
                .collect(),
            _ => Vec::new(),
        };
        let watch = Watch::new(plan, &conditions, &abscissae, length);
        let direction = (grid.to() - grid.from()).signum();
        Driver {
            stepper: Stepper::new(method, states, length, &plan.scales),
            probes: ProbeBook::new(plan, &watch, direction),
            t: grid.from(),
            y: plan.y0.clone(),
            slope: vec![0.0; length],
            slope_is_current: false,
            continues: false,
            next: vec![0.0; length],
            next_slope: vec![0.0; length],
            part: vec![0.0; length],
            served: 0.0,
            turns: Vec::with_capacity(watch.list.len()),
            acting: vec![false; events],
            triggered: vec![false; events],
            sets: vec![0; events],
            has_set: false,
            breaks: 0,
            spent: vec![false; events],
            next_report: 0,
            kink_truth: vec![false; plan.kinks.len()],
            outcome: Outcome {
                stop: Stop {
                    reason: StopReason::EndOfSpan,
                    at: grid.from(),
                },
                events: Vec::new(),
                event_counts: vec![0; events],
                probes: Vec::new(),
                rows: Vec::new(),
                y: Vec::new(),
                switches: Vec::new(),
                steps: 0,
                rate_evaluations: 0,
                scale: vec![0.0; states],
                path: vec![0.0; states],
                grazes: Vec::new(),
                jump_steps: 0,
                kink_steps: vec![0; plan.kinks.len()],
            },
            watch,
            system,
            plan,
        }
    }

    /// Crosses one step of the grid, in several pieces where events cut it.
    pub fn cross(&mut self, interval: &Interval, observer: &mut Observer) -> Option<StopReason> {
        let known_start = interval.known_start.then_some(interval.start);
        let width = (interval.end - interval.start).abs();
        if self.has_set {
            self.sets.fill(0);
            self.has_set = false;
        }
        if self.breaks > SET_LIMIT {
            self.hold_breaks();
        }
        self.breaks = 0;
        let mut span = Span::new(self.t, interval.end, known_start, interval.known_end);
        loop {
            match self.advance(&span, observer) {
                Flow::Reached => {
                    self.outcome.jump_steps += u64::from(self.breaks > SET_LIMIT);
                    return None;
                }
                Flow::Stopped(reason) => return Some(reason),
                Flow::Cut => {
                    let remainder = (interval.end - self.t).abs();
                    if remainder == 0.0 || (remainder < MERGED_REMAINDER * width && !interval.last)
                    {
                        return None;
                    }
                    let known_start = known_start.filter(|start| same_instant(*start, self.t));
                    span = Span::new(self.t, interval.end, known_start, interval.known_end);
                }
            }
        }
    }

    /// Tries to cross `span` in one step.
    fn advance(&mut self, span: &Span, observer: &mut Observer) -> Flow {
        if !self.slope_is_current {
            self.stepper
                .rate(self.system, span.time(0.0), &self.y, &mut self.slope);
            self.slope_is_current = true;
        }
        if !self.continues {
            self.stepper.restart();
            self.probes.restart(self.system, span, &self.y);
            self.note_kinks(span.time(0.0), false);
            self.continues = true;
        }
        self.served = 0.0;
        let states = self.outcome.scale.len();
        let done = self
            .stepper
            .step(self.system, span, &self.y, &self.slope, &mut self.next);
        if done.is_err() || first_not_finite(&self.next[..states]).is_some() {
            return self.search_broken_step(span, done.err(), observer);
        }
        let handed_on = self.stepper.slope_at_end(span);
        let mut has_next_slope = handed_on.is_some();
        if let Some(slope) = handed_on {
            self.next_slope.copy_from_slice(slope);
        }
        if !self.watch.is_empty() {
            if !has_next_slope {
                self.stepper.rate(
                    self.system,
                    span.time(1.0),
                    &self.next,
                    &mut self.next_slope,
                );
                has_next_slope = true;
            }
            let start = StepStart {
                span,
                y: &self.y,
                slope: &self.slope,
            };
            let turns = self.watch.sample(
                self.system,
                &mut self.stepper,
                &start,
                &self.next,
                &self.next_slope,
            );
            self.note_grazes(span.t);
            if turns && let Some(flow) = self.serve_turns(span, observer) {
                return flow;
            }
        }
        if self.has_to_serve(span) {
            self.part.copy_from_slice(&self.next);
            self.serve(span, 1.0);
        }
        self.show(span.t, span.end, observer);
        self.accept(span.end);
        self.note_kinks(span.time(1.0), true);
        self.continues = !span.known_end();
        self.slope_is_current = has_next_slope && self.continues;
        if self.slope_is_current {
            std::mem::swap(&mut self.slope, &mut self.next_slope);
        }
        Flow::Reached
    }

    /// Deals with the turns of the step in hand, in order of time; `None` when the step stands.
    fn serve_turns(&mut self, span: &Span, observer: &mut Observer) -> Option<Flow> {
        loop {
            let start = StepStart {
                span,
                y: &self.y,
                slope: &self.slope,
            };
            self.watch.earliest_turns(
                self.system,
                &mut self.stepper,
                &start,
                self.served,
                &mut self.turns,
            );
            let theta = self.turns.iter().map(|turn| turn.theta).reduce(f64::max)?;
            if theta >= 1.0 {
                self.part.copy_from_slice(&self.next);
            } else if self
                .stepper
                .partial(
                    self.system,
                    span,
                    &self.y,
                    &self.slope,
                    theta,
                    &mut self.part,
                )
                .is_err()
            {
                // Every turn was found by a partial step that succeeded; this one is the same.
                return None;
            }
            self.serve(span, theta);
            let t = span.instant(theta);
            let mut cuts = false;
            for index in 0..self.turns.len() {
                let place = self.turns[index].watch;
                let truth = !self.watch.truth[place];
                self.watch.truth[place] = truth;
                self.probes.turned(place, t, truth);
                match self.watch.list[place] {
                    Watched::Range { .. } => cuts |= truth,
                    Watched::Condition(condition) => {
                        if self.plan.breaks.contains(&condition) {
                            self.breaks += 1;
                            if self.breaks <= SET_LIMIT {
                                cuts = true;
                                self.system.hold(condition, Some(truth));
                            } else {
                                self.system.hold(condition, None);
                            }
                        }
                        for (event, rule) in self.plan.events.iter().enumerate() {
                            if truth && rule.condition == condition && !self.spent[event] {
                                self.acting[event] = true;
                                cuts |= rule.action != Action::Note;
                            }
                        }
                    }
                }
            }
            if cuts {
                std::mem::swap(&mut self.next, &mut self.part);
                self.show(span.t, t, observer);
                self.accept(t);
                self.slope_is_current = false;
                self.continues = false;
                let stop = self.act(span.condition_time(theta));
                return Some(stop.map_or(Flow::Cut, Flow::Stopped));
            }
            self.note_events(t);
        }
    }

    /// Whether a probe or a report time wants something of the rest of the step in hand.
    fn has_to_serve(&self, span: &Span) -> bool {
        self.probes.wants(span)
            || self
                .plan
                .report_times
                .get(self.next_report)
                .is_some_and(|t| share_before(span, *t, 1.0).is_some())
    }

    /// Serves probes and report times up to share `to` of the step in hand, where the value is in `part`.
    fn serve(&mut self, span: &Span, to: f64) {
        if to <= self.served {
            return;
        }
        let start = StepStart {
            span,
            y: &self.y,
            slope: &self.slope,
        };
        self.probes.piece(
            self.system,
            &mut self.stepper,
            &start,
            (self.served, to),
            &self.part,
        );
        while let Some(&t) = self.plan.report_times.get(self.next_report) {
            let Some(theta) = share_before(span, t, to) else {
                break;
            };
            self.next_report += 1;
            let mut y = vec![0.0; self.y.len()];
            if theta >= 0.0
                && self
                    .stepper
                    .partial(self.system, span, &self.y, &self.slope, theta, &mut y)
                    .is_ok()
            {
                let row = row(self.system, self.plan, t, &y, RowKind::Report);
                self.outcome.rows.push(row);
            }
        }
        self.served = to;
    }

    /// Shows the step from `t` to `next` at `end`, about to be accepted.
    fn show(&self, t: f64, end: f64, observer: &mut Observer) {
        observer(&StepView {
            t,
            end,
            y: &self.y,
            slope: &self.slope,
            next: &self.next,
        });
    }

    /// Takes `next` at `t` as where the march has come to.
    fn accept(&mut self, t: f64) {
        let states = self.outcome.path.len();
        for state in 0..states {
            let next = self.next[state];
            self.outcome.path[state] += (next - self.y[state]).abs();
            self.outcome.scale[state] = self.outcome.scale[state].max(next.abs());
        }
        std::mem::swap(&mut self.y, &mut self.next);
        self.t = t;
        self.outcome.steps += 1;
    }

    pub(super) fn widen_scale(&mut self) {
        for (scale, y) in self.outcome.scale.iter_mut().zip(&self.y) {
            *scale = scale.max(y.abs());
        }
    }

    /// Takes the truth of the kinks' conditions; when it has turned over the step, counts it.
    fn note_kinks(&mut self, t: f64, count: bool) {
        for (index, condition) in self.plan.kinks.iter().enumerate() {
            let truth = self.system.condition(*condition, t, &self.y);
            if count && truth != self.kink_truth[index] {
                self.outcome.kink_steps[index] += 1;
            }
            self.kink_truth[index] = truth;
        }
    }

    /// A step without a finite result: looks for events in the part of it that has one, then stops.
    fn search_broken_step(
        &mut self,
        span: &Span,
        failure: Option<StepFailure>,
        observer: &mut Observer,
    ) -> Flow {
        let states = self.outcome.scale.len();
        let state = first_not_finite(&self.next[..states]).unwrap_or(0);
        let reason = failure.map_or(StopReason::NotFinite { state }, StepFailure::reason);
        let (mut low, mut high) = (0.0, 1.0);
        while high - low > f64::EPSILON {
            let middle = 0.5 * (low + high);
            let reached = self
                .stepper
                .partial(
                    self.system,
                    span,
                    &self.y,
                    &self.slope,
                    middle,
                    &mut self.part,
                )
                .is_ok()
                && first_not_finite(&self.part[..states]).is_none();
            if reached {
                low = middle;
            } else {
                high = middle;
            }
        }
        if low > 0.0 && !self.watch.is_empty() {
            let start = StepStart {
                span,
                y: &self.y,
                slope: &self.slope,
            };
            self.watch
                .sample_up_to(self.system, &mut self.stepper, &start, low);
            if let Some(flow) = self.serve_turns(span, observer) {
                return flow;
            }
        }
        if low > 0.0
            && self
                .stepper
                .partial(self.system, span, &self.y, &self.slope, low, &mut self.part)
                .is_ok()
        {
            self.serve(span, low);
            std::mem::swap(&mut self.next, &mut self.part);
            self.show(span.t, span.instant(low), observer);
            self.accept(span.instant(low));
        }
        Flow::Stopped(reason)
    }
}

pub(super) fn row(system: &mut dyn System, plan: &Plan, t: f64, y: &[f64], kind: RowKind) -> Row {
    Row {
        t,
        y: y.to_vec(),
        observables: plan
            .report
            .iter()
            .map(|observable| system.observe(*observable, t, y))
            .collect(),
        kind,
    }
}

pub(super) fn first_not_finite(y: &[f64]) -> Option<usize> {
    y.iter().position(|value| !value.is_finite())
}
