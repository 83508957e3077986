//! Reading of events and probes off the dense output of the alternate integrator.
//!
//! The rules are those of the march (what acts first, what a `set` triggers, which side of an instant counts), written
//! once more, so that an error in one of the two shows.

use crate::calculation::CaseSystem;
use crate::march::{Action, Plan, Probe, SET_LIMIT, System};

/// Events, truths of conditions and probes so far.
pub struct Reader<'a> {
    plan: &'a Plan,
    /// Conditions looked at, with their truth and the instant since which it holds.
    watched: Vec<Watched>,
    acting: Vec<bool>,
    spent: Vec<bool>,
    pub events: Vec<usize>,
    values: Vec<Option<f64>>,
    /// Of each extreme probe the best value and its instant.
    best: Vec<Option<(f64, f64)>>,
    /// Total time of each condition.
    total: Vec<f64>,
}

struct Watched {
    condition: usize,
    is_true: bool,
    since: f64,
}

/// An instant of the integrator's own time to the real one, and the values there.
type Dense<'d> = dyn FnMut(f64) -> (f64, Vec<f64>) + 'd;

impl<'a> Reader<'a> {
    pub fn new(plan: &'a Plan) -> Reader<'a> {
        let mut conditions: Vec<usize> = plan
            .events
            .iter()
            .map(|event| event.condition)
            .chain(plan.breaks.iter().copied())
            .chain(plan.kinks.iter().copied())
            .collect();
        conditions.extend(plan.probes.iter().filter_map(|probe| {
            if let Probe::TimeWhile(condition) = probe {
                Some(*condition)
            } else {
                None
            }
        }));
        conditions.sort_unstable();
        conditions.dedup();
        let watched: Vec<Watched> = conditions
            .into_iter()
            .map(|condition| Watched {
                condition,
                is_true: false,
                since: 0.0,
            })
            .collect();
        Reader {
            plan,
            acting: vec![false; plan.events.len()],
            spent: vec![false; plan.events.len()],
            events: Vec::new(),
            values: vec![None; plan.probes.len()],
            best: vec![None; plan.probes.len()],
            total: vec![0.0; watched.len()],
            watched,
        }
    }

    /// Truth at the start, and events that are stated to act there; returns whether one of them stops.
    pub fn begin(&mut self, system: &mut CaseSystem, t: f64, y: &mut [f64]) -> bool {
        for watched in &mut self.watched {
            watched.is_true = system.condition(watched.condition, t, y);
            watched.since = t;
        }
        for (event, rule) in self.plan.events.iter().enumerate() {
            let is_true = self
                .watched
                .iter()
                .any(|watched| watched.condition == rule.condition && watched.is_true);
            self.acting[event] = is_true && rule.at_start == Some(true);
        }
        self.point(system, t, y);
        let stopped = self.acting.contains(&true) && self.act(system, t, y);
        for (index, probe) in self.plan.probes.iter().enumerate() {
            match probe {
                Probe::Initial(observable) => {
                    self.values[index] = Some(system.observe(*observable, t, y))
                }
                Probe::AtTime {
                    observable,
                    t: wanted,
                } if *wanted == t => self.values[index] = Some(system.observe(*observable, t, y)),
                _ => {}
            }
        }
        stopped
    }

    /// Takes truth anew just beyond a known instant; what has turned true acts. Returns whether that stops.
    pub fn beyond(&mut self, system: &mut CaseSystem, t: f64, beyond: f64, y: &mut [f64]) -> bool {
        for index in 0..self.watched.len() {
            let is_true = system.condition(self.watched[index].condition, beyond, y);
            if is_true != self.watched[index].is_true {
                self.turn(index, t);
            }
        }
        self.acting.contains(&true) && self.act(system, t, y)
    }

    /// Reads one piece of a step, where nothing turns more than once; returns where an event cuts it.
    pub fn piece(
        &mut self,
        system: &mut CaseSystem,
        low: f64,
        high: f64,
        dense: &mut Dense,
    ) -> Option<f64> {
        let mut from = low;
        loop {
            let turned = self.earliest_turn(system, from, high, dense);
            let to = turned.as_ref().map_or(high, |(at, _)| *at);
            self.read(system, from, to, dense);
            let (at, list) = turned?;
            let (t, y) = dense(at);
            let mut cuts = false;
            for index in list {
                let condition = self.watched[index].condition;
                self.turn(index, t);
                cuts |=
                    self.plan.breaks.contains(&condition) || self.plan.kinks.contains(&condition);
            }
            cuts |= self
                .acting
                .iter()
                .zip(&self.plan.events)
                .any(|(acts, rule)| *acts && rule.action != Action::Note);
            if cuts {
                return Some(at);
            }
            self.note(system, t, &y);
            from = at;
        }
    }

    /// Acts on what has turned true at t; returns whether the integration stops.
    pub fn act(&mut self, system: &mut CaseSystem, t: f64, y: &mut [f64]) -> bool {
        let mut came = vec![false; self.acting.len()];
        let mut rounds = 0;
        let mut is_set = false;
        let mut stopped = false;
        'rounds: while self.acting.contains(&true) && rounds <= SET_LIMIT {
            rounds += 1;
            let now = std::mem::replace(&mut self.acting, vec![false; came.len()]);
            for event in (0..now.len()).filter(|event| now[*event]) {
                if self.spent[event] {
                    continue;
                }
                self.record(event);
                came[event] = true;
                match self.plan.events[event].action {
                    Action::Note => {}
                    Action::Stop => {
                        stopped = true;
                        break 'rounds;
                    }
                    Action::Set => {
                        system.assign(event, t, y);
                        is_set = true;
                        for index in 0..self.watched.len() {
                            if system.condition(self.watched[index].condition, t, y)
                                != self.watched[index].is_true
                            {
                                self.turn(index, t);
                            }
                        }
                    }
                }
            }
        }
        self.acting.fill(false);
        if is_set {
            self.point(system, t, y);
            for (index, probe) in self.plan.probes.iter().enumerate() {
                if let Probe::AtTime {
                    observable,
                    t: wanted,
                } = probe
                    && *wanted == t
                {
                    self.values[index] = Some(system.observe(*observable, t, y));
                }
            }
        }
        for event in (0..came.len()).filter(|event| came[*event]) {
            self.read_event(system, event, t, y);
        }
        stopped
    }

    /// Values of the probes at the end.
    pub fn finish(&mut self, system: &mut CaseSystem, t: f64, y: &[f64]) -> Vec<Option<f64>> {
        for index in 0..self.watched.len() {
            if self.watched[index].is_true {
                self.total[index] += (t - self.watched[index].since).abs();
            }
        }
        for (index, probe) in self.plan.probes.iter().enumerate() {
            let best = self.best[index];
            let value = match probe {
                Probe::Final(observable) => Some(system.observe(*observable, t, y)),
                Probe::Largest(_) => best.map(|(value, _)| value),
                Probe::Smallest(_) => best.map(|(value, _)| -value),
                Probe::TimeOfLargest(_) | Probe::TimeOfSmallest(_) => best.map(|(_, at)| at),
                Probe::CountOf(event) => {
                    Some(self.events.iter().filter(|other| *other == event).count() as f64)
                }
                Probe::TimeWhile(condition) => self
                    .watched
                    .iter()
                    .position(|watched| watched.condition == *condition)
                    .map(|at| self.total[at]),
                Probe::Initial(_)
                | Probe::AtTime { .. }
                | Probe::AtEvent { .. }
                | Probe::TimeOf { .. } => self.values[index],
            };
            self.values[index] = value;
        }
        self.values.clone()
    }

    /// The first instant in (low, high] at which a watched condition differs from its truth, and all that do there.
    fn earliest_turn(
        &self,
        system: &mut CaseSystem,
        low: f64,
        high: f64,
        dense: &mut Dense,
    ) -> Option<(f64, Vec<usize>)> {
        let (t, y) = dense(high);
        let turned: Vec<usize> = (0..self.watched.len())
            .filter(|index| {
                system.condition(self.watched[*index].condition, t, &y)
                    != self.watched[*index].is_true
            })
            .collect();
        let mut at = high;
        // The smallest interval at whose end any of them has turned.
        let (mut below, mut above) = (low, high);
        if turned.is_empty() {
            return None;
        }
        let differing = |s: f64, system: &mut CaseSystem, dense: &mut Dense| -> Vec<usize> {
            let (t, y) = dense(s);
            turned
                .iter()
                .copied()
                .filter(|index| {
                    system.condition(self.watched[*index].condition, t, &y)
                        != self.watched[*index].is_true
                })
                .collect()
        };
        let mut list = turned.clone();
        loop {
            let middle = 0.5 * (below + above);
            if middle <= below || middle >= above {
                return Some((at, list));
            }
            let found = differing(middle, system, dense);
            if found.is_empty() {
                below = middle;
            } else {
                above = middle;
                at = middle;
                list = found;
            }
        }
    }

    /// A condition has turned: its time is counted, events that wait for it will act.
    fn turn(&mut self, index: usize, t: f64) {
        let watched = &mut self.watched[index];
        if watched.is_true {
            self.total[index] += (t - watched.since).abs();
        }
        watched.is_true = !watched.is_true;
        watched.since = t;
        let (condition, is_true) = (watched.condition, watched.is_true);
        for (event, rule) in self.plan.events.iter().enumerate() {
            if is_true && rule.condition == condition && !self.spent[event] {
                self.acting[event] = true;
            }
        }
    }

    /// Events that only note.
    fn note(&mut self, system: &mut CaseSystem, t: f64, y: &[f64]) {
        for event in 0..self.acting.len() {
            if std::mem::take(&mut self.acting[event]) {
                self.record(event);
                self.read_event(system, event, t, y);
            }
        }
    }

    fn record(&mut self, event: usize) {
        self.events.push(event);
        self.spent[event] |= self.plan.events[event].once;
    }

    fn read_event(&mut self, system: &mut CaseSystem, of: usize, t: f64, y: &[f64]) {
        for (index, probe) in self.plan.probes.iter().enumerate() {
            let is_new = |last: bool| last || self.values[index].is_none();
            match probe {
                Probe::TimeOf { event, last } if *event == of && is_new(*last) => {
                    self.values[index] = Some(t)
                }
                Probe::AtEvent {
                    observable,
                    event,
                    last,
                } if *event == of && is_new(*last) => {
                    self.values[index] = Some(system.observe(*observable, t, y))
                }
                _ => {}
            }
        }
    }

    /// Reads values at instants and extremes from `low` to `high`.
    fn read(&mut self, system: &mut CaseSystem, low: f64, high: f64, dense: &mut Dense) {
        let ((t_low, y_low), (t_high, y_high)) = (dense(low), dense(high));
        let span = t_high - t_low;
        for (index, probe) in self.plan.probes.iter().enumerate() {
            if let Probe::AtTime { observable, t } = probe
                && span != 0.0
                && (t - t_low) / span > 0.0
                && (t - t_low) / span <= 1.0
            {
                let (_, y) = dense(low + (high - low) * ((t - t_low) / span));
                self.values[index] = Some(system.observe(*observable, *t, &y));
            }
            let Some((observable, sign)) = extreme(probe) else {
                continue;
            };
            self.candidate(
                index,
                sign * system.observe(observable, t_high, &y_high),
                t_high,
            );
            let rising = |t: f64, y: &[f64], system: &mut CaseSystem| {
                sign * system.observe_slope(observable, t, y) * span > 0.0
            };
            if rising(t_low, &y_low, system) && !rising(t_high, &y_high, system) {
                let (mut below, mut above) = (low, high);
                loop {
                    let middle = 0.5 * (below + above);
                    if middle <= below || middle >= above {
                        break;
                    }
                    let (t, y) = dense(middle);
                    if rising(t, &y, system) {
                        below = middle
                    } else {
                        above = middle
                    }
                }
                let (t, y) = dense(above);
                self.candidate(index, sign * system.observe(observable, t, &y), t);
            }
        }
    }

    /// The values at an instant as candidates for extremes.
    fn point(&mut self, system: &mut CaseSystem, t: f64, y: &[f64]) {
        for (index, probe) in self.plan.probes.iter().enumerate() {
            if let Some((observable, sign)) = extreme(probe) {
                self.candidate(index, sign * system.observe(observable, t, y), t);
            }
        }
    }

    fn candidate(&mut self, index: usize, value: f64, t: f64) {
        if self.best[index].is_none_or(|(best, _)| value > best) {
            self.best[index] = Some((value, t));
        }
    }
}

/// Observable of an extreme, and +1 for the largest, −1 for the smallest.
fn extreme(probe: &Probe) -> Option<(usize, f64)> {
    match probe {
        Probe::Largest(observable) | Probe::TimeOfLargest(observable) => Some((*observable, 1.0)),
        Probe::Smallest(observable) | Probe::TimeOfSmallest(observable) => {
            Some((*observable, -1.0))
        }
        _ => None,
    }
}
