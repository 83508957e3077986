//! Newton's iteration for the equations of an implicit step.
//!
//! Owns: Y_i = base_i + Σ_j w_ij f(t_j, Y_j) for m coupled stages (w holds h), solved with the exact Jacobian
//! taken anew in every iteration, and its stopping rule. The matrix is factored here, in place and without
//! allocation, so that the bits are the same everywhere.
//!
//! Stopping rule: a correction of at most 1e-12 of every state's scale is the last (the error left is of the order
//! of its square); or corrections that no longer shrink by half, all at most 1e-9 of their state's scale or 1e-12 of
//! the largest scale (round-off, which near a turning point of the equations is that large). The
//! scale of a state is that given for it, or the largest of |y| and |h·rate| so far; and never below the value
//! itself. The iteration starts from the value at the start of the step, to stay on the solution's branch; when that
//! fails, the solution is followed from there through sixteenths of the step.

use super::System;
use super::stepper::StepFailure;

const TOLERANCE: f64 = 1e-12;
const ROUND_OFF: f64 = 1e-9;
const ITERATIONS: usize = 25;
/// Parts in which the second attempt follows the solution.
const PARTS: u32 = 16;

/// Room for `stages` coupled stages of a system.
pub(super) struct Newton {
    states: usize,
    length: usize,
    residual: Vec<f64>,
    correction: Vec<f64>,
    start: Vec<f64>,
    jacobian: Vec<f64>,
    matrix: Vec<f64>,
    rows: Vec<usize>,
}

/// The equations of one block of coupled stages.
pub(super) struct Block<'a> {
    /// Time of each stage.
    pub times: &'a [f64],
    /// m × m weights, times h.
    pub weights: &'a [f64],
    /// m × length: what does not depend on the unknown stages.
    pub base: &'a [f64],
    pub scale: &'a [f64],
}

impl Newton {
    pub fn new(states: usize, length: usize, stages: usize) -> Newton {
        let size = states * stages;
        Newton {
            states,
            length,
            residual: vec![0.0; size],
            correction: vec![0.0; size],
            start: vec![0.0; length],
            jacobian: vec![0.0; states * states],
            matrix: vec![0.0; size * size],
            rows: vec![0; size],
        }
    }

    /// Solves `block` for `values` (m × length, holding the value at the start of the step for every stage);
    /// `rates` are left at the solution.
    pub fn solve(
        &mut self,
        system: &mut dyn System,
        block: &Block,
        values: &mut [f64],
        rates: &mut [f64],
        evaluations: &mut u64,
    ) -> Result<(), StepFailure> {
        self.start.copy_from_slice(&values[..self.length]);
        if self
            .iterate(system, block, 1.0, values, rates, evaluations)
            .is_ok()
        {
            return Ok(());
        }
        for value in values.chunks_exact_mut(self.length) {
            value.copy_from_slice(&self.start);
        }
        (1..=PARTS).try_for_each(|part| {
            let share = f64::from(part) / f64::from(PARTS);
            self.iterate(system, block, share, values, rates, evaluations)
        })
    }

    /// Replaces `values` by the solution x of (1 − weight·J(t, y)) x = values; false when there is none.
    pub fn filter(
        &mut self,
        system: &mut dyn System,
        t: f64,
        y: &[f64],
        weight: f64,
        values: &mut [f64],
    ) -> bool {
        let block = Block {
            times: &[t],
            weights: &[weight],
            base: &[],
            scale: &[],
        };
        self.assemble(system, &block, 1.0, y);
        self.residual.copy_from_slice(values);
        if !self.factor() {
            return false;
        }
        self.substitute();
        values.copy_from_slice(&self.correction);
        true
    }

    /// Newton's iteration on the equations of `share` of the step.
    fn iterate(
        &mut self,
        system: &mut dyn System,
        block: &Block,
        share: f64,
        values: &mut [f64],
        rates: &mut [f64],
        evaluations: &mut u64,
    ) -> Result<(), StepFailure> {
        let largest_scale = block.scale.iter().copied().fold(0.0, f64::max);
        let mut before = f64::INFINITY;
        let mut worst = 0;
        self.rate_all(system, block, values, rates, evaluations);
        for _ in 0..ITERATIONS {
            self.take_residual(block, share, values, rates);
            self.assemble(system, block, share, values);
            if !self.factor() {
                return Err(StepFailure::Newton { state: worst });
            }
            self.substitute();
            self.correct(values);
            self.rate_all(system, block, values, rates, evaluations);
            let mut size = 0.0;
            let mut largest = 0.0_f64;
            for (index, correction) in self.correction.iter().enumerate() {
                let state = index % self.states;
                let stage = index / self.states;
                let value = values[stage * self.length + state];
                if !(correction.is_finite() && value.is_finite()) {
                    return Err(StepFailure::Newton { state });
                }
                largest = largest.max(correction.abs());
                let relative = relative(*correction, block.scale[state].max(value.abs()));
                if relative > size {
                    size = relative;
                    worst = state;
                }
            }
            let at_round_off =
                size >= 0.5 * before && (size <= ROUND_OFF || largest <= TOLERANCE * largest_scale);
            if size <= TOLERANCE || at_round_off {
                return Ok(());
            }
            before = size;
        }
        Err(StepFailure::Newton { state: worst })
    }

    fn rate_all(
        &self,
        system: &mut dyn System,
        block: &Block,
        values: &[f64],
        rates: &mut [f64],
        evaluations: &mut u64,
    ) {
        let stages = values.chunks_exact(self.length);
        for ((value, rate), t) in stages
            .zip(rates.chunks_exact_mut(self.length))
            .zip(block.times)
        {
            system.rate(*t, value, rate);
            *evaluations += 1;
        }
    }

    /// Residuals y + share (base − y + Σ w f) − Y.
    fn take_residual(&mut self, block: &Block, share: f64, values: &[f64], rates: &[f64]) {
        let (n, length, m) = (self.states, self.length, block.times.len());
        for i in 0..m {
            for state in 0..n {
                let sum = (0..m).fold(0.0, |sum, j| {
                    sum + block.weights[i * m + j] * rates[j * length + state]
                });
                let at = i * length + state;
                let base = if share == 1.0 {
                    block.base[at]
                } else {
                    self.start[state] + share * (block.base[at] - self.start[state])
                };
                self.residual[i * n + state] = base + share * sum - values[at];
            }
        }
    }

    fn correct(&self, values: &mut [f64]) {
        let corrections = self.correction.chunks_exact(self.states);
        for (value, correction) in values.chunks_exact_mut(self.length).zip(corrections) {
            for (value, correction) in value.iter_mut().zip(correction) {
                *value += correction;
            }
        }
    }

    /// Matrix of the corrections: block (i, j) is δ_ij·1 − w_ij J(Y_j); right-hand side the residual.
    fn assemble(&mut self, system: &mut dyn System, block: &Block, share: f64, values: &[f64]) {
        let (n, m) = (self.states, block.times.len());
        let size = n * m;
        for j in 0..m {
            let value = &values[j * self.length..(j + 1) * self.length];
            system.jacobian(block.times[j], value, &mut self.jacobian);
            for i in 0..m {
                let weight = share * block.weights[i * m + j];
                for row in 0..n {
                    for column in 0..n {
                        let unit = f64::from(u8::from(i == j && row == column));
                        self.matrix[(i * n + row) * size + j * n + column] =
                            unit - weight * self.jacobian[row * n + column];
                    }
                }
            }
        }
    }

    /// LU factors in place with partial pivoting; false when singular or not finite.
    fn factor(&mut self) -> bool {
        let size = self.rows.len();
        for (index, row) in self.rows.iter_mut().enumerate() {
            *row = index;
        }
        for k in 0..size {
            let mut pivot = k;
            for row in k + 1..size {
                if self.matrix[row * size + k].abs() > self.matrix[pivot * size + k].abs() {
                    pivot = row;
                }
            }
            let divisor = self.matrix[pivot * size + k];
            if divisor == 0.0 || !divisor.is_finite() {
                return false;
            }
            if pivot != k {
                self.rows.swap(pivot, k);
                for column in 0..size {
                    self.matrix.swap(pivot * size + column, k * size + column);
                }
            }
            let (upper, lower) = self.matrix.split_at_mut((k + 1) * size);
            let pivot_row = &upper[k * size + k + 1..];
            for row in lower.chunks_exact_mut(size) {
                let factor = row[k] / divisor;
                row[k] = factor;
                if factor != 0.0 {
                    for (entry, above) in row[k + 1..].iter_mut().zip(pivot_row) {
                        *entry -= factor * above;
                    }
                }
            }
        }
        true
    }

    /// Solves for the correction from the factors and the residual.
    fn substitute(&mut self) {
        let size = self.rows.len();
        for k in 0..size {
            let row = &self.matrix[k * size..k * size + k];
            let sum = dot(row, &self.correction[..k]);
            self.correction[k] = self.residual[self.rows[k]] - sum;
        }
        for k in (0..size).rev() {
            let row = &self.matrix[k * size..(k + 1) * size];
            let sum = dot(&row[k + 1..], &self.correction[k + 1..]);
            self.correction[k] = (self.correction[k] - sum) / row[k];
        }
    }
}

/// |value|/scale, zero for zero.
fn relative(value: f64, scale: f64) -> f64 {
    if value == 0.0 {
        0.0
    } else {
        value.abs() / scale
    }
}

fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).fold(0.0, |sum, (a, b)| sum + a * b)
}
