//! The angle between trend and resultant drift: its interval and the chance of each class.

use crate::ground::{Axis, Method, Read, Source, Symbol};
use crate::numeric::tail::normal_below;

use super::resultant::HUNTER;

/// Classes of obliquity.
pub const METHOD: Method = Method {
    id: "alignment.obliquity",
    name: "Obliquity and its classes",
    question: "Do the bedforms lie along, oblique to, or across the net drift, and how sure is that?",
    formula: "φ = |((T − θ_R + 90°) mod 180°) − 90°|;  longitudinal < 15°, oblique 15–75°, transverse > 75°;  \
              P(class) = mean over draws of the folded normal mass of N(φ_d, s²) in the class",
    symbols: &[
        Symbol { symbol: "φ", meaning: "obliquity", unit: "deg" },
        Symbol { symbol: "T", meaning: "measured mean trend", unit: "deg" },
        Symbol { symbol: "θ_R", meaning: "azimuth of the resultant drift", unit: "deg" },
        Symbol {
            symbol: "φ_d",
            meaning: "signed turn from the resultant of draw d to the trend",
            unit: "deg",
        },
        Symbol { symbol: "s", meaning: "standard error of the mean trend", unit: "deg" },
    ],
    assumptions: &[
        "Errors of the mean trend are near normal",
        "Draws of the wind record stand for its uncertainty",
    ],
    limits: &[
        "Random axes fall into the classes as 1/6, 2/3, 1/6: \"oblique\" wins by default, so compare with that",
        "Large dunes turn in thousands of years and may remember other winds than those recorded",
    ],
    sources: &[
        HUNTER,
        Source {
            key: "ventifact-classes",
            authors: "Ventifact",
            year: 2026,
            title: "Class probabilities with folding at 0° and 90°",
            published: "derived here; checked by quadrature",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Class borders, degrees.
pub const BORDERS: [f64; 2] = [15.0, 75.0];
/// Chance of longitudinal, oblique and transverse for an axis drawn at random.
pub const RANDOM: [f64; 3] = [1.0 / 6.0, 2.0 / 3.0, 1.0 / 6.0];

/// The class an obliquity falls into.
pub fn class(obliquity: f64) -> &'static str {
    match obliquity {
        phi if phi < BORDERS[0] => "longitudinal",
        phi if phi <= BORDERS[1] => "oblique",
        _ => "transverse",
    }
}

/// An uncertain obliquity: signed turns from the drift of each draw to the trend, each blurred by
/// the error of the trend.
#[derive(Clone, Debug, PartialEq)]
pub struct Obliquity {
    turns: Vec<f64>,
    /// Standard error of the trend, degrees.
    blur: f64,
}

impl Obliquity {
    /// `trend` known to `blur` degrees, against drift axes of which each counts the same. A blur
    /// of 180° is already as good as any axis.
    pub fn of(trend: Axis, blur: f64, drifts: &[Axis]) -> Self {
        Self { turns: drifts.iter().map(|d| trend.turn_from(*d)).collect(), blur: blur.clamp(1e-9, 180.0) }
    }

    /// Chance that the obliquity is below `phi` degrees in [0, 90].
    pub fn below(&self, phi: f64) -> f64 {
        if phi >= 90.0 {
            return 1.0;
        }
        // Obliquity folds at 0 and 90, so "below φ" is "within φ of a multiple of 180".
        let reach = ((6.0 * self.blur + 90.0) / 180.0).ceil() as i32;
        let mass: f64 = self
            .turns
            .iter()
            .map(|turn| {
                (-reach..=reach)
                    .map(|k| {
                        let centre = 180.0 * f64::from(k) - turn;
                        normal_below((centre + phi) / self.blur) - normal_below((centre - phi) / self.blur)
                    })
                    .sum::<f64>()
            })
            .sum();
        (mass / self.turns.len() as f64).clamp(0.0, 1.0)
    }

    /// Chance of longitudinal, oblique, transverse.
    pub fn classes(&self) -> [f64; 3] {
        let (low, high) = (self.below(BORDERS[0]), self.below(BORDERS[1]));
        [low, high - low, 1.0 - high]
    }

    /// Obliquity that `share` of the distribution lies below.
    pub fn quantile(&self, share: f64) -> f64 {
        let (mut low, mut high) = (0.0, 90.0);
        while high - low > 1e-6 {
            let middle = 0.5 * (low + high);
            if self.below(middle) < share { low = middle } else { high = middle }
        }
        0.5 * (low + high)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_wide_blur_comes_to_the_random_shares() {
        let wide = Obliquity::of(Axis::from_deg(20.0), 500.0, &[Axis::from_deg(0.0)]);
        for (got, want) in wide.classes().into_iter().zip(RANDOM) {
            crate::assert_close!(got, want, 1e-4, "share of a random axis");
        }
    }

    #[test]
    fn quantiles_undo_chances() {
        let some = Obliquity::of(Axis::from_deg(178.0), 9.0, &[Axis::from_deg(0.0), Axis::from_deg(20.0)]);
        for share in [0.025, 0.5, 0.975] {
            crate::assert_close!(some.below(some.quantile(share)), share, 1e-6, "share");
        }
    }

    #[test]
    fn classes_follow_their_borders() {
        assert_eq!(
            [class(14.9), class(15.0), class(75.0), class(75.1)],
            ["longitudinal", "oblique", "oblique", "transverse"]
        );
    }
}
