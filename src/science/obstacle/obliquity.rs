//! The obliquity of crests to the wind that parted round an outcrop.
//!
//! Crests that keep a fixed angle φ to the local flow turn with it: the residual trend at a place is
//! the flow's deflection there. Where the deflection is left and where right depends on where the
//! wind comes from, seen from the crest axis: the pattern of residuals tells φ without any wind record.

use crate::ground::{Method, Point, Symbol};
use crate::numeric::huber::{self, CLIP, huber, inverse, product, times};
use crate::numeric::tail::student_two_sided;

use super::correlation::thinned;
use super::field::{Field, Node, residual};
use super::flow::Flow;
use super::outline::Ellipse;
use super::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "obstacle.obliquity",
    name: "Obliquity from the turn of crests round an outcrop",
    question: "Do the crests run along, across or oblique to the wind that parts round this outcrop?",
    formula: "e = β₀ + A δ(z; α − φ), Huber's weights; far out δ = −(a/r)² sin 2(ϕ + φ), so e = β₀ + b_s (a/r)² sin 2ϕ + b_c (a/r)² cos 2ϕ with b_s = −A cos 2φ, b_c = −A sin 2φ; Cov = (JᵀJ)⁻¹ Jᵀ Σ J (JᵀJ)⁻¹, Σ = σ² ρ(h); half width of φ = ½ arcsin(t s⊥/A)",
    symbols: &[
        Symbol {
            symbol: "e",
            meaning: "residual trend: the doubled angle from the crest axis wrapped and halved, counter-clockwise",
            unit: "rad",
        },
        Symbol { symbol: "α", meaning: "crest axis: mean trend beyond every annulus", unit: "rad" },
        Symbol {
            symbol: "ϕ",
            meaning: "bearing of a place from the outcrop, counter-clockwise from the crest axis",
            unit: "rad",
        },
        Symbol {
            symbol: "φ",
            meaning: "angle from the wind axis to the crest axis, counter-clockwise",
            unit: "rad",
        },
        Symbol {
            symbol: "A",
            meaning: "amplitude: 1 for one wind that must go round, less for several winds or a low hill",
            unit: "1",
        },
        Symbol {
            symbol: "b",
            meaning: "along the wind (crests wrap round) b_s = −1; across it b_s = +1",
            unit: "1",
        },
        Symbol {
            symbol: "σ², ρ(h)",
            meaning: "variance of residuals, and their correlation",
            unit: "rad2, 1",
        },
        Symbol {
            symbol: "s⊥", meaning: "standard error of (A cos 2φ, A sin 2φ) across itself", unit: "1"
        },
    ],
    assumptions: &[
        "Crests keep one angle to the local flow close to the outcrop as they do far from it.",
        "The bedforms have had time to follow the flow.",
    ],
    limits: &[
        "Fore and aft are alike: the sense of the wind is invisible here.",
        "Several winds average: A falls to the resultant length of their doubled axes. A below the least amplitude is no decision, not a refutation.",
        "A too great radius lowers A and hardly touches φ; A is given over the doubt in the radius.",
        "Where the half width exceeds 30° there is no decision.",
    ],
    sources: &[at(DERIVED, "checked by simulation at 0, 30, 60 and 90°")],
};

/// Where a test looks, in radii, and how sure the radius is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Annulus {
    pub inner: f64,
    pub outer: f64,
    /// Share by which the radius may be wrong.
    pub radius_doubt: f64,
}

/// The published form: residuals on the two far-field harmonics.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Quadrupole {
    /// Local turn of the trend as a whole, radians.
    pub offset: f64,
    pub b_s: f64,
    pub b_c: f64,
}

/// The fit of the exact field of the flow.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Estimate {
    /// β₀ in degrees, counter-clockwise.
    pub offset_deg: f64,
    pub b_s: f64,
    pub b_c: f64,
    /// Standard errors of `b_s` and `b_c`, from related residuals.
    pub se_s: f64,
    pub se_c: f64,
    pub covariance: f64,
    /// Student's degrees of freedom of those errors.
    pub df: f64,
    pub n: usize,
    /// Independent residuals with the same error as the n related ones.
    pub n_eff: f64,
    /// Robust standard deviation of what the flow leaves unexplained, degrees.
    pub residual_deg: f64,
    pub quadrupole: Quadrupole,
}

/// Obliquity read from (b_s, b_c).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Obliquity {
    /// A.
    pub amplitude: f64,
    /// φ from the wind axis to the crest axis, counter-clockwise, degrees in (−90, 90].
    pub signed_deg: f64,
    /// Half width of the 95 % interval of φ, degrees; `None` when it is all angles.
    pub half_deg: Option<f64>,
}

/// The amplitude with the outcrop's radius taken `factor` times as large.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AtRadius {
    pub factor: f64,
    pub b_s: f64,
    pub b_c: f64,
    /// Sum of Huber's losses over its value at the stated radius.
    pub loss: f64,
}

/// Interval half widths beyond this are no answer between 0 and 90°.
pub const WIDEST_HALF_DEG: f64 = 30.0;
/// Fewer nodes in the annulus tell nothing.
pub const LEAST_NODES: usize = 12;
/// Most nodes of one fit; the error is reckoned over their pairs.
const MOST_NODES: usize = 1500;
/// Radii tried on either side of the stated one.
const RADIUS_STEPS: i32 = 3;

impl Obliquity {
    /// From the two coefficients with their errors; Fieller's interval for the angle of a vector.
    pub fn of(b: [f64; 2], variance: [f64; 3], t: f64) -> Self {
        let (p, q) = (-b[0], -b[1]);
        let amplitude = p.hypot(q);
        let double = q.atan2(p);
        let (sin, cos) = double.sin_cos();
        let across =
            (sin * sin * variance[0] + cos * cos * variance[1] - 2.0 * sin * cos * variance[2]).max(0.0);
        let reach = t * across.sqrt();
        let half_deg = (reach < amplitude).then(|| 0.5 * (reach / amplitude).asin().to_degrees());
        Self { amplitude, signed_deg: 0.5 * double.to_degrees(), half_deg }
    }

    /// The angle between wind axis and crest axis, degrees in [0, 90].
    pub fn folded_deg(&self) -> f64 {
        self.signed_deg.abs()
    }

    /// The interval of the folded angle.
    pub fn interval_deg(&self) -> Option<[f64; 2]> {
        let half = self.half_deg?;
        let (low, high) = (self.folded_deg() - half, self.folded_deg() + half);
        Some([if low < 0.0 { 0.0 } else { low }, if high > 90.0 { 90.0 } else { high }])
    }

    /// With another error added to the angle's own, degrees (half widths add in squares).
    pub fn widened(self, half_deg: f64) -> Self {
        let half = self.half_deg.map(|h| h.hypot(half_deg)).filter(|h| *h < 45.0);
        Self { half_deg: half, ..self }
    }
}

impl Estimate {
    /// The obliquity, the error of the regional crest axis included.
    pub fn obliquity(&self, crest_se_deg: f64) -> Obliquity {
        let t = student_two_sided(0.95, self.df);
        let variance = [self.se_s.powi(2), self.se_c.powi(2), self.covariance];
        Obliquity::of([self.b_s, self.b_c], variance, t).widened(1.96 * crest_se_deg)
    }
}

/// The significant nodes in an outcrop's annulus.
pub fn in_annulus<'a>(field: &'a Field, flow: &Flow, annulus: &Annulus) -> Vec<&'a Node> {
    let within = |n: &&Node| {
        let r = flow.radii(n.at);
        n.significant && r >= annulus.inner && r <= annulus.outer
    };
    field.nodes.iter().filter(within).collect()
}

/// Fits the exact field about `outcrop`; `None` where too few nodes stand round it or they do not tell
/// the coefficients apart.
pub fn estimate(field: &Field, outcrop: &Ellipse, annulus: &Annulus) -> Option<Estimate> {
    let flow = Flow::round(*outcrop);
    let (places, residuals) = annulus_residuals(field, &flow, annulus);
    let quadrupole = quadrupole(field.crest_turn(), outcrop, &places, &residuals)?;
    let fit = exact(field.crest_turn(), &flow, &places, &residuals, quadrupole)?;
    let error = error_of(&fit, &places, field)?;
    let c = &error.covariance;
    Some(Estimate {
        offset_deg: fit.coefficients[0].to_degrees(),
        b_s: -fit.coefficients[1],
        b_c: -fit.coefficients[2],
        se_s: c[1][1].sqrt(),
        se_c: c[2][2].sqrt(),
        covariance: c[1][2],
        df: error.df,
        n: places.len(),
        n_eff: error.n_eff,
        residual_deg: fit.scale.to_degrees(),
        quadrupole,
    })
}

/// (b_s, b_c) of the exact field alone, for virtual outcrops and other radii.
pub fn coefficients(field: &Field, outcrop: &Ellipse, annulus: &Annulus) -> Option<[f64; 2]> {
    let flow = Flow::round(*outcrop);
    let (places, residuals) = annulus_residuals(field, &flow, annulus);
    let start = quadrupole(field.crest_turn(), outcrop, &places, &residuals)?;
    let fit = exact(field.crest_turn(), &flow, &places, &residuals, start)?;
    Some([-fit.coefficients[1], -fit.coefficients[2]])
}

/// The fit at radii within the doubt. All use the same nodes, those beyond the largest radius: else the losses
/// could not be compared.
pub fn over_radius(field: &Field, outcrop: &Ellipse, annulus: &Annulus) -> Vec<AtRadius> {
    let largest = Flow::round(outcrop.scaled(1.0 + annulus.radius_doubt));
    let (mut places, mut residuals) = annulus_residuals(field, &Flow::round(*outcrop), annulus);
    let outside: Vec<bool> = places.iter().map(|p| largest.radii(*p) >= 1.0).collect();
    let mut keep = outside.iter();
    places.retain(|_| *keep.next().unwrap_or(&false));
    let mut keep = outside.iter();
    residuals.retain(|_| *keep.next().unwrap_or(&false));
    let turn = field.crest_turn();
    let fitted = |factor: f64| {
        let shape = outcrop.scaled(factor);
        let start = quadrupole(turn, &shape, &places, &residuals)?;
        exact(turn, &Flow::round(shape), &places, &residuals, start)
    };
    let Some(stated) = fitted(1.0) else { return Vec::new() };
    let own = loss_of(&stated.residuals, stated.scale);
    let at = |factor: f64| {
        let fit = fitted(factor)?;
        let loss = if own > 0.0 { loss_of(&fit.residuals, stated.scale) / own } else { 1.0 };
        Some(AtRadius { factor, b_s: -fit.coefficients[1], b_c: -fit.coefficients[2], loss })
    };
    (-RADIUS_STEPS..=RADIUS_STEPS)
        .map(|k| 1.0 + annulus.radius_doubt * f64::from(k) / f64::from(RADIUS_STEPS))
        .filter_map(at)
        .collect()
}

/// The radius (as a share of the stated one) at which the flow fits best, where the data tell: both ends of the
/// doubt must fit worse by more than the 95 % point of χ² with one degree of freedom.
pub fn best_radius(over: &[AtRadius], n_eff: f64) -> Option<f64> {
    const CHI2: f64 = 3.841;
    let (first, last) = (over.first()?, over.last()?);
    let best = over.iter().min_by(|a, b| a.loss.total_cmp(&b.loss))?;
    let worse = |r: &AtRadius| n_eff * (r.loss / best.loss).ln() > CHI2;
    (worse(first) && worse(last)).then_some(best.factor)
}

/// Places and residuals of the nodes in an annulus, thinned where there are very many.
fn annulus_residuals(field: &Field, flow: &Flow, annulus: &Annulus) -> (Vec<Point>, Vec<f64>) {
    let all = in_annulus(field, flow, annulus);
    let of = |n: &Node| (n.at, residual(n.axis, field.crest));
    thinned(all.len(), MOST_NODES).into_iter().map(|i| of(all[i])).unzip()
}

/// The published regression on s = (a/r)² sin 2ϕ and c = (a/r)² cos 2ϕ with intercept, a the radius of equal
/// area, `crest_turn` counter-clockwise from east; radians.
pub fn quadrupole(
    crest_turn: f64,
    outcrop: &Ellipse,
    places: &[Point],
    residuals: &[f64],
) -> Option<Quadrupole> {
    if places.len() < LEAST_NODES {
        return None;
    }
    let (c, area) = (outcrop.centre, outcrop.major * outcrop.minor);
    let rows: Vec<[f64; 3]> = places
        .iter()
        .map(|p| {
            let (x, y) = (p.x - c.x, p.y - c.y);
            let strength = area / (x * x + y * y);
            let (sin, cos) = (2.0 * (y.atan2(x) - crest_turn)).sin_cos();
            [1.0, strength * sin, strength * cos]
        })
        .collect();
    let [offset, b_s, b_c] = huber(&rows, residuals)?.coefficients;
    Some(Quadrupole { offset, b_s, b_c })
}

/// A converged fit of e = β₀ + A δ(φ) in (β₀, A cos 2φ, A sin 2φ).
struct Exact {
    coefficients: [f64; 3],
    rows: Vec<[f64; 3]>,
    residuals: Vec<f64>,
    scale: f64,
}

/// Gauss–Newton with Huber's weights from the far-field answer, in coordinates in which the far field
/// is straight, so that a few steps do and an amplitude of zero is no singular point.
fn exact(turn: f64, flow: &Flow, places: &[Point], e: &[f64], start: Quadrupole) -> Option<Exact> {
    const STEPS: usize = 25;
    let mut at = [start.offset, -start.b_s, -start.b_c];
    for _ in 0..STEPS {
        let (rows, left) = linearised(turn, flow, places, e, &at);
        let scale = huber::scale_of(&left);
        let step = huber::solve(&rows, &left, |i| huber::weight(left[i], scale))?;
        (0..3).for_each(|k| at[k] += step[k]);
        if step.iter().all(|s| s.abs() < 1e-8) {
            break;
        }
    }
    let (rows, residuals) = linearised(turn, flow, places, e, &at);
    let scale = huber::scale_of(&residuals);
    at.iter().all(|c| c.is_finite()).then_some(Exact { coefficients: at, rows, residuals, scale })
}

/// Rows ∂e/∂(β₀, p, q) and what is left of e at `at`, with p = A cos 2φ and q = A sin 2φ.
fn linearised(
    turn: f64,
    flow: &Flow,
    places: &[Point],
    e: &[f64],
    at: &[f64; 3],
) -> (Vec<[f64; 3]>, Vec<f64>) {
    let [offset, p, q] = *at;
    let amplitude = p.hypot(q);
    let double = q.atan2(p);
    let (sin, cos) = double.sin_cos();
    let mut rows = Vec::with_capacity(places.len());
    let mut left = Vec::with_capacity(places.len());
    for (place, e) in places.iter().zip(e) {
        let flow = flow.turn(*place, turn - 0.5 * double);
        // The wind's direction is α − φ, so ∂δ/∂φ = −∂δ/∂(wind).
        let (delta, half) = (flow.deflection, -0.5 * flow.per_wind);
        rows.push([1.0, cos * delta - sin * half, sin * delta + cos * half]);
        left.push(e - offset - amplitude * delta);
    }
    (rows, left)
}

/// Errors of a fit whose residuals are related.
struct FitError {
    covariance: [[f64; 3]; 3],
    df: f64,
    n_eff: f64,
}

/// Cov = (JᵀJ)⁻¹ Jᵀ Σ J (JᵀJ)⁻¹ with Σ = σ²R over pseudo-residuals ψ(e)/ψ̄′ (Huber). σ² from the
/// residuals themselves: their sum of squares is σ² tr(MR), M = 1 − J (JᵀJ)⁻¹ Jᵀ, with tr(MR)²/tr(MRMR)
/// degrees of freedom (Satterthwaite).
fn error_of(fit: &Exact, places: &[Point], field: &Field) -> Option<FitError> {
    let n = places.len();
    let limit = CLIP * fit.scale;
    let unclipped = fit.residuals.iter().filter(|e| e.abs() <= limit).count().max(1) as f64 / n as f64;
    let squares: f64 = fit.residuals.iter().map(|e| (e.clamp(-limit, limit) / unclipped).powi(2)).sum();
    let mut gram = [[0.0; 3]; 3];
    for row in &fit.rows {
        for a in 0..3 {
            for b in 0..3 {
                gram[a][b] += row[a] * row[b];
            }
        }
    }
    let inner = inverse(gram)?;
    let add = |sum: &mut [f64; 3], r: f64, row: &[f64; 3]| {
        sum.iter_mut().zip(row).for_each(|(sum, x)| *sum += r * x);
    };
    // R J, and Σ R²: the rows of R are made as they are needed.
    let mut related = vec![[0.0; 3]; n];
    let mut square_sum = 0.0;
    for i in 0..n {
        for j in 0..i {
            let r = field.correlation.at(places[i].distance(places[j]));
            square_sum += 2.0 * r * r;
            add(&mut related[i], r, &fit.rows[j]);
            add(&mut related[j], r, &fit.rows[i]);
        }
        square_sum += 1.0;
        add(&mut related[i], 1.0, &fit.rows[i]);
    }
    let (mut middle, mut twice) = ([[0.0; 3]; 3], [[0.0; 3]; 3]);
    for (row, y) in fit.rows.iter().zip(&related) {
        for a in 0..3 {
            for b in 0..3 {
                middle[a][b] += row[a] * y[b];
                twice[a][b] += y[a] * y[b];
            }
        }
    }
    let trace = |m: &[[f64; 3]; 3]| m[0][0] + m[1][1] + m[2][2];
    let hat = product(&inner, &middle);
    let left = (n as f64 - trace(&hat)).max(1e-9);
    let left_square = square_sum - 2.0 * trace(&product(&inner, &twice)) + trace(&product(&hat, &hat));
    let df = (left * left / left_square.max(1e-12)).max(1.0);
    let variance = squares / left;
    let sandwich = product(&hat, &inner);
    let covariance = sandwich.map(|row| row.map(|x| variance * x));
    // n (JᵀJ)⁻¹ would be the covariance of independent ones.
    let alone = times(&inner, &[0.0, 1.0, 0.0])[1] + times(&inner, &[0.0, 0.0, 1.0])[2];
    let together = sandwich[1][1] + sandwich[2][2];
    let n_eff = n as f64 * (alone / together.max(1e-300)).min(1.0);
    Some(FitError { covariance, df, n_eff })
}

/// Σ of Huber's loss.
fn loss_of(residuals: &[f64], scale: f64) -> f64 {
    let limit = CLIP * scale;
    let of = |e: f64| {
        let size = e.abs();
        if size <= limit { 0.5 * size * size } else { limit * (size - 0.5 * limit) }
    };
    residuals.iter().map(|e| of(*e)).sum()
}
