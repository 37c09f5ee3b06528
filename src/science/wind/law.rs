//! Sand flux of a wind above threshold, by five published laws.

use crate::ground::{Method, Read, Source, Symbol};

use super::threshold::Bed;

/// The physical transport laws.
pub const METHOD: Method = Method {
    id: "wind.transport-law",
    name: "Saltation flux",
    question: "How much sand does a wind of this strength move?",
    formula: "Bagnold q = C √(d/D) (ρ/g) u*³, C = 1.8, D = 250 µm;  Kawamura q = 2.78 (ρ/g)(u* − u*t)(u* + u*t)²;  \
              White q = 2.61 (ρ/g) u*³ (1 − u*t/u*)(1 + u*t/u*)²;  Lettau q = C √(d/D) (ρ/g) u*² (u* − u*t), C = 6.7 or 4.2;  \
              Kok q = 5 (ρ/g) u*t (u*² − u*t²)",
    symbols: &[
        Symbol { symbol: "q", meaning: "mass flux per width of ground", unit: "kg m⁻¹ s⁻¹" },
        Symbol { symbol: "u*", meaning: "friction velocity", unit: "m s⁻¹" },
        Symbol { symbol: "u*t", meaning: "threshold friction velocity", unit: "m s⁻¹" },
        Symbol { symbol: "ρ", meaning: "gas density", unit: "kg m⁻³" },
        Symbol { symbol: "g", meaning: "gravity", unit: "m s⁻²" },
        Symbol { symbol: "d", meaning: "grain diameter", unit: "m" },
    ],
    assumptions: &[
        "Dry loose sand everywhere, flux in balance with the wind",
        "Below threshold nothing moves",
    ],
    limits: &[
        "Field data support a flux linear in stress (Kok) and speak against the cubic laws",
        "White's law was printed with (1 + u*t²/u*²), which halves it; the corrected form is used",
        "Lettau's constant is 4.2 or 6.7 by source and set; for trends only the relative flux counts",
    ],
    sources: &[
        Source {
            key: "kawamura1951",
            authors: "Kawamura, R.",
            year: 1951,
            title: "Study on sand movement by wind",
            published: "Reports of the Institute of Science and Technology, University of Tokyo 5",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "lettau1978",
            authors: "Lettau, K.; Lettau, H. H.",
            year: 1978,
            title: "Experimental and micrometeorological field studies of dune migration",
            published: "Exploring the World's Driest Climate, University of Wisconsin, 110–147",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "white1979",
            authors: "White, B. R.",
            year: 1979,
            title: "Soil transport by winds on Mars",
            published: "Journal of Geophysical Research 84, 4643–4651",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "namikas1997",
            authors: "Namikas, S. L.; Sherman, D. J.",
            year: 1997,
            title: "Predicting aeolian sand transport: revisiting the White model",
            published: "Earth Surface Processes and Landforms 22, 601–604",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "kok2012",
            authors: "Kok, J. F.; Parteli, E. J. R.; Michaels, T. I.; Bou Karam, D.",
            year: 2012,
            title: "The physics of wind-blown sand and dust",
            published: "Reports on Progress in Physics 75, 106901",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "martin2017",
            authors: "Martin, R. L.; Kok, J. F.",
            year: 2017,
            title: "Wind-invariant saltation heights imply linear scaling of aeolian saltation flux with shear stress",
            published: "Science Advances 3, e1602569",
            locator: "",
            read: Read::Abstract,
        },
    ],
};

/// Grain size to which Bagnold's and Lettau's constants refer, m.
const REFERENCE_GRAIN: f64 = 250e-6;
/// Bagnold's constant for naturally graded dune sand.
const BAGNOLD: f64 = 1.8;
/// Lettau's constant: sources print one or the other.
const LETTAU: f64 = 6.7;
const LETTAU_LOW: f64 = 4.2;

/// A physical transport law.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Law {
    Bagnold,
    Kawamura,
    White,
    /// With the constant 6.7.
    Lettau,
    /// With the constant 4.2.
    LettauLow,
    Kok,
}

impl Law {
    /// Each law once; Lettau's with 6.7, since its constant does not change the shares of the sectors.
    pub const ALL: [Self; 5] = [Self::Bagnold, Self::Kawamura, Self::White, Self::Lettau, Self::Kok];

    /// Flux in kg m⁻¹ s⁻¹ for the friction velocity `u` over the threshold `t`, both m s⁻¹; 0 at
    /// and below the threshold.
    pub fn flux(self, u: f64, t: f64, bed: &Bed) -> f64 {
        if u <= t {
            return 0.0;
        }
        let per_gravity = bed.air.density / bed.gravity;
        let sorting = (bed.grain / REFERENCE_GRAIN).sqrt();
        match self {
            Self::Bagnold => BAGNOLD * sorting * per_gravity * u.powi(3),
            Self::Kawamura => 2.78 * per_gravity * (u - t) * (u + t).powi(2),
            // (1 + u*t/u*)², not the misprinted (1 + u*t²/u*²)
            Self::White => 2.61 * per_gravity * u.powi(3) * (1.0 - t / u) * (1.0 + t / u).powi(2),
            Self::Lettau => LETTAU * sorting * per_gravity * u * u * (u - t),
            Self::LettauLow => LETTAU_LOW * sorting * per_gravity * u * u * (u - t),
            Self::Kok => 5.0 * per_gravity * t * (u * u - t * t),
        }
    }

    pub fn label(self) -> &'static str {
        match self {
            Self::Bagnold => "Bagnold (C = 1.8)",
            Self::Kawamura => "Kawamura (2.78)",
            Self::White => "White (2.61)",
            Self::Lettau => "Lettau (C = 6.7)",
            Self::LettauLow => "Lettau (C = 4.2)",
            Self::Kok => "Kok (5)",
        }
    }
}
