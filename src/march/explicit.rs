//! The one kernel of all explicit Runge–Kutta methods.

use super::stepper::Span;
use super::{System, Tableau};

/// An explicit tableau in doubles with room for the stages of `length` components.
pub(super) struct Explicit {
    length: usize,
    c: Vec<f64>,
    /// Non-zero entries (column, value) of each row of A.
    rows: Vec<Vec<(usize, f64)>>,
    /// Non-zero weights (column, value).
    weights: Vec<(usize, f64)>,
    slopes: Vec<f64>,
    values: Vec<f64>,
}

impl Explicit {
    pub fn new(tableau: &Tableau, length: usize) -> Explicit {
        let stages = tableau.stages();
        let nonzero = |row: &[super::Coefficient]| {
            row.iter()
                .map(|a| a.value(tableau.radicand))
                .enumerate()
                .filter(|(_, a)| *a != 0.0)
                .collect::<Vec<_>>()
        };
        Explicit {
            length,
            c: tableau
                .c
                .iter()
                .map(|c| c.value(tableau.radicand))
                .collect(),
            rows: tableau.a.iter().map(|row| nonzero(row)).collect(),
            weights: nonzero(tableau.b),
            slopes: vec![0.0; stages * length],
            values: vec![0.0; stages * length],
        }
    }

    /// Y_i = y + h Σ a_ij k_j, k_i = f(t + c_i h, Y_i), next = y + h Σ b_i k_i; k_1 is `slope`.
    /// Returns the number of slope evaluations.
    pub fn step(
        &mut self,
        system: &mut dyn System,
        span: &Span,
        y: &[f64],
        slope: &[f64],
        next: &mut [f64],
    ) -> u64 {
        let n = self.length;
        let h = span.h();
        self.values[..n].copy_from_slice(y);
        self.slopes[..n].copy_from_slice(slope);
        for stage in 1..self.rows.len() {
            let value = &mut self.values[stage * n..(stage + 1) * n];
            let (known, rest) = self.slopes.split_at_mut(stage * n);
            combine(y, h, &self.rows[stage], known, value);
            system.rate(span.time(self.c[stage]), value, &mut rest[..n]);
        }
        combine(y, h, &self.weights, &self.slopes, next);
        self.rows.len() as u64 - 1
    }

    pub fn last_slope(&self) -> &[f64] {
        self.slope(self.rows.len() - 1)
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

/// out = y + h Σ weight_j k_j over the listed columns, summed in order.
///
/// Sums of up to three terms, most of those of the registered methods, have a loop of their own: they are the
/// innermost work of a march.
fn combine(y: &[f64], h: f64, weights: &[(usize, f64)], slopes: &[f64], out: &mut [f64]) {
    let n = y.len();
    let column = |j: usize| &slopes[j * n..(j + 1) * n];
    let out = &mut out[..n];
    match *weights {
        [(j, a)] => {
            let k = column(j);
            for i in 0..n {
                out[i] = y[i] + h * (a * k[i]);
            }
        }
        [(j0, a0), (j1, a1)] => {
            let (k0, k1) = (column(j0), column(j1));
            for i in 0..n {
                out[i] = y[i] + h * (a0 * k0[i] + a1 * k1[i]);
            }
        }
        [(j0, a0), (j1, a1), (j2, a2)] => {
            let (k0, k1, k2) = (column(j0), column(j1), column(j2));
            for i in 0..n {
                out[i] = y[i] + h * (a0 * k0[i] + a1 * k1[i] + a2 * k2[i]);
            }
        }
        _ => {
            for i in 0..n {
                let mut sum = 0.0;
                for (j, weight) in weights {
                    sum += weight * slopes[j * n + i];
                }
                out[i] = y[i] + h * sum;
            }
        }
    }
}
