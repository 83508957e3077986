//! The classical Runge–Kutta method, order 4, four stages.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "rk4",
    title: "classical fourth-order Runge–Kutta method",
    order: 4,
    stages: 4,
    citation: "W. Kutta, Beitrag zur näherungsweisen Integration totaler \
               Differentialgleichungen, Z. Math. Phys. 46 (1901) 435–453",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope k1",
        },
        StageName {
            value: "first midpoint value",
            slope: "slope k2",
        },
        StageName {
            value: "second midpoint value",
            slope: "slope k3",
        },
        StageName {
            value: "trial value at the end",
            slope: "slope k4",
        },
    ],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1), ratio(1, 2), ratio(1, 2), ratio(1, 1)],
    a: &[
        &[],
        &[ratio(1, 2)],
        &[ratio(0, 1), ratio(1, 2)],
        &[ratio(0, 1), ratio(0, 1), ratio(1, 1)],
    ],
    b: &[ratio(1, 6), ratio(1, 3), ratio(1, 3), ratio(1, 6)],
    embedded: None,
};
