//! Which band, or which mix of bands, a study reads.

use serde::{Deserialize, Serialize};

/// A choice of bands, counted from 0.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase", deny_unknown_fields)]
pub enum Bands {
    /// One band as it is.
    One(usize),
    /// Σ weightᵢ · bandᵢ; missing where any of the bands is missing.
    Mix(Vec<(usize, f64)>),
}

impl Default for Bands {
    fn default() -> Self {
        Self::One(0)
    }
}

impl Bands {
    /// The bands it reads.
    pub fn indices(&self) -> Vec<usize> {
        match self {
            Self::One(band) => vec![*band],
            Self::Mix(parts) => parts.iter().map(|(band, _)| *band).collect(),
        }
    }
}
