//! Drainage on surfaces whose answer is known.
//!
//! Source of the figures: SCIENCE.md H1–H4 and `checks.json` (H02, H04, H05, H06, H08). Their border cells hold one
//! cell and pass nothing on, so the rasters here are the 99 × 99 cells inside.

use ventifact::assert_close;
use ventifact::ground::{Grid, Work};
use ventifact::science::drainage::accumulate::area;
use ventifact::science::drainage::cells::Cells;
use ventifact::science::drainage::condition::Conditioned;
use ventifact::science::drainage::d8::receivers;
use ventifact::science::drainage::routing::Router;

const ROUTERS: [Router; 4] = [Router::D8, Router::DInfinity, Router::Freeman, Router::Quinn];
/// Cells of a side, and the column and row of the middle.
const SIDE: usize = 99;
const MIDDLE: isize = 49;

/// Contributing area on a surface given by (x east, y north) from the middle, in cells.
fn areas(router: Router, z: impl Fn(f64, f64) -> f64) -> Grid<f64> {
    let surface = Grid::from_fn(SIDE, SIDE, |col, row| {
        z((col as isize - MIDDLE) as f64, (MIDDLE - row as isize) as f64) as f32
    });
    let (cells, quiet) = (Cells::square(1.0, SIDE), Work::quiet());
    let surface = Conditioned::untouched(&surface, &cells, &quiet).expect("not stopped");
    let receivers = receivers(&surface, &cells, &quiet).expect("not stopped");
    area(&surface, &cells, router, &receivers, &quiet).expect("not stopped")
}

#[test]
fn an_inward_cone_sends_everything_to_its_pit() {
    for router in ROUTERS {
        let area = areas(router, f64::hypot);
        assert_close!(area.at(49, 49), 9801.0, 1e-8, "{router:?}");
    }
}

#[test]
fn an_outward_cone_has_half_its_radius_as_specific_area() {
    let want = [(0.53247, 0.89242), (0.11741, 0.90423), (0.07685, 1.07583), (0.12381, 1.11968)];
    for (router, (rms, mean)) in ROUTERS.into_iter().zip(want) {
        let area = areas(router, |x, y| -x.hypot(y));
        let mut ratios = Vec::new();
        for row in 0..SIDE {
            for col in 0..SIDE {
                let r = (col as f64 - 49.0).hypot(row as f64 - 49.0);
                if r > 20.0 && r < 45.0 {
                    ratios.push(area.at(col, row) / (0.5 * r));
                }
            }
        }
        let n = ratios.len() as f64;
        let got_mean = ratios.iter().sum::<f64>() / n;
        let got_rms = (ratios.iter().map(|q| (q - 1.0).powi(2)).sum::<f64>() / n).sqrt();
        println!("{router:?} {got_rms} {got_mean}");
        assert_close!(got_rms, rms, 0.01 * rms, "{router:?} rms");
        assert_close!(got_mean, mean, 0.01 * mean, "{router:?} mean");
    }
}

#[test]
fn a_valley_gathers_its_rows() {
    for (router, want) in
        [(Router::D8, [990.0, 4950.0, 8910.0]), (Router::DInfinity, [679.909, 4639.09, 8599.09])]
    {
        let area = areas(router, |x, y| x.abs() + 0.1 * y);
        // Row 10 of the 101 is the tenth inside.
        for (row, want) in [9, 49, 89].into_iter().zip(want) {
            assert_close!(area.at(49, row), want, 0.01, "{router:?} at row {row}");
        }
    }
}
