//! Dormand and Prince's pair of orders 5 and 4; the seventh stage is the result and the next step's first.

use crate::march::tableau::{Embedded, Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "dormand-prince54",
    title: "Dormand and Prince's 5(4) pair",
    order: 5,
    stages: 6,
    citation: "J. R. Dormand, P. J. Prince, A family of embedded Runge–Kutta formulae, \
J. Comput. Appl. Math. 6 (1980) 19–26",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope k1",
        },
        StageName {
            value: "value at 1/5 of the step",
            slope: "slope k2",
        },
        StageName {
            value: "value at 3/10 of the step",
            slope: "slope k3",
        },
        StageName {
            value: "value at 4/5 of the step",
            slope: "slope k4",
        },
        StageName {
            value: "value at 8/9 of the step",
            slope: "slope k5",
        },
        StageName {
            value: "trial value at the end",
            slope: "slope k6",
        },
        StageName {
            value: "value at the end",
            slope: "slope k7",
        },
    ],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[
        ratio(0, 1),
        ratio(1, 5),
        ratio(3, 10),
        ratio(4, 5),
        ratio(8, 9),
        ratio(1, 1),
        ratio(1, 1),
    ],
    a: &[
        &[],
        &[ratio(1, 5)],
        &[ratio(3, 40), ratio(9, 40)],
        &[ratio(44, 45), ratio(-56, 15), ratio(32, 9)],
        &[
            ratio(19372, 6561),
            ratio(-25360, 2187),
            ratio(64448, 6561),
            ratio(-212, 729),
        ],
        &[
            ratio(9017, 3168),
            ratio(-355, 33),
            ratio(46732, 5247),
            ratio(49, 176),
            ratio(-5103, 18656),
        ],
        &[
            ratio(35, 384),
            ratio(0, 1),
            ratio(500, 1113),
            ratio(125, 192),
            ratio(-2187, 6784),
            ratio(11, 84),
        ],
    ],
    b: &[
        ratio(35, 384),
        ratio(0, 1),
        ratio(500, 1113),
        ratio(125, 192),
        ratio(-2187, 6784),
        ratio(11, 84),
        ratio(0, 1),
    ],
    embedded: Some(Embedded {
        b: &[
            ratio(5179, 57600),
            ratio(0, 1),
            ratio(7571, 16695),
            ratio(393, 640),
            ratio(-92097, 339200),
            ratio(187, 2100),
            ratio(1, 40),
        ],
        order: 4,
    }),
};
