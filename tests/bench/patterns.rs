//! Moments of the pattern features over simulated networks of each kind, for `science/network/kinds.rs`, and the
//! confusion of the probabilities on other draws.
//!
//! `cargo bench --bench patterns`

mod drainage_kinds;

use drainage_kinds::{KINDS, Kind, draw};
use ventifact::ground::{Place, Seed, Work};
use ventifact::science::network::junctions::junctions;
use ventifact::science::network::pattern::{PATTERN_NAMES, Pattern, coordinates, pattern};

const DRAWS: u64 = 300;
const CHORD: f64 = 8.0;

fn measured(kind: Kind, seed: Seed, index: u64) -> Pattern {
    let network = draw(kind, seed, index);
    let place = Place::pixels(0.0);
    let found = junctions(&network, &place, CHORD, Seed(1), &Work::quiet()).expect("nobody stops");
    pattern(&network, &found, &place, None)
}

fn main() {
    println!("// Moments, seed 1:");
    for kind in KINDS {
        let rows: Vec<[f64; 6]> = (0..DRAWS)
            .map(|i| measured(kind, Seed(1), i))
            .filter(|p| !p.too_few)
            .filter_map(|p| {
                let all = coordinates(&p.features);
                all.iter().all(Option::is_some).then(|| all.map(Option::unwrap_or_default))
            })
            .collect();
        let n = rows.len() as f64;
        let mean: [f64; 6] = std::array::from_fn(|k| rows.iter().map(|r| r[k]).sum::<f64>() / n);
        let moment = |i: usize, j: usize| {
            rows.iter().map(|r| (r[i] - mean[i]) * (r[j] - mean[j])).sum::<f64>() / (n - 1.0)
        };
        println!("// {kind:?}, {} networks\nKind {{", rows.len());
        println!("    mean: [{}],", mean.map(|m| format!("{m:.4}")).join(", "));
        println!("    covariance: [");
        for i in 0..6 {
            let row: [String; 6] = std::array::from_fn(|j| format!("{:.6}", moment(i, j)));
            println!("        [{}],", row.join(", "));
        }
        println!("    ],\n}},");
    }
    println!("Confusion, seed 2: rows truth, columns the most probable; mean probability of the truth");
    println!("{:>12} {}", "", PATTERN_NAMES.map(|n| format!("{n:>12}")).join(" "));
    for (k, kind) in KINDS.into_iter().enumerate() {
        let mut counts = [0usize; 5];
        let (mut truth, mut all) = (0.0, 0.0);
        for p in (0..DRAWS).filter_map(|i| measured(kind, Seed(2), i).probabilities) {
            let best = (0..5).max_by(|a, b| p[*a].total_cmp(&p[*b])).unwrap_or(0);
            counts[best] += 1;
            truth += p[k];
            all += 1.0;
        }
        let row = counts.map(|c| format!("{c:>12}")).join(" ");
        println!("{:>12} {row} {:.3}", PATTERN_NAMES[k], truth / all);
    }
}
