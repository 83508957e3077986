//! The region of stability of a method: how far along a ray, and its boundary as a curve.

use crate::float;
use crate::march::{Method, amplification};

/// Where |R| first exceeds 1 along rays from the origin into the left half-plane.
pub struct Limits {
    method: &'static Method,
    /// No decaying mode ever grows.
    is_unlimited: bool,
}

/// Growth factors up to this are not called growth: rounding alone may carry a factor of 1 over 1.
const STILL_ONE: f64 = 1.0 + 1e-9;
/// First rays' step and end: no explicit method of the registry is stable beyond 10.
const RAY_STEP: f64 = 0.05;
const RAY_END: f64 = 30.0;

impl Limits {
    pub fn of(method: &'static Method) -> Limits {
        let far = [0.3, 1.0, 3.0, 10.0, 30.0, 1e3, 1e6];
        let directions = [(-1.0, 0.0), (-0.8, 0.6), (-0.4, 0.916), (-0.05, 0.998)];
        let is_unlimited = far.iter().all(|size| {
            directions
                .iter()
                .all(|(re, im)| growth(method, size * re, size * im) <= STILL_ONE)
        });
        Limits {
            method,
            is_unlimited,
        }
    }

    /// The longest step at which the mode λ (decaying) does not grow, where it is shorter than `known`.
    pub fn stable_step(&self, (re, im): (f64, f64), known: Option<f64>) -> Option<f64> {
        if self.is_unlimited {
            return None;
        }
        if let Some(known) = known
            && growth(self.method, known * re, known * im) <= STILL_ONE
        {
            return None;
        }
        let size = float::hypot(re, im);
        let end = known.map_or(RAY_END, |known| known * size);
        let along = |distance: f64| growth(self.method, distance * re / size, distance * im / size);
        let mut low = 0.0;
        let mut high = RAY_STEP.min(end);
        while along(high) <= STILL_ONE {
            if high >= end {
                return None;
            }
            low = high;
            high = (high + RAY_STEP).min(end);
        }
        for _ in 0..30 {
            let middle = 0.5 * (low + high);
            if along(middle) <= STILL_ONE {
                low = middle
            } else {
                high = middle
            }
        }
        Some(low / size)
    }

    /// Length of the stable part of the negative real axis; none: all of it.
    pub fn real(&self) -> Option<f64> {
        self.stable_step((-1.0, 0.0), None)
    }
}

fn growth(method: &Method, re: f64, im: f64) -> f64 {
    let (a, b) = amplification(method, re, im);
    float::hypot(a, b)
}

/// Cells of the grid over which the boundary is traced, along each axis.
const CELLS: (usize, usize) = (56, 40);

/// The curves |R| = 1 within re from `left` to `right` and im from 0 to `top`, in pieces.
///
/// Traced cell by cell on a grid, the crossing of each edge found by the secant rule.
pub fn boundary(method: &Method, (left, right, top): (f64, f64, f64)) -> Vec<Vec<(f64, f64)>> {
    let (columns, rows) = CELLS;
    // Half a cell off the axes: on the imaginary axis some methods have |R| = 1 throughout.
    let (dx, dy) = ((right - left) / columns as f64, top / (rows as f64 - 0.5));
    let shift = 0.3719 * dx;
    let at = |i: usize, j: usize| (left + shift + dx * (i as f64 - 0.5), dy * (j as f64 - 0.5));
    let excess = |(x, y): (f64, f64)| float::min(growth(method, x, y), 1e6) - 1.0;
    let values: Vec<Vec<f64>> = (0..=columns)
        .map(|i| (0..=rows).map(|j| excess(at(i, j))).collect())
        .collect();
    let mut segments = Vec::new();
    for i in 0..columns {
        for j in 0..rows {
            let corners = [(i, j), (i + 1, j), (i + 1, j + 1), (i, j + 1)];
            let mut crossings = Vec::new();
            for side in 0..4 {
                let (a, b) = (corners[side], corners[(side + 1) % 4]);
                // Each edge is crossed in one direction, so that neighbouring cells find the same point.
                let (a, b) = if a <= b { (a, b) } else { (b, a) };
                let (va, vb) = (values[a.0][a.1], values[b.0][b.1]);
                if (va > 0.0) != (vb > 0.0) {
                    crossings.push(crossing(&excess, (at(a.0, a.1), va), (at(b.0, b.1), vb)));
                }
            }
            segments.extend(crossings.chunks_exact(2).map(|pair| (pair[0], pair[1])));
        }
    }
    joined(segments)
}

/// The point between two corners at which the excess is zero.
fn crossing(
    excess: &impl Fn((f64, f64)) -> f64,
    (mut a, mut va): ((f64, f64), f64),
    (mut b, mut vb): ((f64, f64), f64),
) -> (f64, f64) {
    for round in 0..8 {
        let share = if round % 2 == 0 { va / (va - vb) } else { 0.5 };
        let middle = (a.0 + share * (b.0 - a.0), a.1 + share * (b.1 - a.1));
        let value = excess(middle);
        if (value > 0.0) == (va > 0.0) {
            (a, va) = (middle, value);
        } else {
            (b, vb) = (middle, value);
        }
    }
    let share = va / (va - vb);
    (a.0 + share * (b.0 - a.0), a.1 + share * (b.1 - a.1))
}

/// Segments that share an end become one line.
fn joined(mut segments: Vec<((f64, f64), (f64, f64))>) -> Vec<Vec<(f64, f64)>> {
    let mut lines = Vec::new();
    while let Some((first, second)) = segments.pop() {
        let mut line = std::collections::VecDeque::from([first, second]);
        loop {
            let (start, end) = (line[0], line[line.len() - 1]);
            let Some(position) = segments.iter().position(|(a, b)| {
                [*a, *b]
                    .iter()
                    .any(|point| *point == start || *point == end)
            }) else {
                break;
            };
            let (a, b) = segments.swap_remove(position);
            match () {
                () if a == end => line.push_back(b),
                () if b == end => line.push_back(a),
                () if a == start => line.push_front(b),
                () => line.push_front(a),
            }
        }
        lines.push(line.into_iter().collect());
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::march::{METHODS, method};

    /// Real limits: 2 for Euler and second-order pairs, 2.5127 for third, 2.7853 for fourth order (Hairer and Wanner,
    /// Solving Ordinary Differential Equations II, Springer 1996, section IV.2).
    #[test]
    fn val_real_limits() {
        for (name, expected) in [
            ("euler", 2.0),
            ("heun", 2.0),
            ("kutta3", 2.5127),
            ("rk4", 2.7853),
        ] {
            let limit = Limits::of(method(name).unwrap()).real().unwrap();
            assert!((limit - expected).abs() < 1e-4, "{name}: {limit}");
        }
        for name in ["backward euler", "trapezoidal", "tr-bdf2", "bdf2", "radau5"] {
            let method = METHODS
                .iter()
                .find(|method| method.name == name)
                .unwrap_or_else(|| panic!("{name}"));
            assert_eq!(Limits::of(method).real(), None, "{name}");
        }
    }

    /// Euler's region is the disc about −1 with radius 1.
    #[test]
    fn hand_eulers_boundary_is_a_circle() {
        let lines = boundary(method("euler").unwrap(), (-3.0, 1.0, 2.0));
        assert_eq!(lines.len(), 1);
        assert!(lines[0].len() > 40);
        for (x, y) in &lines[0] {
            assert!(
                ((x + 1.0) * (x + 1.0) + y * y - 1.0).abs() < 1e-6,
                "{x} {y}"
            );
        }
    }

    /// The trapezoidal rule's boundary is the imaginary axis.
    #[test]
    fn hand_trapezoidal_boundary_is_the_imaginary_axis() {
        let lines = boundary(method("trapezoidal").unwrap(), (-4.0, 2.0, 3.0));
        assert_eq!(lines.len(), 1);
        assert!(lines[0].iter().all(|(x, _)| x.abs() < 1e-6));
    }
}
