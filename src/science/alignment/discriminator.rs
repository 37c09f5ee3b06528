//! How well the trend of fingers would grow under bed instability: what tells where fingers can form.

use crate::ground::{Method, Read, SandFlow, Source};

use super::bed_instability::{SYMBOLS, bed_instability, growth};
use super::fingering::fingering;

/// The growth-rate discriminator.
pub const METHOD: Method = Method {
    id: "alignment.growth-discriminator",
    name: "Ratio of growth rates",
    question: "Would these winds, on starved ground, draw dunes out into fingers or leave them as barchans?",
    formula: "σ(α_F)/σ(α_BI), σ(α) = Σ qᵢ (1 + Γ |sin(θᵢ − α)|) |sin(θᵢ − α)|",
    symbols: SYMBOLS,
    assumptions: &["α_F is the strongest of several fingers"],
    limits: &[
        "That a high ratio means fingers is our reading of a figure caption, not a printed sentence",
        "Γ = 1.6 in the source",
    ],
    sources: &[Source {
        key: "gao2015",
        authors: "Gao, X.; Narteau, C.; Rozier, O.; Courrech du Pont, S.",
        year: 2015,
        title: "Phase diagrams of dune shape and orientation depending on sand availability",
        published: "Scientific Reports 5, 14677",
        locator: "abstract and caption of figure 4",
        read: Read::Abstract,
    }],
};

/// σ(α_F)/σ(α_BI) in [0, 1]: the growth of the strongest finger's trend over that of the trend that
/// grows fastest. `None` without flow or without a finger.
pub fn growth_discriminator(flows: &[SandFlow], flux_up: f64) -> Option<f64> {
    let fastest = bed_instability(flows, flux_up)?;
    let finger = *fingering(flows, flux_up).first()?;
    Some((growth(flows, flux_up, finger.toward.axis()) / fastest.growth).min(1.0))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Azimuth;

    #[test]
    fn a_single_wind_leaves_fingers_no_growth_and_calm_has_no_ratio() {
        let one = [SandFlow { toward: Azimuth::from_deg(20.0), weight: 1.0 }];
        crate::assert_close!(growth_discriminator(&one, 1.6).expect("a ratio"), 0.0, 1e-9, "one wind");
        assert_eq!(growth_discriminator(&[], 1.6), None);
        let opposed = [0.0, 180.0].map(|d| SandFlow { toward: Azimuth::from_deg(d), weight: 1.0 });
        assert_eq!(growth_discriminator(&opposed, 1.6), None);
    }
}
