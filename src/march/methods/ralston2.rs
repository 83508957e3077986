//! Ralston's second-order method, two stages: least bound on the local error.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "ralston2",
    title: "Ralston's second-order method",
    order: 2,
    stages: 2,
    citation: "A. Ralston, Runge–Kutta methods with minimum error bounds, \
Math. Comp. 16 (1962) 431–437",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope at the start",
        },
        StageName {
            value: "value at two thirds of the step",
            slope: "slope at two thirds of the step",
        },
    ],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1), ratio(2, 3)],
    a: &[&[], &[ratio(2, 3)]],
    b: &[ratio(1, 4), ratio(3, 4)],
    embedded: None,
};
