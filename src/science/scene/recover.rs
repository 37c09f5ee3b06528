//! What recovered bedforms say: how sure a share of tries is, and how nodes answer to a field without preference.

use crate::ground::{Axis, Method, Read, Source, Symbol};
use crate::numeric::tail::normal_quantile;

/// The record of injection and recovery.
pub static METHOD: Method = Method {
    id: "scene.injection-recovery",
    name: "Injection and recovery",
    question: "Which trends would have been missed here, and how far would others have been bent?",
    formula: "p(t) = found/tries of fields at trend t in the patch's own texture;  Wilson: (p + z²/2n ± z √(p(1 − p)/n + z²/4n²))/(1 + z²/n);  bias = mean of (found − laid in);  corrected: the t at which fields with crests of spread s show the patch's own mean axis and R̄,  t ← θ̄ − bias(t, s),  s ← s s_patch/s_seen",
    symbols: &[
        Symbol { symbol: "t", meaning: "trend laid in", unit: "deg" },
        Symbol {
            symbol: "p",
            meaning: "share of fields whose trend is claimed within the tolerance",
            unit: "1",
        },
        Symbol { symbol: "z", meaning: "1.96", unit: "1" },
        Symbol { symbol: "n", meaning: "fields at one trend", unit: "1" },
        Symbol {
            symbol: "θ̄, s_patch",
            meaning: "the patch's mean axis, and the spread of its nodes",
            unit: "deg",
        },
    ],
    assumptions: &[
        "the patch's bedforms are like those laid in, in spacing, height and how crests wander",
        "nodes count alike once they pass the noise: R̄ of ⅓ and ½ hold for nodes weighted by contrast and by energy",
    ],
    limits: &[
        "a window of the patch is used: in the whole patch more nodes would show fainter patterns",
        "the correction takes a trend that bends across the patch for a wider spread of crests",
        "where nearly all crests lie within 20° of the light, the match rests on what little shows",
        "strength taken from the patch's own pattern makes the test circular where that pattern is the light's work",
    ],
    sources: &[
        Source {
            key: "wilson1927",
            authors: "Wilson, E. B.",
            year: 1927,
            title: "Probable inference, the law of succession, and statistical inference",
            published: "Journal of the American Statistical Association 22, 209",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-recovery",
            authors: "this program",
            year: 2026,
            title: "Trends recovered from bedforms laid into a patch's own texture",
            published: "derived here, checked on fields of known trend",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Axes of nodes, pooled: those above the noise alike, and all of them by what they show.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Response {
    /// Σ cos φ, Σ sin φ and Σ weight: each node alike, by contrast √energy, by energy.
    sums: [[f64; 3]; 3],
}

impl Response {
    /// Of nodes, each with its axis, gradient energy, and whether it passed the noise.
    pub fn of(nodes: impl Iterator<Item = (Axis, f64, bool)>) -> Self {
        let mut response = Self { sums: [[0.0; 3]; 3] };
        for (axis, energy, passed) in nodes {
            let (sin, cos) = axis.doubled().sin_cos();
            for (sum, weight) in response.sums.iter_mut().zip([f64::from(passed), energy.sqrt(), energy]) {
                sum.iter_mut().zip([cos, sin, 1.0]).for_each(|(s, v)| *s += weight * v);
            }
        }
        response
    }

    /// Of all fields, each added as it is.
    pub fn pooled<'a>(all: impl Iterator<Item = &'a Self>) -> Self {
        let mut pooled = Self::of(std::iter::empty());
        for one in all {
            pooled.sums.iter_mut().flatten().zip(one.sums.iter().flatten()).for_each(|(sum, v)| *sum += v);
        }
        pooled
    }

    /// Doubled resultant lengths and mean axes: nodes alike, by contrast, by energy.
    pub fn resultants(&self) -> [(f64, Axis); 3] {
        self.sums.map(|[cos, sin, weight]| {
            let length = if weight > 0.0 { (cos.hypot(sin) / weight).min(1.0) } else { 0.0 };
            (length, Axis::from_doubled(sin.atan2(cos)))
        })
    }
}

/// Wilson's 95 % interval of a probability seen `found` times in `tries`.
pub fn wilson(found: usize, tries: usize) -> [f64; 2] {
    if tries == 0 {
        return [0.0, 1.0];
    }
    let (z, n) = (normal_quantile(0.975), tries as f64);
    let p = found as f64 / n;
    let middle = p + z * z / (2.0 * n);
    let half = z * (p * (1.0 - p) / n + z * z / (4.0 * n * n)).sqrt();
    [-half, half].map(|half| ((middle + half) / (1.0 + z * z / n)).clamp(0.0, 1.0))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn nodes(weight: impl Fn(f64) -> f64) -> Vec<(Axis, f64, bool)> {
        let node = |deg: f64| (Axis::from_deg(deg), deg.to_radians().sin().powi(2), true);
        (0..1800)
            .map(|i| 0.1 * f64::from(i) + 0.05)
            .flat_map(|deg| vec![node(deg); weight(deg).round() as usize])
            .collect()
    }

    #[test]
    fn contrast_and_energy_have_their_analytic_lengths() {
        let [(alike, _), (contrast, axis), (energy, _)] =
            Response::of(nodes(|_| 1.0).into_iter()).resultants();
        crate::assert_close!(alike, 0.0, 1e-9, "alike");
        crate::assert_close!(contrast, 1.0 / 3.0, 1e-4, "by contrast");
        crate::assert_close!(energy, 0.5, 1e-6, "by energy");
        assert!(axis.separation(Axis::from_deg(90.0)) < 1e-6);
    }

    #[test]
    fn wilson_has_its_known_values() {
        // Hand-computed from the formula: 8 of 8 and 4 of 8.
        let [low, high] = wilson(8, 8);
        crate::assert_close!(low, 8.0 / (8.0 + 1.959_963_985f64.powi(2)), 1e-9, "lower end of 8 of 8");
        crate::assert_close!(high, 1.0, 1e-12, "upper end");
        let [low, high] = wilson(4, 8);
        crate::assert_close!(low + high, 1.0, 1e-12, "symmetry");
        assert_eq!(wilson(0, 0), [0.0, 1.0]);
    }
}
