//! The effective number of a full rectangle of nodes whose correlation is known: the yardstick for
//! the estimate.

/// n²/ΣΣρ over `width` × `height` nodes, where `correlation(h)` is the correlation at a lag of h nodes.
pub fn effective_number(width: usize, height: usize, correlation: impl Fn(f64) -> f64) -> f64 {
    // ΣΣρ = Σ_{dx, dy} (W − |dx|)(H − |dy|) ρ(√(dx² + dy²))
    let mut sum = 0.0;
    for dy in 0..height {
        for dx in 0..width {
            let signs = if dx > 0 { 2.0 } else { 1.0 } * if dy > 0 { 2.0 } else { 1.0 };
            let pairs = ((width - dx) * (height - dy)) as f64;
            sum += signs * pairs * correlation((dx as f64).hypot(dy as f64));
        }
    }
    ((width * height) as f64).powi(2) / sum
}

/// The area form for ρ = exp(−r/L): area/(2πL²).
pub fn area_exponential(area: f64, length: f64) -> f64 {
    area / (std::f64::consts::TAU * length * length)
}

/// The area form for ρ = exp(−r²/L²): area/(πL²).
pub fn area_gaussian(area: f64, length: f64) -> f64 {
    area / (std::f64::consts::PI * length * length)
}
