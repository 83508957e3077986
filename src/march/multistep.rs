//! Steps from several points of the past: Adams predictor–corrector pairs and the second backward
//! differentiation formula.
//!
//! Owns: the history, coefficients for unequal steps, when the history cannot be used. Steps for want of history
//! are taken by the method's one-step starter of the same order, so no order is lost; partial steps too.

use super::newton::{Block, Newton};
use super::stepper::{Span, StartPoint, StepFailure};
use super::{Coefficient, System};

/// Points kept: the most that a registered method uses besides the present one.
const PAST: usize = 3;
/// A step longer than this many times the last one starts anew: the past says too little about it, and the
/// second backward differentiation formula is stable up to 1 + √2 only.
const LONGEST_GROWTH: f64 = 2.0 + 1e-6;
/// Steps that differ by less than this share are equal: they use the published coefficients.
const EQUAL_STEPS: f64 = 1e-9;

/// Coefficients for equal steps of an Adams–Bashforth predictor and an Adams–Moulton corrector of one order.
#[derive(Debug)]
pub struct AdamsPair {
    /// Of the slopes now, one step ago, …
    pub predictor: &'static [Coefficient],
    /// Of the slopes at the predicted value, now, one step ago, …
    pub corrector: &'static [Coefficient],
}

/// The points behind the present one, newest first.
pub(super) struct History {
    times: [f64; PAST],
    points: Vec<Vec<f64>>,
    kept: usize,
    present: Option<f64>,
}

impl History {
    pub fn new(length: usize) -> History {
        History {
            times: [0.0; PAST],
            points: vec![vec![0.0; length]; PAST + 1],
            kept: 0,
            present: None,
        }
    }

    pub fn clear(&mut self) {
        self.kept = 0;
        self.present = None;
    }

    /// Takes `point` at `t` as the present; what was the present becomes the past.
    pub fn arrive(&mut self, t: f64, point: &[f64]) {
        if self.present == Some(t) {
            return;
        }
        if let Some(before) = self.present {
            self.times.rotate_right(1);
            self.times[0] = before;
            self.points.rotate_right(1);
            self.kept = (self.kept + 1).min(PAST);
        }
        self.present = Some(t);
        self.points[0].copy_from_slice(point);
    }

    /// Whether `past` points can serve a step of `h` from the present.
    pub fn serves(&self, past: usize, t: f64, h: f64) -> bool {
        self.kept >= past && (past == 0 || h.abs() <= LONGEST_GROWTH * (t - self.times[0]).abs())
    }

    /// The point `back` steps ago, 0 being the present.
    fn point(&self, back: usize) -> &[f64] {
        &self.points[back]
    }

    /// Its place on the axis in units of the coming step, 0 being the present.
    fn place(&self, back: usize, t: f64, h: f64) -> f64 {
        if back == 0 {
            0.0
        } else {
            (self.times[back - 1] - t) / h
        }
    }

    fn has_equal_steps(&self, past: usize, t: f64, h: f64) -> bool {
        (1..=past).all(|back| (self.place(back, t, h) + back as f64).abs() <= EQUAL_STEPS)
    }
}

/// Kernel of a predictor–corrector pair in the mode predict, evaluate, correct, evaluate.
pub(super) struct Adams {
    predictor: Vec<f64>,
    corrector: Vec<f64>,
    predicted: Vec<f64>,
    predicted_slope: Vec<f64>,
}

impl Adams {
    pub fn new(pair: &AdamsPair, length: usize) -> Adams {
        let values = |row: &[Coefficient]| row.iter().map(|c| c.value(1)).collect();
        Adams {
            predictor: values(pair.predictor),
            corrector: values(pair.corrector),
            predicted: vec![0.0; length],
            predicted_slope: vec![0.0; length],
        }
    }

    /// Points of the past needed.
    pub fn past(&self) -> usize {
        self.predictor.len() - 1
    }

    /// Crosses `span` from `y`; `history` holds slopes.
    pub fn step(
        &mut self,
        system: &mut dyn System,
        span: &Span,
        history: &History,
        y: &[f64],
        next: &mut [f64],
        evaluations: &mut u64,
    ) {
        let (t, h, k) = (span.t, span.h(), self.predictor.len());
        let mut predictor = [0.0; PAST + 1];
        let mut corrector = [0.0; PAST + 1];
        if history.has_equal_steps(k - 1, t, h) {
            predictor[..k].copy_from_slice(&self.predictor);
            corrector[..k].copy_from_slice(&self.corrector);
        } else {
            let mut places = [0.0; PAST + 1];
            for (back, place) in places[..k].iter_mut().enumerate() {
                *place = history.place(back, t, h);
            }
            adams_weights(&places[..k], &mut predictor);
            places.rotate_right(1);
            places[0] = 1.0;
            adams_weights(&places[..k], &mut corrector);
        }
        for (at, (predicted, y)) in self.predicted.iter_mut().zip(y).enumerate() {
            let sum = (0..k).fold(0.0, |sum, j| sum + predictor[j] * history.point(j)[at]);
            *predicted = y + h * sum;
        }
        system.rate(span.time(1.0), &self.predicted, &mut self.predicted_slope);
        *evaluations += 1;
        for (at, (next, y)) in next.iter_mut().zip(y).enumerate() {
            let sum = (1..k).fold(corrector[0] * self.predicted_slope[at], |sum, j| {
                sum + corrector[j] * history.point(j - 1)[at]
            });
            *next = y + h * sum;
        }
    }
}

/// Kernel of the second backward differentiation formula.
pub(super) struct Bdf2 {
    states: usize,
    base: Vec<f64>,
    rates: Vec<f64>,
    newton: Newton,
}

impl Bdf2 {
    pub fn new(states: usize, length: usize) -> Bdf2 {
        Bdf2 {
            states,
            base: vec![0.0; length],
            rates: vec![0.0; length],
            newton: Newton::new(states, length, 1),
        }
    }

    /// Crosses `span`; `history` holds values. With ω = h/h_before:
    /// y⁺ = ((1+ω)² y − ω² y⁻)/(1+2ω) + h (1+ω)/(1+2ω) f(t⁺, y⁺), for equal steps (4 y − y⁻)/3 + 2/3 h f.
    pub fn step(
        &mut self,
        system: &mut dyn System,
        span: &Span,
        history: &History,
        start: &StartPoint,
        next: &mut [f64],
        evaluations: &mut u64,
    ) -> Result<(), StepFailure> {
        let StartPoint { y, scale, .. } = *start;
        let h = span.h();
        let omega = if history.has_equal_steps(1, span.t, h) {
            1.0
        } else {
            -1.0 / history.place(1, span.t, h)
        };
        let divisor = 1.0 + 2.0 * omega;
        let past_weight = omega * omega / divisor;
        let weight = h * (1.0 + omega) / divisor;
        let past = history.point(1);
        for at in 0..y.len() {
            // Written with the difference of the two points, which is small, to keep round-off small.
            self.base[at] = y[at] + past_weight * (y[at] - past[at]);
        }
        next.copy_from_slice(y);
        let block = Block {
            times: &[span.time(1.0)],
            weights: &[weight],
            base: &self.base,
            scale,
        };
        self.newton
            .solve(system, &block, next, &mut self.rates, evaluations)?;
        let points = next.iter_mut().zip(&mut self.rates).zip(&self.base);
        for (at, ((next, rate), base)) in points.enumerate() {
            if at < self.states {
                *rate = (*next - base) / weight;
            } else {
                *next = base + weight * *rate;
            }
        }
        Ok(())
    }

    /// Slope at the end of the step just done, from its equation.
    pub fn last_slope(&self) -> &[f64] {
        &self.rates
    }
}

/// Integrals over [0, 1] of the Lagrange polynomials through `places`, at most [`PAST`] + 1 of them.
pub(super) fn adams_weights(places: &[f64], weights: &mut [f64]) {
    for (j, weight) in weights.iter_mut().enumerate().take(places.len()) {
        let mut polynomial = [1.0, 0.0, 0.0, 0.0];
        let mut divisor = 1.0;
        let others = places[..j].iter().chain(&places[j + 1..]);
        for (degree, place) in others.enumerate() {
            for power in (0..=degree).rev() {
                polynomial[power + 1] += polynomial[power];
                polynomial[power] *= -place;
            }
            divisor *= places[j] - place;
        }
        let integral = polynomial
            .iter()
            .enumerate()
            .fold(0.0, |sum, (power, c)| sum + c / (power + 1) as f64);
        *weight = integral / divisor;
    }
}
