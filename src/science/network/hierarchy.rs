//! Streams by order: Horton's laws and Tokunaga's side branches.

/// Streams of one Strahler order; a stream is a chain of reaches of the same order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OrderCount {
    pub order: u32,
    pub streams: usize,
    /// Mean length of the streams, in the unit of the raster's place.
    pub mean_length: f64,
    /// Mean area that drains through their lower ends, m²; `None` without elevation.
    pub mean_area_m2: Option<f64>,
    /// Mean of fall over length; `None` without elevation.
    pub mean_slope: Option<f64>,
}

/// A ratio from the regression of a logarithm on order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ratio {
    pub value: f64,
    /// 95 % interval; `None` with two orders only.
    pub ci95: Option<[f64; 2]>,
}

/// Horton's ratios.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Horton {
    pub bifurcation: Ratio,
    pub length: Ratio,
    pub area: Option<Ratio>,
    pub slope: Option<Ratio>,
    /// Orders the regressions rest on.
    pub orders: u32,
}

/// Tokunaga's T_k = a c^(k−1).
#[derive(Clone, Debug, PartialEq)]
pub struct Tokunaga {
    pub a: f64,
    pub c: f64,
    /// Mean number of side branches by difference of order k = 1, 2, …
    pub side_branches: Vec<f64>,
    /// The bifurcation ratio that a and c imply.
    pub bifurcation: f64,
}
