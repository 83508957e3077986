//! Heun's method with the corrector repeated: the trapezoidal rule, solved by repeating it.

use super::System;
use super::stepper::{Span, StartPoint, StepFailure};

/// The corrector is repeated until the value moves by at most this share of every state's scale, or by no more than
/// [`ROUND_OFF`] and no longer less than before.
const CORRECTOR_TOLERANCE: f64 = 1e-14;
const ROUND_OFF: f64 = 1e-12;
/// Repetitions after which a step has failed.
const CORRECTOR_LIMIT: usize = 100;

pub(super) struct Iterated {
    states: usize,
    /// Value and slope of the start and of every repetition of the step just done.
    values: Vec<Vec<f64>>,
    slopes: Vec<Vec<f64>>,
    used: usize,
}

impl Iterated {
    pub fn new(states: usize, length: usize) -> Iterated {
        Iterated {
            states,
            values: vec![vec![0.0; length]; CORRECTOR_LIMIT + 1],
            slopes: vec![vec![0.0; length]; CORRECTOR_LIMIT + 1],
            used: 0,
        }
    }

    /// Crosses `span`: y + h k_1 predicted, y + h/2 (k_1 + f(last value)) repeated.
    pub fn step(
        &mut self,
        system: &mut dyn System,
        span: &Span,
        start: &StartPoint,
        next: &mut [f64],
        evaluations: &mut u64,
    ) -> Result<(), StepFailure> {
        let StartPoint { y, slope, scale } = *start;
        let h = span.h();
        self.values[0].copy_from_slice(y);
        self.slopes[0].copy_from_slice(slope);
        for ((next, y), k) in next.iter_mut().zip(y).zip(slope) {
            *next = y + h * k;
        }
        let mut worst = 0;
        let mut before = f64::INFINITY;
        for index in 1..=CORRECTOR_LIMIT {
            self.used = index + 1;
            self.values[index].copy_from_slice(next);
            system.rate(span.time(1.0), next, &mut self.slopes[index]);
            *evaluations += 1;
            let mut moved = 0.0;
            for at in 0..y.len() {
                let corrected = y[at] + h * (0.5 * slope[at] + 0.5 * self.slopes[index][at]);
                if at < self.states {
                    let change = (corrected - next[at]).abs();
                    let share = if change == 0.0 {
                        0.0
                    } else {
                        change / scale[at].max(corrected.abs())
                    };
                    if share.is_nan() {
                        return Err(StepFailure::Corrector { state: at });
                    }
                    if share > moved {
                        moved = share;
                        worst = at;
                    }
                }
                next[at] = corrected;
            }
            if moved <= CORRECTOR_TOLERANCE || (moved <= ROUND_OFF && moved >= before) {
                return Ok(());
            }
            before = moved;
        }
        Err(StepFailure::Corrector { state: worst })
    }

    pub fn slope(&self, stage: usize) -> &[f64] {
        &self.slopes[stage]
    }

    pub fn stages(&self) -> impl Iterator<Item = (f64, &[f64])> {
        self.values[..self.used]
            .iter()
            .enumerate()
            .map(|(index, value)| (f64::from(u8::from(index > 0)), value.as_slice()))
    }
}
