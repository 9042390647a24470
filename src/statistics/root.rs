//! The root of a function between two points where it has opposite signs, without derivatives.
//!
//! Chandrupatla's method (Advances in Engineering Software 28 (1997), 145-149): inverse quadratic interpolation where
//! three points allow it, bisection where they do not. It never leaves the bracket.

/// More steps than bisection alone would take from one end of the numbers to the other.
const MOST_STEPS: usize = 2200;

/// Where `f` is zero between `low` and `high`, to `tolerance` relative to the root. `None` where `f` does not change
/// its sign between them or is not a number.
pub(super) fn root(mut f: impl FnMut(f64) -> f64, low: f64, high: f64, tolerance: f64) -> Option<f64> {
    let (mut a, mut b) = (low, high);
    let (mut at_a, mut at_b) = (f(a), f(b));
    if at_a == 0.0 {
        return Some(a);
    }
    if at_b == 0.0 {
        return Some(b);
    }
    if at_a.is_nan() || at_b.is_nan() || (at_a > 0.0) == (at_b > 0.0) {
        return None;
    }
    let mut part = 0.5;
    for _ in 0..MOST_STEPS {
        let new = a + part * (b - a);
        let at_new = f(new);
        if at_new.is_nan() {
            return None;
        }
        let (c, at_c);
        if (at_new > 0.0) == (at_a > 0.0) {
            (c, at_c) = (a, at_a);
        } else {
            (c, at_c) = (b, at_b);
            (b, at_b) = (a, at_a);
        }
        (a, at_a) = (new, at_new);
        let best = if at_a.abs() < at_b.abs() { a } else { b };
        let least = 0.5 * (tolerance * best.abs() + f64::MIN_POSITIVE) / (b - a).abs();
        if at_a == 0.0 || least >= 0.5 {
            return Some(best);
        }
        let (place, height) = ((a - b) / (c - b), (at_a - at_b) / (at_c - at_b));
        part = if height.powi(2) < place && (1.0 - height).powi(2) < 1.0 - place {
            at_a / (at_b - at_a) * at_c / (at_b - at_c)
                + (c - a) / (b - a) * at_a / (at_c - at_a) * at_b / (at_c - at_b)
        } else {
            0.5
        };
        part = if part.is_finite() { part.clamp(least, 1.0 - least) } else { 0.5 };
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_root_of_two_is_found_in_few_steps() {
        let mut calls = 0;
        let found = root(
            |x| {
                calls += 1;
                x * x - 2.0
            },
            0.0,
            2.0,
            1e-15,
        );
        assert!((found.expect("a root") - 2.0_f64.sqrt()).abs() < 1e-15);
        assert!(calls < 12, "{calls} calls");
    }

    #[test]
    fn a_flat_and_a_jumping_function_end() {
        assert!(root(|x| (x - 0.3).powi(19), 0.0, 1.0, 1e-12).is_some());
        let jump = root(|x| if x < 0.7 { f64::NEG_INFINITY } else { 1.0 }, 0.0, 1.0, 1e-12).expect("a root");
        assert!((jump - 0.7).abs() < 1e-11, "{jump}");
        assert!(root(|x| x - 1e-300, 0.0, 1.0, 1e-12).is_some());
    }

    #[test]
    fn no_change_of_sign_is_no_root() {
        assert_eq!(root(|x| x * x + 1.0, -1.0, 1.0, 1e-9), None);
        assert_eq!(root(|_| f64::NAN, -1.0, 1.0, 1e-9), None);
    }
}
