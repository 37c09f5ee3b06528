//! The alignment theories that are weighed against each other.

use crate::ground::{Axis, SandFlow};

use super::gross_normal::{self, gross_normal};
use super::resultant;

/// A published rule that predicts a trend from a regime.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Theory {
    Transverse,
    Along,
    GrossNormal,
}

impl Theory {
    pub const ALL: [Self; 3] = [Self::Transverse, Self::Along, Self::GrossNormal];

    pub fn name(self) -> &'static str {
        match self {
            Self::Transverse => "transverse to the resultant",
            Self::Along => "along the resultant",
            Self::GrossNormal => "gross bedform-normal",
        }
    }

    /// Id of the method record.
    pub fn method(self) -> &'static str {
        match self {
            Self::Transverse => resultant::TRANSVERSE.id,
            Self::Along => resultant::ALONG.id,
            Self::GrossNormal => gross_normal::METHOD.id,
        }
    }

    /// The predicted trend, and those that tie with it; empty when the theory predicts none.
    pub fn predict(self, flows: &[SandFlow]) -> Vec<Axis> {
        match self {
            Self::Transverse => resultant::transverse(flows).into_iter().collect(),
            Self::Along => resultant::along(flows).into_iter().collect(),
            Self::GrossNormal => {
                gross_normal(flows).map_or_else(Vec::new, |g| std::iter::once(g.axis).chain(g.ties).collect())
            }
        }
    }
}
