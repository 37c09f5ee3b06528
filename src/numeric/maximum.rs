//! The maximum of a function of one variable.

/// The x in [a, b] where `f` is greatest, to within `width`, by golden sections; `f` should have one
/// maximum there, otherwise one of them is found. Never evaluates outside [a, b].
pub fn golden(mut f: impl FnMut(f64) -> f64, a: f64, b: f64, width: f64) -> f64 {
    let share = 0.5 * (5f64.sqrt() - 1.0);
    let (mut a, mut b) = (a, b);
    let (mut left, mut right) = (b - share * (b - a), a + share * (b - a));
    let (mut at_left, mut at_right) = (f(left), f(right));
    while b - a > width.max(1e-14 * a.abs().max(b.abs())) {
        if at_left >= at_right {
            b = right;
            (right, at_right) = (left, at_left);
            left = b - share * (b - a);
            at_left = f(left);
        } else {
            a = left;
            (left, at_left) = (right, at_right);
            right = a + share * (b - a);
            at_right = f(right);
        }
    }
    0.5 * (a + b)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn finds_a_maximum_inside_and_at_an_end() {
        assert_close!(golden(|x| -(x - 0.7f64).powi(2), -3.0, 5.0, 1e-9), 0.7, 1e-7, "inside");
        assert_close!(golden(|x| x, 0.0, 1.0, 1e-9), 1.0, 1e-8, "at the end");
    }
}
