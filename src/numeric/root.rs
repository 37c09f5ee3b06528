//! Roots of a function of one variable.

/// A root of `f` in [a, b], to within `width`, by Brent's method: inverse quadratic and secant
/// steps, bisection where they would wander. `None` when `f` has the same sign at both ends or is
/// not a number there.
pub fn brent(mut f: impl FnMut(f64) -> f64, a: f64, b: f64, width: f64) -> Option<f64> {
    let (mut a, mut b) = (a, b);
    let (mut fa, mut fb) = (f(a), f(b));
    if fa == 0.0 {
        return Some(a);
    }
    if fb == 0.0 {
        return Some(b);
    }
    if fa.is_nan() || fb.is_nan() || (fa > 0.0) == (fb > 0.0) {
        return None;
    }
    let (mut c, mut fc) = (a, fa);
    let (mut step, mut last_step) = (b - a, b - a);
    for _ in 0..200 {
        if (fb > 0.0) == (fc > 0.0) {
            (c, fc) = (a, fa);
            step = b - a;
            last_step = step;
        }
        if fc.abs() < fb.abs() {
            (a, b, c) = (b, c, b);
            (fa, fb, fc) = (fb, fc, fb);
        }
        let least = 2.0 * f64::EPSILON * b.abs() + 0.5 * width;
        let half = 0.5 * (c - b);
        if half.abs() <= least || fb == 0.0 {
            return Some(b);
        }
        if last_step.abs() >= least && fa.abs() > fb.abs() {
            let s = fb / fa;
            let (mut p, mut q) = if a == c {
                (2.0 * half * s, 1.0 - s)
            } else {
                let (q, r) = (fa / fc, fb / fc);
                (s * (2.0 * half * q * (q - r) - (b - a) * (r - 1.0)), (q - 1.0) * (r - 1.0) * (s - 1.0))
            };
            if p > 0.0 {
                q = -q;
            }
            p = p.abs();
            if 2.0 * p < (3.0 * half * q - (least * q).abs()).min((last_step * q).abs()) {
                last_step = step;
                step = p / q;
            } else {
                (step, last_step) = (half, half);
            }
        } else {
            (step, last_step) = (half, half);
        }
        (a, fa) = (b, fb);
        b += if step.abs() > least { step } else { least.copysign(half) };
        fb = f(b);
    }
    Some(b)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn finds_roots_steep_and_flat() {
        let cube = brent(|x| x * x * x - 2.0, 0.0, 2.0, 1e-14).expect("a change of sign");
        assert_close!(cube, 2f64.cbrt(), 1e-13, "cube root");
        let flat = brent(|x: f64| (x - 0.3).powi(9), -1.0, 2.0, 1e-12).expect("a change of sign");
        assert_close!(flat, 0.3, 1e-2, "ninefold root");
    }

    #[test]
    fn says_when_there_is_no_bracket() {
        assert_eq!(brent(|x| x * x + 1.0, -1.0, 1.0, 1e-9), None);
        assert_eq!(brent(|_| f64::NAN, -1.0, 1.0, 1e-9), None);
    }
}
