//! Backward Euler method, order 1, one implicit stage; L-stable.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "backward euler",
    title: "backward Euler method",
    order: 1,
    stages: 1,
    citation: "C. F. Curtiss, J. O. Hirschfelder, Integration of stiff equations, \
Proc. Natl. Acad. Sci. USA 38 (1952) 235–243",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[StageName {
        value: "value at the end",
        slope: "slope at the end",
    }],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(1, 1)],
    a: &[&[ratio(1, 1)]],
    b: &[ratio(1, 1)],
    embedded: None,
};
