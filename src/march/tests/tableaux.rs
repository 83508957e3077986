//! Row sums and order conditions of every registered tableau, in exact arithmetic.

use super::*;
use num_rational::Ratio;

/// Exact p + q·√r.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Exact {
    p: Ratio<i128>,
    q: Ratio<i128>,
    r: i128,
}

impl Exact {
    fn of(coefficient: Coefficient, radicand: u32) -> Exact {
        let ratio = |(n, d): (i64, i64)| Ratio::new(i128::from(n), i128::from(d));
        Exact {
            p: ratio(coefficient.rational),
            q: ratio(coefficient.surd),
            r: i128::from(radicand),
        }
    }

    fn ratio(n: i128, d: i128) -> Exact {
        Exact {
            p: Ratio::new(n, d),
            q: Ratio::new(0, 1),
            r: 1,
        }
    }

    fn plus(self, other: Exact) -> Exact {
        Exact {
            p: self.p + other.p,
            q: self.q + other.q,
            r: self.r.max(other.r),
        }
    }

    fn times(self, other: Exact) -> Exact {
        let r = self.r.max(other.r);
        Exact {
            p: self.p * other.p + self.q * other.q * r,
            q: self.p * other.q + self.q * other.p,
            r,
        }
    }

    fn is(self, n: i128, d: i128) -> bool {
        self.p == Ratio::new(n, d) && self.q == Ratio::new(0, 1)
    }
}

struct ExactTableau {
    a: Vec<Vec<Exact>>,
    c: Vec<Exact>,
}

impl ExactTableau {
    fn of(tableau: &Tableau) -> ExactTableau {
        let exact = |coefficient| Exact::of(coefficient, tableau.radicand);
        let stages = tableau.stages();
        assert_eq!(tableau.a.len(), stages);
        assert_eq!(tableau.c.len(), stages);
        ExactTableau {
            a: (0..stages)
                .map(|i| (0..stages).map(|j| exact(tableau.entry(i, j))).collect())
                .collect(),
            c: tableau.c.iter().copied().map(exact).collect(),
        }
    }

    fn apply(&self, x: &[Exact]) -> Vec<Exact> {
        self.a.iter().map(|row| dot(row, x)).collect()
    }
}

fn dot(a: &[Exact], b: &[Exact]) -> Exact {
    a.iter()
        .zip(b)
        .fold(Exact::ratio(0, 1), |sum, (a, b)| sum.plus(a.times(*b)))
}

fn product(a: &[Exact], b: &[Exact]) -> Vec<Exact> {
    a.iter().zip(b).map(|(a, b)| a.times(*b)).collect()
}

/// Elementary weights of the 17 rooted trees up to order 5 with 1/density, by order
/// (Hairer, Nørsett, Wanner, Solving Ordinary Differential Equations I, table II.2.1 and II.2.2).
fn order_of(tableau: &ExactTableau, b: &[Exact]) -> u32 {
    let c = &tableau.c;
    let one: Vec<Exact> = c.iter().map(|_| Exact::ratio(1, 1)).collect();
    let c2 = product(c, c);
    let c3 = product(&c2, c);
    let c4 = product(&c3, c);
    let ac = tableau.apply(c);
    let ac2 = tableau.apply(&c2);
    let ac3 = tableau.apply(&c3);
    let aac = tableau.apply(&ac);
    let conditions: [(u32, Vec<Exact>, i128); 17] = [
        (1, one, 1),
        (2, c.clone(), 2),
        (3, c2.clone(), 3),
        (3, ac.clone(), 6),
        (4, c3.clone(), 4),
        (4, product(c, &ac), 8),
        (4, ac2.clone(), 12),
        (4, aac.clone(), 24),
        (5, c4, 5),
        (5, product(&c2, &ac), 10),
        (5, product(c, &ac2), 15),
        (5, product(c, &aac), 30),
        (5, product(&ac, &ac), 20),
        (5, ac3, 20),
        (5, tableau.apply(&product(c, &ac)), 40),
        (5, tableau.apply(&ac2), 60),
        (5, tableau.apply(&aac), 120),
    ];
    (1..=5)
        .take_while(|order| {
            conditions
                .iter()
                .filter(|(of, ..)| of == order)
                .all(|(_, weight, density)| dot(b, weight).is(1, *density))
        })
        .last()
        .unwrap_or(0)
}

#[test]
fn val_row_sums_and_order_conditions_of_every_tableau() {
    for method in METHODS {
        let Scheme::RungeKutta(tableau) = method.scheme else {
            continue;
        };
        let exact = ExactTableau::of(tableau);
        let one: Vec<Exact> = exact.c.iter().map(|_| Exact::ratio(1, 1)).collect();
        for (stage, (sum, c)) in exact.apply(&one).iter().zip(&exact.c).enumerate() {
            assert!(
                sum.p == c.p && sum.q == c.q,
                "{} stage {stage}: row sum {sum:?}",
                method.name
            );
        }
        let weights = |b: &[Coefficient]| -> Vec<Exact> {
            b.iter().map(|b| Exact::of(*b, tableau.radicand)).collect()
        };
        assert_eq!(
            order_of(&exact, &weights(tableau.b)),
            method.order,
            "{}",
            method.name
        );
        if let Some(embedded) = tableau.embedded {
            assert_eq!(
                order_of(&exact, &weights(embedded.b)),
                embedded.order,
                "{}",
                method.name
            );
        }
        assert_eq!(
            method.stage_names.len(),
            tableau.stages(),
            "{}",
            method.name
        );
    }
}

#[test]
fn prop_registry_names_are_unique_and_found() {
    for (index, one) in METHODS.iter().enumerate() {
        assert!(std::ptr::eq(method(one.name).unwrap(), *one));
        assert!(METHODS[..index].iter().all(|other| other.name != one.name));
        assert!(!one.citation.is_empty() && one.stages > 0);
    }
    assert!(method("no such method").is_none());
}

/// Second sources of the embedded rows, as differences b − b̂. 5(4): E1 … E7 of the program DOPRI5 in Hairer,
/// Nørsett, Wanner, Solving Ordinary Differential Equations I. 3(2): the error row of the (2,3) pair in
/// L. F. Shampine, M. W. Reichelt, SIAM J. Sci. Comput. 18 (1997) 1–22.
#[test]
fn val_embedded_rows_agree_with_a_second_source() {
    let cases: [(&str, &[(i128, i128)]); 2] = [
        (
            "dormand-prince54",
            &[
                (71, 57_600),
                (0, 1),
                (-71, 16_695),
                (71, 1_920),
                (-17_253, 339_200),
                (22, 525),
                (-1, 40),
            ],
        ),
        ("bogacki-shampine32", &[(-5, 72), (1, 12), (1, 9), (-1, 8)]),
    ];
    for (name, differences) in cases {
        let Scheme::RungeKutta(tableau) = method(name).unwrap().scheme else {
            panic!()
        };
        let embedded = tableau.embedded.unwrap();
        for (index, (n, d)) in differences.iter().enumerate() {
            let minus_embedded = Exact::of(embedded.b[index], 1).times(Exact::ratio(-1, 1));
            let difference = Exact::of(tableau.b[index], 1).plus(minus_embedded);
            assert!(difference.is(*n, *d), "{name} {index}: {difference:?}");
        }
    }
    // TR-BDF2 as its first paper has it, in doubles: weights (1 − w)/3, (3w + 1)/3, d/3 with w = √2/4,
    // d = 1 − √2/2 (Hosea & Shampine 1996).
    let Scheme::RungeKutta(tableau) = method("tr-bdf2").unwrap().scheme else {
        panic!()
    };
    let w = 2.0_f64.sqrt() / 4.0;
    let d = 1.0 - 0.5 * 2.0_f64.sqrt();
    let expected = [(1.0 - w) / 3.0, (3.0 * w + 1.0) / 3.0, d / 3.0];
    for (found, expected) in tableau.embedded.unwrap().b.iter().zip(expected) {
        assert_close(found.value(2), expected, 1e-15);
    }
}

#[test]
fn prop_every_implicit_tableau_ends_on_its_last_stage() {
    for method in METHODS {
        let Scheme::RungeKutta(tableau) = method.scheme else {
            continue;
        };
        assert_eq!(tableau.is_explicit(), !method.is_implicit());
        if method.is_implicit() {
            let last = tableau.stages() - 1;
            assert_eq!(tableau.c[last].value(tableau.radicand), 1.0);
            for (j, b) in tableau.b.iter().enumerate() {
                assert_eq!(*b, tableau.entry(last, j), "{}", method.name);
            }
        }
    }
}

#[test]
fn prop_explicit_methods_take_as_many_slopes_as_they_say() {
    let grid = Grid::uniform(0.0, 10.0, 0.1).unwrap();
    for method in METHODS.iter().filter(|method| !method.is_implicit()) {
        if matches!(method.scheme, Scheme::IteratedHeun) {
            continue;
        }
        let mut system = Problem::new(1, |_, y, _, out| out[0] = -y[0]);
        let outcome = march(&mut system, method, &grid, 0, &plan(&[1.0]));
        let stages = u64::from(method.stages);
        // A method with a past takes a few steps of its starter first; a reused last slope saves the first.
        let spare = 3 * u64::from(method.starter().stages) + 1;
        let expected = 100 * stages;
        assert!(
            outcome.rate_evaluations.abs_diff(expected) <= spare,
            "{}: {} for {expected}",
            method.name,
            outcome.rate_evaluations
        );
    }
}
