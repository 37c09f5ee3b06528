//! The same outcrop set down where none stands: what the ground gives by itself.

use std::f64::consts::{PI, TAU};

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{Method, Point, Seed, Stopped, Symbol, Work};

use super::correlation::Correlation;
use super::dipole::dipole;
use super::field::Field;
use super::flow::Flow;
use super::obliquity::{Annulus, coefficients};
use super::outline::Ellipse;
use super::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "obstacle.virtual",
    name: "Virtual outcrops",
    question: "Would ground without an outcrop turn its crests as much?",
    formula: "p = (1 + #{Aₖ ≥ A})/(K + 1) over K virtual outcrops; worth M = 1/mean ρ_b² independent ones, ρ_b the correlation of b between virtual outcrops",
    symbols: &[
        Symbol { symbol: "A", meaning: "amplitude at the outcrop, and Aₖ at the virtual ones", unit: "1" },
        Symbol {
            symbol: "K",
            meaning: "virtual outcrops: same outline, at least 4 radii from every real one, in the patch",
            unit: "1",
        },
        Symbol {
            symbol: "M",
            meaning: "how many independent ones they are worth, since they overlap",
            unit: "1",
        },
    ],
    assumptions: &["Without the outcrop its place would be like the rest of the patch."],
    limits: &[
        "Only rotated where the user says the field is homogeneous.",
        "Where the patch has room for fewer than 19 independent places no p is given.",
        "Keeps the correlation of the ground, which shuffling nodes would destroy.",
    ],
    sources: &[at(DERIVED, "randomization with the place as the unit")],
};

/// What the virtual outcrops say.
#[derive(Clone, Debug, PartialEq)]
pub struct Null {
    /// K: virtual outcrops that could be set down and fitted.
    pub count: usize,
    /// M.
    pub independent: f64,
    /// p of the amplitude; `None` when `count` or `independent` is too small.
    pub p: Option<f64>,
    /// p of the dipole's size.
    pub dipole_p: Option<f64>,
    /// Standard deviation of b among them: the error of b as the ground itself shows it.
    pub b_sd: Option<f64>,
}

/// How virtual outcrops are set down.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Placing {
    /// K asked for.
    pub count: usize,
    /// The field is the same all over and in all directions: outlines may be rotated.
    pub homogeneous: bool,
}

/// Radii between a virtual outcrop's centre and a real one.
/// Where a virtual outcrop stands, its coefficients, and the size of its dipole.
type Virtual = (Point, [f64; 2], Option<f64>);

const CLEARANCE: f64 = 4.0;
/// Share of the real annulus' nodes a virtual one must hold.
const LEAST_COVER: f64 = 0.75;
/// Draws per outcrop before the patch counts as full.
const TRIES: usize = 40;
/// Independent places below which a rank says nothing at the 5 % level.
const LEAST_INDEPENDENT: f64 = 19.0;
/// Virtual outcrops below which no p is given.
const LEAST_COUNT: usize = 999;

/// Sets down virtual copies of `outcrops[which]` and ranks `amplitude` and `dipole_size` among theirs.
/// `step` is the distance of neighbouring nodes.
///
/// # Errors
/// [`Stopped`].
#[allow(clippy::too_many_arguments)]
pub fn null(
    field: &Field,
    outcrops: &[Ellipse],
    which: usize,
    annulus: &Annulus,
    placing: Placing,
    step: f64,
    observed: (f64, Option<f64>),
    seed: Seed,
    work: &Work,
) -> Result<Null, Stopped> {
    let own = outcrops[which];
    let held = |shape: &Ellipse| {
        let flow = Flow::round(*shape);
        let within = |p: Point| (annulus.inner..=annulus.outer).contains(&flow.radii(p));
        field.nodes.iter().filter(|n| within(n.at)).count() as f64
    };
    let wanted = LEAST_COVER * held(&own);
    let clear =
        |p: Point| outcrops.iter().all(|o| p.distance(o.centre) >= CLEARANCE * own.radius().max(o.radius()));
    let drawn: Vec<Option<Virtual>> = (0..placing.count)
        .into_par_iter()
        .map(|k| {
            work.advance(1)?;
            let mut random = seed.stream("obstacle.virtual", k as u64);
            for _ in 0..TRIES {
                let node = field.nodes[random.random_range(0..field.nodes.len())].at;
                let jitter = [random.random_range(-0.5..0.5) * step, random.random_range(-0.5..0.5) * step];
                let turn = random.random_range(0.0..PI);
                let centre = Point::new(node.x + jitter[0], node.y + jitter[1]);
                let mut shape = own.moved_to(centre);
                if placing.homogeneous {
                    shape.turn = (shape.turn + turn) % TAU;
                }
                if !clear(centre) || held(&shape) < wanted {
                    continue;
                }
                if let Some(b) = coefficients(field, &shape, annulus) {
                    return Ok(Some((centre, b, dipole(field, &shape, annulus).map(|d| d.size))));
                }
            }
            Ok(None)
        })
        .collect::<Result<_, Stopped>>()?;
    let found: Vec<_> = drawn.into_iter().flatten().collect();
    let count = found.len();
    let independent = independent(&found, own.radius() * annulus.outer);
    let enough = count >= placing.count.max(LEAST_COUNT) && independent >= LEAST_INDEPENDENT;
    let rank = |observed: f64, values: &mut dyn Iterator<Item = f64>| {
        let reached = values.filter(|v| *v >= observed).count();
        (1.0 + reached as f64) / (count as f64 + 1.0)
    };
    let p = enough.then(|| rank(observed.0, &mut found.iter().map(|(_, b, _)| b[0].hypot(b[1]))));
    let with_dipole = found.iter().filter(|(.., d)| d.is_some()).count() == count;
    let dipole_p = observed
        .1
        .filter(|_| enough && with_dipole)
        .map(|size| rank(size, &mut found.iter().filter_map(|(.., d)| *d)));
    let squares: f64 = found.iter().map(|(_, b, _)| b[0] * b[0] + b[1] * b[1]).sum();
    let b_sd = (count > 1).then(|| (0.5 * squares / count as f64).sqrt());
    Ok(Null { count, independent, p, dipole_p, b_sd })
}

/// M = 1/mean ρ²: as many independent virtual outcrops would know the spread of b as well.
fn independent(found: &[(Point, [f64; 2], Option<f64>)], reach: f64) -> f64 {
    const MOST: usize = 600;
    let picked = super::correlation::thinned(found.len(), MOST);
    if picked.len() < 3 {
        return picked.len() as f64;
    }
    let places: Vec<Point> = picked.iter().map(|i| found[*i].0).collect();
    // Both coefficients fall off alike; one of them is enough to tell how fast.
    let b: Vec<f64> = picked.iter().map(|i| found[*i].1[0]).collect();
    let mean = b.iter().sum::<f64>() / b.len() as f64;
    let b: Vec<f64> = b.into_iter().map(|x| x - mean).collect();
    let (rho, _) = Correlation::fit(&b, &places, 2.0 * reach);
    let n = places.len();
    let mut sum = n as f64;
    for i in 0..n {
        for j in 0..i {
            sum += 2.0 * rho.at(places[i].distance(places[j])).powi(2);
        }
    }
    (n * n) as f64 / sum
}
