//! Euler's method, order 1, one stage.

use crate::march::tableau::{Tableau, ratio};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "euler",
    title: "Euler's method",
    order: 1,
    stages: 1,
    citation: "L. Euler, Institutionum calculi integralis, vol. 1, St Petersburg, 1768, \
               sect. 2, ch. 7",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[StageName {
        value: "value at the start",
        slope: "slope at the start",
    }],
    result_name: "value at the end",
};

static TABLEAU: Tableau = Tableau {
    radicand: 1,
    c: &[ratio(0, 1)],
    a: &[&[]],
    b: &[ratio(1, 1)],
    embedded: None,
};
