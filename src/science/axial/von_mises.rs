//! The von Mises distribution on the circle: density, distribution function, random angles.

use std::f64::consts::{PI, TAU};

use rand::Rng;

use crate::numeric::bessel::i0_scaled;

/// f(φ) = exp(κ cos(φ − μ))/(2π I₀(κ)), per radian.
pub fn pdf(phi: f64, mean: f64, kappa: f64) -> f64 {
    (kappa * ((phi - mean).cos() - 1.0)).exp() / (TAU * i0_scaled(kappa))
}

/// ∫ f from μ − π to φ, for φ − μ folded into [−π, π).
///
/// F = ½ + x/2π + (1/π) Σ Iⱼ(κ)/I₀(κ) sin(jx)/j, the ratios by backward recurrence.
pub fn cdf(phi: f64, mean: f64, kappa: f64) -> f64 {
    let x = (phi - mean + PI).rem_euclid(TAU) - PI;
    let terms = 30 + (10.0 * kappa.sqrt()).ceil() as usize;
    let (mut ratio, mut sum) = (0.0, 0.0);
    for j in (1..=terms).rev() {
        let order = j as f64;
        // r_j = I_j/I_{j−1} = 1/(2j/κ + r_{j+1}); the sum is nested in the same order.
        ratio = kappa / (2.0 * order + kappa * ratio);
        sum = ratio * ((order * x).sin() / order + sum);
    }
    (0.5 + x / TAU + sum / PI).clamp(0.0, 1.0)
}

/// A random angle by Best and Fisher's rejection from a wrapped Cauchy envelope.
pub fn draw(mean: f64, kappa: f64, random: &mut impl Rng) -> f64 {
    if kappa < 1e-8 {
        return random.random_range(0.0..TAU);
    }
    let tau = 1.0 + (1.0 + 4.0 * kappa * kappa).sqrt();
    let rho = (tau - (2.0 * tau).sqrt()) / (2.0 * kappa);
    let r = (1.0 + rho * rho) / (2.0 * rho);
    loop {
        let z = (PI * random.random::<f64>()).cos();
        let f = (1.0 + r * z) / (r + z);
        let c = kappa * (r - f);
        let u: f64 = random.random();
        if c * (2.0 - c) > u || (c / u).ln() + 1.0 >= c {
            let turn = f.clamp(-1.0, 1.0).acos();
            return mean + if random.random::<bool>() { turn } else { -turn };
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::Seed;
    use crate::numeric::bessel::ratio;
    use crate::science::axial::mean::Resultant;

    #[test]
    fn the_distribution_function_is_the_integral_of_the_density() {
        for kappa in [0.0, 0.5, 5.0, 80.0] {
            let steps = 4000;
            let h = 1.3 / f64::from(steps);
            let integral: f64 = (0..steps).map(|i| pdf(1.0 + (f64::from(i) + 0.5) * h, 1.0, kappa) * h).sum();
            assert_close!(cdf(2.3, 1.0, kappa) - 0.5, integral, 1e-6, "κ = {kappa}");
        }
    }

    #[test]
    fn draws_have_the_mean_and_length_asked_for() {
        let mut random = Seed(11).stream("von-mises", 0);
        let phi: Vec<f64> = (0..20_000).map(|_| draw(0.8, 3.0, &mut random)).collect();
        let r = Resultant::of(&phi, None);
        assert_close!(r.direction(), 0.8, 0.02, "mean");
        assert_close!(r.mean_length(), ratio(3.0), 0.01, "length");
    }
}
