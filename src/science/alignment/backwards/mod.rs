//! Backwards: no wind record, so which two-wind regimes are consistent with the trends measured?

mod curves;
mod evidence;
mod forks;
mod predictions;
mod regimes;
mod summary;
#[cfg(test)]
mod tests;

pub use curves::{class_areas, obliquity_curve};
pub use evidence::{Cover, Observed, Sense, SenseKind};
pub use forks::{FORKS, fork_p};
pub use predictions::{Implied, implied, two_winds};
pub use regimes::{BackwardsSettings, Lie, Regimes, WindPrior, backwards, likeliest_lie};
pub use summary::{Arc, arcs, entropy_gain};

use crate::ground::{Method, Read, Source, Symbol};

/// The map of regimes.
pub const METHOD: Method = Method {
    id: "alignment.backwards",
    name: "Two-wind regimes consistent with measured trends",
    question: "Without a wind record, which divergence and strength ratio of two winds, and which drift, would \
               make these trends?",
    formula: "p(γ, N) ∝ Σ_Γ Σ_± Σ_a p(a) Π_j [(1 − ε) 2π f(T_j − a ∓ α_j(γ, N, Γ)) + ε] S_j,  α = α_BI on full cover, \
              α_F on starved ground, the mean of both where cover is unknown;  S = 1 + (2c − 1) cos(D − s)",
    symbols: &[
        Symbol { symbol: "γ", meaning: "divergence of the two winds", unit: "deg" },
        Symbol { symbol: "N", meaning: "strength ratio of the two winds, 1 to 10", unit: "1" },
        Symbol { symbol: "Γ", meaning: "flux-up ratio: gain of flux over a crest", unit: "1" },
        Symbol { symbol: "a", meaning: "azimuth toward which the dominant wind carries sand", unit: "deg" },
        Symbol { symbol: "±", meaning: "side to which the other wind turns away", unit: "" },
        Symbol { symbol: "T_j", meaning: "measured trend of population j", unit: "deg" },
        Symbol {
            symbol: "f",
            meaning: "density of a measured axis about a predicted one (see Bayes factors)",
            unit: "1/rad",
        },
        Symbol { symbol: "ε", meaning: "share of each prediction spread over all axes", unit: "1" },
        Symbol { symbol: "D, s", meaning: "predicted and stated sense of sand motion", unit: "deg" },
        Symbol { symbol: "c", meaning: "chance that the stated sense is right", unit: "1" },
    ],
    assumptions: &[
        "Two winds are enough; both sides, all Γ given, all γ and all log N are equally likely beforehand",
        "All trends held together were made by the same regime, and err independently",
    ],
    limits: &[
        "One trend with the wind's azimuth free leaves the map at its prior: any regime can be turned to fit it",
        "An axis has no sense: without forks, tapering or obstacles each drift and its opposite are equally likely",
        "Shares of the map rest on the prior over γ and log N, which is a choice and not a frequency in nature",
        "Predictions are rounded to whole degrees",
    ],
    sources: &[
        super::gross_normal::RUBIN,
        super::bed_instability::COURRECH,
        Source {
            key: "ventifact-backwards",
            authors: "Ventifact",
            year: 2026,
            title: "Posterior over two-wind regimes; closed obliquity curves and their inverse",
            published: "derived here; curves equal numeric search",
            locator: "",
            read: Read::Derived,
        },
    ],
};
