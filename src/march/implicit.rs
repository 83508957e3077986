//! The one kernel of all implicit Runge–Kutta methods.
//!
//! All of them end on their last stage (its row of A is b, its abscissa 1), as a test asserts, so the last stage's
//! value is the result. Slopes of implicit stages are taken from the stage equations, Σ a_ij k_j = (Y_i − y)/h,
//! and not from f, which would multiply the round-off of a stiff system.

use super::newton::{Block, Newton};
use super::stepper::{Span, StartPoint, StepFailure};
use super::{System, Tableau};

pub(super) struct Implicit {
    states: usize,
    length: usize,
    c: Vec<f64>,
    /// Stages × stages.
    a: Vec<f64>,
    /// First stage and number of stages of each coupled block; explicit stages have none.
    blocks: Vec<(usize, usize)>,
    values: Vec<f64>,
    slopes: Vec<f64>,
    base: Vec<f64>,
    rates: Vec<f64>,
    times: Vec<f64>,
    weights: Vec<f64>,
    newton: Newton,
    /// Inverse of each block of A, for slopes from stage equations.
    inverses: Vec<Vec<f64>>,
}

impl Implicit {
    pub fn new(tableau: &Tableau, states: usize, length: usize) -> Implicit {
        let stages = tableau.stages();
        let a: Vec<f64> = (0..stages * stages)
            .map(|at| {
                tableau
                    .entry(at / stages, at % stages)
                    .value(tableau.radicand)
            })
            .collect();
        let blocks = coupled_blocks(&a, stages);
        let largest = blocks.iter().map(|block| block.1).max().unwrap_or(1);
        Implicit {
            states,
            length,
            c: tableau
                .c
                .iter()
                .map(|c| c.value(tableau.radicand))
                .collect(),
            inverses: blocks
                .iter()
                .map(|(first, count)| inverse_of_block(&a, stages, *first, *count))
                .collect(),
            a,
            values: vec![0.0; stages * length],
            slopes: vec![0.0; stages * length],
            base: vec![0.0; largest * length],
            rates: vec![0.0; largest * length],
            times: vec![0.0; largest],
            weights: vec![0.0; largest * largest],
            newton: Newton::new(states, length, largest),
            blocks,
        }
    }

    /// Crosses `span`; the slope at the start serves an explicit first stage.
    pub fn step(
        &mut self,
        system: &mut dyn System,
        span: &Span,
        start: &StartPoint,
        next: &mut [f64],
        evaluations: &mut u64,
    ) -> Result<(), StepFailure> {
        let StartPoint { y, slope, scale } = *start;
        let (n, stages, h) = (self.length, self.c.len(), span.h());
        if self.blocks.first().is_none_or(|block| block.0 > 0) {
            self.values[..n].copy_from_slice(y);
            self.slopes[..n].copy_from_slice(slope);
        }
        for index in 0..self.blocks.len() {
            let (first, count) = self.blocks[index];
            for i in 0..count {
                let stage = first + i;
                self.times[i] = span.time(self.c[stage]);
                for (at, y) in y.iter().enumerate() {
                    let known = (0..first).fold(0.0, |sum, j| {
                        sum + self.a[stage * stages + j] * self.slopes[j * n + at]
                    });
                    self.base[i * n + at] = y + h * known;
                }
                // The start is the guess: an extrapolated one can lie at a root that is not the solution's.
                // Rates never depend on quadratures: their stage values stay there.
                self.values[stage * n..(stage + 1) * n].copy_from_slice(y);
                for j in 0..count {
                    self.weights[i * count + j] = h * self.a[stage * stages + first + j];
                }
            }
            let block = Block {
                times: &self.times[..count],
                weights: &self.weights[..count * count],
                base: &self.base[..count * n],
                scale,
            };
            let of_block = first * n..(first + count) * n;
            self.newton.solve(
                system,
                &block,
                &mut self.values[of_block.clone()],
                &mut self.rates[..count * n],
                evaluations,
            )?;
            self.slopes[of_block].copy_from_slice(&self.rates[..count * n]);
            for i in 0..count {
                for state in 0..self.states {
                    let sum = (0..count).fold(0.0, |sum, j| {
                        let rise = self.values[(first + j) * n + state] - self.base[j * n + state];
                        sum + self.inverses[index][i * count + j] * rise
                    });
                    self.slopes[(first + i) * n + state] = sum / h;
                }
            }
        }
        let last = stages - 1;
        next[..self.states].copy_from_slice(&self.values[last * n..last * n + self.states]);
        for (at, next) in next.iter_mut().enumerate().skip(self.states) {
            let sum = (0..stages).fold(0.0, |sum, j| {
                sum + self.a[last * stages + j] * self.slopes[j * n + at]
            });
            *next = y[at] + h * sum;
        }
        Ok(())
    }

    pub fn last_slope(&self) -> &[f64] {
        self.slope(self.c.len() - 1)
    }

    pub fn slope(&self, stage: usize) -> &[f64] {
        &self.slopes[stage * self.length..(stage + 1) * self.length]
    }

    pub fn stages(&self) -> impl Iterator<Item = (f64, &[f64])> {
        self.c
            .iter()
            .copied()
            .zip(self.values.chunks_exact(self.length))
    }
}

/// Smallest runs of consecutive stages that depend on no later stage, without explicit ones.
fn coupled_blocks(a: &[f64], stages: usize) -> Vec<(usize, usize)> {
    let mut blocks = Vec::new();
    let mut first = 0;
    while first < stages {
        let mut end = first + 1;
        let mut stage = first;
        while stage < end {
            let reach = (0..stages).rev().find(|j| a[stage * stages + j] != 0.0);
            end = end.max(reach.map_or(0, |j| j + 1));
            stage += 1;
        }
        if end > first + 1 || a[first * stages + first] != 0.0 {
            blocks.push((first, end - first));
        }
        first = end;
    }
    blocks
}

/// Inverse of a diagonal block of A by Gauss–Jordan elimination (the blocks of registered methods are regular).
fn inverse_of_block(a: &[f64], stages: usize, first: usize, count: usize) -> Vec<f64> {
    let width = 2 * count;
    let mut rows: Vec<Vec<f64>> = (0..count)
        .map(|i| {
            let mut row: Vec<f64> = (0..count)
                .map(|j| a[(first + i) * stages + first + j])
                .collect();
            row.extend((0..count).map(|j| f64::from(u8::from(i == j))));
            row
        })
        .collect();
    for k in 0..count {
        let pivot = (k..count).fold(k, |best, row| {
            if rows[row][k].abs() > rows[best][k].abs() {
                row
            } else {
                best
            }
        });
        rows.swap(k, pivot);
        let pivot_row: Vec<f64> = (0..width).map(|j| rows[k][j] / rows[k][k]).collect();
        for (index, row) in rows.iter_mut().enumerate() {
            let factor = row[k];
            if index != k {
                for (entry, above) in row.iter_mut().zip(&pivot_row) {
                    *entry -= factor * above;
                }
            }
        }
        rows[k] = pivot_row;
    }
    rows.iter()
        .flat_map(|row| row[count..].iter().copied())
        .collect()
}
