//! Stations of a network strung along its flow paths, from the outlets upward: what profiles, χ and the slopes
//! of area rest on.

use crate::ground::{Network, Point};

use super::path::{Paths, own_stations};

/// A station with elevation and area, and the one below it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Step {
    pub at: Point,
    /// Ground distance from the outlet.
    pub s: f64,
    pub z: f64,
    pub area: f64,
    /// Index of the next station down; `None` for the lowest of a tree.
    pub below: Option<usize>,
    /// Whether a junction lies between the two, so that area leaps at the lower.
    pub leaps: bool,
}

/// The stations of one flow path, lowest first.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Run {
    /// Index of the path in [`Paths::list`].
    pub path: usize,
    pub first: usize,
    pub end: usize,
}

/// All stations whose elevation and area are known; a station stands after the one below it.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Ascent {
    pub steps: Vec<Step>,
    /// The trunk first, then by length; paths without two stations are left out.
    pub runs: Vec<Run>,
}

impl Ascent {
    pub fn of(network: &Network, paths: &Paths) -> Self {
        let into = network.incoming();
        let out = network.outgoing();
        let mut steps: Vec<Step> = Vec::new();
        let mut runs = Vec::new();
        // The uppermost station of the reach that begins at each node.
        let mut at_node: Vec<Option<usize>> = vec![None; network.nodes.len()];
        for (index, path) in paths.list.iter().enumerate() {
            let first = steps.len();
            let mut below = at_node[network.reaches[path.reaches[0]].to];
            for &r in &path.reaches {
                let reach = &network.reaches[r];
                let mut leaps = into[reach.to].len() >= 2;
                for station in own_stations(network, r, out[reach.to].is_empty()).iter().rev() {
                    let (Some(z), Some(area)) = (station.elevation_m, station.area_m2) else { continue };
                    let s = paths.down[reach.to] + (reach.length - station.along).max(0.0);
                    if z.is_finite() && area.is_finite() && area > 0.0 {
                        steps.push(Step { at: station.at, s, z, area, below, leaps });
                        below = Some(steps.len() - 1);
                        leaps = false;
                    }
                }
                at_node[reach.from] = below;
            }
            if steps.len() >= first + 2 {
                runs.push(Run { path: index, first, end: steps.len() });
            }
        }
        Self { steps, runs }
    }

    pub fn of_run(&self, run: &Run) -> &[Step] {
        &self.steps[run.first..run.end]
    }

    /// χ = ∫ (A₀/A)^θ ds from each outlet upward, A₀ = 1 m², by trapezoids; across a junction the area above it
    /// holds for the whole step.
    pub fn chi(&self, theta: f64) -> Vec<f64> {
        let weight: Vec<f64> = self.steps.iter().map(|s| s.area.powf(-theta)).collect();
        let mut chi = vec![0.0; self.steps.len()];
        for (i, step) in self.steps.iter().enumerate() {
            if let Some(below) = step.below {
                let lower = if step.leaps { weight[i] } else { weight[below] };
                chi[i] = chi[below] + 0.5 * (lower + weight[i]) * (step.s - self.steps[below].s).max(0.0);
            }
        }
        chi
    }
}

/// Elevations upward that never fall: each the highest so far, as if the channel were filled.
pub(super) fn filled(steps: &[Step]) -> Vec<f64> {
    steps
        .iter()
        .scan(f64::NEG_INFINITY, |highest, step| {
            *highest = highest.max(step.z);
            Some(*highest)
        })
        .collect()
}

/// Distance from the outlet at which a filled profile first reaches `z`, between stations by proportion; held at
/// the ends.
pub(super) fn reached_at(steps: &[Step], filled: &[f64], z: f64) -> f64 {
    let above = filled.partition_point(|h| *h < z);
    match (above.checked_sub(1), steps.get(above)) {
        (None, _) => steps[0].s,
        (_, None) => steps[steps.len() - 1].s,
        (Some(below), Some(step)) => {
            let share = (z - filled[below]) / (filled[above] - filled[below]);
            steps[below].s + share * (step.s - steps[below].s)
        }
    }
}

/// The fall over which slopes tell more than roughness, m: 14 times the noise of elevation along the channels
/// (slopes within about 10 %), at least a fortieth and at most a quarter of the relief. `None` without relief.
pub(super) fn drop_by_roughness(ascent: &Ascent) -> Option<f64> {
    let mut bends = Vec::new();
    let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
    for run in &ascent.runs {
        let steps = ascent.of_run(run);
        // The second difference of white noise has 6 times its variance.
        bends.extend(steps.windows(3).map(|w| (w[0].z - 2.0 * w[1].z + w[2].z) / 6f64.sqrt()));
        for step in steps {
            (low, high) = (low.min(step.z), high.max(step.z));
        }
    }
    let relief = high - low;
    // The mean size, not the median: whole metres leave most differences 0.
    let noise = bends.iter().map(|b| b.abs()).sum::<f64>() / bends.len().max(1) as f64 * MEAN_SIZE;
    (relief > 0.0 && relief.is_finite()).then(|| (14.0 * noise).clamp(relief / 40.0, relief / 4.0))
}

/// √(π/2): standard deviation over mean size of normal noise.
const MEAN_SIZE: f64 = 1.253_314_137_315_500_3;
