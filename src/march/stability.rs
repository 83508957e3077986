//! What a method does to y' = λy in one step, as a function of z = hλ.
//!
//! Complex numbers are pairs (real, imaginary); arithmetic is by hand, so that its bits are the same everywhere.

use super::{AdamsPair, Method, Scheme, Tableau};

type Complex = (f64, f64);

/// Growth factor R(z) of one step at z = `re` + i·`im`.
///
/// For a method that needs a past: the root of its characteristic polynomial largest in magnitude. Infinite where
/// the repeated corrector does not settle (|z| ≥ 2) and at poles.
pub fn amplification(method: &Method, re: f64, im: f64) -> (f64, f64) {
    let z = (re, im);
    match method.scheme {
        Scheme::RungeKutta(tableau) => runge_kutta(tableau, z),
        Scheme::IteratedHeun => {
            if re * re + im * im >= 4.0 {
                return (f64::INFINITY, 0.0);
            }
            let half = (0.5 * re, 0.5 * im);
            divide((1.0 + half.0, half.1), (1.0 - half.0, -half.1))
        }
        Scheme::Adams { pair, .. } => adams(pair, z),
        Scheme::Bdf2 { .. } => {
            // (3/2 − z) ζ² − 2 ζ + 1/2 = 0
            let leading = (1.5 - re, -im);
            largest_root(&[divide((0.5, 0.0), leading), divide((-2.0, 0.0), leading)])
        }
    }
}

/// R = 1 + z bᵀ x with (1 − zA) x = 1; the last stage itself where that is the result.
fn runge_kutta(tableau: &Tableau, z: Complex) -> Complex {
    let stages = tableau.stages();
    let mut rows: Vec<Vec<Complex>> = (0..stages)
        .map(|i| {
            let mut row: Vec<Complex> = (0..stages)
                .map(|j| {
                    let a = tableau.entry(i, j).value(tableau.radicand);
                    (f64::from(u8::from(i == j)) - a * z.0, -a * z.1)
                })
                .collect();
            row.push((1.0, 0.0));
            row
        })
        .collect();
    for k in 0..stages {
        let pivot = (k..stages).fold(k, |best, row| {
            if size(rows[row][k]) > size(rows[best][k]) {
                row
            } else {
                best
            }
        });
        rows.swap(k, pivot);
        if size(rows[k][k]) == 0.0 {
            return (f64::INFINITY, 0.0);
        }
        let (upper, lower) = rows.split_at_mut(k + 1);
        for row in lower {
            let factor = divide(row[k], upper[k][k]);
            for (entry, above) in row.iter_mut().zip(&upper[k]).skip(k) {
                *entry = minus(*entry, times(factor, *above));
            }
        }
    }
    let mut x = vec![(0.0, 0.0); stages];
    for k in (0..stages).rev() {
        let known = (k + 1..stages).fold(rows[k][stages], |sum, j| {
            minus(sum, times(rows[k][j], x[j]))
        });
        x[k] = divide(known, rows[k][k]);
    }
    if !tableau.is_explicit() {
        return x[stages - 1];
    }
    let sum = tableau
        .b
        .iter()
        .zip(&x)
        .fold((0.0, 0.0), |sum: Complex, (b, x)| {
            let b = b.value(tableau.radicand);
            (sum.0 + b * x.0, sum.1 + b * x.1)
        });
    let product = times(z, sum);
    (1.0 + product.0, product.1)
}

/// Predictor put into corrector: ζ^k = ζ^{k−1} + z (γ_0 (ζ^{k−1} + z Σ β_j ζ^{k−1−j}) + Σ γ_{j+1} ζ^{k−1−j}).
fn adams(pair: &AdamsPair, z: Complex) -> Complex {
    let k = pair.predictor.len();
    let implicit = pair.corrector[0].value(1);
    let square = times(z, z);
    let coefficients: Vec<Complex> = (0..k)
        .rev()
        .map(|j| {
            let beta = implicit * pair.predictor[j].value(1);
            let gamma = pair
                .corrector
                .get(j + 1)
                .map_or(0.0, |gamma| gamma.value(1));
            let now = f64::from(u8::from(j == 0));
            let first = now * implicit + gamma;
            (
                -(now + first * z.0 + beta * square.0),
                -(first * z.1 + beta * square.1),
            )
        })
        .collect();
    largest_root(&coefficients)
}

/// Root largest in magnitude of ζ^k + c_{k−1} ζ^{k−1} + … + c_0 (given lowest first), by Durand and Kerner's
/// simultaneous iteration (E. Durand 1960, I. Kerner, Numer. Math. 8 (1966) 290–294).
fn largest_root(coefficients: &[Complex]) -> Complex {
    let bound = coefficients.iter().map(|c| size(*c)).fold(1.0, f64::max);
    if !bound.is_finite() {
        return (f64::INFINITY, 0.0);
    }
    // Distinct starting points of the usual kind, powers of 0.4 + 0.9 i.
    let mut roots: Vec<Complex> = Vec::with_capacity(coefficients.len());
    let mut point = (1.0, 0.0);
    for _ in coefficients {
        roots.push(point);
        point = times(point, (0.4, 0.9));
    }
    for _ in 0..500 {
        let mut moved = 0.0_f64;
        for i in 0..roots.len() {
            let value = coefficients
                .iter()
                .rev()
                .fold((1.0, 0.0), |sum, c| plus(times(sum, roots[i]), *c));
            let others = (0..roots.len())
                .filter(|j| *j != i)
                .fold((1.0, 0.0), |product, j| {
                    times(product, minus(roots[i], roots[j]))
                });
            if size(others) > 0.0 {
                let change = divide(value, others);
                roots[i] = minus(roots[i], change);
                moved = moved.max(size(change));
            }
        }
        if moved <= 4.0 * f64::EPSILON * bound {
            break;
        }
    }
    roots.into_iter().fold((0.0, 0.0), |best, root| {
        if size(root) > size(best) { root } else { best }
    })
}

fn plus(a: Complex, b: Complex) -> Complex {
    (a.0 + b.0, a.1 + b.1)
}

fn minus(a: Complex, b: Complex) -> Complex {
    (a.0 - b.0, a.1 - b.1)
}

fn times(a: Complex, b: Complex) -> Complex {
    (a.0 * b.0 - a.1 * b.1, a.0 * b.1 + a.1 * b.0)
}

/// Scaled by the larger part of `b`, so that squares neither overflow nor vanish.
fn divide(a: Complex, b: Complex) -> Complex {
    let scale = b.0.abs().max(b.1.abs());
    let (p, q) = (b.0 / scale, b.1 / scale);
    let square = p * p + q * q;
    let (re, im) = times((a.0 / scale, a.1 / scale), (p, -q));
    (re / square, im / square)
}

/// Magnitude.
fn size(a: Complex) -> f64 {
    let scale = a.0.abs().max(a.1.abs());
    if scale == 0.0 || !scale.is_finite() {
        return scale;
    }
    let (p, q) = (a.0 / scale, a.1 / scale);
    scale * (p * p + q * q).sqrt()
}
