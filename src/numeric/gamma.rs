//! The digamma and trigamma functions ψ and ψ′ for positive arguments.

/// ψ(x) = d ln Γ(x)/dx, x > 0.
///
/// Recurrence up to x ≥ 10, then the asymptotic series in 1/x².
pub fn digamma(x: f64) -> f64 {
    let (mut x, mut shift) = (x, 0.0);
    while x < 10.0 {
        shift -= 1.0 / x;
        x += 1.0;
    }
    let y = 1.0 / (x * x);
    let series = y
        * (1.0 / 12.0
            - y * (1.0 / 120.0
                - y * (1.0 / 252.0
                    - y * (1.0 / 240.0 - y * (1.0 / 132.0 - y * (691.0 / 32760.0 - y / 12.0))))));
    shift + x.ln() - 0.5 / x - series
}

/// ψ′(x) = d²ln Γ(x)/dx², x > 0.
pub fn trigamma(x: f64) -> f64 {
    let (mut x, mut shift) = (x, 0.0);
    while x < 10.0 {
        shift += 1.0 / (x * x);
        x += 1.0;
    }
    let y = 1.0 / (x * x);
    let series = y
        * (1.0 / 6.0
            - y * (1.0 / 30.0
                - y * (1.0 / 42.0
                    - y * (1.0 / 30.0 - y * (5.0 / 66.0 - y * (691.0 / 2730.0 - y * 7.0 / 6.0))))));
    shift + 1.0 / x + 0.5 * y + series / x
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use std::f64::consts::PI;

    #[test]
    fn known_values() {
        let euler = 0.577_215_664_901_532_9;
        assert_close!(digamma(1.0), -euler, 1e-14, "ψ(1) = −γ");
        assert_close!(digamma(0.5), -euler - 2.0 * 2f64.ln(), 1e-14, "ψ(½) = −γ − 2 ln 2");
        assert_close!(digamma(3.0), 1.5 - euler, 1e-14, "ψ(3) = 3/2 − γ");
        assert_close!(trigamma(1.0), PI * PI / 6.0, 1e-14, "ψ′(1) = π²/6");
        assert_close!(trigamma(0.5), PI * PI / 2.0, 1e-13, "ψ′(½) = π²/2");
    }
}
