//! Runge–Kutta coefficients as exact numbers.
//!
//! Owns: exact coefficients, their shape, what follows from them (explicit, last slope reused).
//! Order conditions are checked in exact arithmetic by the tests of every registered method.

/// Exact coefficient `rational + surd·√r`, where r is the tableau's radicand; each part is a fraction.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Coefficient {
    pub rational: (i64, i64),
    pub surd: (i64, i64),
}

impl Coefficient {
    /// Nearest double but for rounding in the one division, product and sum.
    pub fn value(&self, radicand: u32) -> f64 {
        let rational = self.rational.0 as f64 / self.rational.1 as f64;
        if self.surd.0 == 0 {
            return rational;
        }
        rational + self.surd.0 as f64 / self.surd.1 as f64 * f64::from(radicand).sqrt()
    }
}

/// The fraction n/d.
pub(super) const fn ratio(n: i64, d: i64) -> Coefficient {
    Coefficient {
        rational: (n, d),
        surd: (0, 1),
    }
}

/// The sum of the fraction `rational` and `surd`·√r.
pub(super) const fn surd(rational: (i64, i64), surd: (i64, i64)) -> Coefficient {
    Coefficient { rational, surd }
}

/// Coefficients of a Runge–Kutta method in the usual notation (c | A over b).
#[derive(Debug)]
pub struct Tableau {
    /// r of the surds √r; 1 when every coefficient is rational.
    pub radicand: u32,
    pub c: &'static [Coefficient],
    /// Rows of A; coefficients missing at the end of a row are zero.
    pub a: &'static [&'static [Coefficient]],
    pub b: &'static [Coefficient],
    pub embedded: Option<Embedded>,
}

/// Weights of a second result of lower order from the same slopes.
#[derive(Debug, Clone, Copy)]
pub struct Embedded {
    pub b: &'static [Coefficient],
    pub order: u32,
}

impl Tableau {
    pub fn stages(&self) -> usize {
        self.b.len()
    }

    /// a_ij, zero where the row is shorter.
    pub fn entry(&self, i: usize, j: usize) -> Coefficient {
        self.a[i].get(j).copied().unwrap_or(ratio(0, 1))
    }

    /// Whether each stage needs earlier stages only.
    pub fn is_explicit(&self) -> bool {
        self.a.iter().enumerate().all(|(i, row)| {
            row.iter()
                .enumerate()
                .all(|(j, a)| j < i || *a == ratio(0, 1))
        })
    }

    /// Whether the last stage is the result itself, so that its slope is the next step's first.
    pub fn last_slope_is_next_first(&self) -> bool {
        let last = self.stages() - 1;
        last > 0
            && self.c[0] == ratio(0, 1)
            && self.c[last] == ratio(1, 1)
            && self
                .b
                .iter()
                .enumerate()
                .all(|(j, b)| *b == self.entry(last, j))
    }
}
