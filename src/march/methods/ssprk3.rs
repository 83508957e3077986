//! Third-order method of Shu and Osher, three stages: convex combinations of Euler steps.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "ssprk3",
    title: "strong-stability-preserving third-order method of Shu and Osher",
    order: 3,
    stages: 3,
    citation: "C.-W. Shu, S. Osher, Efficient implementation of essentially non-oscillatory \
shock-capturing schemes, J. Comput. Phys. 77 (1988) 439–471",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope k1",
        },
        StageName {
            value: "first Euler value, at the end",
            slope: "slope k2",
        },
        StageName {
            value: "averaged value at the midpoint",
            slope: "slope k3",
        },
    ],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1), ratio(1, 1), ratio(1, 2)],
    a: &[&[], &[ratio(1, 1)], &[ratio(1, 4), ratio(1, 4)]],
    b: &[ratio(1, 6), ratio(1, 6), ratio(2, 3)],
    embedded: None,
};
