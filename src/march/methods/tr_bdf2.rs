//! TR-BDF2: trapezoidal rule to γ = 2 − √2 of the step, then the second backward differentiation formula;
//! order 2, two implicit stages; L-stable. The embedded weights are of order 3.

use crate::march::tableau::{Embedded, Tableau, ratio, surd};
use crate::march::{Method, Scheme, StageName};

pub static METHOD: Method = Method {
    name: "tr-bdf2",
    title: "TR-BDF2",
    order: 2,
    stages: 3,
    citation: "R. E. Bank, W. M. Coughran, W. Fichtner, E. H. Grosse, D. J. Rose, R. K. Smith, \
Transient simulation of silicon devices and circuits, \
IEEE Trans. Electron Devices 32 (1985) 1992–2007; in the form of M. E. Hosea, \
L. F. Shampine, Analysis and implementation of TR-BDF2, \
Appl. Numer. Math. 20 (1996) 21–37",
    scheme: Scheme::RungeKutta(&TABLEAU),
    stage_names: &[
        StageName {
            value: "value at the start",
            slope: "slope at the start",
        },
        StageName {
            value: "value at 2 − √2 of the step",
            slope: "slope there",
        },
        StageName {
            value: "value at the end",
            slope: "slope at the end",
        },
    ],
    result_name: "value at the end",
};

pub(in crate::march) static TABLEAU: Tableau = Tableau {
    radicand: 2,
    c: &[ratio(0, 1), surd((2, 1), (-1, 1)), ratio(1, 1)],
    a: &[
        &[],
        &[surd((1, 1), (-1, 2)), surd((1, 1), (-1, 2))],
        &[
            surd((0, 1), (1, 4)),
            surd((0, 1), (1, 4)),
            surd((1, 1), (-1, 2)),
        ],
    ],
    b: &[
        surd((0, 1), (1, 4)),
        surd((0, 1), (1, 4)),
        surd((1, 1), (-1, 2)),
    ],
    embedded: Some(EMBEDDED),
};

pub(in crate::march) const EMBEDDED: Embedded = Embedded {
    b: &[
        surd((1, 3), (-1, 12)),
        surd((1, 3), (1, 4)),
        surd((1, 3), (-1, 6)),
    ],
    order: 3,
};
