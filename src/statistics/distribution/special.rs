//! Special functions, from `cdflib`. The only place that calls it.
//!
//! Only its forward functions are used: its inverses are good to some 1e-8, and give zero in far tails. Arguments
//! outside of a function's domain give NaN.

use super::Tails;

const NOT_A_NUMBER: Tails = Tails { lower: f64::NAN, upper: f64::NAN };

/// Standard normal distribution at `z`.
pub(super) fn normal(z: f64) -> Tails {
    if z.is_infinite() {
        return if z > 0.0 { Tails { lower: 1.0, upper: 0.0 } } else { Tails { lower: 0.0, upper: 1.0 } };
    }
    let (lower, upper) = cdflib::special::cumnor(z);
    Tails { lower, upper }
}

/// Regularised incomplete beta function of `a` and `b` at `x`; `y` is `1 - x`, handed over for its digits.
pub(super) fn incomplete_beta(a: f64, b: f64, x: f64, y: f64) -> Tails {
    if !(a.is_finite() && b.is_finite() && x.is_finite() && y.is_finite()) {
        return NOT_A_NUMBER;
    }
    match cdflib::special::try_beta_inc(a, b, x, y) {
        Ok((lower, upper)) => Tails { lower, upper },
        Err(_) => NOT_A_NUMBER,
    }
}

/// Regularised incomplete gamma function of `a` at `x`.
pub(super) fn incomplete_gamma(a: f64, x: f64) -> Tails {
    if x == f64::INFINITY && a.is_finite() {
        return Tails { lower: 1.0, upper: 0.0 };
    }
    match cdflib::special::try_gamma_inc(a, x) {
        Ok((lower, upper)) if x.is_finite() => Tails { lower, upper },
        _ => NOT_A_NUMBER,
    }
}

/// Logarithm of the gamma function of a positive `a`.
pub(super) fn log_gamma(a: f64) -> f64 {
    cdflib::special::gamma_log(a)
}
