//! Explicit midpoint method, order 2, two stages.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "midpoint",
    title: "explicit midpoint method",
    order: 2,
    stages: 2,
    citation: "C. Runge, Ueber die numerische Auflösung von Differentialgleichungen, \
               Math. Ann. 46 (1895) 167–178",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope at the start",
        },
        StageName {
            value: "value at the midpoint",
            slope: "slope at the midpoint",
        },
    ],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1), ratio(1, 2)],
    a: &[&[], &[ratio(1, 2)]],
    b: &[ratio(0, 1), ratio(1, 1)],
    embedded: None,
};
