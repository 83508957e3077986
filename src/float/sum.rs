//! Compensated sums in a fixed order.
//!
//! Each addition keeps its rounding error (Knuth's two-sum, The Art of Computer Programming vol. 2,
//! §4.2.2, theorem B), and the errors are added at the end: twice the working precision, and the
//! same bits on every machine because the order is the order of the slice.

/// A running sum that carries its rounding error.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Sum {
    total: f64,
    error: f64,
}

impl Sum {
    /// Adds one term.
    pub fn add(&mut self, term: f64) {
        let total = self.total + term;
        let term_seen = total - self.total;
        self.error += (self.total - (total - term_seen)) + (term - term_seen);
        self.total = total;
    }

    /// The sum so far, rounded once; infinite or NaN as the plain sum would be.
    pub fn value(self) -> f64 {
        if self.total.is_finite() {
            self.total + self.error
        } else {
            self.total
        }
    }
}

/// Sum of the terms in their order, compensated; 0 without terms.
pub fn sum(terms: &[f64]) -> f64 {
    let mut running = Sum::default();
    for &term in terms {
        running.add(term);
    }
    running.value()
}

/// Arithmetic mean of the terms; NaN without terms.
pub fn mean(terms: &[f64]) -> f64 {
    sum(terms) / terms.len() as f64
}
