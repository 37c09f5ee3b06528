//! What discharge and grain size a channel's size allows, under any gravity and liquid: ranges, never one number.

/// What is known of the channel and its liquid, each as a range from least to greatest.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FlowAsk {
    /// m s⁻².
    pub gravity: f64,
    pub width_m: [f64; 2],
    /// Width over depth.
    pub width_to_depth: [f64; 2],
    pub slope: [f64; 2],
    /// Darcy–Weisbach friction factor.
    pub friction: [f64; 2],
    /// kg m⁻³.
    pub liquid_density: f64,
    pub grain_density: f64,
    /// Critical Shields stress.
    pub shields: [f64; 2],
    /// Manning's n on Earth, s m^(−1/3).
    pub manning_earth: [f64; 2],
}

/// Least, middle (geometric) and greatest.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Range {
    pub least: f64,
    pub middle: f64,
    pub greatest: f64,
}

#[derive(Clone, Debug, PartialEq)]
pub struct PalaeoFlow {
    pub depth_m: Range,
    /// m s⁻¹ by Darcy–Weisbach.
    pub velocity: Range,
    pub froude: Range,
    /// m³ s⁻¹ by Darcy–Weisbach.
    pub discharge: Range,
    /// m³ s⁻¹ by dimensionally consistent hydraulic geometry from width alone.
    pub discharge_by_width: Range,
    /// m³ s⁻¹ by Manning's n rescaled to this gravity.
    pub discharge_by_manning: Range,
    /// m: the greatest grain the flow moves.
    pub grain_m: Range,
    /// Shares of the spread of ln discharge that each unknown brings.
    pub shares: Vec<(&'static str, f64)>,
}
