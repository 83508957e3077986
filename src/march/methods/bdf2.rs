//! Second backward differentiation formula, order 2; L-stable; started by `tr-bdf2`.

use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "bdf2",
    title: "second backward differentiation formula",
    order: 2,
    stages: 1,
    citation: "C. F. Curtiss, J. O. Hirschfelder, Integration of stiff equations, \
               Proc. Natl. Acad. Sci. USA 38 (1952) 235–243; unequal steps: E. Hairer, \
               S. P. Nørsett, G. Wanner, Solving Ordinary Differential Equations I, 2nd ed., \
               Springer 1993, section III.5",
    scheme: Scheme::Bdf2 {
        starter: &super::tr_bdf2::METHOD,
    },
    stage_names: &[StageName {
        value: "value at the end",
        slope: "slope at the end",
    }],
    result_name: "value at the end",
};
