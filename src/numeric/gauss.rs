//! Sampled Gaussian kernels and their derivative, cut at four standard deviations.

/// How a kernel continues to the left of its centre.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Parity {
    /// t(−k) = t(k): smoothing.
    Even,
    /// t(−k) = −t(k): first derivative.
    Odd,
}

/// A short symmetric or antisymmetric filter, stored from its centre outwards.
///
/// It is applied as a correlation: out(x) = t₀ in(x) + Σ_k t_k (in(x + k) ± in(x − k)).
#[derive(Clone, Debug, PartialEq)]
pub struct Kernel {
    pub parity: Parity,
    pub half: Vec<f32>,
}

impl Kernel {
    /// The Gaussian of standard deviation `sigma` > 0 samples; the taps sum to 1.
    pub fn gaussian(sigma: f64) -> Self {
        let half = bell(sigma);
        let sum = half[0] + 2.0 * half[1..].iter().sum::<f64>();
        Self { parity: Parity::Even, half: half.iter().map(|t| (t / sum) as f32).collect() }
    }

    /// Its first derivative, scaled so that a ramp of slope 1 gives exactly 1.
    pub fn derivative(sigma: f64) -> Self {
        let half: Vec<f64> = bell(sigma).iter().enumerate().map(|(k, t)| k as f64 * t).collect();
        let slope = 2.0 * half.iter().enumerate().map(|(k, t)| k as f64 * t).sum::<f64>();
        Self { parity: Parity::Odd, half: half.iter().map(|t| (t / slope) as f32).collect() }
    }

    /// Its second derivative: exactly 0 for a ramp and 1 for x²/2.
    pub fn second_derivative(sigma: f64) -> Self {
        let bell = bell(sigma);
        let sum = |f: &dyn Fn(f64) -> f64| {
            bell[0] * f(0.0)
                + 2.0 * bell.iter().enumerate().skip(1).map(|(k, t)| f(k as f64) * t).sum::<f64>()
        };
        let mean = sum(&|k| k * k) / sum(&|_| 1.0);
        let unit = 0.5 * sum(&|k| k * k * (k * k - mean));
        let half = bell.iter().enumerate().map(|(k, t)| (((k * k) as f64 - mean) * t / unit) as f32);
        Self { parity: Parity::Even, half: half.collect() }
    }

    /// Samples on either side of the centre.
    pub fn radius(&self) -> usize {
        self.half.len() - 1
    }

    /// What the kernel makes of a wave of `omega` radians a sample: the real gain of an even kernel,
    /// the imaginary one of an odd kernel.
    pub fn response(&self, omega: f64) -> f64 {
        let tap = |k: usize| f64::from(self.half[k]);
        (1..self.half.len()).fold(tap(0), |sum, k| {
            let phase = k as f64 * omega;
            sum + 2.0
                * tap(k)
                * match self.parity {
                    Parity::Even => phase.cos(),
                    Parity::Odd => phase.sin(),
                }
        })
    }
}

/// exp(−k²/2σ²) for k = 0 … ⌊4σ + ½⌋, at least one sample out.
fn bell(sigma: f64) -> Vec<f64> {
    let radius = (4.0 * sigma + 0.5).floor().max(1.0) as usize;
    (0..=radius).map(|k| (-0.5 * (k as f64 / sigma).powi(2)).exp()).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn smoothing_keeps_a_constant_and_the_derivative_keeps_a_ramp() {
        for sigma in [0.4, 1.0, 1.5, 8.0] {
            let smooth = Kernel::gaussian(sigma);
            crate::assert_close!(smooth.response(0.0), 1.0, 1e-6, "constant through sigma {sigma}");
            let ramp = Kernel::derivative(sigma);
            let slope: f64 = ramp.half.iter().enumerate().map(|(k, t)| 2.0 * k as f64 * f64::from(*t)).sum();
            crate::assert_close!(slope, 1.0, 1e-6, "ramp through sigma {sigma}");
            let curve = Kernel::second_derivative(sigma);
            crate::assert_close!(curve.response(0.0), 0.0, 1e-6, "constant through the second derivative");
            let parabola: f64 =
                curve.half.iter().enumerate().map(|(k, t)| (k * k) as f64 * f64::from(*t)).sum();
            crate::assert_close!(parabola, 1.0, 1e-5, "x²/2 through sigma {sigma}");
        }
    }

    #[test]
    fn the_radius_is_four_sigma() {
        assert_eq!(Kernel::gaussian(1.5).radius(), 6);
        assert_eq!(Kernel::gaussian(1.0).radius(), 4);
    }
}
