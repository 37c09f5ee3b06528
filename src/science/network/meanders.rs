//! Meanders: wavelength by two methods, amplitude, and the radius of bends.

use std::f64::consts::{PI, TAU};

use crate::ground::{Method, Point, Read, Source, Symbol};
use crate::numeric::quantile;
use crate::numeric::tail::student_two_sided;
use crate::science::axial::sources::{DERIVED, at};

use super::course::{Course, distances};
use super::planform::Meander;

pub static METHOD: Method = Method {
    id: "network.meanders",
    name: "Meander wavelength by spectrum of direction and by inflections",
    question: "How long are the meanders, how wide do they swing, how sharp are their bends?",
    formula: "P(q) = |Σ h(s)(θ − θ_v)e^{−2πiqs}|², M = 1/q at its peak, λ = M/K; λ = 2·mean |x_{i+1} − x_i| over inflections; y₀ = greatest distance of a bend from the chord of its inflections",
    symbols: &[
        Symbol {
            symbol: "θ, θ_v", meaning: "direction of the channel and of the valley line", unit: "rad"
        },
        Symbol { symbol: "s", meaning: "distance along the channel", unit: "m" },
        Symbol { symbol: "h", meaning: "Hann's taper", unit: "1" },
        Symbol { symbol: "M, λ", meaning: "wavelength along the channel, along the valley", unit: "m" },
        Symbol { symbol: "K", meaning: "sinuosity", unit: "1" },
        Symbol {
            symbol: "x_i",
            meaning: "inflections; bends that turn less than 15° go to their neighbours",
            unit: "m",
        },
    ],
    assumptions: &["Bends of one kind: a reach of mixed bends has a wide spectrum and the interval says so."],
    limits: &[
        "Inflections are looked for on the course cleaned over a sixteenth of the wavelength by spectrum, or over four cells where there is none.",
        "At least three wavelengths, and a peak with a third of the power about it; else no wavelength is given.",
        "Bends shorter than about six cells are smoothed away.",
    ],
    sources: &[
        LANGBEIN,
        Source {
            key: "leopold1960",
            authors: "Leopold, L. B.; Wolman, M. G.",
            year: 1960,
            title: "River meanders",
            published: "Geological Society of America Bulletin 71, 769–794",
            locator: "λ = 10.9 w^1.01 = 4.7 Rc^0.98 in feet",
            read: Read::Memory,
        },
        at(DERIVED, "relations put into metres; intervals"),
    ],
};

pub(super) const LANGBEIN: Source = Source {
    key: "langbein1966",
    authors: "Langbein, W. B.; Leopold, L. B.",
    year: 1966,
    title: "River meanders: theory of minimum variance",
    published: "U.S. Geological Survey Professional Paper 422-H",
    locator: "sine-generated curve",
    read: Read::Memory,
};

/// Metres in a foot.
const FOOT: f64 = 0.3048;
/// A bend that turns less is no bend.
const LEAST_TURN: f64 = 15.0 * PI / 180.0;
/// Wavelengths a course must hold.
const LEAST_WAVES: f64 = 3.0;
/// Directions of a spectrum; more are averaged to as many.
const MOST_DIRECTIONS: usize = 4096;
/// Share of the power within a factor 1.5 of the peak that makes it one.
const LEAST_SHARE: f64 = 1.0 / 3.0;

/// Meander wavelength in metres of a free channel of this width in metres: 10.9 w^{1.01} in feet.
pub fn wavelength_of_width(width_m: f64) -> f64 {
    10.9 * (width_m / FOOT).powf(1.01) * FOOT
}

/// Meander wavelength in metres of bends of this radius in metres: 4.7 Rc^{0.98} in feet.
pub fn wavelength_of_radius(radius_m: f64) -> f64 {
    4.7 * (radius_m / FOOT).powf(0.98) * FOOT
}

/// A stretch between inflections, by point of the course.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bend {
    from: usize,
    to: usize,
}

/// Wavelength by the spectrum of direction about the valley's; `None` where the course is too short or no
/// wavelength stands out.
pub(super) fn by_spectrum(course: &Course, valley: &[Point], sinuosity: f64) -> Option<Meander> {
    let own = course.directions();
    let line = Course { step: 1.0, pixels: Vec::new(), ground: valley.to_vec() }.directions();
    // Both begin on their own turn of the circle.
    let turns = ((own[own.len() / 2] - line[own.len() / 2]) / TAU).round() * TAU;
    let away: Vec<f64> = own.iter().zip(&line).map(|(a, b)| a - b - turns).collect();
    let away: Vec<f64> = away
        .chunks(away.len().div_ceil(MOST_DIRECTIONS))
        .map(|few| few.iter().sum::<f64>() / few.len() as f64)
        .collect();
    let n = away.len();
    let length = course.length();
    let mean = away.iter().sum::<f64>() / n as f64;
    let square = away.iter().map(|a| (a - mean).powi(2)).sum::<f64>() / n as f64;
    // Swings of less than the least turn.
    if square < 0.5 * (0.5 * LEAST_TURN).powi(2) {
        return None;
    }
    let tapered: Vec<f64> =
        (0..n).map(|i| (away[i] - mean) * 0.5 * (1.0 - (TAU * (i as f64 + 0.5) / n as f64).cos())).collect();
    let power = |waves: f64| {
        let (sin, cos) = (TAU * waves / n as f64).sin_cos();
        // e^{iωk} by rotation.
        let (mut re, mut im, mut c, mut s) = (0.0, 0.0, 1.0f64, 0.0f64);
        for v in &tapered {
            re += v * c;
            im += v * s;
            (c, s) = (c * cos - s * sin, s * cos + c * sin);
        }
        re * re + im * im
    };
    // A third of a wave apart the taper leaves nothing out; shorter waves than eight steps are not looked for.
    let most = n as f64 / 8.0;
    let count = ((most - LEAST_WAVES) * 3.0) as usize;
    if most <= LEAST_WAVES || count < 3 {
        return None;
    }
    let waves: Vec<f64> = (0..count).map(|i| LEAST_WAVES + i as f64 / 3.0).collect();
    let powers: Vec<f64> = waves.iter().map(|w| power(*w)).collect();
    let whole: f64 = powers.iter().sum();
    let top = (0..powers.len()).max_by(|a, b| powers[*a].total_cmp(&powers[*b]).then(b.cmp(a)))?;
    if whole <= 0.0 || top == 0 {
        return None;
    }
    let peak = crate::numeric::maximum::golden(power, waves[top] - 0.4, waves[top] + 0.4, 1e-6 * waves[top]);
    let near: Vec<usize> = (0..waves.len()).filter(|i| (waves[*i] / peak).ln().abs() < 1.5f64.ln()).collect();
    let about: f64 = near.iter().map(|i| powers[*i]).sum();
    if about < LEAST_SHARE * whole {
        return None;
    }
    let spread =
        (near.iter().map(|i| powers[*i] * (waves[*i] / peak).ln().powi(2)).sum::<f64>() / about).sqrt();
    // As many independent waves as the course holds.
    let half = student_two_sided(0.95, (peak - 1.0).max(1.0)) * spread / peak.sqrt();
    let arc = length / peak;
    let across: Vec<f64> = course.ground.iter().zip(valley).map(|(a, b)| a.distance(*b)).collect();
    let mean_square = across.iter().map(|d| d * d).sum::<f64>() / across.len() as f64;
    Some(Meander {
        wavelength: arc / sinuosity,
        arc_wavelength: arc,
        ci95: Some([arc / sinuosity * (-half).exp(), arc / sinuosity * half.exp()]),
        amplitude: (2.0 * mean_square).sqrt(),
    })
}

/// Bends between inflections, whole ones only (the first and the last are cut off by the ends).
pub(super) fn bends(course: &Course) -> Vec<Bend> {
    let theta = course.directions();
    // Extremes of direction are the inflections; a swing below the least turn is none.
    let mut turning: Vec<usize> = vec![0];
    let mut rising: Option<bool> = None;
    let mut extreme = 0usize;
    for i in 1..theta.len() {
        match rising {
            None => {
                if (theta[i] - theta[turning[0]]).abs() >= LEAST_TURN {
                    rising = Some(theta[i] > theta[turning[0]]);
                    extreme = i;
                }
            }
            Some(up) => {
                let further = if up { theta[i] > theta[extreme] } else { theta[i] < theta[extreme] };
                if further {
                    extreme = i;
                } else if (theta[i] - theta[extreme]).abs() >= LEAST_TURN {
                    turning.push(extreme);
                    rising = Some(!up);
                    extreme = i;
                }
            }
        }
    }
    // Direction i belongs to the step from point i to i + 1; an extreme between points is rounded to one.
    turning.windows(2).skip(1).map(|w| Bend { from: w[0], to: w[1] }).collect()
}

/// Wavelength by twice the spacing of inflections; `None` for fewer than four bends.
pub(super) fn by_inflections(course: &Course, bends: &[Bend]) -> Option<Meander> {
    if bends.len() < 4 {
        return None;
    }
    let n = bends.len() as f64;
    let along = course.distances();
    let middle = |i: usize| {
        let (a, b) = (course.ground[i], course.ground[i + 1]);
        Point::new(0.5 * (a.x + b.x), 0.5 * (a.y + b.y))
    };
    let chords: Vec<f64> = bends.iter().map(|b| middle(b.from).distance(middle(b.to))).collect();
    let arcs = bends.iter().map(|b| along[b.to] - along[b.from]).sum::<f64>() / n;
    let mean = chords.iter().sum::<f64>() / n;
    let variance = chords.iter().map(|c| (c - mean).powi(2)).sum::<f64>() / (n - 1.0);
    let half = student_two_sided(0.95, n - 1.0) * (variance / n).sqrt();
    let swing = |b: &Bend| {
        let (p, q) = (middle(b.from), middle(b.to));
        let size = p.distance(q);
        let off = |r: &Point| ((q.x - p.x) * (r.y - p.y) - (q.y - p.y) * (r.x - p.x)).abs() / size;
        if size > 0.0 { course.ground[b.from..=b.to].iter().map(off).fold(0.0, f64::max) } else { 0.0 }
    };
    Some(Meander {
        wavelength: 2.0 * mean,
        arc_wavelength: 2.0 * arcs,
        ci95: Some([2.0 * (mean - half).max(0.0), 2.0 * (mean + half)]),
        amplitude: bends.iter().map(swing).sum::<f64>() / n,
    })
}

/// Quartiles of the radius of curvature: length over turn of the middle third of each bend.
pub(super) fn radii(course: &Course, bends: &[Bend]) -> Option<[f64; 3]> {
    let theta = course.directions();
    let along = distances(&course.ground);
    let mut radii: Vec<f64> = bends
        .iter()
        .filter_map(|b| {
            let third = (b.to - b.from) / 3;
            let (i, k) = (b.from + third, b.to - third);
            let turn = (theta[k] - theta[i]).abs();
            (k > i && turn > 0.0).then(|| (along[k] - along[i]) / turn)
        })
        .collect();
    if radii.is_empty() {
        return None;
    }
    let [low, middle, high] = quantile::of(&mut radii, [0.25, 0.5, 0.75]);
    Some([middle, low, high])
}
