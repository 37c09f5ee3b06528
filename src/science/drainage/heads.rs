//! Where channels begin, and the threshold that the constant-drop test proposes.

use serde::{Deserialize, Serialize};

/// What must pass a threshold for a channel to begin.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum HeadRule {
    /// Contributing area A, m².
    #[default]
    Area,
    /// A·S² (Montgomery & Dietrich 1992), m².
    SlopeArea,
    /// Area of upwardly curved cells above (Peuker & Douglas 1975), m².
    CurvedArea,
}

/// The constant-drop test at one threshold (Tarboton, Bras & Rodríguez-Iturbe 1991).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DropRow {
    pub threshold_m2: f64,
    /// Streams of order 1, their mean drop and its standard deviation, m.
    pub first: (usize, f64, f64),
    /// Streams of higher order.
    pub higher: (usize, f64, f64),
    /// Student's t of the difference; `None` when either side has fewer than two streams.
    pub t: Option<f64>,
    /// Drainage density, m⁻¹.
    pub density: f64,
}
