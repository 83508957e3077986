//! Lookups: points, pieces, slopes, monotony, refusals.

use super::*;

fn lookup(points: &[(f64, f64)], between: Between, outside: Outside) -> Lookup {
    let (x, y) = points.iter().copied().unzip();
    Lookup::new(x, y, between, outside).unwrap()
}

const EFFICIENCY: [(f64, f64); 3] = [(0.0, 0.0), (2.0, 8.0), (4.0, 10.0)];

#[test]
fn hand_linear_pieces_and_the_slope_at_knots() {
    let table = lookup(&EFFICIENCY, Between::Linear, Outside::Refuse);
    for (x, value, slope) in [
        (0.0, 0.0, 4.0),
        (0.5, 2.0, 4.0),
        (2.0, 8.0, 1.0),
        (3.0, 9.0, 1.0),
        (4.0, 10.0, 1.0),
    ] {
        assert_eq!(table.value(x), value);
        assert_eq!(table.slope(x), slope);
    }
    for x in [-1e-9, 4.0 + 1e-9, f64::NAN, f64::INFINITY] {
        assert!(table.value(x).is_nan() && table.slope(x).is_nan());
    }
    assert_eq!(table.range(), (0.0, 4.0));
}

#[test]
fn hand_steps_take_the_last_point_at_or_below() {
    let table = lookup(&EFFICIENCY, Between::Step, Outside::Hold);
    for (x, value) in [
        (-5.0, 0.0),
        (0.0, 0.0),
        (1.999, 0.0),
        (2.0, 8.0),
        (3.999, 8.0),
        (4.0, 10.0),
        (50.0, 10.0),
    ] {
        assert_eq!(table.value(x), value);
        assert_eq!(table.slope(x), 0.0);
    }
    assert!(table.value(f64::NAN).is_nan());
}

#[test]
fn hand_a_monotone_cubic_is_exact_for_lines_and_inner_parabolas() {
    let line: Vec<(f64, f64)> = [0.0, 1.0, 1.5, 4.0]
        .iter()
        .map(|x| (*x, 3.0 - 2.0 * x))
        .collect();
    let table = lookup(&line, Between::MonotoneCubic, Outside::Hold);
    for k in 0..=40 {
        let x = f64::from(k) * 0.1;
        assert_close(table.value(x), 3.0 - 2.0 * x, 1e-14);
        assert_close(table.slope(x), -2.0, 1e-13);
    }
    // Three-point slopes are exact for a parabola, and no slope of x² on [1, 4] reaches three chords.
    let square: Vec<(f64, f64)> = [1.0, 2.0, 2.5, 4.0].iter().map(|x| (*x, x * x)).collect();
    let table = lookup(&square, Between::MonotoneCubic, Outside::Refuse);
    for k in 0..=30 {
        let x = 1.0 + f64::from(k) * 0.1;
        assert_close(table.value(x), x * x, 1e-13);
        assert_close(table.slope(x), 2.0 * x, 1e-12);
    }
    let two = lookup(
        &[(0.0, 1.0), (2.0, 5.0)],
        Between::MonotoneCubic,
        Outside::Hold,
    );
    assert_eq!(two.value(0.5), 2.0);
    assert_eq!((two.value(-1.0), two.slope(-1.0)), (1.0, 0.0));
}

/// Fritsch & Carlson 1980, data set RPN 14 of their examples (radiochemical; figures from memory): rising
/// steeply between flat ends, where other cubics overshoot.
#[test]
fn val_a_monotone_cubic_does_not_overshoot() {
    let rpn14 = [
        (7.99, 0.0),
        (8.09, 2.76429e-5),
        (8.19, 4.37498e-2),
        (8.7, 0.169183),
        (9.2, 0.469428),
        (10.0, 0.943740),
        (12.0, 0.998636),
        (15.0, 0.999919),
        (20.0, 0.999994),
    ];
    let turning = [(0.0, 1.0), (1.0, 3.0), (1.1, 3.0), (2.0, -1.0), (5.0, 0.0)];
    for points in [&rpn14[..], &turning[..]] {
        let table = lookup(points, Between::MonotoneCubic, Outside::Refuse);
        for pair in points.windows(2) {
            let ((x0, y0), (x1, y1)) = (pair[0], pair[1]);
            let mut before = y0;
            for k in 1..=200 {
                let x = x0 + (x1 - x0) * f64::from(k) / 200.0;
                let y = table.value(x.min(x1));
                assert!((y - before) * (y1 - y0) >= -1e-14, "at {x}");
                assert!((y - y0) * (y - y1) <= 1e-14, "at {x}");
                before = y;
            }
            assert_eq!(table.value(x0), y0);
            let h = 1e-6 * (x1 - x0);
            let x = 0.3 * x0 + 0.7 * x1;
            let numerical = (table.value(x + h) - table.value(x - h)) / (2.0 * h);
            assert_close(table.slope(x), numerical, 1e-6 * (1.0 + numerical.abs()));
            // Continuous slope: just below the next point as at it.
            if x1 < table.range().1 {
                assert_close(
                    table.slope(x1 - h),
                    table.slope(x1),
                    1e-3 * (1.0 + numerical.abs()),
                );
            }
        }
    }
}

#[test]
fn hand_points_that_are_no_lookup_are_refused() {
    let make = |x: &[f64], y: &[f64]| {
        Lookup::new(x.to_vec(), y.to_vec(), Between::Linear, Outside::Hold).unwrap_err()
    };
    assert_eq!(
        make(&[1.0], &[1.0]),
        LookupError::TooFewPoints { points: 1 }
    );
    assert_eq!(
        make(&[1.0, 2.0], &[1.0]),
        LookupError::LengthsDiffer {
            arguments: 2,
            values: 1
        }
    );
    assert_eq!(
        make(&[0.0, 1.0, 1.0], &[0.0; 3]),
        LookupError::NotAscending { point: 2 }
    );
    assert_eq!(
        make(&[0.0, -1.0], &[0.0; 2]),
        LookupError::NotAscending { point: 1 }
    );
    assert_eq!(
        make(&[0.0, 1.0], &[0.0, f64::NAN]),
        LookupError::NotFinite { point: 1 }
    );
}
