//! Result functions: what each asks of the march, and its value afterwards.

use super::compile::{of_inputs, probe_symbol};
use crate::formula::tree::{ProbeFunction, Tree};
use crate::march::{Outcome, Probe};

/// A result function with its arguments compiled.
#[derive(Clone, Debug, PartialEq)]
pub enum CompiledProbe {
    OfExpression {
        function: ProbeFunction,
        observable: usize,
    },
    AtInstant {
        observable: usize,
        instant: Instant,
    },
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
    TimeWhile(usize),
    /// Of a quadrature.
    Integral(usize),
    Mean(usize),
}

/// An instant as a formula of inputs and other probes.
#[derive(Clone, Debug, PartialEq)]
pub struct Instant {
    pub tree: Tree,
    /// Names of the inputs.
    pub names: Vec<String>,
    pub used: Vec<usize>,
}

impl Instant {
    /// The instant, once the probes that it uses have been asked; NaN when one of them has no value.
    fn value(&self, inputs: &[f64], values: &[Option<Option<f64>>]) -> Option<f64> {
        let mut names = self.names.clone();
        let mut numbers = inputs.to_vec();
        for probe in &self.used {
            names.push(probe_symbol(*probe));
            numbers.push(values[*probe]?.unwrap_or(f64::NAN));
        }
        Some(of_inputs(&self.tree, &names, &numbers))
    }
}

impl CompiledProbe {
    /// What the march is asked; none while an instant is still unknown.
    pub fn for_march(&self, inputs: &[f64], values: &[Option<Option<f64>>]) -> Option<Probe> {
        Some(match self {
            CompiledProbe::OfExpression {
                function,
                observable,
            } => match function {
                ProbeFunction::Initial => Probe::Initial(*observable),
                ProbeFunction::Largest => Probe::Largest(*observable),
                ProbeFunction::Smallest => Probe::Smallest(*observable),
                ProbeFunction::TimeOfLargest => Probe::TimeOfLargest(*observable),
                ProbeFunction::TimeOfSmallest => Probe::TimeOfSmallest(*observable),
                _ => Probe::Final(*observable),
            },
            CompiledProbe::AtInstant {
                observable,
                instant,
            } => Probe::AtTime {
                observable: *observable,
                t: instant.value(inputs, values)?,
            },
            CompiledProbe::AtEvent {
                observable,
                event,
                last,
            } => Probe::AtEvent {
                observable: *observable,
                event: *event,
                last: *last,
            },
            CompiledProbe::TimeOf { event, last } => Probe::TimeOf {
                event: *event,
                last: *last,
            },
            CompiledProbe::CountOf(event) => Probe::CountOf(*event),
            CompiledProbe::TimeWhile(condition) => Probe::TimeWhile(*condition),
            // Read off the quadratures at the end of the march.
            CompiledProbe::Integral(_) | CompiledProbe::Mean(_) => return None,
        })
    }

    /// The instant at which the value is read, where it is stated.
    pub fn fixed_instant(&self, asked: &Probe) -> Option<f64> {
        match asked {
            Probe::AtTime { t, .. } => Some(*t),
            _ => None,
        }
    }

    /// What to ask for the instant of an extreme.
    pub fn companion(&self) -> Option<Probe> {
        match self {
            CompiledProbe::OfExpression {
                function: ProbeFunction::Largest | ProbeFunction::TimeOfLargest,
                observable,
            } => Some(Probe::TimeOfLargest(*observable)),
            CompiledProbe::OfExpression {
                function: ProbeFunction::Smallest | ProbeFunction::TimeOfSmallest,
                observable,
            } => Some(Probe::TimeOfSmallest(*observable)),
            _ => None,
        }
    }

    /// The instant of the event at which the value is read.
    pub fn event_instant(&self, outcome: &Outcome) -> Option<f64> {
        let (event, last) = match self {
            CompiledProbe::AtEvent { event, last, .. } | CompiledProbe::TimeOf { event, last } => {
                (*event, *last)
            }
            _ => return None,
        };
        let mut of_event = outcome
            .events
            .iter()
            .filter(|occurrence| occurrence.event == event);
        let occurrence = if last {
            of_event.next_back()
        } else {
            of_event.next()
        };
        occurrence.map(|occurrence| occurrence.at)
    }
}
