//! What a crest looks like in this picture: a bright ridge, a dark one, or the step at a slip face.

use serde::{Deserialize, Serialize};

use crate::ground::{Method, Read, Source, Symbol};

use super::candidates::{hessian, main_curvature};
use super::fields::Fields;

/// The record of the choice between models.
pub static METHOD: Method = Method {
    id: "crest.model",
    name: "Which model of a crest fits",
    question: "Are crests here ridges of tone or steps of it?",
    formula: "γ(slip face) = ⟨d³⟩/⟨d²⟩^{3/2},  d = r_x cos α + r_y sin α,  α = direction of ⟨|∇r|² ∇r⟩;  γ(bright ridge) = −γ(dark ridge) = −⟨λ³⟩/⟨λ²⟩^{3/2}",
    symbols: &[
        Symbol { symbol: "γ", meaning: "skewness of the model's response over the patch", unit: "1" },
        Symbol {
            symbol: "r_x, r_y",
            meaning: "first derivatives of tone at the crest scale",
            unit: "tone/px",
        },
        Symbol { symbol: "λ", meaning: "Hessian eigenvalue of the largest size", unit: "tone/px²" },
        Symbol { symbol: "α", meaning: "direction from dark to bright across slip faces", unit: "rad" },
    ],
    assumptions: &[
        "crests are narrow, strong and of one sense against gentle ground between them, so the right model's response has a long tail on one side",
        "slip faces of one patch fall to one half of the compass",
    ],
    limits: &[
        "a sinusoidal pattern fits all models alike: none stands out below 0.25 or three standard errors √(6/n), n = A/(2πσ²), and bright ridges are traced then",
        "a model that leads by less than 0.1 does not count as better: bright ridge goes before dark ridge, that before slip face",
        "one model holds for the whole patch",
        "light from along the crests shows no step",
    ],
    sources: &[Source {
        key: "ventifact-crest-model",
        authors: "this program",
        year: 2026,
        title: "Skewness of odd and even derivative responses as evidence of slip faces and ridges",
        published: "derived here; on two frames of river-bed dunes 0.9–1.3 against 0.1 and less",
        locator: "",
        read: Read::Derived,
    }],
};

/// Skewness below which no model stands out from a symmetric pattern.
const CLEAR: f64 = 0.25;

/// Lead in skewness that counts.
const LEAD: f64 = 0.1;

/// What a crest looks like.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum CrestModel {
    /// A ridge brighter than both its sides.
    BrightRidge,
    /// A ridge darker than both its sides.
    DarkRidge,
    /// Ridges of both kinds.
    BothRidges,
    /// A step of tone where the slip face begins.
    SlipFace,
}

impl CrestModel {
    pub fn name(self) -> &'static str {
        match self {
            Self::BrightRidge => "bright ridges",
            Self::DarkRidge => "dark ridges",
            Self::BothRidges => "bright and dark ridges",
            Self::SlipFace => "slip faces",
        }
    }
}

/// How well a model fits a patch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Fit {
    pub model: CrestModel,
    /// Skewness of its response: above 0.25 it stands out.
    pub skewness: f64,
}

/// Sums of powers of the derivatives over a patch.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Moments {
    count: f64,
    second: [f64; 3],
    third: [f64; 4],
    curvature: [f64; 2],
}

impl Moments {
    pub(super) fn add(&mut self, fields: &Fields, i: usize) {
        let (x, y) = (f64::from(fields.x[i]), f64::from(fields.y[i]));
        self.count += 1.0;
        add(&mut self.second, &[x * x, x * y, y * y]);
        add(&mut self.third, &[x * x * x, x * x * y, x * y * y, y * y * y]);
        let curvature = main_curvature(hessian(fields, i));
        add(&mut self.curvature, &[curvature * curvature, curvature * curvature * curvature]);
    }

    pub(super) fn merge(&mut self, other: &Self) {
        self.count += other.count;
        add(&mut self.second, &other.second);
        add(&mut self.third, &other.third);
        add(&mut self.curvature, &other.curvature);
    }

    /// The direction from dark to bright across most slip faces, that of ⟨|∇r|² ∇r⟩, and the skewness of
    /// slopes along it.
    pub fn slip_sense(&self) -> (f64, f64) {
        let [xxx, xxy, xyy, yyy] = self.third;
        let direction = (xxy + yyy).atan2(xxx + xyy);
        let (s, c) = direction.sin_cos();
        let square = self.second[0] * c * c + 2.0 * self.second[1] * s * c + self.second[2] * s * s;
        let cube = xxx * c.powi(3) + 3.0 * xxy * c * c * s + 3.0 * xyy * c * s * s + yyy * s.powi(3);
        (direction, ratio(cube, square, self.count))
    }

    /// Skewness from which a model stands out at a scale: 0.25, or three standard errors √(6/n) of the skewness
    /// of n = A/(2πσ²) independent responses, whichever is more.
    pub fn clear(&self, sigma: f64) -> f64 {
        let independent = (self.count / (std::f64::consts::TAU * sigma * sigma)).max(1.0);
        CLEAR.max(3.0 * (6.0 / independent).sqrt())
    }

    /// All models, best first. One that leads by less than a tenth leads nothing: then, and where none stands
    /// out, the order is bright ridge, dark ridge, slip face.
    pub fn fits(&self, sigma: f64) -> Vec<Fit> {
        let bright = -ratio(self.curvature[1], self.curvature[0], self.count);
        let mut fits = vec![
            Fit { model: CrestModel::BrightRidge, skewness: bright },
            Fit { model: CrestModel::DarkRidge, skewness: -bright },
            Fit { model: CrestModel::SlipFace, skewness: self.slip_sense().1 },
        ];
        let best = fits.iter().map(|fit| fit.skewness).fold(f64::NEG_INFINITY, f64::max);
        let first = if best < self.clear(sigma) {
            CrestModel::BrightRidge
        } else {
            fits.iter()
                .find(|fit| fit.skewness >= best - LEAD)
                .map_or(CrestModel::BrightRidge, |fit| fit.model)
        };
        fits.sort_by(|a, b| b.skewness.total_cmp(&a.skewness));
        fits.sort_by_key(|fit| fit.model != first);
        fits
    }
}

fn add(sums: &mut [f64], more: &[f64]) {
    sums.iter_mut().zip(more).for_each(|(a, b)| *a += b);
}

/// ⟨v³⟩/⟨v²⟩^{3/2} from sums; 0 for a flat field.
fn ratio(cubes: f64, squares: f64, count: f64) -> f64 {
    if squares > 0.0 && count > 0.0 { cubes / count / (squares / count).powf(1.5) } else { 0.0 }
}
