//! Hypsometry and relief of a basin.

#[derive(Clone, Debug, PartialEq)]
pub struct Hypsometry {
    pub lowest_m: f64,
    pub highest_m: f64,
    pub mean_m: f64,
    /// (mean − lowest) / (highest − lowest).
    pub integral: f64,
    /// (share of area above, share of height), from (0, 1) to (1, 0).
    pub curve: Vec<[f64; 2]>,
    /// Relief over the length of the trunk.
    pub relief_ratio: Option<f64>,
    /// Relief over the root of the area (Melton 1965).
    pub melton: f64,
}
