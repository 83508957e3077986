//! Bogacki and Shampine's pair of orders 3 and 2; the fourth stage is the result and the next step's first.

use crate::march::tableau::{Embedded, Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "bogacki-shampine32",
    title: "Bogacki and Shampine's 3(2) pair",
    order: 3,
    stages: 3,
    citation: "P. Bogacki, L. F. Shampine, A 3(2) pair of Runge–Kutta formulas, \
Appl. Math. Lett. 2 (1989) 321–325",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope k1",
        },
        StageName {
            value: "value at the midpoint",
            slope: "slope k2",
        },
        StageName {
            value: "value at three quarters of the step",
            slope: "slope k3",
        },
        StageName {
            value: "value at the end",
            slope: "slope k4",
        },
    ],
    result_name: "value at the end",
};

pub(in crate::march) static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1), ratio(1, 2), ratio(3, 4), ratio(1, 1)],
    a: &[
        &[],
        &[ratio(1, 2)],
        &[ratio(0, 1), ratio(3, 4)],
        &[ratio(2, 9), ratio(1, 3), ratio(4, 9)],
    ],
    b: &[ratio(2, 9), ratio(1, 3), ratio(4, 9), ratio(0, 1)],
    embedded: Some(EMBEDDED),
};

pub(in crate::march) const EMBEDDED: Embedded = Embedded {
    b: &[ratio(7, 24), ratio(1, 4), ratio(1, 3), ratio(1, 8)],
    order: 2,
};
