//! Adams–Bashforth–Moulton predictor–corrector pair of order 4, started by `rk4`.

use crate::march::multistep::AdamsPair;
use crate::march::tableau::ratio;
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "abm4",
    title: "Adams–Bashforth–Moulton predictor–corrector method of order 4",
    order: 4,
    stages: 2,
    citation: "F. R. Moulton, New Methods in Exterior Ballistics, Univ. of Chicago Press, 1926; \
               coefficients: E. Hairer, S. P. Nørsett, G. Wanner, Solving Ordinary \
               Differential Equations I, 2nd ed., Springer 1993, section III.1",
    scheme: Scheme::Adams {
        pair: &AdamsPair {
            predictor: &[ratio(55, 24), ratio(-59, 24), ratio(37, 24), ratio(-9, 24)],
            corrector: &[ratio(9, 24), ratio(19, 24), ratio(-5, 24), ratio(1, 24)],
        },
        starter: &super::rk4::METHOD,
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
