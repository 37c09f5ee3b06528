//! Proposed networks on synthetic scenes of known truth: recall, precision and width by contrast, looks and width;
//! chance finds on pure speckle; time on 16.8 million pixels.

mod rivers;

use std::time::Instant;

use ventifact::ground::{Seed, Work};
use ventifact::science::channel::detect::{ChannelTone, detect};
use ventifact::science::scene::speckle;
use ventifact::science::scene::waterways::Look;

fn main() {
    println!(
        "tone  looks  widths            recall  precision  loops(1)  width: share found, measured less true"
    );
    for tone in [0.38, 0.6, 1.0 / 0.38] {
        for looks in [1.0, 4.0, 16.0] {
            for widths in
                [&[40.0, 16.0, 8.0, 4.0, 2.0][..], &[16.0, 8.0, 4.0, 2.0], &[8.0, 4.0, 2.0], &[4.0, 2.0]]
            {
                let look = Look { tone, mixed: false, looks: Some(looks), gap_px: 0.0 };
                let s = rivers::run(800, widths, look, 0);
                let by: Vec<String> =
                    s.by_width.iter().map(|(w, share, bias)| format!("{w}: {share:.2} {bias:+.2}")).collect();
                let names: Vec<String> = widths.iter().map(f64::to_string).collect();
                println!(
                    "{tone:4.2}  {looks:5}  {:16}  {:6.3}  {:9.3}  {:8}  {}",
                    names.join(" "),
                    s.recall,
                    s.precision,
                    s.loops,
                    by.join(",  ")
                );
            }
        }
    }
    for looks in [1.0, 4.0, 16.0] {
        let found: Vec<usize> = (0..4)
            .map(|seed| {
                let image = speckle(1024, 1024, looks, &mut Seed(seed).stream("bench.waterways", 0));
                let settings = rivers::settings(ChannelTone::Dark);
                let found = detect(&image, true, &settings, &Work::quiet()).expect("not stopped");
                found.map_or(0, |f| f.network.reaches.len())
            })
            .collect();
        println!("pure speckle, {looks} looks: reaches in 1.05 million pixels, four times: {found:?}");
    }
    let image = speckle(4096, 4096, 4.0, &mut Seed(9).stream("bench.waterways", 0));
    let start = Instant::now();
    let settings = rivers::settings(ChannelTone::Dark);
    let reaches =
        detect(&image, true, &settings, &Work::quiet()).map(|f| f.map_or(0, |f| f.network.reaches.len()));
    println!("4096 x 4096: {reaches:?} reaches in {:.1} s of wall time", start.elapsed().as_secs_f64());
}
