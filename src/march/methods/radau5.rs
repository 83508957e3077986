//! Radau IIA method, order 5, three coupled implicit stages; L-stable.

use crate::march::tableau::{Tableau, ratio, surd};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "radau5",
    title: "Radau IIA method of order 5",
    order: 5,
    stages: 3,
    citation: "E. Hairer, G. Wanner, Solving Ordinary Differential Equations II, 2nd ed., \
Springer 1996, section IV.5, table 5.6",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "first stage value",
            slope: "first stage slope",
        },
        StageName {
            value: "second stage value",
            slope: "second stage slope",
        },
        StageName {
            value: "value at the end",
            slope: "slope at the end",
        },
    ],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 6,
    c: &[surd((2, 5), (-1, 10)), surd((2, 5), (1, 10)), ratio(1, 1)],
    a: &[
        &[
            surd((11, 45), (-7, 360)),
            surd((37, 225), (-169, 1800)),
            surd((-2, 225), (1, 75)),
        ],
        &[
            surd((37, 225), (169, 1800)),
            surd((11, 45), (7, 360)),
            surd((-2, 225), (-1, 75)),
        ],
        &[surd((4, 9), (-1, 36)), surd((4, 9), (1, 36)), ratio(1, 9)],
    ],
    b: &[surd((4, 9), (-1, 36)), surd((4, 9), (1, 36)), ratio(1, 9)],
    embedded: None,
};
