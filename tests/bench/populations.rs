//! How well two populations are told apart, and how often one is taken for two. `cargo bench --bench populations`;
//! the bar is axes within 3° and weights within 0.07, and at most one false split in twenty.

mod population_scenes;

use population_scenes::{Lie, Single, Two, errors, found};

const SIZE: usize = 512;
const SCENES: u64 = 50;

fn main() {
    println!("two populations, one at three times the spacing, {SIZE}² px: worst of six fields each");
    for lie in [Lie::Superposed, Lie::Beside] {
        for apart in [40.0, 70.0] {
            for looks in [None, Some(4.0)] {
                for coarse in [1.0, 2.0, 0.5] {
                    let (mut axis, mut weight, mut missed) = (0.0f64, 0.0f64, Vec::new());
                    for seed in 0..6u64 {
                        let trend = 31.0 * seed as f64;
                        let truth = Two { lie, trend, apart, coarse, looks, seed }.draw(SIZE);
                        let got = found(&truth.image, truth.logarithm);
                        match errors(&got, &truth) {
                            Some([a, w]) => (axis, weight) = (axis.max(a), weight.max(w)),
                            None => missed.push(got.iter().map(|p| p.axis.deg().round()).collect::<Vec<_>>()),
                        }
                    }
                    let looks = looks.map_or("none".to_owned(), |l| l.to_string());
                    println!(
                        "  {lie:?} {apart}°, coarse × {coarse}, looks {looks}: axes {axis:.1}°, weights {weight:.3}, not two: {missed:?}"
                    );
                }
            }
        }
    }
    println!("one population taken for two, of {SCENES} fields each:");
    for single in Single::ALL {
        for looks in [None, Some(4.0)] {
            let split: Vec<u64> = (0..SCENES)
                .filter(|seed| !found(&single.draw(SIZE, looks, 1000 + seed), looks.is_some()).is_empty())
                .collect();
            let looks = looks.map_or("none".to_owned(), |l| l.to_string());
            println!("  {single:?}, looks {looks}: {} {split:?}", split.len());
        }
    }
}
