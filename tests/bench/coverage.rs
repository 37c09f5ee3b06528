//! Does the 95 % interval cover in 95 of 100 scenes, and does pure speckle claim a trend in 5 of 100?
//!
//! `cargo bench --bench coverage` runs 400 scenes of each; goals: coverage 93–97 %, false claims ≤ 6.5 %.

mod scenes;

use rayon::prelude::*;
use scenes::{Kind, run, shares};

const SCENES: u64 = 400;
const SIZE: usize = 320;

fn main() {
    // Test runners pass flags; a bench has nothing to do with them.
    let kinds = [
        Kind { looks: 4.0, amplitude: 0.5, spacing: 12.0, spread_deg: 10.0 },
        Kind { looks: 4.0, amplitude: 0.25, spacing: 16.0, spread_deg: 15.0 },
        Kind { looks: 1.0, amplitude: 0.5, spacing: 20.0, spread_deg: 20.0 },
        Kind { looks: 3.0, amplitude: 0.3, spacing: 10.0, spread_deg: 8.0 },
    ];
    let per_kind = SCENES / kinds.len() as u64;
    let mut all = Vec::new();
    for (k, kind) in kinds.into_iter().enumerate() {
        let first = k as u64 * per_kind;
        let outcomes: Vec<_> =
            (first..first + per_kind).into_par_iter().map(|i| run(kind, SIZE, i)).collect();
        let (claimed, covered, rms) = shares(&outcomes);
        println!(
            "{kind:?}: claimed {:.1} %, covered {:.1} %, RMS {rms:.2}°",
            100.0 * claimed,
            100.0 * covered
        );
        all.extend(outcomes);
    }
    println!("all {} scenes: covered {:.1} % (goal 93–97 %)", all.len(), 100.0 * shares(&all).1);
    for looks in [1.0, 4.0] {
        let kind = Kind { looks, amplitude: 0.0, spacing: 12.0, spread_deg: 0.0 };
        let outcomes: Vec<_> = (0..SCENES).into_par_iter().map(|i| run(kind, SIZE, 10_000 + i)).collect();
        println!(
            "pure speckle, {looks} look(s), {SCENES} scenes: claimed {:.1} % (goal ≤ 6.5 %)",
            100.0 * shares(&outcomes).0
        );
    }
}
