//! Kutta's 3/8 method, order 4, four stages.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "rk38",
    title: "Kutta's three-eighths method",
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
            value: "value at one third of the step",
            slope: "slope k2",
        },
        StageName {
            value: "value at two thirds of the step",
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
    c: &[ratio(0, 1), ratio(1, 3), ratio(2, 3), ratio(1, 1)],
    a: &[
        &[],
        &[ratio(1, 3)],
        &[ratio(-1, 3), ratio(1, 1)],
        &[ratio(1, 1), ratio(-1, 1), ratio(1, 1)],
    ],
    b: &[ratio(1, 8), ratio(3, 8), ratio(3, 8), ratio(1, 8)],
    embedded: None,
};
