//! Grids: exact points, known instants, levels, refusals.

use super::*;

fn points(grid: &Grid, level: u32) -> Vec<f64> {
    let mut points = vec![grid.from()];
    points.extend(grid.intervals(level).map(|interval| interval.end));
    points
}

#[test]
fn hand_points_are_multiplied_and_the_end_is_exact() {
    let grid = Grid::uniform(0.0, 100.0, 0.1).unwrap();
    let points = points(&grid, 0);
    assert_eq!(points.len(), 1001);
    for (k, t) in points.iter().enumerate().take(1000) {
        assert_eq!(*t, k as f64 * 0.1);
    }
    assert_eq!(points[1000], 100.0);
    assert_eq!(grid.short_last_intervals().count(), 0);
}

#[test]
fn hand_a_span_that_is_no_multiple_has_a_shorter_last_step() {
    let grid = Grid::uniform(1.0, 2.0, 0.3).unwrap();
    assert_eq!(points(&grid, 0), [1.0, 1.3, 1.6, 1.0 + 3.0 * 0.3, 2.0]);
    assert_eq!(grid.short_last_intervals().collect::<Vec<_>>(), [2.0]);
    assert_eq!(grid.steps(3), 32);
}

#[test]
fn prop_levels_nest_and_count() {
    let grid = Grid::segmented(
        0.0,
        &[
            SegmentSpec { to: 1.0, step: 0.1 },
            SegmentSpec { to: 7.0, step: 0.7 },
        ],
    )
    .unwrap()
    .with_known(&[0.25, 0.3, 0.30000000000000004, 3.1, 3.2, 99.0, -1.0]);
    for level in 0..5 {
        let coarse = points(&grid, level);
        let fine = points(&grid, level + 1);
        assert_eq!(coarse.len() as u64, grid.steps(level) + 1);
        assert_eq!(fine.iter().step_by(2).copied().collect::<Vec<_>>(), coarse);
        assert!(fine.windows(2).all(|pair| pair[0] < pair[1]));
        for known in [0.25, 0.3, 3.1, 3.2] {
            assert_eq!(coarse.iter().filter(|t| **t == known).count(), 1, "{known}");
        }
    }
    let flagged: Vec<f64> = grid
        .intervals(0)
        .filter(|interval| interval.known_start)
        .map(|interval| interval.start)
        .collect();
    assert_eq!(flagged, [0.25, 0.3, 3.1, 3.2]);
    assert_eq!(
        grid.intervals(2).filter(|interval| interval.last).count(),
        1
    );
}

#[test]
fn hand_backwards_grids_mirror_forward_ones() {
    let grid = Grid::uniform(2.0, -1.0, 0.5).unwrap().with_known(&[0.25]);
    let expected = [2.0, 1.5, 1.0, 0.5, 0.25, 0.0, -0.5, -1.0];
    assert_eq!(points(&grid, 0), expected);
}

#[test]
fn hand_known_ends_are_flagged_and_stay_exact() {
    let grid = Grid::uniform(0.0, 1.0, 0.5)
        .unwrap()
        .with_known(&[0.0, 1.0 - 1e-12]);
    assert!(grid.known_start());
    let intervals: Vec<Interval> = grid.intervals(0).collect();
    assert_eq!(intervals.len(), 2);
    assert!(intervals[0].known_start && intervals[1].known_end && intervals[1].last);
    assert_eq!(intervals[1].end, 1.0);
}

#[test]
fn hand_refusals_are_values() {
    let uniform = Grid::uniform;
    assert_eq!(uniform(0.0, 0.0, 1.0), Err(GridError::EmptySpan));
    assert_eq!(uniform(0.0, f64::NAN, 1.0), Err(GridError::NotFinite));
    assert_eq!(
        uniform(0.0, 1.0, 0.0),
        Err(GridError::StepNotPositive { segment: 0 })
    );
    assert_eq!(
        uniform(0.0, 1.0, -0.1),
        Err(GridError::StepNotPositive { segment: 0 })
    );
    assert_eq!(
        uniform(0.0, 1.0, 1.5),
        Err(GridError::StepLongerThanSpan { segment: 0 })
    );
    assert!(matches!(
        uniform(0.0, 1.0, 1e-12),
        Err(GridError::TooManySteps { .. })
    ));
    let turned = [
        SegmentSpec { to: 1.0, step: 0.1 },
        SegmentSpec { to: 0.5, step: 0.1 },
    ];
    assert!(Grid::segmented(0.0, &turned).is_err());
    let grid = uniform(0.0, 1.0, 1e-8).unwrap();
    let mut system = Problem::new(1, |_, _, _, out| out[0] = 0.0);
    let stop = march(
        &mut system,
        method("euler").unwrap(),
        &grid,
        8,
        &plan(&[0.0]),
    )
    .stop;
    assert!(matches!(stop.reason, StopReason::TooManySteps { .. }));
}

#[test]
fn hand_no_drift_of_time_over_many_steps() {
    // y' = 1 with y(0) = 0 reproduces the number of steps; t itself must be exact.
    let grid = Grid::uniform(0.0, 10_000.0, 0.1).unwrap();
    let mut system = Problem::new(1, |t, _, _, out| out[0] = t)
        .observable(|t, _, _| t, |_, _, _| 1.0)
        .condition(|t, _| t > 9_999.95);
    let mut plan = plan(&[0.0]);
    plan.events = vec![event(0, Action::Note)];
    plan.probes = vec![
        Probe::Final(0),
        Probe::TimeOf {
            event: 0,
            last: false,
        },
    ];
    let outcome = march(&mut system, method("euler").unwrap(), &grid, 0, &plan);
    assert_eq!(outcome.steps, 100_000);
    assert_eq!(outcome.probes[0], Some(10_000.0));
    assert_close(outcome.probes[1].unwrap(), 9_999.95, 4e-12);
}
