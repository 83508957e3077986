//! Floating point: the only door to transcendental functions; ordered sums; number text.
//!
//! Owns: which implementation of each function is used, so that every machine gets the same bits.
//! Does not own: units, rounding decisions of the record (which calls [`Numeral`]).
//!
//! The standard library's `sin`, `exp`, `powf` … change bits with the CPU and the C library. Those
//! of `pxfm` are correctly rounded and the same everywhere; its `atan2` and `hypot` are wrong in
//! corners, so these two come from `libm`. Never `mul_add`.

mod sum;
mod text;

pub use sum::{Sum, mean, sum};
pub(crate) use text::superscript;
pub use text::{Numeral, shortest, value_with_uncertainty};

/// Sine of an angle in radians.
pub fn sin(x: f64) -> f64 {
    pxfm::f_sin(x)
}

/// Cosine of an angle in radians.
pub fn cos(x: f64) -> f64 {
    pxfm::f_cos(x)
}

/// Tangent of an angle in radians.
pub fn tan(x: f64) -> f64 {
    pxfm::f_tan(x)
}

/// Arc sine in radians; NaN outside [−1, 1].
pub fn asin(x: f64) -> f64 {
    pxfm::f_asin(x)
}

/// Arc cosine in radians; NaN outside [−1, 1].
pub fn acos(x: f64) -> f64 {
    pxfm::f_acos(x)
}

/// Arc tangent in radians.
pub fn atan(x: f64) -> f64 {
    pxfm::f_atan(x)
}

/// Angle of the point (x, y) in radians, in (−π, π] (`libm`: pxfm's is wrong in corners).
pub fn atan2(y: f64, x: f64) -> f64 {
    libm::atan2(y, x)
}

/// Hyperbolic sine.
pub fn sinh(x: f64) -> f64 {
    pxfm::f_sinh(x)
}

/// Hyperbolic cosine.
pub fn cosh(x: f64) -> f64 {
    pxfm::f_cosh(x)
}

/// Hyperbolic tangent.
pub fn tanh(x: f64) -> f64 {
    pxfm::f_tanh(x)
}

/// The exponential function.
pub fn exp(x: f64) -> f64 {
    pxfm::f_exp(x)
}

/// Natural logarithm; −∞ at zero, NaN below.
pub fn ln(x: f64) -> f64 {
    pxfm::f_log(x)
}

/// Decimal logarithm; −∞ at zero, NaN below.
pub fn log10(x: f64) -> f64 {
    pxfm::f_log10(x)
}

/// Cube root, of negative numbers too.
pub fn cbrt(x: f64) -> f64 {
    pxfm::f_cbrt(x)
}

/// Square root, correctly rounded by IEEE 754; NaN below zero.
pub fn sqrt(x: f64) -> f64 {
    x.sqrt()
}

/// Length of the hypotenuse without overflow on the way (`libm`: pxfm's is wrong in corners).
pub fn hypot(x: f64, y: f64) -> f64 {
    libm::hypot(x, y)
}

/// Largest magnitude of an integer exponent that is computed by products.
///
/// Up to here the relative error of the products is below 16 × 2⁻⁵³ (one rounding for each factor
/// but the first); beyond, the correctly rounded power is better.
pub const LARGEST_PRODUCT_EXPONENT: i32 = 16;

/// `x` to the power `y`: an integer exponent up to 16 by products, 1/2 as a square root.
///
/// The rule depends on the value of `y` only, so a formula has the same bits whether its exponent
/// is a literal or an input.
pub fn pow(x: f64, y: f64) -> f64 {
    if y == 0.5 {
        return x.sqrt();
    }
    if y.abs() <= f64::from(LARGEST_PRODUCT_EXPONENT) && y == y.floor() {
        return powi(x, y as i32);
    }
    pxfm::f_pow(x, y)
}

/// `x` to an integer power by repeated squaring, and its reciprocal for a negative one.
///
/// A negative power whose reciprocal overflows is 0, although a subnormal number might be nearer.
pub fn powi(x: f64, exponent: i32) -> f64 {
    if exponent.unsigned_abs() > LARGEST_PRODUCT_EXPONENT.unsigned_abs() {
        return pxfm::f_pow(x, f64::from(exponent));
    }
    let mut remaining = exponent.unsigned_abs();
    let mut square = x;
    let mut product = 1.0;
    while remaining > 0 {
        if remaining % 2 == 1 {
            product *= square;
        }
        remaining /= 2;
        if remaining > 0 {
            square *= square;
        }
    }
    if exponent < 0 { 1.0 / product } else { product }
}

/// The smaller of two numbers; NaN if either is; the first if they are equal.
pub fn min(a: f64, b: f64) -> f64 {
    if a.is_nan() || b.is_nan() {
        f64::NAN
    } else if b < a {
        b
    } else {
        a
    }
}

/// The larger of two numbers; NaN if either is; the first if they are equal.
pub fn max(a: f64, b: f64) -> f64 {
    if a.is_nan() || b.is_nan() {
        f64::NAN
    } else if b > a {
        b
    } else {
        a
    }
}

/// −1, 0 or 1 by the sign of `x`; 0 for either zero; NaN for NaN.
pub fn sign(x: f64) -> f64 {
    if x > 0.0 {
        1.0
    } else if x < 0.0 {
        -1.0
    } else if x == 0.0 {
        0.0
    } else {
        f64::NAN
    }
}

/// The largest integer not above `x`.
pub fn floor(x: f64) -> f64 {
    x.floor()
}

/// The smallest integer not below `x`.
pub fn ceil(x: f64) -> f64 {
    x.ceil()
}

/// Magnitude of `x`.
pub fn abs(x: f64) -> f64 {
    x.abs()
}

#[cfg(test)]
mod tests;
