//! Whole calculations against values from outside: file in, results out, evidence beside them.

use std::fmt::Write;

use countermarch::evidence::Convergence;

use crate::reference::{self, Case, March, cases, head, ladder, solve};

mod hand_steps;

/// A fine march of the cases of `file`: every value inside its band, and the band itself narrow.
///
/// `largest` bounds error and band relative to the largest reference value of the same name, except for the
/// cases that are listed beside it with a bound of their own and the reason for it.
fn check(file: &str, march: March, largest: f64, exceptions: &[(&str, f64)]) {
    let mut misses = String::new();
    for case in cases(file).iter().filter(|case| !case.is_stiff()) {
        let largest = exceptions
            .iter()
            .find(|(id, _)| *id == case.id)
            .map_or(largest, |(_, bound)| *bound);
        check_case(case, march, largest, &mut misses);
    }
    assert!(misses.is_empty(), "\n{misses}");
}

fn check_case(case: &Case, march: March, largest: f64, misses: &mut String) {
    let problem = case.problem(march);
    let trial = solve(&problem.text);
    let name = |what: &str| what.split(" at ").next().unwrap_or_default().to_owned();
    for expected in &problem.expected {
        let of_same_name = problem
            .expected
            .iter()
            .filter(|other| name(&other.what) == name(&expected.what));
        let scale = of_same_name
            .map(|other| other.value.abs())
            .fold(0.0, f64::max);
        let ladder = ladder(&trial, &expected.result);
        let found = ladder.reported().unwrap_or(f64::NAN);
        let error = (found - expected.value).abs();
        let what = format!(
            "{} by {} in {} steps, {}: {found:?}, reference {:?}",
            case.id, march.method, march.steps, expected.what, expected.value
        );
        if error.is_nan() || error > largest * scale + expected.allowance {
            let _ = writeln!(
                misses,
                "{what}: error {error:e} is more than {:e}",
                largest * scale + expected.allowance
            );
        }
        match ladder.uncertainty {
            Some(band) if error <= band + expected.allowance => {}
            Some(band) => {
                let _ = writeln!(
                    misses,
                    "{what}: {}, error {error:e} outside the band {band:e}",
                    ladder.convergence.word()
                );
            }
            // What is claimed is what counts; but in a fine march little may stay unclaimed.
            None if ladder.convergence == Convergence::NotConverged
                && error <= 1e-9 * scale + expected.allowance => {}
            None => {
                let _ = writeln!(
                    misses,
                    "{what}: {}, values {:?}",
                    ladder.convergence.word(),
                    ladder.values
                );
            }
        }
    }
}

const FINE_RK4: March = March {
    method: "rk4",
    steps: 2_000,
    levels: 3,
};
const FINE_HEUN: March = March {
    method: "heun",
    steps: 4_000,
    levels: 3,
};

#[test]
fn val_engineering_cases_by_rk4() {
    // Closed forms at 40 digits; the file names the source of each.
    // h⁴λ⁴/120 a time constant at hλ = 0.05.
    check(
        "engineering.json",
        FINE_RK4,
        1e-7,
        &[("eng-bateman-four", 2e-7)],
    );
}

#[test]
fn val_engineering_cases_by_heun() {
    let exceptions = [
        // h²ω²/6 of phase a radian, over 20 rad at hω = 0.0125.
        ("eng-rlc-underdamped", 4e-4),
        // h²λ²/6 a time constant, over two of them at hλ = 0.025, of a first nuclide that has decayed to e⁻².
        ("eng-bateman-four", 3e-4),
    ];
    check("engineering.json", FINE_HEUN, 1e-4, &exceptions);
}

#[test]
fn val_nonstiff_test_set() {
    // Hull, Enright, Fellen, Sedgwick, SIAM J. Numer. Anal. 9(4), 1972; end values of ACM Algorithm 648.
    let exceptions = [
        ("detest-b1", 2e-7),
        // An orbit of eccentricity 0.7: the closest passage is short against the span.
        ("detest-d4", 1.5e-4),
        // Relaxation oscillations: y2 is small at the end, and its peak is fifty times that.
        ("detest-e2", 2e-6),
    ];
    check("detest_nonstiff.json", FINE_RK4, 1e-7, &exceptions);
}

#[test]
fn val_library_computed_cases() {
    // mpmath 1.3.0 at 34 digits, confirmed with SciPy.
    // Errors of the Lorenz system grow about as exp(0.9 t).
    check(
        "library_computed.json",
        FINE_RK4,
        1e-7,
        &[("lib-lorenz", 3e-6)],
    );
}

#[test]
fn val_standard_atmosphere() {
    // U.S. Standard Atmosphere, 1976 (NOAA-S/T 76-1562).
    check("atmosphere.json", FINE_RK4, 1e-7, &[]);
}

#[test]
fn hand_halving_the_step_quarters_heuns_error() {
    // y' = -2 t y², y(0) = 1: nonlinear and non-autonomous, y = 1/(1 + t²). Common practice, no source.
    let error = |steps: u32| {
        let mut problem = head("error of Heun's method");
        reference::state(&mut problem, "y", 1.0, "-2*t*y^2");
        reference::march(
            &mut problem,
            "t",
            (0.0, 2.0),
            2.0 / f64::from(steps),
            "heun",
            3,
        );
        reference::result(&mut problem, "y_end", "final(y)");
        ladder(&solve(&problem), "y_end")
            .reported()
            .expect("a value")
            - 0.2
    };
    for steps in [80, 160, 320] {
        let ratio = error(steps) / error(2 * steps);
        assert!(
            (3.8..4.2).contains(&ratio),
            "from {steps} steps on: {ratio}"
        );
    }
}
