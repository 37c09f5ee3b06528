//! The Watson–Williams test: do several sets of axes share a mean?

use crate::ground::{Method, Symbol};
use crate::numeric::bessel::inverse_ratio;
use crate::numeric::tail::f_above;

use super::kappa::piecewise;
use super::mean::Resultant;
use super::sources::{MARDIA_JUPP, ZAR, at};

pub static METHOD: Method = Method {
    id: "axial.watson-williams",
    name: "Watson–Williams test",
    question: "Do several sets of axes share a mean?",
    formula: "F = K (N − q)(ΣRᵢ − R)/[(q − 1)(N − ΣRᵢ)], K = 1 + 3/(8κ), df q − 1, N − q",
    symbols: &[
        Symbol { symbol: "Rᵢ", meaning: "resultant length of set i; R of all pooled", unit: "1" },
        Symbol { symbol: "q", meaning: "number of sets", unit: "1" },
        Symbol { symbol: "κ", meaning: "concentration, within sets or pooled: sources disagree", unit: "1" },
    ],
    assumptions: &["Von Mises sets of equal concentration, κ above about 2.", "Independent axes."],
    limits: &["The two conventions for κ differ by 0.3 % in F on textbook data: the one used is named."],
    sources: &[ZAR, at(MARDIA_JUPP, "two-sample tests")],
};

/// Where the κ of the correction K comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum KappaFrom {
    /// Exact, from ΣRᵢ/N.
    Within,
    /// From the resultant of all axes pooled, by Fisher's piecewise approximation as is usual there.
    Pooled,
}

/// The test's numbers.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WatsonWilliams {
    pub f: f64,
    pub df: [f64; 2],
    pub p: f64,
    /// κ used in K; the test is for κ above about 2.
    pub kappa: f64,
}

/// Tests samples of circle angles; two or more, none empty.
pub fn watson_williams(samples: &[&[f64]], kappa_from: KappaFrom) -> WatsonWilliams {
    let each: Vec<Resultant> = samples.iter().map(|s| Resultant::of(s, None)).collect();
    watson_williams_of(&each, kappa_from)
}

/// The same from the resultants of the samples; their weights are the numbers of independent angles.
pub fn watson_williams_of(each: &[Resultant], kappa_from: KappaFrom) -> WatsonWilliams {
    let pooled = each.iter().fold(Resultant::default(), |a, r| Resultant {
        cos: a.cos + r.cos,
        sin: a.sin + r.sin,
        weight: a.weight + r.weight,
    });
    let (n, q) = (pooled.weight, each.len() as f64);
    let within: f64 = each.iter().map(|r| r.length()).sum();
    let kappa = match kappa_from {
        KappaFrom::Within => inverse_ratio(within / n),
        KappaFrom::Pooled => piecewise(pooled.mean_length()),
    };
    let correction = 1.0 + 3.0 / (8.0 * kappa);
    let f = correction * (n - q) * (within - pooled.length()) / ((q - 1.0) * (n - within));
    WatsonWilliams { f, df: [q - 1.0, n - q], p: f_above(f, q - 1.0, n - q), kappa }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn equal_means_give_no_evidence() {
        let a = [0.1, 0.3, -0.2, 0.0];
        let test = watson_williams(&[&a, &a, &a], KappaFrom::Within);
        assert!(test.f.abs() < 1e-9 && test.p > 0.999, "{test:?}");
    }
}
