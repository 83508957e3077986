//! Grids chosen by an embedded estimate.

use super::*;

fn logistic() -> Problem {
    Problem::new(1, |_, y, _, out| out[0] = y[0] * (1.0 - y[0]))
}

fn choose(name: &str, tolerance: f64) -> Choice {
    let method = method(name).unwrap();
    choose_grid(
        &mut logistic(),
        method,
        (0.0, 20.0),
        &[7.3],
        tolerance,
        &plan(&[0.01]),
    )
    .unwrap()
}

#[test]
fn prop_a_chosen_grid_has_the_span_the_known_instants_and_bounded_growth() {
    for method in METHODS {
        let choice = choose(method.name, 1e-5);
        let points: Vec<f64> = choice
            .grid
            .intervals(0)
            .map(|interval| interval.end)
            .collect();
        assert_eq!(choice.grid.from(), 0.0);
        assert_eq!(points.last(), Some(&20.0));
        assert!(points.contains(&7.3));
        assert_eq!(choice.grid.steps(0), points.len() as u64);
        let steps: Vec<f64> = choice
            .grid
            .intervals(0)
            .map(|interval| interval.end - interval.start)
            .collect();
        for pair in steps.windows(2) {
            assert!(
                pair[1] <= 2.0 * pair[0] * (1.0 + 1e-9),
                "{} {pair:?}",
                method.name
            );
        }
        assert!(
            points.len() >= 20 && points.len() < 2000,
            "{} {}",
            method.name,
            points.len()
        );
    }
    assert!(choose("heun", 1e-5).pair.starts_with("Bogacki"));
    assert!(choose("dormand-prince54", 1e-5).pair.starts_with("Dormand"));
    assert!(choose("radau5", 1e-5).pair.starts_with("TR-BDF2"));
}

/// The number of steps goes with tolerance^(−1/3) for an estimate of order 2, ^(−1/5) for one of order 4.
#[test]
fn prop_the_number_of_steps_goes_with_the_root_of_the_tolerance() {
    for (name, power) in [("heun", 3.0), ("dormand-prince54", 5.0), ("tr-bdf2", 3.0)] {
        let few = choose(name, 1e-8).grid.steps(0) as f64;
        let many = choose(name, 1e-11).grid.steps(0) as f64;
        let expected = float::pow(1000.0, 1.0 / power);
        assert!(
            (many / few / expected - 1.0).abs() < 0.15,
            "{name}: {few} {many}"
        );
    }
}

#[test]
fn val_the_error_on_a_chosen_grid_is_of_the_tolerances_size_and_halves_at_the_order() {
    let exact = 1.0 / (1.0 + 99.0 * float::exp(-20.0));
    for method in METHODS {
        let choice = choose(method.name, 1e-6);
        // At mid-rise, where the error is not damped away.
        let mut plan = plan(&[0.01]);
        plan.report_times = vec![4.0];
        let middle = 1.0 / (1.0 + 99.0 * float::exp(-4.0));
        let mut errors = Vec::new();
        for level in 0..5 {
            let outcome = march(&mut logistic(), method, &choice.grid, level, &plan);
            assert_close(outcome.y[0], exact, 2e-3);
            errors.push((outcome.rows[0].y[0] - middle).abs());
        }
        if errors[4] < 1e-13 {
            continue;
        }
        let observed = order(errors[3], errors[4]);
        assert!(
            (observed - f64::from(method.order)).abs() < 0.3,
            "{}: {errors:?}",
            method.name
        );
        if method.order >= 3 {
            assert!(errors[0] < 1e-4, "{}: {errors:?}", method.name);
        }
    }
}

/// Van der Pol's equation with μ = 1000 (Test Set for IVP Solvers, problem VDPOL, scaled to t/μ): the chosen grid
/// follows the jumps with steps that differ by orders of magnitude. (On
/// coarser grids the jump falls into a step that was chosen for TR-BDF2's jump a little earlier or later, and has no
/// solution on the branch that starts at its start: a failure, as it should be.)
#[test]
fn val_a_stiff_relaxation_oscillation_is_followed() {
    let mut system = Problem::new(2, |_, y, _, out| {
        out[0] = y[1];
        out[1] = ((1.0 - y[0] * y[0]) * y[1] - y[0]) / 1e-6;
    });
    let radau = method("radau5").unwrap();
    let plan = plan(&[2.0, 0.0]);
    let choice = choose_grid(&mut system, radau, (0.0, 2.0), &[], 1e-8, &plan).unwrap();
    let steps: Vec<f64> = choice.grid.intervals(0).map(|i| i.end - i.start).collect();
    let (short, long) = steps
        .iter()
        .fold((f64::INFINITY, 0.0_f64), |(short, long), step| {
            (short.min(*step), long.max(*step))
        });
    assert!(
        long / short > 1e4 && steps.len() < 20_000,
        "{} steps",
        steps.len()
    );
    let outcome = march(&mut system, radau, &choice.grid, 0, &plan);
    assert_eq!(outcome.stop.reason, StopReason::EndOfSpan);
    assert_close(outcome.y[0], 1.706_167_732_170_469, 1e-8);
    assert_close(outcome.y[1], -0.892_809_701_024_8, 1e-8);
}

#[test]
fn hand_events_stops_and_backwards_marches_are_chosen_for() {
    // A relay: the steps follow the switching; the switches are put back.
    let relay = || {
        Problem::new(1, |_, y, s, out| out[0] = (10.0 * s[0] - y[0]) / 3.0)
            .with_switches(&[1.0])
            .condition(|_, y| y[0] > 6.0)
            .condition(|_, y| y[0] < 4.0)
            .assign(0, |_, _, s| s[0] = 0.0)
            .assign(1, |_, _, s| s[0] = 1.0)
    };
    let mut events = plan(&[0.0]);
    events.events = vec![event(0, Action::Set), event(1, Action::Set)];
    let heun = method("heun").unwrap();
    let mut system = relay();
    let choice = choose_grid(&mut system, heun, (0.0, 8.0), &[], 1e-7, &events).unwrap();
    assert_eq!(system.switches(), [1.0]);
    let outcome = march(&mut system, heun, &choice.grid, 0, &events);
    assert_eq!(outcome.event_counts, [3, 2]);
    // A stop: the grid leads on to the end of the span.
    events.events = vec![event(0, Action::Stop)];
    let stopped = choose_grid(&mut relay(), heun, (0.0, 8.0), &[], 1e-7, &events).unwrap();
    assert_eq!(stopped.grid.to(), 8.0);
    let back = choose_grid(
        &mut logistic(),
        heun,
        (0.0, -5.0),
        &[-1.0],
        1e-6,
        &plan(&[0.5]),
    )
    .unwrap();
    assert!(back.grid.intervals(0).all(|i| i.end < i.start));
    let y = march(&mut logistic(), heun, &back.grid, 3, &plan(&[0.5])).y[0];
    assert_close(y, 1.0 / (1.0 + float::exp(5.0)), 1e-5);
}

#[test]
fn hand_tolerances_that_cannot_be_met_are_values() {
    let heun = method("heun").unwrap();
    let choose = |system: &mut Problem, tolerance| {
        choose_grid(system, heun, (0.0, 1.0), &[], tolerance, &plan(&[1.0]))
    };
    assert_eq!(choose(&mut logistic(), 0.0), Err(ChoiceError::Tolerance));
    assert_eq!(
        choose(&mut logistic(), f64::NAN),
        Err(ChoiceError::Tolerance)
    );
    // Blows up at t = 0.5: no step leads past it.
    let mut growth = Problem::new(1, |_, y, _, out| out[0] = y[0] * y[0] * y[0]);
    match choose(&mut growth, 1e-6) {
        Err(ChoiceError::StepTooShort { at }) => assert_close(at, 0.5, 1e-3),
        other => panic!("{other:?}"),
    }
}
