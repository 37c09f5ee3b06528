//! What pure noise would do to a tensor: how many independent gradients it holds, and the
//! coherence they reach by chance.

use crate::ground::{Grid, Method, Polygon, Read, Source, Stopped, Symbol, Work};

use super::gradient::Tone;

/// The record of the noise floor.
pub static METHOD: Method = Method {
    id: "orientation.noise-floor",
    name: "Noise floor of coherence",
    question: "Could noise alone make a window look this strongly oriented?",
    formula: "P(C > c) = (1 − c²)^((n − 1)/2);  E[C²] = 2/(n + 1);  n = ρ² / (σₜ² (1/a − 2/a² + 2/a³)),  a = 2 + σₜ²/ρ²,  σₜ² = σ² + s²",
    symbols: &[
        Symbol { symbol: "C", meaning: "coherence of the window", unit: "1" },
        Symbol { symbol: "n", meaning: "independent gradients in the window", unit: "1" },
        Symbol { symbol: "σ", meaning: "gradient scale", unit: "px" },
        Symbol {
            symbol: "s",
            meaning: "blur of the noise itself, from differences at lags 1 and 2",
            unit: "px",
        },
        Symbol { symbol: "ρ", meaning: "integration scale", unit: "px" },
    ],
    assumptions: &[
        "the noise is isotropic on the ground and nearly Gaussian after smoothing by σ",
        "its own correlation is about that of a Gaussian blur",
    ],
    limits: &[
        "fine texture near the pixel size is taken for blur of the noise and raises the floor",
        "a natural texture without preferred trend passes the floor locally; the patch's own test decides",
    ],
    sources: &[
        Source {
            key: "mauchly1940",
            authors: "Mauchly, J. W.",
            year: 1940,
            title: "Significance test for sphericity of a normal n-variate distribution",
            published: "Annals of Mathematical Statistics 11, 204",
            locator: "two variates",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-noise-floor",
            authors: "this program",
            year: 2026,
            title: "Effective number of gradients of smoothed white noise under a Gaussian window",
            published: "derived from the fourth moments, checked by simulation",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Greatest blur looked for, pixels: smoother images have no pixel noise to speak of.
const GREATEST_BLUR: f64 = 2.0;

/// Second differences looked at per direction; more add nothing.
const SAMPLES: usize = 1 << 20;

/// Effective number of independent gradients in a Gaussian window of scale ρ, for noise whose
/// gradient was taken at total blur σₜ (both in one unit):
/// 1/n = ∫∫ w w′ r², r = (1 − h²/4σₜ²) e^{−h²/4σₜ²}.
pub fn effective_count(total_blur: f64, integration: f64) -> f64 {
    let ratio = (total_blur / integration).powi(2);
    let a = 2.0 + ratio;
    1.0 / (ratio * (1.0 / a - 2.0 / (a * a) + 2.0 / (a * a * a)))
}

/// The coherence that n independent Gaussian gradients exceed with probability `p`:
/// c² = 1 − p^{2/(n−1)}. 1 when n ≤ 1, where every window is fully coherent.
pub fn coherence_floor(n: f64, p: f64) -> f64 {
    if n <= 1.0 { 1.0 } else { (1.0 - p.powf(2.0 / (n - 1.0))).max(0.0).sqrt() }
}

/// Probability that n independent Gaussian gradients exceed coherence `c`.
pub fn coherence_p(n: f64, c: f64) -> f64 {
    if n <= 1.0 { 1.0 } else { (1.0 - c * c).max(0.0).powf(0.5 * (n - 1.0)) }
}

/// Blur of the pixel noise along rows and down columns, as standard deviations in pixels, from
/// the mean square of second differences at lags 1 and 2: equal for independent pixels,
/// smaller at lag 1 for resampled ones.
pub(super) fn blur(image: &Grid<f32>, patch: &Polygon, tone: Tone, work: &Work) -> Result<[f64; 2], Stopped> {
    let (width, height) = (image.width(), image.height());
    let every = (width * height / SAMPLES).max(1);
    let mut squares = [[0.0f64; 2]; 2];
    let value = |col: usize, row: usize| image.get(col, row).map(|v| f64::from(tone.of(v)));
    for row in (0..height).step_by(every) {
        for (from, to) in patch.row_spans(row, width) {
            for col in from..to {
                let Some(here) = value(col, row) else { continue };
                let mut add = |direction: usize, [one, two, four]: [Option<f64>; 3]| {
                    if let (Some(one), Some(two), Some(four)) = (one, two, four) {
                        squares[direction][0] += (here - 2.0 * one + two).powi(2);
                        squares[direction][1] += (here - 2.0 * two + four).powi(2);
                    }
                };
                add(0, [1, 2, 4].map(|d| value(col + d, row)));
                add(1, [1, 2, 4].map(|d| value(col, row + d)));
            }
        }
        work.advance(0)?;
    }
    Ok(squares.map(|[one, two]| if two > 0.0 { blur_of_ratio(one / two) } else { 0.0 }))
}

/// The blur whose noise has this ratio of mean squared second differences, lag 1 over lag 2.
fn blur_of_ratio(ratio: f64) -> f64 {
    let expected = |s: f64| {
        let correlation = |lag: f64| (-lag * lag / (4.0 * s * s)).exp();
        let square = |lag: f64| 6.0 - 8.0 * correlation(lag) + 2.0 * correlation(2.0 * lag);
        square(1.0) / square(2.0)
    };
    if ratio >= 1.0 {
        return 0.0;
    }
    if ratio <= expected(GREATEST_BLUR) {
        return GREATEST_BLUR;
    }
    // The ratio falls with the blur (from about a fifth of a pixel on): halve the interval.
    let (mut low, mut high) = (0.2, GREATEST_BLUR);
    while high - low > 1e-4 {
        let middle = 0.5 * (low + high);
        if expected(middle) > ratio { low = middle } else { high = middle }
    }
    0.5 * (low + high)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn blur_is_read_back_from_its_own_ratio() {
        for s in [0.4f64, 0.7, 1.0, 1.6] {
            let c = |lag: f64| (-lag * lag / (4.0 * s * s)).exp();
            let ratio = (6.0 - 8.0 * c(1.0) + 2.0 * c(2.0)) / (6.0 - 8.0 * c(2.0) + 2.0 * c(4.0));
            crate::assert_close!(blur_of_ratio(ratio), s, 1e-3, "blur");
        }
        assert_eq!(blur_of_ratio(1.02), 0.0);
    }

    #[test]
    fn floor_and_p_are_inverse() {
        for n in [3.0, 20.0, 150.0] {
            crate::assert_close!(coherence_p(n, coherence_floor(n, 0.01)), 0.01, 1e-12, "p at the floor");
        }
    }
}
