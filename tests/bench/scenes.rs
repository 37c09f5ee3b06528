//! Simulated radar scenes run as a study runs them: the test of preference on all nodes, the mean axis and
//! its interval on those that passed the noise floor.

use rand::Rng as _;
use ventifact::ground::{Axis, Grid, Place, Point, Polygon, Seed, Work};
use ventifact::science::axial::{AxialSample, Nodes, Summary, SummarySettings, summarise};
use ventifact::science::orientation::{NodeField, TensorSettings, trend_nodes};
use ventifact::science::scene::{DuneTexture, speckle, speckled};

/// One kind of scene.
#[derive(Clone, Copy, Debug)]
pub struct Kind {
    pub looks: f64,
    /// Amplitude of ln tone; 0 for pure speckle.
    pub amplitude: f64,
    pub spacing: f64,
    pub spread_deg: f64,
}

/// What a scene gave.
#[derive(Clone, Copy, Debug)]
pub struct Outcome {
    pub claimed: bool,
    /// Whether the interval holds the truth.
    pub covered: bool,
    /// Mean axis against the truth, degrees.
    pub error_deg: f64,
}

/// Draws scene number `index` of a kind, `size` pixels on a side, and measures it.
pub fn run(kind: Kind, size: usize, index: u64) -> Outcome {
    let place = Place::pixels(0.0);
    let frame = place.local_frame(Point::new(0.0, 0.0)).expect("pixels");
    let mut rng = Seed(20).stream("coverage", index);
    let trend = Axis::from_deg(rng.random_range(0.0..180.0));
    let texture = DuneTexture { trend, spacing: kind.spacing, spread_deg: kind.spread_deg, bandwidth: 0.15 };
    let tone = if kind.amplitude > 0.0 {
        let field = texture.sample(size, size, frame, &mut rng);
        field.map(|v| (kind.amplitude * f64::from(v)).exp() as f32)
    } else {
        Grid::filled(size, size, 1.0)
    };
    let image = speckled(&tone, &speckle(size, size, kind.looks, &mut rng));
    let sigma = (kind.spacing / 6.0).max(1.0);
    let rho = (0.5 * kind.spacing).max(2.0 * sigma);
    let settings = TensorSettings {
        gradient_scale_px: sigma,
        integration_scale_px: rho,
        node_step_px: rho,
        significance: 0.01,
        logarithm: true,
    };
    let patch = Polygon::rectangle(size as f64, size as f64);
    let field = trend_nodes(&image, &patch, &place, &settings, &Work::quiet()).expect("not stopped");
    let claimed = summary(&field, true, index).preferred;
    let shown = summary(&field, false, index);
    let error_deg = shown.mean.map_or(90.0, |mean| mean.turn_from(trend));
    let covered = shown.interval.half_deg.is_none_or(|half| error_deg.abs() <= half);
    Outcome { claimed, covered, error_deg }
}

fn summary(field: &NodeField, all: bool, index: u64) -> Summary {
    let nodes = field.nodes.iter().filter(|n| all || n.significant);
    let (axes, at): (Vec<Axis>, Vec<Point>) = nodes.map(|n| (n.axis, n.at)).unzip();
    let nodes = Nodes { at: &at, spacing: field.node_step_px, kernel_sigma: field.integration_scale_ground };
    let sample = AxialSample { axes: &axes, weights: None, nodes: Some(nodes) };
    let settings = SummarySettings { significance: 0.05, resamples: 400 };
    summarise(&sample, settings, Seed(index), &Work::quiet()).expect("not stopped")
}

/// Shares of scenes that claim a trend and whose interval holds the truth, and the RMS error in degrees.
pub fn shares(outcomes: &[Outcome]) -> (f64, f64, f64) {
    let n = outcomes.len() as f64;
    let share = |f: &dyn Fn(&Outcome) -> bool| outcomes.iter().filter(|o| f(o)).count() as f64 / n;
    let square: f64 = outcomes.iter().map(|o| o.error_deg * o.error_deg).sum();
    (share(&|o| o.claimed), share(&|o| o.covered), (square / n).sqrt())
}
