//! Trapezoidal rule, order 2, one explicit and one implicit stage; A-stable, R = −1 for very fast modes.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "trapezoidal",
    title: "trapezoidal rule",
    order: 2,
    stages: 2,
    citation: "J. Crank, P. Nicolson, A practical method for numerical evaluation of solutions \
of partial differential equations of the heat-conduction type, \
Proc. Cambridge Philos. Soc. 43 (1947) 50–67",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope at the start",
        },
        StageName {
            value: "value at the end",
            slope: "slope at the end",
        },
    ],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1), ratio(1, 1)],
    a: &[&[], &[ratio(1, 2), ratio(1, 2)]],
    b: &[ratio(1, 2), ratio(1, 2)],
    embedded: None,
};
