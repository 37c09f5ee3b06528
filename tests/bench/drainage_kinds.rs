//! Simulated drainage of five kinds: least-cost networks on a disc of cells whose ground is even, tilted, folded,
//! jointed or domed.

use std::cmp::Reverse;
use std::collections::BinaryHeap;
use std::f64::consts::TAU;

use rand::Rng as _;
use rand_distr::{Distribution as _, StandardNormal};

use ventifact::ground::{FlowSense, Network, NetworkNode, Point, Polyline, Reach, ReachOrigin, Seed};

/// In the order of `PATTERN_NAMES`.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    Dendritic,
    Parallel,
    Trellis,
    Rectangular,
    Radial,
}

pub const KINDS: [Kind; 5] =
    [Kind::Dendritic, Kind::Parallel, Kind::Trellis, Kind::Rectangular, Kind::Radial];

const STEPS: [(i64, i64); 8] = [(1, 0), (1, 1), (0, 1), (-1, 1), (-1, 0), (-1, -1), (0, -1), (1, -1)];

/// The ground of one draw: what a step costs.
struct Ground {
    kind: Kind,
    size: usize,
    /// Direction of the tilt, the folds, or one set of joints.
    turn: f64,
    /// How much the structure counts.
    strength: f64,
    /// Of the dome, in cells.
    centre: (f64, f64),
    /// Places of valleys or joints across and along `turn`, cells from the middle.
    lines: [Vec<f64>; 2],
    /// Where ridges may be crossed, by valley.
    gaps: Vec<Vec<f64>>,
    noise: Vec<f64>,
    /// Half the width of the side where water leaves, of the disc's radius; 0 for one place.
    mouth: f64,
}

/// A network of one kind; `index` chooses the draw.
pub fn draw(kind: Kind, seed: Seed, index: u64) -> Network {
    let mut random = seed.stream("drainage", index * 5 + kind as u64);
    let size = random.random_range(60..120usize);
    let turn = random.random::<f64>() * TAU;
    let roughness = random.random_range(0.5..1.5);
    let mut lines = || {
        let mut at = -(size as f64);
        let spacing = random.random_range(7.0..14.0);
        let mut all = Vec::new();
        while at < size as f64 {
            at += spacing * random.random_range(0.6..1.4);
            all.push(at);
        }
        all
    };
    let lines = [lines(), lines()];
    let gaps =
        lines[0].iter().map(|_| (0..4).map(|_| (random.random::<f64>() - 0.5) * size as f64).collect());
    let gaps = gaps.collect();
    let off = |r: &mut rand_chacha::ChaCha8Rng| size as f64 * (0.5 + r.random_range(-0.12..0.12));
    let centre = (off(&mut random), off(&mut random));
    let noise = (0..size * size)
        .map(|_| {
            let z: f64 = StandardNormal.sample(&mut random);
            (roughness * z).exp()
        })
        .collect();
    let strength = 0.15 * 13f64.powf(random.random());
    let mouth = if random.random::<bool>() { 0.0 } else { random.random_range(0.1..0.9) };
    let ground = Ground { kind, size, turn, strength, centre, lines, gaps, noise, mouth };
    let threshold = random.random_range(12..40);
    ground.network(threshold)
}

impl Ground {
    fn place(&self, cell: usize) -> (f64, f64) {
        ((cell % self.size) as f64 + 0.5, (cell / self.size) as f64 + 0.5)
    }

    /// Along and across `turn`, from the middle.
    fn turned(&self, p: (f64, f64)) -> (f64, f64) {
        let (x, y) = (p.0 - 0.5 * self.size as f64, p.1 - 0.5 * self.size as f64);
        let (sin, cos) = self.turn.sin_cos();
        (x * cos + y * sin, y * cos - x * sin)
    }

    fn inside(&self, cell: usize) -> bool {
        let (along, across) = self.turned(self.place(cell));
        along.hypot(across) < 0.5 * self.size as f64 - 1.0
    }

    /// What water pays to flow by `step` out of `from` into `to`.
    fn cost(&self, from: usize, to: usize, step: (i64, i64)) -> f64 {
        let length = (step.0 as f64).hypot(step.1 as f64);
        let (sin, cos) = self.turn.sin_cos();
        let dir = (step.0 as f64 / length, step.1 as f64 / length);
        let along = dir.0 * cos + dir.1 * sin;
        let place = self.turned(self.place(from));
        let near =
            |lines: &[f64], at: f64| lines.iter().map(|l| (l - at).abs()).fold(f64::INFINITY, f64::min);
        let k =
            self.strength.max(if matches!(self.kind, Kind::Trellis | Kind::Rectangular) { 0.5 } else { 0.0 });
        let factor = match self.kind {
            Kind::Dendritic if self.mouth > 0.0 => 1.0 + 0.5 * k * (1.0 - along),
            Kind::Dendritic => 1.0,
            Kind::Parallel => 1.0 + 12.0 * k * (1.0 - along),
            Kind::Radial => {
                let p = self.place(from);
                let out = (p.0 - self.centre.0, p.1 - self.centre.1);
                let r = out.0.hypot(out.1).max(1e-9);
                1.0 + 12.0 * k * (1.0 - (dir.0 * out.0 + dir.1 * out.1) / r)
            }
            Kind::Trellis => {
                // Valleys along the folds; between them water runs straight across to the next valley, and
                // leaves it by gaps only.
                let to_place = self.turned(self.place(to));
                let (before, after) = (near(&self.lines[0], place.1), near(&self.lines[0], to_place.1));
                if before < 0.8 && after < 0.8 {
                    0.25
                } else {
                    let away = after > before;
                    let valley =
                        self.lines[0].iter().position(|l| (l - place.1).abs() <= before).unwrap_or(0);
                    let by_gap = self.gaps[valley].iter().any(|g| (g - place.0).abs() < 1.5);
                    let ridge = if away && !by_gap { 30.0 * k } else { 1.0 };
                    ridge * (1.0 + 4.0 * k * along.abs())
                }
            }
            Kind::Rectangular => {
                let on = |p: (f64, f64)| near(&self.lines[0], p.1) < 0.8 || near(&self.lines[1], p.0) < 0.8;
                let to_place = self.turned(self.place(to));
                if on(place) && on(to_place) { 0.15 } else { 1.0 + 2.0 * k }
            }
        };
        factor * length * self.noise[to].max(0.05)
    }

    /// Cells where water leaves.
    fn is_outlet(&self, cell: usize) -> bool {
        let (along, across) = self.turned(self.place(cell));
        let r = 0.5 * self.size as f64;
        if along.hypot(across) < r - 2.5 {
            return false;
        }
        match self.kind {
            Kind::Radial => true,
            Kind::Parallel => along > 0.3 * r,
            Kind::Dendritic | Kind::Rectangular => across.abs() < (self.mouth * r).max(1.0) && along > 0.0,
            Kind::Trellis => along.abs() < (self.mouth * r).max(1.0) && across > 0.0,
        }
    }

    fn network(&self, threshold: usize) -> Network {
        let n = self.size * self.size;
        let inside: Vec<bool> = (0..n).map(|c| self.inside(c)).collect();
        let mut way = vec![f64::INFINITY; n];
        let mut down = vec![usize::MAX; n];
        let mut heap = BinaryHeap::new();
        for cell in (0..n).filter(|c| inside[*c] && self.is_outlet(*c)) {
            way[cell] = 0.0;
            heap.push(Reverse((0u64, cell)));
        }
        let mut sequence = Vec::new();
        let mut done = vec![false; n];
        while let Some(Reverse((_, cell))) = heap.pop() {
            if std::mem::replace(&mut done[cell], true) {
                continue;
            }
            sequence.push(cell);
            for step in STEPS {
                // The neighbour from which water comes here by `step`.
                let (x, y) = ((cell % self.size) as i64 - step.0, (cell / self.size) as i64 - step.1);
                let Some(from) = (x >= 0 && y >= 0 && x < self.size as i64 && y < self.size as i64)
                    .then(|| x as usize + y as usize * self.size)
                    .filter(|c| inside[*c])
                else {
                    continue;
                };
                let cost = way[cell] + self.cost(from, cell, step);
                if cost < way[from] {
                    way[from] = cost;
                    down[from] = cell;
                    heap.push(Reverse((cost.to_bits(), from)));
                }
            }
        }
        let mut area = vec![1usize; n];
        for &cell in sequence.iter().rev() {
            if down[cell] != usize::MAX {
                area[down[cell]] += area[cell];
            }
        }
        let is_channel = |c: usize| inside[c] && done[c] && area[c] >= threshold;
        let mut above = vec![0; n];
        (0..n).filter(|c| is_channel(*c) && down[*c] != usize::MAX).for_each(|c| above[down[c]] += 1);
        self.traced(&is_channel, &above, &down)
    }

    /// Channels from head or junction to junction or outlet.
    fn traced(&self, is_channel: &dyn Fn(usize) -> bool, above: &[usize], down: &[usize]) -> Network {
        let point = |c: usize| Point::new(self.place(c).0, self.place(c).1);
        let mut network = Network::default();
        let mut node_of = std::collections::HashMap::new();
        let mut node = |c: usize, network: &mut Network| {
            *node_of.entry(c).or_insert_with(|| {
                network.nodes.push(NetworkNode { at: point(c), elevation_m: None });
                network.nodes.len() - 1
            })
        };
        for first in (0..above.len()).filter(|c| is_channel(*c) && above[*c] != 1 && down[*c] != usize::MAX) {
            let mut line = vec![point(first)];
            let mut at = first;
            loop {
                at = down[at];
                line.push(point(at));
                if above[at] != 1 || down[at] == usize::MAX {
                    break;
                }
            }
            let line = Polyline(line);
            let (from, to) = (node(first, &mut network), node(at, &mut network));
            network.reaches.push(Reach {
                from,
                to,
                length: line.length(),
                line,
                sense: FlowSense::of_elevation(),
                order: None,
                width: None,
                stations: Vec::new(),
                origin: ReachOrigin::Elevation,
                confidence: 1.0,
            });
        }
        network.ordered()
    }
}
