//! Stability of the march: eigenvalues of the exact Jacobian against the method's growth factor.
//!
//! Owns: which steps are looked at, what counts as unstable, the largest stable step, stiffness. Eigenvalues of a
//! Jacobian that varies along the march are a guide, not proof; the record says so.

use nalgebra::{DMatrix, Schur};

use super::region::Limits;
use crate::calculation::{CaseSystem, Prepared};
use crate::float;
use crate::march::{Method, StepView, System, amplification};

/// Most steps whose eigenvalues are taken; of longer marches the step with the largest Jacobian of each bundle.
pub const MOST_STEPS: u64 = 2_000;
/// More states than this: Gershgorin's bound instead of eigenvalues.
const MOST_STATES: usize = 200;
/// |λ|·span below this counts as zero.
const ZERO: f64 = 1e-6;
/// A mode decays where Re λ ≤ −0.01·|λ|.
const DECAYING: f64 = 0.01;
/// A run of steps that would amplify a decaying mode by more than this is unstable.
pub const MOST_GROWTH: f64 = 10.0;
/// |λ|·span of a decaying mode beyond which the equations count as stiff.
const STIFF: f64 = 2_000.0;
/// Growth factors of decaying modes below this ring: the mode changes sign from step to step and dies slowly.
const RINGING: f64 = -0.5;

/// What the eigenvalues say about the march at the step requested; times and steps in SI.
#[derive(Clone, Debug, PartialEq)]
pub struct Stability {
    /// Steps of the march, and at how many of them eigenvalues were taken.
    pub steps: u64,
    pub taken: u64,
    /// Gershgorin's bound was used in place of eigenvalues.
    pub is_bound: bool,
    /// h·λ at every step taken: real and imaginary part (not negative).
    pub points: Vec<(f64, f64)>,
    /// Largest |R(hλ)| over decaying modes.
    pub largest_growth: Option<At>,
    /// Longest step at which no decaying mode grows; none: any step.
    pub largest_stable_step: Option<At>,
    /// Largest ratio of the fastest to the slowest decaying mode.
    pub stiffness: Option<At>,
    /// Largest |λ|.
    pub fastest: Option<At>,
    /// The run of consecutive steps with the largest growth of a decaying mode, if there are two or more.
    pub run: Option<Run>,
    /// A single step outside the region.
    pub excursion: Option<At>,
    /// Most negative growth factor of a fast decaying mode.
    pub ringing: Option<At>,
    /// Instants at which a derivative is not finite: the first ones, and how many there are.
    pub not_evaluated: Vec<f64>,
    pub not_evaluated_count: u64,
    /// The equations have a mode so fast that an explicit method must follow it with many steps.
    pub is_stiff: bool,
}

/// A number and the instant that it belongs to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct At {
    pub value: f64,
    pub t: f64,
}

/// Consecutive steps outside the region of stability.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Run {
    pub from: f64,
    pub to: f64,
    /// Product of the growth factors.
    pub growth: f64,
}

impl Stability {
    /// Errors grow where the solution decays.
    pub fn is_unstable(&self) -> bool {
        self.run.is_some_and(|run| run.growth > MOST_GROWTH)
    }
}

const MOST_INSTANTS: usize = 5;

/// Looks at the march of the requested grid.
pub fn stability(prepared: &mut Prepared, steps: u64) -> Stability {
    let stride = steps.div_ceil(MOST_STEPS).max(1);
    let method = prepared.method;
    let span = (prepared.to - prepared.from).abs();
    let mut survey = Survey::new(method, span, stride);
    prepared.follow(0, &mut |step, system| survey.step(step, system));
    survey.finish()
}

/// Eigenvalues as they are gathered along the march.
struct Survey {
    method: &'static Method,
    limits: Limits,
    span: f64,
    stride: u64,
    found: Stability,
    /// Jacobian of the step in hand, and of the worst step of the bundle so far with its norm, start and length.
    jacobian: Vec<f64>,
    worst: Vec<f64>,
    worst_norm: f64,
    worst_step: (f64, f64),
    in_bundle: u64,
    /// Jacobian whose eigenvalues were taken last.
    last: Vec<f64>,
    modes: Vec<(f64, f64)>,
    run: Option<Run>,
    run_steps: u64,
}

impl Survey {
    fn new(method: &'static Method, span: f64, stride: u64) -> Survey {
        let found = Stability {
            steps: 0,
            taken: 0,
            is_bound: false,
            points: Vec::new(),
            largest_growth: None,
            largest_stable_step: None,
            stiffness: None,
            fastest: None,
            run: None,
            excursion: None,
            ringing: None,
            not_evaluated: Vec::new(),
            not_evaluated_count: 0,
            is_stiff: false,
        };
        Survey {
            method,
            limits: Limits::of(method),
            span,
            stride,
            found,
            jacobian: Vec::new(),
            worst: Vec::new(),
            worst_norm: -1.0,
            worst_step: (0.0, 0.0),
            in_bundle: 0,
            last: Vec::new(),
            modes: Vec::new(),
            run: None,
            run_steps: 0,
        }
    }

    fn step(&mut self, step: &StepView, system: &mut CaseSystem) {
        self.found.steps += 1;
        self.in_bundle += 1;
        // Just inside the step, so that a kink or jump at its start is seen from the side of the step. Ends are not
        // looked at: they are the starts of the next steps, and would make one bad point look like two in a row.
        self.look(step, system);
        if self.in_bundle == self.stride {
            self.take();
        }
    }

    /// Keeps the worst Jacobian of the bundle.
    fn look(&mut self, step: &StepView, system: &mut CaseSystem) {
        let h = step.end - step.t;
        let n = system.states();
        self.jacobian.resize(n * n, 0.0);
        system.jacobian(step.t + 1e-9 * h, step.y, &mut self.jacobian);
        if self.jacobian.iter().any(|entry| !entry.is_finite()) {
            self.found.not_evaluated_count += 1;
            if self.found.not_evaluated.len() < MOST_INSTANTS {
                self.found.not_evaluated.push(step.t);
            }
            return;
        }
        let norm = self
            .jacobian
            .iter()
            .fold(0.0, |sum, entry| sum + entry.abs())
            * h.abs();
        if norm > self.worst_norm {
            self.worst_norm = norm;
            self.worst_step = (step.t, h);
            std::mem::swap(&mut self.worst, &mut self.jacobian);
        }
    }

    /// Takes the eigenvalues of the bundle's worst step.
    fn take(&mut self) {
        let bundle = std::mem::take(&mut self.in_bundle);
        if std::mem::replace(&mut self.worst_norm, -1.0) < 0.0 {
            self.end_run();
            return;
        }
        if self.worst != self.last || self.found.taken == 0 {
            let (modes, is_bound) = modes(&self.worst);
            let Some(modes) = modes else {
                self.found.not_evaluated_count += 1;
                self.end_run();
                return;
            };
            self.modes = modes;
            self.found.is_bound |= is_bound;
            self.last.clone_from(&self.worst);
        }
        self.found.taken += 1;
        self.place(bundle);
    }

    /// Places h·λ of the modes in hand on the method's region.
    fn place(&mut self, bundle: u64) {
        let (t, h) = self.worst_step;
        let at = |value: f64| Some(At { value, t });
        let direction = h.signum();
        let mut growth: f64 = 0.0;
        let (mut slow, mut fast) = (f64::INFINITY, 0.0);
        for (re, im) in std::mem::take(&mut self.modes) {
            let size = float::hypot(re, im);
            if size * self.span < ZERO {
                self.modes.push((re, im));
                continue;
            }
            self.modes.push((re, im));
            if self
                .found
                .fastest
                .is_none_or(|fastest| size > fastest.value)
            {
                self.found.fastest = at(size);
            }
            let (x, y) = (h * re, h.abs() * im.abs());
            self.found.points.push((x, y));
            if re * direction > -DECAYING * size {
                continue;
            }
            slow = float::min(slow, size);
            fast = float::max(fast, size);
            let (real, imaginary) = amplification(self.method, x, y);
            growth = float::max(growth, float::hypot(real, imaginary));
            if (-1.0..RINGING).contains(&real)
                && self
                    .found
                    .ringing
                    .is_none_or(|ringing| real < ringing.value)
            {
                self.found.ringing = at(real);
            }
            let known = self.found.largest_stable_step.map(|limit| limit.value);
            if let Some(limit) = self.limits.stable_step((re * direction, im.abs()), known) {
                self.found.largest_stable_step = at(limit);
            }
        }
        self.found.is_stiff |= fast * self.span > STIFF;
        if fast > slow
            && self
                .found
                .stiffness
                .is_none_or(|ratio| fast / slow > ratio.value)
        {
            self.found.stiffness = at(fast / slow);
        }
        if fast > 0.0
            && self
                .found
                .largest_growth
                .is_none_or(|largest| growth > largest.value)
        {
            self.found.largest_growth = at(growth);
        }
        // Rounding alone may carry a factor of 1 over 1.
        if growth > 1.0 + 1e-9 {
            // Between two kept steps outside, the others count as outside too; a lone one counts once.
            let of_bundle = if self.run_steps == 0 {
                growth
            } else {
                float::powi(growth, i32::try_from(bundle).unwrap_or(i32::MAX))
            };
            self.run_steps += 1;
            let before = self.run.unwrap_or(Run {
                from: t,
                to: t,
                growth: 1.0,
            });
            self.run = Some(Run {
                to: t,
                growth: before.growth * of_bundle,
                ..before
            });
        } else {
            self.end_run();
        }
    }

    fn end_run(&mut self) {
        let steps = std::mem::take(&mut self.run_steps);
        let Some(run) = self.run.take() else { return };
        if steps == 1 {
            if self
                .found
                .excursion
                .is_none_or(|excursion| run.growth > excursion.value)
            {
                self.found.excursion = Some(At {
                    value: run.growth,
                    t: run.from,
                });
            }
        } else if self
            .found
            .run
            .is_none_or(|largest| run.growth > largest.growth)
        {
            self.found.run = Some(run);
        }
    }

    fn finish(mut self) -> Stability {
        if self.in_bundle > 0 {
            self.take();
        }
        self.end_run();
        self.found
    }
}

/// Eigenvalues of a square matrix given row by row, and whether they are only a bound; none where they are not found.
fn modes(matrix: &[f64]) -> (Option<Vec<(f64, f64)>>, bool) {
    let n = (0..).find(|n| n * n >= matrix.len()).unwrap_or(0);
    if n > MOST_STATES {
        // Every eigenvalue lies in a disc about a diagonal entry (S. Gershgorin, 1931): the leftmost point of all.
        let leftmost = (0..n).map(|row| {
            let off = (0..n)
                .filter(|column| *column != row)
                .fold(0.0, |sum, column| sum + matrix[row * n + column].abs());
            matrix[row * n + row] - off
        });
        return (
            Some(vec![(leftmost.fold(f64::INFINITY, float::min), 0.0)]),
            true,
        );
    }
    if n == 1 {
        return (Some(vec![(matrix[0], 0.0)]), false);
    }
    let mut square = DMatrix::from_row_slice(n, n, matrix);
    // States in their own units make badly scaled Jacobians; balancing changes no eigenvalue.
    nalgebra::linalg::balancing::balance_parlett_reinsch(&mut square);
    let schur = Schur::try_new(square, f64::EPSILON, 100 * n);
    let values = schur.map(|schur| {
        schur
            .complex_eigenvalues()
            .iter()
            .map(|value| (value.re, value.im))
            .collect::<Vec<_>>()
    });
    (
        values.filter(|list| list.iter().all(|(re, im)| re.is_finite() && im.is_finite())),
        false,
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sorted(matrix: &[f64]) -> Vec<(f64, f64)> {
        let mut list = modes(matrix).0.unwrap();
        list.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1)));
        list
    }

    fn close(found: &[(f64, f64)], expected: &[(f64, f64)]) {
        assert_eq!(found.len(), expected.len());
        for (a, b) in found.iter().zip(expected) {
            assert!(
                (a.0 - b.0).abs() < 1e-9 * (1.0 + b.0.abs()) && (a.1 - b.1).abs() < 1e-9,
                "{found:?} {expected:?}"
            );
        }
    }

    #[test]
    fn hand_eigenvalues_of_small_matrices() {
        close(&sorted(&[-3.0]), &[(-3.0, 0.0)]);
        // λ² + 4 = 0; (λ + 1)(λ + 1000) = 0; companion matrix of (λ − 1)(λ − 2)(λ − 3).
        close(&sorted(&[0.0, 2.0, -2.0, 0.0]), &[(0.0, -2.0), (0.0, 2.0)]);
        close(
            &sorted(&[0.0, 1.0, -1000.0, -1001.0]),
            &[(-1000.0, 0.0), (-1.0, 0.0)],
        );
        close(
            &sorted(&[6.0, -11.0, 6.0, 1.0, 0.0, 0.0, 0.0, 1.0, 0.0]),
            &[(1.0, 0.0), (2.0, 0.0), (3.0, 0.0)],
        );
        // Scaled apart by 1e8, as states in SI may be.
        close(
            &sorted(&[-1.0, 1e8, 1e-8, -3.0]),
            &[(-2.0 - 2.0_f64.sqrt(), 0.0), (-2.0 + 2.0_f64.sqrt(), 0.0)],
        );
    }
}
