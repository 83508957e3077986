//! Figures read off a march, against closed forms.

use super::*;

/// x = sin t, observed with its slope cos t.
fn sine() -> Problem {
    Problem::new(2, |_, y, _, out| {
        out[0] = y[1];
        out[1] = -y[0];
    })
    .observe_state(0)
    .condition(|_, y| y[0] > 0.5)
}

const PI: f64 = std::f64::consts::PI;

#[test]
fn val_extremes_and_durations_in_closed_form_converge_at_the_methods_order() {
    for method in METHODS {
        let mut plan = plan(&[0.0, 1.0]);
        plan.probes = vec![
            Probe::Largest(0),
            Probe::TimeOfLargest(0),
            Probe::Smallest(0),
            Probe::TimeOfSmallest(0),
            Probe::TimeWhile(0),
            Probe::AtTime {
                observable: 0,
                t: 2.345,
            },
        ];
        let exact = [
            1.0,
            0.5 * PI,
            -1.0,
            1.5 * PI,
            2.0 * PI / 3.0,
            float::sin(2.345),
        ];
        let grid = Grid::uniform(0.0, 6.0, 0.25).unwrap();
        let errors: Vec<Vec<f64>> = (0..8)
            .map(|level| {
                let outcome = march(&mut sine(), method, &grid, level, &plan);
                let found = outcome.probes.iter().zip(exact);
                found
                    .map(|(found, exact)| (found.unwrap() - exact).abs())
                    .collect()
            })
            .collect();
        for (probe, what) in plan.probes.iter().enumerate() {
            if method.order == 1
                && matches!(what, Probe::TimeOfLargest(_) | Probe::TimeOfSmallest(_))
            {
                // Euler's step ends overshoot the stationary point by as much as the curve bends over a step,
                // so the extreme is one of them, within two steps of the exact instant.
                for (level, errors) in errors.iter().enumerate() {
                    assert!(errors[probe] < 0.5 / f64::from(1 << level), "{errors:?}");
                }
                continue;
            }
            let above: Vec<f64> = errors
                .iter()
                .map(|errors| errors[probe])
                .take_while(|error| *error > 3e-13)
                .collect();
            if errors.iter().all(|errors| errors[probe] <= 3e-13) {
                // The trapezoidal rule keeps the amplitude exactly.
                continue;
            }
            assert!(above.len() >= 3, "{} {what:?} {above:?}", method.name);
            let last = above.len() - 1;
            let observed = 0.5 * order(above[last - 2], above[last]);
            assert!(
                observed > f64::from(method.order) - 0.3,
                "{} {what:?}: {above:?}, observed order {observed}",
                method.name,
            );
        }
    }
}

#[test]
fn hand_figures_of_a_parabola_are_exact() {
    // y = t − t² over steps of 0.4: maximum 1/4 at 1/2, inside a step.
    let mut system = Problem::new(1, |t, _, _, out| out[0] = 1.0 - 2.0 * t)
        .quadratures(0)
        .observe_state(0)
        .observable(|t, _, _| 3.0 - t, |_, _, _| -1.0);
    let mut plan = plan(&[0.0]);
    plan.probes = vec![
        Probe::Largest(0),
        Probe::TimeOfLargest(0),
        Probe::Smallest(0),
        Probe::TimeOfSmallest(0),
        Probe::Largest(1),
        Probe::Initial(0),
        Probe::Final(0),
        Probe::AtTime {
            observable: 0,
            t: 0.5,
        },
        Probe::AtTime {
            observable: 0,
            t: 0.0,
        },
        Probe::AtTime {
            observable: 0,
            t: 1.2,
        },
        Probe::AtTime {
            observable: 0,
            t: 1.3,
        },
        Probe::AtTime {
            observable: 0,
            t: -0.1,
        },
    ];
    let grid = Grid::uniform(0.0, 1.2, 0.4).unwrap();
    let outcome = march(&mut system, method("heun").unwrap(), &grid, 0, &plan);
    let expected = [0.25, 0.5, -0.24, 1.2, 3.0, 0.0, -0.24, 0.25, 0.0, -0.24];
    for (found, expected) in outcome.probes.iter().zip(expected) {
        assert_close(found.unwrap(), expected, 1e-15);
    }
    assert_eq!(outcome.probes[10..], [None, None]);
}

#[test]
fn hand_at_a_set_values_are_the_later_and_extremes_see_both() {
    // y = t, halved when it reaches 1, at a grid point and report time.
    let mut system = Problem::new(1, |_, _, _, out| out[0] = 1.0)
        .condition(|_, y| y[0] >= 1.0)
        .assign(0, |_, y, _| y[0] = -5.0)
        .observe_state(0);
    let mut plan = plan(&[0.0]);
    plan.events = vec![event(0, Action::Set)];
    plan.probes = vec![
        Probe::Largest(0),
        Probe::Smallest(0),
        Probe::AtTime {
            observable: 0,
            t: 1.0,
        },
        Probe::AtEvent {
            observable: 0,
            event: 0,
            last: true,
        },
    ];
    plan.report = vec![0];
    plan.report_times = vec![0.0, 1.0, 2.0];
    let grid = Grid::uniform(0.0, 2.0, 0.25).unwrap();
    let outcome = march(&mut system, method("heun").unwrap(), &grid, 0, &plan);
    assert_eq!(
        outcome.probes,
        [Some(1.0), Some(-5.0), Some(-5.0), Some(-5.0)]
    );
    let rows: Vec<(f64, f64, RowKind)> = outcome
        .rows
        .iter()
        .map(|row| (row.t, row.observables[0], row.kind))
        .collect();
    let expected = [
        (0.0, 0.0, RowKind::Report),
        (1.0, 1.0, RowKind::Event),
        (1.0, -5.0, RowKind::AfterSet),
        (1.0, -5.0, RowKind::Report),
        (2.0, -4.0, RowKind::Report),
    ];
    assert_eq!(rows, expected);
}

#[test]
fn hand_marching_backwards_mirrors_marching_forwards() {
    let rk4 = method("rk4").unwrap();
    let mut forward = sine();
    // x(−t) = −sin t: the same march with time reversed and the sign of the slope changed.
    let mut backward = sine();
    let mut plan = plan(&[0.0, 1.0]);
    plan.probes = vec![
        Probe::Largest(0),
        Probe::TimeOfLargest(0),
        Probe::Smallest(0),
        Probe::TimeOfSmallest(0),
    ];
    let one = march(
        &mut forward,
        rk4,
        &Grid::uniform(0.0, 6.0, 0.1).unwrap(),
        0,
        &plan,
    );
    let two = march(
        &mut backward,
        rk4,
        &Grid::uniform(0.0, -6.0, 0.1).unwrap(),
        0,
        &plan,
    );
    assert_eq!(one.y[0], -two.y[0]);
    assert_eq!(one.y[1], two.y[1]);
    assert_eq!(one.probes[0], two.probes[2].map(|x| -x));
    assert_close(one.probes[1].unwrap(), -two.probes[3].unwrap(), 1e-14);
    let mut durations = plan.clone();
    durations.probes = vec![Probe::TimeWhile(0)];
    let back = march(
        &mut sine(),
        rk4,
        &Grid::uniform(0.0, -6.0, 0.01).unwrap(),
        0,
        &durations,
    );
    assert_close(back.probes[0].unwrap(), 2.0 * PI / 3.0, 1e-8);
}

#[test]
fn hand_integrals_are_quadratures() {
    // ∫ sin over half a wave is 2; Simpson's rule on rk4's nodes.
    let mut system = Problem::new(2, |_, y, _, out| {
        out[0] = y[1];
        out[1] = -y[0];
        out[2] = y[0];
    })
    .quadratures(1);
    system.states = 2;
    let grid = Grid::uniform(0.0, PI, PI / 50.0).unwrap();
    let outcome = march(
        &mut system,
        method("rk4").unwrap(),
        &grid,
        0,
        &plan(&[0.0, 1.0, 0.0]),
    );
    assert_close(outcome.y[2], 2.0, 1e-6);
}

#[test]
fn prop_the_observer_sees_every_step_once() {
    let mut system = sine();
    let grid = Grid::uniform(0.0, 1.0, 0.1).unwrap();
    let mut ends = vec![0.0];
    let outcome = march_observed(
        &mut system,
        method("heun").unwrap(),
        &grid,
        0,
        &plan(&[0.0, 1.0]),
        &mut |step| {
            assert_eq!(*ends.last().unwrap(), step.t);
            assert_eq!(step.slope[0], step.y[1]);
            ends.push(step.end);
        },
    );
    assert_eq!(ends.len() as u64, outcome.steps + 1);
    // Heun: one slope handed on from step to step, so two a step.
    assert_eq!(outcome.rate_evaluations, 20);
}
