//! Implicit and repeated-corrector methods: stiff problems, failures, residuals, coefficients.

use super::*;
use crate::march::multistep::adams_weights;

/// Prothero–Robinson: y' = λ(y − cos t) − sin t, y = cos t, λ = −10⁶ (Hairer & Wanner II, IV.15).
#[test]
fn val_a_very_stiff_problem_is_followed_at_the_slow_scale() {
    for (name, tolerance) in [
        ("backward euler", 1e-6),
        ("tr-bdf2", 1e-6),
        ("bdf2", 1e-6),
        ("radau5", 1e-8),
    ] {
        let mut system = Problem::new(1, |t, y, _, out| {
            out[0] = -1e6 * (y[0] - float::cos(t)) - float::sin(t);
        });
        let grid = Grid::uniform(0.0, 2.0, 0.1).unwrap();
        let outcome = march(&mut system, method(name).unwrap(), &grid, 0, &plan(&[1.0]));
        assert_eq!(outcome.stop.reason, StopReason::EndOfSpan, "{name}");
        assert_close(outcome.y[0], float::cos(2.0), tolerance);
    }
}

#[test]
fn hand_implicit_steps_in_exact_fractions() {
    // y' = −2y, y(0) = 1, h = 1/2, z = −1: 1/(1 − z) = 1/2; (1 + z/2)/(1 − z/2) = 1/3; Radau (3.20): 39/106.
    let step = |name: &str| {
        let mut system = Problem::new(1, |_, y, _, out| out[0] = -2.0 * y[0]);
        let grid = Grid::uniform(0.0, 0.5, 0.5).unwrap();
        march(&mut system, method(name).unwrap(), &grid, 0, &plan(&[1.0])).y[0]
    };
    assert_close(step("backward euler"), 0.5, 1e-15);
    assert_close(step("trapezoidal"), 1.0 / 3.0, 1e-15);
    assert_close(step("heun iterated"), 1.0 / 3.0, 1e-12);
    assert_close(step("radau5"), 39.0 / 106.0, 1e-15);
    // A quadratic: y' = −y², backward Euler with h = 2: 2 Y² + Y − 1 = 0, Y = 1/2.
    let mut system = Problem::new(1, |_, y, _, out| out[0] = -y[0] * y[0]);
    let grid = Grid::uniform(0.0, 2.0, 2.0).unwrap();
    let outcome = march(
        &mut system,
        method("backward euler").unwrap(),
        &grid,
        0,
        &plan(&[1.0]),
    );
    assert_close(outcome.y[0], 0.5, 1e-15);
}

#[test]
fn prop_printed_stages_fulfil_their_equations() {
    for method in METHODS.iter().filter(|method| method.is_implicit()) {
        let mut system = Problem::new(2, |t, y, _, out| {
            out[0] = y[1];
            out[1] = 50.0 * (1.0 - y[0] * y[0]) * y[1] - y[0] + t;
        });
        let trace = trace_step(&mut system, method, 0.0, &[2.0, 0.0], 0.01).unwrap();
        let implicit: Vec<&Stage> = trace
            .stages
            .iter()
            .filter(|stage| !stage.residual.is_empty())
            .collect();
        assert!(!implicit.is_empty(), "{}", method.name);
        for stage in implicit {
            assert!(stage.residual.iter().all(|residual| residual.abs() < 1e-14));
        }
        assert_eq!(trace.stages.last().unwrap().y, trace.result);
    }
    let heun = method("heun iterated").unwrap();
    let mut system = Problem::new(1, |_, y, _, out| out[0] = -y[0]);
    let trace = trace_step(&mut system, heun, 0.0, &[1.0], 0.5).unwrap();
    assert_eq!(trace.stages[1].value_name, "predicted value");
    assert_eq!(trace.stages[1].y, [0.5]);
    assert_eq!(trace.stages[2].y, [0.625]);
    assert!(trace.stages.len() > 10 && trace.stages[9].value_name == "corrected value");
}

#[test]
fn hand_steps_without_a_solution_are_values() {
    let grid = Grid::uniform(0.0, 10.0, 1.0).unwrap();
    // y' = 1 + y² with h = 1: Y = y + 1 + Y² has no real solution.
    let mut system = Problem::new(1, |_, y, _, out| out[0] = 1.0 + y[0] * y[0]);
    let stop = march(
        &mut system,
        method("backward euler").unwrap(),
        &grid,
        0,
        &plan(&[0.0]),
    )
    .stop;
    assert_eq!(stop.reason, StopReason::NewtonFailed { state: 0 });
    // Singular: 1 − hλ = 0.
    let mut system = Problem::new(1, |_, y, _, out| out[0] = y[0] + 1.0);
    let stop = march(
        &mut system,
        method("backward euler").unwrap(),
        &grid,
        0,
        &plan(&[1.0]),
    )
    .stop;
    assert!(matches!(
        stop.reason,
        StopReason::NewtonFailed { .. } | StopReason::NotFinite { .. }
    ));
    // The corrector does not settle for |hλ| > 2.
    let mut system = Problem::new(1, |_, y, _, out| out[0] = -5.0 * y[0]);
    let stop = march(
        &mut system,
        method("heun iterated").unwrap(),
        &grid,
        0,
        &plan(&[1.0]),
    )
    .stop;
    assert_eq!(stop.reason, StopReason::CorrectorFailed { state: 0 });
    for method in METHODS {
        let mut gone = Problem::new(1, |t, _, _, out| {
            out[0] = if t > 3.4 { f64::NAN } else { 1.0 };
        });
        let outcome = march(&mut gone, method, &grid, 0, &plan(&[0.0]));
        assert_ne!(
            outcome.stop.reason,
            StopReason::EndOfSpan,
            "{}",
            method.name
        );
        // Euler takes its slope at the start of the step, so it sees the gap one step later.
        assert!(
            (2.9..=4.0).contains(&outcome.stop.at),
            "{} {:?}",
            method.name,
            outcome.stop
        );
    }
}

/// Published coefficients (Hairer, Nørsett, Wanner I, III.1) from the general formula for unequal steps.
#[test]
fn val_adams_coefficients_for_equal_steps() {
    for name in ["abm2", "abm4"] {
        let Scheme::Adams { pair, .. } = method(name).unwrap().scheme else {
            panic!()
        };
        let k = pair.predictor.len();
        let places: Vec<f64> = (0..=k).map(|back| 1.0 - back as f64).collect();
        let mut weights = [0.0; 4];
        adams_weights(&places[1..], &mut weights);
        for (found, expected) in weights.iter().zip(pair.predictor) {
            assert_close(*found, expected.value(1), 1e-14);
        }
        adams_weights(&places[..k], &mut weights);
        for (found, expected) in weights.iter().zip(pair.corrector) {
            assert_close(*found, expected.value(1), 1e-14);
        }
    }
}

#[test]
fn prop_linear_balances_hold_to_round_off_with_every_method() {
    // a → b → c, with ∫ of the second rate as a quadrature: a + b + c = 1 and c = ∫ rate.
    for method in METHODS {
        let mut system = Problem::new(3, |t, y, _, out| {
            let (first, second) = (2.0 * y[0] * (1.0 + t), y[1] * y[1]);
            out.copy_from_slice(&[-first, first - second, second, second]);
        })
        .quadratures(1);
        let grid = Grid::segmented(
            0.0,
            &[
                SegmentSpec {
                    to: 0.5,
                    step: 0.02,
                },
                SegmentSpec { to: 2.0, step: 0.1 },
            ],
        )
        .unwrap();
        system.states = 3;
        let y = march(&mut system, method, &grid, 0, &plan(&[1.0, 0.0, 0.0, 0.0])).y;
        assert_close(y[0] + y[1] + y[2], 1.0, 1e-14);
        assert_close(y[2], y[3], 1e-14);
    }
}
