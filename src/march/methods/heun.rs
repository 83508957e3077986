//! Heun's method: Euler predictor, one trapezoidal correction; order 2, two stages.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "heun",
    title: "Heun's predictor–corrector method",
    order: 2,
    stages: 2,
    citation: "K. Heun, Neue Methoden zur approximativen Integration der \
               Differentialgleichungen einer unabhängigen Veränderlichen, \
               Z. Math. Phys. 45 (1900) 23–38",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope at the start",
        },
        StageName {
            value: "predicted value",
            slope: "slope at the predicted value",
        },
    ],
    result_name: "corrected value",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1), ratio(1, 1)],
    a: &[&[], &[ratio(1, 1)]],
    b: &[ratio(1, 2), ratio(1, 2)],
    embedded: None,
};
