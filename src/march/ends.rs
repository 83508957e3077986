//! How a march begins and ends.

use super::Grid;
use super::driver::{Driver, first_not_finite, row};
use super::probe::same_instant;
use super::stepper::Span;
use super::trajectory::{Outcome, RowKind, Stop, StopReason};

impl Driver<'_> {
    /// Judges the start: values, ranges, conditions that are true already.
    pub fn begin(&mut self, grid: &Grid) -> Option<StopReason> {
        let states = self.outcome.scale.len();
        if let Some(state) = first_not_finite(&self.y[..states]) {
            return Some(StopReason::NotFinite { state });
        }
        self.widen_scale();
        self.watch.refresh(self.system, self.t, &self.y);
        for (event, rule) in self.plan.events.iter().enumerate() {
            if self
                .watch
                .place(rule.condition)
                .is_some_and(|place| self.watch.truth[place])
            {
                match rule.at_start {
                    None => return Some(StopReason::TrueAtStart { event }),
                    Some(acts) => self.acting[event] = acts,
                }
            }
        }
        self.probes.point(self.system, self.t, &self.y);
        let mut condition_time = self.t;
        if grid.known_start() {
            let span = Span::new(grid.from(), grid.to(), Some(grid.from()), false);
            condition_time = span.time(0.0);
            let before = self.watch.truth.clone();
            self.watch.refresh(self.system, condition_time, &self.y);
            for (event, rule) in self.plan.events.iter().enumerate() {
                self.acting[event] |= self
                    .watch
                    .place(rule.condition)
                    .is_some_and(|place| self.watch.truth[place] && !before[place]);
            }
        }
        for place in 0..self.watch.list.len() {
            self.probes.turned(place, self.t, self.watch.truth[place]);
        }
        let stop = if self.acting.contains(&true) {
            self.act(condition_time)
        } else {
            self.left_range()
        };
        self.probes.begin(self.system, self.plan, self.t, &self.y);
        self.hold_breaks();
        stop
    }

    /// Keeps rates on the branches on which the march is.
    pub(super) fn hold_breaks(&mut self) {
        for condition in &self.plan.breaks {
            let truth = self
                .watch
                .place(*condition)
                .map(|place| self.watch.truth[place]);
            self.system.hold(*condition, truth);
        }
    }

    fn release_breaks(&mut self) {
        for condition in &self.plan.breaks {
            self.system.hold(*condition, None);
        }
    }

    /// Ends the march where it stands.
    pub fn finish(mut self, reason: StopReason) -> Outcome {
        self.release_breaks();
        let t = self.t;
        while let Some(&time) = self.plan.report_times.get(self.next_report)
            && same_instant(time, t)
        {
            self.next_report += 1;
            let row = row(self.system, self.plan, time, &self.y, RowKind::Report);
            self.outcome.rows.push(row);
        }
        if self.outcome.rows.last().is_none_or(|row| row.t != t) {
            let row = row(self.system, self.plan, t, &self.y, RowKind::Stop);
            self.outcome.rows.push(row);
        }
        let mut outcome = self.outcome;
        outcome.stop = Stop { reason, at: t };
        outcome.rate_evaluations = self.stepper.evaluations;
        outcome.probes = self.probes.finish(self.system, self.plan, t, &self.y);
        outcome.switches = self.system.switches();
        outcome.y = self.y;
        outcome
    }

    /// Gives the system back as it was, when the march itself is not wanted.
    pub fn put_back(mut self, switches: &[f64]) {
        self.release_breaks();
        self.system.restore(switches);
    }
}
