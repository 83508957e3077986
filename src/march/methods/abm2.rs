//! Adams–Bashforth–Moulton predictor–corrector pair of order 2, started by `heun`.

use crate::march::multistep::AdamsPair;
use crate::march::tableau::ratio;
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "abm2",
    title: "Adams–Bashforth–Moulton predictor–corrector method of order 2",
    order: 2,
    stages: 2,
    citation: "F. R. Moulton, New Methods in Exterior Ballistics, Univ. of Chicago Press, 1926; \
               coefficients: E. Hairer, S. P. Nørsett, G. Wanner, Solving Ordinary \
               Differential Equations I, 2nd ed., Springer 1993, section III.1",
    scheme: Scheme::Adams {
        pair: &AdamsPair {
            predictor: &[ratio(3, 2), ratio(-1, 2)],
            corrector: &[ratio(1, 2), ratio(1, 2)],
        },
        starter: &super::heun::METHOD,
    },
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
