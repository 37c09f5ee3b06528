//! Power laws of a network: Hack's length and area, Flint's slope and area.

/// y = factor · x^exponent by regression of logarithms.
#[derive(Clone, Debug, PartialEq)]
pub struct PowerLaw {
    pub factor: f64,
    pub exponent: f64,
    pub exponent_ci95: Option<[f64; 2]>,
    pub r2: f64,
    /// The (x, y) it rests on, thinned for show.
    pub points: Vec<[f64; 2]>,
}
