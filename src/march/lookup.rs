//! Tabulated functions of one argument.
//!
//! Owns: interpolation between points, slopes, the rules outside. Does not own: units, words for diagnoses; a
//! refused argument gives NaN, and whoever asked says where it came from.

/// How values between points are found.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Between {
    Linear,
    /// Cubic pieces with continuous slope that are monotone wherever the points are.
    MonotoneCubic,
    /// The value of the last point at or below the argument.
    Step,
}

/// What an argument outside the points gives.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Outside {
    /// NaN.
    Refuse,
    /// The value of the nearest point.
    Hold,
}

/// Why points are no lookup; points are numbered from 0.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LookupError {
    /// Fewer than two points.
    TooFewPoints {
        points: usize,
    },
    LengthsDiffer {
        arguments: usize,
        values: usize,
    },
    NotFinite {
        point: usize,
    },
    /// The argument of this point is not above that of the one before.
    NotAscending {
        point: usize,
    },
}

/// A tabulated function y(x).
#[derive(Debug, Clone, PartialEq)]
pub struct Lookup {
    x: Vec<f64>,
    y: Vec<f64>,
    /// dy/dx at the points, for the monotone cubic only.
    slopes: Vec<f64>,
    between: Between,
    outside: Outside,
}

impl Lookup {
    /// Points (x, y) with at least two arguments, finite and ascending.
    pub fn new(
        x: Vec<f64>,
        y: Vec<f64>,
        between: Between,
        outside: Outside,
    ) -> Result<Lookup, LookupError> {
        if x.len() != y.len() {
            return Err(LookupError::LengthsDiffer {
                arguments: x.len(),
                values: y.len(),
            });
        }
        if x.len() < 2 {
            return Err(LookupError::TooFewPoints { points: x.len() });
        }
        let finite = x
            .iter()
            .zip(&y)
            .map(|(x, y)| x.is_finite() && y.is_finite());
        if let Some(point) = finite.clone().position(|finite| !finite) {
            return Err(LookupError::NotFinite { point });
        }
        if let Some(before) = x.windows(2).position(|pair| pair[1] <= pair[0]) {
            return Err(LookupError::NotAscending { point: before + 1 });
        }
        let slopes = if between == Between::MonotoneCubic {
            monotone_slopes(&x, &y)
        } else {
            Vec::new()
        };
        Ok(Lookup {
            x,
            y,
            slopes,
            between,
            outside,
        })
    }

    /// The points' arguments, at which value or slope may jump.
    pub fn knots(&self) -> &[f64] {
        &self.x
    }

    pub fn values(&self) -> &[f64] {
        &self.y
    }

    pub fn between(&self) -> Between {
        self.between
    }

    pub fn outside(&self) -> Outside {
        self.outside
    }

    /// Lowest and highest argument.
    pub fn range(&self) -> (f64, f64) {
        (self.x[0], self.x[self.x.len() - 1])
    }

    /// y at `x`; NaN for NaN, and outside the range when that is refused.
    pub fn value(&self, x: f64) -> f64 {
        let Some(i) = self.piece(x) else {
            return self.beyond(x, |lookup, point| lookup.y[point]);
        };
        let d = x - self.x[i];
        match self.between {
            Between::Step => self.y[i],
            Between::Linear => self.y[i] + d * self.chord(i),
            Between::MonotoneCubic => {
                let (_, c2, c3) = self.cubic(i);
                self.y[i] + d * (self.slopes[i] + d * (c2 + d * c3))
            }
        }
    }

    /// dy/dx at `x`; at a point that of the piece above it, at the last point that of the last piece.
    pub fn slope(&self, x: f64) -> f64 {
        let last = self.x.len() - 1;
        let piece = if x == self.x[last] {
            Some(last - 1)
        } else {
            self.piece(x)
        };
        let Some(i) = piece else {
            return self.beyond(x, |_, _| 0.0);
        };
        let d = x - self.x[i];
        match self.between {
            Between::Step => 0.0,
            Between::Linear => self.chord(i),
            Between::MonotoneCubic => {
                let (c1, c2, c3) = self.cubic(i);
                c1 + d * (2.0 * c2 + d * 3.0 * c3)
            }
        }
    }

    /// The piece [x_i, x_{i+1}) that holds `x`.
    fn piece(&self, x: f64) -> Option<usize> {
        let above = self.x.partition_point(|knot| *knot <= x);
        (above > 0 && above < self.x.len() && !x.is_nan()).then(|| above - 1)
    }

    /// Outside all pieces: the last point itself, or what lies beyond the points.
    fn beyond(&self, x: f64, held: impl Fn(&Lookup, usize) -> f64) -> f64 {
        let last = self.x.len() - 1;
        if x == self.x[last] {
            held(self, last)
        } else if x.is_nan() || self.outside == Outside::Refuse {
            f64::NAN
        } else if x < self.x[0] {
            held(self, 0)
        } else {
            held(self, last)
        }
    }

    fn chord(&self, i: usize) -> f64 {
        (self.y[i + 1] - self.y[i]) / (self.x[i + 1] - self.x[i])
    }

    /// Coefficients of (x − x_i), its square and its cube in piece `i`, from values and slopes at its ends.
    fn cubic(&self, i: usize) -> (f64, f64, f64) {
        let h = self.x[i + 1] - self.x[i];
        let chord = self.chord(i);
        let (left, right) = (self.slopes[i], self.slopes[i + 1]);
        let c2 = (3.0 * chord - 2.0 * left - right) / h;
        let c3 = (left + right - 2.0 * chord) / (h * h);
        (left, c2, c3)
    }
}

/// Slopes of the monotone cubic: F. N. Fritsch, R. E. Carlson, Monotone piecewise cubic interpolation,
/// SIAM J. Numer. Anal. 17 (1980) 238–246. Three-point differences to start with, set to zero where the points
/// turn; then in each piece the pair of slopes is drawn back to the circle of radius 3 chords (their region S2).
fn monotone_slopes(x: &[f64], y: &[f64]) -> Vec<f64> {
    let last = x.len() - 1;
    let width: Vec<f64> = x.windows(2).map(|pair| pair[1] - pair[0]).collect();
    let chord: Vec<f64> = (0..last).map(|i| (y[i + 1] - y[i]) / width[i]).collect();
    let mut slopes = vec![0.0; last + 1];
    for i in 1..last {
        if chord[i - 1] * chord[i] > 0.0 {
            slopes[i] =
                (width[i - 1] * chord[i] + width[i] * chord[i - 1]) / (width[i - 1] + width[i]);
        }
    }
    if last == 1 {
        return vec![chord[0]; 2];
    }
    slopes[0] = end_slope(width[0], width[1], chord[0], chord[1]);
    slopes[last] = end_slope(
        width[last - 1],
        width[last - 2],
        chord[last - 1],
        chord[last - 2],
    );
    for i in 0..last {
        if chord[i] == 0.0 {
            slopes[i] = 0.0;
            slopes[i + 1] = 0.0;
            continue;
        }
        let (a, b) = (slopes[i] / chord[i], slopes[i + 1] / chord[i]);
        let square = a * a + b * b;
        if square > 9.0 {
            let shrink = 3.0 / square.sqrt();
            slopes[i] = shrink * a * chord[i];
            slopes[i + 1] = shrink * b * chord[i];
        }
    }
    slopes
}

/// Three-point difference at an end, zero where its sign is not that of the end's chord.
fn end_slope(near_width: f64, far_width: f64, near: f64, far: f64) -> f64 {
    let slope = near + (near - far) * near_width / (near_width + far_width);
    if slope * near > 0.0 { slope } else { 0.0 }
}
