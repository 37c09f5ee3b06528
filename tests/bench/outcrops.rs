//! Trend fields about outcrops with known obliquity and residuals that are related over distance.

use std::f64::consts::TAU;

use rand::Rng as _;
use rand_distr::{Distribution as _, StandardNormal};

use ventifact::ground::{Axis, Point, Seed, Work};
use ventifact::science::obstacle::{Annulus, Ellipse, Field, Flow, Node, Outcome, TestSettings, test};

/// How residuals fall out of relation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Kind {
    Independent,
    /// exp(−h²/L²), as a smoothing kernel leaves.
    Gaussian {
        length: f64,
    },
    /// exp(−h/L), as natural textures have.
    Exponential {
        length: f64,
    },
}

/// A field of nodes one unit apart.
#[derive(Clone, Copy, Debug)]
pub struct Scene {
    pub size: usize,
    pub outcrop: Ellipse,
    /// φ from the wind axis to the crest axis, counter-clockwise, degrees; `None` for no turn at all.
    pub phi_deg: Option<f64>,
    pub kind: Kind,
    /// Standard deviation of the related residuals, and of noise of single nodes, degrees.
    pub related_deg: f64,
    pub noise_deg: f64,
}

pub const ANNULUS: Annulus = Annulus { inner: 1.0, outer: 3.0, radius_doubt: 0.3 };

const WAVES: usize = 300;

impl Scene {
    /// The nodes of one draw; the crest axis is drawn too, so that no direction is favoured.
    pub fn draw(&self, seed: u64) -> Vec<Node> {
        let mut random = Seed(seed).stream("outcrops", 0);
        let crest = random.random_range(0.0..180.0f64);
        let waves: Vec<[f64; 3]> = (0..WAVES)
            .map(|_| {
                let (sin, cos) = random.random_range(0.0..TAU).sin_cos();
                let k = match self.kind {
                    Kind::Independent => 0.0,
                    Kind::Gaussian { length } => {
                        let mut normal = || -> f64 { StandardNormal.sample(&mut random) };
                        normal().hypot(normal()) * 2f64.sqrt() / length
                    }
                    // The plane spectrum of exp(−h/L): P(wave number > k) = (1 + k²L²)^(−1/2).
                    Kind::Exponential { length } => {
                        let u: f64 = 1.0 - random.random_range(0.0..1.0);
                        (u.powi(-2) - 1.0).sqrt() / length
                    }
                };
                [k * cos, k * sin, random.random_range(0.0..TAU)]
            })
            .collect();
        let flow = Flow::round(self.outcrop);
        let crest_turn = (90.0 - crest).to_radians();
        let mut nodes = Vec::new();
        for i in 0..self.size * self.size {
            let at = Point::new((i % self.size) as f64, (i / self.size) as f64);
            let noise: f64 = StandardNormal.sample(&mut random);
            if flow.radii(at) < 1.0 {
                continue;
            }
            let related = match self.kind {
                Kind::Independent => 0.0,
                _ => {
                    let sum: f64 =
                        waves.iter().map(|[kx, ky, phase]| (kx * at.x + ky * at.y + phase).cos()).sum();
                    sum * (2.0 / WAVES as f64).sqrt()
                }
            };
            let turn = self
                .phi_deg
                .map_or(0.0, |phi| flow.turn(at, crest_turn - phi.to_radians()).deflection.to_degrees());
            // Turns are counter-clockwise, axes clockwise.
            let axis = crest - (turn + self.related_deg * related + self.noise_deg * noise);
            nodes.push(Node { at, axis: Axis::from_deg(axis), significant: true, presence: 1.0 });
        }
        nodes
    }

    /// The test of one draw.
    pub fn run(&self, seed: u64, virtual_count: usize) -> Outcome {
        let field = Field::of(self.draw(seed), &[self.outcrop], ANNULUS.outer).expect("a trend");
        let settings =
            TestSettings { annulus: ANNULUS, virtual_count, homogeneous: false, least_amplitude: 0.3 };
        let outcome = test(&field, &[self.outcrop], 0, &settings, 1.0, Seed(seed), &Work::quiet());
        outcome.expect("not stopped").expect("nodes enough")
    }
}

/// What many draws of one truth gave.
#[derive(Clone, Copy, Debug)]
pub struct Score {
    /// Mean error of φ, degrees, over the doubled angle.
    pub bias_deg: f64,
    pub sd_deg: f64,
    /// Share of intervals that hold the truth; an interval of all angles does.
    pub covered: f64,
    /// Share with a decision.
    pub decided: f64,
    pub amplitude: f64,
    pub n_eff: f64,
}

pub fn score(outcomes: &[Outcome], phi_deg: f64) -> Score {
    let n = outcomes.len() as f64;
    let error = |o: &Outcome| Axis::from_deg(o.obliquity.signed_deg).turn_from(Axis::from_deg(phi_deg));
    let (sin, cos) = outcomes.iter().fold((0.0, 0.0), |(s, c), o| {
        let (sin, cos) = (2.0 * error(o)).to_radians().sin_cos();
        (s + sin, c + cos)
    });
    let bias_deg = 0.5 * f64::atan2(sin, cos).to_degrees();
    let share = |f: &dyn Fn(&Outcome) -> bool| outcomes.iter().filter(|o| f(o)).count() as f64 / n;
    Score {
        bias_deg,
        sd_deg: (outcomes.iter().map(|o| (error(o) - bias_deg).powi(2)).sum::<f64>() / n).sqrt(),
        covered: share(&|o| o.obliquity.half_deg.is_none_or(|half| error(o).abs() <= half)),
        decided: share(&|o| o.undecided.is_none()),
        amplitude: outcomes.iter().map(|o| o.obliquity.amplitude).sum::<f64>() / n,
        n_eff: outcomes.iter().map(|o| o.estimate.n_eff).sum::<f64>() / n,
    }
}
