//! One step of a method, whole or partial.
//!
//! Owns: [`Span`], the piece of the time axis that a step crosses, and [`Stepper`], which hands each step to
//! the method's kernel and counts slope evaluations.

use super::explicit::Explicit;
use super::implicit::Implicit;
use super::iterated::Iterated;
use super::multistep::{Adams, Bdf2, History};
use super::{Method, Scheme, StopReason, System};

/// What a step crosses, and the times at which slopes may be taken in it.
#[derive(Debug, Clone, Copy)]
pub(super) struct Span {
    pub t: f64,
    pub end: f64,
    /// Earliest and latest time handed to the system, in numerical order: they keep slopes on the inner side of
    /// instants at which the rate may jump.
    low: f64,
    high: f64,
    known_end: bool,
}

/// Distance kept from a known instant, in units of the last place of the times concerned.
const SIDE_ULPS: f64 = 8.0;

impl Span {
    /// A step from `t` to `end`; `known_start` is the instant at or just after `t`, if it is a known one.
    pub fn new(t: f64, end: f64, known_start: Option<f64>, known_end: bool) -> Span {
        let (mut low, mut high) = (f64::NEG_INFINITY, f64::INFINITY);
        if known_start.is_none() && !known_end {
            return Span {
                t,
                end,
                low,
                high,
                known_end,
            };
        }
        let margin = Span::margin(t, end);
        if end > t {
            if let Some(instant) = known_start {
                low = instant + margin;
            }
            if known_end {
                high = end - margin;
            }
        } else {
            if let Some(instant) = known_start {
                high = instant - margin;
            }
            if known_end {
                low = end + margin;
            }
        }
        Span {
            t,
            end,
            low,
            high,
            known_end,
        }
    }

    pub fn h(&self) -> f64 {
        self.end - self.t
    }

    /// Time of abscissa `c` as handed to the system.
    pub fn time(&self, c: f64) -> f64 {
        let t = if c == 1.0 {
            self.end
        } else {
            self.t + c * self.h()
        };
        t.max(self.low).min(self.high)
    }

    /// Time of the share `theta` of the step, on the axis.
    pub fn instant(&self, theta: f64) -> f64 {
        if theta >= 1.0 {
            self.end
        } else {
            self.t + theta * self.h()
        }
    }

    /// Time at which conditions are tested: at a known end, just beyond it.
    pub fn condition_time(&self, theta: f64) -> f64 {
        if theta >= 1.0 && self.known_end {
            self.end + self.h().signum() * Span::margin(self.t, self.end)
        } else {
            self.instant(theta)
        }
    }

    /// The stretch between two shares of the step, within the same limits of time.
    fn between(&self, from: f64, to: f64) -> Span {
        Span {
            t: self.instant(from),
            end: self.instant(to),
            ..*self
        }
    }

    pub fn known_end(&self) -> bool {
        self.known_end
    }

    fn margin(t: f64, end: f64) -> f64 {
        let margin = SIDE_ULPS * f64::EPSILON * t.abs().max(end.abs());
        if 4.0 * margin < (end - t).abs() {
            margin
        } else {
            0.0
        }
    }
}

/// Why a step has no result.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum StepFailure {
    Newton { state: usize },
    Corrector { state: usize },
}

impl StepFailure {
    pub fn reason(self) -> StopReason {
        match self {
            StepFailure::Newton { state } => StopReason::NewtonFailed { state },
            StepFailure::Corrector { state } => StopReason::CorrectorFailed { state },
        }
    }
}

/// Where a step starts, and the scales of the states.
#[derive(Clone, Copy)]
pub(super) struct StartPoint<'a> {
    pub y: &'a [f64],
    pub slope: &'a [f64],
    pub scale: &'a [f64],
}

/// A method at work on one system: its kernels, its scratch space, its count of slope evaluations.
pub(super) struct Stepper {
    one_step: OneStep,
    multistep: Multistep,
    history: History,
    /// The last step was taken by the multistep kernel.
    was_multistep: bool,
    reuses_last_slope: bool,
    /// For each state the scale given, or the largest |y| and |h·rate| so far.
    scale: Vec<f64>,
    scale_is_given: Vec<bool>,
    /// Steps in which a part of a step is crossed; value and slope at the start of each.
    part_steps: u32,
    part: [Vec<f64>; 2],
    pub evaluations: u64,
}

enum OneStep {
    Explicit(Explicit),
    Implicit(Box<Implicit>),
    Iterated(Iterated),
}

enum Multistep {
    None,
    Adams(Adams),
    Bdf2(Box<Bdf2>),
}

impl Stepper {
    /// `length` is the number of states and quadratures; `scales` those of the plan.
    pub fn new(method: &Method, states: usize, length: usize, scales: &[Option<f64>]) -> Stepper {
        let (one_step, reuses_last_slope) = match method.starter().scheme {
            Scheme::RungeKutta(tableau) if tableau.is_explicit() => (
                OneStep::Explicit(Explicit::new(tableau, length)),
                tableau.last_slope_is_next_first(),
            ),
            Scheme::RungeKutta(tableau) => (
                OneStep::Implicit(Box::new(Implicit::new(tableau, states, length))),
                true,
            ),
            _ => (OneStep::Iterated(Iterated::new(states, length)), false),
        };
        let multistep = match method.scheme {
            Scheme::Adams { pair, .. } => Multistep::Adams(Adams::new(pair, length)),
            Scheme::Bdf2 { .. } => Multistep::Bdf2(Box::new(Bdf2::new(states, length))),
            Scheme::RungeKutta(_) | Scheme::IteratedHeun => Multistep::None,
        };
        let given = |state: usize| scales.get(state).copied().flatten();
        Stepper {
            one_step,
            multistep,
            history: History::new(length),
            was_multistep: false,
            reuses_last_slope,
            scale: (0..states)
                .map(|state| given(state).unwrap_or(0.0).abs())
                .collect(),
            scale_is_given: (0..states).map(|state| given(state).is_some()).collect(),
            part_steps: 1,
            part: [Vec::with_capacity(length), Vec::with_capacity(length)],
            evaluations: 0,
        }
    }

    /// Slope at (t, y).
    pub fn rate(&mut self, system: &mut dyn System, t: f64, y: &[f64], slope: &mut [f64]) {
        system.rate(t, y, slope);
        self.evaluations += 1;
    }

    /// Forgets the past: the next step does not smoothly continue the last one.
    pub fn restart(&mut self) {
        self.history.clear();
    }

    /// Crosses `span` from `y` with slope `slope` there; the result goes to `next`.
    pub fn step(
        &mut self,
        system: &mut dyn System,
        span: &Span,
        y: &[f64],
        slope: &[f64],
        next: &mut [f64],
    ) -> Result<(), StepFailure> {
        let h = span.h();
        if let OneStep::Explicit(kernel) = &mut self.one_step
            && matches!(self.multistep, Multistep::None)
        {
            self.evaluations += kernel.step(system, span, y, slope, next);
            return Ok(());
        }
        for (state, scale) in self.scale.iter_mut().enumerate() {
            if !self.scale_is_given[state] {
                *scale = scale.max(y[state].abs()).max((h * slope[state]).abs());
            }
        }
        self.was_multistep = false;
        let start = StartPoint {
            y,
            slope,
            scale: &self.scale,
        };
        match &mut self.multistep {
            Multistep::None => {}
            Multistep::Adams(adams) => {
                self.history.arrive(span.t, slope);
                if self.history.serves(adams.past(), span.t, h) {
                    self.was_multistep = true;
                    adams.step(system, span, &self.history, y, next, &mut self.evaluations);
                    return Ok(());
                }
            }
            Multistep::Bdf2(bdf2) => {
                self.history.arrive(span.t, y);
                if self.history.serves(1, span.t, h) {
                    self.was_multistep = true;
                    return bdf2.step(
                        system,
                        span,
                        &self.history,
                        &start,
                        next,
                        &mut self.evaluations,
                    );
                }
            }
        }
        self.one_step
            .step(system, span, &start, next, &mut self.evaluations)
    }

    /// Sets how many steps of its own a part of a step is crossed in.
    ///
    /// At level k of the ladder 2^k: a part that is as long at every level, as one inside the first step may be,
    /// would otherwise have the same error at all of them, which no comparison of levels could show.
    pub fn cross_parts_in(&mut self, steps: u32) {
        self.part_steps = steps;
    }

    /// Crosses the first `theta` of `span` in steps of its own, leaving the past as it is.
    pub fn partial(
        &mut self,
        system: &mut dyn System,
        span: &Span,
        y: &[f64],
        slope: &[f64],
        theta: f64,
        out: &mut [f64],
    ) -> Result<(), StepFailure> {
        if theta <= 0.0 {
            out.copy_from_slice(y);
            return Ok(());
        }
        let [mut part_y, mut part_slope] = std::mem::take(&mut self.part);
        part_y.clear();
        part_y.extend_from_slice(y);
        part_slope.clear();
        part_slope.extend_from_slice(slope);
        let share = |step: u32| theta * (f64::from(step) / f64::from(self.part_steps));
        let mut done = Ok(());
        for step in 0..self.part_steps {
            let stretch = span.between(share(step), share(step + 1));
            if step > 0 {
                part_y.copy_from_slice(out);
                system.rate(stretch.time(0.0), &part_y, &mut part_slope);
                self.evaluations += 1;
            }
            let start = StartPoint {
                y: &part_y,
                slope: &part_slope,
                scale: &self.scale,
            };
            done = self
                .one_step
                .step(system, &stretch, &start, out, &mut self.evaluations);
            if done.is_err() {
                break;
            }
        }
        self.part = [part_y, part_slope];
        done
    }

    /// Slope at the end of the step just done, if the method has it already.
    pub fn slope_at_end(&self, span: &Span) -> Option<&[f64]> {
        if span.known_end {
            return None;
        }
        match (&self.multistep, &self.one_step) {
            (Multistep::Bdf2(bdf2), _) if self.was_multistep => Some(bdf2.last_slope()),
            _ if self.was_multistep || !self.reuses_last_slope => None,
            (_, OneStep::Explicit(kernel)) => Some(kernel.last_slope()),
            (_, OneStep::Implicit(kernel)) => Some(kernel.last_slope()),
            (_, OneStep::Iterated(_)) => None,
        }
    }

    /// Calls `visit` with abscissa, value and slope of each stage of the one-step method's last step.
    pub fn visit_stages(&self, mut visit: impl FnMut(f64, &[f64], &[f64])) {
        match &self.one_step {
            OneStep::Explicit(kernel) => kernel
                .stages()
                .enumerate()
                .for_each(|(i, (c, value))| visit(c, value, kernel.slope(i))),
            OneStep::Implicit(kernel) => kernel
                .stages()
                .enumerate()
                .for_each(|(i, (c, value))| visit(c, value, kernel.slope(i))),
            OneStep::Iterated(kernel) => kernel
                .stages()
                .enumerate()
                .for_each(|(i, (c, value))| visit(c, value, kernel.slope(i))),
        }
    }

    /// Whether `test` holds for a stage strictly inside the step just done.
    pub fn any_inner_stage(&self, mut test: impl FnMut(f64, &[f64]) -> bool) -> bool {
        let mut any = false;
        if !self.was_multistep {
            self.visit_stages(|c, value, _| {
                any = any || (c > 0.0 && c < 1.0 && test(c, value));
            });
        }
        any
    }
}

impl OneStep {
    fn step(
        &mut self,
        system: &mut dyn System,
        span: &Span,
        start: &StartPoint,
        next: &mut [f64],
        evaluations: &mut u64,
    ) -> Result<(), StepFailure> {
        match self {
            OneStep::Explicit(kernel) => {
                *evaluations += kernel.step(system, span, start.y, start.slope, next);
                Ok(())
            }
            OneStep::Implicit(kernel) => kernel.step(system, span, start, next, evaluations),
            OneStep::Iterated(kernel) => kernel.step(system, span, start, next, evaluations),
        }
    }
}
