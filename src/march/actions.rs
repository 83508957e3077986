//! What events do at the instant at which they come.

use super::driver::{Driver, first_not_finite, row};
use super::event::{Action, Graze, Occurrence, SET_LIMIT};
use super::trajectory::{GRAZE_LIMIT, OCCURRENCE_LIMIT, RowKind, StopReason};
use super::watch::Watched;

impl Driver<'_> {
    /// Records events that only note, at `t` with the value in `part`.
    pub(super) fn note_events(&mut self, t: f64) {
        let mut noted = false;
        for event in 0..self.acting.len() {
            if std::mem::take(&mut self.acting[event]) {
                noted = true;
                self.record(event, t);
                self.probes
                    .event(self.system, self.plan, event, t, &self.part);
            }
        }
        if noted && self.outcome.events.len() < OCCURRENCE_LIMIT {
            let row = row(self.system, self.plan, t, &self.part, RowKind::Event);
            self.outcome.rows.push(row);
        }
    }

    /// Records conditions that only seemed to turn in the step from `t`.
    pub(super) fn note_grazes(&mut self, t: f64) {
        for place in &self.watch.grazed {
            if let Watched::Condition(condition) = self.watch.list[*place]
                && self.outcome.grazes.len() < GRAZE_LIMIT
            {
                self.outcome.grazes.push(Graze { condition, at: t });
            }
        }
    }

    /// Lets the events in `acting` act at the instant that the march has come to, and those that they trigger.
    pub(super) fn act(&mut self, condition_time: f64) -> Option<StopReason> {
        let t = self.t;
        let states = self.outcome.scale.len();
        let has_row = self.acting.contains(&true) && self.outcome.events.len() < OCCURRENCE_LIMIT;
        if has_row {
            let row = row(self.system, self.plan, t, &self.y, RowKind::Event);
            self.outcome.rows.push(row);
        }
        let mut came = vec![false; self.acting.len()];
        let mut stop = None;
        let mut is_set = false;
        'rounds: while self.acting.contains(&true) {
            for (event, came) in came.iter_mut().enumerate() {
                if !self.acting[event] || self.spent[event] {
                    continue;
                }
                self.record(event, t);
                *came = true;
                match self.plan.events[event].action {
                    Action::Note => {}
                    Action::Stop => {
                        stop = Some(StopReason::Event(event));
                        break 'rounds;
                    }
                    Action::Set => {
                        self.system.assign(event, t, &mut self.y);
                        is_set = true;
                        self.sets[event] += 1;
                        self.has_set = true;
                        if let Some(state) = first_not_finite(&self.y[..states]) {
                            stop = Some(StopReason::NotFinite { state });
                            break 'rounds;
                        }
                        if self.sets[event] > SET_LIMIT {
                            stop = Some(StopReason::Chattering { event });
                            break 'rounds;
                        }
                        self.trigger(condition_time);
                    }
                }
            }
            std::mem::swap(&mut self.acting, &mut self.triggered);
            self.triggered.fill(false);
        }
        self.acting.fill(false);
        self.triggered.fill(false);
        if is_set {
            self.hold_breaks();
            self.widen_scale();
            self.probes.point(self.system, t, &self.y);
            if has_row {
                let row = row(self.system, self.plan, t, &self.y, RowKind::AfterSet);
                self.outcome.rows.push(row);
            }
        }
        for (event, came) in came.into_iter().enumerate() {
            if came {
                self.probes.event(self.system, self.plan, event, t, &self.y);
            }
        }
        stop.or_else(|| self.left_range())
    }

    /// Takes truth anew after an assignment; events whose condition has turned true act in the next round.
    fn trigger(&mut self, condition_time: f64) {
        for place in 0..self.watch.list.len() {
            let was = self.watch.truth[place];
            let truth = self.watch.test(self.system, place, condition_time, &self.y);
            if truth == was {
                continue;
            }
            self.watch.truth[place] = truth;
            self.probes.turned(place, self.t, truth);
            if let (true, Watched::Condition(condition)) = (truth, self.watch.list[place]) {
                for (event, rule) in self.plan.events.iter().enumerate() {
                    self.triggered[event] |= rule.condition == condition && !self.spent[event];
                }
            }
        }
    }

    pub(super) fn left_range(&self) -> Option<StopReason> {
        self.watch
            .list
            .iter()
            .zip(&self.watch.truth)
            .find_map(|(watched, truth)| match watched {
                Watched::Range { state, .. } if *truth => {
                    Some(StopReason::LeftRange { state: *state })
                }
                _ => None,
            })
    }

    fn record(&mut self, event: usize, t: f64) {
        self.outcome.event_counts[event] += 1;
        if self.plan.events[event].once {
            self.spent[event] = true;
        }
        if self.outcome.events.len() < OCCURRENCE_LIMIT {
            self.outcome.events.push(Occurrence { event, at: t });
        }
    }
}
