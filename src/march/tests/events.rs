//! Events: instants in closed form, order through them, actions, refusals.

use super::*;

/// A mass dropped from 1 m at g = 10 m/s² that bounces with e = 1/2: exact impacts at √0.2·(1, 2, 2.5, …).
/// Free fall is exact for methods of order 2 and above, so a drag term −v/4 stands in the order test.
fn bouncing(drag: f64) -> Problem {
    Problem::new(2, move |_, y, _, out| {
        out[0] = y[1];
        out[1] = -10.0 - drag * y[1];
    })
    .condition(|_, y| y[0] < 0.0)
    .assign(0, |_, y, _| y[1] *= -0.5)
    .observe_state(0)
}

#[test]
fn hand_bounces_of_a_falling_mass() {
    let first = 0.2_f64.sqrt();
    let exact = [first, 2.0 * first, 2.5 * first, 2.75 * first];
    for method in METHODS.iter().filter(|method| method.order >= 2) {
        let grid = Grid::uniform(0.0, 1.25, 0.05).unwrap();
        let mut plan = plan(&[1.0, 0.0]);
        plan.events = vec![event(0, Action::Set)];
        plan.probes = vec![
            Probe::Largest(0),
            Probe::Smallest(0),
            Probe::CountOf(0),
            Probe::TimeOf {
                event: 0,
                last: true,
            },
        ];
        let outcome = march(&mut bouncing(0.0), method, &grid, 0, &plan);
        assert_eq!(outcome.stop.reason, StopReason::EndOfSpan);
        assert_eq!(outcome.events.len(), 4, "{}", method.name);
        for (occurrence, at) in outcome.events.iter().zip(exact) {
            assert_close(occurrence.at, at, 1e-13);
        }
        assert_eq!(outcome.probes[0], Some(1.0));
        assert_close(outcome.probes[1].unwrap(), 0.0, 1e-13);
        assert_eq!(outcome.probes[2], Some(4.0));
        assert_close(outcome.probes[3].unwrap(), exact[3], 1e-13);
        let rows: Vec<RowKind> = outcome.rows.iter().map(|row| row.kind).collect();
        assert_eq!(rows[..2], [RowKind::Event, RowKind::AfterSet]);
    }
}

/// With linear drag k the fall from rest obeys z = 1 + (g/k²)(1 − e^{−kt}) − (g/k)t; its zero by bisection.
fn first_impact_with_drag(k: f64) -> f64 {
    let z = |t: f64| 1.0 + 10.0 / (k * k) * (1.0 - float::exp(-k * t)) - 10.0 / k * t;
    let (mut low, mut high) = (0.3, 0.7);
    for _ in 0..80 {
        let middle = 0.5 * (low + high);
        if z(middle) > 0.0 {
            low = middle
        } else {
            high = middle
        }
    }
    low
}

#[test]
fn val_the_order_survives_a_bounce_and_the_switching_of_a_relay() {
    for method in METHODS {
        // Second impact after a bounce: the error at the first impact is carried through the set.
        let drag = 2.0;
        let first = first_impact_with_drag(drag);
        let speed = 0.5 * 10.0 / drag * (1.0 - float::exp(-drag * first));
        let height =
            |s: f64| (speed + 10.0 / drag) / drag * (1.0 - float::exp(-drag * s)) - 10.0 / drag * s;
        let (mut low, mut high) = (0.1, 0.6);
        for _ in 0..80 {
            let middle = 0.5 * (low + high);
            if height(middle) > 0.0 {
                low = middle
            } else {
                high = middle
            }
        }
        let second = first + low;
        let mut plan_of_bounce = plan(&[1.0, 0.0]);
        plan_of_bounce.events = vec![event(0, Action::Set)];
        // Lag of 3 s towards u = 10 (on) or 0 (off), relay on below 4 and off above 6, from 0:
        // exact instants 3 ln(10/4), then 3 ln(6/4) each way.
        let off = 3.0 * float::ln(10.0 / 4.0);
        let half_cycle = 3.0 * float::ln(6.0 / 4.0);
        let relay = || {
            Problem::new(1, |_, y, switches, out| {
                out[0] = (10.0 * switches[0] - y[0]) / 3.0
            })
            .with_switches(&[1.0])
            .condition(|_, y| y[0] > 6.0)
            .condition(|_, y| y[0] < 4.0)
            .assign(0, |_, _, switches| switches[0] = 0.0)
            .assign(1, |_, _, switches| switches[0] = 1.0)
        };
        let mut plan_of_relay = plan(&[0.0]);
        plan_of_relay.events = vec![event(0, Action::Set), event(1, Action::Set)];
        let base = if method.order >= 4 { 0.05 } else { 0.02 };
        let mut errors = Vec::new();
        for halving in 0..7 {
            let h = base / f64::from(1 << halving);
            let grid = Grid::uniform(0.0, 0.9, h).unwrap();
            let bounce = march(&mut bouncing(drag), method, &grid, 0, &plan_of_bounce);
            let grid = Grid::uniform(0.0, 8.0, 4.0 * h).unwrap();
            let lag = march(&mut relay(), method, &grid, 0, &plan_of_relay);
            assert_eq!(lag.events.len(), 5, "{}", method.name);
            errors.push([
                bounce.events[1].at - second,
                lag.events[3].at - (off + 3.0 * half_cycle),
            ]);
        }
        for case in 0..2 {
            // The place of the event within its step differs between levels, so single ratios scatter: the
            // slope over several halvings is judged, as long as errors stay above round-off.
            let above: Vec<f64> = errors
                .iter()
                .map(|error| error[case].abs())
                .take_while(|error| *error > 2e-13)
                .collect();
            let halvings = above.len() - 1;
            assert!(halvings >= 2, "{}: {errors:?}", method.name);
            let observed = order(above[0], above[halvings]) / halvings as f64;
            assert!(
                observed >= f64::from(method.order) - 0.25,
                "{} case {case}: observed order {observed}, {above:?}",
                method.name
            );
        }
    }
}

#[test]
fn hand_the_relay_switches_in_closed_form() {
    let mut system = Problem::new(1, |_, y, s, out| out[0] = (10.0 * s[0] - y[0]) / 3.0)
        .with_switches(&[1.0])
        .condition(|_, y| y[0] > 6.0)
        .condition(|_, y| y[0] < 4.0)
        .assign(0, |_, _, s| s[0] = 0.0)
        .assign(1, |_, _, s| s[0] = 1.0);
    let mut plan = plan(&[0.0]);
    plan.events = vec![event(0, Action::Set), event(1, Action::Set)];
    plan.probes = vec![Probe::TimeWhile(0), Probe::CountOf(1)];
    let grid = Grid::uniform(0.0, 8.0, 0.01).unwrap();
    let outcome = march(&mut system, method("rk4").unwrap(), &grid, 0, &plan);
    let mut at = 3.0 * float::ln(2.5);
    for (index, occurrence) in outcome.events.iter().enumerate() {
        assert_eq!(occurrence.event, index % 2);
        assert_close(occurrence.at, at, 1e-10);
        at += 3.0 * float::ln(1.5);
    }
    assert_eq!(outcome.event_counts, [3, 2]);
    assert_eq!(outcome.probes[1], Some(2.0));
    // The switches are put back, so a second march is the same to the bit.
    assert_eq!(system.switches(), [1.0]);
    assert_eq!(
        march(&mut system, method("rk4").unwrap(), &grid, 0, &plan),
        outcome
    );
}

#[test]
fn prop_a_note_never_alters_the_march() {
    let grid = Grid::uniform(0.0, 10.0, 0.5).unwrap();
    for method in METHODS {
        let rotation = || {
            Problem::new(2, |_, y, _, out| {
                out[0] = -y[1];
                out[1] = y[0];
            })
            .condition(|_, y| y[0] < 0.3)
            .condition(|t, y| y[1] > 0.1 && t > 2.2)
        };
        let bare = march(&mut rotation(), method, &grid, 0, &plan(&[1.0, 0.0]));
        let mut noted = plan(&[1.0, 0.0]);
        noted.events = vec![event(0, Action::Note), event(1, Action::Note)];
        noted.probes = vec![Probe::TimeWhile(0)];
        noted.report_times = (0..=100).map(|k| f64::from(k) * 0.1).collect();
        let outcome = march(&mut rotation(), method, &grid, 0, &noted);
        assert!(outcome.events.len() >= 2);
        assert_eq!(outcome.y, bare.y, "{}", method.name);
        assert_eq!(outcome.scale, bare.scale);
        assert_eq!(outcome.steps, bare.steps);
    }
}

#[test]
fn hand_several_events_in_one_step_come_in_order_of_time() {
    // y = t over one step of 1; conditions at 0.75, 0.25, 0.5 and one that holds on (0.6, 0.7) only.
    let mut system = Problem::new(1, |_, _, _, out| out[0] = 1.0)
        .condition(|_, y| y[0] > 0.75)
        .condition(|_, y| y[0] > 0.25)
        .condition(|_, y| y[0] > 0.3 && y[0] < 0.6);
    let mut plan = plan(&[0.0]);
    plan.events = (0..3)
        .map(|condition| event(condition, Action::Note))
        .collect();
    plan.probes = vec![Probe::TimeWhile(2)];
    let grid = Grid::uniform(0.0, 1.0, 1.0).unwrap();
    let outcome = march(&mut system, method("heun").unwrap(), &grid, 0, &plan);
    let order: Vec<usize> = outcome
        .events
        .iter()
        .map(|occurrence| occurrence.event)
        .collect();
    assert_eq!(order, [1, 2, 0]);
    for (occurrence, at) in outcome.events.iter().zip([0.25, 0.3, 0.75]) {
        assert_close(occurrence.at, at, 1e-15);
    }
    assert_close(outcome.probes[0].unwrap(), 0.3, 1e-15);
}

#[test]
fn hand_a_stop_ends_the_march_at_its_instant() {
    let mut system = Problem::new(1, |_, _, _, out| out[0] = -2.0)
        .condition(|_, y| y[0] <= 0.25)
        .observe_state(0);
    let mut plan = plan(&[1.0]);
    plan.events = vec![event(0, Action::Stop)];
    plan.probes = vec![
        Probe::Final(0),
        Probe::AtTime {
            observable: 0,
            t: 0.5,
        },
        Probe::AtTime {
            observable: 0,
            t: 0.25,
        },
        Probe::TimeOf {
            event: 0,
            last: false,
        },
    ];
    let grid = Grid::uniform(0.0, 1.0, 0.1).unwrap();
    let outcome = march(&mut system, method("heun").unwrap(), &grid, 0, &plan);
    assert_eq!(outcome.stop.reason, StopReason::Event(0));
    assert_close(outcome.stop.at, 0.375, 1e-15);
    assert_close(outcome.probes[0].unwrap(), 0.25, 1e-15);
    assert_eq!(outcome.probes[1], None);
    assert_close(outcome.probes[2].unwrap(), 0.5, 1e-15);
    assert_eq!(outcome.probes[3], Some(outcome.stop.at));
    assert_eq!(outcome.rows.last().map(|row| row.t), Some(outcome.stop.at));
}

#[test]
fn hand_conditions_true_at_the_start() {
    let system = || {
        Problem::new(1, |_, _, _, out| out[0] = 1.0)
            .condition(|_, y| y[0] < 1.0 || y[0] > 2.0)
            .assign(0, |_, y, _| y[0] += 0.5)
            .observe_state(0)
    };
    let grid = Grid::uniform(0.0, 4.0, 0.1).unwrap();
    let heun = method("heun").unwrap();
    let mut plan = plan(&[0.0]);
    plan.events = vec![event(0, Action::Note)];
    plan.events[0].at_start = None;
    let undecided = march(&mut system(), heun, &grid, 0, &plan);
    assert_eq!(undecided.stop.reason, StopReason::TrueAtStart { event: 0 });
    plan.events[0].at_start = Some(false);
    let later = march(&mut system(), heun, &grid, 0, &plan);
    assert_eq!(later.events.len(), 1);
    assert_close(later.events[0].at, 2.0, 1e-14);
    plan.events[0].at_start = Some(true);
    let both = march(&mut system(), heun, &grid, 0, &plan);
    assert_eq!(both.events.len(), 2);
    assert_eq!(both.events[0].at, 0.0);
    plan.events[0].once = true;
    assert_eq!(march(&mut system(), heun, &grid, 0, &plan).events.len(), 1);
    plan.events[0].action = Action::Set;
    plan.probes = vec![Probe::Initial(0), Probe::Smallest(0)];
    let set = march(&mut system(), heun, &grid, 0, &plan);
    assert_eq!(set.probes, [Some(0.5), Some(0.0)]);
    assert_close(set.y[0], 4.5, 1e-13);
}

#[test]
fn hand_a_set_triggers_others_at_its_instant() {
    // Event 0 at y = 0.5 adds 1; that triggers event 1, which adds 10; that triggers event 2, a stop.
    let mut system = Problem::new(1, |_, _, _, out| out[0] = 1.0)
        .condition(|_, y| y[0] > 0.5)
        .condition(|_, y| y[0] > 1.2)
        .condition(|_, y| y[0] > 11.0)
        .assign(0, |_, y, _| y[0] += 1.0)
        .assign(1, |_, y, _| y[0] += 10.0)
        .observe_state(0);
    let mut plan = plan(&[0.0]);
    plan.events = vec![
        event(0, Action::Set),
        event(1, Action::Set),
        event(2, Action::Stop),
    ];
    plan.probes = vec![Probe::AtEvent {
        observable: 0,
        event: 0,
        last: false,
    }];
    let grid = Grid::uniform(0.0, 1.0, 0.2).unwrap();
    let outcome = march(&mut system, method("heun").unwrap(), &grid, 0, &plan);
    assert_eq!(outcome.stop.reason, StopReason::Event(2));
    assert_eq!(
        outcome.events.iter().map(|o| o.event).collect::<Vec<_>>(),
        [0, 1, 2]
    );
    assert!(outcome.events.iter().all(|o| o.at == outcome.events[0].at));
    assert_close(outcome.probes[0].unwrap(), 11.5, 1e-14);
}

#[test]
fn hand_chattering_is_named_and_ends() {
    // A relay without a dead band.
    let mut system = Problem::new(1, |_, _, switches, out| out[0] = switches[0])
        .with_switches(&[1.0])
        .condition(|_, y| y[0] > 0.5)
        .condition(|_, y| y[0] < 0.5)
        .assign(0, |_, _, switches| switches[0] = -1.0)
        .assign(1, |_, _, switches| switches[0] = 1.0);
    let mut plan = plan(&[0.0]);
    plan.events = vec![event(0, Action::Set), event(1, Action::Set)];
    let grid = Grid::uniform(0.0, 1.0, 0.2).unwrap();
    let outcome = march(&mut system, method("rk4").unwrap(), &grid, 0, &plan);
    assert!(matches!(outcome.stop.reason, StopReason::Chattering { .. }));
    assert_close(outcome.stop.at, 0.5, 1e-12);
    // Two sets that trigger each other at one instant.
    let mut system = Problem::new(1, |_, _, _, out| out[0] = 1.0)
        .condition(|_, y| y[0] > 0.5)
        .condition(|_, y| y[0] < 0.2)
        .assign(0, |_, y, _| y[0] = 0.0)
        .assign(1, |_, y, _| y[0] = 1.0);
    let outcome = march(&mut system, method("rk4").unwrap(), &grid, 0, &plan);
    assert!(matches!(outcome.stop.reason, StopReason::Chattering { .. }));
    // The bouncing mass comes to rest: infinitely many impacts before 3·√0.2 = 1.34 s.
    plan.y0 = vec![1.0, 0.0];
    plan.events.truncate(1);
    let grid = Grid::uniform(0.0, 2.0, 0.2).unwrap();
    let outcome = march(&mut bouncing(0.0), method("rk4").unwrap(), &grid, 0, &plan);
    assert!(outcome.stop.at <= 2.0);
}

#[test]
fn hand_events_of_time_alone_are_exact() {
    // At known instants the event is the grid point itself, for > and >= alike, forwards and backwards.
    for known in [true, false] {
        let mut system = Problem::new(1, |_, _, _, out| out[0] = 1.0)
            .condition(|t, _| t > 0.35)
            .condition(|t, _| t >= 0.35)
            .condition(|t, _| t < 0.35);
        let mut plan = plan(&[0.0]);
        plan.events = vec![event(0, Action::Note), event(1, Action::Note)];
        let mut grid = Grid::uniform(0.0, 1.0, 0.1).unwrap();
        let mut back = Grid::uniform(1.0, 0.0, 0.1).unwrap();
        if known {
            grid = grid.with_known(&[0.35]);
            back = back.with_known(&[0.35]);
        }
        let heun = method("heun").unwrap();
        let outcome = march(&mut system, heun, &grid, 0, &plan);
        assert_eq!(outcome.events.len(), 2);
        plan.events = vec![event(2, Action::Note)];
        let backward = march(&mut system, heun, &back, 0, &plan);
        for occurrence in outcome.events.iter().chain(&backward.events) {
            if known {
                assert_eq!(occurrence.at, 0.35);
            } else {
                assert_close(occurrence.at, 0.35, 1e-15);
            }
        }
    }
}

#[test]
fn val_a_jump_in_time_at_a_known_instant_keeps_the_order() {
    // y' = −y + 3·[t > 0.35]: y = e^{−t} up to 0.35, then 3 + (y(0.35) − 3) e^{−(t − 0.35)}.
    let exact = 3.0 + (float::exp(-0.35) - 3.0) * float::exp(-0.65);
    for strict in [true, false] {
        for method in METHODS {
            let grid = Grid::uniform(0.0, 1.0, 0.1).unwrap().with_known(&[0.35]);
            let mut system = Problem::new(1, move |t, y, _, out| {
                let on = if strict { t > 0.35 } else { t >= 0.35 };
                out[0] = -y[0] + if on { 3.0 } else { 0.0 };
            });
            let mut error =
                |level| march(&mut system, method, &grid, level, &plan(&[1.0])).y[0] - exact;
            let level = if method.order >= 4 { 0 } else { 3 };
            let observed = order(error(level), error(level + 1));
            assert!(
                (observed - f64::from(method.order)).abs() < 0.25,
                "{}: {observed}",
                method.name
            );
        }
    }
}

#[test]
fn hand_leaving_a_range_stops_at_the_instant() {
    let mut system = Problem::new(1, |_, _, _, out| out[0] = 1.0);
    let mut plan = plan(&[0.0]);
    plan.ranges = vec![Some((-1.0, 0.55))];
    let grid = Grid::uniform(0.0, 1.0, 0.1).unwrap();
    let heun = method("heun").unwrap();
    let outcome = march(&mut system, heun, &grid, 0, &plan);
    assert_eq!(outcome.stop.reason, StopReason::LeftRange { state: 0 });
    assert_close(outcome.stop.at, 0.55 + 1.55e-9, 1e-14);
    plan.y0 = vec![2.0];
    let outcome = march(&mut system, heun, &grid, 0, &plan);
    assert_eq!(outcome.stop.reason, StopReason::LeftRange { state: 0 });
    assert_eq!(outcome.stop.at, 0.0);
    // Within 1e-9 of the width is inside.
    plan.y0 = vec![0.0];
    plan.ranges = vec![Some((-1.0, 1.0 - 1e-9))];
    let outcome = march(&mut system, heun, &grid, 0, &plan);
    assert_eq!(outcome.stop.reason, StopReason::EndOfSpan);
}

#[test]
fn hand_values_that_are_not_finite_stop_the_march_at_their_instant() {
    let rk4 = method("rk4").unwrap();
    let grid = Grid::uniform(0.0, 2.0, 0.1).unwrap();
    let mut gone = Problem::new(2, |t, _, _, out| {
        out[0] = 1.0;
        out[1] = if t > 0.42 { f64::NAN } else { 0.0 };
    });
    let outcome = march(&mut gone, rk4, &grid, 0, &plan(&[0.0, 0.0]));
    assert_eq!(outcome.stop.reason, StopReason::NotFinite { state: 1 });
    assert_close(outcome.stop.at, 0.42, 1e-12);
    assert!(outcome.y.iter().all(|y| y.is_finite()));
    // A stop in the part of the step that still has a value acts.
    let mut gone = Problem::new(2, |t, _, _, out| {
        out[0] = 1.0;
        out[1] = if t > 0.42 { f64::NAN } else { 0.0 };
    })
    .condition(|_, y| y[0] > 0.41);
    let mut with_stop = plan(&[0.0, 0.0]);
    with_stop.events = vec![event(0, Action::Stop)];
    let outcome = march(&mut gone, rk4, &grid, 0, &with_stop);
    assert_eq!(outcome.stop.reason, StopReason::Event(0));
    let start = march(&mut gone, rk4, &grid, 0, &plan(&[0.0, f64::INFINITY]));
    assert_eq!(start.stop.reason, StopReason::NotFinite { state: 1 });
    let mut growth = Problem::new(1, |_, y, _, out| out[0] = y[0] * y[0] * y[0]);
    let blown = march(
        &mut growth,
        rk4,
        &Grid::uniform(0.0, 9.0, 0.01).unwrap(),
        0,
        &plan(&[1.0]),
    );
    assert_eq!(blown.stop.reason, StopReason::NotFinite { state: 0 });
    assert_close(blown.stop.at, 0.5, 0.05);
}

#[test]
fn val_a_break_in_the_rate_of_a_state_is_stepped_to() {
    // y' = 1 below y = 1, 3 above: y(1) = 1, y(2) = 4, whatever the step.
    let mut system = Problem::new(1, |_, y, _, out| {
        out[0] = if y[0] > 1.0 { 3.0 } else { 1.0 }
    })
    .condition(|_, y| y[0] > 1.0);
    let grid = Grid::uniform(0.0, 2.0, 0.3).unwrap();
    let mut plan = plan(&[0.0]);
    let euler = method("euler").unwrap();
    let blind = march(&mut system, euler, &grid, 0, &plan).y[0];
    assert!((blind - 4.0).abs() > 0.1);
    plan.breaks = vec![0];
    plan.kinks = vec![0];
    let outcome = march(&mut system, euler, &grid, 0, &plan);
    assert_close(outcome.y[0], 4.0, 1e-12);
    assert!(outcome.events.is_empty());
    // A rate that pulls back to its own jump is marched through in the end, and counted.
    let mut sliding = Problem::new(1, |_, y, _, out| {
        out[0] = if y[0] > 1.0 { -1.0 } else { 1.0 }
    })
    .condition(|_, y| y[0] > 1.0);
    let outcome = march(&mut sliding, euler, &grid, 0, &plan);
    assert_eq!(outcome.stop.reason, StopReason::EndOfSpan);
    assert!(outcome.jump_steps >= 1);
    assert_close(outcome.y[0], 1.0, 0.31);
}

#[test]
fn hand_a_double_crossing_is_found_and_a_graze_is_named() {
    // z = 1 − (t − 1/2)²·4 peaks at 1 in the middle of a single step; above 0.9 for 2·√0.025.
    let parabola = |limit: f64| {
        Problem::new(1, |t, _, _, out| out[0] = -8.0 * (t - 0.5))
            .condition(move |_, y| y[0] > limit)
    };
    let grid = Grid::uniform(0.0, 1.0, 1.0).unwrap();
    let mut plan = plan(&[0.0]);
    plan.events = vec![event(0, Action::Note)];
    plan.probes = vec![Probe::TimeWhile(0)];
    for name in ["heun", "rk4", "dormand-prince54"] {
        let outcome = march(&mut parabola(0.9), method(name).unwrap(), &grid, 0, &plan);
        assert_eq!(outcome.events.len(), 1, "{name}");
        assert_close(outcome.events[0].at, 0.5 - 0.025_f64.sqrt(), 1e-14);
        assert_close(outcome.probes[0].unwrap(), 2.0 * 0.025_f64.sqrt(), 1e-14);
        assert!(outcome.grazes.is_empty());
    }
    // The classical method's first midpoint value is y + h/2·k1 = 2, far above the motion's peak of 1.
    let outcome = march(&mut parabola(1.5), method("rk4").unwrap(), &grid, 0, &plan);
    assert!(outcome.events.is_empty());
    assert_eq!(
        outcome.grazes,
        [Graze {
            condition: 0,
            at: 0.0
        }]
    );
}

/// y' = 1 + y below y = 1, 6 − 2y above: y = eᵗ − 1 up to t = ln 2, then 3 − 2 e^{−2(t − ln 2)}.
#[test]
fn val_a_held_break_keeps_the_order_of_every_method() {
    let exact = 3.0 - 2.0 * float::exp(-2.0 * (1.5 - float::ln(2.0)));
    let mut plan = plan(&[0.0]);
    plan.breaks = vec![0];
    for method in METHODS {
        let mut errors = Vec::new();
        for level in 0..7 {
            let mut system = Problem::new(1, |_, y, held, out| {
                let above = if held[0].is_nan() {
                    y[0] > 1.0
                } else {
                    held[0] == 1.0
                };
                out[0] = if above { 6.0 - 2.0 * y[0] } else { 1.0 + y[0] };
            })
            .with_switches(&[f64::NAN])
            .condition(|_, y| y[0] > 1.0);
            let grid = Grid::uniform(0.0, 1.5, 0.1).unwrap();
            let outcome = march(&mut system, method, &grid, level, &plan);
            assert!(system.switches[0].is_nan());
            let error = (outcome.y[0] - exact).abs();
            if error < 1e-13 {
                break;
            }
            errors.push(error);
        }
        let halvings = errors.len() - 1;
        assert!(halvings >= 2, "{}: {errors:?}", method.name);
        let observed = order(errors[0], errors[halvings]) / halvings as f64;
        assert!(
            observed > f64::from(method.order) - 0.3,
            "{}: observed order {observed}, {errors:?}",
            method.name
        );
    }
}
