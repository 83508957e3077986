//! Conditions under watch and the instants within a step at which they turn.
//!
//! Owns: truth at the last point passed, truth at sample points of a step, bisection between them. A step is
//! sampled at its stages and at mid-step, cheaply from stage values and a cubic through both ends; where that
//! shows a turn, again by partial steps, which alone decide.

use super::stepper::{Span, Stepper};
use super::{Plan, System};

/// Share of a step within which instants are the same.
pub(super) const SAME_INSTANT: f64 = 1.0 / (1_u64 << 48) as f64;
const BISECTION_END: f64 = 1.0 / (1_u64 << 52) as f64;

/// What is watched.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Watched {
    /// Condition of an event, a `time while` or a break.
    Condition(usize),
    /// A state outside its range, widened by 1e-9 of its width.
    Range { state: usize, low: f64, high: f64 },
}

/// A turn of watch `watch` at the share `theta` of the step.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Turn {
    pub watch: usize,
    pub theta: f64,
}

/// A step under examination: where it starts and with which slope.
pub(super) struct StepStart<'a> {
    pub span: &'a Span,
    pub y: &'a [f64],
    pub slope: &'a [f64],
}

pub(super) struct Watch {
    pub list: Vec<Watched>,
    /// Truth at the last point passed.
    pub truth: Vec<bool>,
    /// Watches that seemed to turn in the step just sampled, but do not.
    pub grazed: Vec<usize>,
    /// Shares of the step at which truth is sampled, ascending, the last being the end.
    thetas: Vec<f64>,
    /// Abscissae of the method's stages inside the step, and one half.
    inner: Vec<f64>,
    /// Truth at each theta for each watch.
    sampled: Vec<bool>,
    scratch: Vec<f64>,
}

impl Watch {
    pub fn new(plan: &Plan, conditions: &[usize], abscissae: &[f64], length: usize) -> Watch {
        let mut list: Vec<Watched> = Vec::new();
        for condition in conditions {
            let watched = Watched::Condition(*condition);
            if !list.contains(&watched) {
                list.push(watched);
            }
        }
        for (state, range) in plan.ranges.iter().enumerate() {
            if let Some((low, high)) = range {
                let slack = 1e-9 * (high - low).abs();
                list.push(Watched::Range {
                    state,
                    low: low - slack,
                    high: high + slack,
                });
            }
        }
        let mut inner: Vec<f64> = abscissae
            .iter()
            .copied()
            .chain([0.5])
            .filter(|c| *c > 0.0 && *c < 1.0)
            .collect();
        inner.sort_by(f64::total_cmp);
        inner.dedup();
        Watch {
            truth: vec![false; list.len()],
            grazed: Vec::with_capacity(list.len()),
            thetas: Vec::with_capacity(inner.len() + 1),
            sampled: Vec::with_capacity((inner.len() + 1) * list.len()),
            inner,
            list,
            scratch: vec![0.0; length],
        }
    }

    pub fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    /// Place of `condition` in the list; conditions are listed on construction.
    pub fn place(&self, condition: usize) -> Option<usize> {
        self.list
            .iter()
            .position(|watched| *watched == Watched::Condition(condition))
    }

    /// Truth of watch `index` at (t, y).
    pub fn test(&self, system: &mut dyn System, index: usize, t: f64, y: &[f64]) -> bool {
        match self.list[index] {
            Watched::Condition(condition) => system.condition(condition, t, y),
            Watched::Range { state, low, high } => y[state] < low || y[state] > high,
        }
    }

    /// Takes truth at (t, y) as that of the last point passed.
    pub fn refresh(&mut self, system: &mut dyn System, t: f64, y: &[f64]) {
        for index in 0..self.list.len() {
            self.truth[index] = self.test(system, index, t, y);
        }
    }

    /// Samples the step just done, whose end is `next` with slope `next_slope`; false when nothing turns in it.
    ///
    /// Conditions that only seem to turn, by values less exact than the method, are left in [`Watch::grazed`].
    pub fn sample(
        &mut self,
        system: &mut dyn System,
        stepper: &mut Stepper,
        start: &StepStart,
        next: &[f64],
        next_slope: &[f64],
    ) -> bool {
        self.grazed.clear();
        self.find_seeming_turns(system, stepper, start, next, next_slope);
        if self.grazed.is_empty() {
            return false;
        }
        self.sample_inner(system, stepper, start, 1.0);
        self.push_sample(system, start.span, 1.0, Some(next));
        let (truth, sampled, count) = (&self.truth, &self.sampled, self.list.len());
        let turns = |watch: usize| {
            sampled
                .chunks_exact(count)
                .any(|sample| sample[watch] != truth[watch])
        };
        let before = self.grazed.len();
        self.grazed.retain(|watch| !turns(*watch));
        self.grazed.len() < before
    }

    /// Samples only the first `limit` of a step that has no result.
    pub fn sample_up_to(
        &mut self,
        system: &mut dyn System,
        stepper: &mut Stepper,
        start: &StepStart,
        limit: f64,
    ) {
        self.sample_inner(system, stepper, start, limit);
        if stepper
            .partial(
                system,
                start.span,
                start.y,
                start.slope,
                limit,
                &mut self.scratch,
            )
            .is_ok()
        {
            self.push_sample(system, start.span, limit, None);
        }
    }

    /// Earliest turn of each watch after `after`, the earliest of all of them; ties within [`SAME_INSTANT`] are
    /// put into `turns` together.
    pub fn earliest_turns(
        &mut self,
        system: &mut dyn System,
        stepper: &mut Stepper,
        start: &StepStart,
        after: f64,
        turns: &mut Vec<Turn>,
    ) {
        turns.clear();
        for watch in 0..self.list.len() {
            let mut low = after;
            for (sample, theta) in self.thetas.iter().enumerate() {
                if *theta <= after {
                    continue;
                }
                if self.sampled[sample * self.list.len() + watch] != self.truth[watch] {
                    let high = *theta;
                    let theta = self.bisect(system, stepper, start, watch, (low, high));
                    turns.push(Turn { watch, theta });
                    break;
                }
                low = *theta;
            }
        }
        let first = turns
            .iter()
            .map(|turn| turn.theta)
            .fold(f64::INFINITY, f64::min);
        turns.retain(|turn| turn.theta <= first + SAME_INSTANT);
    }

    /// Lists in `grazed` the watches of which a stage value, the cubic's mid-step value or the end differs in truth
    /// from the start.
    fn find_seeming_turns(
        &mut self,
        system: &mut dyn System,
        stepper: &Stepper,
        start: &StepStart,
        next: &[f64],
        next_slope: &[f64],
    ) {
        let span = start.span;
        let h = span.h();
        for (i, mid) in self.scratch.iter_mut().enumerate() {
            *mid = 0.5 * (start.y[i] + next[i]) + h / 8.0 * (start.slope[i] - next_slope[i]);
        }
        let mid_time = span.instant(0.5);
        let end_time = span.condition_time(1.0);
        for index in 0..self.list.len() {
            let was = self.truth[index];
            let seems_to_turn = self.test(system, index, end_time, next) != was
                || self.test(system, index, mid_time, &self.scratch) != was
                || stepper.any_inner_stage(|c, value| {
                    self.test(system, index, span.instant(c), value) != was
                });
            if seems_to_turn {
                self.grazed.push(index);
            }
        }
    }

    fn sample_inner(
        &mut self,
        system: &mut dyn System,
        stepper: &mut Stepper,
        start: &StepStart,
        limit: f64,
    ) {
        self.thetas.clear();
        self.sampled.clear();
        for inner in 0..self.inner.len() {
            let theta = self.inner[inner];
            if theta < limit
                && stepper
                    .partial(
                        system,
                        start.span,
                        start.y,
                        start.slope,
                        theta,
                        &mut self.scratch,
                    )
                    .is_ok()
            {
                self.push_sample(system, start.span, theta, None);
            }
        }
    }

    /// Records truth at `theta`, where the value is `y` or else in the scratch space.
    fn push_sample(&mut self, system: &mut dyn System, span: &Span, theta: f64, y: Option<&[f64]>) {
        let t = span.condition_time(theta);
        self.thetas.push(theta);
        for index in 0..self.list.len() {
            let truth = self.test(system, index, t, y.unwrap_or(&self.scratch));
            self.sampled.push(truth);
        }
    }

    /// First share in (low, high] at which `watch` differs from its truth at `low`, to round-off.
    fn bisect(
        &mut self,
        system: &mut dyn System,
        stepper: &mut Stepper,
        start: &StepStart,
        watch: usize,
        (mut low, mut high): (f64, f64),
    ) -> f64 {
        let was = self.truth[watch];
        while high - low > BISECTION_END {
            let middle = low + 0.5 * (high - low);
            if middle <= low || middle >= high {
                break;
            }
            let reached = stepper
                .partial(
                    system,
                    start.span,
                    start.y,
                    start.slope,
                    middle,
                    &mut self.scratch,
                )
                .is_ok();
            let t = start.span.condition_time(middle);
            if reached && self.test(system, watch, t, &self.scratch) != was {
                high = middle;
            } else {
                low = middle;
            }
        }
        if high > 1.0 - 4.0 * BISECTION_END {
            1.0
        } else {
            high
        }
    }
}
