//! Figures read off a march while it runs.
//!
//! Owns: extremes (step ends, both sides of events, stationary points inside steps), values at instants and
//! events, times and counts of events, time while a condition holds. Values between grid points come from
//! partial steps of the method, so that they converge at its order and never alter the march.
//! Does not own: means and integrals, which are quadrature states.

use super::stepper::{Span, Stepper};
use super::watch::{StepStart, Watch};
use super::{Plan, System};

/// One figure to be read off a march; observables, events and conditions are given by number.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Probe {
    /// After whatever is set at the start.
    Initial(usize),
    Final(usize),
    Largest(usize),
    Smallest(usize),
    /// The first instant at which the extreme is reached.
    TimeOfLargest(usize),
    TimeOfSmallest(usize),
    /// Absent when the march ends before `t`.
    AtTime {
        observable: usize,
        t: f64,
    },
    /// At the first or last occurrence, after what is set there; absent when the event never comes.
    AtEvent {
        observable: usize,
        event: usize,
        last: bool,
    },
    TimeOf {
        event: usize,
        last: bool,
    },
    CountOf(usize),
    /// Total time during which the condition is true (positive also when marching backwards).
    TimeWhile(usize),
}

/// All probes of a plan and what they have seen so far.
pub(super) struct ProbeBook {
    values: Vec<Option<f64>>,
    extremes: Vec<Extreme>,
    /// Instants of [`Probe::AtTime`] in the direction of the march: time, observable, probe.
    instants: Vec<(f64, usize, usize)>,
    next_instant: usize,
    durations: Vec<Duration>,
    scratch: Vec<f64>,
}

struct Extreme {
    observable: usize,
    /// +1 for the largest, −1 for the smallest.
    sign: f64,
    /// Value times sign, and its time.
    best: Option<(f64, f64)>,
    /// Slope times sign in the direction of the march, at the last point passed.
    slope: f64,
}

struct Duration {
    watch: usize,
    probe: usize,
    since: Option<f64>,
    total: f64,
}

impl ProbeBook {
    pub fn new(plan: &Plan, watch: &Watch, direction: f64) -> ProbeBook {
        let mut book = ProbeBook {
            values: vec![None; plan.probes.len()],
            extremes: Vec::new(),
            instants: Vec::new(),
            next_instant: 0,
            durations: Vec::new(),
            scratch: vec![0.0; plan.y0.len()],
        };
        for (probe, what) in plan.probes.iter().enumerate() {
            if let Some((observable, sign)) = extreme_of(what) {
                if book.extreme(observable, sign).is_none() {
                    book.extremes.push(Extreme {
                        observable,
                        sign,
                        best: None,
                        slope: f64::NAN,
                    });
                }
            } else if let Probe::AtTime { observable, t } = *what {
                book.instants.push((t, observable, probe));
            } else if let Probe::TimeWhile(condition) = *what
                && let Some(watch) = watch.place(condition)
            {
                book.durations.push(Duration {
                    watch,
                    probe,
                    since: None,
                    total: 0.0,
                });
            } else if let Probe::CountOf(_) = what {
                book.values[probe] = Some(0.0);
            }
        }
        book.instants
            .sort_by(|a, b| (a.0 * direction).total_cmp(&(b.0 * direction)));
        book
    }

    /// Before the first step, after whatever is set at the start.
    pub fn begin(&mut self, system: &mut dyn System, plan: &Plan, from: f64, y: &[f64]) {
        for (value, probe) in self.values.iter_mut().zip(&plan.probes) {
            if let Probe::Initial(observable) = *probe {
                *value = Some(system.observe(observable, from, y));
            }
        }
    }

    /// A point that the march passes: a candidate for extremes.
    pub fn point(&mut self, system: &mut dyn System, t: f64, y: &[f64]) {
        for extreme in &mut self.extremes {
            extreme.offer(system.observe(extreme.observable, t, y), t);
        }
    }

    /// Notes slopes at the start of a step that does not simply continue the last one.
    pub fn restart(&mut self, system: &mut dyn System, span: &Span, y: &[f64]) {
        let direction = span.h().signum();
        let t = span.time(0.0);
        for extreme in &mut self.extremes {
            extreme.slope =
                extreme.sign * direction * system.observe_slope(extreme.observable, t, y);
        }
    }

    /// Whether anything is to be read off the rest of a step over `span`.
    pub fn wants(&self, span: &Span) -> bool {
        !self.extremes.is_empty()
            || self
                .instants
                .get(self.next_instant)
                .is_some_and(|(t, ..)| share_before(span, *t, 1.0).is_some())
    }

    /// The march has gone from share `from` to share `to` of a step, where the value is `y`.
    pub fn piece(
        &mut self,
        system: &mut dyn System,
        stepper: &mut Stepper,
        start: &StepStart,
        (from, to): (f64, f64),
        y: &[f64],
    ) {
        let span = start.span;
        let direction = span.h().signum();
        let end = if to >= 1.0 {
            span.time(1.0)
        } else {
            span.instant(to)
        };
        for extreme in &mut self.extremes {
            extreme.offer(system.observe(extreme.observable, end, y), span.instant(to));
            let sign = extreme.sign * direction;
            let slope = sign * system.observe_slope(extreme.observable, end, y);
            if extreme.slope > 0.0 && slope < 0.0 {
                let (mut low, mut high) = (from, to);
                while high - low > f64::EPSILON {
                    let middle = low + 0.5 * (high - low);
                    if middle <= low || middle >= high {
                        break;
                    }
                    let reached = stepper
                        .partial(
                            system,
                            span,
                            start.y,
                            start.slope,
                            middle,
                            &mut self.scratch,
                        )
                        .is_ok();
                    let t = span.instant(middle);
                    if reached
                        && sign * system.observe_slope(extreme.observable, t, &self.scratch) > 0.0
                    {
                        low = middle;
                    } else {
                        high = middle;
                    }
                }
                if stepper
                    .partial(system, span, start.y, start.slope, low, &mut self.scratch)
                    .is_ok()
                {
                    let t = span.instant(low);
                    extreme.offer(system.observe(extreme.observable, t, &self.scratch), t);
                }
            }
            extreme.slope = slope;
        }
        while let Some(&(t, observable, probe)) = self.instants.get(self.next_instant) {
            let Some(theta) = share_before(span, t, to) else {
                break;
            };
            self.next_instant += 1;
            if theta >= 0.0
                && stepper
                    .partial(system, span, start.y, start.slope, theta, &mut self.scratch)
                    .is_ok()
            {
                self.values[probe] = Some(system.observe(observable, t, &self.scratch));
            }
        }
    }

    /// Event `event` has come at `t`, where the value after all that is set there is `y`.
    pub fn event(&mut self, system: &mut dyn System, plan: &Plan, event: usize, t: f64, y: &[f64]) {
        for (value, probe) in self.values.iter_mut().zip(&plan.probes) {
            match *probe {
                Probe::AtEvent {
                    observable,
                    event: of,
                    last,
                } if of == event && (last || value.is_none()) => {
                    *value = Some(system.observe(observable, t, y));
                }
                Probe::TimeOf { event: of, last } if of == event && (last || value.is_none()) => {
                    *value = Some(t);
                }
                Probe::CountOf(of) if of == event => {
                    *value = value.map(|count| count + 1.0);
                }
                _ => {}
            }
        }
    }

    /// Truth of watch `watch` is `truth` from `t` on.
    pub fn turned(&mut self, watch: usize, t: f64, truth: bool) {
        for duration in self.durations.iter_mut().filter(|d| d.watch == watch) {
            match (duration.since, truth) {
                (None, true) => duration.since = Some(t),
                (Some(since), false) => {
                    duration.total += (t - since).abs();
                    duration.since = None;
                }
                _ => {}
            }
        }
    }

    /// The values, the march having ended at `t` with `y`.
    pub fn finish(
        mut self,
        system: &mut dyn System,
        plan: &Plan,
        t: f64,
        y: &[f64],
    ) -> Vec<Option<f64>> {
        for duration in &self.durations {
            let open = duration.since.map_or(0.0, |since| (t - since).abs());
            self.values[duration.probe] = Some(duration.total + open);
        }
        for &(instant, observable, probe) in &self.instants[self.next_instant..] {
            if same_instant(instant, t) {
                self.values[probe] = Some(system.observe(observable, instant, y));
            }
        }
        for (probe, what) in plan.probes.iter().enumerate() {
            if let Probe::Final(observable) = *what {
                self.values[probe] = Some(system.observe(observable, t, y));
            } else if let Some((observable, sign)) = extreme_of(what) {
                let best = self
                    .extreme(observable, sign)
                    .and_then(|extreme| extreme.best);
                self.values[probe] = best.map(|(value, at)| match what {
                    Probe::Largest(_) | Probe::Smallest(_) => sign * value,
                    _ => at,
                });
            }
        }
        self.values
    }

    fn extreme(&self, observable: usize, sign: f64) -> Option<&Extreme> {
        self.extremes
            .iter()
            .find(|extreme| extreme.observable == observable && extreme.sign == sign)
    }
}

impl Extreme {
    fn offer(&mut self, value: f64, t: f64) {
        let value = self.sign * value;
        let better = match self.best {
            Some((best, _)) => value > best,
            None => !value.is_nan(),
        };
        if better {
            self.best = Some((value, t));
        }
    }
}

fn extreme_of(probe: &Probe) -> Option<(usize, f64)> {
    match *probe {
        Probe::Largest(observable) | Probe::TimeOfLargest(observable) => Some((observable, 1.0)),
        Probe::Smallest(observable) | Probe::TimeOfSmallest(observable) => Some((observable, -1.0)),
        _ => None,
    }
}

/// Share of `span` at which `t` lies if that is before share `to`, negative when before the start of the span.
///
/// An instant that is the end but for rounding belongs to what follows.
pub(super) fn share_before(span: &Span, t: f64, to: f64) -> Option<f64> {
    let limit = span.instant(to);
    let direction = span.h().signum();
    if (limit - t) * direction <= 0.0 || same_instant(t, limit) {
        return None;
    }
    if same_instant(t, span.t) {
        return Some(0.0);
    }
    Some((t - span.t) / span.h())
}

/// Whether two times are one but for rounding.
pub(super) fn same_instant(a: f64, b: f64) -> bool {
    (a - b).abs() <= 4.0 * f64::EPSILON * a.abs().max(b.abs())
}
