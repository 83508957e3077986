//! Observed order of every method on smooth problems, one of them nonlinear and non-autonomous.

use super::*;

/// A problem with the exact history of its first state.
struct Smooth {
    name: &'static str,
    system: fn() -> Problem,
    y0: &'static [f64],
    to: f64,
    exact: fn(f64) -> f64,
}

const SMOOTH: [Smooth; 3] = [
    Smooth {
        name: "growth with a periodic factor",
        system: || Problem::new(1, |t, y, _, out| out[0] = y[0] * float::cos(t)),
        y0: &[1.0],
        to: 6.0,
        exact: |t| float::exp(float::sin(t)),
    },
    Smooth {
        name: "nonlinear, non-autonomous",
        system: || Problem::new(1, |t, y, _, out| out[0] = -2.0 * t * y[0] * y[0]),
        y0: &[1.0],
        to: 3.0,
        exact: |t| 1.0 / (1.0 + t * t),
    },
    Smooth {
        name: "damped oscillator",
        system: || {
            Problem::new(2, |_, y, _, out| {
                out[0] = y[1];
                out[1] = -y[1] - 4.25 * y[0];
            })
        },
        y0: &[1.0, -0.5],
        to: 3.0,
        exact: |t| float::exp(-0.5 * t) * float::cos(2.0 * t),
    },
];

impl Smooth {
    /// Largest error at ten points of the history, for 20·2^level steps.
    fn error(&self, method: &Method, level: u32) -> f64 {
        let grid = Grid::uniform(0.0, self.to, self.to / 20.0).unwrap();
        let mut plan = plan(self.y0);
        plan.report_times = (1..=10).map(|k| f64::from(k) * self.to / 10.0).collect();
        let outcome = march(&mut (self.system)(), method, &grid, level, &plan);
        assert_eq!(outcome.rows.len(), 10);
        outcome
            .rows
            .iter()
            .map(|row| (row.y[0] - (self.exact)(row.t)).abs())
            .fold(0.0, f64::max)
    }
}

#[test]
fn val_observed_order_of_every_method_on_three_problems() {
    for method in METHODS {
        for problem in &SMOOTH {
            // The finest pair of levels whose errors stay well above round-off.
            let errors: Vec<f64> = (0..8)
                .map(|level| problem.error(method, level))
                .take_while(|error| *error > 3e-14)
                .collect();
            assert!(
                errors.len() >= 4,
                "{} on {}: {errors:?}",
                method.name,
                problem.name
            );
            let observed = order(errors[errors.len() - 2], errors[errors.len() - 1]);
            assert!(
                (observed - f64::from(method.order)).abs() <= 0.2,
                "{} on {}: observed order {observed}, {errors:?}",
                method.name,
                problem.name
            );
        }
    }
}

#[test]
fn val_halving_the_step_divides_heuns_error_by_about_four() {
    // Common practice, no source.
    let heun = method("heun").unwrap();
    for level in 1..5 {
        let ratio = SMOOTH[1].error(heun, level) / SMOOTH[1].error(heun, level + 1);
        assert!((3.5..4.5).contains(&ratio), "ratio {ratio}");
    }
}

/// Unequal steps: the chosen grids and segments of a problem file have them at every level.
#[test]
fn val_unequal_steps_cost_no_order() {
    let mut points = vec![0.0];
    // Steps that grow and shrink by up to 1.9, deterministic.
    let mut seed = 7_u32;
    while points[points.len() - 1] < 3.0 {
        seed = seed.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
        let last: f64 = points[points.len() - 1];
        points.push(last + 0.05 * (1.0 + 0.9 * f64::from(seed >> 8) / f64::from(1 << 24)));
    }
    let exact = |t: f64| 1.0 / (1.0 + t * t);
    let to = points[points.len() - 1];
    for method in METHODS {
        let grid = Grid::through(&points).unwrap();
        let mut errors = Vec::new();
        for level in 0..7 {
            let outcome = march(
                &mut (SMOOTH[1].system)(),
                method,
                &grid,
                level,
                &plan(&[1.0]),
            );
            let error = (outcome.y[0] - exact(to)).abs();
            if error < 1e-12 {
                break;
            }
            errors.push(error);
        }
        let halvings = errors.len() - 1;
        let observed = order(errors[halvings - 1], errors[halvings]);
        assert!(
            observed > f64::from(method.order) - 0.3,
            "{}: {errors:?}",
            method.name
        );
    }
}

#[test]
fn prop_a_quadrature_changes_no_other_bit() {
    let grid = Grid::uniform(0.0, 3.0, 0.1).unwrap();
    for method in METHODS {
        let mut bare = Problem::new(1, |t, y, _, out| out[0] = -y[0] * y[0] + t);
        let mut with = Problem::new(1, |t, y, _, out| {
            out[0] = -y[0] * y[0] + t;
            out[1] = 1e12 * y[0] * y[0];
        })
        .quadratures(1);
        let one = march(&mut bare, method, &grid, 1, &plan(&[1.0]));
        let two = march(&mut with, method, &grid, 1, &plan(&[1.0, 0.0]));
        assert_eq!(one.y[0].to_bits(), two.y[0].to_bits(), "{}", method.name);
        assert_eq!(one.rate_evaluations, two.rate_evaluations);
    }
}
