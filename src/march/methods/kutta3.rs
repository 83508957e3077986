//! Kutta's third-order method, three stages: Simpson's rule for a rate of t alone.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "kutta3",
    title: "Kutta's third-order method",
    order: 3,
    stages: 3,
    citation: "W. Kutta, Beitrag zur näherungsweisen Integration totaler \
Differentialgleichungen, Z. Math. Phys. 46 (1901) 435–453",
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
            value: "trial value at the end",
            slope: "slope k3",
        },
    ],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1), ratio(1, 2), ratio(1, 1)],
    a: &[&[], &[ratio(1, 2)], &[ratio(-1, 1), ratio(2, 1)]],
    b: &[ratio(1, 6), ratio(2, 3), ratio(1, 6)],
    embedded: None,
};
