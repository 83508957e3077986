//! Heun's method with the corrector repeated until it settles: the trapezoidal rule, order 2.
//!
//! Repeating it settles only while |h·λ| < 2; a step in which it does not is a failure, never a loose result.

use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "heun iterated",
    title: "Heun's method with the corrector repeated",
    order: 2,
    stages: 2,
    citation: "K. Heun, Neue Methoden zur approximativen Integration der \
               Differentialgleichungen einer unabhängigen Veränderlichen, \
               Z. Math. Phys. 45 (1900) 23–38",
    scheme: Scheme::IteratedHeun,
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope at the start",
        },
        StageName {
            value: "predicted value",
            slope: "slope at the predicted value",
        },
        StageName {
            value: "corrected value",
            slope: "slope at the corrected value",
        },
    ],
    result_name: "last corrected value",
};
