//! Growth factors against exact fractions, published limits and the methods themselves.

use super::*;

fn size((re, im): (f64, f64)) -> f64 {
    (re * re + im * im).sqrt()
}

fn growth(name: &str, re: f64, im: f64) -> f64 {
    size(amplification(method(name).unwrap(), re, im))
}

/// For y' = λy written in real components, one step is multiplication by R(hλ).
#[test]
fn prop_one_step_multiplies_by_the_growth_factor() {
    let points = [
        (-0.5, 0.0),
        (-1.0, 0.7),
        (0.2, -1.1),
        (0.0, 1.0),
        (-40.0, 30.0),
    ];
    for method in METHODS
        .iter()
        .filter(|method| std::ptr::eq(method.starter(), **method))
    {
        for (a, b) in points {
            if method.name == "heun iterated" && size((a, b)) > 1.3 {
                continue;
            }
            let mut system = Problem::new(2, move |_, y, _, out| {
                out[0] = a * y[0] - b * y[1];
                out[1] = b * y[0] + a * y[1];
            });
            let grid = Grid::uniform(0.0, 1.0, 1.0).unwrap();
            let y = march(&mut system, method, &grid, 0, &plan(&[1.0, 0.0])).y;
            let (re, im) = amplification(method, a, b);
            let tolerance = 1e-9 * size((re, im)).max(1.0);
            assert_close(y[0], re, tolerance);
            assert_close(y[1], im, tolerance);
        }
    }
}

/// The dominant root governs a long march of a method with a past.
#[test]
fn prop_the_dominant_root_governs_a_multistep_march() {
    for name in ["abm2", "abm4", "bdf2"] {
        for z in [-0.3, -0.8, -1.6] {
            let mut system = Problem::new(1, move |_, y, _, out| out[0] = z * y[0]);
            let grid = Grid::uniform(0.0, 60.0, 1.0).unwrap();
            let mut plan = plan(&[1.0]);
            plan.report_times = (40..=60).map(f64::from).collect();
            let rows = march(&mut system, method(name).unwrap(), &grid, 0, &plan).rows;
            let found = (rows[20].y[0] / rows[0].y[0]).abs();
            let predicted = (0..20).fold(1.0, |product, _| product * growth(name, z, 0.0));
            // A complex pair turns the phase; the magnitude still has to be of that size.
            assert!(
                (0.05..20.0).contains(&(found / predicted)),
                "{name} at {z}: {found} {predicted}"
            );
        }
    }
}

/// Real limits: 2, 2.5127, 2.7853 by the order's polynomial (reference cases, stability note).
#[test]
fn val_limits_of_stability_on_the_real_axis() {
    let limit = |name: &str| {
        let (mut low, mut high) = (0.1, 30.0);
        let mut z = low;
        while growth(name, -z, 0.0) <= 1.0 + 1e-12 && z < high {
            low = z;
            z += 0.01;
        }
        high = z;
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if growth(name, -middle, 0.0) <= 1.0 {
                low = middle
            } else {
                high = middle
            }
        }
        low
    };
    for (name, expected) in [
        ("euler", 2.0),
        ("heun", 2.0),
        ("midpoint", 2.0),
        ("ralston2", 2.0),
        ("kutta3", 2.512745),
        ("ssprk3", 2.512745),
        ("bogacki-shampine32", 2.512745),
        ("rk4", 2.785293),
        ("rk38", 2.785293),
    ] {
        assert_close(limit(name), expected, 1e-6);
    }
    // Hairer & Wanner II, figure IV.2.2 and text: the fifth-order pair reaches about 3.3.
    assert_close(limit("dormand-prince54"), 3.3, 0.05);
    // Lambert, Numerical Methods for Ordinary Differential Systems, 1991, table 4.3 (figures from memory): the
    // fourth-order pair, evaluated twice, reaches 1.25, the second-order one 2.
    assert_close(limit("abm4"), 1.25, 0.05);
    assert_close(limit("abm2"), 2.0, 0.01);
}

/// A-stable methods do not grow in the left half plane; L-stable ones forget fast modes (Hairer & Wanner II, IV.3).
#[test]
fn val_implicit_methods_are_stable_in_the_left_half_plane() {
    for method in METHODS.iter().filter(|method| method.is_implicit()) {
        for re in [0.0, -1e-3, -0.1, -1.0, -30.0, -1e4] {
            for im in [0.0, 0.3, 2.0, 5.0, 100.0, 1e5] {
                let found = growth(method.name, re, im);
                assert!(
                    found <= 1.0 + 1e-12,
                    "{} at {re} + {im} i: {found}",
                    method.name
                );
            }
        }
        // bdf2's dominant root falls like 1/√|z|.
        let fast = growth(method.name, -1e8, 0.0);
        if method.name == "trapezoidal" {
            assert_close(amplification(method, -1e8, 0.0).0, -1.0, 1e-7);
        } else {
            assert!(fast < 1e-3, "{}: {fast}", method.name);
        }
    }
    assert_eq!(growth("heun iterated", -3.0, 0.0), f64::INFINITY);
    assert_close(growth("heun iterated", 0.0, 1.0), 1.0, 1e-15);
}

/// Radau IIA of order 5 has R = P(1,3) of the exponential (Hairer & Wanner II, table IV.5.6 and (3.20)):
/// (1 + 2z/5 + z²/20)/(1 − 3z/5 + 3z²/20 − z³/60).
#[test]
fn val_radau5_is_the_pade_approximation() {
    let radau = method("radau5").unwrap();
    for z in [-10.0, -1.0, -0.1, 0.5, 2.0] {
        let expected =
            (1.0 + 0.4 * z + z * z / 20.0) / (1.0 - 0.6 * z + 0.15 * z * z - z * z * z / 60.0);
        assert_close(
            amplification(radau, z, 0.0).0,
            expected,
            1e-13 * expected.abs().max(1.0),
        );
    }
}
